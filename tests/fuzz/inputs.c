/* Any bytes as a sheet or a NEF file, through the molecule to the mapped restraints. What is accepted must hold together: limits in
 * order, atoms in range, every alternative with pairs. What is refused says why. */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "input/draft.h"
#include "restraint/map.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

static void demand(bool good) {
    if (!good) abort();
}

static void must_hold_together(const tml_problem *problem) {
    const tml_restraints *r = &problem->restraints;
    for (int32_t i = 0; i < r->group_atom_count; i++) demand(r->group_atoms[i] >= 0 && r->group_atoms[i] < problem->molecule.atom_count);
    for (int32_t i = 0; i < r->distance_count; i++) {
        const tml_distance_restraint *d = &r->distances[i];
        demand(d->lower >= 0 && isfinite(d->lower) && d->upper >= d->lower);
        demand(d->weight >= 0 && isfinite(d->weight));
        demand(d->alternative_count > 0 && d->first_alternative + d->alternative_count <= r->alternative_count);
        for (int32_t k = 0; k < d->alternative_count; k++) demand(r->alternatives[d->first_alternative + k].pair_count > 0);
    }
    for (int32_t i = 0; i < r->interval_count; i++)
        demand(r->intervals[i].lower <= r->intervals[i].upper && r->intervals[i].upper <= r->intervals[i].lower + 6.2832);
    for (int32_t i = 0; i < r->unmapped_count; i++) demand(r->unmapped[i].reason[0] != '\0');
}

static tml_status read(tml_draft *draft, const char *text, size_t length, tml_error *error) {
    tml_problem *problem = draft->problem;
    tml_star star = {0};
    tml_status status;
    if (tml_is_sheet(text)) {
        status = tml_read_sheet(draft, text, 0, error);
    } else {
        status = tml_star_parse(text, length, "fuzz", &star, error);
        if (status == TML_OK) status = tml_read_nef(draft, &star, 0, error);
        tml_star_clear(&star);
    }
    if (status == TML_OK) status = tml_molecule_build(&draft->outline, problem->files, problem->pool, &problem->molecule, error);
    return status == TML_OK ? tml_restraints_map(&draft->rows, problem, error) : status;
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
    char *text = malloc(size + 1);
    tml_problem *problem = calloc(1, sizeof *problem);
    demand(text != NULL && problem != NULL);
    memcpy(text, data, size);
    text[size] = '\0';
    problem->pool = tml_strings_new();
    problem->files = calloc(1, sizeof *problem->files);
    demand(problem->pool != NULL && problem->files != NULL);
    problem->files[0] = "fuzz";
    problem->file_count = problem->file_capacity = 1;
    problem->title = "";
    tml_draft draft = {.problem = problem};
    tml_error error = {0};
    tml_status status = read(&draft, text, strlen(text), &error); /* no '\0' within, as the reader of files hands it on */
    if (status == TML_OK)
        must_hold_together(problem);
    else
        demand((status == TML_BAD_INPUT || status == TML_TOO_LARGE) && error.message[0] != '\0');
    tml_outline_clear(&draft.outline);
    tml_rows_clear(&draft.rows);
    tml_problem_free(problem);
    free(text);
    return 0;
}

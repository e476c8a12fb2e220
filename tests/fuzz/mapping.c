/* Any bytes as a sheet, NEF or NMR-STAR file beside a small molecule: what is mapped lies inside the molecule and adds up, and can be
 * measured. */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "input/draft.h"
#include "restraint/map.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

/* The molecule that the input's restraints meet: names that a fuzzer finds easily. */
static const char MOLECULE[] = "sheet 1\nsequence A 1 ALA VAL ILE PHE\nsequence B 1 GLY LYS\natom C1 C\natom C2 C\natom B1 bead\n";

static tml_status read_input(tml_draft *draft, const char *text, size_t length, tml_error *error) {
    if (tml_is_sheet(text)) return tml_read_sheet(draft, text, 1, error);
    tml_star star;
    tml_status status = tml_star_parse(text, length, "fuzz", &star, error);
    if (status == TML_OK) status = tml_is_nmrstar(&star) ? tml_read_nmrstar(draft, &star, 1, error) : tml_read_nef(draft, &star, 1, error);
    tml_star_clear(&star);
    return status;
}

static void check_group(const tml_problem *problem, int32_t first, int32_t count) {
    const tml_restraints *r = &problem->restraints;
    if (first < 0 || count < 1 || first + count > r->group_atom_count) abort();
    for (int32_t i = first; i < first + count; i++)
        if (r->group_atoms[i] < 0 || r->group_atoms[i] >= problem->molecule.atom_count) abort();
}

static void check_distance(const tml_problem *problem, const tml_distance_restraint *d, const double *xyz) {
    const tml_restraints *r = &problem->restraints;
    int64_t pairs = 0;
    if (!(d->lower >= 0) || !(d->upper >= d->lower) || isinf(d->lower) || !(d->weight >= 0) || isinf(d->weight)) abort();
    if (d->alternative_count < 1 || d->first_alternative + d->alternative_count > r->alternative_count) abort();
    for (int32_t k = d->first_alternative; k < d->first_alternative + d->alternative_count; k++) {
        const tml_alternative *alternative = &r->alternatives[k];
        check_group(problem, alternative->first_a, alternative->count_a);
        check_group(problem, alternative->first_b, alternative->count_b);
        if (alternative->pair_count < 1) abort();
        if (alternative->stereo_a < -1 || alternative->stereo_a >= r->stereo_count) abort();
        if (alternative->stereo_b < -1 || alternative->stereo_b >= r->stereo_count) abort();
        pairs += alternative->pair_count;
    }
    if (pairs != d->pair_count) abort();
    if (isnan(tml_distance_violation(r, d, NULL, xyz))) abort();
    bool *swapped = calloc((size_t)r->stereo_count + 1, sizeof *swapped);
    if (swapped == NULL) return;
    for (int32_t i = 0; i < r->stereo_count; i++) swapped[i] = i % 2 == 0;
    if (!isfinite(tml_distance_violation(r, d, swapped, xyz))) abort();
    free(swapped);
}

static void check_dihedral(const tml_problem *problem, const tml_dihedral_restraint *d, const double *xyz) {
    const tml_restraints *r = &problem->restraints;
    if (d->interval_count < 1 || d->first_interval + d->interval_count > r->interval_count) abort();
    for (int32_t k = d->first_interval; k < d->first_interval + d->interval_count; k++) {
        const tml_dihedral_interval *interval = &r->intervals[k];
        if (!(interval->lower <= interval->upper) || !(interval->upper - interval->lower < 6.2832)) abort();
        for (int a = 0; a < 4; a++)
            if (interval->atoms[a] < 0 || interval->atoms[a] >= problem->molecule.atom_count) abort();
    }
    double off = tml_dihedral_violation(r, d, xyz);
    if (!(off >= 0) || off > 3.1416) abort();
}

static void check_problem(const tml_problem *problem) {
    const tml_restraints *r = &problem->restraints;
    double *xyz = calloc((size_t)problem->molecule.atom_count * 3 + 1, sizeof *xyz);
    if (xyz == NULL) return;
    for (int32_t i = 0; i < problem->molecule.atom_count * 3; i++) xyz[i] = 10 * sin(1 + i * 1.7);
    for (int32_t i = 0; i < r->distance_count; i++) check_distance(problem, &r->distances[i], xyz);
    for (int32_t i = 0; i < r->dihedral_count; i++) check_dihedral(problem, &r->dihedrals[i], xyz);
    for (int32_t i = 0; i < r->unmapped_count; i++)
        if (*r->unmapped[i].reason == '\0') abort();
    free(xyz);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
    static const char *files[2] = {"molecule", "fuzz"};
    static const tml_read_options OPTIONS = {0};
    tml_error error = {0};
    tml_problem *problem = calloc(1, sizeof *problem);
    char *text = malloc(size + 1);
    if (problem == NULL || text == NULL) abort();
    memcpy(text, data, size);
    text[size] = '\0';
    problem->pool = tml_strings_new();
    problem->title = "";
    problem->files = calloc(2, sizeof *problem->files);
    if (problem->pool == NULL || problem->files == NULL) abort();
    memcpy(problem->files, files, sizeof files);
    problem->file_count = 2;

    tml_draft draft = {.problem = problem};
    tml_status status = tml_read_sheet(&draft, MOLECULE, 0, &error);
    if (status == TML_OK) status = read_input(&draft, text, strlen(text), &error);
    if (status == TML_OK) status = tml_molecule_build(&draft.outline, problem->files, problem->pool, &problem->molecule, &error);
    if (status == TML_OK) status = tml_restraints_map(&draft.rows, &OPTIONS, problem, &error);
    if (status == TML_OK)
        check_problem(problem);
    else if ((status != TML_BAD_INPUT && status != TML_TOO_LARGE) || *error.message == '\0')
        abort();
    tml_outline_clear(&draft.outline);
    tml_rows_clear(&draft.rows);
    tml_problem_free(problem);
    free(text);
    return 0;
}

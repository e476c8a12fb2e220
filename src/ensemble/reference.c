/* reference.c: the comparison's last step: what the reference has in common with the models, which of its own models stands for
 * it, which way its chains fit best, and how far all are from it.
 */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/superpose.h"
#include "ensemble/compare.h"

typedef struct fitting {
    tml_comparison *c;
    tml_reference *reference;
    int32_t *to;                   /* of each atom of the comparison: the reference's site in all of its models, or -1 */
    bool *usable;                  /* of each site of the reference: all of its models have it */
    int32_t *common, common_count; /* fitted atoms that have one */
    double *places, **xyz;         /* the reference in the comparison's atoms, model by model; 0 where it lacks the atom */
    int threads;
    const tml_watch *watch;
    tml_error *error;
} fitting;

static tml_status open_fitting(fitting *f);
static void close_fitting(fitting *f);
static bool make_match(fitting *f);
static void list_common(fitting *f);
static tml_status find_medoid(fitting *f);
static bool choose_way(fitting *f);
static void measure_all(fitting *f);

tml_status tml_compare_reference(tml_comparison *c, int threads, const tml_watch *watch, tml_error *error) {
    fitting f = {.c = c, .reference = &c->reference, .threads = threads, .watch = watch, .error = error};
    tml_status status = open_fitting(&f);
    if (status == TML_OK) {
        list_common(&f);
        if (f.common_count == 0)
            status = tml_fail(error, TML_BAD_INPUT,
                              "the reference has none of the %d superposed atoms: chains, residue numbers or names differ",
                              c->fitted_count);
    }
    if (status == TML_OK) status = find_medoid(&f);
    if (status == TML_OK && choose_way(&f)) status = find_medoid(&f);
    if (status == TML_OK) measure_all(&f);
    close_fitting(&f);
    return status;
}

void tml_reference_clear(tml_reference *reference) {
    tml_coordinates_clear(&reference->coordinates);
    tml_match_free(reference->match);
    free(reference->rmsd);
    *reference = (tml_reference){0};
}

static tml_status open_fitting(fitting *f) {
    const tml_coordinates *of = &f->reference->coordinates;
    size_t atoms = (size_t)f->c->atom_count, cells;
    if (__builtin_mul_overflow(3 * atoms, (size_t)of->model_count, &cells)) return tml_no_memory(f->error);
    f->to = tml_alloc(atoms, sizeof *f->to);
    f->common = tml_alloc(atoms, sizeof *f->common);
    f->usable = tml_alloc(of->atom_count, sizeof *f->usable);
    f->places = tml_alloc(cells, sizeof *f->places);
    f->xyz = tml_alloc((size_t)of->model_count, sizeof *f->xyz);
    f->reference->rmsd = tml_alloc((size_t)f->c->model_count, sizeof *f->reference->rmsd);
    if (f->to == NULL || f->common == NULL || f->usable == NULL || f->places == NULL || f->xyz == NULL ||
        f->reference->rmsd == NULL)
        return tml_no_memory(f->error);
    for (int32_t m = 0; m < of->model_count; m++) f->xyz[m] = &f->places[3 * atoms * (size_t)m];
    for (size_t a = 0; a < of->atom_count; a++) {
        f->usable[a] = true;
        for (int32_t m = 0; m < of->model_count; m++) f->usable[a] = f->usable[a] && !isnan(tml_coordinates_at(of, m, a)[0]);
    }
    return make_match(f) ? TML_OK : tml_no_memory(f->error);
}

static void close_fitting(fitting *f) {
    free(f->to);
    free(f->common);
    free(f->usable);
    free(f->places);
    free(f->xyz);
}

static bool make_match(fitting *f) {
    tml_comparison *c = f->c;
    bool *counts = tml_alloc(c->models.atom_count, sizeof *counts);
    if (counts == NULL) return false;
    for (int32_t k = 0; k < c->fitted_count; k++) counts[c->sites[c->fitted[k]]] = true;
    tml_status status = tml_match_new(&c->models, &f->reference->coordinates, counts, &f->reference->match, f->error);
    free(counts);
    return status == TML_OK;
}

/* The atoms in common as the match has them now. */
static void list_common(fitting *f) {
    const int32_t *atoms = tml_match_atoms(f->reference->match);
    f->common_count = 0;
    f->reference->common_all = 0;
    for (int32_t i = 0; i < f->c->atom_count; i++) {
        int32_t to = atoms[f->c->sites[i]];
        f->to[i] = to >= 0 && f->usable[to] ? to : -1;
        f->reference->common_all += f->to[i] >= 0;
    }
    for (int32_t k = 0; k < f->c->fitted_count; k++)
        if (f->to[f->c->fitted[k]] >= 0) f->common[f->common_count++] = f->c->fitted[k];
    f->reference->common = f->common_count;
}

static void copy_model(fitting *f, int32_t model) {
    for (int32_t i = 0; i < f->c->atom_count; i++)
        if (f->to[i] >= 0)
            memcpy(&f->xyz[model][3 * (size_t)i], tml_coordinates_at(&f->reference->coordinates, model, (size_t)f->to[i]),
                   3 * sizeof(double));
}

/* The reference's model that is nearest to its others, on the atoms in common. */
static tml_status find_medoid(fitting *f) {
    const int32_t count = f->reference->coordinates.model_count;
    tml_stack stack = {f->xyz, count, f->c->atom_count};
    float *pairs = NULL;
    double *to_others = tml_alloc((size_t)count, sizeof *to_others);
    if (to_others == NULL) return tml_no_memory(f->error);
    for (int32_t m = 0; m < count; m++) copy_model(f, m);
    tml_status status = tml_pairs_measure(&stack, f->common, f->common_count, f->threads, f->watch, &pairs, f->error);
    if (status == TML_OK) f->reference->medoid = tml_pairs_medoid(pairs, count, to_others);
    free(pairs);
    free(to_others);
    return status;
}

static double distance_to(const fitting *f, const double *xyz) {
    tml_motion motion;
    return tml_superpose(xyz, f->xyz[f->reference->medoid], f->common, f->common_count, &motion);
}

/* Of all ways to exchange alike chains the one with which the two medoids agree best; whether it is another than the codes
 * tell. A way that loses atoms does not count. */
static bool choose_way(fitting *f) {
    static const double BETTER = 1e-6; /* Å: less is the noise of rounding */
    tml_match *match = f->reference->match;
    const double *medoid = f->c->xyz[f->c->medoid];
    const int32_t atoms = f->common_count;
    double best = distance_to(f, medoid);
    while (tml_match_next(match)) {
        list_common(f);
        copy_model(f, f->reference->medoid);
        double distance = f->common_count < atoms ? INFINITY : distance_to(f, medoid);
        if (distance > best - BETTER) continue;
        best = distance;
        f->reference->exchanged = true;
        tml_match_keep(match);
    }
    tml_match_restore(match);
    list_common(f);
    copy_model(f, f->reference->medoid);
    return f->reference->exchanged;
}

static void measure_all(fitting *f) {
    tml_comparison *c = f->c;
    tml_reference *reference = f->reference;
    reference->least = INFINITY;
    for (int32_t m = 0; m < c->model_count; m++) {
        reference->rmsd[m] = distance_to(f, c->xyz[m]);
        reference->mean += reference->rmsd[m] / c->model_count;
        reference->least = fmin(reference->least, reference->rmsd[m]);
        reference->greatest = fmax(reference->greatest, reference->rmsd[m]);
    }
    reference->from_mean = distance_to(f, c->mean);
    reference->from_medoid = reference->rmsd[c->medoid];
}

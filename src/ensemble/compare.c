/* compare.c: the comparison step by step.
 *
 *   what takes part    atoms, residues, groups
 *   the core           chosen atoms, and where they hold together
 *   figures            superposition, spread, pairs
 *   clusters
 *   looking up         the public functions
 */
#include "ensemble/compare.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/superpose.h"
#include "input/selection.h"

static tml_status take_inputs(tml_comparison *c, tml_coordinates *models, tml_coordinates *reference,
                              const tml_compare_options *options, tml_error *error);
static tml_status take_part(tml_comparison *c, tml_error *error);
static tml_status choose_atoms(tml_comparison *c, tml_error *error);
static tml_status find_core(tml_comparison *c, tml_error *error);
static tml_status measure(tml_comparison *c, int threads, const tml_watch *watch, tml_error *error);
static tml_status find_clusters(tml_comparison *c, const volatile int *stop, tml_error *error);

void tml_compare_defaults(tml_compare_options *options) {
    *options = (tml_compare_options){.core = "spread", .atoms = "backbone", .cut = -1};
}

static char *copy_text(const char *text) {
    size_t size = strlen(text) + 1;
    char *copy = tml_alloc(size, 1);
    return copy == NULL ? NULL : memcpy(copy, text, size);
}

tml_status tml_compare_coordinates(tml_coordinates *models, tml_coordinates *reference, const tml_compare_options *options,
                                   const tml_watch *watch, tml_comparison **out, tml_error *error) {
    tml_comparison *c = *out = tml_alloc(1, sizeof *c);
    if (c == NULL) return tml_no_memory(error);
    tml_status status = take_inputs(c, models, reference, options, error);
    if (status == TML_OK) status = take_part(c, error);
    if (status == TML_OK) status = choose_atoms(c, error);
    if (status == TML_OK) status = find_core(c, error);
    if (status == TML_OK) status = measure(c, options->threads, watch, error);
    if (status == TML_OK) status = find_clusters(c, watch == NULL ? NULL : watch->stop, error);
    if (status == TML_OK && reference != NULL) status = tml_compare_reference(c, options->threads, watch, error);
    if (status == TML_OK) return TML_OK;
    tml_comparison_free(c);
    *out = NULL;
    return status;
}

void tml_comparison_free(tml_comparison *c) {
    if (c == NULL) return;
    tml_coordinates_clear(&c->models);
    tml_reference_clear(&c->reference);
    void *const owned[] = {c->sites,  c->group_of,  c->residue_of, c->residues, c->unit,    c->candidate,      c->core,
                           c->fitted, c->core_text, c->atoms_text, c->places,   c->xyz,     c->mean,           c->spread,
                           c->order,  c->pairs,     c->to_others,  c->to_mean,  c->cluster, c->representatives};
    for (size_t i = 0; i < sizeof owned / sizeof owned[0]; i++) free(owned[i]);
    free(c);
}

/* ---- what takes part ---- */

/* Numbers so far out that their squares would say nothing are no coordinates. */
static tml_status within_reach(const tml_coordinates *of, const char *what, tml_error *error) {
    static const double FARTHEST = 1e6; /* Å */
    for (size_t i = 0; i < (size_t)of->model_count * of->atom_count * 3; i++)
        if (fabs(of->xyz[i]) > FARTHEST) /* false for NAN, a missing atom */
            return tml_fail(error, TML_BAD_INPUT, "model %zu of the %s has a coordinate of %g Å; %g Å are the most",
                            i / (of->atom_count * 3) + 1, what, of->xyz[i], FARTHEST);
    return TML_OK;
}

static tml_status take_inputs(tml_comparison *c, tml_coordinates *models, tml_coordinates *reference,
                              const tml_compare_options *options, tml_error *error) {
    c->models = *models;
    *models = (tml_coordinates){0};
    if (reference != NULL) {
        c->reference.coordinates = *reference;
        *reference = (tml_coordinates){0};
    }
    c->model_count = c->models.model_count;
    c->core_text = copy_text(options->core);
    c->atoms_text = copy_text(options->atoms);
    c->cut_given = options->cut >= 0;
    c->cut_asked = options->cut;
    if (c->core_text == NULL || c->atoms_text == NULL) return tml_no_memory(error);
    tml_status status = tml_core_check(options->core, error);
    if (status == TML_OK) status = tml_selection_check(options->atoms, error);
    if (status == TML_OK) status = within_reach(&c->models, "models", error);
    if (status == TML_OK && reference != NULL) status = within_reach(&c->reference.coordinates, "reference", error);
    if (status == TML_OK && c->model_count < 2 && reference == NULL)
        status = tml_fail(error, TML_BAD_INPUT, "there is one model, and no reference to compare it with");
    return status;
}

static bool in_all_models(const tml_coordinates *of, size_t site) {
    for (int32_t m = 0; m < of->model_count; m++)
        if (isnan(tml_coordinates_at(of, m, site)[0])) return false;
    return true;
}

/* An amino acid, a nucleotide, or what stands for one: a CA or P alone. */
static bool is_unit(const tml_comparison *c, const int32_t *sizes, int32_t atom) {
    enum { CARBON = 6, PHOSPHORUS = 15 };
    const tml_site *site = tml_compared_site(c, atom);
    bool alone = sizes[c->residue_of[atom]] == 1;
    bool carbon = site->element == CARBON || (alone && site->element == 0);
    bool phosphorus = alone && (site->element == PHOSPHORUS || site->element == 0);
    return (carbon && tml_selected("CA,C4'", site)) || (phosphorus && tml_selected("P", site));
}

/* Residues of the atoms that take part, in the order of the file; residue by residue, which the atoms follow. */
static bool list_residues(tml_comparison *c, int32_t *sizes) {
    int32_t *number = tml_alloc(c->models.residue_count, sizeof *number); /* from 1 */
    if (number == NULL) return false;
    for (int32_t i = 0; i < c->atom_count; i++) number[tml_compared_site(c, i)->residue] = 1;
    for (size_t r = 0; r < c->models.residue_count; r++) {
        if (number[r] == 0) continue;
        c->residues[c->residue_count++] = (int32_t)r;
        number[r] = c->residue_count;
    }
    for (int32_t i = 0; i < c->atom_count; i++) {
        c->residue_of[i] = number[tml_compared_site(c, i)->residue] - 1;
        sizes[c->residue_of[i]]++;
    }
    free(number);
    return true;
}

/* Sites by residue, so that atoms of one stand together wherever the file has them. A counting sort. */
static bool order_sites(tml_comparison *c) {
    size_t residues = c->models.residue_count;
    int32_t *first = tml_alloc(residues + 1, sizeof *first), *sorted = tml_alloc((size_t)c->atom_count, sizeof *sorted);
    bool room = first != NULL && sorted != NULL;
    if (room) {
        for (int32_t i = 0; i < c->atom_count; i++) first[c->models.atoms[c->sites[i]].residue + 1]++;
        for (size_t r = 0; r < residues; r++) first[r + 1] += first[r];
        for (int32_t i = 0; i < c->atom_count; i++) sorted[first[c->models.atoms[c->sites[i]].residue]++] = c->sites[i];
        memcpy(c->sites, sorted, (size_t)c->atom_count * sizeof *sorted);
    }
    free(first);
    free(sorted);
    return room;
}

static bool copy_places(tml_comparison *c) {
    size_t atoms = (size_t)c->atom_count, cells;
    if (__builtin_mul_overflow(3 * atoms, (size_t)c->model_count, &cells)) return false;
    c->places = tml_alloc(cells, sizeof *c->places);
    c->xyz = tml_alloc((size_t)c->model_count, sizeof *c->xyz);
    c->mean = tml_alloc(3 * atoms, sizeof *c->mean);
    c->spread = tml_alloc(atoms, sizeof *c->spread);
    if (c->places == NULL || c->xyz == NULL || c->mean == NULL || c->spread == NULL) return false;
    for (int32_t m = 0; m < c->model_count; m++) {
        c->xyz[m] = &c->places[3 * atoms * (size_t)m];
        for (size_t i = 0; i < atoms; i++)
            memcpy(&c->xyz[m][3 * i], tml_coordinates_at(&c->models, m, (size_t)c->sites[i]), 3 * sizeof(double));
    }
    return true;
}

static tml_status take_part(tml_comparison *c, tml_error *error) {
    const tml_coordinates *of = &c->models;
    c->sites = tml_alloc(of->atom_count, sizeof *c->sites);
    c->residue_of = tml_alloc(of->atom_count, sizeof *c->residue_of);
    c->group_of = tml_alloc(of->atom_count, sizeof *c->group_of);
    c->residues = tml_alloc(of->residue_count, sizeof *c->residues);
    c->order = tml_alloc(of->residue_count, sizeof *c->order);
    c->unit = tml_alloc(of->residue_count, sizeof *c->unit);
    int32_t *sizes = tml_alloc(of->residue_count, sizeof *sizes);
    bool room = c->sites != NULL && c->residue_of != NULL && c->group_of != NULL && c->residues != NULL && c->order != NULL &&
                c->unit != NULL && sizes != NULL;
    int32_t dry = 0; /* sites that are no water */
    for (size_t a = 0; room && a < of->atom_count; a++) {
        if (of->residues[of->atoms[a].residue].water) continue;
        dry++;
        if (in_all_models(of, a)) c->sites[c->atom_count++] = (int32_t)a;
    }
    c->missing = dry - c->atom_count;
    room = room && order_sites(c) && list_residues(c, sizes) && copy_places(c);
    for (int32_t i = 0; room && i < c->atom_count; i++) {
        if (!is_unit(c, sizes, i)) continue;
        c->unit[c->residue_of[i]] = true;
        c->polymer = true;
    }
    for (int32_t i = 0; room && i < c->atom_count; i++) c->group_of[i] = c->polymer ? c->residue_of[i] : i;
    c->group_count = c->polymer ? c->residue_count : c->atom_count;
    free(sizes);
    if (!room) return tml_no_memory(error);
    if (c->atom_count == 0) return tml_fail(error, TML_BAD_INPUT, "no atom is in all of the %d models", c->model_count);
    return tml_order_parameters(of, c->order, error);
}

/* ---- the core ---- */

tml_status tml_core_check(const char *core, tml_error *error) {
    if (strcmp(core, "spread") == 0 || strcmp(core, "order") == 0 || strcmp(core, "all") == 0) return TML_OK;
    return tml_stretches_check(core, error);
}

static int32_t choose(tml_comparison *c, const char *words, bool units_only) {
    int32_t count = 0;
    for (int32_t i = 0; i < c->atom_count; i++) {
        c->candidate[i] = (!units_only || c->unit[c->residue_of[i]]) && tml_selected(words, tml_compared_site(c, i));
        count += c->candidate[i];
    }
    return count;
}

/* In comparisons the backbone of amino acids is N, CA and C, without the O, which swings where they do not. Common practice. */
static const char BACKBONE[] = "N,CA,C,P,O5',C5',C4',C3',O3'";

static tml_status choose_atoms(tml_comparison *c, tml_error *error) {
    c->candidate = tml_alloc((size_t)c->atom_count, sizeof *c->candidate);
    if (c->candidate == NULL) return tml_no_memory(error);
    bool backbone = strcmp(c->atoms_text, "backbone") == 0;
    c->heavy_instead = backbone && !c->polymer;
    int32_t count = choose(c, c->heavy_instead ? "heavy" : backbone ? BACKBONE : c->atoms_text, backbone && c->polymer);
    if (c->heavy_instead && count == 0) count = choose(c, "all", false);
    if (count == 0) return tml_fail(error, TML_BAD_INPUT, "no atom that all models have is selected by '%.64s'", c->atoms_text);
    return TML_OK;
}

static tml_status core_by_spread(tml_comparison *c, tml_error *error) {
    int32_t *atoms = tml_alloc((size_t)c->atom_count, sizeof *atoms),
            *groups = tml_alloc((size_t)c->atom_count, sizeof *groups);
    tml_points points = {atoms, groups, 0, c->group_count};
    tml_stack stack = {c->xyz, c->model_count, c->atom_count};
    tml_status status = atoms == NULL || groups == NULL ? tml_no_memory(error) : TML_OK;
    for (int32_t i = 0; status == TML_OK && i < c->atom_count; i++) {
        if (!c->candidate[i]) continue;
        atoms[points.count] = i;
        groups[points.count++] = c->group_of[i];
    }
    if (status == TML_OK) status = tml_core_find(&stack, &points, c->core, &c->met, error);
    free(atoms);
    free(groups);
    return status;
}

static tml_status core_by_order(tml_comparison *c, tml_error *error) {
    int32_t torsions = 0, ordered = 0;
    for (int32_t r = 0; r < c->residue_count; r++) {
        const tml_torsion_order *order = &c->order[c->residues[r]];
        torsions += order->phi >= 0 || order->psi >= 0;
        if (c->polymer) c->core[r] = tml_is_ordered(order);
        ordered += tml_is_ordered(order);
    }
    if (!c->polymer || torsions == 0)
        return tml_fail(error, TML_BAD_INPUT, "no residue has a phi or psi; take another core than 'order'");
    if (ordered == 0)
        return tml_fail(error, TML_BAD_INPUT, "no residue has order parameters of %.1f or more; take another core than 'order'",
                        TML_ORDER_LEAST);
    return TML_OK;
}

static tml_status core_as_given(tml_comparison *c, tml_error *error) {
    tml_stretch stretch;
    for (const char *at = c->core_text; tml_stretch_next(&at, &stretch);) {
        bool any = false;
        for (int32_t i = 0; i < c->atom_count; i++) {
            if (!c->candidate[i] || !tml_stretch_holds(&stretch, &c->models.residues[c->residues[c->residue_of[i]]])) continue;
            c->core[c->group_of[i]] = true;
            any = true;
        }
        if (!any)
            return tml_fail(error, TML_BAD_INPUT, "the models have none of the chosen atoms in '%.*s'",
                            stretch.length > 64 ? 64 : (int)stretch.length, stretch.word);
    }
    return TML_OK;
}

static tml_status find_core(tml_comparison *c, tml_error *error) {
    static const struct {
        const char *word;
        tml_core_kind kind;
    } WORDS[] = {{"spread", TML_CORE_SPREAD}, {"order", TML_CORE_ORDER}, {"all", TML_CORE_ALL}};
    c->kind = TML_CORE_GIVEN;
    for (size_t i = 0; i < sizeof WORDS / sizeof WORDS[0]; i++)
        if (strcmp(c->core_text, WORDS[i].word) == 0) c->kind = WORDS[i].kind;
    c->core = tml_alloc((size_t)c->group_count, sizeof *c->core);
    c->fitted = tml_alloc((size_t)c->atom_count, sizeof *c->fitted);
    if (c->core == NULL || c->fitted == NULL) return tml_no_memory(error);
    c->alone = c->model_count == 1 && (c->kind == TML_CORE_SPREAD || c->kind == TML_CORE_ORDER);
    tml_status status = TML_OK;
    if (c->kind == TML_CORE_GIVEN) status = core_as_given(c, error);
    if (c->kind == TML_CORE_SPREAD && !c->alone) status = core_by_spread(c, error);
    if (c->kind == TML_CORE_ORDER && !c->alone) status = core_by_order(c, error);
    for (int32_t g = 0; g < c->group_count && (c->kind == TML_CORE_ALL || c->alone); g++) c->core[g] = true;
    for (int32_t i = 0; i < c->atom_count; i++)
        if (c->candidate[i] && c->core[c->group_of[i]]) c->fitted[c->fitted_count++] = i;
    if (status == TML_OK && c->fitted_count == 0)
        status = tml_fail(error, TML_BAD_INPUT, "none of the atoms selected by '%.64s' is in the core", c->atoms_text);
    return status;
}

/* ---- figures ---- */

static void measure_pairs(tml_comparison *c) {
    size_t count = (size_t)c->model_count * ((size_t)c->model_count - 1) / 2;
    double sum = 0;
    c->pair_mean = c->pair_least = c->pair_greatest = count > 0 ? c->pairs[0] : NAN;
    for (size_t i = 0; i < count; i++) {
        sum += c->pairs[i];
        c->pair_least = fmin(c->pair_least, c->pairs[i]);
        c->pair_greatest = fmax(c->pair_greatest, c->pairs[i]);
    }
    if (count > 0) c->pair_mean = sum / (double)count;
    c->medoid = tml_pairs_medoid(c->pairs, c->model_count, c->to_others);
}

static tml_status measure(tml_comparison *c, int threads, const tml_watch *watch, tml_error *error) {
    enum { MOST_PASSES = 200 };
    static const double STILL = 1e-6; /* Å */
    tml_stack stack = {c->xyz, c->model_count, c->atom_count};
    c->to_others = tml_alloc((size_t)c->model_count, sizeof *c->to_others);
    c->to_mean = tml_alloc((size_t)c->model_count, sizeof *c->to_mean);
    if (c->to_others == NULL || c->to_mean == NULL) return tml_no_memory(error);
    tml_stack_fit(&stack, c->fitted, c->fitted_count, MOST_PASSES, STILL, c->mean);
    for (int32_t i = 0; i < c->atom_count; i++) c->spread[i] = tml_stack_spread(&stack, c->mean, i);
    for (int32_t m = 0; m < c->model_count; m++) {
        tml_motion motion;
        c->to_mean[m] = tml_superpose(c->xyz[m], c->mean, c->fitted, c->fitted_count, &motion);
        c->mean_to_mean += c->to_mean[m] / c->model_count;
    }
    tml_status status = tml_pairs_measure(&stack, c->fitted, c->fitted_count, threads, watch, &c->pairs, error);
    if (status == TML_OK) measure_pairs(c);
    return status;
}

/* ---- clusters ---- */

/* Of each cluster the model with the least summed distance to the others in it, the first among equals. */
static tml_status find_representatives(tml_comparison *c, tml_error *error) {
    const int32_t count = c->model_count;
    double *sums = tml_alloc((size_t)count, sizeof *sums);
    c->representatives = tml_alloc((size_t)c->cluster_count, sizeof *c->representatives);
    if (sums == NULL || c->representatives == NULL) {
        free(sums);
        return tml_no_memory(error);
    }
    for (int32_t a = 0; a < count; a++)
        for (int32_t b = a + 1; b < count; b++) {
            if (c->cluster[a] != c->cluster[b]) continue;
            sums[a] += c->pairs[tml_pair_index(count, a, b)];
            sums[b] += c->pairs[tml_pair_index(count, a, b)];
        }
    for (int32_t k = 0; k < c->cluster_count; k++) c->representatives[k] = -1;
    for (int32_t m = 0; m < count; m++) {
        int32_t *at = &c->representatives[c->cluster[m]];
        if (*at < 0 || sums[m] < sums[*at]) *at = m;
    }
    free(sums);
    return TML_OK;
}

static tml_status link_and_cut(tml_comparison *c, float *copy, tml_merge *merges, const volatile int *stop, tml_error *error) {
    const int32_t count = c->model_count;
    int32_t made = 0;
    size_t pairs = (size_t)count * ((size_t)count - 1) / 2;
    if (pairs > 0) memcpy(copy, c->pairs, pairs * sizeof *copy);
    tml_status status = tml_cluster_link(copy, count, stop, merges, error);
    if (status == TML_OK && c->cut_given) made = tml_cluster_merges_below(merges, count, c->cut_asked);
    if (status == TML_OK && !c->cut_given) status = tml_cluster_least_penalty(merges, count, &made, error);
    if (status == TML_OK) status = tml_cluster_labels(merges, count, made, c->cluster, &c->cluster_count, error);
    c->cut = made > 0 ? merges[made - 1].height : 0.0;
    return status;
}

static tml_status find_clusters(tml_comparison *c, const volatile int *stop, tml_error *error) {
    const size_t count = (size_t)c->model_count;
    float *copy = tml_alloc(count * (count - 1) / 2, sizeof *copy);
    tml_merge *merges = tml_alloc(count, sizeof *merges);
    c->cluster = tml_alloc(count, sizeof *c->cluster);
    bool room = copy != NULL && merges != NULL && c->cluster != NULL;
    tml_status status = room ? link_and_cut(c, copy, merges, stop, error) : tml_no_memory(error);
    free(copy);
    free(merges);
    return status == TML_OK ? find_representatives(c, error) : status;
}

/* ---- looking up ---- */

void tml_comparison_facts(const tml_comparison *c, tml_compare_facts *facts) {
    const tml_reference *reference = &c->reference;
    bool given = reference->match != NULL;
    *facts = (tml_compare_facts){.models = c->model_count,
                                 .atoms = c->atom_count,
                                 .residues = c->residue_count,
                                 .superposed_atoms = c->fitted_count,
                                 .pair_mean = c->pair_mean,
                                 .pair_least = c->pair_least,
                                 .pair_greatest = c->pair_greatest,
                                 .mean_to_mean = c->mean_to_mean,
                                 .medoid = c->medoid,
                                 .clusters = c->cluster_count,
                                 .cut = c->cut,
                                 .reference_models = given ? reference->coordinates.model_count : 0,
                                 .reference_medoid = reference->medoid,
                                 .common_atoms = reference->common,
                                 .chains_exchanged = reference->exchanged,
                                 .reference_mean = given ? reference->mean : NAN,
                                 .mean_to_reference = given ? reference->from_mean : NAN,
                                 .medoid_to_reference = given ? reference->from_medoid : NAN};
    for (int32_t k = 0, last = -1; k < c->fitted_count; k++) {
        facts->core_residues += c->residue_of[c->fitted[k]] != last;
        last = c->residue_of[c->fitted[k]];
    }
}

bool tml_comparison_model(const tml_comparison *c, int32_t index, tml_compared_model *model) {
    if (index < 0 || index >= c->model_count) return false;
    *model = (tml_compared_model){.to_others = c->to_others[index],
                                  .to_mean = c->to_mean[index],
                                  .to_reference = c->reference.match != NULL ? c->reference.rmsd[index] : NAN,
                                  .cluster = c->cluster[index]};
    return true;
}

/* The first of a residue's atoms: they follow residues in order. */
static int32_t first_atom(const tml_comparison *c, int32_t residue) {
    int32_t low = 0, high = c->atom_count;
    while (low < high) {
        int32_t middle = low + (high - low) / 2;
        if (c->residue_of[middle] < residue)
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}

bool tml_comparison_residue(const tml_comparison *c, int32_t index, tml_compared_residue *residue) {
    enum { HYDROGEN = 1 };
    if (index < 0 || index >= c->residue_count) return false;
    const tml_site_residue *of = &c->models.residues[c->residues[index]];
    const tml_torsion_order *order = &c->order[c->residues[index]];
    double chosen = 0, heavy = 0;
    int32_t chosen_count = 0, heavy_count = 0;
    bool core = false;
    for (int32_t i = first_atom(c, index); i < c->atom_count && c->residue_of[i] == index; i++) {
        bool counts = tml_compared_site(c, i)->element != HYDROGEN;
        chosen += c->candidate[i] ? c->spread[i] * c->spread[i] : 0;
        chosen_count += c->candidate[i];
        heavy += counts ? c->spread[i] * c->spread[i] : 0;
        heavy_count += counts;
        core = core || (c->candidate[i] && c->core[c->group_of[i]]);
    }
    *residue = (tml_compared_residue){.chain = of->chain,
                                      .number = of->number,
                                      .name = of->name,
                                      .spread = chosen_count > 0 ? sqrt(chosen / chosen_count) : NAN,
                                      .heavy_spread = heavy_count > 0 ? sqrt(heavy / heavy_count) : NAN,
                                      .order_phi = order->phi,
                                      .order_psi = order->psi,
                                      .core = core};
    return true;
}

bool tml_comparison_atom(const tml_comparison *c, int32_t index, tml_compared_atom *atom) {
    if (index < 0 || index >= c->atom_count) return false;
    *atom = (tml_compared_atom){.residue = c->residue_of[index],
                                .name = tml_compared_site(c, index)->name,
                                .spread = c->spread[index],
                                .superposed = c->candidate[index] && c->core[c->group_of[index]]};
    return true;
}

double tml_comparison_pair(const tml_comparison *c, int32_t model_1, int32_t model_2) {
    if (model_1 < 0 || model_2 < 0 || model_1 >= c->model_count || model_2 >= c->model_count) return NAN;
    return model_1 == model_2 ? 0.0 : c->pairs[tml_pair_index(c->model_count, model_1, model_2)];
}

const double *tml_comparison_coordinates(const tml_comparison *c, int32_t model) {
    return model < 0 || model >= c->model_count ? NULL : c->xyz[model];
}

/* comparison_json.c: the report of a comparison for programs. Models, clusters and ranks count from 1. */
#include <math.h>
#include <string.h>

#include "output/output.h"
#include "output/values.h"
#include "output/words.h"

enum { NAME = 160, LINE = 512, MOST_MATRIX = 1000 };

static json_t *residue_name(const tml_compared_residue *residue) {
    char text[NAME];
    snprintf(text, sizeof text, "%s:%s", residue->chain, residue->number);
    return tml_json_text(text);
}

static json_t *range(double mean, double least, double greatest) {
    return json_pack("{s:o, s:o, s:o}", "mean", tml_json_rounded(mean), "min", tml_json_rounded(least), "max",
                     tml_json_rounded(greatest));
}

static json_t *core_json(const tml_comparison *c) {
    char method[LINE];
    json_t *residues = json_array();
    tml_compared_residue residue;
    tml_say_core(c, method, sizeof method);
    for (int32_t r = 0; tml_comparison_residue(c, r, &residue); r++)
        if (residue.core) tml_json_append(&residues, residue_name(&residue));
    bool by_spread = c->kind == TML_CORE_SPREAD && !c->alone;
    return json_pack("{s:o, s:o, s:o, s:o}", "asked", tml_json_text(c->core_text), "method", tml_json_text(method), "cutoff",
                     by_spread ? tml_json_number(c->met) : json_null(), "residues", residues);
}

/* Row by row; null where there are so many models that the matrix would take longer to read than to compute. */
static json_t *matrix(const tml_comparison *c) {
    if (c->model_count > MOST_MATRIX) return json_null();
    json_t *rows = json_array();
    for (int32_t a = 0; a < c->model_count; a++) {
        json_t *row = json_array();
        for (int32_t b = 0; b < c->model_count; b++) tml_json_append(&row, tml_json_rounded(tml_comparison_pair(c, a, b)));
        tml_json_append(&rows, row);
    }
    return rows;
}

static json_t *models_json(const tml_comparison *c) {
    json_t *list = json_array();
    tml_compared_model model;
    for (int32_t m = 0; tml_comparison_model(c, m, &model); m++)
        tml_json_append(&list, json_pack("{s:i, s:o, s:o, s:o, s:i}", "model", m + 1, "to_others",
                                         tml_json_rounded(model.to_others), "to_mean", tml_json_rounded(model.to_mean),
                                         "to_reference", tml_json_rounded(model.to_reference), "cluster", model.cluster + 1));
    return list;
}

static json_t *clusters_json(const tml_comparison *c) {
    char rule[LINE];
    json_t *list = json_array();
    tml_say_cut(c, rule, sizeof rule);
    for (int32_t k = 0; k < c->cluster_count; k++)
        tml_json_append(&list, json_pack("{s:i, s:i, s:[]}", "cluster", k + 1, "medoid", c->representatives[k] + 1, "models"));
    for (int32_t m = 0; list != NULL && m < c->model_count; m++) {
        json_t *members = json_object_get(json_array_get(list, (size_t)c->cluster[m]), "models");
        if (json_array_append_new(members, json_integer(m + 1)) == 0) continue;
        json_decref(list);
        list = NULL;
    }
    return json_pack("{s:o, s:o, s:o}", "rule", tml_json_text(rule), "cut",
                     tml_json_rounded(c->cut_given ? c->cut_asked : c->cut), "list", list);
}

static json_t *residues_json(const tml_comparison *c) {
    json_t *list = json_array();
    tml_compared_residue residue;
    for (int32_t r = 0; tml_comparison_residue(c, r, &residue); r++)
        tml_json_append(&list,
                        json_pack("{s:o, s:o, s:o, s:o, s:o, s:o, s:b}", "residue", residue_name(&residue), "name",
                                  tml_json_text(residue.name), "spread", tml_json_rounded(residue.spread), "heavy_spread",
                                  tml_json_rounded(residue.heavy_spread), "order_phi", tml_json_rounded(residue.order_phi),
                                  "order_psi", tml_json_rounded(residue.order_psi), "core", residue.core));
    return list;
}

static json_t *atoms_json(const tml_comparison *c) {
    json_t *list = json_array();
    tml_compared_atom atom;
    for (int32_t i = 0; tml_comparison_atom(c, i, &atom); i++) {
        char text[NAME];
        const tml_site_residue *residue = &c->models.residues[c->residues[atom.residue]];
        snprintf(text, sizeof text, "%s:%s:%s", residue->chain, residue->number, atom.name);
        tml_json_append(&list, json_pack("{s:o, s:o, s:b}", "atom", tml_json_text(text), "spread",
                                         tml_json_rounded(atom.spread), "superposed", atom.superposed));
    }
    return list;
}

static json_t *reference_json(const tml_comparison *c) {
    const tml_reference *reference = &c->reference;
    const char *one, *other;
    if (reference->match == NULL) return json_null();
    json_t *chains = json_array();
    for (int32_t i = 0; tml_match_chain(reference->match, i, &one, &other); i++)
        tml_json_append(&chains, json_pack("{s:o, s:o}", "models", tml_json_text(one), "reference", tml_json_text(other)));
    return json_pack("{s:i, s:i, s:i, s:i, s:o, s:b, s:b, s:i, s:o, s:o, s:o}", "models", reference->coordinates.model_count,
                     "medoid", reference->medoid + 1, "superposed_atoms", reference->common, "atoms", reference->common_all,
                     "chains", chains, "chains_exchanged", reference->exchanged, "exchanges_tried",
                     !tml_match_too_many(reference->match), "residues_of_other_name", tml_match_renamed(reference->match),
                     "to_models", range(reference->mean, reference->least, reference->greatest), "to_mean",
                     tml_json_rounded(reference->from_mean), "to_medoid", tml_json_rounded(reference->from_medoid));
}

tml_status tml_write_comparison_json(const tml_comparison *c, const char *path, tml_error *error) {
    tml_compare_facts facts;
    tml_comparison_facts(c, &facts);
    json_t *superposed = json_pack("{s:o, s:s, s:i}", "asked", tml_json_text(c->atoms_text), "chosen",
                                   c->heavy_instead ? "heavy" : "as asked", "atoms", c->fitted_count);
    json_t *pairs = range(c->pair_mean, c->pair_least, c->pair_greatest);
    tml_json_put(&pairs, "matrix", matrix(c));
    json_t *root =
        json_pack("{s:s, s:s, s:i, s:i, s:i, s:i, s:o, s:o, s:o, s:o, s:i, s:o, s:o, s:o, s:o, s:o}", "program", "trammel",
                  "version", TML_VERSION, "models", facts.models, "atoms", facts.atoms, "residues", facts.residues,
                  "atoms_left_out", c->missing, "superposed", superposed, "core", core_json(c), "pairs", pairs, "to_mean",
                  tml_json_rounded(c->mean_to_mean), "medoid", facts.medoid + 1, "clusters", clusters_json(c), "per_model",
                  models_json(c), "per_residue", residues_json(c), "per_atom", atoms_json(c), "reference", reference_json(c));
    return tml_json_write(root, path, error);
}

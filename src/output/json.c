/* json.c: the reports for programs. Keys and their meaning are fixed; others may be added. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "output/output.h"
#include "output/values.h"
#include "output/words.h"

/* Contents: values - build - check - findings of both */

static json_t *findings(const tml_problem *problem, const tml_contradictions *found);
static json_t *notes(const tml_problem *problem);

/* ---- values ---- */

static json_t *address(const tml_molecule *molecule, int32_t atom) {
    char text[256];
    tml_molecule_address(molecule, atom, text, sizeof text);
    return tml_json_text(text);
}

static json_t *above(double by, int32_t count) {
    return json_pack("{s:o, s:i}", "by", by == floor(by) ? json_integer((json_int_t)by) : json_real(by), "count", count);
}

/* ---- build ---- */

static json_t *model_json(const tml_model *model, int32_t index) {
    const tml_measures *of = &model->measures;
    json_t *eigenvalues = json_array();
    for (size_t i = 0; i < sizeof model->eigenvalues / sizeof model->eigenvalues[0]; i++)
        tml_json_append(&eigenvalues, tml_json_rounded(model->eigenvalues[i]));
    json_t *distance = json_pack("{s:[o,o,o], s:o, s:o}", "above", above(0.1, of->distance_over_01),
                                 above(0.2, of->distance_over_02), above(0.5, of->distance_over_05), "max",
                                 tml_json_rounded(of->distance_max), "rms", tml_json_rounded(of->distance_rms));
    json_t *dihedral = json_pack("{s:[o,o], s:o}", "above", above(5, of->dihedral_over_5), above(10, of->dihedral_over_10), "max",
                                 tml_json_rounded(of->dihedral_max));
    json_t *geometry = json_pack("{s:i, s:i, s:i, s:o, s:o, s:o, s:o, s:i, s:o, s:o}", "wrong_handed", of->wrong_handed,
                                 "cis_undeclared", of->cis_undeclared, "omega_off", of->omega_off, "bond_rms",
                                 tml_json_rounded(of->bond_rms), "bond_max", tml_json_rounded(of->bond_max), "angle_rms",
                                 tml_json_rounded(of->angle_rms), "plane_max", tml_json_rounded(of->plane_max), "overlaps", of->overlaps, "backbone_usual",
                                 tml_json_rounded(of->backbone_usual), "alike_rms", tml_json_rounded(of->alike_rms));
    return json_pack("{s:i, s:i, s:o, s:b, s:b, s:o, s:o, s:o, s:o, s:o}", "model", index + 1, "trial", model->trial, "error",
                     tml_json_rounded(model->error), "passed", model->passed, "mirrored", model->mirrored, "other_image_error",
                     tml_json_rounded(model->other_error), "distance", distance, "dihedral", dihedral, "geometry", geometry,
                     "eigenvalues", eigenvalues);
}

/* Residues whose place the models agree on, as "chain:number". */
static json_t *well_defined(const tml_ensemble *ensemble) {
    json_t *list = json_array();
    const tml_molecule *molecule = &ensemble->problem->molecule;
    for (int32_t r = 0; ensemble->well_defined != NULL && r < molecule->residue_count; r++) {
        char text[256];
        if (!ensemble->well_defined[r]) continue;
        snprintf(text, sizeof text, "%s:%s", molecule->residues[r].chain, molecule->residues[r].number);
        tml_json_append(&list, tml_json_text(text));
    }
    return list;
}

static json_t *cis_peptides(const tml_molecule *molecule) {
    json_t *list = json_array();
    for (int32_t p = 0; p < molecule->peptide_count; p++) {
        const tml_peptide *peptide = &molecule->peptides[p];
        char text[256];
        if (!peptide->cis) continue;
        const tml_residue *one = &molecule->residues[peptide->residue1], *two = &molecule->residues[peptide->residue2];
        snprintf(text, sizeof text, "%s:%s-%s:%s", one->chain, one->number, two->chain, two->number);
        tml_json_append(&list, json_pack("{s:o, s:b}", "between", tml_json_text(text), "declared", peptide->declared));
    }
    return list;
}

/* How often each image of the embedding won, and how often the other one, refined as well, passed as a different fold. */
static json_t *handedness(const tml_ensemble *ensemble) {
    int mirrored = 0, doubtful = 0, compared = 0;
    for (int32_t m = 0; m < ensemble->model_count; m++) {
        const tml_model *model = &ensemble->models[m];
        mirrored += model->mirrored;
        compared += isfinite(model->other_error);
        doubtful += tml_model_hand_in_doubt(model);
    }
    return json_pack("{s:i, s:i, s:i, s:i}", "as_embedded", ensemble->model_count - mirrored, "mirrored", mirrored, "both_refined",
                     compared, "in_doubt", doubtful);
}

/* The open stereo pairs and, model by model, whether x is the second member. */
static json_t *stereo_pairs(const tml_ensemble *ensemble) {
    const tml_restraints *restraints = &ensemble->problem->restraints;
    json_t *list = json_array();
    for (int32_t p = 0; p < restraints->stereo_count; p++) {
        const tml_stereo *pair = &restraints->stereo[p];
        json_t *first = json_array(), *second = json_array(), *swapped = json_array();
        for (int32_t k = pair->first_member; k < pair->first_member + pair->member_count; k++) {
            tml_json_append(&first, address(&ensemble->problem->molecule, restraints->stereo_members[k].first));
            tml_json_append(&second, address(&ensemble->problem->molecule, restraints->stereo_members[k].second));
        }
        for (int32_t m = 0; m < ensemble->model_count; m++)
            tml_json_append(&swapped, json_boolean(ensemble->models[m].swapped != NULL && ensemble->models[m].swapped[p]));
        tml_json_append(&list, json_pack("{s:o, s:o, s:o}", "first", first, "second", second, "x_is_second", swapped));
    }
    return list;
}

/* Restraints with alternatives within chains and between them, and model by model the share of the sum that lies between. */
static json_t *between_chains(const tml_ensemble *ensemble) {
    const tml_problem *problem = ensemble->problem;
    json_t *list = json_array();
    for (int32_t i = 0; i < problem->restraints.distance_count; i++) {
        const tml_distance_restraint *at = &problem->restraints.distances[i];
        json_t *shares = NULL;
        for (int32_t m = 0; m < ensemble->model_count; m++) {
            const tml_model *model = &ensemble->models[m];
            double share = tml_between_chains(&problem->restraints, &problem->molecule, at, model->swapped, model->xyz);
            if (isnan(share)) break;
            if (m == 0) shares = json_array();
            tml_json_append(&shares, tml_json_rounded(share));
        }
        if (shares != NULL)
            tml_json_append(&list, json_pack("{s:o, s:o, s:o}", "list", tml_json_text(at->list), "id", tml_json_text(at->id), "share_between", shares));
    }
    return list;
}

tml_status tml_write_build_json(const tml_ensemble *ensemble, const tml_contradictions *found, const char *path, tml_error *error) {
    const tml_problem *problem = ensemble->problem;
    const tml_timing *time = &ensemble->timing;
    json_t *models = json_array();
    for (int32_t m = 0; m < ensemble->model_count; m++)
        tml_json_append(&models, model_json(&ensemble->models[m], m));
    json_t *counts = json_pack("{s:i, s:i, s:i, s:i, s:i}", "atoms", problem->molecule.atom_count, "residues",
                               problem->molecule.residue_count, "distance_restraints", problem->restraints.distance_count,
                               "dihedral_restraints", problem->restraints.dihedral_count, "unmapped",
                               problem->restraints.unmapped_count);
    const struct { const char *stage; double seconds; } stages[] = {
        {"read", time->read}, {"smooth", time->smooth}, {"metrize", time->metrize}, {"embed", time->embed},
        {"refine", time->refine}, {"write", time->write}, {"total", time->total}};
    json_t *times = json_object();
    for (size_t i = 0; i < sizeof stages / sizeof stages[0]; i++)
        tml_json_put(&times, stages[i].stage, tml_json_rounded(stages[i].seconds));
    json_t *root = json_pack("{s:s, s:s, s:o, s:i, s:i, s:i, s:i, s:i, s:s, s:o, s:o, s:o, s:o, s:o, s:o}", "program", "trammel",
                             "version", TML_VERSION, "title", tml_json_text(problem->title == NULL ? "" : problem->title), "threads",
                             ensemble->threads, "trials", ensemble->trials, "passed", ensemble->passed, "written",
                             ensemble->model_count, "wanted", ensemble->wanted, "select",
                             ensemble->select_lowest ? "lowest" : "first", "problem", counts, "timing_s", times, "models", models,
                             "handedness", handedness(ensemble), "well_defined", well_defined(ensemble), "cis_peptides",
                             cis_peptides(&problem->molecule));
    /* The seed is unsigned: beyond the signed range it is written as text, as JSON readers would round it. */
    char seed[24];
    snprintf(seed, sizeof seed, "%llu", (unsigned long long)ensemble->seed);
    tml_json_put(&root, "seed", ensemble->seed <= INT64_MAX ? json_integer((json_int_t)ensemble->seed) : json_string(seed));
    tml_json_put(&root, "contradictions", findings(problem, found));
    tml_json_put(&root, "within_or_between_chains", between_chains(ensemble));
    tml_json_put(&root, "stereo_pairs", stereo_pairs(ensemble));
    tml_json_put(&root, "notes", notes(problem));
    tml_json_put(&root, "passing", json_string(tml_words_passing));
    return tml_json_write(root, path, error);
}

/* ---- check ---- */

static json_t *repairs(const tml_problem *problem, const tml_contradictions *found) {
    json_t *list = json_array();
    for (size_t i = 0; i < found->count; i++) {
        tml_repair repair;
        if (!tml_repair_of(problem, &found->items[i], &repair)) continue;
        const tml_distance_restraint *restraint = &problem->restraints.distances[repair.restraint];
        double loosen = ceil(repair.loosen * 1e4 - 1e-6) / 1e4; /* upwards: what is written must be enough */
        tml_json_append(&list, json_pack("{s:o, s:o, s:s, s:o}", "list", tml_json_text(restraint->list), "id",
                                              tml_json_text(restraint->id), "bound", repair.upper ? "upper" : "lower", "loosen",
                                              tml_json_number(loosen)));
    }
    return list;
}

static json_t *place_json(const tml_problem *problem, tml_place place) {
    bool known = place.file >= 0 && (size_t)place.file < problem->file_count;
    return json_pack("{s:o, s:o}", "file", known ? tml_json_text(problem->files[place.file]) : json_null(), "line",
                     place.line > 0 ? json_integer(place.line) : json_null());
}

static json_t *unmapped(const tml_problem *problem) {
    json_t *list = json_array();
    for (int32_t i = 0; i < problem->restraints.unmapped_count; i++) {
        const tml_unmapped *at = &problem->restraints.unmapped[i];
        json_t *item = place_json(problem, at->place);
        tml_json_put(&item, "list", tml_json_text(at->list));
        tml_json_put(&item, "id", tml_json_text(at->id));
        tml_json_put(&item, "kind", json_string(at->dihedral ? "dihedral" : "distance"));
        tml_json_put(&item, "reason", tml_json_text(at->reason));
        tml_json_append(&list, item);
    }
    return list;
}

static json_t *of_use(const tml_problem *problem, const tml_use *uses, tml_use wanted) {
    json_t *list = json_array();
    for (int32_t i = 0; uses != NULL && i < problem->restraints.distance_count; i++) {
        const tml_distance_restraint *at = &problem->restraints.distances[i];
        if (uses[i] != wanted) continue;
        json_t *item = place_json(problem, at->place);
        tml_json_put(&item, "list", tml_json_text(at->list));
        tml_json_put(&item, "id", tml_json_text(at->id));
        tml_json_append(&list, item);
    }
    return list;
}

tml_status tml_write_check_json(const tml_problem *problem, const tml_contradictions *found, const tml_use *uses,
                                const tml_difference *difference, const char *path, tml_error *error) {
    int32_t ranges[TML_RANGE_COUNT];
    tml_count_ranges(problem, ranges);
    json_t *counts = json_pack("{s:i, s:i, s:i, s:i}", "atoms", problem->molecule.atom_count, "distance",
                               problem->restraints.distance_count, "dihedral", problem->restraints.dihedral_count, "unmapped",
                               problem->restraints.unmapped_count);
    for (int r = 0; r < TML_RANGE_COUNT; r++) tml_json_put(&counts, tml_range_words[r], json_integer(ranges[r]));
    json_t *root = json_pack("{s:s, s:s, s:o, s:b, s:o, s:o, s:o, s:o, s:o, s:o, s:o}", "program", "trammel", "version",
                             TML_VERSION, "title", tml_json_text(problem->title == NULL ? "" : problem->title), "consistent",
                             found->count == 0, "counts", counts, "contradictions", findings(problem, found), "repair",
                             repairs(problem, found), "redundant", of_use(problem, uses, TML_USE_REDUNDANT), "out_of_range",
                             of_use(problem, uses, TML_USE_OUT_OF_RANGE), "unmapped", unmapped(problem), "notes", notes(problem));
    if (difference != NULL) tml_json_put(&root, "against", tml_difference_json(difference));
    return tml_json_write(root, path, error);
}

/* ---- findings of both ---- */

static json_t *step_json(const tml_problem *problem, const tml_step *step) {
    const tml_given *given = &step->given;
    tml_source source = tml_source_of(problem, given);
    bool named = source.is_restraint;
    return json_pack("{s:o, s:o, s:s, s:o, s:s, s:o, s:o, s:o, s:o}", "atom_1", address(&problem->molecule, step->atom_1), "atom_2",
                     address(&problem->molecule, step->atom_2), "bound", given->is_upper ? "upper" : "lower", "value",
                     tml_json_rounded(given->value), "kind", tml_reason_name(given->reason), "file",
                     named ? tml_json_text(source.file) : json_null(), "line",
                     named && source.line > 0 ? json_integer(source.line) : json_null(), "list",
                     named ? tml_json_text(source.list) : json_null(), "id", named ? tml_json_text(source.id) : json_null());
}

static json_t *findings(const tml_problem *problem, const tml_contradictions *found) {
    json_t *list = json_array();
    for (size_t i = 0; found != NULL && i < found->count; i++) {
        const tml_contradiction *item = &found->items[i];
        json_t *chain = json_array();
        for (size_t k = 0; k < item->step_count; k++) tml_json_append(&chain, step_json(problem, &item->steps[k]));
        tml_json_append(&list, json_pack("{s:s, s:o, s:b, s:o}", "level", "triangle", "excess", tml_json_rounded(item->excess),
                                              "conditional", item->conditional, "chain", chain));
    }
    return list;
}

static json_t *notes(const tml_problem *problem) {
    json_t *list = json_array();
    for (size_t i = 0; i < problem->note_count; i++) {
        json_t *item = place_json(problem, problem->notes[i].place);
        tml_json_put(&item, "text", tml_json_text(problem->notes[i].text));
        tml_json_append(&list, item);
    }
    return list;
}

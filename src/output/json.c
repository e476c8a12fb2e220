/* json.c: the reports for programs. Keys and their meaning are fixed; others may be added. */
#include <jansson.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "output/file.h"
#include "output/output.h"
#include "output/words.h"

/* Contents: values - build - check - findings of both - writing */

static json_t *findings(const tml_problem *problem, const tml_contradictions *found);
static json_t *notes(const tml_problem *problem);
static tml_status write_json(json_t *root, const char *path, tml_error *error);

/* ---- values ---- */

/* Add to an array or an object. Without memory it is freed and becomes NULL, which goes up through all that hold it. */
static void append(json_t **list, json_t *item) {
    if (json_array_append_new(*list, item) == 0) return;
    json_decref(*list);
    *list = NULL;
}

static void put(json_t **object, const char *key, json_t *item) {
    if (json_object_set_new(*object, key, item) == 0) return;
    json_decref(*object);
    *object = NULL;
}


/* JSON has no infinities and no NaN. */
static json_t *number(double value) {
    return isfinite(value) ? json_real(value) : json_null();
}

/* Figures in Å, degrees and seconds: what lies beyond six decimals is noise. */
static json_t *rounded(double value) {
    return isfinite(value) && fabs(value) < 1e9 ? json_real(round(value * 1e6) / 1e6) : number(value);
}

/* Text of any input; what is no UTF-8 is told byte by byte. */
static json_t *text_of(const char *text) {
    if (text == NULL) return json_null();
    if (tml_text_is_utf8(text)) return json_string(text);
    size_t length = strlen(text);
    char *plain = tml_alloc(length + 1, 1);
    if (plain == NULL) return NULL;
    for (size_t at = 0; at < length; at++) plain[at] = (unsigned char)text[at] < 0x80 ? text[at] : '?';
    json_t *good = json_string(plain);
    free(plain);
    return good;
}

static json_t *address(const tml_molecule *molecule, int32_t atom) {
    char text[256];
    tml_molecule_address(molecule, atom, text, sizeof text);
    return text_of(text);
}

static json_t *above(double by, int32_t count) {
    return json_pack("{s:o, s:i}", "by", by == floor(by) ? json_integer((json_int_t)by) : json_real(by), "count", count);
}

/* ---- build ---- */

static json_t *model_json(const tml_model *model, int32_t index) {
    const tml_measures *of = &model->measures;
    json_t *eigenvalues = json_array();
    for (size_t i = 0; i < sizeof model->eigenvalues / sizeof model->eigenvalues[0]; i++)
        append(&eigenvalues, rounded(model->eigenvalues[i]));
    json_t *distance = json_pack("{s:[o,o,o], s:o, s:o}", "above", above(0.1, of->distance_over_01),
                                 above(0.2, of->distance_over_02), above(0.5, of->distance_over_05), "max",
                                 rounded(of->distance_max), "rms", rounded(of->distance_rms));
    json_t *dihedral = json_pack("{s:[o,o], s:o}", "above", above(5, of->dihedral_over_5), above(10, of->dihedral_over_10), "max",
                                 rounded(of->dihedral_max));
    json_t *geometry = json_pack("{s:i, s:i, s:i, s:o, s:o, s:o, s:o, s:i, s:o}", "wrong_handed", of->wrong_handed,
                                 "cis_undeclared", of->cis_undeclared, "omega_off", of->omega_off, "bond_rms",
                                 rounded(of->bond_rms), "bond_max", rounded(of->bond_max), "angle_rms", rounded(of->angle_rms),
                                 "plane_max", rounded(of->plane_max), "overlaps", of->overlaps, "backbone_usual",
                                 rounded(of->backbone_usual));
    return json_pack("{s:i, s:i, s:o, s:b, s:b, s:o, s:o, s:o, s:o, s:o}", "model", index + 1, "trial", model->trial, "error",
                     rounded(model->error), "passed", model->passed, "mirrored", model->mirrored, "other_image_error",
                     rounded(model->other_error), "distance", distance, "dihedral", dihedral, "geometry", geometry,
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
        append(&list, text_of(text));
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
        append(&list, json_pack("{s:o, s:b}", "between", text_of(text), "declared", peptide->declared));
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
            append(&first, address(&ensemble->problem->molecule, restraints->stereo_members[k].first));
            append(&second, address(&ensemble->problem->molecule, restraints->stereo_members[k].second));
        }
        for (int32_t m = 0; m < ensemble->model_count; m++)
            append(&swapped, json_boolean(ensemble->models[m].swapped != NULL && ensemble->models[m].swapped[p]));
        append(&list, json_pack("{s:o, s:o, s:o}", "first", first, "second", second, "x_is_second", swapped));
    }
    return list;
}

tml_status tml_write_build_json(const tml_ensemble *ensemble, const tml_contradictions *found, const char *path, tml_error *error) {
    const tml_problem *problem = ensemble->problem;
    const tml_timing *time = &ensemble->timing;
    json_t *models = json_array();
    for (int32_t m = 0; m < ensemble->model_count; m++)
        append(&models, model_json(&ensemble->models[m], m));
    json_t *counts = json_pack("{s:i, s:i, s:i, s:i, s:i}", "atoms", problem->molecule.atom_count, "residues",
                               problem->molecule.residue_count, "distance_restraints", problem->restraints.distance_count,
                               "dihedral_restraints", problem->restraints.dihedral_count, "unmapped",
                               problem->restraints.unmapped_count);
    json_t *times = json_pack("{s:o, s:o, s:o, s:o, s:o, s:o, s:o}", "read", rounded(time->read), "smooth", rounded(time->smooth),
                              "metrize", rounded(time->metrize), "embed", rounded(time->embed), "refine", rounded(time->refine),
                              "write", rounded(time->write), "total", rounded(time->total));
    json_t *root = json_pack("{s:s, s:s, s:o, s:i, s:i, s:i, s:i, s:i, s:s, s:o, s:o, s:o, s:o, s:o, s:o}", "program", "trammel",
                             "version", TML_VERSION, "title", text_of(problem->title == NULL ? "" : problem->title), "threads",
                             ensemble->threads, "trials", ensemble->trials, "passed", ensemble->passed, "written",
                             ensemble->model_count, "wanted", ensemble->wanted, "select",
                             ensemble->select_lowest ? "lowest" : "first", "problem", counts, "timing_s", times, "models", models,
                             "handedness", handedness(ensemble), "well_defined", well_defined(ensemble), "cis_peptides",
                             cis_peptides(&problem->molecule));
    /* The seed is unsigned: beyond the signed range it is written as text, as JSON readers would round it. */
    char seed[24];
    snprintf(seed, sizeof seed, "%llu", (unsigned long long)ensemble->seed);
    put(&root, "seed", ensemble->seed <= INT64_MAX ? json_integer((json_int_t)ensemble->seed) : json_string(seed));
    put(&root, "contradictions", findings(problem, found));
    put(&root, "stereo_pairs", stereo_pairs(ensemble));
    put(&root, "notes", notes(problem));
    put(&root, "passing", json_string(tml_words_passing));
    return write_json(root, path, error);
}

/* ---- check ---- */

static json_t *repairs(const tml_problem *problem, const tml_contradictions *found) {
    json_t *list = json_array();
    for (size_t i = 0; i < found->count; i++) {
        tml_repair repair;
        if (!tml_repair_of(problem, &found->items[i], &repair)) continue;
        const tml_distance_restraint *restraint = &problem->restraints.distances[repair.restraint];
        double loosen = ceil(repair.loosen * 1e4 - 1e-6) / 1e4; /* upwards: what is written must be enough */
        append(&list, json_pack("{s:o, s:o, s:s, s:o}", "list", text_of(restraint->list), "id",
                                              text_of(restraint->id), "bound", repair.upper ? "upper" : "lower", "loosen",
                                              number(loosen)));
    }
    return list;
}

static json_t *place_json(const tml_problem *problem, tml_place place) {
    bool known = place.file >= 0 && (size_t)place.file < problem->file_count;
    return json_pack("{s:o, s:o}", "file", known ? text_of(problem->files[place.file]) : json_null(), "line",
                     place.line > 0 ? json_integer(place.line) : json_null());
}

static json_t *unmapped(const tml_problem *problem) {
    json_t *list = json_array();
    for (int32_t i = 0; i < problem->restraints.unmapped_count; i++) {
        const tml_unmapped *at = &problem->restraints.unmapped[i];
        json_t *item = place_json(problem, at->place);
        put(&item, "list", text_of(at->list));
        put(&item, "id", text_of(at->id));
        put(&item, "kind", json_string(at->dihedral ? "dihedral" : "distance"));
        put(&item, "reason", text_of(at->reason));
        append(&list, item);
    }
    return list;
}

static json_t *of_use(const tml_problem *problem, const tml_use *uses, tml_use wanted) {
    json_t *list = json_array();
    for (int32_t i = 0; uses != NULL && i < problem->restraints.distance_count; i++) {
        const tml_distance_restraint *at = &problem->restraints.distances[i];
        if (uses[i] != wanted) continue;
        json_t *item = place_json(problem, at->place);
        put(&item, "list", text_of(at->list));
        put(&item, "id", text_of(at->id));
        append(&list, item);
    }
    return list;
}

tml_status tml_write_check_json(const tml_problem *problem, const tml_contradictions *found, const tml_use *uses,
                                const char *path, tml_error *error) {
    int32_t ranges[TML_RANGE_COUNT];
    tml_count_ranges(problem, ranges);
    json_t *counts = json_pack("{s:i, s:i, s:i, s:i}", "atoms", problem->molecule.atom_count, "distance",
                               problem->restraints.distance_count, "dihedral", problem->restraints.dihedral_count, "unmapped",
                               problem->restraints.unmapped_count);
    for (int r = 0; r < TML_RANGE_COUNT; r++) put(&counts, tml_range_words[r], json_integer(ranges[r]));
    json_t *root = json_pack("{s:s, s:s, s:o, s:b, s:o, s:o, s:o, s:o, s:o, s:o, s:o}", "program", "trammel", "version",
                             TML_VERSION, "title", text_of(problem->title == NULL ? "" : problem->title), "consistent",
                             found->count == 0, "counts", counts, "contradictions", findings(problem, found), "repair",
                             repairs(problem, found), "redundant", of_use(problem, uses, TML_USE_REDUNDANT), "out_of_range",
                             of_use(problem, uses, TML_USE_OUT_OF_RANGE), "unmapped", unmapped(problem), "notes", notes(problem));
    return write_json(root, path, error);
}

/* ---- findings of both ---- */

static json_t *step_json(const tml_problem *problem, const tml_step *step) {
    const tml_given *given = &step->given;
    tml_source source = tml_source_of(problem, given);
    bool named = source.is_restraint;
    return json_pack("{s:o, s:o, s:s, s:o, s:s, s:o, s:o, s:o, s:o}", "atom_1", address(&problem->molecule, step->atom_1), "atom_2",
                     address(&problem->molecule, step->atom_2), "bound", given->is_upper ? "upper" : "lower", "value",
                     rounded(given->value), "kind", tml_reason_name(given->reason), "file",
                     named ? text_of(source.file) : json_null(), "line",
                     named && source.line > 0 ? json_integer(source.line) : json_null(), "list",
                     named ? text_of(source.list) : json_null(), "id", named ? text_of(source.id) : json_null());
}

static json_t *findings(const tml_problem *problem, const tml_contradictions *found) {
    json_t *list = json_array();
    for (size_t i = 0; found != NULL && i < found->count; i++) {
        const tml_contradiction *item = &found->items[i];
        json_t *chain = json_array();
        for (size_t k = 0; k < item->step_count; k++) append(&chain, step_json(problem, &item->steps[k]));
        append(&list, json_pack("{s:s, s:o, s:b, s:o}", "level", "triangle", "excess", rounded(item->excess),
                                              "conditional", item->conditional, "chain", chain));
    }
    return list;
}

static json_t *notes(const tml_problem *problem) {
    json_t *list = json_array();
    for (size_t i = 0; i < problem->note_count; i++) {
        json_t *item = place_json(problem, problem->notes[i].place);
        put(&item, "text", text_of(problem->notes[i].text));
        append(&list, item);
    }
    return list;
}

/* ---- writing ---- */

static int take(const char *text, size_t length, void *file) {
    tml_file_write(file, text, length);
    return 0;
}

/* Write and free; a root that lacks memory is NULL. */
static tml_status write_json(json_t *root, const char *path, tml_error *error) {
    enum { DIGITS = 12 };
    bool compressed;
    tml_file *file;
    if (root == NULL) return tml_no_memory(error);
    tml_format_of(path, &compressed);
    tml_status status = tml_file_open(path, compressed, &file, error);
    if (status == TML_OK) {
        bool dumped = json_dump_callback(root, take, file, JSON_INDENT(2) | JSON_REAL_PRECISION(DIGITS)) == 0;
        tml_file_write(file, "\n", 1);
        if (dumped) {
            status = tml_file_close(file, error);
        } else {
            tml_file_discard(file);
            status = tml_no_memory(error);
        }
    }
    json_decref(root);
    return status;
}

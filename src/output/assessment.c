/* assessment.c: the report on given models, for people. */
#include <math.h>

#include "ensemble/assess.h"
#include "output/output.h"
#include "output/report.h"
#include "output/words.h"

/* Contents: the report - what was matched - restraints by range and size - models */

enum { WIDTH = TML_REPORT_WIDTH, LINE = 512 };

static void tell_matching(tml_file *file, const tml_assessment *a);
static void tell_ranges(tml_file *file, const tml_assessment *a);
static void tell_dihedrals(tml_file *file, const tml_assessment *a);
static void tell_models(tml_file *file, const tml_assessment *a);

tml_status tml_print_assessment(FILE *out, const tml_assessment *a, double over, double over_angle, tml_error *error) {
    tml_file *file;
    tml_status status = tml_file_wrap(out, &file, error);
    if (status != TML_OK) return status;
    tml_tell_problem(file, a->problem);
    tell_matching(file, a);
    tell_ranges(file, a);
    tell_dihedrals(file, a);
    tell_models(file, a);
    status = tml_tell_worst(file, a->ensemble, over, over_angle, error);
    if (status != TML_OK) {
        tml_file_discard(file);
        return status;
    }
    tml_tell_agreement(file, a->ensemble);
    tml_tell_stereo(file, a->ensemble);
    tml_tell_unmapped(file, a->problem);
    tml_tell_notes(file, a->problem);
    tml_file_print(file, "\n");
    tml_file_paragraph(file, WIDTH, "", "", "%s", tml_words_measured);
    return tml_file_close(file, error);
}

/* ---- what was matched ---- */

static void tell_matching(tml_file *file, const tml_assessment *a) {
    const tml_sites *sites = &a->sites;
    const tml_molecule *molecule = &a->problem->molecule;
    char name[LINE];
    tml_file_print(file, "%d model%s\n", a->model_count, a->model_count == 1 ? "" : "s");
    if (sites->renamed_chains > 0)
        tml_file_paragraph(file, WIDTH, "", "  ", "%d chain%s matched with one of another code, by numbers and names of residues",
                           sites->renamed_chains, sites->renamed_chains == 1 ? " is" : "s are");
    if (sites->other_residues > 0) {
        const tml_residue *residue = &molecule->residues[sites->first_other];
        tml_file_paragraph(file, WIDTH, "", "  ", "%d residue%s of another name in the models, and taken as missing; the first: %s:%s, here %s",
                           sites->other_residues, sites->other_residues == 1 ? " is" : "s are", residue->chain, residue->number, residue->name);
    }
    if (sites->missing > 0) {
        tml_molecule_address(molecule, sites->first_missing, name, sizeof name);
        tml_file_paragraph(file, WIDTH, "", "  ", "%d atom%s missing in the models; the first: %s", sites->missing,
                           sites->missing == 1 ? " is" : "s are", name);
    }
    if (sites->left > 0) {
        const tml_site *site = &a->models.atoms[sites->first_left];
        const tml_site_residue *residue = &a->models.residues[site->residue];
        tml_file_paragraph(file, WIDTH, "", "  ", "%d atom%s of the models %s not in the inputs' molecule; the first: %s:%s:%s", sites->left,
                           sites->left == 1 ? "" : "s", sites->left == 1 ? "is" : "are", residue->chain, residue->number, site->name);
    }
    if (a->problem->restraints.stereo_count > 0)
        tml_file_paragraph(file, WIDTH, "", "  ", "names with x and y: each model has the assignment that it violates least");
}

/* ---- restraints by range and size ---- */

/* A table's line: how many restraints of a model are over each size, on average over the models. */
enum { SIZES = 5 };
static const double SIZE[SIZES] = {0.1, 0.2, 0.3, 0.5, 1.0}, DEGREES[SIZES] = {1, 5, 10, 20, 40};

typedef struct tally { int32_t restraints; int64_t over[SIZES], seen; double most, squares; } tally;

static void count_violations(tally *t, const double *violation, int32_t models, const double size[SIZES]) {
    t->restraints++;
    for (int32_t m = 0; m < models; m++) {
        if (isnan(violation[m])) continue;
        t->seen++;
        t->squares += violation[m] * violation[m];
        t->most = fmax(t->most, violation[m]);
        for (int k = 0; k < SIZES; k++) t->over[k] += violation[m] > size[k];
    }
}

static void tell_tally(tml_file *file, const char *what, const tally *t, int32_t models, int decimals) {
    tml_file_print(file, "%-28s %7d ", what, t->restraints);
    for (int k = 0; k < SIZES; k++) tml_file_print(file, " %7.1f", (double)t->over[k] / models);
    tml_file_print(file, "  %8.*f %8.*f\n", decimals, t->most, decimals + 1, t->seen > 0 ? sqrt(t->squares / (double)t->seen) : 0.0);
}

static void tell_ranges(tml_file *file, const tml_assessment *a) {
    static const char *const WORDS[TML_RANGE_COUNT] = {"within a residue", "between neighbours", "two to four residues apart",
                                                       "five or more residues apart", "between chains"};
    const tml_restraints *restraints = &a->problem->restraints;
    tally all = {0}, by_range[TML_RANGE_COUNT] = {0};
    if (restraints->distance_count == 0) return;
    for (int32_t i = 0; i < restraints->distance_count; i++) {
        const double *violation = &a->distance[(size_t)i * (size_t)a->model_count];
        count_violations(&all, violation, a->model_count, SIZE);
        count_violations(&by_range[restraints->distances[i].range], violation, a->model_count, SIZE);
    }
    tml_file_print(file, "\nDistances                              violated in a model, on average, by more than, Å\n");
    tml_file_print(file, "%-28s %7s      0.1     0.2     0.3     0.5     1.0   most, Å   r.m.s.\n", "", "number");
    for (int r = 0; r < TML_RANGE_COUNT; r++)
        if (by_range[r].restraints > 0) tell_tally(file, WORDS[r], &by_range[r], a->model_count, 2);
    tell_tally(file, "all", &all, a->model_count, 2);
    if (all.seen < (int64_t)restraints->distance_count * a->model_count)
        tml_file_print(file, "%lld of these could not be measured, for want of atoms\n",
                       (long long)((int64_t)restraints->distance_count * a->model_count - all.seen));
}

static void tell_dihedrals(tml_file *file, const tml_assessment *a) {
    const tml_restraints *restraints = &a->problem->restraints;
    tally all = {0};
    if (restraints->dihedral_count == 0) return;
    for (int32_t i = 0; i < restraints->dihedral_count; i++)
        count_violations(&all, &a->dihedral[(size_t)i * (size_t)a->model_count], a->model_count, DEGREES);
    tml_file_print(file, "\nDihedrals                              violated in a model, on average, by more than, °\n");
    tml_file_print(file, "%-28s %7s        1       5      10      20      40   most, °   r.m.s.\n", "", "number");
    tell_tally(file, "all", &all, a->model_count, 1);
}

/* ---- models ---- */

static void tell_models(tml_file *file, const tml_assessment *a) {
    bool backbone = false;
    for (int32_t m = 0; m < a->model_count; m++) backbone = backbone || !isnan(a->ensemble->models[m].measures.backbone_usual);
    tml_file_print(file, "\n       distances over, Å       dihedrals     r.m.s. off ideal   planes  hands names  peptides     over-  usual\n");
    tml_file_print(file, "model   0.1   0.5  worst     5°  worst, °  bonds, Å angles, °    off, Å wrong swapped cis  bent   laps   phi, psi\n");
    for (int32_t m = 0; m < a->model_count; m++) {
        const tml_measures *of = &a->ensemble->models[m].measures;
        tml_file_print(file, "%5d %5d %5d %6.2f  %5d  %8.1f    %6.4f    %6.2f    %6.3f %5d   %5d %3d %5d  %5d", m + 1, of->distance_over_01,
                       of->distance_over_05, of->distance_max, of->dihedral_over_5, of->dihedral_max, of->bond_rms, of->angle_rms,
                       of->plane_max, of->wrong_handed, of->swapped_names, of->cis_undeclared, of->omega_off, of->overlaps);
        if (backbone)
            tml_file_print(file, "   %6.3f\n", of->backbone_usual);
        else
            tml_file_print(file, "\n");
    }
    tml_file_paragraph(file, WIDTH, "", "  ",
                       "Off ideal: from this program's own values. Cis: but before proline or where the inputs say so. Bent: omega more "
                       "than 30° off its plane. Overlaps: pairs more than three bonds apart, closer than their radii by 0.6 Å (1.0 for "
                       "polar ones).");
}

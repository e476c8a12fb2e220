/* text.c: the reports for people, 100 columns wide at most, and the table of limits. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/vector.h"
#include "output/file.h"
#include "output/output.h"
#include "output/report.h"
#include "output/words.h"

/* Contents: build - its models - its worst restraints - what the models agree on - check - findings of both - table of limits */

enum { WIDTH = TML_REPORT_WIDTH, LINE = 512, NAMES = 700, MOST_LISTED = 40, FEW_LISTED = 10 };

static void tell_models(tml_file *file, const tml_ensemble *ensemble);
static void tell_hands(tml_file *file, const tml_ensemble *ensemble);
static void tell_chains(tml_file *file, const tml_ensemble *ensemble);
static void tell_use(tml_file *file, const tml_problem *problem, const tml_use *uses, tml_use wanted, int32_t most,
                     const char *what);
static void tell_conflicts(tml_file *file, const tml_problem *problem, const tml_contradictions *found);

static const char *plural(int64_t count) {
    return count == 1 ? "" : "s";
}

static void heading(tml_file *file, const char *text) {
    tml_file_print(file, "\n%s\n", text);
}

void tml_tell_problem(tml_file *file, const tml_problem *problem) {
    const tml_molecule *molecule = &problem->molecule;
    if (problem->title != NULL && problem->title[0] != '\0') tml_file_paragraph(file, WIDTH, "", "  ", "%s", problem->title);
    char atoms[96], residues[96] = "", unmapped[96] = "";
    snprintf(atoms, sizeof atoms, "%d atom%s", molecule->atom_count, plural(molecule->atom_count));
    if (molecule->residue_count > 0 && molecule->residues[0].number[0] != '\0')
        snprintf(residues, sizeof residues, " in %d residue%s of %d chain%s", molecule->residue_count,
                 plural(molecule->residue_count), molecule->chain_count, plural(molecule->chain_count));
    if (problem->restraints.unmapped_count > 0)
        snprintf(unmapped, sizeof unmapped, ", and %d more that name%s unknown atoms", problem->restraints.unmapped_count,
                 problem->restraints.unmapped_count == 1 ? "s" : "");
    tml_file_paragraph(file, WIDTH, "", "  ", "%s%s; %d distance and %d dihedral restraint%s%s", atoms, residues,
                       problem->restraints.distance_count, problem->restraints.dihedral_count,
                       plural(problem->restraints.dihedral_count), unmapped);
}

/* ---- build ---- */

tml_status tml_print_build(FILE *out, const tml_ensemble *ensemble, const tml_contradictions *found, tml_error *error) {
    char rule[LINE];
    tml_file *file;
    tml_status status = tml_file_wrap(out, &file, error);
    if (status != TML_OK) return status;
    tml_tell_problem(file, ensemble->problem);
    int32_t passed = 0;
    for (int32_t m = 0; m < ensemble->model_count; m++) passed += ensemble->models[m].passed;
    tml_say_selection(ensemble, rule, sizeof rule);
    tml_file_paragraph(file, WIDTH, "", "  ", "%d model%s written, seed %llu: %s.", ensemble->model_count,
                       plural(ensemble->model_count), (unsigned long long)ensemble->seed, rule);
    if (passed < ensemble->model_count)
        tml_file_paragraph(file, WIDTH, "", "  ",
                           "%d of the models written did not pass; they come last and are flagged. More trials (--trials), or a "
                           "look at the restraints that are violated in most models, may help.",
                           ensemble->model_count - passed);
    else if (ensemble->model_count < ensemble->wanted)
        tml_file_paragraph(file, WIDTH, "", "  ", "%d were asked for; more trials (--trials) may give more.", ensemble->wanted);
    tell_models(file, ensemble);
    status = tml_tell_worst(file, ensemble, 0.1, 5, error);
    if (status != TML_OK) {
        tml_file_discard(file);
        return status;
    }
    tml_tell_agreement(file, ensemble);
    tell_hands(file, ensemble);
    tell_chains(file, ensemble);
    tell_conflicts(file, ensemble->problem, found);
    tml_tell_unmapped(file, ensemble->problem);
    tml_tell_notes(file, ensemble->problem);
    tml_file_print(file, "\n");
    tml_file_paragraph(file, WIDTH, "", "", "%s", tml_words_passing);
    tml_file_paragraph(file, WIDTH, "", "", "%s", tml_words_warning);
    return tml_file_close(file, error);
}

/* ---- its models ---- */

static void tell_models(tml_file *file, const tml_ensemble *ensemble) {
    heading(file, "                          distances over by, Å      dihedrals over   r.m.s. off ideal    over-");
    tml_file_print(file, "model trial      error    0.1  0.2  0.5  worst      5°  worst, °    bonds, Å angles, °   laps\n");
    for (int32_t m = 0; m < ensemble->model_count; m++) {
        const tml_model *model = &ensemble->models[m];
        const tml_measures *of = &model->measures;
        tml_file_print(file, "%5d %5d %10.2f  %5d%5d%5d %6.2f   %5d    %6.1f     %6.4f    %6.2f  %5d%s\n", m + 1, model->trial,
                       model->error, of->distance_over_01, of->distance_over_02, of->distance_over_05, of->distance_max,
                       of->dihedral_over_5, of->dihedral_max, of->bond_rms, of->angle_rms, of->overlaps,
                       model->passed ? "" : " failed");
    }
}

/* ---- its worst restraints ---- */

/* How often and how far a restraint is violated; worst is in Å or degrees, severity in units of what counts. */
typedef struct offence { int32_t restraint; int32_t models; double worst, severity; bool dihedral; } offence;

/* Most models first, then the most severe. */
static int compare_offences(const void *one, const void *two) {
    const offence *a = one, *b = two;
    if (a->models != b->models) return a->models > b->models ? -1 : 1;
    if (a->severity != b->severity) return a->severity > b->severity ? -1 : 1;
    if (a->dihedral != b->dihedral) return a->dihedral ? 1 : -1;
    return (a->restraint > b->restraint) - (a->restraint < b->restraint);
}

/* The atoms of a restraint: of its first alternative, with a mark for more. */
static void name_atoms(const tml_problem *problem, const offence *at, char *text, size_t size) {
    enum { ROOM = 160 };
    char names[4][ROOM];
    const tml_restraints *restraints = &problem->restraints;
    if (at->dihedral) {
        const int32_t *atoms = restraints->intervals[restraints->dihedrals[at->restraint].first_interval].atoms;
        for (int k = 0; k < 4; k++) tml_molecule_address(&problem->molecule, atoms[k], names[k], sizeof names[k]);
        snprintf(text, size, "%s - %s - %s - %s", names[0], names[1], names[2], names[3]);
        return;
    }
    const tml_distance_restraint *restraint = &restraints->distances[at->restraint];
    const tml_alternative *first = &restraints->alternatives[restraint->first_alternative];
    tml_molecule_address(&problem->molecule, restraints->group_atoms[first->first_a], names[0], sizeof names[0]);
    tml_molecule_address(&problem->molecule, restraints->group_atoms[first->first_b], names[1], sizeof names[1]);
    int others = restraint->pair_count - 1;
    if (others > 0)
        snprintf(text, size, "%s - %s and %d other pair%s", names[0], names[1], others, plural(others));
    else
        snprintf(text, size, "%s - %s", names[0], names[1]);
}

static void tell_offence(tml_file *file, const tml_ensemble *ensemble, const offence *at) {
    char atoms[NAMES], first[64];
    const tml_problem *problem = ensemble->problem;
    const tml_given as_given = {.reason = at->dihedral ? TML_REASON_DIHEDRAL : TML_REASON_RESTRAINT, .source = at->restraint};
    tml_source source = tml_source_of(problem, &as_given);
    name_atoms(problem, at, atoms, sizeof atoms);
    if (at->dihedral)
        snprintf(first, sizeof first, "  %4d %8.1f °   ", at->models, at->worst);
    else
        snprintf(first, sizeof first, "  %4d %8.2f Å   ", at->models, at->worst);
    tml_file_paragraph(file, WIDTH, first, "                    ", "%s%s%s: %s", source.id, source.list[0] == '\0' ? "" : " of ",
                       source.list, atoms);
}

tml_status tml_tell_worst(tml_file *file, const tml_ensemble *ensemble, double over, double over_angle, tml_error *error) {
    enum { SHOWN = 15 };
    const tml_restraints *restraints = &ensemble->problem->restraints;
    size_t count = 0;
    offence *list = tml_alloc((size_t)restraints->distance_count + (size_t)restraints->dihedral_count, sizeof *list);
    if (list == NULL) return tml_no_memory(error);
    for (int32_t i = 0; i < restraints->distance_count + restraints->dihedral_count; i++) {
        bool dihedral = i >= restraints->distance_count;
        offence at = {.restraint = dihedral ? i - restraints->distance_count : i, .dihedral = dihedral};
        for (int32_t m = 0; m < ensemble->model_count; m++) {
            const double *xyz = ensemble->models[m].xyz;
            double off = dihedral ? tml_dihedral_violation(restraints, &restraints->dihedrals[at.restraint], xyz) * 180.0 / TML_PI
                                  : fabs(tml_distance_violation(restraints, &restraints->distances[at.restraint], ensemble->models[m].swapped, xyz));
            at.models += off > (dihedral ? over_angle : over);
            at.worst = fmax(at.worst, off);
        }
        at.severity = at.worst / (dihedral ? over_angle : over);
        if (at.models > 0) list[count++] = at;
    }
    if (count > 0) {
        qsort(list, count, sizeof *list, compare_offences);
        tml_file_print(file, "\n%zu restraint%s violated by more than %g Å or %g° in some model%s\n", count, plural((int64_t)count), over, over_angle,
                       count > SHOWN ? "; those in most:" : ":");
        tml_file_print(file, "models      worst   restraint\n");
        for (size_t i = 0; i < count && i < SHOWN; i++) tell_offence(file, ensemble, &list[i]);
    } else if (ensemble->model_count > 0 && restraints->distance_count + restraints->dihedral_count > 0) {
        tml_file_print(file, "\nNo restraint is violated by more than %g Å or %g° in any model.\n", over, over_angle);
    }
    free(list);
    return TML_OK;
}

/* ---- what the models agree on ---- */

/* A residue's code with its chain, or what stands for one in a list of residues. */
static void name_stretch(const tml_residue *from, const tml_residue *to, char *text, size_t size) {
    const char *colon = from->chain[0] == '\0' ? "" : ":";
    if (from->number[0] == '\0')
        snprintf(text, size, "all single atoms");
    else if (from == to)
        snprintf(text, size, "%s%s%s", from->chain, colon, from->number);
    else
        snprintf(text, size, "%s%s%s to %s", from->chain, colon, from->number, to->number);
}

/* Stretches of residues that are well defined; what does not fit in the text is cut off with an ellipsis. */
static void tell_stretches(tml_file *file, const tml_ensemble *ensemble) {
    enum { ROOM = 4000 };
    const tml_molecule *molecule = &ensemble->problem->molecule;
    char all[ROOM + LINE] = "";
    size_t used = 0;
    for (int32_t r = 0; r < molecule->residue_count; r++) {
        int32_t last = r;
        char text[LINE];
        if (!ensemble->well_defined[r]) continue;
        while (last + 1 < molecule->residue_count && ensemble->well_defined[last + 1] &&
               molecule->residues[last + 1].chain_index == molecule->residues[r].chain_index)
            last++;
        name_stretch(&molecule->residues[r], &molecule->residues[last], text, sizeof text);
        if (used + strlen(text) + 2 > ROOM) {
            snprintf(all + used, sizeof all - used, ", …");
            break;
        }
        used += (size_t)snprintf(all + used, sizeof all - used, "%s%s", used == 0 ? "" : ", ", text);
        r = last;
    }
    tml_file_paragraph(file, WIDTH, "well defined: ", "  ", "%s",
                       all[0] == '\0' ? "nothing; the models agree on no part of the molecule" : all);
}

void tml_tell_agreement(tml_file *file, const tml_ensemble *ensemble) {
    const tml_molecule *molecule = &ensemble->problem->molecule;
    if (ensemble->model_count < 2 || ensemble->spread == NULL || ensemble->well_defined == NULL) return;
    double sum = 0, all = 0;
    int32_t count = 0, all_count = 0;
    for (int32_t a = 0; a < molecule->atom_count; a++) {
        double square = ensemble->spread[a] * ensemble->spread[a];
        if (isnan(square)) continue;
        all_count++;
        all += square;
        if (!ensemble->well_defined[molecule->atoms[a].residue]) continue;
        sum += square;
        count++;
    }
    heading(file, "Agreement of the models: r.m.s. distance of atoms from their mean positions");
    if (count > 0) tml_file_print(file, "%.2f Å over the well-defined part, ", sqrt(sum / count));
    tml_file_print(file, "%.2f Å over all atoms\n", all_count > 0 ? sqrt(all / all_count) : 0.0);
    tell_stretches(file, ensemble);
}

static void tell_cis(tml_file *file, const tml_molecule *molecule) {
    for (int32_t p = 0; p < molecule->peptide_count; p++) {
        const tml_peptide *peptide = &molecule->peptides[p];
        const tml_residue *one = &molecule->residues[peptide->residue1], *two = &molecule->residues[peptide->residue2];
        if (peptide->cis)
            tml_file_paragraph(file, WIDTH, "", "  ", "The peptide bond %s:%s %s - %s:%s %s is cis: %s.", one->chain, one->number,
                               one->name, two->chain, two->number, two->name,
                               peptide->declared ? "the input says so" : "the restraints need it");
    }
}

/* In how many models x is the second member of an open stereo pair. */
static int32_t count_swapped(const tml_ensemble *ensemble, int32_t pair) {
    int32_t swapped = 0;
    for (int32_t m = 0; m < ensemble->model_count; m++)
        swapped += ensemble->models[m].swapped != NULL && ensemble->models[m].swapped[pair];
    return swapped;
}

/* Which open stereo pairs all models assign alike: "A:5:HB2", the atom that x is. */
void tml_tell_stereo(tml_file *file, const tml_ensemble *ensemble) {
    enum { SHOWN = 24 };
    const tml_restraints *restraints = &ensemble->problem->restraints;
    char all[SHOWN * NAMES] = "";
    int32_t alike = 0;
    size_t used = 0;
    if (restraints->stereo_count == 0 || ensemble->model_count == 0) return;
    for (int32_t p = 0; p < restraints->stereo_count; p++) {
        int32_t swapped = count_swapped(ensemble, p);
        const tml_stereo_member *member = &restraints->stereo_members[restraints->stereo[p].first_member];
        char name[NAMES];
        if ((swapped != 0 && swapped != ensemble->model_count) || alike++ >= SHOWN) continue;
        tml_molecule_address(&ensemble->problem->molecule, swapped == 0 ? member->first : member->second, name, sizeof name);
        used += (size_t)snprintf(all + used, sizeof all - used, "%s%s", used == 0 ? "" : ", ", name);
    }
    tml_file_print(file, "Of %d stereo pair%s named with x and y, %d %s assigned alike in all models", restraints->stereo_count,
                   plural(restraints->stereo_count), alike, alike == 1 ? "is" : "are");
    if (alike == 0)
        tml_file_print(file, ".\n");
    else
        tml_file_paragraph(file, WIDTH, "; x is, or is on the branch of,\n  ", "  ", "%s%s", all, alike > SHOWN ? ", …; the summary has all." : ".");
}

static void tell_hands(tml_file *file, const tml_ensemble *ensemble) {
    int32_t mirrored = 0, doubtful = 0;
    for (int32_t m = 0; m < ensemble->model_count; m++) {
        mirrored += ensemble->models[m].mirrored;
        doubtful += tml_model_hand_in_doubt(&ensemble->models[m]);
    }
    heading(file, "Handedness");
    tml_file_print(file, "%d model%s come%s from the embedding as it was, %d from its mirror image.\n",
                   ensemble->model_count - mirrored, plural(ensemble->model_count - mirrored),
                   ensemble->model_count - mirrored == 1 ? "s" : "", mirrored);
    if (doubtful > 0)
        tml_file_paragraph(file, WIDTH, "", "  ",
                           "For %d of them the other image passed, too, as a different fold: the limits do not tell the fold from its "
                           "mirror image.",
                           doubtful);
    tell_cis(file, &ensemble->problem->molecule);
    tml_tell_stereo(file, ensemble);
}

/* Chains that are alike, and restraints that may lie within a chain or between two. */
static void tell_chains(tml_file *file, const tml_ensemble *ensemble) {
    const tml_problem *problem = ensemble->problem;
    int32_t both = 0, between = 0, within = 0;
    for (int32_t i = 0; i < problem->restraints.distance_count && ensemble->model_count > 0; i++) {
        int32_t mostly = 0;
        double share = 0;
        for (int32_t m = 0; m < ensemble->model_count && !isnan(share); m++) {
            const tml_model *model = &ensemble->models[m];
            share = tml_between_chains(&problem->restraints, &problem->molecule, &problem->restraints.distances[i], model->swapped, model->xyz);
            mostly += share > 0.5;
        }
        if (isnan(share)) continue;
        both++;
        between += mostly == ensemble->model_count;
        within += mostly == 0;
    }
    if (problem->molecule.alike_count == 0 && both == 0) return;
    heading(file, "Chains");
    double worst = 0;
    for (int32_t m = 0; m < ensemble->model_count; m++) worst = fmax(worst, ensemble->models[m].measures.alike_rms);
    for (int32_t s = 0; s < problem->molecule.alike_count; s++) {
        const tml_alike *set = &problem->molecule.alike[s];
        const int32_t *atoms = &problem->molecule.alike_atoms[set->first];
        for (int32_t c = 0; c < set->copies && set->count > 0; c++)
            tml_file_print(file, "%s%s", c == 0 ? "" : c + 1 < set->copies ? ", " : " and ",
                           problem->molecule.residues[problem->molecule.atoms[atoms[c * set->count]].residue].chain);
        tml_file_print(file, " are alike, over %d heavy atoms each%s.\n", set->count,
                       set->copies > 3 ? "; their arrangement is left to the restraints" : ", and arranged symmetrically");
    }
    if (problem->molecule.alike_count > 0)
        tml_file_print(file, "After superposition no two of them are farther apart than %.2f Å r.m.s. in any model.\n", worst);
    if (both > 0)
        tml_file_paragraph(file, WIDTH, "", "  ",
                           "%d restraint%s may lie within a chain or between two: within in all models %d, between in all %d; the "
                           "summary tells model by model.",
                           both, plural(both), within, between);
}

/* ---- check ---- */

static void tell_counts(tml_file *file, const tml_problem *problem) {
    static const char *const WORDS[TML_RANGE_COUNT] = {"within a residue", "between neighbours", "two to four residues apart",
                                                       "five or more residues apart", "between chains"};
    int32_t ranges[TML_RANGE_COUNT];
    tml_count_ranges(problem, ranges);
    heading(file, "Restraints");
    tml_file_print(file, "%8d distances\n", problem->restraints.distance_count);
    for (int r = 0; r < TML_RANGE_COUNT; r++)
        if (ranges[r] > 0) tml_file_print(file, "%12d %s\n", ranges[r], WORDS[r]);
    tml_file_print(file, "%8d dihedrals\n%8d unmapped\n", problem->restraints.dihedral_count, problem->restraints.unmapped_count);
}

tml_status tml_print_check(FILE *out, const tml_problem *problem, const tml_contradictions *found, const tml_use *uses,
                           tml_error *error) {
    tml_file *file;
    tml_status status = tml_file_wrap(out, &file, error);
    if (status != TML_OK) return status;
    tml_tell_problem(file, problem);
    tell_counts(file, problem);
    if (found->count == 0) heading(file, "No limits contradict each other by their distances.");
    tell_conflicts(file, problem, found);
    tell_use(file, problem, uses, TML_USE_OUT_OF_RANGE, MOST_LISTED, "out of range: no shape of the molecule can meet them");
    tell_use(file, problem, uses, TML_USE_REDUNDANT, FEW_LISTED, "redundant: every shape of the molecule meets them");
    tml_tell_unmapped(file, problem);
    tml_tell_notes(file, problem);
    return tml_file_close(file, error);
}

static void tell_place(char *text, size_t size, const tml_problem *problem, tml_place place) {
    text[0] = '\0';
    if (place.file < 0 || (size_t)place.file >= problem->file_count) return;
    if (place.line > 0)
        snprintf(text, size, "%s:%d: ", problem->files[place.file], place.line);
    else
        snprintf(text, size, "%s: ", problem->files[place.file]);
}

static void tell_use(tml_file *file, const tml_problem *problem, const tml_use *uses, tml_use wanted, int32_t most,
                     const char *what) {
    int32_t count = 0, shown = 0;
    if (uses == NULL) return;
    for (int32_t i = 0; i < problem->restraints.distance_count; i++) count += uses[i] == wanted;
    if (count == 0) return;
    tml_file_print(file, "\n%d distance%s %s\n", count, plural(count), what);
    for (int32_t i = 0; i < problem->restraints.distance_count && shown < most; i++) {
        char place[LINE], atoms[NAMES];
        const tml_distance_restraint *at = &problem->restraints.distances[i];
        if (uses[i] != wanted) continue;
        tell_place(place, sizeof place, problem, at->place);
        name_atoms(problem, &(offence){.restraint = i}, atoms, sizeof atoms);
        if (isinf(at->upper))
            tml_file_paragraph(file, WIDTH, "  ", "    ", "%s%s: %s, at least %.2f Å", place, at->id, atoms, at->lower);
        else
            tml_file_paragraph(file, WIDTH, "  ", "    ", "%s%s: %s, %.2f to %.2f Å", place, at->id, atoms, at->lower, at->upper);
        shown++;
    }
    if (shown < count) tml_file_print(file, "  … and %d more; --json lists all\n", count - shown);
}

/* ---- findings of both ---- */

static void tell_repair(tml_file *file, const tml_problem *problem, const tml_contradiction *conflict) {
    tml_repair repair;
    if (!tml_repair_of(problem, conflict, &repair)) return;
    const tml_distance_restraint *restraint = &problem->restraints.distances[repair.restraint];
    tml_file_paragraph(file, WIDTH, "   ", "     ", "Least change of one restraint that ends it: the %s limit of %s %s by %.3f Å.",
                       repair.upper ? "upper" : "lower", restraint->id, repair.upper ? "raised" : "lowered",
                       ceil(repair.loosen * 1000.0 - 1e-6) / 1000.0);
}

static void tell_conflicts(tml_file *file, const tml_problem *problem, const tml_contradictions *found) {
    char text[1024];
    if (found == NULL || found->count == 0) return;
    tml_file_print(file, "\n%zu contradiction%s among the limits, each with the chain of limits that proves it\n", found->count,
                   plural((int64_t)found->count));
    for (size_t i = 0; i < found->count; i++) {
        const tml_contradiction *conflict = &found->items[i];
        char number[32];
        snprintf(number, sizeof number, "%2zu. ", i + 1);
        tml_say_conflict(problem, conflict, text, sizeof text);
        tml_file_paragraph(file, WIDTH, number, "    ", "%s", text);
        for (size_t k = 0; k < conflict->step_count; k++) {
            char place[LINE];
            tml_source source = tml_source_of(problem, &conflict->steps[k].given);
            place[0] = '\0';
            if (source.is_restraint && source.file != NULL)
                snprintf(place, sizeof place, " (%s:%d)", source.file, source.line);
            tml_say_step(problem, &conflict->steps[k], text, sizeof text);
            tml_file_paragraph(file, WIDTH, "      ", "        ", "%s%s", text, place);
        }
        tell_repair(file, problem, conflict);
    }
}

void tml_tell_unmapped(tml_file *file, const tml_problem *problem) {
    int32_t count = problem->restraints.unmapped_count;
    if (count == 0) return;
    tml_file_print(file, "\n%d restraint%s name%s unknown atoms and %s left out\n", count, plural(count), count == 1 ? "s" : "",
                   count == 1 ? "is" : "are");
    for (int32_t i = 0; i < count && i < MOST_LISTED; i++) {
        char place[LINE];
        const tml_unmapped *at = &problem->restraints.unmapped[i];
        tell_place(place, sizeof place, problem, at->place);
        tml_file_paragraph(file, WIDTH, "  ", "    ", "%s%s: %s", place, at->id, at->reason);
    }
    if (count > MOST_LISTED) tml_file_print(file, "  … and %d more; --json of check lists all\n", count - MOST_LISTED);
}

void tml_tell_notes(tml_file *file, const tml_problem *problem) {
    if (problem->note_count > 0) heading(file, "Notes");
    for (size_t i = 0; i < problem->note_count; i++) {
        char place[LINE];
        tell_place(place, sizeof place, problem, problem->notes[i].place);
        tml_file_paragraph(file, WIDTH, "  ", "    ", "%s%s", place, problem->notes[i].text);
    }
}

/* ---- table of limits ---- */

/* Addresses of all atoms, one after the other; starts[i] is where atom i's begins. NULL without memory. */
static char *all_addresses(const tml_molecule *molecule, size_t **starts) {
    enum { ROOM = 512 };
    char *text = NULL;
    size_t used = 0, capacity = 0;
    *starts = tml_alloc((size_t)molecule->atom_count, sizeof **starts);
    bool good = *starts != NULL && tml_grow(&text, &capacity, ROOM, 1);
    for (int32_t a = 0; good && a < molecule->atom_count; a++) {
        good = tml_grow(&text, &capacity, used + ROOM, 1);
        if (!good) break;
        tml_molecule_address(molecule, a, text + used, ROOM);
        (*starts)[a] = used;
        used += strlen(text + used) + 1;
    }
    if (good) return text;
    free(text);
    free(*starts);
    *starts = NULL;
    return NULL;
}

tml_status tml_write_bounds(const tml_problem *problem, const tml_bounds *bounds, const char *path, tml_error *error) {
    bool compressed;
    size_t *starts;
    tml_file *file;
    char *names = all_addresses(&problem->molecule, &starts);
    if (names == NULL) return tml_no_memory(error);
    tml_format_of(path, &compressed);
    tml_status status = tml_file_open(path, compressed, &file, error);
    if (status == TML_OK) {
        tml_file_print(file, "atom_1\tatom_2\tlower\tupper\n");
        for (int32_t i = 0; i < bounds->n; i++)
            for (int32_t j = i + 1; j < bounds->n; j++) {
                double lower = tml_bounds_lower(bounds, i, j), upper = tml_bounds_upper(bounds, i, j);
                if (isinf(upper))
                    tml_file_print(file, "%s\t%s\t%.4f\t-\n", names + starts[i], names + starts[j], lower);
                else
                    tml_file_print(file, "%s\t%s\t%.4f\t%.4f\n", names + starts[i], names + starts[j], lower, upper);
            }
        status = tml_file_close(file, error);
    }
    free(starts);
    free(names);
    return status;
}

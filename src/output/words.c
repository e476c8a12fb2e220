#include "output/words.h"

#include <math.h>
#include <string.h>

const char tml_words_passing[] =
    "A trial passes when no distance exceeds its limit by more than 0.5 Å, no dihedral by more than 10°, no centre has the wrong "
    "hand, no peptide is cis but where the input says so or before proline, and no bond is off by more than 0.1 Å.";

const char tml_words_warning[] =
    "These models are starting points: they meet the limits as far as the figures here say and no further. They are to be "
    "refined and validated by people qualified to do so, and are not for clinical decisions.";
const char tml_words_measured[] =
    "These figures tell how far models agree with these inputs and with usual geometry. They are no validation: that is for people "
    "qualified to do so, with the experimental data, and nothing here is for clinical decisions.";

const char *const tml_range_words[TML_RANGE_COUNT] = {"intra", "sequential", "medium", "long", "inter_chain"};

/* What covalent reasons mean to a reader. */
static const char *phrase_of(tml_reason reason) {
    static const char *const PHRASES[] = {[TML_REASON_RESTRAINT] = "restraint",
                                          [TML_REASON_BOND] = "bond length",
                                          [TML_REASON_ANGLE] = "bond angle",
                                          [TML_REASON_TORSION] = "reach of a torsion",
                                          [TML_REASON_PLANE] = "planar group",
                                          [TML_REASON_CHIRALITY] = "handedness",
                                          [TML_REASON_RADIUS] = "contact of radii",
                                          [TML_REASON_DIHEDRAL] = "dihedral restraint"};
    return PHRASES[reason];
}

tml_source tml_source_of(const tml_problem *problem, const tml_given *given) {
    tml_source source = {"", "", NULL, 0, false};
    tml_place place;
    if (given->source < 0) return source;
    if (given->reason == TML_REASON_RESTRAINT) {
        const tml_distance_restraint *restraint = &problem->restraints.distances[given->source];
        source.list = restraint->list;
        source.id = restraint->id;
        place = restraint->place;
    } else if (given->reason == TML_REASON_DIHEDRAL) {
        const tml_dihedral_restraint *restraint = &problem->restraints.dihedrals[given->source];
        source.list = restraint->list;
        source.id = restraint->id;
        place = restraint->place;
    } else {
        return source;
    }
    source.is_restraint = true;
    if (source.list == NULL) source.list = "";
    if (source.id == NULL) source.id = "";
    if (place.file >= 0 && (size_t)place.file < problem->file_count) source.file = problem->files[place.file];
    source.line = place.line;
    return source;
}

void tml_say_step(const tml_problem *problem, const tml_step *step, char *text, size_t size) {
    enum { ROOM = 160 };
    char atom_1[ROOM], atom_2[ROOM];
    const tml_given *given = &step->given;
    tml_source source = tml_source_of(problem, given);
    tml_molecule_address(&problem->molecule, step->atom_1, atom_1, sizeof atom_1);
    tml_molecule_address(&problem->molecule, step->atom_2, atom_2, sizeof atom_2);
    int used = snprintf(text, size, "%s to %s is at %s %.3f Å: %s", atom_1, atom_2, given->is_upper ? "most" : "least", given->value,
                        phrase_of(given->reason));
    if (source.is_restraint && used > 0 && (size_t)used < size)
        snprintf(text + used, size - (size_t)used, "%s%s%s%s%s", source.id[0] == '\0' ? "" : " ", source.id,
                 source.list[0] == '\0' ? "" : " of list ", source.list, given->conditional ? ", on an assumption" : "");
    else if (given->conditional && used > 0 && (size_t)used < size)
        snprintf(text + used, size - (size_t)used, ", an assumption");
}

void tml_say_conflict(const tml_problem *problem, const tml_contradiction *conflict, char *text, size_t size) {
    enum { ROOM = 160 };
    char atom_1[ROOM], atom_2[ROOM];
    double reach = 0;
    for (size_t i = 1; i < conflict->step_count; i++) reach += conflict->steps[i].given.value;
    tml_molecule_address(&problem->molecule, conflict->steps[0].atom_1, atom_1, sizeof atom_1);
    tml_molecule_address(&problem->molecule, conflict->steps[0].atom_2, atom_2, sizeof atom_2);
    snprintf(text, size, "%s and %s must be at least %.3f Å apart, but the way between them is at most %.3f Å long: %.3f Å too short%s.",
             atom_1, atom_2, conflict->steps[0].given.value, reach, conflict->excess,
             conflict->conditional ? " (if the assumptions marked below hold)" : "");
}

void tml_say_selection(const tml_ensemble *ensemble, char *text, size_t size) {
    const char *rule = ensemble->select_lowest ? "lowest" : "first";
    if (ensemble->passed == 0)
        snprintf(text, size, "of %d trials, none of which passed, %s were chosen (%s)", ensemble->trials,
                 ensemble->select_lowest ? "those with the lowest error" : "the first", rule);
    else if (ensemble->passed < ensemble->model_count)
        snprintf(text, size, "of %d trials, all %d that passed were chosen and, being too few, %s of the others (%s)",
                 ensemble->trials, ensemble->passed, ensemble->select_lowest ? "those with the lowest error" : "the first", rule);
    else if (ensemble->select_lowest)
        snprintf(text, size, "of %d trials, %d of which passed, those with the lowest error among the passed were chosen (lowest)",
                 ensemble->trials, ensemble->passed);
    else
        snprintf(text, size, "of %d trials, %d of which passed, the first that passed were chosen (first)", ensemble->trials,
                 ensemble->passed);
}

/* By how much the pair bound moves for one Å of the limit: a lower limit of a sum holds for every pair as it is, an upper one
 * binds by the sixth root of the number of pairs. */
static double lever_of(const tml_distance_restraint *restraint, bool upper) {
    return upper && !restraint->average && restraint->pair_count > 1 ? pow(restraint->pair_count, 1.0 / 6.0) : 1.0;
}

bool tml_repair_of(const tml_problem *problem, const tml_contradiction *conflict, tml_repair *repair) {
    bool any = false;
    for (size_t i = 0; i < conflict->step_count; i++) {
        const tml_given *given = &conflict->steps[i].given;
        if (given->reason != TML_REASON_RESTRAINT || given->source < 0) continue;
        double lever = 0; /* a restraint may be in the chain more than once */
        for (size_t k = 0; k < conflict->step_count; k++) {
            const tml_given *other = &conflict->steps[k].given;
            if (other->reason == TML_REASON_RESTRAINT && other->source == given->source && other->is_upper == given->is_upper)
                lever += lever_of(&problem->restraints.distances[other->source], other->is_upper);
        }
        double loosen = conflict->excess / lever;
        if (any && loosen >= repair->loosen) continue;
        *repair = (tml_repair){given->source, given->is_upper, loosen};
        any = true;
    }
    return any;
}

void tml_count_ranges(const tml_problem *problem, int32_t counts[TML_RANGE_COUNT]) {
    memset(counts, 0, TML_RANGE_COUNT * sizeof *counts);
    for (int32_t i = 0; i < problem->restraints.distance_count; i++) counts[problem->restraints.distances[i].range]++;
}

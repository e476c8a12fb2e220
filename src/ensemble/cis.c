#include "ensemble/cis.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "base/pcg.h"
#include "ensemble/ensemble.h"
#include "ensemble/fragment.h"
#include "refine/refine.h"

/* Random starts of each form. */
enum { STARTS = 12, REACH_BEFORE = 2, REACH_AFTER = 1 };
/* In its best model, trans must violate some restraint by at least so many Å more than cis does, and have so much more error. */
static const double CLEAR = 0.2, CLEAR_ERROR = 10.0;
/* Share of the usual annealing: a fragment of four residues folds fast. */
static const double EFFORT = 0.25;
/* Edge of the box of random starts, Å. */
static const double BOX = 12.0;

/* What the best of all starts violates. */
typedef struct outcome { double error, worst; int32_t restraint; } outcome;

static tml_status cut_about(const tml_problem *problem, const tml_peptide *peptide, tml_problem **fragment, tml_error *error);
static bool tells_of(const tml_problem *fragment);
static tml_status fold(const tml_problem *fragment, uint64_t seed, const volatile int *stop, outcome *best, tml_error *error);
static tml_status note_cis(tml_problem *problem, const tml_peptide *peptide, const tml_problem *fragment, const outcome *trans,
                           const outcome *cis, tml_error *error);

tml_status tml_find_cis(tml_problem *problem, uint64_t seed, const volatile int *stop, tml_error *error) {
    tml_molecule *molecule = &problem->molecule;
    tml_status status = TML_OK;
    for (int32_t i = 0; status == TML_OK && i < molecule->peptide_count; i++) {
        const tml_peptide *peptide = &molecule->peptides[i];
        if (peptide->declared || peptide->cis || strcmp(molecule->residues[peptide->residue2].name, "PRO") != 0) continue;
        tml_problem *trans = NULL, *cis = NULL;
        outcome as_trans = {0}, as_cis = {0};
        status = cut_about(problem, peptide, &trans, error);
        if (status == TML_OK && tells_of(trans)) {
            status = fold(trans, seed, stop, &as_trans, error);
            if (status == TML_OK && as_trans.worst >= CLEAR) {
                tml_molecule_set_peptide(molecule, i, true);
                status = cut_about(problem, peptide, &cis, error);
                if (status == TML_OK) status = fold(cis, seed, stop, &as_cis, error);
                bool needed = status == TML_OK && as_trans.worst >= as_cis.worst + CLEAR && as_trans.error >= as_cis.error + CLEAR_ERROR;
                if (needed)
                    status = note_cis(problem, peptide, trans, &as_trans, &as_cis, error);
                else
                    tml_molecule_set_peptide(molecule, i, false);
            }
        }
        tml_fragment_free(trans);
        tml_fragment_free(cis);
    }
    return status;
}

/* The residues about a peptide bond, as far as they are in its chain. */
static tml_status cut_about(const tml_problem *problem, const tml_peptide *peptide, tml_problem **fragment, tml_error *error) {
    const tml_molecule *molecule = &problem->molecule;
    bool *keep = tml_alloc((size_t)molecule->atom_count, sizeof *keep);
    if (keep == NULL) return tml_no_memory(error);
    int32_t chain = molecule->residues[peptide->residue1].chain_index;
    for (int32_t r = peptide->residue1 - (REACH_BEFORE - 1); r <= peptide->residue2 + REACH_AFTER; r++) {
        if (r < 0 || r >= molecule->residue_count || molecule->residues[r].chain_index != chain) continue;
        const tml_residue *residue = &molecule->residues[r];
        for (int32_t i = 0; i < residue->atom_count; i++) keep[residue->first_atom + i] = true;
    }
    tml_status status = tml_fragment_make(problem, keep, fragment, error);
    free(keep);
    return status;
}

/* A fragment without a distance between residues says nothing of its peptide bond. */
static bool tells_of(const tml_problem *fragment) {
    const tml_restraints *restraints = &fragment->restraints;
    for (int32_t i = 0; i < restraints->distance_count; i++)
        if (restraints->distances[i].range != TML_RANGE_INTRA) return true;
    return false;
}

static tml_status fold(const tml_problem *fragment, uint64_t seed, const volatile int *stop, outcome *best, tml_error *error) {
    int32_t n = fragment->molecule.atom_count;
    tml_refiner *refiner = NULL;
    double *xyz = tml_alloc((size_t)n * 3, sizeof *xyz);
    bool *swapped = tml_alloc((size_t)fragment->restraints.stereo_count, sizeof *swapped);
    tml_status status = xyz == NULL || swapped == NULL ? tml_no_memory(error) : tml_refiner_new(fragment, false, &refiner, error);
    *best = (outcome){.error = INFINITY, .restraint = -1};
    for (int start = 0; status == TML_OK && start < STARTS; start++) {
        double energy;
        tml_pcg pcg;
        tml_pcg_seed_trial(&pcg, ~seed, (uint64_t)start);
        for (int32_t i = 0; i < 3 * n; i++) xyz[i] = BOX * tml_pcg_uniform(&pcg);
        status = tml_refine(refiner, EFFORT, &pcg, xyz, swapped, stop, &energy, error);
        if (status != TML_OK || energy >= best->error) continue;
        *best = (outcome){.error = energy, .restraint = -1};
        for (int32_t i = 0; i < fragment->restraints.distance_count; i++) {
            double off = fabs(tml_distance_violation(&fragment->restraints, &fragment->restraints.distances[i], swapped, xyz));
            if (off <= best->worst) continue;
            best->worst = off;
            best->restraint = i;
        }
    }
    free(xyz);
    free(swapped);
    tml_refiner_free(refiner);
    return status;
}

static tml_status note_cis(tml_problem *problem, const tml_peptide *peptide, const tml_problem *fragment, const outcome *trans,
                           const outcome *cis, tml_error *error) {
    const tml_residue *residue = &problem->molecule.residues[peptide->residue2];
    const tml_distance_restraint *blamed = &fragment->restraints.distances[trans->restraint];
    return tml_problem_add_note(
        problem, blamed->place, error,
        "%s:%s PRO is taken as cis: with a trans peptide bond, restraint %s is off by %.2f Å in the best of %d local models; with cis "
        "none is off by more than %.2f Å",
        residue->chain, residue->number, blamed->id, trans->worst, STARTS, cis->worst);
}

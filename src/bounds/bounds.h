/* bounds.h: lower and upper limits on every pair distance of one problem.
 *
 * A tml_bounds owns one n*n float array with rows of `stride` floats: element (i,j) with i<j is the upper limit in Å
 * (INFINITY for none), with i>j the lower; the diagonal is 0. Uppers are rounded up and lowers down wherever a value is
 * stored. Filling it is fill.c's work, tightening it smooth.c's; this file only stores and reads.
 * All steps in a row, tml_bounds_prepare, are public: trammel.h.
 */
#ifndef TML_BOUNDS_H
#define TML_BOUNDS_H

#include "bounds/minplus.h"
#include "input/problem.h"

struct tml_bounds {
    int32_t n;
    size_t stride; /* floats per row, a multiple of 16; n <= stride */
    float *limit;  /* n rows, 64-byte aligned */
};

tml_status tml_bounds_new(int32_t n, tml_bounds **out, tml_error *error);

static inline float *tml_bounds_cell(const tml_bounds *bounds, int32_t row, int32_t column) {
    return &bounds->limit[(size_t)row * bounds->stride + (size_t)column];
}
static inline float tml_bounds_upper(const tml_bounds *bounds, int32_t i, int32_t j) {
    return i < j ? *tml_bounds_cell(bounds, i, j) : *tml_bounds_cell(bounds, j, i);
}
static inline float tml_bounds_lower(const tml_bounds *bounds, int32_t i, int32_t j) {
    return i > j ? *tml_bounds_cell(bounds, i, j) : *tml_bounds_cell(bounds, j, i);
}

/* Tighten one pair: an upper only ever falls, a lower only ever rises. */
void tml_bounds_limit_upper(tml_bounds *bounds, int32_t i, int32_t j, double upper);
void tml_bounds_limit_lower(tml_bounds *bounds, int32_t i, int32_t j, double lower);

/* Why a limit holds. */
typedef enum tml_reason {
    TML_REASON_RESTRAINT, TML_REASON_BOND, TML_REASON_ANGLE, TML_REASON_TORSION, TML_REASON_PLANE, TML_REASON_CHIRALITY,
    TML_REASON_RADIUS, TML_REASON_DIHEDRAL
} tml_reason;
const char *tml_reason_name(tml_reason reason); /* one word, as reports write it: restraint, bond, angle … */

/* One given limit with its source, in double: what proofs are made of. Only given limits are listed, radii are not:
 * a pair without a given lower limit has the floor of radii.h. */
typedef struct tml_given {
    int32_t a, b;      /* a < b */
    double value;      /* Å */
    tml_reason reason;
    bool is_upper;
    bool conditional;  /* leans on an assumption of ours (a trans peptide that nobody declared) */
    int32_t source;    /* index of the restraint (distances or dihedrals) for RESTRAINT and DIHEDRAL, else -1 */
} tml_given;

typedef struct tml_givens { tml_given *items; size_t count, capacity; } tml_givens;

/* A step of a proof, and a proof: the lower limit that fails, then the uppers that lead from atom_2 of the lower back to
 * atom_1, each starting where the last ended. */
typedef struct tml_step { int32_t atom_1, atom_2; tml_given given; } tml_step;
typedef struct tml_contradiction { tml_step *steps; size_t step_count; double excess; bool conditional; } tml_contradiction;
struct tml_contradictions { tml_contradiction *items; size_t count, capacity; };
void tml_contradictions_clear(tml_contradictions *found);

/* Collect every given limit of a problem: covalent ones, and restraints by the rule for sums over groups.
 * givens is appended to; the caller frees its items with free(). TML_OK or TML_NO_MEMORY. */
tml_status tml_givens_collect(const tml_problem *problem, tml_givens *givens, tml_error *error);

/* Limits from givens, over the floors of radii.h where nothing covalent holds two atoms together. Not smoothed.
 * TML_OK, TML_TOO_LARGE or TML_NO_MEMORY. */
tml_status tml_bounds_from_givens(const tml_problem *problem, const tml_givens *givens, tml_bounds **out, tml_error *error);

/* Tighten all limits to their triangle-inequality closure.
 *
 * bounds    n atoms; changed in place
 * threads   0 for all
 *
 * Returns TML_OK, TML_CONTRADICTED (bounds then hold the closure of the uppers only), TML_NO_MEMORY or TML_INTERRUPTED.
 * Source: Dress & Havel, Discrete Appl. Math. 19 (1988) 129.
 */
tml_status tml_bounds_smooth(tml_bounds *bounds, int threads, const tml_watch *watch, tml_error *error);

/* The same with vectors of a given width, for tests and benchmarks. */
tml_status tml_bounds_smooth_with(tml_bounds *bounds, int threads, tml_width width, const tml_watch *watch, tml_error *error);

/* Contradictions with their proofs, found in double from the given limits: those that lean on no assumption first, then by length;
 * of proofs that share a restraint of the user's only the first is kept.
 *
 * closed       the limits after tml_bounds_smooth returned TML_CONTRADICTED: its uppers are closed, its lowers as given
 * tolerance    the excess, Å, from which it counts
 * found        what is found is appended
 */
tml_status tml_contradictions_find(const tml_problem *problem, const tml_givens *givens, const tml_bounds *closed, double tolerance,
                                   tml_contradictions *found, tml_error *error);

/* Give pairs without an upper limit one to draw under: 1.5 times the largest limit of all, and at least 30 Å. Limits that were
 * closed stay so. */
void tml_bounds_cap(tml_bounds *bounds);

#endif

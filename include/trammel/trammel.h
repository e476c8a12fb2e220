/* trammel.h: the public interface of libtrammel.
 *
 * From lower and upper limits on interatomic distances to an ensemble of 3D models, and to a proof where limits contradict
 * each other. Objects are opaque; each has one _free that takes NULL. The library never prints, never exits and has no
 * global state of its own: different objects can be used from different threads. Lengths are in Å, angles in degrees.
 */
#ifndef TRAMMEL_H
#define TRAMMEL_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#ifdef __cplusplus
extern "C" {
#endif

#define TML_VERSION "0.1.0"

typedef enum tml_status {
    TML_OK = 0,
    TML_CONTRADICTED, /* limits that cannot hold together; not an error of the call */
    TML_SHORT,        /* the work ended with fewer passing models than asked for */
    TML_BAD_INPUT,    /* a file or an argument is wrong; tml_error says where */
    TML_TOO_LARGE,    /* more memory than the machine or the format has */
    TML_NO_MEMORY,
    TML_IO,           /* reading or writing failed: disk, permission, pipe */
    TML_INTERRUPTED   /* the caller's stop flag was set */
} tml_status;

/* What went wrong, and where. The caller owns it, zeroed before first use; file is "" and line 0 where there is none. */
typedef struct tml_error {
    tml_status status;
    char file[256];
    long line, column;
    char message[1024];
} tml_error;

typedef struct tml_problem tml_problem;               /* molecule and restraints: what the inputs say */
typedef struct tml_bounds tml_bounds;                 /* lower and upper limits of all pairs */
typedef struct tml_contradictions tml_contradictions; /* which limits fight, with proofs */
typedef struct tml_ensemble tml_ensemble;             /* models and what was measured on them */

/* Progress: stage is a short word, done of total; called from one thread at a time. */
typedef void tml_progress_fn(void *context, const char *stage, long done, long total);

/* How long work meets its caller: both may be NULL. *stop, once nonzero, ends the work with TML_INTERRUPTED. */
typedef struct tml_watch {
    tml_progress_fn *progress;
    void *context;
    const volatile int *stop;
} tml_watch;

const char *tml_version(void);

/* ---- problems ---- */

/* Where in the inputs something stands; file is "" and line 0 where unknown. Strings live as long as the problem. */
typedef struct tml_origin {
    const char *file;
    long line, column;
} tml_origin;

typedef struct tml_counts {
    int32_t atoms, residues, chains;
    int32_t distance_restraints, dihedral_restraints; /* of those whose atoms are all there */
    int32_t unmapped;                                 /* restraints that name atoms which the molecule lacks */
    int32_t notes;                                    /* remarks on the inputs that are no errors */
} tml_counts;

/* A delimited table of restraints, one a row, and what its columns hold. Zeroed before it is filled. */
typedef struct tml_table {
    const char *path;      /* "-" for standard input, gzip understood */
    const char *columns;   /* words for the columns in their order, "chain_1 residue_1 atom_1 … lower upper"; see trammel(1) */
    const char *form;      /* how the text is written, "semicolon decimal-comma nm"; NULL: told from the text; see trammel(1) */
    const char *old_names; /* the mapping from old atom names to present ones, built in or a file; NULL for none */
} tml_table;

/* How pseudo-atoms (QB, MD1, QQG …) in distance restraints count. */
typedef enum tml_pseudo {
    TML_PSEUDO_SUM,      /* (Σ r⁻⁶)^(-1/6) over the atoms of the group */
    TML_PSEUDO_CENTRE,   /* from the centre of the group; limits as they are */
    TML_PSEUDO_CORRECTED /* from the centre of the group; upper limits widened by the published corrections */
} tml_pseudo;

/* What else there is to read, and how names in restraints are taken that leave something open. All zero is the default. */
typedef struct tml_read_options {
    bool sum_stereo_pairs; /* names with x and y mean both members of the pair, summed; otherwise every model takes the
                              assignment of x and y that it violates least */
    tml_pseudo pseudo;
    const tml_table *tables; /* read after the other inputs, whose sequence they need */
    size_t table_count;
    const char *old_names;   /* the same as in a table, for the restraints of the other inputs */
    bool alike_chains;     /* chains of the same residues take the same shape, as if a sheet said that they are alike */
} tml_read_options;

/* Read inputs (sheet, NEF, NMR-STAR 3, component dictionaries; told by content; "-" for standard input, gzip understood) into one problem.
 *
 * options   NULL for the defaults
 * out       the caller frees it with tml_problem_free
 * Returns TML_OK, TML_BAD_INPUT, TML_TOO_LARGE, TML_NO_MEMORY or TML_IO.
 */
tml_status tml_problem_read(const char *const *paths, size_t path_count, const tml_read_options *options, tml_problem **out,
                            tml_error *error);
void tml_problem_free(tml_problem *problem);

/* Kinds of input that can be written. */
typedef enum tml_convert_format { TML_CONVERT_UNKNOWN, TML_CONVERT_SHEET, TML_CONVERT_NEF, TML_CONVERT_NMR_STAR } tml_convert_format;

/* By suffix: .sheet, .nef, .str, each with .gz after it or not. */
tml_convert_format tml_convert_format_of(const char *path);

/* Read inputs and write what they say as one input of another kind, names as they were written. The file appears whole or not at all.
 *
 * path      "-" for standard output
 * problem   what was read, with a note that begins with TML_NOT_HELD for each kind of statement that the format cannot hold
 * Returns TML_OK, or what tml_problem_read and writing a file return.
 */
#define TML_NOT_HELD "not held by this format: "
tml_status tml_convert(const char *const *paths, size_t path_count, const tml_read_options *options, tml_convert_format format,
                       const char *path, tml_problem **problem, tml_error *error);

void tml_problem_count(const tml_problem *problem, tml_counts *counts);
const char *tml_problem_title(const tml_problem *problem); /* "" for none */

/* An atom as messages write it: "A:5:HB2", or the bare name where there is no chain; at most `size` bytes, always ended. */
void tml_problem_atom(const tml_problem *problem, int32_t atom, char *text, size_t size);

/* Note or unmapped restraint number `index`, 0-based: its text, and where it stands unless origin is NULL; NULL past the end. */
const char *tml_problem_note(const tml_problem *problem, int32_t index, tml_origin *origin);
const char *tml_problem_unmapped(const tml_problem *problem, int32_t index, tml_origin *origin);

/* ---- limits ---- */

/* The limits of all pairs, smoothed. Where limits contradict each other, the blamed ones are loosened as far as the proofs
 * need.
 *
 * threads   0 for all
 * out       the caller frees it with tml_bounds_free
 * found     receives the contradictions; from tml_contradictions_new
 * Returns TML_OK, TML_CONTRADICTED, TML_TOO_LARGE, TML_NO_MEMORY or TML_INTERRUPTED; out is filled in the first two cases.
 */
tml_status tml_bounds_prepare(const tml_problem *problem, int threads, const tml_watch *watch, tml_bounds **out,
                              tml_contradictions *found, tml_error *error);
void tml_bounds_free(tml_bounds *bounds);

/* The limits of one pair of atoms, Å; *upper is INFINITY where there is none. false where an index is out of range. */
bool tml_bounds_pair(const tml_bounds *bounds, int32_t atom_1, int32_t atom_2, double *lower, double *upper);

/* ---- contradictions ---- */

tml_contradictions *tml_contradictions_new(void); /* empty; NULL without memory */
void tml_contradictions_free(tml_contradictions *found);
int32_t tml_contradictions_count(const tml_contradictions *found);

typedef struct tml_conflict {
    double excess;      /* by how much the chain is too short, Å */
    bool conditional;   /* leans on an assumption of the program, not only on the inputs and on chemistry */
    int32_t step_count; /* 0 is the lower limit that fails; the upper limits follow, each from where the last one ended */
} tml_conflict;

typedef struct tml_conflict_step {
    int32_t atom_1, atom_2;
    bool is_upper;
    double value;          /* Å */
    const char *kind;      /* restraint, bond, angle, torsion, plane, chirality, radius or dihedral */
    const char *list, *id; /* of the user's restraint; "" where it is none */
    tml_origin origin;
} tml_conflict_step;

/* Contradiction number `index` and step number `step` of it, 0-based; false past the end. */
bool tml_contradictions_get(const tml_contradictions *found, int32_t index, tml_conflict *conflict);
bool tml_contradictions_step(const tml_contradictions *found, const tml_problem *problem, int32_t index, int32_t step,
                             tml_conflict_step *out);

/* ---- ensembles ---- */

typedef struct tml_build_options {
    int models;         /* models wanted, default 20 */
    int trials;         /* at most this many tried; 0 for 5 * models */
    int threads;        /* 0 for all */
    uint64_t seed;      /* default 1 */
    bool select_lowest; /* the best by error among at least 1.5 * models trials; otherwise the first that pass */
    bool strict;        /* stop at the first finding: a contradiction or an unmapped restraint */
    int dimensions;     /* of the embedding: 3 (default) or 4 */
    int metrize_roots;  /* atoms metrized; 0 for all */
    double effort;      /* scales the annealing; 1 is usual */
    bool free_backbone; /* do not draw phi and psi to the regions that are usual in folded proteins */
} tml_build_options;

void tml_build_defaults(tml_build_options *options);

/* Build an ensemble.
 *
 * problem  peptide bonds to proline that the restraints need cis are found and set in it, with a note each; it must outlive
 *          the ensemble
 * found    receives the contradictions of the limits; from tml_contradictions_new
 * out      filled unless the call failed; also with TML_SHORT and TML_CONTRADICTED; freed with tml_ensemble_free
 *
 * Returns TML_OK, TML_SHORT (fewer trials passed than wanted), TML_CONTRADICTED (built all the same, but for `strict`),
 * TML_BAD_INPUT (an empty problem), TML_TOO_LARGE, TML_NO_MEMORY or TML_INTERRUPTED.
 */
tml_status tml_build(tml_problem *problem, const tml_build_options *options, const tml_watch *watch, tml_ensemble **out,
                     tml_contradictions *found, tml_error *error);
void tml_ensemble_free(tml_ensemble *ensemble);

/* What one model is like. Distances in Å, angles in degrees. */
typedef struct tml_measures {
    int32_t distance_over_01, distance_over_02, distance_over_05; /* restraints violated by more than 0.1, 0.2, 0.5 Å */
    double distance_max, distance_rms;
    int32_t dihedral_over_5, dihedral_over_10;
    double dihedral_max;
    int32_t wrong_handed;   /* centres with `fixed` handedness that came out the wrong way */
    int32_t swapped_names;  /* prochiral atoms whose names are exchanged (HB2 and HB3, CG1 and CG2 of valine) */
    int32_t cis_undeclared; /* cis peptides (|omega| < 30°) that are neither declared nor before proline */
    int32_t omega_off;      /* peptides beyond 30° of planar */
    double bond_rms, bond_max, angle_rms;
    double plane_max;       /* largest r.m.s. distance of a planar group from its best plane, Å */
    int32_t overlaps;       /* pairs more than three bonds apart, closer than their radii by 0.6 Å (1.0 for polar pairs) */
    double alike_rms;       /* between the chains that are alike, heavy atoms, the worst two, Å; NAN where there are none */
    double backbone_usual;  /* share of residues in the usual regions of phi and psi; NAN where there are none */
} tml_measures;

/* A model of an ensemble; `index` is 0-based, best first. */
typedef struct tml_model_facts {
    int32_t trial;         /* from 1 */
    double error;          /* the refinement's error function */
    bool passed, mirrored; /* mirrored: from the reflected image of the embedding */
} tml_model_facts;

int32_t tml_ensemble_count(const tml_ensemble *ensemble);  /* models */
int32_t tml_ensemble_trials(const tml_ensemble *ensemble); /* trials made */
int32_t tml_ensemble_passed(const tml_ensemble *ensemble); /* trials that passed */

/* NULL or false past the end. Coordinates are three doubles an atom, in Å, in atom order. */
bool tml_ensemble_model(const tml_ensemble *ensemble, int32_t index, tml_model_facts *facts);
const double *tml_ensemble_coordinates(const tml_ensemble *ensemble, int32_t index);
const tml_measures *tml_ensemble_measures(const tml_ensemble *ensemble, int32_t index);

/* Write all models to a file, its format told by its suffix: .pdb or .cif, .gz after it compresses. The file appears whole or
 * not at all.
 *
 * found   contradictions to be mentioned in the file; may be NULL
 * Returns TML_OK, TML_BAD_INPUT (another suffix), TML_TOO_LARGE (the format cannot hold the molecule), TML_NO_MEMORY or TML_IO.
 */
tml_status tml_ensemble_write(const tml_ensemble *ensemble, const tml_contradictions *found, const char *path, tml_error *error);

/* ---- assessing models ---- */

typedef struct tml_assessment tml_assessment; /* models that anybody made, measured against a problem */

/* Measure the models of a file (PDB or mmCIF; "-" for standard input, gzip understood) against a problem. Atoms are matched by chain,
 * residue number and name; what models lack takes no part.
 *
 * problem  read with sum_stereo_pairs to count as the archive of such models does; it must outlive the assessment
 * out      filled with TML_OK only; the caller frees it with tml_assessment_free
 * Returns TML_OK, TML_BAD_INPUT (also: no atom in common), TML_TOO_LARGE, TML_NO_MEMORY or TML_IO.
 */
tml_status tml_assess(const tml_problem *problem, const char *path, tml_assessment **out, tml_error *error);
void tml_assessment_free(tml_assessment *assessment);

/* Restraints and models are counted from 0. Violations are 0 or positive, in Å and degrees; NAN where the model lacks the atoms, or
 * where an index is out of range. Measures are NULL past the end. */
int32_t tml_assessment_models(const tml_assessment *assessment);
double tml_assessment_distance(const tml_assessment *assessment, int32_t restraint, int32_t model);
double tml_assessment_dihedral(const tml_assessment *assessment, int32_t restraint, int32_t model);
const tml_measures *tml_assessment_measures(const tml_assessment *assessment, int32_t model);

/* ---- comparing models ---- */

typedef struct tml_comparison tml_comparison; /* models of a file on top of each other, and perhaps on a reference */

typedef struct tml_compare_options {
    const char *core;  /* where models are superposed: "spread" (default; the residues that hold together), "order" (those with order
                          parameters of phi and psi of 0.9 or more), "all", or stretches of residues such as "A:8-69,B:8-68" */
    const char *atoms; /* superposed atoms: words as of `derive --atoms`, joined by commas; default "backbone" */
    double cut;        /* models no further apart on average are one cluster, Å; negative (default): where a penalty is least */
    int threads;       /* 0 for all */
} tml_compare_options;

void tml_compare_defaults(tml_compare_options *options);

/* Compare the models of a file (PDB or mmCIF; "-" for standard input, gzip understood) with each other, and with those of another
 * one unless that is NULL. Atoms that not all models have, and waters, take no part.
 *
 * out   filled with TML_OK only; the caller frees it with tml_comparison_free
 * Returns TML_OK, TML_BAD_INPUT (also: one model alone, no atoms in common), TML_TOO_LARGE, TML_NO_MEMORY, TML_IO or
 * TML_INTERRUPTED.
 */
tml_status tml_compare(const char *models, const char *reference, const tml_compare_options *options, const tml_watch *watch,
                       tml_comparison **out, tml_error *error);
void tml_comparison_free(tml_comparison *comparison);

/* Distances are r.m.s. distances of the superposed atoms after superposition, Å; NAN where there is nothing to measure. */
typedef struct tml_compare_facts {
    int32_t models, atoms, residues;              /* atoms that all models have, and their residues */
    int32_t core_residues, superposed_atoms;
    double pair_mean, pair_least, pair_greatest;  /* between two models */
    double mean_to_mean;                          /* from the models to their mean structure, on average */
    int32_t medoid;                               /* the model nearest to all others, 0-based */
    int32_t clusters;
    double cut;                                   /* the greatest mean distance at which clusters were joined */
    int32_t reference_models, reference_medoid;   /* 0 without a reference; 0-based */
    int32_t common_atoms;                         /* superposed atoms that the reference has, too */
    bool chains_exchanged;                        /* alike chains fit the reference better in another order than their codes tell */
    double reference_mean;                        /* from the models to the reference's medoid, on average */
    double mean_to_reference, medoid_to_reference; /* from the mean structure, and from the medoid */
} tml_compare_facts;

void tml_comparison_facts(const tml_comparison *comparison, tml_compare_facts *facts);

typedef struct tml_compared_model {
    double to_others, to_mean, to_reference; /* to_others: mean */
    int32_t cluster;                         /* from 0, the largest first */
} tml_compared_model;

/* Strings live as long as the comparison. */
typedef struct tml_compared_residue {
    const char *chain, *number, *name;
    double spread, heavy_spread; /* r.m.s. distance from the mean place: of the chosen atoms, and of all but hydrogens */
    double order_phi, order_psi; /* 0 … 1; NAN where the torsion is missing */
    bool core;                   /* takes part in the superposition */
} tml_compared_residue;

typedef struct tml_compared_atom {
    int32_t residue;
    const char *name;
    double spread;
    bool superposed;
} tml_compared_atom;

/* 0-based; false past the end. */
bool tml_comparison_model(const tml_comparison *comparison, int32_t index, tml_compared_model *model);
bool tml_comparison_residue(const tml_comparison *comparison, int32_t index, tml_compared_residue *residue);
bool tml_comparison_atom(const tml_comparison *comparison, int32_t index, tml_compared_atom *atom);

/* Between two models; NAN where an index is out of range. */
double tml_comparison_pair(const tml_comparison *comparison, int32_t model_1, int32_t model_2);

/* A model as superposed: three doubles an atom, in the order of tml_comparison_atom; NULL past the end. */
const double *tml_comparison_coordinates(const tml_comparison *comparison, int32_t model);

#ifdef __cplusplus
}
#endif
#endif

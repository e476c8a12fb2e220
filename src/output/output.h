/* output.h: what the program writes: models, summaries, reports.
 *
 * Nothing here computes; all figures come from the ensemble, the problem or the findings that are passed in. Files appear whole
 * or not at all: they are written beside their final name and moved there when complete. A path "-" is standard output.
 */
#ifndef TML_OUTPUT_H
#define TML_OUTPUT_H

#include <stdio.h>

#include "bounds/redundant.h"
#include "ensemble/ensemble.h"
#include "restraint/difference.h"

typedef enum tml_format { TML_FORMAT_UNKNOWN, TML_FORMAT_PDB, TML_FORMAT_CIF } tml_format;

/* Format by suffix: .pdb or .cif, either with .gz after it; TML_FORMAT_UNKNOWN otherwise. *compressed is set. */
tml_format tml_format_of(const char *path, bool *compressed);

/* Check, before any work, that so many models of the molecule fit the format (PDB: 99,999 atoms, 9,999 residues a chain, chains
 * of one letter, names and numbers within their columns, 9,999 models); TML_TOO_LARGE with a message that advises mmCIF. */
tml_status tml_format_fits(const tml_molecule *molecule, int32_t models, tml_format format, tml_error *error);

/* Write all models; no time, path or thread count goes into the file. */
tml_status tml_write_models(const tml_ensemble *ensemble, const tml_contradictions *found, const char *path, tml_format format,
                            bool compressed, tml_error *error);

/* The machine-readable summary of a build (JSON). */
tml_status tml_write_build_json(const tml_ensemble *ensemble, const tml_contradictions *found, const char *path, tml_error *error);

/* The summary of a build for people. */
tml_status tml_print_build(FILE *out, const tml_ensemble *ensemble, const tml_contradictions *found, tml_error *error);

/* The report of a check: for programs (JSON) and for people. uses: from tml_restraints_judge, or NULL. difference: from another
 * input, or NULL; for people it stands by itself. */
tml_status tml_write_check_json(const tml_problem *problem, const tml_contradictions *found, const tml_use *uses,
                                const tml_difference *difference, const char *path, tml_error *error);
tml_status tml_print_difference(FILE *out, const tml_difference *difference, tml_error *error);
tml_status tml_print_check(FILE *out, const tml_problem *problem, const tml_contradictions *found, const tml_use *uses,
                           tml_error *error);

/* Smoothed limits as a table: heading, then atom_1, atom_2, lower, upper, tab-separated, four decimals, "-" for no upper. */
tml_status tml_write_bounds(const tml_problem *problem, const tml_bounds *bounds, const char *path, tml_error *error);

/* The report on given models: for programs (JSON) and for people; restraints count as violated beyond `over` Å, `over_angle` degrees. */
tml_status tml_write_assessment_json(const tml_assessment *assessment, const char *path, tml_error *error);
tml_status tml_print_assessment(FILE *out, const tml_assessment *assessment, double over, double over_angle, tml_error *error);

/* The report of a comparison: for programs (JSON) and for people. */
tml_status tml_write_comparison_json(const tml_comparison *comparison, const char *path, tml_error *error);
tml_status tml_print_comparison(FILE *out, const tml_comparison *comparison, tml_error *error);

#endif

/* sheet.h: makes a sheet of limits from coordinates, for planning measurements and for testing. */
#ifndef TML_SHEET_H
#define TML_SHEET_H

#include "input/coordinates.h"

typedef struct tml_derive_options {
    double cutoff;           /* Å: pairs nearer than this in some model */
    const char *atoms;       /* selection: words joined by commas, see selection.h */
    double error, fraction;  /* half-width of a limit: error Å + fraction of the distance */
    double noise;            /* standard deviation, Å, of what is added to each distance first; 0 for none */
    double keep;             /* share of the pairs that are kept, 0 to 1 */
    uint64_t seed;           /* of noise and choice */
    int32_t model;           /* 0-based; -1 for the range over all models */
    bool covalent;           /* a sequence with its chemistry, or beads without any */
} tml_derive_options;

/* What a sheet holds. */
typedef struct tml_derived { int32_t atoms, limits, left_out; } tml_derived;

/* Derive and write a sheet.
 *
 * Waters never take part. With `covalent`, only the built-in amino acids do, atoms that these do not have are left out and counted,
 * and pairs that bonds and angles fix are not listed; a chain that is broken goes on under a code of its own.
 * stop   once nonzero, ends the work; may be NULL
 * Returns TML_OK, TML_BAD_INPUT (nothing selected, names that a sheet cannot hold), TML_TOO_LARGE, TML_NO_MEMORY, TML_IO or
 * TML_INTERRUPTED.
 */
tml_status tml_sheet_derive(const tml_coordinates *coordinates, const tml_derive_options *options, const char *path,
                            const volatile int *stop, tml_derived *derived, tml_error *error);

#endif

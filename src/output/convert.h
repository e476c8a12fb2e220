/* convert.h: what inputs say, written as another kind of input: a sheet, NEF 1.1 or NMR-STAR 3.1. The public function is in trammel.h.
 *
 * The writers take the outline and the rows as read, so that names stay as they were written; the problem serves where a format has no
 * word for a name. What a format cannot hold is counted, never dropped in silence.
 */
#ifndef TML_CONVERT_H
#define TML_CONVERT_H

#include "input/draft.h"
#include "output/file.h"

/* What may be lost. */
typedef enum tml_loss {
    TML_LOSS_ATOMS,    /* single atoms and beads, with their `chiral` and `plane` statements */
    TML_LOSS_LINKS,    /* links of single atoms */
    TML_LOSS_SHAPES,   /* statements on handedness and planes */
    TML_LOSS_ALIKE,    /* chains that are to be alike */
    TML_LOSS_ENDS,     /* chain ends */
    TML_LOSS_AVERAGE,  /* sums divided by their number of pairs */
    TML_LOSS_NAMES,    /* names that had to be spelled out as single atoms */
    TML_LOSS_STEREO,   /* names with x and y: that the pair is open */
    TML_LOSS_NUMBERS,  /* residue numbers that are no plain numbers */
    TML_LOSS_COMPONENTS, /* component dictionaries: the residues' names remain, the files have to go along */
    TML_LOSS_BESIDE,   /* target values, linear limits, origins and potentials of lists, names of torsions */
    TML_LOSS_COUNT
} tml_loss;

typedef struct tml_conversion {
    tml_draft *draft;             /* its rows are brought in the order of their lists */
    const char **lists;           /* of each distance row, then of each dihedral row: a name that no other file's list has */
    tml_file *file;
    int32_t lost[TML_LOSS_COUNT];
} tml_conversion;

void tml_write_sheet(tml_conversion *c);
void tml_write_nef(tml_conversion *c);
tml_status tml_write_nmrstar(tml_conversion *c, tml_error *error);

/* A value of a STAR loop, with a blank after it: quoted where it has to be, `.` for none. */
void tml_put_star(tml_file *file, const char *text);
void tml_put_star_number(tml_file *file, double value); /* `.` for NAN */

/* Whether a row says more than its limits; and its targets and linear limits as values of a STAR loop. */
bool tml_says_more(const tml_row_beside *beside);
void tml_put_beside(tml_file *file, const tml_row_beside *beside);

/* Id of a row of a restraint: rows without one of their own get one that no other row has. At most `size` bytes. */
const char *tml_row_id(const char *id, bool alone, size_t index, char *text, size_t size);

/* How many rows from `first` on are of one list. */
size_t tml_rows_in_list(const char *const *lists, size_t first, size_t count);

#endif

/* columns.h: what the user says of a table: which column holds what, and how the text is written.
 *
 * Strings belong to the string pool. The grammar stands in the manual page, under "Tables".
 */
#ifndef TML_COLUMNS_H
#define TML_COLUMNS_H

#include "base/memory.h"
#include "base/status.h"

typedef enum tml_column_kind {
    TML_COLUMN_CHAIN,
    TML_COLUMN_RESIDUE, /* its number */
    TML_COLUMN_RESIDUE_NAME,
    TML_COLUMN_ATOM,
    TML_COLUMN_ADDRESS, /* chain:residue:atom, residue:atom or atom */
    TML_COLUMN_ANGLE,   /* a dihedral by its name */
    TML_COLUMN_LOWER,
    TML_COLUMN_UPPER,
    TML_COLUMN_TARGET,
    TML_COLUMN_MINUS,
    TML_COLUMN_PLUS,
    TML_COLUMN_ERROR,
    TML_COLUMN_WEIGHT,
    TML_COLUMN_ID,
    TML_COLUMN_LIST,
    TML_COLUMN_KINDS
} tml_column_kind;

enum { TML_TABLE_ATOMS = 4, TML_COLUMN_ALL = TML_TABLE_ATOMS, TML_COLUMNS_MOST = 64, TML_FIELDS_MOST = 256 };

/* A column, or a value that counts for all rows. */
typedef struct tml_column {
    tml_column_kind kind;
    int atom;            /* 0 to 3, or TML_COLUMN_ALL */
    const char *word;    /* "upper", "chain_1": as the user calls it */
    int field;           /* 0-based, of a row; -1 for a fixed value, and for one by heading until the heading is read */
    const char *heading; /* NULL where it is found by position */
    const char *fixed;   /* NULL where it is read */
} tml_column;

typedef enum tml_heading { TML_HEADING_AUTO, TML_HEADING_YES, TML_HEADING_NO } tml_heading;

typedef struct tml_layout {
    tml_column columns[TML_COLUMNS_MOST];
    int count;
    int positions;   /* fields that the columns by position take up */
    bool more;       /* further fields are passed over */
    bool by_heading; /* a column is found by its heading */
    int atom_count;  /* 2 for distances, 4 for dihedrals; 4 with an angle's name */
    int slot[TML_COLUMN_KINDS][TML_TABLE_ATOMS + 1]; /* index into columns, -1 for none */
    char separator;  /* '\t' ',' ';' '|', ' ' for any blanks, 0: told from the first row */
    bool decimal_comma, nanometres;
    tml_heading heading;
    const char *comment; /* "" for none */
} tml_layout;

/* Parse the words for columns and form (NULL: defaults); `path` is for messages.
 * Returns TML_OK, TML_BAD_INPUT or TML_NO_MEMORY. */
tml_status tml_layout_parse(const char *columns, const char *form, const char *path, tml_strings *pool, tml_layout *out,
                            tml_error *error);

/* The column of a kind for an atom: its own, or the one for all atoms; NULL for none. */
const tml_column *tml_layout_column(const tml_layout *layout, tml_column_kind kind, int atom);

/* Whether a column holds numbers. */
bool tml_column_is_number(tml_column_kind kind);

#endif

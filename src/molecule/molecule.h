/* molecule.h: atoms, residues and the covalent terms between them, whatever they came from.
 *
 * A tml_molecule is plain arrays; build.c fills it from an outline, everything later only reads it. Strings belong to the
 * problem's string pool. Indices are atoms of this molecule unless said otherwise. Lengths in Å, angles in radians.
 */
#ifndef TML_MOLECULE_H
#define TML_MOLECULE_H

#include "base/status.h"
#include "molecule/index.h"
#include "molecule/outline.h"
#include "molecule/polymer.h"

typedef struct tml_atom {
    const char *name;  /* unique within its residue */
    int32_t residue;   /* index into residues */
    uint8_t element;   /* atomic number; 0 for a bead */
    int8_t charge;     /* formal charge */
} tml_atom;

typedef struct tml_residue {
    const char *chain, *number, *name; /* as the input wrote them; all "" for the bare atoms of a sheet */
    int32_t sequence;                  /* the number's integer part; 0 where it has none */
    char insertion;                    /* insertion code, or ' ' */
    int32_t chain_index;               /* 0-based, in order of first appearance */
    int32_t position;                  /* 0-based within its chain */
    int32_t first_atom, atom_count;    /* a residue's atoms are consecutive */
    tml_polymer polymer;               /* the kind of chain that it belongs in */
    const char *type;                  /* as its component dictionary says; NULL for none */
    bool standard;                     /* built in: one of the residues that model files hold as ATOM records */
} tml_residue;

/* A covalent bond. tolerance is the half-width, Å, that bounds allow. */
typedef struct tml_bond { int32_t a, b; double length, tolerance; } tml_bond;

/* The angle a-b-c (b in the middle). tolerance is the half-width, radians, that bounds allow. */
typedef struct tml_angle { int32_t a, b, c; double angle, tolerance; } tml_angle;

/* What is known of rotation about b-c. */
typedef enum tml_torsion_kind {
    TML_TORSION_FREE,      /* nothing: the 1-4 distance lies between its cis and trans values */
    TML_TORSION_FIXED,     /* at `angle`, within `tolerance`: rings, planar groups, double bonds */
    TML_TORSION_PEPTIDE,   /* the same, for a peptide bond; `angle` is 0 (cis) or pi (trans) */
    TML_TORSION_STAGGERED  /* three minima at angle + k·120°: a preference, not a bound */
} tml_torsion_kind;

/* One per bond b-c and pair of outer atoms (a, d), but where a and d are the same or bonded (rings of three and four). */
typedef struct tml_torsion {
    int32_t a, b, c, d;
    tml_torsion_kind kind;
    double angle, tolerance; /* radians */
} tml_torsion;

/* A tetrahedral centre. `arms[3]` is -1 for a centre of three arms. The signed volume
 * (arms[0]-centre)·((arms[1]-centre)×(arms[2]-centre)) has the sign `sign`. For centres with no handedness of their own (a
 * methyl group, NH3+) the sign only fixes the order of equivalent hydrogens; `fixed` is then false. */
typedef struct tml_centre {
    int32_t centre, arms[4];
    int8_t sign;
    bool fixed; /* chirality or prochiral naming depends on it */
} tml_centre;

/* Atoms in one plane. With ideal coordinates (`has_xy`) the distances within the group are known exactly. */
typedef struct tml_plane {
    int32_t first, count; /* into plane_atoms and, times two, plane_xy */
    double within;        /* largest distance from the best plane, Å */
    bool has_xy;
} tml_plane;

/* A peptide bond C-N between two amino acids: atoms of omega. */
typedef struct tml_peptide {
    int32_t ca1, c, o, n, ca2; /* o is -1 where a variant took it away */
    int32_t residue1, residue2;
    int32_t bond, plane;       /* C-N; plane is -1 where atoms are missing */
    bool cis, declared;        /* declared: the input says that it is cis */
} tml_peptide;

typedef struct tml_chain { const char *code; int32_t first_residue, residue_count; tml_ends ends; } tml_chain;

/* Chains that take the same shape: the heavy atom i of copy c is alike_atoms[first + c * count + i]. Atoms that a half turn
 * exchanges (a carboxylate's oxygens, the CH of a phenyl ring) are left out. */
typedef struct tml_alike { int32_t first, count, copies; } tml_alike;

typedef struct tml_molecule {
    tml_atom *atoms;       int32_t atom_count;
    tml_residue *residues; int32_t residue_count;
    tml_chain *chains;     int32_t chain_count;
    tml_bond *bonds;       int32_t bond_count;
    tml_angle *angles;     int32_t angle_count;
    tml_torsion *torsions; int32_t torsion_count;
    tml_centre *centres;   int32_t centre_count, sorted_centres; /* so many, those of residues, in the order of their atoms; then others */
    tml_plane *planes;     int32_t plane_count;
    int32_t *plane_atoms;  double *plane_xy; int32_t plane_atom_count;
    tml_peptide *peptides; int32_t peptide_count;
    tml_alike *alike;      int32_t alike_count;
    int32_t *alike_atoms;  int32_t alike_atom_count;
    int32_t *neighbour_first, *neighbours; /* bonded atoms of atom i: neighbours[neighbour_first[i] … neighbour_first[i+1]-1] */
    int32_t *neighbour_bonds;              /* the bond that leads to each of them */
    int32_t *angle_first;                  /* angles around atom i: angle_first[i] … angle_first[i+1]-1 */
    int32_t *torsion_first;                /* torsions about bond i (its a and b are the torsions' b and c), likewise */
    tml_index *chain_index, *residue_index, *atom_index; /* for tml_molecule_find_… only */
} tml_molecule;

/* Make the molecule that an outline describes.
 *
 * files   names of the inputs, for messages (index by tml_place.file)
 * out     filled; tml_molecule_clear frees it, after a failure too
 *
 * Returns TML_OK, TML_BAD_INPUT (unknown residue, atom, variant; duplicate atoms; a link that chemistry forbids),
 * TML_TOO_LARGE or TML_NO_MEMORY.
 */
tml_status tml_molecule_build(const tml_outline *outline, const char *const *files, tml_strings *pool, tml_molecule *out,
                              tml_error *error);

void tml_molecule_clear(tml_molecule *molecule);

/* Residue by chain code and sequence code, -1 if there is none. */
int32_t tml_molecule_find_residue(const tml_molecule *molecule, const char *chain, const char *number);

/* Residue by its names, or -1 with the reason in words that an error message can end with: "A:40: chain A has no residue 40;
 * it has 1 to 39". At most `size` bytes, always ended. */
int32_t tml_molecule_locate_residue(const tml_molecule *molecule, const char *chain, const char *number, char *why,
                                    size_t size);

/* Why a residue has no atom of that name, and the nearest that it has: "A:5:HB1: no such atom in SER; it has HB2, HB3". */
void tml_molecule_suggest(const tml_molecule *molecule, int32_t residue, const char *name, char *text, size_t size);

/* Atom by its exact name within a residue, -1 if there is none. */
int32_t tml_molecule_find_atom(const tml_molecule *molecule, int32_t residue, const char *name);

/* The hand of an amino acid by its backbone: 1 for L, -1 for D, 0 where nothing fixes one (glycine, two side chains). */
int tml_molecule_hand(const tml_molecule *molecule, int32_t n, int32_t ca, int32_t c);

/* Whether two atoms are bonded to the same elements, each as often. */
bool tml_molecule_same_neighbours(const tml_molecule *molecule, int32_t a, int32_t b);

/* Whether a centre's handedness only tells two like arms apart (the hydrogens of CH2, the methyl groups of Val and Leu, a phosphate's
 * oxygens): then a wrong hand is a matter of names. */
bool tml_molecule_is_prochiral(const tml_molecule *molecule, const tml_centre *centre);

/* Set a peptide bond to cis or trans: its torsions, 1-4 distances and planes follow. */
void tml_molecule_set_peptide(tml_molecule *molecule, int32_t peptide, bool cis);

/* "A:5:HB2", or the bare name where there is no chain; writes at most `size` bytes, always ended. */
void tml_molecule_address(const tml_molecule *molecule, int32_t atom, char *text, size_t size);

#endif

/* The eight standard nucleotides, with hydrogens, under the PDB's names (Markley et al., Pure Appl. Chem. 70 (1998) 117).
 *
 * Bases: L. Clowney et al., J. Am. Chem. Soc. 118 (1996) 509; sugars and phosphates: A. Gelbin et al., J. Am. Chem. Soc. 118
 * (1996) 519, both typed from memory; where the two puckers differ, the value lies between them, so that the ring can be in
 * either. X-H lengths are nuclear ones, as in residue_data.c; angles with hydrogen follow from those of the heavy atoms
 * (arms.c).
 *
 * The sugar's pucker is free: torsions of the ring are held within the amplitude of its pseudorotation cycle (Altona &
 * Sundaralingam, J. Am. Chem. Soc. 94 (1972) 8205: about 39°) and some more.
 *
 * Contents: lengths by type - backbone - bases - table of nucleotides - chain ends, family
 */
#include "molecule/residue_data.h"

/* ---- lengths by type ---- */

#define CH 1.09 /* nuclear X-H lengths, Å */
#define RH 1.08 /* on the trigonal carbon of a ring */
#define NH 1.02
#define OH 0.97

/* Phosphate and sugar, then (bases follow) their hydrogens. */
#define BACKBONE                                                                                                               \
    {"P", "O5'", 1.593, 0, 0}, {"OP1", "P", 1.485, 0, 0}, {"OP2", "P", 1.485, 0, 0}, {"OP3", "P", 1.485, TML_OPTIONAL, 0},     \
        {"O5'", "", 0, 0, 0}, {"C5'", "O5'", 1.431, 0, 0}, {"C4'", "C5'", 1.509, 0, 0}, {"O4'", "C4'", 1.451, 0, 0},           \
        {"C3'", "C4'", 1.524, 0, 0}, {"O3'", "C3'", 1.423, 0, 0}, {                                                            \
        "C2'", "C3'", 1.524, 0, 0                                                                                              \
    }
#define BACKBONE_H                                                                                                             \
    {"HO5'", "O5'", OH, TML_OPTIONAL, 0}, {"H5'", "C5'", CH, 0, 0}, {"H5''", "C5'", CH, 0, 0}, {"H4'", "C4'", CH, 0, 0},       \
        {"H3'", "C3'", CH, 0, 0}, {"HO3'", "O3'", OH, TML_OPTIONAL, 0}, {                                                      \
        "H1'", "C1'", CH, 0, 0                                                                                                 \
    }
#define RING                                                                                                                   \
    { "O4'", "C1'", 1.415, "" } /* closes the sugar */
#define DEOXYRIBOSE                                                                                                            \
    BACKBONE, {                                                                                                                \
        "C1'", "C2'", 1.521, 0, 0                                                                                              \
    }
#define RIBOSE                                                                                                                 \
    BACKBONE, {"O2'", "C2'", 1.413, 0, 0}, {                                                                                   \
        "C1'", "C2'", 1.528, 0, 0                                                                                              \
    }
#define DEOXYRIBOSE_H                                                                                                          \
    BACKBONE_H, {"H2'", "C2'", CH, 0, 0}, {                                                                                    \
        "H2''", "C2'", CH, 0, 0                                                                                                \
    }
#define RIBOSE_H                                                                                                               \
    BACKBONE_H, {"H2'", "C2'", CH, 0, 0}, {                                                                                    \
        "HO2'", "O2'", OH, 0, 0                                                                                                \
    }
#define END                                                                                                                    \
    { 0 }

static const tml_torsion_row no_torsions[] = {END};
static const tml_charge_row no_charges[] = {END};

/* ---- backbone ---- */

/* Sugar ring and what hangs on it: deoxyribose and ribose hardly differ but at C2'. */
static const tml_bond_row backbone_bonds[] = {{"-O3'", "P", 1.607, ""}, END};
static const tml_angle_row backbone_angles[] = {
    {"-O3'", "P", "O5'", 104.0, ""},    {"OP1", "P", "OP2", 119.6, "-OP3"}, {"-O3'", "P", "OP1", 107.4, ""},
    {"-O3'", "P", "OP2", 108.3, ""},    {"O5'", "P", "OP1", 108.1, "-OP3"}, {"O5'", "P", "OP2", 108.3, "-OP3"},
    {"O5'", "P", "OP1", 106.0, "+OP3"}, {"O5'", "P", "OP2", 106.0, "+OP3"}, {"O5'", "P", "OP3", 106.0, "+OP3"},
    {"-C3'", "-O3'", "P", 119.7, ""},   {"P", "O5'", "C5'", 120.9, ""},     {"O5'", "C5'", "C4'", 110.2, ""},
    {"C5'", "C4'", "C3'", 115.0, ""},   {"C5'", "C4'", "O4'", 109.5, ""},   {"O4'", "C4'", "C3'", 105.2, ""},
    {"C4'", "O4'", "C1'", 109.9, ""},   {"C4'", "C3'", "C2'", 102.7, ""},   {"C4'", "C3'", "O3'", 110.6, ""},
    {"C2'", "C3'", "O3'", 111.2, ""},   {"C3'", "C2'", "C1'", 102.0, ""},   {"C3'", "C2'", "O2'", 112.0, ""},
    {"C1'", "C2'", "O2'", 109.5, ""},   {"O4'", "C1'", "C2'", 106.3, ""},   {"C5'", "O5'", "HO5'", 109.0, ""},
    {"C3'", "O3'", "HO3'", 109.0, ""},  {"C2'", "O2'", "HO2'", 109.0, ""},  END};
static const tml_torsion_row backbone_torsions[] = {{"C4'", "O4'", "C1'", "C2'", 0, 46}, {"O4'", "C1'", "C2'", "C3'", 0, 46},
                                                    {"C1'", "C2'", "C3'", "C4'", 0, 46}, {"C2'", "C3'", "C4'", "O4'", 0, 46},
                                                    {"C3'", "C4'", "O4'", "C1'", 0, 46}, END};
/* OP1, H5' and H2' are pro-S, OP2, H5'' and H2'' pro-R (Markley et al. 1998). */
static const tml_centre_row backbone_centres[] = {{"P", "OP1", "OP2", "O5'", -1},    {"C5'", "H5'", "H5''", "C4'", -1},
                                                  {"C4'", "C5'", "C3'", "O4'", +1},  {"C3'", "C4'", "C2'", "O3'", +1},
                                                  {"C2'", "H2'", "H2''", "C3'", -1}, {"C2'", "C1'", "C3'", "O2'", -1},
                                                  {"C1'", "O4'", "C2'", "N9", +1},   {"C1'", "O4'", "C2'", "N1", +1},
                                                  {"C7", "H71", "H72", "H73", 0},    END};
static const tml_charge_row backbone_charges[] = {{"OP2", -1, "+P"}, {"OP3", -1, "+OP3"}, END};
static const char *const backbone_planes[] = {NULL};

static const tml_template backbone = {"",
                                      &tml_nucleic_family,
                                      NULL,
                                      backbone_bonds,
                                      backbone_angles,
                                      backbone_torsions,
                                      backbone_centres,
                                      backbone_charges,
                                      backbone_planes};

/* ---- bases ---- */

/* The first hydrogen of an amino group is the one that pairs: cis to N1, or to N3 of cytosine (common practice). */

#define ADENINE                                                                                                                \
    {"N9", "C1'", 1.466, 0, 0}, {"C8", "N9", 1.373, 0, 0}, {"N7", "C8", 1.311, 0, 0}, {"C5", "N7", 1.388, 0, 0},               \
        {"C6", "C5", 1.406, 0, 0}, {"N6", "C6", 1.335, 0, 0}, {"N1", "C6", 1.351, 0, 0}, {"C2", "N1", 1.339, 0, 0},            \
        {"N3", "C2", 1.331, 0, 0}, {                                                                                           \
        "C4", "N3", 1.344, 0, 0                                                                                                \
    }
#define ADENINE_H                                                                                                              \
    {"H8", "C8", RH, 0, 0}, {"H61", "N6", NH, 0, 0}, {"H62", "N6", NH, 0, 0}, {                                                \
        "H2", "C2", RH, 0, 0                                                                                                   \
    }
static const tml_bond_row adenine_bonds[] = {RING, {"C4", "C5", 1.383, ""}, {"N9", "C4", 1.374, ""}, END};
static const tml_angle_row adenine_angles[] = {{"C6", "N1", "C2", 118.6, ""},   {"N1", "C2", "N3", 129.3, ""},
                                               {"C2", "N3", "C4", 110.6, ""},   {"N3", "C4", "C5", 126.8, ""},
                                               {"C4", "C5", "C6", 117.0, ""},   {"C5", "C6", "N1", 117.7, ""},
                                               {"C4", "C5", "N7", 110.7, ""},   {"C5", "N7", "C8", 103.9, ""},
                                               {"N7", "C8", "N9", 113.8, ""},   {"C8", "N9", "C4", 105.8, ""},
                                               {"N9", "C4", "C5", 105.8, ""},   {"N3", "C4", "N9", 127.4, ""},
                                               {"C6", "C5", "N7", 132.3, ""},   {"N1", "C6", "N6", 118.6, ""},
                                               {"C5", "C6", "N6", 123.7, ""},   {"C8", "N9", "C1'", 127.7, ""},
                                               {"C4", "N9", "C1'", 126.3, ""},  {"O4'", "C1'", "N9", 108.2, ""},
                                               {"C2'", "C1'", "N9", 113.8, ""}, END};
static const tml_torsion_row adenine_torsions[] = {{"N1", "C6", "N6", "H61", 0, 0}, END};
static const char *const adenine_planes[] = {"C1' N9 C8 N7 C5 C6 N6 N1 C2 N3 C4 H8 H61 H62 H2", NULL};

static const tml_atom_row dna_adenine[] = {DEOXYRIBOSE, ADENINE, DEOXYRIBOSE_H, ADENINE_H, END};
static const tml_atom_row rna_adenine[] = {RIBOSE, ADENINE, RIBOSE_H, ADENINE_H, END};

#define GUANINE                                                                                                                \
    {"N9", "C1'", 1.463, 0, 0}, {"C8", "N9", 1.374, 0, 0}, {"N7", "C8", 1.305, 0, 0}, {"C5", "N7", 1.388, 0, 0},               \
        {"C6", "C5", 1.419, 0, 0}, {"O6", "C6", 1.237, 0, 0}, {"N1", "C6", 1.391, 0, 0}, {"C2", "N1", 1.373, 0, 0},            \
        {"N2", "C2", 1.341, 0, 0}, {"N3", "C2", 1.323, 0, 0}, {                                                                \
        "C4", "N3", 1.350, 0, 0                                                                                                \
    }
#define GUANINE_H                                                                                                              \
    {"H8", "C8", RH, 0, 0}, {"H1", "N1", NH, 0, 0}, {"H21", "N2", NH, 0, 0}, {                                                 \
        "H22", "N2", NH, 0, 0                                                                                                  \
    }
static const tml_bond_row guanine_bonds[] = {RING, {"C4", "C5", 1.379, ""}, {"N9", "C4", 1.375, ""}, END};
static const tml_angle_row guanine_angles[] = {{"C6", "N1", "C2", 125.1, ""},   {"N1", "C2", "N3", 123.9, ""},
                                               {"C2", "N3", "C4", 111.9, ""},   {"N3", "C4", "C5", 128.6, ""},
                                               {"C4", "C5", "C6", 118.8, ""},   {"C5", "C6", "N1", 111.5, ""},
                                               {"C4", "C5", "N7", 110.8, ""},   {"C5", "N7", "C8", 104.3, ""},
                                               {"N7", "C8", "N9", 113.1, ""},   {"C8", "N9", "C4", 106.4, ""},
                                               {"N9", "C4", "C5", 105.4, ""},   {"N3", "C4", "N9", 126.0, ""},
                                               {"C6", "C5", "N7", 130.4, ""},   {"N1", "C2", "N2", 116.2, ""},
                                               {"N3", "C2", "N2", 119.9, ""},   {"N1", "C6", "O6", 119.9, ""},
                                               {"C5", "C6", "O6", 128.6, ""},   {"C8", "N9", "C1'", 127.0, ""},
                                               {"C4", "N9", "C1'", 126.5, ""},  {"O4'", "C1'", "N9", 108.2, ""},
                                               {"C2'", "C1'", "N9", 113.8, ""}, END};
static const tml_torsion_row guanine_torsions[] = {{"N1", "C2", "N2", "H21", 0, 0}, END};
static const char *const guanine_planes[] = {"C1' N9 C8 N7 C5 C6 O6 N1 C2 N2 N3 C4 H8 H1 H21 H22", NULL};

static const tml_atom_row dna_guanine[] = {DEOXYRIBOSE, GUANINE, DEOXYRIBOSE_H, GUANINE_H, END};
static const tml_atom_row rna_guanine[] = {RIBOSE, GUANINE, RIBOSE_H, GUANINE_H, END};

#define CYTOSINE                                                                                                               \
    {"N1", "C1'", 1.477, 0, 0}, {"C2", "N1", 1.397, 0, 0}, {"O2", "C2", 1.240, 0, 0}, {"N3", "C2", 1.353, 0, 0},               \
        {"C4", "N3", 1.335, 0, 0}, {"N4", "C4", 1.335, 0, 0}, {"C5", "C4", 1.425, 0, 0}, {                                     \
        "C6", "C5", 1.339, 0, 0                                                                                                \
    }
#define CYTOSINE_H                                                                                                             \
    {"H41", "N4", NH, 0, 0}, {"H42", "N4", NH, 0, 0}, {"H5", "C5", RH, 0, 0}, {                                                \
        "H6", "C6", RH, 0, 0                                                                                                   \
    }
static const tml_bond_row cytosine_bonds[] = {RING, {"C6", "N1", 1.367, ""}, END};
static const tml_angle_row cytosine_angles[] = {
    {"C6", "N1", "C2", 120.3, ""},   {"N1", "C2", "N3", 119.2, ""},   {"C2", "N3", "C4", 119.9, ""},
    {"N3", "C4", "C5", 121.9, ""},   {"C4", "C5", "C6", 117.4, ""},   {"C5", "C6", "N1", 121.0, ""},
    {"N1", "C2", "O2", 118.9, ""},   {"N3", "C2", "O2", 121.9, ""},   {"N3", "C4", "N4", 118.0, ""},
    {"C5", "C4", "N4", 120.2, ""},   {"C6", "N1", "C1'", 120.8, ""},  {"C2", "N1", "C1'", 118.8, ""},
    {"O4'", "C1'", "N1", 108.2, ""}, {"C2'", "C1'", "N1", 113.8, ""}, END};
static const tml_torsion_row cytosine_torsions[] = {{"N3", "C4", "N4", "H41", 0, 0}, END};
static const char *const cytosine_planes[] = {"C1' N1 C2 O2 N3 C4 N4 C5 C6 H41 H42 H5 H6", NULL};

static const tml_atom_row dna_cytosine[] = {DEOXYRIBOSE, CYTOSINE, DEOXYRIBOSE_H, CYTOSINE_H, END};
static const tml_atom_row rna_cytosine[] = {RIBOSE, CYTOSINE, RIBOSE_H, CYTOSINE_H, END};

#define THYMINE                                                                                                                \
    {"N1", "C1'", 1.473, 0, 0}, {"C2", "N1", 1.376, 0, 0}, {"O2", "C2", 1.220, 0, 0}, {"N3", "C2", 1.373, 0, 0},               \
        {"C4", "N3", 1.382, 0, 0}, {"O4", "C4", 1.228, 0, 0}, {"C5", "C4", 1.445, 0, 0}, {"C7", "C5", 1.496, 0, 0}, {          \
        "C6", "C5", 1.339, 0, 0                                                                                                \
    }
#define THYMINE_H                                                                                                              \
    {"H3", "N3", NH, 0, 0}, {"H71", "C7", CH, 0, 0}, {"H72", "C7", CH, 0, 0}, {"H73", "C7", CH, 0, 0}, {                       \
        "H6", "C6", RH, 0, 0                                                                                                   \
    }
static const tml_bond_row thymine_bonds[] = {RING, {"C6", "N1", 1.378, ""}, END};
static const tml_angle_row thymine_angles[] = {{"C6", "N1", "C2", 121.3, ""},
                                               {"N1", "C2", "N3", 114.6, ""},
                                               {"C2", "N3", "C4", 127.2, ""},
                                               {"N3", "C4", "C5", 115.2, ""},
                                               {"C4", "C5", "C6", 118.0, ""},
                                               {"C5", "C6", "N1", 123.7, ""},
                                               {"N1", "C2", "O2", 123.1, ""},
                                               {"N3", "C2", "O2", 122.3, ""},
                                               {"N3", "C4", "O4", 119.9, ""},
                                               {"C5", "C4", "O4", 124.9, ""},
                                               {"C4", "C5", "C7", 119.0, ""},
                                               {"C6", "C5", "C7", 122.9, ""},
                                               {"C6", "N1", "C1'", 120.4, ""},
                                               {"C2", "N1", "C1'", 118.2, ""},
                                               {"O4'", "C1'", "N1", 108.2, ""},
                                               {"C2'", "C1'", "N1", 113.8, ""},
                                               END};
static const char *const thymine_planes[] = {"C1' N1 C2 O2 N3 C4 O4 C5 C7 C6 H3 H6", NULL};

static const tml_atom_row dna_thymine[] = {DEOXYRIBOSE, THYMINE, DEOXYRIBOSE_H, THYMINE_H, END};

#define URACIL                                                                                                                 \
    {"N1", "C1'", 1.469, 0, 0}, {"C2", "N1", 1.381, 0, 0}, {"O2", "C2", 1.219, 0, 0}, {"N3", "C2", 1.373, 0, 0},               \
        {"C4", "N3", 1.380, 0, 0}, {"O4", "C4", 1.232, 0, 0}, {"C5", "C4", 1.431, 0, 0}, {                                     \
        "C6", "C5", 1.337, 0, 0                                                                                                \
    }
#define URACIL_H                                                                                                               \
    {"H3", "N3", NH, 0, 0}, {"H5", "C5", RH, 0, 0}, {                                                                          \
        "H6", "C6", RH, 0, 0                                                                                                   \
    }
static const tml_bond_row uracil_bonds[] = {RING, {"C6", "N1", 1.375, ""}, END};
static const tml_angle_row uracil_angles[] = {
    {"C6", "N1", "C2", 121.0, ""},   {"N1", "C2", "N3", 114.9, ""},   {"C2", "N3", "C4", 127.0, ""},
    {"N3", "C4", "C5", 114.6, ""},   {"C4", "C5", "C6", 119.7, ""},   {"C5", "C6", "N1", 122.7, ""},
    {"N1", "C2", "O2", 122.8, ""},   {"N3", "C2", "O2", 122.2, ""},   {"N3", "C4", "O4", 119.4, ""},
    {"C5", "C4", "O4", 125.9, ""},   {"C6", "N1", "C1'", 121.2, ""},  {"C2", "N1", "C1'", 117.7, ""},
    {"O4'", "C1'", "N1", 108.2, ""}, {"C2'", "C1'", "N1", 113.8, ""}, END};
static const char *const uracil_planes[] = {"C1' N1 C2 O2 N3 C4 O4 C5 C6 H3 H5 H6", NULL};

static const tml_atom_row rna_uracil[] = {RIBOSE, URACIL, RIBOSE_H, URACIL_H, END};

static const tml_centre_row no_centres[] = {END};

/* ---- table of nucleotides ---- */

const tml_template tml_nucleotides[] = {
    {"DA", &tml_nucleic_family, dna_adenine, adenine_bonds, adenine_angles, adenine_torsions, no_centres, no_charges,
     adenine_planes},
    {"DC", &tml_nucleic_family, dna_cytosine, cytosine_bonds, cytosine_angles, cytosine_torsions, no_centres, no_charges,
     cytosine_planes},
    {"DG", &tml_nucleic_family, dna_guanine, guanine_bonds, guanine_angles, guanine_torsions, no_centres, no_charges,
     guanine_planes},
    {"DT", &tml_nucleic_family, dna_thymine, thymine_bonds, thymine_angles, no_torsions, no_centres, no_charges,
     thymine_planes},
    {"A", &tml_nucleic_family, rna_adenine, adenine_bonds, adenine_angles, adenine_torsions, no_centres, no_charges,
     adenine_planes},
    {"C", &tml_nucleic_family, rna_cytosine, cytosine_bonds, cytosine_angles, cytosine_torsions, no_centres, no_charges,
     cytosine_planes},
    {"G", &tml_nucleic_family, rna_guanine, guanine_bonds, guanine_angles, guanine_torsions, no_centres, no_charges,
     guanine_planes},
    {"U", &tml_nucleic_family, rna_uracil, uracil_bonds, uracil_angles, no_torsions, no_centres, no_charges, uracil_planes},
    {NULL, NULL, NULL, NULL, NULL, NULL, NULL, NULL, NULL}};

/* ---- chain ends, family ---- */

/* A strand begins with a 5' hydroxyl group; a variant +P,+OP1,+OP2,+OP3,-HO5' gives it a phosphate. */
static const tml_end_row first_ends[] = {{"", "-P,-OP1,-OP2,+HO5'", "-P,-OP1,-OP2,+HO5'"}};
static const tml_end_row last_ends[] = {{"", "+HO3'", "+HO3'"}};

const tml_family tml_nucleic_family = {TML_POLYMER_NUCLEIC, "O3'", "P", &backbone, first_ends, last_ends};

/* The twenty standard amino acids, with hydrogens, under the PDB's names (Markley et al., Pure Appl. Chem. 70 (1998) 117).
 *
 * Lengths and angles of heavy atoms: R. A. Engh & R. Huber, Acta Cryst. A47 (1991) 392, typed from memory. X-H lengths are
 * nuclear ones (usual values from neutron diffraction, from memory). Protonated carboxyl groups: F. H. Allen et al., J. Chem.
 * Soc. Perkin Trans. 2 (1987) S1, from memory. C-O-H and C-S-H angles as in methanol, phenol and methanethiol (microwave
 * spectra, from memory). H on a peptide's N: 120.0° to C and 118.0° to CA in W. D. Cornell et al., J. Am. Chem. Soc. 117 (1995)
 * 5179 (from memory), shared out so that the three angles come to 360°. All other angles with hydrogen follow from those of the
 * heavy atoms: see arms.c.
 *
 * Contents: lengths and angles by type - backbone - residues - table of residues - chain ends, families
 */
#include "molecule/residue_data.h"

/* ---- lengths and angles by type ---- */

#define CH 1.09 /* nuclear X-H lengths, Å */
#define RH 1.08 /* on the trigonal carbon of a ring */
#define NH 1.02
#define OH 0.97
#define SH 1.34

#define CA_CB 1.530   /* CH1E-CH2E */
#define CH2_CH2 1.520 /* CH2E-CH2E */
#define CH_CH3 1.521  /* CH1E-CH3E */
#define CARBOXYLATE 1.249
#define ACID_CO 1.214 /* C=O and C-OH of a protonated carboxyl group */
#define ACID_COH 1.308

/* A residue's atoms: backbone, then the side chain's heavy atoms, then hydrogens. */
#define HEAVY_BACKBONE(n_ca, ca_c)                                                                                             \
    {"N", "", 0, false, 0}, {"CA", "N", n_ca, false, 0}, {"C", "CA", ca_c, false, 0}, {                                        \
        "O", "C", 1.231, false, 0                                                                                              \
    }
#define END_OXYGEN                                                                                                             \
    { "OXT", "C", CARBOXYLATE, true, 0 }
#define END_NH                                                                                                                 \
    {"H1", "N", NH, true, 0}, {"H2", "N", NH, true, 0}, {                                                                      \
        "H3", "N", NH, true, 0                                                                                                 \
    }
#define END_OH                                                                                                                 \
    { "HXT", "OXT", OH, true, 0 }
#define BACKBONE HEAVY_BACKBONE(1.458, 1.525)
#define BACKBONE_H                                                                                                             \
    END_OXYGEN, {"H", "N", NH, false, 0}, END_NH, {                                                                            \
        "HA", "CA", CH, false, 0                                                                                               \
    }
#define CH2(h2, h3, on)                                                                                                        \
    {h2, on, CH, false, 0}, {                                                                                                  \
        h3, on, CH, false, 0                                                                                                   \
    }
#define CH3(h1, h2, h3, on)                                                                                                    \
    {h1, on, CH, false, 0}, {h2, on, CH, false, 0}, {                                                                          \
        h3, on, CH, false, 0                                                                                                   \
    }
#define END                                                                                                                    \
    { 0 }

static const tml_bond_row no_bonds[] = {END};
static const tml_angle_row no_angles[] = {END};
static const tml_torsion_row no_torsions[] = {END};
static const tml_centre_row no_centres[] = {END};
static const tml_charge_row no_charges[] = {END};
static const char *const no_planes[] = {NULL};

/* ---- backbone ---- */

static const tml_bond_row backbone_bonds[] = {{"C", "O", CARBOXYLATE, "+OXT-HXT"},
                                              {"C", "OXT", CARBOXYLATE, "-HXT"},
                                              {"C", "O", ACID_CO, "+HXT"},
                                              {"C", "OXT", ACID_COH, "+HXT"},
                                              {"-C", "N", 1.329, ""},
                                              END};
static const tml_angle_row backbone_angles[] = {{"N", "CA", "C", 111.2, ""},
                                                {"N", "CA", "CB", 110.5, ""},
                                                {"C", "CA", "CB", 110.1, ""},
                                                {"-CA", "-C", "N", 116.2, ""},
                                                {"-O", "-C", "N", 123.0, ""},
                                                {"-C", "N", "CA", 121.7, ""},
                                                {"CA", "C", "O", 118.4, "+OXT-HXT"},
                                                {"CA", "C", "OXT", 118.4, "-HXT"},
                                                {"O", "C", "OXT", 122.9, "-HXT"},
                                                {"CA", "C", "O", 124.0, "+HXT"},
                                                {"CA", "C", "OXT", 112.5, "+HXT"},
                                                {"O", "C", "OXT", 123.5, "+HXT"},
                                                {"C", "OXT", "HXT", 109.0, ""},
                                                {"CA", "C", "O", 120.8, ""},
                                                {"CA", "N", "H", 118.2, "-H2"},
                                                {"-C", "N", "H", 120.1, ""},
                                                END};
static const tml_torsion_row backbone_torsions[] = {{"CA", "C", "OXT", "HXT", 180, 40}, END};
static const tml_centre_row backbone_centres[] = {{"CA", "N", "C", "CB", +1}, {"CB", "HB2", "HB3", "CA", -1}, END};
static const tml_charge_row backbone_charges[] = {{"N", +1, "+H1+H2+H3"}, {"OXT", -1, "-HXT"}, END};
static const char *const backbone_planes[] = {"CA C O OXT", "-CA -C -O N CA H", NULL};

static const tml_template backbone = {"",
                                      &tml_protein_family,
                                      NULL,
                                      backbone_bonds,
                                      backbone_angles,
                                      backbone_torsions,
                                      backbone_centres,
                                      backbone_charges,
                                      backbone_planes};

/* ---- residues ---- */

static const tml_atom_row ala_atoms[] = {
    BACKBONE, {"CB", "CA", CH_CH3, false, 0}, BACKBONE_H, CH3("HB1", "HB2", "HB3", "CB"), END_OH, END};
static const tml_angle_row ala_angles[] = {{"N", "CA", "CB", 110.4, ""}, {"C", "CA", "CB", 110.5, ""}, END};
/* A methyl group's hydrogens have no handedness of their own; this keeps the CH2 row of the backbone from them. */
static const tml_centre_row ala_centres[] = {{"CB", "HB1", "HB2", "HB3", 0}, END};

static const tml_atom_row arg_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"CG", "CB", CH2_CH2, false, 0},
                                         {"CD", "CG", CH2_CH2, false, 0},
                                         {"NE", "CD", 1.460, false, 0},
                                         {"CZ", "NE", 1.329, false, 0},
                                         {"NH1", "CZ", 1.326, false, 0},
                                         {"NH2", "CZ", 1.326, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         CH2("HG2", "HG3", "CG"),
                                         CH2("HD2", "HD3", "CD"),
                                         {"HE", "NE", NH, false, 0},
                                         {"HH11", "NH1", NH, false, 0},
                                         {"HH12", "NH1", NH, false, 0},
                                         {"HH21", "NH2", NH, false, 0},
                                         {"HH22", "NH2", NH, false, 0},
                                         END_OH,
                                         END};
static const tml_angle_row arg_angles[] = {{"CA", "CB", "CG", 114.1, ""},   {"CB", "CG", "CD", 111.3, ""},
                                           {"CG", "CD", "NE", 112.0, ""},   {"CD", "NE", "CZ", 124.2, ""},
                                           {"NE", "CZ", "NH1", 120.0, ""},  {"NE", "CZ", "NH2", 120.0, ""},
                                           {"NH1", "CZ", "NH2", 119.7, ""}, END};
static const tml_torsion_row arg_torsions[] = {
    {"CD", "NE", "CZ", "NH1", 0, 0}, {"NE", "CZ", "NH1", "HH11", 0, 0}, {"NE", "CZ", "NH2", "HH21", 0, 0}, END};
static const tml_centre_row arg_centres[] = {{"CG", "HG2", "HG3", "CB", -1}, {"CD", "HD2", "HD3", "CG", -1}, END};
static const tml_charge_row arg_charges[] = {{"NH2", +1, "+HE+HH11+HH12+HH21+HH22"}, END};
static const char *const arg_planes[] = {"CD NE HE CZ NH1 HH11 HH12 NH2 HH21 HH22", NULL};

static const tml_atom_row asn_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"CG", "CB", 1.516, false, 0},
                                         {"OD1", "CG", 1.231, false, 0},
                                         {"ND2", "CG", 1.328, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         {"HD21", "ND2", NH, false, 0},
                                         {"HD22", "ND2", NH, false, 0},
                                         END_OH,
                                         END};
static const tml_angle_row asn_angles[] = {{"CA", "CB", "CG", 112.6, ""},
                                           {"CB", "CG", "OD1", 120.8, ""},
                                           {"CB", "CG", "ND2", 116.4, ""},
                                           {"OD1", "CG", "ND2", 122.6, ""},
                                           END};
static const tml_torsion_row asn_torsions[] = {{"CB", "CG", "ND2", "HD21", 0, 0}, END};
static const char *const asn_planes[] = {"CB CG OD1 ND2 HD21 HD22", NULL};

static const tml_atom_row asp_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"CG", "CB", 1.516, false, 0},
                                         {"OD1", "CG", CARBOXYLATE, false, 0},
                                         {"OD2", "CG", CARBOXYLATE, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         {"HD2", "OD2", OH, true, 0},
                                         END_OH,
                                         END};
static const tml_bond_row asp_bonds[] = {{"CG", "OD1", ACID_CO, "+HD2"}, {"CG", "OD2", ACID_COH, "+HD2"}, END};
static const tml_angle_row asp_angles[] = {
    {"CB", "CG", "OD1", 124.0, "+HD2"}, {"CB", "CG", "OD2", 112.5, "+HD2"}, {"OD1", "CG", "OD2", 123.5, "+HD2"},
    {"CG", "OD2", "HD2", 109.0, ""},    {"CA", "CB", "CG", 112.6, ""},      {"CB", "CG", "OD1", 118.4, ""},
    {"CB", "CG", "OD2", 118.4, ""},     {"OD1", "CG", "OD2", 122.9, ""},    END};
static const tml_torsion_row asp_torsions[] = {{"CB", "CG", "OD2", "HD2", 180, 40}, END};
static const tml_charge_row asp_charges[] = {{"OD2", -1, "-HD2"}, END};
static const char *const asp_planes[] = {"CB CG OD1 OD2", NULL};

static const tml_atom_row cys_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"SG", "CB", 1.808, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         {"HG", "SG", SH, false, 0},
                                         END_OH,
                                         END};
static const tml_angle_row cys_angles[] = {
    {"CA", "CB", "SG", 114.4, ""}, {"CB", "SG", "HG", 96.5, ""}, {"CB", "SG", "=SG", 103.8, ""}, END};
static const tml_bond_row cys_bonds[] = {{"SG", "=SG", 2.030, ""}, END};
static const tml_charge_row cys_charges[] = {{"SG", -1, "-HG"}, END};

static const tml_atom_row gln_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"CG", "CB", CH2_CH2, false, 0},
                                         {"CD", "CG", 1.516, false, 0},
                                         {"OE1", "CD", 1.231, false, 0},
                                         {"NE2", "CD", 1.328, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         CH2("HG2", "HG3", "CG"),
                                         {"HE21", "NE2", NH, false, 0},
                                         {"HE22", "NE2", NH, false, 0},
                                         END_OH,
                                         END};
static const tml_angle_row gln_angles[] = {{"CA", "CB", "CG", 114.1, ""},   {"CB", "CG", "CD", 112.6, ""},
                                           {"CG", "CD", "OE1", 120.8, ""},  {"CG", "CD", "NE2", 116.4, ""},
                                           {"OE1", "CD", "NE2", 122.6, ""}, END};
static const tml_torsion_row gln_torsions[] = {{"CG", "CD", "NE2", "HE21", 0, 0}, END};
static const tml_centre_row cg_centres[] = {{"CG", "HG2", "HG3", "CB", -1}, END};
static const char *const gln_planes[] = {"CG CD OE1 NE2 HE21 HE22", NULL};

static const tml_atom_row glu_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"CG", "CB", CH2_CH2, false, 0},
                                         {"CD", "CG", 1.516, false, 0},
                                         {"OE1", "CD", CARBOXYLATE, false, 0},
                                         {"OE2", "CD", CARBOXYLATE, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         CH2("HG2", "HG3", "CG"),
                                         {"HE2", "OE2", OH, true, 0},
                                         END_OH,
                                         END};
static const tml_bond_row glu_bonds[] = {{"CD", "OE1", ACID_CO, "+HE2"}, {"CD", "OE2", ACID_COH, "+HE2"}, END};
static const tml_angle_row glu_angles[] = {{"CG", "CD", "OE1", 124.0, "+HE2"},  {"CG", "CD", "OE2", 112.5, "+HE2"},
                                           {"OE1", "CD", "OE2", 123.5, "+HE2"}, {"CD", "OE2", "HE2", 109.0, ""},
                                           {"CA", "CB", "CG", 114.1, ""},       {"CB", "CG", "CD", 112.6, ""},
                                           {"CG", "CD", "OE1", 118.4, ""},      {"CG", "CD", "OE2", 118.4, ""},
                                           {"OE1", "CD", "OE2", 122.9, ""},     END};
static const tml_torsion_row glu_torsions[] = {{"CG", "CD", "OE2", "HE2", 180, 40}, END};
static const tml_charge_row glu_charges[] = {{"OE2", -1, "-HE2"}, END};
static const char *const glu_planes[] = {"CG CD OE1 OE2", NULL};

static const tml_atom_row gly_atoms[] = {
    HEAVY_BACKBONE(1.451, 1.516), END_OXYGEN, {"H", "N", NH, false, 0}, END_NH, CH2("HA2", "HA3", "CA"), END_OH, END};
static const tml_angle_row gly_angles[] = {{"N", "CA", "C", 112.5, ""},    {"-C", "N", "CA", 120.6, ""},
                                           {"CA", "N", "H", 118.7, "-H2"}, {"-C", "N", "H", 120.7, ""},
                                           {"CA", "C", "+N", 116.4, ""},   END};
static const tml_centre_row gly_centres[] = {{"CA", "HA2", "HA3", "N", -1}, END};

static const tml_atom_row his_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"CG", "CB", 1.497, false, 0},
                                         {"ND1", "CG", 1.378, false, 0},
                                         {"CD2", "CG", 1.354, false, 0},
                                         {"CE1", "ND1", 1.321, false, 0},
                                         {"NE2", "CD2", 1.374, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         {"HD1", "ND1", NH, false, 0},
                                         {"HD2", "CD2", RH, false, 0},
                                         {"HE1", "CE1", RH, false, 0},
                                         {"HE2", "NE2", NH, false, 0},
                                         END_OH,
                                         END};
static const tml_bond_row his_bonds[] = {{"CG", "ND1", 1.371, "-HD1"},  {"CG", "CD2", 1.356, "-HD1"},
                                         {"ND1", "CE1", 1.319, "-HD1"}, {"CE1", "NE2", 1.345, "-HD1"},
                                         {"CG", "CD2", 1.356, "-HE2"},  {"ND1", "CE1", 1.345, "-HE2"},
                                         {"CD2", "NE2", 1.382, "-HE2"}, {"CE1", "NE2", 1.319, "-HE2"},
                                         {"CE1", "NE2", 1.321, ""},     END};
/* With hydrogen on ND1 alone, angles of the ring as revised in International Tables F (2001), from memory: they close it. */
static const tml_angle_row his_angles[] = {
    {"CB", "CG", "ND1", 121.6, "-HD1"},   {"CB", "CG", "CD2", 129.1, "-HD1"},   {"ND1", "CG", "CD2", 109.3, "-HD1"},
    {"CG", "ND1", "CE1", 105.6, "-HD1"},  {"ND1", "CE1", "NE2", 111.7, "-HD1"}, {"CE1", "NE2", "CD2", 106.9, "-HD1"},
    {"CG", "CD2", "NE2", 106.5, "-HD1"},  {"ND1", "CG", "CD2", 106.0, "-HE2"},  {"CG", "ND1", "CE1", 108.0, "-HE2"},
    {"ND1", "CE1", "NE2", 109.9, "-HE2"}, {"CE1", "NE2", "CD2", 106.6, "-HE2"}, {"CG", "CD2", "NE2", 109.2, "-HE2"},
    {"CA", "CB", "CG", 113.8, ""},        {"CB", "CG", "ND1", 122.7, ""},       {"CB", "CG", "CD2", 131.2, ""},
    {"ND1", "CG", "CD2", 106.1, ""},      {"CG", "ND1", "CE1", 109.3, ""},      {"ND1", "CE1", "NE2", 108.4, ""},
    {"CE1", "NE2", "CD2", 109.0, ""},     {"CG", "CD2", "NE2", 107.2, ""},      END};
static const tml_charge_row his_charges[] = {{"ND1", +1, "+HD1+HE2"}, END};
static const char *const his_planes[] = {"CB CG ND1 CD2 CE1 NE2 HD1 HD2 HE1 HE2", NULL};

static const tml_atom_row ile_atoms[] = {BACKBONE,
                                         {"CB", "CA", 1.540, false, 0},
                                         {"CG1", "CB", 1.530, false, 0},
                                         {"CG2", "CB", CH_CH3, false, 0},
                                         {"CD1", "CG1", 1.513, false, 0},
                                         BACKBONE_H,
                                         {"HB", "CB", CH, false, 0},
                                         CH2("HG12", "HG13", "CG1"),
                                         CH3("HG21", "HG22", "HG23", "CG2"),
                                         CH3("HD11", "HD12", "HD13", "CD1"),
                                         END_OH,
                                         END};
static const tml_angle_row ile_angles[] = {{"N", "CA", "CB", 111.5, ""},
                                           {"C", "CA", "CB", 109.1, ""},
                                           {"CA", "CB", "CG1", 110.4, ""},
                                           {"CA", "CB", "CG2", 110.5, ""},
                                           {"CG1", "CB", "CG2", 110.7, ""},
                                           {"CB", "CG1", "CD1", 113.8, ""},
                                           END};
static const tml_centre_row ile_centres[] = {{"CB", "CA", "CG1", "CG2", +1}, {"CG1", "HG12", "HG13", "CB", -1}, END};

static const tml_atom_row leu_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"CG", "CB", 1.530, false, 0},
                                         {"CD1", "CG", CH_CH3, false, 0},
                                         {"CD2", "CG", CH_CH3, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         {"HG", "CG", CH, false, 0},
                                         CH3("HD11", "HD12", "HD13", "CD1"),
                                         CH3("HD21", "HD22", "HD23", "CD2"),
                                         END_OH,
                                         END};
static const tml_angle_row leu_angles[] = {{"CA", "CB", "CG", 116.3, ""},
                                           {"CB", "CG", "CD1", 110.7, ""},
                                           {"CB", "CG", "CD2", 110.7, ""},
                                           {"CD1", "CG", "CD2", 110.8, ""},
                                           END};
static const tml_centre_row leu_centres[] = {{"CG", "CD1", "CD2", "CB", -1}, END};

static const tml_atom_row lys_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"CG", "CB", CH2_CH2, false, 0},
                                         {"CD", "CG", CH2_CH2, false, 0},
                                         {"CE", "CD", CH2_CH2, false, 0},
                                         {"NZ", "CE", 1.489, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         CH2("HG2", "HG3", "CG"),
                                         CH2("HD2", "HD3", "CD"),
                                         CH2("HE2", "HE3", "CE"),
                                         {"HZ1", "NZ", NH, false, 0},
                                         {"HZ2", "NZ", NH, false, 0},
                                         {"HZ3", "NZ", NH, false, 0},
                                         END_OH,
                                         END};
static const tml_angle_row lys_angles[] = {{"CA", "CB", "CG", 114.1, ""},
                                           {"CB", "CG", "CD", 111.3, ""},
                                           {"CG", "CD", "CE", 111.3, ""},
                                           {"CD", "CE", "NZ", 111.9, ""},
                                           END};
static const tml_centre_row lys_centres[] = {
    {"CG", "HG2", "HG3", "CB", -1}, {"CD", "HD2", "HD3", "CG", -1}, {"CE", "HE2", "HE3", "CD", -1}, END};
static const tml_charge_row lys_charges[] = {{"NZ", +1, "+HZ1+HZ2+HZ3"}, END};

static const tml_atom_row met_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"CG", "CB", CH2_CH2, false, 0},
                                         {"SD", "CG", 1.803, false, 0},
                                         {"CE", "SD", 1.791, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         CH2("HG2", "HG3", "CG"),
                                         CH3("HE1", "HE2", "HE3", "CE"),
                                         END_OH,
                                         END};
static const tml_angle_row met_angles[] = {
    {"CA", "CB", "CG", 114.1, ""}, {"CB", "CG", "SD", 112.7, ""}, {"CG", "SD", "CE", 100.9, ""}, END};

static const tml_atom_row phe_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"CG", "CB", 1.502, false, 0},
                                         {"CD1", "CG", 1.384, false, 0},
                                         {"CD2", "CG", 1.384, false, 0},
                                         {"CE1", "CD1", 1.382, false, 0},
                                         {"CE2", "CD2", 1.382, false, 0},
                                         {"CZ", "CE1", 1.382, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         {"HD1", "CD1", RH, false, 0},
                                         {"HD2", "CD2", RH, false, 0},
                                         {"HE1", "CE1", RH, false, 0},
                                         {"HE2", "CE2", RH, false, 0},
                                         {"HZ", "CZ", RH, false, 0},
                                         END_OH,
                                         END};
static const tml_bond_row phe_bonds[] = {{"CE2", "CZ", 1.382, ""}, END};
static const tml_angle_row phe_angles[] = {{"CA", "CB", "CG", 113.8, ""},   {"CB", "CG", "CD1", 120.7, ""},
                                           {"CB", "CG", "CD2", 120.7, ""},  {"CD1", "CG", "CD2", 118.6, ""},
                                           {"CG", "CD1", "CE1", 120.7, ""}, {"CG", "CD2", "CE2", 120.7, ""},
                                           {"CD1", "CE1", "CZ", 120.0, ""}, {"CD2", "CE2", "CZ", 120.0, ""},
                                           {"CE1", "CZ", "CE2", 120.0, ""}, END};
static const char *const phe_planes[] = {"CB CG CD1 CD2 CE1 CE2 CZ HD1 HD2 HE1 HE2 HZ", NULL};

static const tml_atom_row pro_atoms[] = {HEAVY_BACKBONE(1.466, 1.525),
                                         {"CB", "CA", 1.530, false, 0},
                                         {"CG", "CB", 1.492, false, 0},
                                         {"CD", "CG", 1.503, false, 0},
                                         END_OXYGEN,
                                         {"H2", "N", NH, true, 0},
                                         {"H3", "N", NH, true, 0},
                                         {"HA", "CA", CH, false, 0},
                                         CH2("HB2", "HB3", "CB"),
                                         CH2("HG2", "HG3", "CG"),
                                         CH2("HD2", "HD3", "CD"),
                                         END_OH,
                                         END};
static const tml_bond_row pro_bonds[] = {{"-C", "N", 1.341, ""}, {"N", "CD", 1.473, ""}, END};
static const tml_angle_row pro_angles[] = {
    {"N", "CA", "C", 111.8, ""},   {"N", "CA", "CB", 103.0, ""},  {"C", "CA", "CB", 110.1, ""}, {"CA", "CB", "CG", 104.5, ""},
    {"CB", "CG", "CD", 106.1, ""}, {"CG", "CD", "N", 103.2, ""},  {"CA", "N", "CD", 112.0, ""}, {"-C", "N", "CD", 125.0, ""},
    {"-C", "N", "CA", 122.6, ""},  {"-CA", "-C", "N", 116.9, ""}, {"-O", "-C", "N", 122.0, ""}, END};
/* Both puckers: Engh & Huber's angles make a ring with torsions of up to about 35°; deposited structures reach 45°. */
static const tml_torsion_row pro_torsions[] = {{"CD", "N", "CA", "CB", 0, 40},  {"N", "CA", "CB", "CG", 0, 48},
                                               {"CA", "CB", "CG", "CD", 0, 52}, {"CB", "CG", "CD", "N", 0, 50},
                                               {"CG", "CD", "N", "CA", 0, 42},  END};
static const tml_centre_row pro_centres[] = {{"CG", "HG2", "HG3", "CB", -1}, {"CD", "HD2", "HD3", "CG", -1}, END};
static const tml_charge_row pro_charges[] = {{"N", +1, "+H2+H3"}, END};
static const char *const pro_planes[] = {"-CA -C -O N CA CD", NULL};

static const tml_atom_row ser_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"OG", "CB", 1.417, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         {"HG", "OG", OH, false, 0},
                                         END_OH,
                                         END};
static const tml_angle_row ser_angles[] = {{"CA", "CB", "OG", 111.1, ""}, {"CB", "OG", "HG", 108.5, ""}, END};

static const tml_atom_row thr_atoms[] = {BACKBONE,
                                         {"CB", "CA", 1.540, false, 0},
                                         {"OG1", "CB", 1.433, false, 0},
                                         {"CG2", "CB", CH_CH3, false, 0},
                                         BACKBONE_H,
                                         {"HB", "CB", CH, false, 0},
                                         {"HG1", "OG1", OH, false, 0},
                                         CH3("HG21", "HG22", "HG23", "CG2"),
                                         END_OH,
                                         END};
static const tml_angle_row thr_angles[] = {{"N", "CA", "CB", 111.5, ""},
                                           {"C", "CA", "CB", 109.1, ""},
                                           {"CA", "CB", "OG1", 109.6, ""},
                                           {"CA", "CB", "CG2", 110.5, ""},
                                           {"OG1", "CB", "CG2", 109.3, ""},
                                           {"CB", "OG1", "HG1", 108.5, ""},
                                           END};
static const tml_centre_row thr_centres[] = {{"CB", "CA", "OG1", "CG2", +1}, END};

static const tml_atom_row trp_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"CG", "CB", 1.498, false, 0},
                                         {"CD1", "CG", 1.365, false, 0},
                                         {"CD2", "CG", 1.433, false, 0},
                                         {"NE1", "CD1", 1.374, false, 0},
                                         {"CE2", "CD2", 1.409, false, 0},
                                         {"CE3", "CD2", 1.398, false, 0},
                                         {"CZ2", "CE2", 1.394, false, 0},
                                         {"CZ3", "CE3", 1.382, false, 0},
                                         {"CH2", "CZ2", 1.368, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         {"HD1", "CD1", RH, false, 0},
                                         {"HE1", "NE1", NH, false, 0},
                                         {"HE3", "CE3", RH, false, 0},
                                         {"HZ2", "CZ2", RH, false, 0},
                                         {"HZ3", "CZ3", RH, false, 0},
                                         {"HH2", "CH2", RH, false, 0},
                                         END_OH,
                                         END};
static const tml_bond_row trp_bonds[] = {{"NE1", "CE2", 1.370, ""}, {"CZ3", "CH2", 1.400, ""}, END};
static const tml_angle_row trp_angles[] = {{"CA", "CB", "CG", 113.6, ""},
                                           {"CB", "CG", "CD1", 126.9, ""},
                                           {"CB", "CG", "CD2", 126.8, ""},
                                           {"CD1", "CG", "CD2", 106.3, ""},
                                           {"CG", "CD1", "NE1", 110.2, ""},
                                           {"CD1", "NE1", "CE2", 108.9, ""},
                                           {"NE1", "CE2", "CD2", 107.4, ""},
                                           {"CG", "CD2", "CE2", 107.2, ""},
                                           {"CE2", "CD2", "CE3", 118.8, ""},
                                           {"CG", "CD2", "CE3", 133.9, ""},
                                           {"CD2", "CE2", "CZ2", 122.4, ""},
                                           {"NE1", "CE2", "CZ2", 130.1, ""},
                                           {"CE2", "CZ2", "CH2", 117.5, ""},
                                           {"CZ2", "CH2", "CZ3", 121.5, ""},
                                           {"CE3", "CZ3", "CH2", 121.1, ""},
                                           {"CD2", "CE3", "CZ3", 118.6, ""},
                                           END};
static const char *const trp_planes[] = {"CB CG CD1 CD2 NE1 CE2 CE3 CZ2 CZ3 CH2 HD1 HE1 HE3 HZ2 HZ3 HH2", NULL};

static const tml_atom_row tyr_atoms[] = {BACKBONE,
                                         {"CB", "CA", CA_CB, false, 0},
                                         {"CG", "CB", 1.512, false, 0},
                                         {"CD1", "CG", 1.389, false, 0},
                                         {"CD2", "CG", 1.389, false, 0},
                                         {"CE1", "CD1", 1.382, false, 0},
                                         {"CE2", "CD2", 1.382, false, 0},
                                         {"CZ", "CE1", 1.378, false, 0},
                                         {"OH", "CZ", 1.376, false, 0},
                                         BACKBONE_H,
                                         CH2("HB2", "HB3", "CB"),
                                         {"HD1", "CD1", RH, false, 0},
                                         {"HD2", "CD2", RH, false, 0},
                                         {"HE1", "CE1", RH, false, 0},
                                         {"HE2", "CE2", RH, false, 0},
                                         {"HH", "OH", OH, false, 0},
                                         END_OH,
                                         END};
static const tml_bond_row tyr_bonds[] = {{"CE2", "CZ", 1.378, ""}, END};
static const tml_angle_row tyr_angles[] = {{"CA", "CB", "CG", 113.9, ""},
                                           {"CB", "CG", "CD1", 120.8, ""},
                                           {"CB", "CG", "CD2", 120.8, ""},
                                           {"CD1", "CG", "CD2", 118.1, ""},
                                           {"CG", "CD1", "CE1", 121.2, ""},
                                           {"CG", "CD2", "CE2", 121.2, ""},
                                           {"CD1", "CE1", "CZ", 119.6, ""},
                                           {"CD2", "CE2", "CZ", 119.6, ""},
                                           {"CE1", "CZ", "CE2", 120.3, ""},
                                           {"CE1", "CZ", "OH", 119.9, ""},
                                           {"CE2", "CZ", "OH", 119.9, ""},
                                           {"CZ", "OH", "HH", 109.0, ""},
                                           END};
static const char *const tyr_planes[] = {"CB CG CD1 CD2 CE1 CE2 CZ OH HD1 HD2 HE1 HE2", NULL};

static const tml_atom_row val_atoms[] = {BACKBONE,
                                         {"CB", "CA", 1.540, false, 0},
                                         {"CG1", "CB", CH_CH3, false, 0},
                                         {"CG2", "CB", CH_CH3, false, 0},
                                         BACKBONE_H,
                                         {"HB", "CB", CH, false, 0},
                                         CH3("HG11", "HG12", "HG13", "CG1"),
                                         CH3("HG21", "HG22", "HG23", "CG2"),
                                         END_OH,
                                         END};
static const tml_angle_row val_angles[] = {{"N", "CA", "CB", 111.5, ""},    {"C", "CA", "CB", 109.1, ""},
                                           {"CA", "CB", "CG1", 110.5, ""},  {"CA", "CB", "CG2", 110.5, ""},
                                           {"CG1", "CB", "CG2", 110.8, ""}, END};
static const tml_centre_row val_centres[] = {{"CB", "CG1", "CG2", "CA", -1}, END};

/* ---- table of residues ---- */

const tml_template tml_amino_acids[] = {
    {"ALA", &tml_protein_family, ala_atoms, no_bonds, ala_angles, no_torsions, ala_centres, no_charges, no_planes},
    {"ARG", &tml_protein_family, arg_atoms, no_bonds, arg_angles, arg_torsions, arg_centres, arg_charges, arg_planes},
    {"ASN", &tml_protein_family, asn_atoms, no_bonds, asn_angles, asn_torsions, no_centres, no_charges, asn_planes},
    {"ASP", &tml_protein_family, asp_atoms, asp_bonds, asp_angles, asp_torsions, no_centres, asp_charges, asp_planes},
    {"CYS", &tml_protein_family, cys_atoms, cys_bonds, cys_angles, no_torsions, no_centres, cys_charges, no_planes},
    {"GLN", &tml_protein_family, gln_atoms, no_bonds, gln_angles, gln_torsions, cg_centres, no_charges, gln_planes},
    {"GLU", &tml_protein_family, glu_atoms, glu_bonds, glu_angles, glu_torsions, cg_centres, glu_charges, glu_planes},
    {"GLY", &tml_protein_family, gly_atoms, no_bonds, gly_angles, no_torsions, gly_centres, no_charges, no_planes},
    {"HIS", &tml_protein_family, his_atoms, his_bonds, his_angles, no_torsions, no_centres, his_charges, his_planes},
    {"ILE", &tml_protein_family, ile_atoms, no_bonds, ile_angles, no_torsions, ile_centres, no_charges, no_planes},
    {"LEU", &tml_protein_family, leu_atoms, no_bonds, leu_angles, no_torsions, leu_centres, no_charges, no_planes},
    {"LYS", &tml_protein_family, lys_atoms, no_bonds, lys_angles, no_torsions, lys_centres, lys_charges, no_planes},
    {"MET", &tml_protein_family, met_atoms, no_bonds, met_angles, no_torsions, cg_centres, no_charges, no_planes},
    {"PHE", &tml_protein_family, phe_atoms, phe_bonds, phe_angles, no_torsions, no_centres, no_charges, phe_planes},
    {"PRO", &tml_protein_family, pro_atoms, pro_bonds, pro_angles, pro_torsions, pro_centres, pro_charges, pro_planes},
    {"SER", &tml_protein_family, ser_atoms, no_bonds, ser_angles, no_torsions, no_centres, no_charges, no_planes},
    {"THR", &tml_protein_family, thr_atoms, no_bonds, thr_angles, no_torsions, thr_centres, no_charges, no_planes},
    {"TRP", &tml_protein_family, trp_atoms, trp_bonds, trp_angles, no_torsions, no_centres, no_charges, trp_planes},
    {"TYR", &tml_protein_family, tyr_atoms, tyr_bonds, tyr_angles, no_torsions, no_centres, no_charges, tyr_planes},
    {"VAL", &tml_protein_family, val_atoms, no_bonds, val_angles, no_torsions, val_centres, no_charges, no_planes},
    {NULL, NULL, NULL, NULL, NULL, NULL, NULL, NULL, NULL}};

/* ---- chain ends, families ---- */

static const tml_end_row first_ends[] = {{"PRO", "+H2,+H3", "+H2"}, {"", "-H,+H1,+H2,+H3", "-H,+H1,+H2"}};
static const tml_end_row last_ends[] = {{"", "+OXT", "+OXT,+HXT"}};
static const tml_end_row no_ends[] = {{"", "", ""}};

const tml_family tml_protein_family = {TML_POLYMER_PROTEIN, "C", "N", &backbone, first_ends, last_ends};

static const tml_template nothing = {"",          &tml_lone_family, NULL,       no_bonds, no_angles,
                                     no_torsions, no_centres,       no_charges, no_planes};
const tml_family tml_lone_family = {TML_POLYMER_NONE, "", "", &nothing, no_ends, no_ends};

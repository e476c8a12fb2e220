/* Outlines of every kind to molecules: each byte decides the next choice. What is built must hold together: finite lengths and
 * angles, indices in range, and a peptide that is turned twice comes back. */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "molecule/molecule.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

typedef struct choices {
    const uint8_t *data;
    size_t size;
} choices;

static uint8_t choose(choices *from, unsigned count) {
    if (from->size == 0) return 0;
    from->size--;
    return (uint8_t)(*from->data++ % count);
}

#define PICK(from, list) (list)[choose(from, sizeof(list) / sizeof *(list))]

static const char *const CHAINS[] = {"A", "A", "A", "B", ""};
static const char *const NUMBERS[] = {"1", "2", "3", "4", "5", "6", "7", "8", "20", "-3", "5A", "", "99999999999999999999"};
static const char *const NAMES[] = {"ALA", "ARG", "ASN", "ASP", "CYS", "GLN", "GLU", "GLY", "HIS", "ILE", "LEU", "LYS",
                                    "MET", "PHE", "PRO", "SER", "THR", "TRP", "TYR", "VAL", "CYS", "PRO", "HIS", "MSE"};
static const char *const VARIANTS[] = {"",          "",    "",   "",   "-HG",  "+HD2",      "-HD1",      "-HE2",     "-HZ3",
                                       "-H",        "-HA", "-O", "-N", "-CB",  "-HH11",     "-HD21",     "+HXT,-H3", "+H1,+H2",
                                       "-OD2,-OXT", "HG",  "+",  ",,", "-HB2", "-HB2,-HB3", "-CD1,-CD2", "+H3",      "-SG,-HG"};
static const char *const ATOMS[] = {"N",   "CA", "C",  "O",  "CB", "SG", "SG", "NZ",  "CG",  "OD1", "OD2", "NE2",
                                    "ND1", "H",  "HA", "X1", "X2", "X3", "ZN", "OXT", "HB2", "CD",  "",    "HB1"};

static tml_address address(choices *from) {
    return (tml_address){.chain = PICK(from, CHAINS), .number = PICK(from, NUMBERS), .residue = "", .atom = PICK(from, ATOMS)};
}

enum { MOST = 12 };

typedef struct sheet {
    tml_outline_residue residues[MOST];
    tml_outline_atom atoms[MOST];
    tml_outline_link links[MOST];
    tml_outline_chiral chirals[MOST];
    tml_outline_plane planes[MOST];
    tml_address plane_atoms[MOST][MOST];
    tml_outline_ends ends[MOST];
} sheet;

static tml_outline outline_of(choices *from, sheet *s) {
    tml_outline o = {.residues = s->residues,
                     .atoms = s->atoms,
                     .links = s->links,
                     .chirals = s->chirals,
                     .planes = s->planes,
                     .ends = s->ends};
    for (uint8_t n = choose(from, MOST); o.residue_count < n; o.residue_count++)
        s->residues[o.residue_count] = (tml_outline_residue){.chain = PICK(from, CHAINS),
                                                             .number = NUMBERS[o.residue_count],
                                                             .name = PICK(from, NAMES),
                                                             .variant = PICK(from, VARIANTS),
                                                             .linking = choose(from, 4) ? TML_LINKING_DEFAULT : choose(from, 7),
                                                             .cis = choose(from, 8) == 7};
    for (uint8_t n = choose(from, MOST); o.atom_count < n; o.atom_count++)
        s->atoms[o.atom_count] = (tml_outline_atom){.chain = PICK(from, CHAINS),
                                                    .number = PICK(from, NUMBERS),
                                                    .residue = "",
                                                    .name = PICK(from, ATOMS),
                                                    .element = choose(from, 119)};
    for (uint8_t n = choose(from, MOST); o.link_count < n; o.link_count++)
        s->links[o.link_count] = (tml_outline_link){.a = address(from), .b = address(from)};
    for (uint8_t n = choose(from, 3); o.chiral_count < n; o.chiral_count++)
        s->chirals[o.chiral_count] = (tml_outline_chiral){
            .centre = address(from), .arm = {address(from), address(from), address(from)}, .sign = choose(from, 2) ? 1 : -1};
    for (uint8_t n = choose(from, 3); o.plane_count < n; o.plane_count++) {
        size_t count = choose(from, MOST);
        for (size_t k = 0; k < count; k++) s->plane_atoms[o.plane_count][k] = address(from);
        s->planes[o.plane_count] =
            (tml_outline_plane){.atoms = s->plane_atoms[o.plane_count], .atom_count = count, .within = 0.02};
    }
    for (uint8_t n = choose(from, 3); o.ends_count < n; o.ends_count++)
        s->ends[o.ends_count] = (tml_outline_ends){.chain = PICK(from, CHAINS), .ends = choose(from, 3)};
    return o;
}

static void demand(bool good) {
    if (!good) abort();
}

static void must_hold_together(tml_molecule *m) {
    for (int32_t i = 0; i < m->bond_count; i++) demand(m->bonds[i].length > 0.5 && m->bonds[i].length < 6);
    for (int32_t i = 0; i < m->angle_count; i++) demand(m->angles[i].angle > 1 && m->angles[i].angle < 3.15);
    for (int32_t i = 0; i < m->torsion_count; i++) {
        const tml_torsion *t = &m->torsions[i];
        demand(isfinite(t->angle) && isfinite(t->tolerance));
        demand(t->a >= 0 && t->d >= 0 && t->a < m->atom_count && t->d < m->atom_count);
    }
    for (int32_t i = 0; i < m->centre_count; i++) demand(m->centres[i].sign == 1 || m->centres[i].sign == -1);
    for (int32_t p = 0; p < m->peptide_count; p++) {
        int32_t plane = m->peptides[p].plane;
        bool cis = m->peptides[p].cis;
        double before = plane < 0 ? 0 : m->plane_xy[2 * m->planes[plane].first + 1];
        tml_molecule_set_peptide(m, p, !cis);
        tml_molecule_set_peptide(m, p, cis);
        demand(plane < 0 || fabs(m->plane_xy[2 * m->planes[plane].first + 1] - before) < 1e-6);
    }
    for (int32_t i = 0; i < 2 * m->plane_atom_count; i++) demand(isfinite(m->plane_xy[i]));
    for (int32_t i = 0; i < m->atom_count; i++) {
        demand(tml_molecule_find_atom(m, m->atoms[i].residue, m->atoms[i].name) == i);
        demand(m->atoms[i].charge >= -1 && m->atoms[i].charge <= 1);
        char text[16];
        tml_molecule_address(m, i, text, sizeof text);
        tml_molecule_suggest(m, m->atoms[i].residue, "HB1", text, sizeof text);
    }
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
    static sheet s;
    choices from = {data, size};
    tml_outline outline = outline_of(&from, &s);
    tml_strings *pool = tml_strings_new();
    tml_molecule molecule;
    tml_error error = {0};
    if (pool == NULL) abort();
    tml_status status = tml_molecule_build(&outline, NULL, pool, &molecule, &error);
    if (status == TML_OK)
        must_hold_together(&molecule);
    else
        demand(status == TML_BAD_INPUT && error.message[0] != '\0');
    tml_molecule_clear(&molecule);
    tml_strings_free(pool);
    return 0;
}

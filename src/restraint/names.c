#include "restraint/names.h"

#include <ctype.h>
#include <stdio.h>
#include <string.h>

/* Names longer than this can only be matched exactly: the positions in a name are bits of one number. */
enum { LONGEST = 63 };

static bool is_digit(char c) {
    return c >= '0' && c <= '9';
}

/* Whether x and y in a name can stand for a stereo pair: "HBx", "HG1y", "H5x", not "proxy": all else is written as atoms are. */
static bool has_pair_letter(const char *name) {
    bool found = false;
    if (!isupper((unsigned char)*name) && *name != '*' && *name != '%') return false;
    for (; *name != '\0'; name++) {
        if (*name == 'x' || *name == 'y')
            found = true;
        else if (islower((unsigned char)*name))
            return false;
    }
    return found;
}

/* Positions after `at` (bits) once one character of the pattern is used up. */
static uint64_t step(char sign, bool pairs, uint64_t at, const char *name, int length) {
    uint64_t after = 0;
    if (sign == '*') return at == 0 ? 0 : ~((at & -at) - 1);
    for (int i = 0; i < length; i++) {
        uint64_t here = (uint64_t)1 << i, next = here << 1;
        bool pair = pairs && (sign == 'x' || sign == 'y');
        if (sign == '%') {
            if (is_digit(name[i]) && ((at | after) & here) != 0) after |= next; /* one digit or more */
        } else if ((at & here) != 0) {
            if (name[i] == sign || (pair && (is_digit(name[i]) || name[i] == '\''))) after |= next;
            if (pair && name[i] == '\'' && name[i + 1] == '\'') after |= next << 1;
        }
    }
    return after;
}

/* Whether a name fits a pattern of NEF. All ways are followed at once, so that no pattern takes long. */
static bool fits(const char *pattern, bool pairs, const char *name) {
    size_t length = strnlen(name, LONGEST + 1);
    if (length > LONGEST) return false;
    uint64_t at = 1;
    for (; *pattern != '\0' && at != 0; pattern++) at = step(*pattern, pairs, at, name, (int)length);
    return (at >> length & 1) != 0;
}

static int32_t collect(const tml_molecule *molecule, int32_t residue, const char *pattern, bool pairs, int32_t *atoms) {
    const tml_residue *where = &molecule->residues[residue];
    int32_t count = 0;
    for (int32_t i = where->first_atom; i < where->first_atom + where->atom_count; i++)
        if (fits(pattern, pairs, molecule->atoms[i].name)) atoms[count++] = i;
    return count;
}

/* ---- pseudo-atoms ---- */

/* Hydrogens on the atom that holds this one: 3 in a methyl group, 2 in CH2 and NH2. */
static int siblings(const tml_molecule *molecule, int32_t atom) {
    if (molecule->neighbour_first[atom] == molecule->neighbour_first[atom + 1]) return 0;
    int32_t holder = molecule->neighbours[molecule->neighbour_first[atom]];
    int count = 0;
    for (int32_t k = molecule->neighbour_first[holder]; k < molecule->neighbour_first[holder + 1]; k++)
        count += molecule->atoms[molecule->neighbours[k]].element == 1;
    return count;
}

/* M means methyl groups only. Q means what is no methyl group where there is such (QG of Ile), else the methyl groups. */
static int32_t keep_kind(const tml_molecule *molecule, bool methyl, int32_t *atoms, int32_t count) {
    int32_t kept = 0;
    for (int32_t k = 0; k < count; k++)
        if ((siblings(molecule, atoms[k]) == 3) == methyl) atoms[kept++] = atoms[k];
    return kept;
}

/* The hydrogens of "QB", "MD1", "QQG", "QR": a group of two at least. */
static int32_t pseudo_atoms(const tml_molecule *molecule, int32_t residue, const char *name, int32_t *atoms) {
    bool several = strncmp(name, "QQ", 2) == 0;
    const char *rest = several ? name + 2 : name + 1;
    char pattern[8];
    if ((*name != 'Q' && *name != 'M') || *rest == '\0' || strlen(rest) > 3) return 0;
    int32_t count = 0;
    if (strcmp(name, "QR") == 0) { /* the ring of Phe or Tyr */
        static const char *const RING[] = {"HD%", "HE%", "HZ"};
        for (int k = 0; k < 3; k++) count += collect(molecule, residue, RING[k], false, atoms + count);
        return count;
    }
    snprintf(pattern, sizeof pattern, "H%s%%", rest);
    count = collect(molecule, residue, pattern, false, atoms);
    if (rest[strlen(rest) - 1] == '\'') { /* H5' and H5'' of a sugar */
        for (int k = 0; k < 2; k++) {
            snprintf(pattern, sizeof pattern, "H%s%s", rest, k == 0 ? "" : "'");
            count += collect(molecule, residue, pattern, false, atoms + count);
        }
    }
    if (several) return count;
    bool mixed = false;
    for (int32_t k = 1; k < count; k++)
        mixed = mixed || (siblings(molecule, atoms[k]) == 3) != (siblings(molecule, atoms[0]) == 3);
    if (*name == 'M' || mixed) count = keep_kind(molecule, *name == 'M', atoms, count);
    return count > 1 ? count : 0;
}

/* ---- names ---- */

int32_t tml_names_match(const tml_molecule *molecule, int32_t residue, const char *name, int32_t *atoms, tml_name_kind *kind) {
    int32_t exact = tml_molecule_find_atom(molecule, residue, name);
    bool pairs = has_pair_letter(name);
    *kind = TML_NAME_EXACT;
    if (exact >= 0) {
        atoms[0] = exact;
        return 1;
    }
    if (pairs || strpbrk(name, "%*") != NULL) {
        *kind = TML_NAME_WILD;
        return collect(molecule, residue, name, pairs, atoms);
    }
    if (molecule->residues[residue].polymer == TML_POLYMER_NONE) return 0;
    if (strcmp(name, "HN") == 0 || strcmp(name, "H") == 0) {
        *kind = TML_NAME_AMIDE;
        int32_t amide = tml_molecule_find_atom(molecule, residue, "H");
        if (amide < 0) amide = tml_molecule_find_atom(molecule, residue, "H1");
        if (amide < 0) return 0;
        atoms[0] = amide;
        return 1;
    }
    *kind = TML_NAME_PSEUDO;
    return pseudo_atoms(molecule, residue, name, atoms);
}

/* ---- stereo pairs ---- */

/* The heavy atom that a member stands on: itself, or what holds a hydrogen. */
static int32_t carrier_of(const tml_molecule *molecule, int32_t atom) {
    int32_t first = molecule->neighbour_first[atom];
    return molecule->atoms[atom].element != 1 || first == molecule->neighbour_first[atom + 1] ? atom : molecule->neighbours[first];
}

/* Whether two atoms have a neighbour in common, and neighbours of the same elements: CG1 and CG2 of Val, not CD1 and CD2 of Trp. */
static bool are_alike(const tml_molecule *molecule, int32_t a, int32_t b) {
    bool common = false;
    for (int32_t k = molecule->neighbour_first[a]; k < molecule->neighbour_first[a + 1]; k++)
        for (int32_t l = molecule->neighbour_first[b]; l < molecule->neighbour_first[b + 1]; l++)
            common = common || molecule->neighbours[k] == molecule->neighbours[l];
    return common && molecule->atoms[a].element == molecule->atoms[b].element && tml_molecule_same_neighbours(molecule, a, b);
}

static bool is_stereo_pair(const tml_molecule *molecule, const int32_t *one, const int32_t *other, int32_t count) {
    int32_t first = carrier_of(molecule, one[0]), second = carrier_of(molecule, other[0]);
    for (int32_t k = 0; k < count; k++)
        if (carrier_of(molecule, one[k]) != first || carrier_of(molecule, other[k]) != second) return false;
    return first == second ? count == 1 : are_alike(molecule, first, second);
}

bool tml_names_stereo(const tml_molecule *molecule, int32_t residue, const char *name, int32_t *atoms, int32_t *half, bool *second) {
    static const char *const MARKS[] = {"1", "2", "3", "'", "''"};
    char pattern[LONGEST + 4];
    size_t at = strcspn(name, "xy");
    if (!has_pair_letter(name) || strlen(name) > LONGEST || strpbrk(name + at + 1, "xy") != NULL) return false;
    if (tml_molecule_find_atom(molecule, residue, name) >= 0) return false;
    int32_t counts[2] = {0}, members = 0;
    for (size_t m = 0; m < sizeof MARKS / sizeof *MARKS; m++) {
        snprintf(pattern, sizeof pattern, "%.*s%s%s", (int)at, name, MARKS[m], name + at + 1);
        int32_t *into = atoms + (members > 0 ? counts[0] : 0) + (members > 1 ? counts[1] : 0);
        int32_t count = collect(molecule, residue, pattern, false, into);
        if (count == 0) continue;
        if (members == 2) return false;
        counts[members++] = count;
    }
    if (members != 2 || counts[0] != counts[1]) return false;
    *half = counts[0];
    *second = name[at] == 'y';
    return is_stereo_pair(molecule, atoms, atoms + *half, *half);
}

#include "restraint/names.h"

#include <stdint.h>
#include <stdio.h>
#include <string.h>

/* A pseudo-atom stands for at most so many hydrogens of one residue. */
enum { MOST_HYDROGENS = 32 };

static bool is_digit(char c) {
    return c >= '0' && c <= '9';
}

/* Whether a name fits a pattern of NEF. Bit k of `states` is set where the pattern's first k characters can have eaten the name so
 * far: every way is followed at once, so that the time is bounded for any pattern. */
static bool fits(const char *pattern, const char *name) {
    size_t length = strlen(pattern);
    if (length >= 64) return false; /* no name is that long */
    uint64_t states = 1;
    for (size_t k = 0; k < length && pattern[k] == '*'; k++) states |= (uint64_t)2 << k;
    for (; *name != '\0' && states != 0; name++) {
        uint64_t next = 0;
        for (size_t k = 0; k < length; k++) {
            char want = pattern[k];
            bool here = states >> k & 1, within = states >> (k + 1) & 1; /* before the character, or having begun to repeat it */
            if (want == '*')
                next |= (uint64_t)(here || within || next >> k & 1) << (k + 1);
            else if (want == '%')
                next |= (uint64_t)((here || within) && is_digit(*name)) << (k + 1);
            else if (want == 'x' || want == 'y')
                next |= (uint64_t)(here && (*name == want || is_digit(*name) || *name == '\'')) << (k + 1);
            else
                next |= (uint64_t)(here && want == *name) << (k + 1);
        }
        states = next;
    }
    return states >> length & 1;
}

static int32_t collect(const tml_molecule *molecule, int32_t residue, const char *pattern, int32_t *atoms, int32_t room) {
    const tml_residue *where = &molecule->residues[residue];
    int32_t count = 0;
    for (int32_t i = where->first_atom; i < where->first_atom + where->atom_count && count < room; i++)
        if (fits(pattern, molecule->atoms[i].name)) atoms[count++] = i;
    return count;
}

/* "QB", "MD1", "QQG", "QR" as a pattern over hydrogens: "HB%", "HD1%", "HG%"; false if the name is no pseudo-atom. */
static bool pseudo_pattern(const char *name, char *pattern, size_t size) {
    const char *rest = NULL;
    if (strncmp(name, "QQ", 2) == 0)
        rest = name + 2;
    else if (*name == 'Q' || *name == 'M')
        rest = name + 1;
    if (rest == NULL || *rest == '\0' || strlen(rest) > 3) return false;
    snprintf(pattern, size, "H%s%%", rest);
    return true;
}

/* How many of the atoms share an atom's name but for the last character: 3 for a methyl group, 2 for a methylene's hydrogens. */
static int32_t alike(const tml_molecule *molecule, const int32_t *atoms, int32_t count, int32_t atom) {
    const char *name = molecule->atoms[atom].name;
    size_t length = strlen(name);
    int32_t found = 0;
    for (int32_t k = 0; k < count; k++) {
        const char *other = molecule->atoms[atoms[k]].name;
        found += strlen(other) == length && strncmp(other, name, length - 1) == 0;
    }
    return found;
}

/* Where a pattern holds methyls and others (HG% of Ile and Thr), M means the methyls, and Q the pair if there is one. */
static int32_t keep_group(const tml_molecule *molecule, int32_t *atoms, int32_t count, bool methyl) {
    int32_t sizes[MOST_HYDROGENS], pairs = 0, kept = 0;
    if (count > MOST_HYDROGENS) return 0;
    for (int32_t k = 0; k < count; k++) {
        sizes[k] = alike(molecule, atoms, count, atoms[k]);
        pairs += sizes[k] == 2;
    }
    for (int32_t k = 0; k < count; k++)
        if (!methyl && pairs > 0 ? sizes[k] == 2 : sizes[k] >= 3) atoms[kept++] = atoms[k];
    return kept;
}

int32_t tml_names_match(const tml_molecule *molecule, int32_t residue, const char *name, int32_t *atoms, int32_t room,
                        tml_name_kind *kind) {
    int32_t exact = tml_molecule_find_atom(molecule, residue, name);
    *kind = TML_NAME_EXACT;
    if (exact >= 0 && room > 0) {
        atoms[0] = exact;
        return 1;
    }
    if (strpbrk(name, "%*xy") != NULL) {
        *kind = TML_NAME_WILD;
        return collect(molecule, residue, name, atoms, room);
    }
    if (!molecule->residues[residue].amino_acid) return 0;
    if (strcmp(name, "HN") == 0 || strcmp(name, "H") == 0) {
        *kind = TML_NAME_AMIDE;
        int32_t amide = tml_molecule_find_atom(molecule, residue, "H");
        if (amide < 0) amide = tml_molecule_find_atom(molecule, residue, "H1");
        if (amide < 0 || room < 1) return 0;
        atoms[0] = amide;
        return 1;
    }
    *kind = TML_NAME_PSEUDO;
    char pattern[8];
    if (strcmp(name, "QR") == 0) { /* the ring of Phe or Tyr */
        int32_t count = collect(molecule, residue, "HD%", atoms, room);
        count += collect(molecule, residue, "HE%", atoms + count, room - count);
        return count + collect(molecule, residue, "HZ", atoms + count, room - count);
    }
    if (!pseudo_pattern(name, pattern, sizeof pattern)) return 0;
    return keep_group(molecule, atoms, collect(molecule, residue, pattern, atoms, room), *name == 'M' || name[1] == 'Q');
}

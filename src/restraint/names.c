#include "restraint/names.h"

#include <stdio.h>
#include <string.h>

static bool is_digit(char c) {
    return c >= '0' && c <= '9';
}

/* Whether a name fits a pattern of NEF; only the last `*` or `%` ever needs another try, so this is linear in practice and
 * never recurses. */
static bool fits(const char *pattern, const char *name) {
    const char *retry_pattern = NULL, *retry_name = NULL;
    while (*name != '\0') {
        if (*pattern == '*') {
            retry_pattern = pattern++;
            retry_name = name;
        } else if (*pattern == '%' && is_digit(*name)) {
            retry_pattern = pattern++;
            retry_name = ++name;
        } else if (((*pattern == 'x' || *pattern == 'y') && (is_digit(*name) || *name == '\'')) ||
                   (*pattern == *name && *pattern != '%')) {
            pattern++;
            name++;
        } else if (retry_pattern != NULL && (*retry_pattern == '*' || is_digit(*retry_name))) {
            pattern = retry_pattern + 1;
            name = ++retry_name;
        } else {
            return false;
        }
    }
    while (*pattern == '*') pattern++;
    return *pattern == '\0';
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
    return pseudo_pattern(name, pattern, sizeof pattern) ? collect(molecule, residue, pattern, atoms, room) : 0;
}

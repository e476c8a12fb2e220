#include "output/models.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/vector.h"

/* Contents: formats - names - links - writing */

/* ---- formats ---- */

static bool ends_in(const char *path, size_t length, const char *suffix) {
    size_t size = strlen(suffix);
    return length > size && memcmp(path + length - size, suffix, size) == 0;
}

tml_format tml_format_of(const char *path, bool *compressed) {
    size_t length = strlen(path);
    *compressed = ends_in(path, length, ".gz");
    if (*compressed) length -= strlen(".gz");
    if (ends_in(path, length, ".pdb")) return TML_FORMAT_PDB;
    return ends_in(path, length, ".cif") ? TML_FORMAT_CIF : TML_FORMAT_UNKNOWN;
}

tml_status tml_format_fits(const tml_molecule *molecule, int32_t models, tml_format format, tml_error *error) {
    return format == TML_FORMAT_PDB ? tml_pdb_fits(molecule, models, error) : TML_OK;
}

/* ---- names ---- */

const char *tml_bare_chain(const tml_molecule *molecule) {
    static const char *const LETTERS[] = {"A", "B", "C", "D", "E", "F", "G", "H", "I", "J", "K", "L", "M", "N", "O", "P",
                                          "Q", "R", "S", "T", "U", "V", "W", "X", "Y", "Z", "0", "1", "2", "3", "4", "5",
                                          "6", "7", "8", "9"};
    for (size_t i = 0; i < sizeof LETTERS / sizeof LETTERS[0]; i++) {
        bool taken = false;
        for (int32_t c = 0; c < molecule->chain_count && !taken; c++) taken = strcmp(molecule->chains[c].code, LETTERS[i]) == 0;
        if (!taken) return LETTERS[i];
    }
    return "-";
}

tml_label tml_label_of(const tml_molecule *molecule, int32_t index, const char *bare_chain) {
    const tml_residue *residue = &molecule->residues[index];
    tml_label label = {.chain = residue->chain[0] == '\0' ? bare_chain : residue->chain,
                       .name = residue->name[0] == '\0' ? "UNL" : residue->name,
                       .insertion = ' ',
                       .standard = residue->standard};
    if (residue->number[0] == '\0') {
        label.code = "1";
        label.number = 1;
        label.numbered = true;
        return label;
    }
    char code[24];
    int length = snprintf(code, sizeof code, "%d", residue->sequence);
    if (residue->insertion != ' ') snprintf(code + length, sizeof code - (size_t)length, "%c", residue->insertion);
    label.code = residue->number;
    label.numbered = strcmp(code, residue->number) == 0;
    label.number = residue->sequence;
    label.insertion = label.numbered ? residue->insertion : ' ';
    return label;
}

void tml_to_ascii(const char *in, char *out, size_t size) {
    static const struct { const char *from, *to; } NAMES[] = {{"Å", "A"}, {"°", " deg"}, {"²", "2"}, {"–", "-"}};
    enum { KINDS = sizeof NAMES / sizeof NAMES[0], LONGEST = 5 };
    char *end = out + size - LONGEST;
    while (*in != '\0' && out < end) {
        size_t k = 0;
        while (k < KINDS && strncmp(in, NAMES[k].from, strlen(NAMES[k].from)) != 0) k++;
        if (k < KINDS) {
            for (const char *c = NAMES[k].to; *c != '\0'; c++) *out++ = *c;
            in += strlen(NAMES[k].from);
        } else if (*in >= ' ' && *in <= '~') {
            *out++ = *in++;
        } else {
            *out++ = '?';
            do in++;
            while (((unsigned char)*in & 0xC0) == 0x80);
        }
    }
    *out = '\0';
}

/* ---- links ---- */

bool *tml_peptide_bonds(const tml_molecule *molecule) {
    bool *flags = tml_alloc((size_t)molecule->bond_count, sizeof *flags);
    if (flags == NULL) return NULL;
    for (int32_t p = 0; p < molecule->peptide_count; p++) {
        const tml_peptide *peptide = &molecule->peptides[p];
        if (peptide->residue2 == peptide->residue1 + 1 && peptide->bond >= 0) flags[peptide->bond] = true;
    }
    return flags;
}

bool tml_bond_links(const tml_molecule *molecule, const bool *is_peptide, int32_t bond) {
    const tml_bond *at = &molecule->bonds[bond];
    return !is_peptide[bond] && molecule->atoms[at->a].residue != molecule->atoms[at->b].residue;
}

bool tml_is_disulfide(const tml_molecule *molecule, const tml_bond *bond) {
    enum { SULFUR = 16 };
    const tml_atom *a = &molecule->atoms[bond->a], *b = &molecule->atoms[bond->b];
    return a->element == SULFUR && b->element == SULFUR && molecule->residues[a->residue].polymer == TML_POLYMER_PROTEIN &&
           molecule->residues[b->residue].polymer == TML_POLYMER_PROTEIN;
}

double tml_first_length(const tml_ensemble *ensemble, const tml_bond *bond) {
    if (ensemble->model_count == 0) return bond->length;
    const double *xyz = ensemble->models[0].xyz;
    return tml_distance(&xyz[3 * (size_t)bond->a], &xyz[3 * (size_t)bond->b]);
}

/* ---- writing ---- */

static tml_status all_finite(const tml_ensemble *ensemble, tml_error *error) {
    for (int32_t m = 0; m < ensemble->model_count; m++)
        for (size_t i = 0; i < (size_t)ensemble->problem->molecule.atom_count * 3; i++)
            if (!isfinite(ensemble->models[m].xyz[i]))
                return tml_fail(error, TML_TOO_LARGE, "model %d has coordinates that are no numbers; nothing is written", m + 1);
    return TML_OK;
}

tml_status tml_write_models(const tml_ensemble *ensemble, const tml_contradictions *found, const char *path, tml_format format,
                            bool compressed, tml_error *error) {
    const tml_molecule *molecule = &ensemble->problem->molecule;
    tml_status status = tml_format_fits(molecule, ensemble->model_count, format, error);
    if (status == TML_OK) status = all_finite(ensemble, error);
    if (status == TML_OK && format == TML_FORMAT_PDB) status = tml_pdb_coordinates_fit(ensemble, error);
    if (status != TML_OK) return status;
    bool *is_peptide = tml_peptide_bonds(molecule);
    if (is_peptide == NULL) return tml_no_memory(error);
    tml_file *file;
    status = tml_file_open(path, compressed, &file, error);
    if (status == TML_OK) {
        if (format == TML_FORMAT_PDB)
            tml_pdb_write(file, ensemble, found, is_peptide);
        else
            status = tml_cif_write(file, ensemble, found, is_peptide);
        if (status == TML_OK) {
            status = tml_file_close(file, error);
        } else {
            tml_file_discard(file);
            tml_no_memory(error);
        }
    }
    free(is_peptide);
    return status;
}

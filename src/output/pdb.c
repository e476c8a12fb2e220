/* pdb.c: models in the PDB format.
 *
 * Source: Atomic Coordinate Entry Format Description, version 3.3 (wwPDB 2012). REMARK 6 to 99 are free text there.
 */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/vector.h"
#include "molecule/elements.h"
#include "output/models.h"
#include "output/words.h"

/* Contents: what fits - the writer - title and remarks - polymers and links - coordinates - connections */

enum { MOST_SERIAL = 99999, MOST_RESIDUES = 9999, MOST_MODELS = 9999, LEAST_NUMBER = -999, MOST_NUMBER = 9999, COLUMNS = 80 };
static const double MOST_SPREAD = 999.99; /* of the column of B factors, %6.2f */

#define ADVICE "write mmCIF instead (.cif)"

typedef struct writer {
    tml_file *file;
    const tml_ensemble *ensemble;
    const tml_molecule *molecule;
    const tml_contradictions *found;
    const bool *is_peptide;
    const char *bare_chain;
} writer;

static void write_title(const writer *w);
static void write_remarks(const writer *w);
static void write_sequences(const writer *w);
static void write_links(const writer *w);
static void write_cis(const writer *w);
static void write_model(const writer *w, int32_t index);
static void write_connections(const writer *w);

/* Index of a chain's last amino acid, after which the polymer ends; -1 for none. */
static int32_t polymer_end(const tml_molecule *molecule, const tml_chain *chain) {
    for (int32_t r = chain->first_residue + chain->residue_count - 1; r >= chain->first_residue; r--)
        if (molecule->residues[r].polymer != TML_POLYMER_NONE) return r;
    return -1;
}

static int polymer_count(const tml_molecule *molecule) {
    int count = 0;
    for (int32_t c = 0; c < molecule->chain_count; c++) count += polymer_end(molecule, &molecule->chains[c]) >= 0;
    return count;
}

/* ---- what fits ---- */

static bool plain(const char *text) {
    for (; *text != '\0'; text++)
        if (*text <= ' ' || *text > '~') return false;
    return true;
}

static tml_status residue_fits(const tml_molecule *molecule, int32_t residue, const char *bare_chain, tml_error *error) {
    tml_label label = tml_label_of(molecule, residue, bare_chain);
    if (strlen(label.chain) != 1 || !plain(label.chain))
        return tml_fail(error, TML_TOO_LARGE, "the PDB format has one letter for a chain, not \"%.32s\"; " ADVICE, label.chain);
    if (strlen(label.name) > 3 || !plain(label.name))
        return tml_fail(error, TML_TOO_LARGE, "the PDB format has three letters for a residue's name, not \"%.32s\"; " ADVICE,
                        label.name);
    if (!label.numbered || label.number < LEAST_NUMBER || label.number > MOST_NUMBER)
        return tml_fail(error, TML_TOO_LARGE,
                        "the PDB format numbers residues from %d to %d, with one letter after that at most; residue %.32s:%.32s "
                        "does not fit; " ADVICE,
                        LEAST_NUMBER, MOST_NUMBER, label.chain, label.code);
    for (int32_t a = 0; a < molecule->residues[residue].atom_count; a++) {
        const char *name = molecule->atoms[molecule->residues[residue].first_atom + a].name;
        if (strlen(name) > 4 || !plain(name))
            return tml_fail(error, TML_TOO_LARGE, "the PDB format has four letters for an atom's name, not \"%.32s\"; " ADVICE, name);
    }
    return TML_OK;
}

tml_status tml_pdb_fits(const tml_molecule *molecule, int32_t models, tml_error *error) {
    if (molecule->atom_count > MOST_SERIAL - polymer_count(molecule))
        return tml_fail(error, TML_TOO_LARGE, "the PDB format holds %d atoms, the molecule has %d; " ADVICE,
                        MOST_SERIAL - polymer_count(molecule), molecule->atom_count);
    if (models > MOST_MODELS)
        return tml_fail(error, TML_TOO_LARGE, "the PDB format holds %d models, not %d; " ADVICE, MOST_MODELS, models);
    for (int32_t c = 0; c < molecule->chain_count; c++)
        if (molecule->chains[c].residue_count > MOST_RESIDUES)
            return tml_fail(error, TML_TOO_LARGE, "the PDB format holds %d residues in a chain, chain %.32s has %d; " ADVICE,
                            MOST_RESIDUES, molecule->chains[c].code, molecule->chains[c].residue_count);
    const char *bare_chain = tml_bare_chain(molecule);
    for (int32_t r = 0; r < molecule->residue_count; r++) {
        tml_status status = residue_fits(molecule, r, bare_chain, error);
        if (status != TML_OK) return status;
    }
    return TML_OK;
}

tml_status tml_pdb_coordinates_fit(const tml_ensemble *ensemble, tml_error *error) {
    static const double LOW = -999.9995, HIGH = 9999.9995; /* what %8.3f rounds into its columns */
    for (int32_t m = 0; m < ensemble->model_count; m++)
        for (size_t i = 0; i < (size_t)ensemble->problem->molecule.atom_count * 3; i++)
            if (!(ensemble->models[m].xyz[i] > LOW && ensemble->models[m].xyz[i] < HIGH))
                return tml_fail(error, TML_TOO_LARGE,
                                "model %d reaches %.1f Å, and the PDB format holds -999.999 to 9999.999 Å; " ADVICE, m + 1,
                                ensemble->models[m].xyz[i]);
    return TML_OK;
}

/* ---- the writer ---- */

void tml_pdb_write(tml_file *file, const tml_ensemble *ensemble, const tml_contradictions *found, const bool *is_peptide) {
    const tml_molecule *molecule = &ensemble->problem->molecule;
    writer w = {file, ensemble, molecule, found, is_peptide, tml_bare_chain(molecule)};
    write_title(&w);
    tml_file_print(file, "NUMMDL    %-4d\n", ensemble->model_count);
    write_remarks(&w);
    write_sequences(&w);
    write_links(&w);
    write_cis(&w);
    for (int32_t m = 0; m < ensemble->model_count; m++) write_model(&w, m);
    write_connections(&w);
    tml_file_print(file, "END\n");
}

/* ---- title and remarks ---- */

static void write_title(const writer *w) {
    enum { FIRST = 70, NEXT = 69, MOST_LINES = 99 };
    char title[1024];
    const char *given = w->ensemble->problem->title;
    tml_to_ascii(given == NULL || given[0] == '\0' ? "MODELS FROM LIMITS ON DISTANCES" : given, title, sizeof title);
    const char *at = title;
    for (int line = 1; *at != '\0' && line <= MOST_LINES; line++) {
        int length = (int)strnlen(at, line == 1 ? FIRST : NEXT);
        if (line == 1)
            tml_file_print(w->file, "TITLE     %.*s\n", length, at);
        else
            tml_file_print(w->file, "TITLE   %2d %.*s\n", line, length, at);
        at += length;
    }
}

static void remark(const writer *w, const char *first, const char *rest, const char *text) {
    enum { ROOM = 2048 };
    char plain_text[ROOM], start[64], next[64];
    tml_to_ascii(text, plain_text, sizeof plain_text);
    snprintf(start, sizeof start, "REMARK   6 %s", first);
    snprintf(next, sizeof next, "REMARK   6 %s", rest);
    tml_file_paragraph(w->file, COLUMNS, start, next, "%s", plain_text);
}

static void remark_models(const writer *w) {
    remark(w, "", "", "MODEL TRIAL       ERROR >0.1A >0.2A >0.5A MAX A >5DEG MAX DEG PASSED");
    for (int32_t m = 0; m < w->ensemble->model_count; m++) {
        const tml_model *model = &w->ensemble->models[m];
        const tml_measures *of = &model->measures;
        char line[256];
        snprintf(line, sizeof line, "%5d %5d %11.4f %5d %5d %5d %5.2f %5d %7.1f %s", m + 1, model->trial, model->error,
                 of->distance_over_01, of->distance_over_02, of->distance_over_05, of->distance_max, of->dihedral_over_5,
                 of->dihedral_max, model->passed ? "YES" : "NO");
        remark(w, "", "", line);
    }
    for (int32_t m = 0; m < w->ensemble->model_count; m++) {
        char line[128];
        if (w->ensemble->models[m].passed) continue;
        snprintf(line, sizeof line, "MODEL %d DID NOT PASS: do not use it without looking at its violations.", m + 1);
        remark(w, "", "", line);
    }
}

static void remark_conflicts(const writer *w) {
    const tml_problem *problem = w->ensemble->problem;
    char text[1024];
    if (w->found == NULL || w->found->count == 0) return;
    snprintf(text, sizeof text, "CONTRADICTIONS AMONG THE LIMITS: %zu. The blamed limits were loosened for drawing only.",
             w->found->count);
    remark(w, "", "", text);
    for (size_t i = 0; i < w->found->count; i++) {
        char number[32];
        snprintf(number, sizeof number, "%zu. ", i + 1);
        tml_say_conflict(problem, &w->found->items[i], text, sizeof text);
        remark(w, number, "   ", text);
        for (size_t k = 0; k < w->found->items[i].step_count; k++) {
            tml_say_step(problem, &w->found->items[i].steps[k], text, sizeof text);
            remark(w, "   ", "     ", text);
        }
    }
}

static void write_remarks(const writer *w) {
    char text[1024], rule[512];
    snprintf(text, sizeof text, "Made by Trammel %s from limits on distances, seed %llu.", TML_VERSION,
             (unsigned long long)w->ensemble->seed);
    remark(w, "", "", text);
    tml_say_selection(w->ensemble, rule, sizeof rule);
    snprintf(text, sizeof text, "Models: %s; best first. %s", rule, tml_words_passing);
    remark(w, "", "", text);
    remark(w, "", "", tml_words_warning);
    remark(w, "", "", "The column of B factors holds each atom's spread over the models: the r.m.s. distance from its mean position "
                      "after superposition on the well-defined part, in Å, 999.99 at most.");
    remark_models(w);
    remark_conflicts(w);
}

/* ---- polymers and links ---- */

/* Lines are padded to all 80 columns: some readers take residues from behind the end of shorter ones. */
static void write_sequences(const writer *w) {
    enum { IN_LINE = 13, NAME = 4, PAD_AFTER_NAMES = 9, MOST_NUMBERED = 999 };
    for (int32_t c = 0; c < w->molecule->chain_count; c++) {
        const tml_chain *chain = &w->molecule->chains[c];
        int32_t total = 0, written = 0;
        for (int32_t r = 0; r < chain->residue_count; r++) total += w->molecule->residues[chain->first_residue + r].polymer != TML_POLYMER_NONE;
        for (int32_t r = 0; r < chain->residue_count; r++) {
            const tml_residue *residue = &w->molecule->residues[chain->first_residue + r];
            if (residue->polymer == TML_POLYMER_NONE) continue;
            if (written % IN_LINE == 0)
                tml_file_print(w->file, "SEQRES %3d %s %4d  ", written / IN_LINE % MOST_NUMBERED + 1,
                               chain->code[0] != '\0' ? chain->code : w->bare_chain, total);
            written++;
            tml_file_print(w->file, "%-*s", NAME, residue->name);
            if (written % IN_LINE != 0 && written < total) continue;
            tml_file_print(w->file, "%*s\n", PAD_AFTER_NAMES + (IN_LINE - 1 - (written - 1) % IN_LINE) * NAME, "");
        }
    }
}

/* An atom's name in its four columns: the element's symbol right-justified in the first two. */
static void place_name(const tml_atom *atom, char columns[5]) {
    size_t length = strlen(atom->name);
    bool wide = length >= 4 || strlen(tml_element_symbol(atom->element)) > 1;
    snprintf(columns, 5, wide ? "%-4s" : " %-3s", atom->name);
}

static void write_links(const writer *w) {
    enum { MOST_DISULFIDES = 999 };
    int serial = 0;
    for (int pass = 0; pass < 2; pass++) /* SSBOND before LINK */
        for (int32_t i = 0; i < w->molecule->bond_count; i++) {
            const tml_bond *bond = &w->molecule->bonds[i];
            if (!tml_bond_links(w->molecule, w->is_peptide, i) || tml_is_disulfide(w->molecule, bond) != (pass == 0)) continue;
            const tml_atom *a = &w->molecule->atoms[bond->a], *b = &w->molecule->atoms[bond->b];
            tml_label one = tml_label_of(w->molecule, a->residue, w->bare_chain);
            tml_label two = tml_label_of(w->molecule, b->residue, w->bare_chain);
            double length = fmin(tml_first_length(w->ensemble, bond), 999.99);
            char name_1[5], name_2[5];
            place_name(a, name_1);
            place_name(b, name_2);
            if (pass == 0)
                tml_file_print(w->file, "SSBOND %3d %3s %s %4d%c   %3s %s %4d%c %23s%6s %6s %5.2f\n", serial++ % MOST_DISULFIDES + 1,
                               one.name, one.chain, one.number, one.insertion, two.name, two.chain, two.number, two.insertion, "",
                               "1555", "1555", length);
            else
                tml_file_print(w->file, "LINK        %s %3s %s%4d%c%15s%s %3s %s%4d%c  %6s %6s %5.2f\n", name_1, one.name, one.chain,
                               one.number, one.insertion, "", name_2, two.name, two.chain, two.number, two.insertion, "1555",
                               "1555", length);
        }
}

static void write_cis(const writer *w) {
    enum { MOST_NUMBERED = 999 };
    static const double CIS_BELOW = 90.0; /* degrees of omega */
    int serial = 0;
    for (int32_t m = 0; m < w->ensemble->model_count && m < MOST_NUMBERED; m++)
        for (int32_t p = 0; p < w->molecule->peptide_count; p++) {
            const tml_peptide *peptide = &w->molecule->peptides[p];
            const double *xyz = w->ensemble->models[m].xyz;
            tml_label one = tml_label_of(w->molecule, peptide->residue1, w->bare_chain);
            tml_label two = tml_label_of(w->molecule, peptide->residue2, w->bare_chain);
            double omega = tml_dihedral_of(&xyz[3 * (size_t)peptide->ca1], &xyz[3 * (size_t)peptide->c],
                                           &xyz[3 * (size_t)peptide->n], &xyz[3 * (size_t)peptide->ca2]) * 180.0 / TML_PI;
            if (fabs(omega) >= CIS_BELOW) continue;
            tml_file_print(w->file, "CISPEP %3d %3s %s %4d%c   %3s %s %4d%c       %3d       %6.2f\n", serial++ % MOST_NUMBERED + 1,
                           one.name, one.chain, one.number, one.insertion, two.name, two.chain, two.number, two.insertion, m + 1,
                           tml_unsigned_zero(omega, 0.005));
        }
}

/* ---- coordinates ---- */

static void write_atom(const writer *w, int32_t atom, int serial, const tml_label *label, const double *xyz) {
    static const double HALF = 0.0005;
    const tml_atom *at = &w->molecule->atoms[atom];
    double spread = w->ensemble->spread == NULL ? 0.0 : w->ensemble->spread[atom];
    char name[5], charge[3] = "  ", element[4];
    place_name(at, name);
    snprintf(element, sizeof element, "%2s", tml_element_symbol(at->element));
    for (char *c = element; *c != '\0'; c++) *c = (char)(*c >= 'a' && *c <= 'z' ? *c - 'a' + 'A' : *c);
    if (at->charge != 0 && at->charge > -10 && at->charge < 10)
        snprintf(charge, sizeof charge, "%c%c", '0' + abs(at->charge), at->charge > 0 ? '+' : '-');
    tml_file_print(w->file, "%-6s%5d %s %3s %s%4d%c   %8.3f%8.3f%8.3f%6.2f%6.2f          %s%s\n",
                   label->standard ? "ATOM" : "HETATM", serial, name, label->name, label->chain, label->number, label->insertion,
                   tml_unsigned_zero(xyz[0], HALF), tml_unsigned_zero(xyz[1], HALF), tml_unsigned_zero(xyz[2], HALF), 1.0,
                   isfinite(spread) ? fmin(spread, MOST_SPREAD) : MOST_SPREAD, element, charge);
}

static void write_model(const writer *w, int32_t index) {
    const double *xyz = w->ensemble->models[index].xyz;
    int serial = 0;
    tml_file_print(w->file, "MODEL     %4d\n", index + 1);
    for (int32_t c = 0; c < w->molecule->chain_count; c++) {
        const tml_chain *chain = &w->molecule->chains[c];
        int32_t end = polymer_end(w->molecule, chain);
        for (int32_t r = chain->first_residue; r < chain->first_residue + chain->residue_count; r++) {
            const tml_residue *residue = &w->molecule->residues[r];
            tml_label label = tml_label_of(w->molecule, r, w->bare_chain);
            for (int32_t a = residue->first_atom; a < residue->first_atom + residue->atom_count; a++)
                write_atom(w, a, ++serial, &label, &xyz[3 * (size_t)a]);
            if (r == end)
                tml_file_print(w->file, "TER   %5d      %3s %s%4d%c\n", ++serial, label.name, label.chain, label.number,
                               label.insertion);
        }
    }
    tml_file_print(w->file, "ENDMDL\n");
}

/* ---- connections ---- */

/* The serial number of an atom: TER records of the chains before it count, and its own chain's where it comes after that. */
static int serial_of(const writer *w, int32_t atom) {
    int32_t residue = w->molecule->atoms[atom].residue;
    int serial = atom + 1;
    for (int32_t c = 0; c < w->molecule->chain_count && w->molecule->chains[c].first_residue <= residue; c++) {
        int32_t end = polymer_end(w->molecule, &w->molecule->chains[c]);
        serial += end >= 0 && end < residue;
    }
    return serial;
}

static bool shown(const writer *w, int32_t bond) {
    const tml_bond *at = &w->molecule->bonds[bond];
    return tml_bond_links(w->molecule, w->is_peptide, bond) ||
           w->molecule->residues[w->molecule->atoms[at->a].residue].polymer == TML_POLYMER_NONE;
}

/* Links, and all bonds of what is no standard residue. */
static void write_connections(const writer *w) {
    enum { IN_LINE = 4 };
    for (int32_t a = 0; a < w->molecule->atom_count; a++) {
        int written = 0;
        for (int32_t k = w->molecule->neighbour_first[a]; k < w->molecule->neighbour_first[a + 1]; k++) {
            if (!shown(w, w->molecule->neighbour_bonds[k])) continue;
            if (written % IN_LINE == 0) tml_file_print(w->file, "%sCONECT%5d", written == 0 ? "" : "\n", serial_of(w, a));
            tml_file_print(w->file, "%5d", serial_of(w, w->molecule->neighbours[k]));
            written++;
        }
        if (written > 0) tml_file_print(w->file, "\n");
    }
}

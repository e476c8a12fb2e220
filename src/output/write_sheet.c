/* realpath belongs to the X/Open part of POSIX. */
#define _XOPEN_SOURCE 700

#include <ctype.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "molecule/elements.h"
#include "output/convert.h"

/* Contents: the sheet - words - the molecule - restraints */

static void write_molecule(tml_conversion *c);
static void write_distances(tml_conversion *c);
static void write_dihedrals(tml_conversion *c);

void tml_write_sheet(tml_conversion *c) {
    tml_file_print(c->file, "sheet 1\n");
    if (*c->draft->problem->title != '\0') {
        tml_file_print(c->file, "title \"");
        for (const char *p = c->draft->problem->title; *p != '\0'; p++) tml_file_write(c->file, *p == '"' ? "'" : p, 1);
        tml_file_print(c->file, "\"\n");
    }
    write_molecule(c);
    write_distances(c);
    write_dihedrals(c);
}

/* ---- words ---- */

/* A word, after a blank; in quotes where it has to be. A sheet has no way to write a quote within quotes: it becomes a prime. */
static void put_word(tml_file *file, const char *text) {
    bool plain = *text != '\0' && strcmp(text, "-") != 0;
    for (const char *p = text; *p != '\0'; p++) plain = plain && !isspace((unsigned char)*p) && *p != '#' && *p != '"';
    if (plain) {
        tml_file_print(file, " %s", text);
        return;
    }
    tml_file_print(file, " \"");
    for (const char *p = text; *p != '\0'; p++) tml_file_write(file, *p == '"' ? "'" : p, 1);
    tml_file_print(file, "\"");
}

static bool needs_quotes(const char *text) {
    for (; *text != '\0'; text++)
        if (isspace((unsigned char)*text) || *text == '#') return true;
    return false;
}

/* Addresses joined by commas, as one word after a blank. */
static void put_addresses(tml_file *file, const tml_address *at, int32_t count) {
    bool quoted = false;
    for (int32_t k = 0; k < count; k++) quoted = quoted || needs_quotes(at[k].chain) || needs_quotes(at[k].number) || needs_quotes(at[k].atom);
    tml_file_print(file, quoted ? " \"" : " ");
    for (int32_t k = 0; k < count; k++) {
        const char *comma = k == 0 ? "" : ",";
        if (*at[k].chain == '\0' && *at[k].number == '\0')
            tml_file_print(file, "%s%s", comma, at[k].atom);
        else
            tml_file_print(file, "%s%s:%s:%s", comma, at[k].chain, at[k].number, at[k].atom);
    }
    if (quoted) tml_file_print(file, "\"");
}

/* ---- the molecule ---- */

static long plain_number(const char *number) {
    char *end;
    long value = strtol(number, &end, 10);
    return *number != '\0' && *end == '\0' ? value : -1000000;
}

static bool is_last(const tml_outline *outline, size_t i) {
    for (size_t k = i + 1; k < outline->residue_count; k++)
        if (outline->residues[k].chain == outline->residues[i].chain) return false;
    return true;
}

static bool is_first(const tml_outline *outline, size_t i) {
    return i == 0 || outline->residues[i - 1].chain != outline->residues[i].chain;
}

/* Whether a residue's linking is what it would be without being said. */
static bool usual_linking(const tml_outline *outline, size_t i) {
    const tml_outline_residue *residue = &outline->residues[i];
    bool first = is_first(outline, i), last = is_last(outline, i);
    switch (residue->linking) {
    case TML_LINKING_DEFAULT: return true;
    case TML_LINKING_START: return first && !last;
    case TML_LINKING_MIDDLE: return !first && !last;
    case TML_LINKING_END: return last && !first;
    case TML_LINKING_SINGLE: return first && last;
    default: return false;
    }
}

static void write_residues(tml_conversion *c) {
    static const char *const LINKING[] = {"", "start", "middle", "end", "single", "break", "cyclic"};
    const tml_outline *outline = &c->draft->outline;
    tml_file *file = c->file;
    enum { A_LINE = 12 };
    int on_line = 0;
    for (size_t i = 0; i < outline->residue_count; i++) {
        const tml_outline_residue *residue = &outline->residues[i], *before = i > 0 ? residue - 1 : NULL;
        bool runs_on = before != NULL && before->chain == residue->chain && on_line < A_LINE && plain_number(residue->number) > -1000000 &&
                       plain_number(residue->number) == plain_number(before->number) + 1;
        if (!runs_on) {
            if (i > 0) tml_file_print(file, "\n");
            tml_file_print(file, "sequence");
            put_word(file, residue->chain);
            tml_file_print(file, " %s", residue->number);
            on_line = 0;
        }
        put_word(file, residue->name);
        on_line++;
    }
    if (outline->residue_count > 0) tml_file_print(file, "\n");
    for (size_t i = 0; i < outline->residue_count; i++) {
        const tml_outline_residue *residue = &outline->residues[i];
        const struct { bool say; const char *statement, *what; } said[] = {
            {residue->variant != NULL && *residue->variant != '\0', "variant", residue->variant},
            {!usual_linking(outline, i), "linking", LINKING[residue->linking]},
            {residue->cis || residue->trans, "peptide", residue->cis ? "cis" : "trans"},
        };
        for (size_t k = 0; k < sizeof said / sizeof *said; k++) {
            if (!said[k].say) continue;
            tml_file_print(file, "%s", said[k].statement);
            put_word(file, residue->chain);
            put_word(file, residue->number);
            put_word(file, said[k].what);
            tml_file_print(file, "\n");
        }
    }
}

static void write_molecule(tml_conversion *c) {
    const tml_outline *outline = &c->draft->outline;
    tml_file *file = c->file;
    for (size_t i = 0; i < outline->component_count; i++) {
        const tml_component *component = outline->components[i];
        if (!component->made || component->place.file < 0) continue;
        const char *path = c->draft->problem->files[component->place.file];
        char *whole = realpath(path, NULL); /* the sheet may stand in another folder */
        tml_file_print(file, "component %s", component->name);
        put_word(file, whole == NULL ? path : whole);
        tml_file_print(file, "\n");
        free(whole);
    }
    write_residues(c);
    for (size_t i = 0; i < outline->ends_count; i++) {
        static const char *const ENDS[] = {"charged", "neutral", "open"};
        tml_file_print(file, "ends");
        put_word(file, outline->ends[i].chain);
        tml_file_print(file, " %s\n", ENDS[outline->ends[i].ends]);
    }
    for (size_t i = 0; i < outline->alike_count; i++) {
        tml_file_print(file, "alike");
        for (size_t k = 0; k < outline->alike[i].chain_count; k++) put_word(file, outline->alike[i].chains[k]);
        tml_file_print(file, "\n");
    }
    for (size_t i = 0; i < outline->atom_count; i++) {
        const tml_outline_atom *atom = &outline->atoms[i];
        tml_file_print(file, "atom");
        put_addresses(file, &(tml_address){.chain = atom->chain, .number = atom->number, .atom = atom->name}, 1);
        tml_file_print(file, " %s\n", atom->element == 0 ? "bead" : tml_element_symbol(atom->element));
    }
    for (size_t i = 0; i < outline->link_count; i++) {
        tml_file_print(file, "link");
        put_addresses(file, &outline->links[i].a, 1);
        put_addresses(file, &outline->links[i].b, 1);
        tml_file_print(file, "\n");
    }
    for (size_t i = 0; i < outline->chiral_count; i++) {
        const tml_outline_chiral *chiral = &outline->chirals[i];
        tml_file_print(file, "chiral");
        put_addresses(file, &chiral->centre, 1);
        for (int k = 0; k < 3; k++) put_addresses(file, &chiral->arm[k], 1);
        tml_file_print(file, " %c\n", chiral->sign < 0 ? '-' : '+');
    }
    for (size_t i = 0; i < outline->plane_count; i++) {
        const tml_outline_plane *plane = &outline->planes[i];
        tml_file_print(file, "plane");
        for (size_t k = 0; k < plane->atom_count; k++) put_addresses(file, &plane->atoms[k], 1);
        tml_file_print(file, " within %.10g\n", plane->within);
    }
}

/* ---- restraints ---- */

static void put_limit(tml_file *file, double value) {
    if (isnan(value) || isinf(value))
        tml_file_print(file, " -");
    else
        tml_file_print(file, " %.10g", value);
}

/* A statement `list` where a row's list is another than the one before; sheets begin in the list `sheet`. */
static void say_list(tml_file *file, const char **now, const char *list) {
    bool same = *now == NULL ? strcmp(list, "sheet") == 0 : *now == list;
    *now = list;
    if (same) return;
    tml_file_print(file, "list");
    put_word(file, list);
    tml_file_print(file, "\n");
}

static void write_distances(tml_conversion *c) {
    const tml_rows *rows = &c->draft->rows;
    const char *list = NULL;
    for (size_t i = 0; i < rows->distance_count; i++) {
        const tml_distance_row *row = &rows->distances[i];
        say_list(c->file, &list, c->lists[i]);
        c->lost[TML_LOSS_BESIDE] += tml_says_more(&row->beside);
        tml_file_print(c->file, "limit");
        put_addresses(c->file, &rows->addresses[row->first_a], row->count_a);
        put_addresses(c->file, &rows->addresses[row->first_b], row->count_b);
        put_limit(c->file, row->lower);
        put_limit(c->file, row->upper);
        if (!row->alone) tml_file_print(c->file, " as");
        if (!row->alone) put_word(c->file, row->id);
        if (row->weight != 1) tml_file_print(c->file, " weight %.10g", row->weight);
        if (*row->combination != '\0') tml_file_print(c->file, " together");
        if (*row->combination != '\0') put_word(c->file, row->combination);
        tml_file_print(c->file, "%s\n", row->average ? " average" : "");
    }
}

static void write_dihedrals(tml_conversion *c) {
    const tml_rows *rows = &c->draft->rows;
    const char *list = rows->distance_count > 0 ? c->lists[rows->distance_count - 1] : NULL;
    for (size_t i = 0; i < rows->dihedral_count; i++) {
        const tml_dihedral_row *row = &rows->dihedrals[i];
        if (isnan(row->lower) || isnan(row->upper)) continue; /* restrains nothing */
        say_list(c->file, &list, c->lists[rows->distance_count + i]);
        c->lost[TML_LOSS_BESIDE] += tml_says_more(&row->beside);
        tml_file_print(c->file, "dihedral");
        for (int k = 0; k < 4; k++) put_addresses(c->file, &row->atoms[k], 1);
        tml_file_print(c->file, " %.10g %.10g", row->lower, row->upper);
        if (!row->alone) tml_file_print(c->file, " as");
        if (!row->alone) put_word(c->file, row->id);
        if (row->weight != 1) tml_file_print(c->file, " weight %.10g", row->weight);
        tml_file_print(c->file, "\n");
    }
}

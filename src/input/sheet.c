/* sheet.c: Trammel's own text: one statement a line, words apart by blanks, # for comments, "…" for quotes, - for an open limit.
 *
 *   lines and words
 *   statements      one function each, by a table
 *   addresses       chain:residue:atom, or a bare name
 */
#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "input/draft.h"
#include "molecule/elements.h"
#include "molecule/index.h"
#include "molecule/nearest.h"

enum { MOST_WORDS = 4096, MOST_ALTERNATIVES = 256 };

typedef struct word { const char *text; int length, column; bool quoted; } word;

typedef struct sheet {
    tml_draft *draft;
    tml_error *error;
    const char *path;
    int32_t file, line;
    word *words;
    int count;
    int limits, dihedrals; /* statements so far, for the ids of those that have none */
    const char *list;      /* of the restraints that follow; pooled */
    tml_index *residues;   /* chain (owner -1) to its number; number within a chain to the residue in the outline */
    size_t *last;          /* of each chain: its residue that came last */
    size_t chain_count, chain_capacity;
    bool begun;
} sheet;

typedef tml_status statement_fn(sheet *s);

/* ---- messages ---- */

static tml_place here(const sheet *s, int index) {
    return (tml_place){s->file, s->line, index < s->count ? s->words[index].column : s->words[s->count - 1].column + s->words[s->count - 1].length};
}

static tml_status expected(sheet *s, int index, const char *what) {
    tml_place at = here(s, index);
    if (index >= s->count) return tml_fail_at(s->error, TML_BAD_INPUT, s->path, at.line, at.column, "the line ends where %s is expected", what);
    int shown = s->words[index].length > 40 ? 40 : s->words[index].length;
    return tml_fail_at(s->error, TML_BAD_INPUT, s->path, at.line, at.column, "found '%.*s' where %s is expected", shown, s->words[index].text, what);
}

static tml_status no_more(sheet *s, int count) {
    return s->count > count ? expected(s, count, "the end of the line") : TML_OK;
}

static bool is_word(const sheet *s, int index, const char *text) {
    return index < s->count && !s->words[index].quoted && (size_t)s->words[index].length == strlen(text) &&
           memcmp(s->words[index].text, text, (size_t)s->words[index].length) == 0;
}

static tml_status pooled(sheet *s, const char *text, size_t length, const char **out) {
    *out = tml_strings_add_part(s->draft->problem->pool, text, length);
    return *out == NULL ? tml_no_memory(s->error) : TML_OK;
}

static tml_status text_at(sheet *s, int index, const char *what, const char **out) {
    if (index >= s->count || s->words[index].length == 0) return expected(s, index, what);
    return pooled(s, s->words[index].text, (size_t)s->words[index].length, out);
}

static tml_status number_at(sheet *s, int index, const char *what, double *out) {
    tml_star_value value = {.text = index < s->count ? s->words[index].text : "", .length = index < s->count ? s->words[index].length : 0};
    if (index >= s->count || memchr(value.text, '(', (size_t)value.length) != NULL || !tml_star_number(&value, out)) return expected(s, index, what);
    return TML_OK;
}

/* A limit: a number, or - for none. */
static tml_status limit_at(sheet *s, int index, const char *what, double *out) {
    *out = NAN;
    return is_word(s, index, "-") ? TML_OK : number_at(s, index, what, out);
}

/* ---- addresses ---- */

/* No name in use is longer; what is longer is a slip, and would not fit into reports. */
enum { NAME_MOST = 40 };

static tml_status address_from(sheet *s, int index, const char *text, size_t length, tml_address *out) {
    const char *first = memchr(text, ':', length), *second = first == NULL ? NULL : memchr(first + 1, ':', length - (size_t)(first + 1 - text));
    *out = (tml_address){.place = here(s, index)};
    out->place.column += (int32_t)(text - s->words[index].text);
    tml_status status = pooled(s, "", 0, &out->residue);
    if (length > NAME_MOST) return expected(s, index, "an atom of at most 40 characters");
    if (first == NULL) {
        out->chain = out->number = out->residue;
        if (length == 0) return expected(s, index, "an atom");
        return status == TML_OK ? pooled(s, text, length, &out->atom) : status;
    }
    const char *end = text + length;
    if (second == NULL || first == text || second == first + 1 || second + 1 == end || memchr(second + 1, ':', (size_t)(end - second - 1)) != NULL)
        return expected(s, index, "an atom as chain:residue:atom, such as A:7:CA");
    if (status == TML_OK) status = pooled(s, text, (size_t)(first - text), &out->chain);
    if (status == TML_OK) status = pooled(s, first + 1, (size_t)(second - first - 1), &out->number);
    return status == TML_OK ? pooled(s, second + 1, (size_t)(end - second - 1), &out->atom) : status;
}

static tml_status address_at(sheet *s, int index, tml_address *out) {
    if (index >= s->count) return expected(s, index, "an atom");
    return address_from(s, index, s->words[index].text, (size_t)s->words[index].length, out);
}

/* Addresses with commas between them, which mean 'or'. */
static tml_status addresses_at(sheet *s, int index, tml_address *out, int room, int *count) {
    if (index >= s->count) return expected(s, index, "an atom");
    const char *text = s->words[index].text, *end = text + s->words[index].length;
    for (*count = 0;;) {
        const char *comma = memchr(text, ',', (size_t)(end - text));
        if (*count == room) return expected(s, index, "fewer alternatives on one line");
        tml_status status = address_from(s, index, text, (size_t)((comma == NULL ? end : comma) - text), &out[(*count)++]);
        if (status != TML_OK || comma == NULL) return status;
        text = comma + 1;
    }
}

/* ---- statements ---- */

static tml_status title_statement(sheet *s) {
    if (s->count < 2) return expected(s, 1, "a title");
    tml_status status = pooled(s, s->words[1].text, (size_t)s->words[1].length, &s->draft->problem->title);
    return status == TML_OK ? no_more(s, 2) : status;
}

static tml_status atom_statement(sheet *s) {
    tml_outline *outline = &s->draft->outline;
    tml_address address;
    tml_status status = address_at(s, 1, &address);
    if (status != TML_OK) return status;
    if (strpbrk(address.atom, "%*") != NULL) return expected(s, 1, "an atom's name without wildcards");
    if (s->count < 3) return expected(s, 2, "an element, or bead");
    char symbol[8] = "";
    if (s->words[2].length < (int)sizeof symbol) memcpy(symbol, s->words[2].text, (size_t)s->words[2].length);
    int element = is_word(s, 2, "bead") ? 0 : tml_element_number(symbol);
    if (element < 0 || (element == 0 && !is_word(s, 2, "bead"))) return expected(s, 2, "an element's symbol, or bead");
    if (!tml_grow(&outline->atoms, &outline->atom_capacity, outline->atom_count + 1, sizeof *outline->atoms)) return tml_no_memory(s->error);
    outline->atoms[outline->atom_count++] = (tml_outline_atom){.chain = address.chain, .number = address.number, .residue = address.residue,
                                                               .name = address.atom, .element = element, .place = address.place};
    return no_more(s, 3);
}

/* Enter a residue of the outline; of two with the same number, which is an error told later, the first stays. */
static tml_status index_residue(sheet *s, size_t at) {
    const tml_outline_residue *residue = &s->draft->outline.residues[at];
    if (at > INT32_MAX) return tml_fail_at(s->error, TML_TOO_LARGE, s->path, s->line, 0, "too many residues");
    int32_t chain = tml_index_find(s->residues, -1, residue->chain);
    if (chain < 0) {
        chain = (int32_t)s->chain_count++;
        if (!tml_index_add(s->residues, -1, residue->chain, chain)) return tml_no_memory(s->error);
    }
    if (!tml_grow(&s->last, &s->chain_capacity, s->chain_count, sizeof *s->last)) return tml_no_memory(s->error);
    s->last[chain] = at;
    if (tml_index_find(s->residues, chain, residue->number) >= 0) return TML_OK;
    return tml_index_add(s->residues, chain, residue->number, (int32_t)at) ? TML_OK : tml_no_memory(s->error);
}

/* The number of the residue after `number`, where a sequence goes on. */
static tml_status next_number(sheet *s, int index, long number, const char **out) {
    char text[24];
    if (number > 99999999 || number < -99999999) return expected(s, index, "a residue number of at most eight digits");
    snprintf(text, sizeof text, "%ld", number);
    return pooled(s, text, strlen(text), out);
}

/* sequence CHAIN [FIRST] NAME …: a line without a number goes on where the chain's last one ended. */
static tml_status sequence_statement(sheet *s) {
    tml_outline *outline = &s->draft->outline;
    const char *chain = NULL;
    tml_status status = text_at(s, 1, "a chain", &chain);
    if (status != TML_OK) return status;
    long number = 0;
    char *end = NULL;
    int index = 2;
    if (s->count > 2) number = strtol(s->words[2].text, &end, 10);
    const char *stop = s->count > 2 ? s->words[2].text + s->words[2].length : NULL;
    bool lettered = stop != NULL && end > s->words[2].text && end + 1 == stop && isalpha((unsigned char)*end); /* 52A */
    bool given = s->count > 2 && (end == stop || lettered);
    int32_t known = tml_index_find(s->residues, -1, chain);
    if (given)
        index++;
    else if (s->last != NULL && known >= 0)
        number = strtol(outline->residues[s->last[known]].number, NULL, 10) + 1;
    else
        return expected(s, 2, "the number of the first residue");
    if (index >= s->count) return expected(s, index, "a residue");
    for (; status == TML_OK && index < s->count; index++, number++) {
        if (!tml_grow(&outline->residues, &outline->residue_capacity, outline->residue_count + 1, sizeof *outline->residues))
            return tml_no_memory(s->error);
        tml_outline_residue *residue = &outline->residues[outline->residue_count++];
        *residue = (tml_outline_residue){.chain = chain, .place = here(s, index)};
        status = lettered && index == 3 ? text_at(s, 2, "a residue number", &residue->number) : next_number(s, index, number, &residue->number);
        if (status == TML_OK) status = text_at(s, index, "a residue", &residue->name);
        if (status == TML_OK) status = pooled(s, "", 0, &residue->variant);
        if (status == TML_OK) status = index_residue(s, outline->residue_count - 1);
    }
    return status;
}

/* The residue that words 1 and 2 name, among those of the sequences so far. */
static tml_status residue_at(sheet *s, tml_outline_residue **out) {
    const char *chain = NULL, *number = NULL;
    tml_outline *outline = &s->draft->outline;
    tml_status status = text_at(s, 1, "a chain", &chain);
    if (status == TML_OK) status = text_at(s, 2, "a residue number", &number);
    if (status != TML_OK) return status;
    int32_t owner = tml_index_find(s->residues, -1, chain);
    int32_t found = owner < 0 ? -1 : tml_index_find(s->residues, owner, number);
    if (found < 0) return expected(s, 2, "a residue of a sequence above");
    *out = &outline->residues[found];
    return TML_OK;
}

static tml_status variant_statement(sheet *s) {
    tml_outline_residue *residue = NULL;
    tml_status status = residue_at(s, &residue);
    if (status == TML_OK) status = text_at(s, 3, "atoms added or taken away, such as -HD1,+HE2", &residue->variant);
    return status == TML_OK ? no_more(s, 4) : status;
}

static tml_status alike_statement(sheet *s) {
    tml_outline *outline = &s->draft->outline;
    if (s->count < 3) return expected(s, s->count, s->count < 2 ? "a chain" : "another chain that is alike");
    tml_outline_alike alike = {.chains = tml_alloc((size_t)s->count, sizeof *alike.chains), .place = here(s, 1)};
    if (alike.chains == NULL) return tml_no_memory(s->error);
    tml_status status = TML_OK;
    for (int i = 1; i < s->count && status == TML_OK; i++) status = text_at(s, i, "a chain", &alike.chains[alike.chain_count++]);
    if (status == TML_OK && !tml_grow(&outline->alike, &outline->alike_capacity, outline->alike_count + 1, sizeof *outline->alike))
        status = tml_no_memory(s->error);
    if (status == TML_OK)
        outline->alike[outline->alike_count++] = alike;
    else
        free(alike.chains);
    return status;
}

static tml_status ends_statement(sheet *s) {
    static const char *const WORDS[] = {"charged", "neutral", "open"};
    tml_outline *outline = &s->draft->outline;
    tml_outline_ends ends = {.place = here(s, 1)};
    tml_status status = text_at(s, 1, "a chain", &ends.chain);
    if (status != TML_OK) return status;
    int kind = 0;
    while (kind < 3 && !is_word(s, 2, WORDS[kind])) kind++;
    if (kind == 3) return expected(s, 2, "charged, neutral or open");
    ends.ends = kind == 0 ? TML_ENDS_CHARGED : kind == 1 ? TML_ENDS_NEUTRAL : TML_ENDS_OPEN;
    if (!tml_grow(&outline->ends, &outline->ends_capacity, outline->ends_count + 1, sizeof *outline->ends)) return tml_no_memory(s->error);
    outline->ends[outline->ends_count++] = ends;
    return no_more(s, 3);
}

static tml_status peptide_statement(sheet *s) {
    tml_outline_residue *residue = NULL;
    tml_status status = residue_at(s, &residue);
    if (status != TML_OK) return status;
    if (!is_word(s, 3, "cis") && !is_word(s, 3, "trans")) return expected(s, 3, "cis or trans");
    residue->cis = is_word(s, 3, "cis");
    residue->trans = !residue->cis;
    return no_more(s, 4);
}

/* linking CHAIN NUMBER start|middle|end|single|break|cyclic, where it is not what the chain's order tells. */
static tml_status linking_statement(sheet *s) {
    static const struct { const char *word; tml_linking linking; } WORDS[] = {
        {"start", TML_LINKING_START}, {"middle", TML_LINKING_MIDDLE}, {"end", TML_LINKING_END},
        {"single", TML_LINKING_SINGLE}, {"break", TML_LINKING_BREAK}, {"cyclic", TML_LINKING_CYCLIC},
    };
    tml_outline_residue *residue = NULL;
    tml_status status = residue_at(s, &residue);
    if (status != TML_OK) return status;
    for (size_t i = 0; i < sizeof WORDS / sizeof *WORDS; i++)
        if (is_word(s, 3, WORDS[i].word)) {
            residue->linking = WORDS[i].linking;
            return no_more(s, 4);
        }
    return expected(s, 3, "start, middle, end, single, break or cyclic");
}

static tml_status link_statement(sheet *s) {
    tml_outline *outline = &s->draft->outline;
    tml_outline_link link = {.place = here(s, 1)};
    tml_status status = address_at(s, 1, &link.a);
    if (status == TML_OK) status = address_at(s, 2, &link.b);
    if (status != TML_OK) return status;
    if (!tml_grow(&outline->links, &outline->link_capacity, outline->link_count + 1, sizeof *outline->links)) return tml_no_memory(s->error);
    outline->links[outline->link_count++] = link;
    return no_more(s, 3);
}

static tml_status component_statement(sheet *s) {
    const char *name = NULL, *path = NULL;
    tml_status status = text_at(s, 1, "a residue's name", &name);
    if (status == TML_OK && strlen(name) > NAME_MOST) status = expected(s, 1, "a residue's name of at most 40 characters");
    if (status == TML_OK) status = text_at(s, 2, "the path of a component dictionary", &path);
    if (status == TML_OK) status = no_more(s, 3);
    return status == TML_OK ? tml_read_component_file(s->draft, name, path, here(s, 1), s->error) : status;
}

static tml_status chiral_statement(sheet *s) {
    tml_outline *outline = &s->draft->outline;
    tml_outline_chiral chiral = {.place = here(s, 1)};
    tml_status status = address_at(s, 1, &chiral.centre);
    for (int k = 0; status == TML_OK && k < 3; k++) status = address_at(s, 2 + k, &chiral.arm[k]);
    if (status != TML_OK) return status;
    if (!is_word(s, 5, "+") && !is_word(s, 5, "-")) return expected(s, 5, "+ or -");
    chiral.sign = is_word(s, 5, "+") ? 1 : -1;
    if (!tml_grow(&outline->chirals, &outline->chiral_capacity, outline->chiral_count + 1, sizeof *outline->chirals))
        return tml_no_memory(s->error);
    outline->chirals[outline->chiral_count++] = chiral;
    return no_more(s, 6);
}

static tml_status plane_statement(sheet *s) {
    static const double USUAL_WITHIN = 0.02;
    tml_outline *outline = &s->draft->outline;
    int count = 0;
    while (1 + count < s->count && !is_word(s, 1 + count, "within")) count++;
    if (count < 4) return expected(s, 1 + count, "a plane's atom; a plane needs at least four");
    double within = USUAL_WITHIN;
    tml_status status = TML_OK;
    if (1 + count < s->count) status = number_at(s, 2 + count, "the largest distance from the plane in Å", &within);
    if (status != TML_OK) return status;
    if (!(within > 0 && within < 100)) return expected(s, 2 + count, "a distance of more than 0 Å");
    if (!tml_grow(&outline->planes, &outline->plane_capacity, outline->plane_count + 1, sizeof *outline->planes)) return tml_no_memory(s->error);
    tml_outline_plane *plane = &outline->planes[outline->plane_count];
    *plane = (tml_outline_plane){.atoms = tml_alloc((size_t)count, sizeof *plane->atoms), .atom_count = (size_t)count, .within = within,
                                 .place = here(s, 1)};
    if (plane->atoms == NULL) return tml_no_memory(s->error);
    outline->plane_count++;
    for (int k = 0; status == TML_OK && k < count; k++) status = address_at(s, 1 + k, &plane->atoms[k]);
    if (status != TML_OK) return status;
    return no_more(s, 1 + count < s->count ? 3 + count : 1 + count);
}

/* What may follow the limits: `as ID`, `weight W`, `together NAME`, `average`; in any order. Limits of one id with the same NAME hold
 * together. */
typedef struct endings { const char *id, *together; double weight; bool average, alone; } endings;

static tml_status endings_from(sheet *s, int index, bool distance, const char *number_word, int number, endings *out) {
    char own[32];
    snprintf(own, sizeof own, "%s%d", number_word, number);
    *out = (endings){.weight = 1.0, .alone = true};
    tml_status status = pooled(s, own, strlen(own), &out->id);
    if (status == TML_OK) status = pooled(s, "", 0, &out->together);
    while (status == TML_OK && index < s->count) {
        if (is_word(s, index, "as")) {
            status = text_at(s, index + 1, "an id", &out->id);
            out->alone = false;
            index += 2;
        } else if (is_word(s, index, "weight")) {
            status = number_at(s, index + 1, "a weight", &out->weight);
            if (status == TML_OK && !(out->weight >= 0)) status = expected(s, index + 1, "a weight of 0 or more");
            index += 2;
        } else if (distance && is_word(s, index, "together")) {
            status = text_at(s, index + 1, "a name for the limits that hold together", &out->together);
            index += 2;
        } else if (distance && is_word(s, index, "average")) {
            out->average = true;
            index++;
        } else {
            return expected(s, index, distance ? "as, weight, together, average or the end of the line" : "as, weight or the end of the line");
        }
    }
    return status;
}

static tml_status limit_statement(sheet *s) {
    tml_address addresses[2 * MOST_ALTERNATIVES];
    int count_a = 0, count_b = 0;
    endings end;
    tml_distance_row row = {.place = here(s, 0)};
    tml_status status = addresses_at(s, 1, addresses, MOST_ALTERNATIVES, &count_a);
    if (status == TML_OK) status = addresses_at(s, 2, addresses + count_a, MOST_ALTERNATIVES, &count_b);
    if (status == TML_OK) status = limit_at(s, 3, "a lower limit in Å, or -", &row.lower);
    if (status == TML_OK) status = limit_at(s, 4, "an upper limit in Å, or -", &row.upper);
    if (status == TML_OK) status = endings_from(s, 5, true, "limit", ++s->limits, &end);
    if (status != TML_OK) return status;
    if (row.lower < 0 || row.upper < 0) return expected(s, row.lower < 0 ? 3 : 4, "a distance, which is never negative,");
    if (row.upper < row.lower) return expected(s, 4, "an upper limit that is not below the lower one");
    status = s->list == NULL ? pooled(s, "sheet", 5, &s->list) : TML_OK;
    row.list = s->list;
    if (status != TML_OK) return status;
    row.combination = end.together;
    row.id = end.id;
    row.weight = end.weight;
    row.average = end.average;
    row.alone = end.alone;
    row.count_a = count_a;
    row.count_b = count_b;
    return tml_rows_add_distance(&s->draft->rows, &row, addresses) ? TML_OK : tml_no_memory(s->error);
}

static tml_status dihedral_statement(sheet *s) {
    tml_dihedral_row row = {.place = here(s, 0)};
    endings end;
    tml_status status = TML_OK;
    for (int k = 0; status == TML_OK && k < 4; k++) status = address_at(s, 1 + k, &row.atoms[k]);
    if (status == TML_OK) status = number_at(s, 5, "the angle in degrees where the interval begins", &row.lower);
    if (status == TML_OK) status = number_at(s, 6, "the angle in degrees where the interval ends", &row.upper);
    if (status == TML_OK) status = endings_from(s, 7, false, "dihedral", ++s->dihedrals, &end);
    if (status == TML_OK) status = s->list == NULL ? pooled(s, "sheet", 5, &s->list) : TML_OK;
    row.list = s->list;
    if (status == TML_OK) status = pooled(s, "", 0, &row.combination);
    if (status != TML_OK) return status;
    row.id = end.id;
    row.weight = end.weight;
    row.alone = end.alone;
    return tml_rows_add_dihedral(&s->draft->rows, &row) ? TML_OK : tml_no_memory(s->error);
}

static tml_status list_statement(sheet *s) {
    tml_status status = text_at(s, 1, "a name for the restraints that follow", &s->list);
    return status == TML_OK ? no_more(s, 2) : status;
}

/* ---- lines ---- */

static const struct { const char *name; statement_fn *run; } STATEMENTS[] = {
    {"title", title_statement},     {"atom", atom_statement},       {"sequence", sequence_statement}, {"variant", variant_statement},
    {"ends", ends_statement},       {"peptide", peptide_statement}, {"link", link_statement},         {"limit", limit_statement},
    {"dihedral", dihedral_statement}, {"chiral", chiral_statement}, {"plane", plane_statement},
    {"alike", alike_statement},      {"component", component_statement}, {"list", list_statement},      {"linking", linking_statement},
};

/* Words of the grammar that this version cannot carry out. */
static const char *const LATER[] = {"molecule"};

static tml_status run_statement(sheet *s) {
    char name[64] = "", near[160] = "";
    if (!s->begun) {
        if (!is_word(s, 0, "sheet")) return expected(s, 0, "'sheet 1', which begins every sheet,");
        if (!is_word(s, 1, "1")) return expected(s, 1, "1, the grammar's version,");
        s->begun = true;
        return no_more(s, 2);
    }
    for (size_t i = 0; i < sizeof STATEMENTS / sizeof *STATEMENTS; i++)
        if (is_word(s, 0, STATEMENTS[i].name)) return STATEMENTS[i].run(s);
    for (size_t i = 0; i < sizeof LATER / sizeof *LATER; i++)
        if (is_word(s, 0, LATER[i]))
            return tml_fail_at(s->error, TML_BAD_INPUT, s->path, s->line, s->words[0].column,
                               "'%s' is not yet understood; this version builds from sequence, atom, link, chiral and plane", LATER[i]);
    snprintf(name, sizeof name, "%.*s", s->words[0].length > 40 ? 40 : s->words[0].length, s->words[0].text);
    tml_nearest nearest;
    tml_nearest_start(&nearest, name);
    for (size_t i = 0; i < sizeof STATEMENTS / sizeof *STATEMENTS; i++) tml_nearest_offer(&nearest, STATEMENTS[i].name);
    tml_nearest_append(&nearest, near, sizeof near);
    return tml_fail_at(s->error, TML_BAD_INPUT, s->path, s->line, s->words[0].column, "no statement begins with '%s'; the nearest: %s", name, near);
}

/* Split one line; words point into it. */
static tml_status split_line(sheet *s, const char *line, const char *end) {
    s->count = 0;
    for (const char *p = line; p < end;) {
        if (*p == ' ' || *p == '\t' || *p == '\r') {
            p++;
            continue;
        }
        if (*p == '#') break;
        if (s->count == MOST_WORDS)
            return tml_fail_at(s->error, TML_BAD_INPUT, s->path, s->line, (long)(p - line) + 1, "more than %d words on one line", MOST_WORDS);
        word *w = &s->words[s->count++];
        *w = (word){.text = p, .column = (int)(p - line) + 1};
        if (*p == '"') {
            const char *close = memchr(p + 1, '"', (size_t)(end - p - 1));
            if (close == NULL) return tml_fail_at(s->error, TML_BAD_INPUT, s->path, s->line, w->column, "the quote is not closed on its line");
            *w = (word){.text = p + 1, .length = (int)(close - p - 1), .column = w->column, .quoted = true};
            p = close + 1;
        } else {
            while (p < end && *p != ' ' && *p != '\t' && *p != '\r' && *p != '#') p++;
            w->length = (int)(p - w->text);
        }
    }
    return TML_OK;
}

bool tml_is_sheet(const char *text) {
    for (;;) { /* the first word of the first line that is no comment */
        text += strspn(text, " \t\r\n");
        if (*text != '#') break;
        text += strcspn(text, "\n");
    }
    return strncmp(text, "sheet", 5) == 0 && (text[5] == '\0' || strchr(" \t\r\n#", text[5]) != NULL);
}

tml_status tml_read_sheet(tml_draft *draft, const char *text, int32_t file, tml_error *error) {
    sheet s = {.draft = draft, .error = error, .path = draft->problem->files[file], .file = file};
    s.words = tml_alloc(MOST_WORDS, sizeof *s.words);
    s.residues = tml_index_new();
    tml_status status = s.words == NULL || s.residues == NULL ? tml_no_memory(error) : TML_OK;
    for (size_t i = 0; status == TML_OK && i < draft->outline.residue_count; i++) status = index_residue(&s, i); /* of other inputs */
    while (status == TML_OK && *text != '\0') {
        const char *end = text + strcspn(text, "\n");
        s.line++;
        status = split_line(&s, text, end);
        if (status == TML_OK && s.count > 0) status = run_statement(&s);
        text = *end == '\0' ? end : end + 1;
    }
    free(s.words);
    free(s.last);
    tml_index_free(s.residues);
    return status;
}

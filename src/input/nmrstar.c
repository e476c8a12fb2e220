/* nmrstar.c: sequence and restraints in NMR-STAR 3 (Ulrich et al., J. Biomol. NMR 73 (2019) 5; the dictionary of the Biological
 * Magnetic Resonance Data Bank, versions 3.0 to 3.2).
 *
 *   chains         assemblies of entities, and their residues
 *   links          bonds that the sequence does not imply
 *   addresses      by assembly and index; by the author's numbers where there are no others
 *   restraints     distances and torsions
 *   trees          distances as version 3.0 wrote them, with logic in nodes
 *   other lists    counted, named, not used
 */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "base/memory.h"
#include "input/cells.h"
#include "input/nmrstar_tree.h"
#include "molecule/index.h"

/* One entity in the assembly: a chain. */
typedef struct member { const char *id, *entity, *chain; } member;

/* What an entity is. */
typedef struct entity { const char *id; bool polymer, dna; size_t frame; } entity;

typedef struct reader {
    tml_cells in;
    tml_star *star;
    member *members;   size_t member_count, member_capacity;
    entity *entities;  size_t entity_count, entity_capacity;
    tml_index *numbers, *authors; /* (member, index) and (member, author's number) to residues of the outline */
    size_t by_author;  /* addresses that only the author's numbers gave */
    tml_place author_place;
    size_t shifted;    /* addresses whose index is not the author's number, though that is in the sequence, too … */
    long shift;        /* … and by how much the last one differs */
    tml_place shifted_place;
} reader;

static tml_status read_members(reader *r);
static tml_status read_entities(reader *r);
static tml_status read_residues(reader *r);
static tml_status read_bonds(reader *r);
static tml_status read_restraints(reader *r);
static tml_status note_leftovers(reader *r);

bool tml_is_nmrstar(const tml_star *star) {
    static const char *const CATEGORIES[] = {"_Entity_assembly", "_Entity_comp_index", "_Entity_poly_seq", "_Chem_comp_assembly", "_Gen_dist_constraint",
                                             "_Torsion_angle_constraint", "_Dist_constraint"};
    bool frames = false; /* a model's mmCIF has some of these categories, and no frames */
    for (size_t f = 0; f < star->frame_count; f++) frames = frames || star->frames[f].is_save;
    for (size_t i = 0; frames && i < star->loop_count; i++)
        for (size_t c = 0; c < sizeof CATEGORIES / sizeof *CATEGORIES; c++)
            if (tml_loop_is(star, &star->loops[i], CATEGORIES[c])) return true;
    return false;
}

tml_status tml_read_nmrstar(tml_draft *draft, tml_star *star, int32_t file, tml_error *error) {
    reader r = {.in = {draft, star, file, error}, .star = star, .numbers = tml_index_new(), .authors = tml_index_new()};
    tml_status status = r.numbers == NULL || r.authors == NULL ? tml_no_memory(error) : TML_OK;
    if (status == TML_OK) status = read_members(&r);
    if (status == TML_OK) status = read_entities(&r);
    if (status == TML_OK) status = read_residues(&r);
    if (status == TML_OK) status = read_bonds(&r);
    if (status == TML_OK) status = read_restraints(&r);
    if (status == TML_OK) status = note_leftovers(&r);
    tml_index_free(r.numbers);
    tml_index_free(r.authors);
    free(r.members);
    free(r.entities);
    return status;
}

/* ---- chains ---- */

static const tml_star_value *cell(const reader *r, const tml_star_loop *loop, size_t row, const char *name) {
    return tml_star_at(r->star, loop, row, tml_star_column(r->star, loop, name));
}

/* The first of some columns that has a value in this row. */
static const tml_star_value *first_of(const reader *r, const tml_star_loop *loop, size_t row, const char *const *names) {
    const tml_star_value *value = tml_star_at(r->star, loop, row, -1);
    for (; *names != NULL && tml_star_is_null(value); names++) value = cell(r, loop, row, *names);
    return value;
}

static int32_t find_member(const reader *r, const char *id) {
    for (size_t m = 0; m < r->member_count; m++)
        if (r->members[m].id == id) return (int32_t)m; /* pooled */
    return -1;
}

static bool chain_taken(const reader *r, const char *code) {
    for (size_t m = 0; m < r->member_count; m++)
        if (r->members[m].chain == code) return true;
    return false;
}

/* A chain's code is its strand's name; a second chain of the same name gets its own id behind it. */
static tml_status add_member(reader *r, const tml_star_value *id, const tml_star_value *entity_id, const tml_star_value *code) {
    member made;
    tml_status status = tml_cell_text(&r->in, id, "1", &made.id);
    if (status == TML_OK) status = tml_cell_text(&r->in, entity_id, "1", &made.entity);
    if (status == TML_OK) status = tml_cell_text(&r->in, code, made.id, &made.chain);
    if (status != TML_OK || find_member(r, made.id) >= 0) return status;
    if (chain_taken(r, made.chain)) {
        char text[128];
        snprintf(text, sizeof text, "%.60s-%.60s", made.chain, made.id);
        const char *before = made.chain;
        made.chain = tml_strings_add(r->in.draft->problem->pool, text);
        if (made.chain == NULL) return tml_no_memory(r->in.error);
        status = tml_problem_add_note(r->in.draft->problem, tml_cell_place(&r->in, id), r->in.error,
                                      "two molecules are called %s; the later one is taken as chain %s", before, made.chain);
    }
    if (status == TML_OK && !tml_grow(&r->members, &r->member_capacity, r->member_count + 1, sizeof *r->members))
        return tml_no_memory(r->in.error);
    if (status == TML_OK) r->members[r->member_count++] = made;
    return status;
}

static tml_status read_members(reader *r) {
    static const char *const CODES[] = {"Asym_ID", "PDB_chain_ID", NULL};
    tml_status status = TML_OK;
    for (size_t f = 0; status == TML_OK && f < r->star->frame_count; f++) {
        tml_star_loop loop;
        bool found;
        status = tml_star_find_table(r->star, &r->star->frames[f], "_Entity_assembly", &loop, &found, r->in.error);
        for (size_t row = 0; status == TML_OK && found && row < loop.row_count; row++)
            status = add_member(r, cell(r, &loop, row, "ID"), cell(r, &loop, row, "Entity_ID"), first_of(r, &loop, row, CODES));
    }
    return status;
}

static tml_status read_entities(reader *r) {
    for (size_t f = 0; f < r->star->frame_count; f++) {
        const tml_star_frame *frame = &r->star->frames[f];
        const tml_star_value *id = tml_star_find_item(r->star, frame, "_Entity.ID");
        const tml_star_value *type = tml_star_find_item(r->star, frame, "_Entity.Type");
        const tml_star_value *polymer = tml_star_find_item(r->star, frame, "_Entity.Polymer_type");
        if (id == NULL) continue;
        if (!tml_grow(&r->entities, &r->entity_capacity, r->entity_count + 1, sizeof *r->entities)) return tml_no_memory(r->in.error);
        entity *made = &r->entities[r->entity_count++];
        *made = (entity){.frame = f,
                         .polymer = type == NULL || tml_star_is_null(type) || tml_star_is(type, "polymer"),
                         .dna = polymer != NULL && tml_star_is(polymer, "polydeoxyribonucleotide")};
        tml_status status = tml_cell_text(&r->in, id, "1", &made->id);
        if (status != TML_OK) return status;
    }
    return TML_OK;
}

/* ---- residues ---- */

static tml_status add_residue(reader *r, int32_t m, const tml_star_loop *loop, size_t row, const tml_star_value *index,
                              const tml_star_value *name, const entity *of);

/* Residues from _Chem_comp_assembly, which tells of each chain; without it from each entity's own list. */
static tml_status read_residues(reader *r) {
    static const char *const LISTS[][3] = {{"_Entity_comp_index", "ID", "Comp_ID"}, {"_Entity_poly_seq", "Comp_index_ID", "Mon_ID"}};
    tml_status status = TML_OK;
    bool whole = false;
    for (size_t f = 0; status == TML_OK && f < r->star->frame_count; f++) {
        static const char *const CODES[] = {"Auth_asym_ID", "Asym_ID", NULL};
        tml_star_loop loop;
        bool found;
        status = tml_star_find_table(r->star, &r->star->frames[f], "_Chem_comp_assembly", &loop, &found, r->in.error);
        for (size_t row = 0; status == TML_OK && found && row < loop.row_count; row++) {
            const char *id;
            status = tml_cell_text(&r->in, cell(r, &loop, row, "Entity_assembly_ID"), "1", &id);
            if (status == TML_OK && find_member(r, id) < 0)
                status = add_member(r, cell(r, &loop, row, "Entity_assembly_ID"), cell(r, &loop, row, "Entity_ID"),
                                    first_of(r, &loop, row, CODES));
            if (status == TML_OK)
                status = add_residue(r, find_member(r, id), &loop, row, cell(r, &loop, row, "Comp_index_ID"),
                                     cell(r, &loop, row, "Comp_ID"), NULL);
            whole = true;
        }
    }
    for (size_t m = 0; status == TML_OK && !whole && m < r->member_count; m++)
        for (size_t e = 0; status == TML_OK && e < r->entity_count; e++) {
            bool listed = false;
            if (r->entities[e].id != r->members[m].entity) continue;
            for (int list = 0; status == TML_OK && list < 2 && !listed; list++) {
                tml_star_loop loop;
                status = tml_star_find_table(r->star, &r->star->frames[r->entities[e].frame], LISTS[list][0], &loop, &listed, r->in.error);
                for (size_t row = 0; status == TML_OK && listed && row < loop.row_count; row++)
                    status = add_residue(r, (int32_t)m, &loop, row, cell(r, &loop, row, LISTS[list][1]), cell(r, &loop, row, LISTS[list][2]),
                                         &r->entities[e]);
            }
        }
    return status;
}

static tml_linking linking_of(const tml_star_value *word, bool polymer) {
    static const struct { const char *word; tml_linking linking; } WORDS[] = {
        {"start", TML_LINKING_START}, {"middle", TML_LINKING_MIDDLE}, {"end", TML_LINKING_END},     {"single", TML_LINKING_SINGLE},
        {"break", TML_LINKING_BREAK}, {"cyclic", TML_LINKING_CYCLIC}, {"nonlinear", TML_LINKING_SINGLE},
    };
    for (size_t i = 0; i < sizeof WORDS / sizeof *WORDS; i++)
        if (tml_star_is(word, WORDS[i].word)) return WORDS[i].linking;
    return polymer ? TML_LINKING_DEFAULT : TML_LINKING_SINGLE;
}

/* In the one-letter names of older files, A in a DNA is DA. */
static tml_status residue_name(reader *r, const tml_star_value *value, const entity *of, const char **out) {
    char text[8];
    tml_status status = tml_cell_text(&r->in, value, ".", out);
    if (status != TML_OK || of == NULL || !of->dna || strlen(*out) != 1 || strchr("ACGTI", **out) == NULL) return status;
    snprintf(text, sizeof text, "D%s", *out);
    *out = tml_strings_add(r->in.draft->problem->pool, text);
    return *out == NULL ? tml_no_memory(r->in.error) : TML_OK;
}

static tml_status add_residue(reader *r, int32_t m, const tml_star_loop *loop, size_t row, const tml_star_value *index,
                              const tml_star_value *name, const entity *of) {
    tml_outline *outline = &r->in.draft->outline;
    if (tml_star_is_null(index) || tml_star_is_null(name))
        return tml_cell_expected(&r->in, tml_star_is_null(index) ? index : name, "a residue's index and name");
    if (outline->residue_count >= INT32_MAX) return tml_fail(r->in.error, TML_TOO_LARGE, "too many residues");
    if (!tml_grow(&outline->residues, &outline->residue_capacity, outline->residue_count + 1, sizeof *outline->residues))
        return tml_no_memory(r->in.error);
    tml_outline_residue *made = &outline->residues[outline->residue_count];
    *made = (tml_outline_residue){.chain = r->members[m].chain,
                                  .linking = linking_of(cell(r, loop, row, "Sequence_linking"), of == NULL || of->polymer),
                                  .cis = tml_star_is(cell(r, loop, row, "Cis_residue"), "yes"),
                                  .place = tml_cell_place(&r->in, name)};
    const char *author;
    tml_status status = tml_cell_text(&r->in, index, ".", &made->number);
    if (status == TML_OK) status = residue_name(r, name, of, &made->name);
    if (status == TML_OK) status = tml_cell_text(&r->in, cell(r, loop, row, "Auth_variant_ID"), "", &made->variant);
    if (status == TML_OK) status = tml_cell_text(&r->in, cell(r, loop, row, "Auth_seq_ID"), "", &author);
    if (status != TML_OK) return status;
    int32_t at = (int32_t)outline->residue_count++;
    if (tml_index_find(r->numbers, m, made->number) < 0 && !tml_index_add(r->numbers, m, made->number, at)) return tml_no_memory(r->in.error);
    if (*author != '\0' && tml_index_find(r->authors, m, author) < 0 && !tml_index_add(r->authors, m, author, at))
        return tml_no_memory(r->in.error);
    return TML_OK;
}

/* ---- addresses ---- */

/* Columns of one address; -1 where the loop lacks them. */
enum { MEMBER, INDEX, SEQUENCE, RESIDUE, ATOM, STRAND, AUTHOR_STRAND, AUTHOR_CHAIN, AUTHOR_NUMBER, AUTHOR_ATOM, COLUMN_COUNT };
typedef struct columns { int at[COLUMN_COUNT]; } columns;

/* `ending` is "_1" … "_4", or "" in trees. */
static tml_status find_columns(const reader *r, const tml_star_loop *loop, const char *ending, columns *out) {
    static const char *const NAMES[COLUMN_COUNT] = {"Entity_assembly_ID", "Comp_index_ID", "Seq_ID",       "Comp_ID",     "Atom_ID",
                                                    "PDB_strand_ID",      "Auth_asym_ID",  "Auth_chain_ID", "Auth_seq_ID", "Auth_atom_ID"};
    for (int k = 0; k < COLUMN_COUNT; k++) {
        char name[32];
        snprintf(name, sizeof name, "%s%s", NAMES[k], ending);
        out->at[k] = tml_star_column(r->star, loop, name);
    }
    char name[32];
    snprintf(name, sizeof name, "Atom_ID%s", ending);
    return out->at[ATOM] < 0 && out->at[AUTHOR_ATOM] < 0 ? tml_cell_missing(&r->in, loop, name) : TML_OK;
}

/* The chain that an address names: by its assembly, or by a strand's name, or the only one. */
static tml_status find_chain(reader *r, const tml_star_loop *loop, size_t row, const columns *of, int32_t *m, const char **chain) {
    const tml_star_value *by_id = tml_star_at(r->star, loop, row, of->at[MEMBER]);
    *m = -1;
    tml_status status = tml_cell_text(&r->in, by_id, "", chain);
    if (status == TML_OK && **chain != '\0') *m = find_member(r, *chain);
    for (int k = STRAND; status == TML_OK && *m < 0 && k <= AUTHOR_CHAIN; k++) {
        const tml_star_value *strand = tml_star_at(r->star, loop, row, of->at[k]);
        if (tml_star_is_null(strand)) continue;
        status = tml_cell_text(&r->in, strand, "", chain);
        for (size_t i = 0; i < r->member_count; i++)
            if (r->members[i].chain == *chain) *m = (int32_t)i;
    }
    if (status == TML_OK && *m < 0 && r->member_count == 1 && tml_star_is_null(by_id)) *m = 0;
    if (*m >= 0) *chain = r->members[*m].chain;
    /* Without a sequence of its own a file of restraints goes with another input's only chain. */
    const tml_outline *outline = &r->in.draft->outline;
    if (status == TML_OK && r->member_count == 0 && **chain == '\0' && outline->residue_count > 0) *chain = outline->residues[0].chain;
    return status;
}

static tml_status read_address(reader *r, const tml_star_loop *loop, size_t row, const columns *of, tml_address *out) {
    const tml_star_value *atom = tml_star_at(r->star, loop, row, of->at[ATOM]), *number = tml_star_at(r->star, loop, row, of->at[INDEX]);
    if (tml_star_is_null(atom)) atom = tml_star_at(r->star, loop, row, of->at[AUTHOR_ATOM]);
    if (tml_star_is_null(number)) number = tml_star_at(r->star, loop, row, of->at[SEQUENCE]);
    int32_t m;
    out->place = tml_cell_place(&r->in, atom);
    tml_status status = find_chain(r, loop, row, of, &m, &out->chain);
    if (status == TML_OK) status = tml_cell_text(&r->in, tml_star_at(r->star, loop, row, of->at[RESIDUE]), "", &out->residue);
    if (status == TML_OK) status = tml_cell_text(&r->in, atom, ".", &out->atom);
    if (status != TML_OK || !tml_star_is_null(number)) return status == TML_OK ? tml_cell_text(&r->in, number, ".", &out->number) : status;
    status = tml_cell_text(&r->in, tml_star_at(r->star, loop, row, of->at[AUTHOR_NUMBER]), ".", &out->number);
    int32_t known = status == TML_OK && m >= 0 ? tml_index_find(r->authors, m, out->number) : -1;
    if (known >= 0) out->number = r->in.draft->outline.residues[known].number;
    if (status == TML_OK && r->by_author++ == 0) r->author_place = out->place;
    return status;
}

/* Names in addresses follow those of the sequence where these were completed (A to DA). */
static void complete_name(const reader *r, tml_address *address) {
    for (size_t m = 0; m < r->member_count && *address->residue != '\0'; m++) {
        if (r->members[m].chain != address->chain) continue;
        int32_t at = tml_index_find(r->numbers, (int32_t)m, address->number);
        const char *known = at < 0 ? "" : r->in.draft->outline.residues[at].name;
        if (*known == 'D' && strcmp(known + 1, address->residue) == 0) address->residue = known;
    }
}

/* Where the author's number is an index of the sequence, too, and not the one that the row gives, the archive has matched it elsewhere:
 * rightly, if the sequence says so, or by mistake. */
static void watch_numbers(reader *r, const tml_star_loop *loop, size_t row, const columns *of, const tml_address *address) {
    const tml_star_value *author = tml_star_at(r->star, loop, row, of->at[AUTHOR_NUMBER]);
    double by_author, by_index;
    const tml_star_value index = {.text = address->number, .length = (int32_t)strlen(address->number)};
    if (r->member_count == 0 || !tml_star_number(author, &by_author) || !tml_star_number(&index, &by_index) || by_author == by_index) return;
    for (size_t m = 0; m < r->member_count; m++) {
        if (r->members[m].chain != address->chain) continue;
        char text[32];
        snprintf(text, sizeof text, "%.0f", by_author);
        bool said = tml_index_find(r->authors, (int32_t)m, text) >= 0; /* the sequence gives this author's number to a residue */
        if (said || tml_index_find(r->numbers, (int32_t)m, text) < 0) continue;
        if (r->shifted++ == 0) r->shifted_place = address->place;
        r->shift = (long)(by_index - by_author);
    }
}

static tml_status read_named(reader *r, const tml_star_loop *loop, size_t row, const columns *of, tml_address *out) {
    tml_status status = read_address(r, loop, row, of, out);
    if (status == TML_OK) complete_name(r, out);
    if (status == TML_OK) watch_numbers(r, loop, row, of, out);
    return status;
}

/* ---- links ---- */

/* Whether a bond is the one that the sequence implies between neighbours. */
static bool along_chain(const tml_address *a, const tml_address *b) {
    static const char *const ENDS[][2] = {{"C", "N"}, {"O3'", "P"}};
    if (a->chain != b->chain || labs(strtol(a->number, NULL, 10) - strtol(b->number, NULL, 10)) != 1) return false;
    for (size_t i = 0; i < sizeof ENDS / sizeof *ENDS; i++)
        if ((strcmp(a->atom, ENDS[i][0]) == 0 && strcmp(b->atom, ENDS[i][1]) == 0) ||
            (strcmp(b->atom, ENDS[i][0]) == 0 && strcmp(a->atom, ENDS[i][1]) == 0))
            return true;
    return false;
}

static tml_status read_bonds(reader *r) {
    tml_outline *outline = &r->in.draft->outline;
    tml_status status = TML_OK;
    for (size_t f = 0; status == TML_OK && f < r->star->frame_count; f++) {
        tml_star_loop loop;
        bool found;
        columns of[2];
        status = tml_star_find_table(r->star, &r->star->frames[f], "_Bond", &loop, &found, r->in.error);
        if (status != TML_OK || !found || loop.row_count == 0) continue;
        for (int k = 0; status == TML_OK && k < 2; k++) status = find_columns(r, &loop, k == 0 ? "_1" : "_2", &of[k]);
        for (size_t row = 0; status == TML_OK && row < loop.row_count; row++) {
            tml_outline_link link = {0};
            status = read_named(r, &loop, row, &of[0], &link.a);
            if (status == TML_OK) status = read_named(r, &loop, row, &of[1], &link.b);
            if (status != TML_OK || along_chain(&link.a, &link.b)) continue;
            link.place = link.a.place;
            if (!tml_grow(&outline->links, &outline->link_capacity, outline->link_count + 1, sizeof *outline->links))
                return tml_no_memory(r->in.error);
            outline->links[outline->link_count++] = link;
        }
    }
    return status;
}

/* ---- restraints ---- */

static tml_status read_distances(reader *r, const tml_star_frame *frame, const tml_star_loop *loop);
static tml_status read_torsions(reader *r, const tml_star_frame *frame, const tml_star_loop *loop);
static tml_status read_tree(reader *r, const tml_star_frame *frame);

static tml_status read_restraints(reader *r) {
    tml_status status = TML_OK;
    for (size_t f = 0; status == TML_OK && f < r->star->frame_count; f++) {
        const tml_star_frame *frame = &r->star->frames[f];
        tml_star_loop loop;
        bool found;
        status = tml_star_find_table(r->star, frame, "_Gen_dist_constraint", &loop, &found, r->in.error);
        if (status == TML_OK && found && loop.row_count > 0) status = read_distances(r, frame, &loop);
        if (status == TML_OK) status = tml_star_find_table(r->star, frame, "_Torsion_angle_constraint", &loop, &found, r->in.error);
        if (status == TML_OK && found && loop.row_count > 0) status = read_torsions(r, frame, &loop);
        if (status == TML_OK) status = read_tree(r, frame);
    }
    return status;
}

/* What a row says beside its atoms. */
typedef struct terms { const char *list, *id, *combination; double lower, upper, weight; tml_row_beside beside; tml_place place; } terms;

static tml_status maybe_text(reader *r, const tml_star_value *value, const char **out) {
    *out = NULL;
    return value == NULL || tml_star_is_null(value) ? TML_OK : tml_cell_text(&r->in, value, "", out);
}

static tml_status read_beside(reader *r, const tml_star_frame *frame, const tml_star_loop *loop, size_t row, tml_row_beside *out) {
    tml_status status = maybe_text(r, tml_star_find_item(r->star, frame, "_Gen_dist_constraint_list.Constraint_type"), &out->origin);
    if (status == TML_OK) status = maybe_text(r, tml_star_find_item(r->star, frame, "_Gen_dist_constraint_list.Potential_type"), &out->potential);
    if (status == TML_OK && out->origin == NULL)
        status = maybe_text(r, tml_star_find_item(r->star, frame, "_Torsion_angle_constraint_list.Constraint_type"), &out->origin);
    if (status == TML_OK && out->potential == NULL)
        status = maybe_text(r, tml_star_find_item(r->star, frame, "_Torsion_angle_constraint_list.Potential_type"), &out->potential);
    return status == TML_OK ? maybe_text(r, cell(r, loop, row, "Torsion_angle_name"), &out->angle) : status;
}

static tml_status read_terms(reader *r, const tml_star_frame *frame, const tml_star_loop *loop, size_t row, const char *const limits[4],
                             terms *out) {
    const tml_star_value *id = cell(r, loop, row, "ID");
    double target = NAN, error = NAN;
    *out = (terms){.place = tml_cell_place(&r->in, id)};
    if (tml_star_is_null(id)) return tml_cell_expected(&r->in, id, "a restraint's ID");
    tml_status status = tml_cell_text(&r->in, &frame->name, "", &out->list);
    if (status == TML_OK) status = tml_cell_text(&r->in, id, ".", &out->id);
    if (status == TML_OK) status = tml_cell_text(&r->in, cell(r, loop, row, "Combination_ID"), "", &out->combination);
    if (status == TML_OK) status = tml_cell_number(&r->in, cell(r, loop, row, limits[0]), &out->lower);
    if (status == TML_OK) status = tml_cell_number(&r->in, cell(r, loop, row, limits[1]), &out->upper);
    if (status == TML_OK) status = tml_cell_number(&r->in, cell(r, loop, row, limits[2]), &target);
    if (status == TML_OK) status = tml_cell_number(&r->in, cell(r, loop, row, limits[3]), &error);
    if (status == TML_OK) status = tml_cell_number(&r->in, cell(r, loop, row, "Weight"), &out->weight);
    if (isnan(out->weight)) out->weight = 1.0;
    out->beside = (tml_row_beside){.values = !isnan(target), .target = target, .uncertainty = error, .lower_linear = NAN, .upper_linear = NAN};
    if (status == TML_OK) status = read_beside(r, frame, loop, row, &out->beside);
    if (isnan(out->lower) && isnan(out->upper) && !isnan(target) && error >= 0) {
        out->lower = target - error;
        out->upper = target + error;
    }
    return status;
}

/* OR rows of one ID are alternatives; AND rows hold together, as one combination. */
static tml_status read_logic(reader *r, const tml_star_value *code, terms *row) {
    if (tml_star_is_null(code) || tml_star_is(code, "OR")) return TML_OK;
    if (!tml_star_is(code, "AND")) return tml_cell_expected(&r->in, code, "OR or AND");
    if (row->combination != NULL && *row->combination != '\0') return TML_OK;
    row->combination = tml_strings_add(r->in.draft->problem->pool, "all");
    return row->combination == NULL ? tml_no_memory(r->in.error) : TML_OK;
}

static tml_status read_distances(reader *r, const tml_star_frame *frame, const tml_star_loop *loop) {
    static const char *const LIMITS[4] = {"Distance_lower_bound_val", "Distance_upper_bound_val", "Distance_val", "Distance_val_err"};
    columns of[2];
    tml_status status = TML_OK;
    for (int k = 0; status == TML_OK && k < 2; k++) status = find_columns(r, loop, k == 0 ? "_1" : "_2", &of[k]);
    for (size_t row = 0; status == TML_OK && row < loop->row_count; row++) {
        tml_address addresses[2] = {0};
        terms given;
        status = read_terms(r, frame, loop, row, LIMITS, &given);
        if (status == TML_OK) status = read_logic(r, cell(r, loop, row, "Member_logic_code"), &given);
        for (int k = 0; status == TML_OK && k < 2; k++) status = read_named(r, loop, row, &of[k], &addresses[k]);
        if (status != TML_OK) break;
        tml_distance_row made = {.list = given.list, .id = given.id, .combination = given.combination, .count_a = 1, .count_b = 1,
                                 .lower = given.lower < 0 ? 0 : given.lower, .upper = given.upper, .weight = given.weight, .beside = given.beside, .place = given.place};
        if (!tml_rows_add_distance(&r->in.draft->rows, &made, addresses)) status = tml_no_memory(r->in.error);
    }
    return status;
}

static tml_status read_torsions(reader *r, const tml_star_frame *frame, const tml_star_loop *loop) {
    static const char *const LIMITS[4] = {"Angle_lower_bound_val", "Angle_upper_bound_val", "Angle_target_val", "Angle_target_val_err"};
    static const char *const ENDINGS[4] = {"_1", "_2", "_3", "_4"};
    columns of[4];
    tml_status status = TML_OK;
    for (int k = 0; status == TML_OK && k < 4; k++) status = find_columns(r, loop, ENDINGS[k], &of[k]);
    for (size_t row = 0; status == TML_OK && row < loop->row_count; row++) {
        terms given;
        tml_dihedral_row made = {0};
        status = read_terms(r, frame, loop, row, LIMITS, &given);
        for (int k = 0; status == TML_OK && k < 4; k++) status = read_named(r, loop, row, &of[k], &made.atoms[k]);
        if (status != TML_OK) break;
        made.list = given.list;
        made.id = given.id;
        made.combination = given.combination;
        made.lower = given.lower;
        made.upper = given.upper;
        made.weight = given.weight;
        made.beside = given.beside;
        made.place = given.place;
        if (!tml_rows_add_dihedral(&r->in.draft->rows, &made)) status = tml_no_memory(r->in.error);
    }
    return status;
}

/* ---- trees ---- */

static tml_status tree_address(void *context, const tml_star_loop *loop, size_t row, tml_address *out) {
    reader *r = context;
    columns of;
    tml_status status = find_columns(r, loop, "", &of);
    return status == TML_OK ? read_named(r, loop, row, &of, out) : status;
}

static tml_status read_tree(reader *r, const tml_star_frame *frame) {
    tml_distance_tree tree = {.cells = &r->in, .frame = frame, .address = tree_address, .context = r};
    bool nodes, members, values;
    tml_status status = tml_star_find_table(r->star, frame, "_Dist_constraint_tree", &tree.nodes, &nodes, r->in.error);
    if (status == TML_OK) status = tml_star_find_table(r->star, frame, "_Dist_constraint", &tree.members, &members, r->in.error);
    if (status == TML_OK) status = tml_star_find_table(r->star, frame, "_Dist_constraint_value", &tree.values, &values, r->in.error);
    return status == TML_OK && nodes && members && values ? tml_distance_tree_read(&tree) : status;
}

/* ---- other lists ---- */

static bool is_known(const tml_star *star, const tml_star_loop *loop) {
    static const char *const KNOWN[] = {"_Gen_dist_constraint", "_Torsion_angle_constraint", "_Dist_constraint", "_Dist_constraint_tree",
                                        "_Dist_constraint_value"};
    for (size_t k = 0; k < sizeof KNOWN / sizeof *KNOWN; k++)
        if (tml_loop_is(star, loop, KNOWN[k])) return true;
    return false;
}

/* Lists of data that are passed over are named; a list's housekeeping (software, comments as deposited) is not. */
static tml_status note_leftovers(reader *r) {
    static const struct { const char *category, *name; } OTHER[] = {
        {"_Atom_chem_shift", "chemical shifts"}, {"_RDC_constraint", "residual dipolar couplings"}, {"_RDC", "residual dipolar couplings"},
        {"_Peak", "peaks"},                      {"_Spectral_transition", "peaks"},                 {"_Entity_deleted_atom", "deleted atoms"},
        {"_Gen_dist_constraint_conv_err", "restraints that the archive could not match with atoms"},
        {"_Gen_dist_constraint_parse_err", "restraints that the archive could not read"},
    };
    tml_problem *problem = r->in.draft->problem;
    tml_status status = TML_OK;
    for (size_t i = 0; status == TML_OK && i < r->star->loop_count; i++) {
        const tml_star_loop *loop = &r->star->loops[i];
        const tml_star_value *tag = &r->star->tags[loop->first_tag];
        const char *dot = memchr(tag->text, '.', (size_t)tag->length), *name = NULL;
        int shown = dot == NULL ? tag->length : (int)(dot - tag->text);
        static const char ENDING[] = "_constraint";
        int ending = (int)sizeof ENDING - 1;
        if (loop->row_count == 0 || is_known(r->star, loop)) continue;
        for (size_t k = 0; k < sizeof OTHER / sizeof *OTHER && name == NULL; k++)
            if (tml_loop_is(r->star, loop, OTHER[k].category)) name = OTHER[k].name;
        if (name != NULL)
            status = tml_problem_add_note(problem, tml_cell_place(&r->in, tag), r->in.error, "%zu %s are not used", loop->row_count, name);
        else if (shown > ending && strncasecmp(tag->text + shown - ending, ENDING, (size_t)ending) == 0)
            status = tml_problem_add_note(problem, tml_cell_place(&r->in, tag), r->in.error, "%zu rows of %.*s are not used",
                                          loop->row_count, shown > 60 ? 60 : shown, tag->text);
    }
    if (status == TML_OK && r->shifted > 0)
        status = tml_problem_add_note(problem, r->shifted_place, r->in.error,
                                      "%zu atoms have another residue index than the author's number (%+ld at the last), and the sequence "
                                      "does not say so: were they matched with the right residues?",
                                      r->shifted, r->shift);
    if (status == TML_OK && r->by_author > 0)
        status = tml_problem_add_note(problem, r->author_place, r->in.error,
                                      "%zu atoms are given by the author's residue numbers alone; these are matched with the sequence",
                                      r->by_author);
    return status;
}

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "output/convert.h"
#include "output/output.h"
#include "restraint/names.h"

/* Contents: the file - chains - addresses - restraints. Tags: the NMR-STAR dictionary of the Biological Magnetic Resonance Data Bank,
 * version 3.1 (Ulrich et al., J. Biomol. NMR 73 (2019) 5), from memory. */

typedef struct writer {
    tml_conversion *c;
    tml_file *file;
    const tml_outline *outline;
    const tml_molecule *molecule;
    int32_t *first;       /* of each chain: its first residue in the outline; chain_count + 1 */
    bool *renumbered;     /* of each chain: some number is no plain one */
    int32_t chain_count;
    int32_t *atoms[2];    /* room for a residue's atoms */
    int32_t counts[2];
} writer;

static bool open_writer(writer *w);
static void write_assembly(writer *w);
static void write_entities(writer *w);
static void write_distances(writer *w);
static void write_dihedrals(writer *w);

tml_status tml_write_nmrstar(tml_conversion *c, tml_error *error) {
    const tml_outline *outline = &c->draft->outline;
    writer w = {.c = c, .file = c->file, .outline = outline, .molecule = &c->draft->problem->molecule};
    bool room = open_writer(&w);
    if (room) {
        tml_file_print(c->file, "data_trammel\n\n");
        write_assembly(&w);
        write_entities(&w);
        write_distances(&w);
        write_dihedrals(&w);
    }
    c->lost[TML_LOSS_ATOMS] += (int32_t)outline->atom_count;
    c->lost[TML_LOSS_SHAPES] += (int32_t)(outline->chiral_count + outline->plane_count);
    c->lost[TML_LOSS_ALIKE] += (int32_t)outline->alike_count;
    for (size_t i = 0; i < outline->ends_count; i++) c->lost[TML_LOSS_ENDS] += outline->ends[i].ends != TML_ENDS_CHARGED;
    for (size_t i = 0; i < outline->component_count; i++) c->lost[TML_LOSS_COMPONENTS] += outline->components[i]->made;
    free(w.first);
    free(w.renumbered);
    free(w.atoms[0]);
    free(w.atoms[1]);
    return room ? TML_OK : tml_no_memory(error);
}

static void loop(tml_file *file, const char *category, const char *const *tags) {
    tml_file_print(file, "\n   loop_\n");
    for (; *tags != NULL; tags++) tml_file_print(file, "      _%s.%s\n", category, *tags);
    tml_file_print(file, "\n");
}

/* ---- chains ---- */

static bool is_plain(const char *number) {
    char *end;
    strtol(number, &end, 10);
    return *number != '\0' && *end == '\0';
}

static bool open_writer(writer *w) {
    const tml_outline *outline = w->outline;
    int32_t most = 1;
    w->first = tml_alloc(outline->residue_count + 1, sizeof *w->first);
    w->renumbered = tml_alloc(outline->residue_count + 1, sizeof *w->renumbered);
    for (int32_t r = 0; r < w->molecule->residue_count; r++)
        if (w->molecule->residues[r].atom_count > most) most = w->molecule->residues[r].atom_count;
    for (int k = 0; k < 2; k++) w->atoms[k] = tml_alloc((size_t)most, sizeof *w->atoms[k]);
    if (w->first == NULL || w->renumbered == NULL || w->atoms[0] == NULL || w->atoms[1] == NULL) return false;
    for (size_t i = 0; i < outline->residue_count; i++) {
        if (i == 0 || outline->residues[i].chain != outline->residues[i - 1].chain) w->first[w->chain_count++] = (int32_t)i;
        if (is_plain(outline->residues[i].number)) continue;
        w->c->lost[TML_LOSS_NUMBERS]++;
        w->renumbered[w->chain_count - 1] = true;
    }
    w->first[w->chain_count] = (int32_t)outline->residue_count;
    return true;
}

/* The stretch of the outline that an address lies in, -1; and its residue there. */
static int32_t chain_of(const writer *w, const tml_address *at, int32_t *residue) {
    for (int32_t c = 0; c < w->chain_count; c++) {
        if (w->outline->residues[w->first[c]].chain != at->chain) continue;
        for (int32_t i = w->first[c]; i < w->first[c + 1]; i++)
            if (w->outline->residues[i].number == at->number) {
                *residue = i;
                return c;
            }
    }
    return -1;
}

static void put_index(const writer *w, int32_t chain, int32_t residue) {
    if (w->renumbered[chain])
        tml_file_print(w->file, "%d ", residue - w->first[chain] + 1);
    else
        tml_file_print(w->file, "%s ", w->outline->residues[residue].number);
}

static void write_assembly(writer *w) {
    static const char *const LINKING[] = {".", "start", "middle", "end", "single", "break", "cyclic"};
    tml_file *file = w->file;
    tml_file_print(file, "save_assembly\n   _Assembly.Sf_category   assembly\n   _Assembly.Sf_framecode  assembly\n   _Assembly.ID            1\n"
                         "   _Assembly.Name          ");
    tml_put_star(file, w->c->draft->problem->title);
    tml_file_print(file, "\n");
    if (w->chain_count > 0) {
        loop(file, "Entity_assembly",
             (const char *const[]){"ID", "Entity_assembly_name", "Entity_ID", "Entity_label", "Asym_ID", "PDB_chain_ID", "Assembly_ID", NULL});
        for (int32_t c = 0; c < w->chain_count; c++) {
            tml_file_print(file, "      %d . %d $entity_%d ", c + 1, c + 1, c + 1);
            for (int k = 0; k < 2; k++) tml_put_star(file, w->outline->residues[w->first[c]].chain);
            tml_file_print(file, "1\n");
        }
        tml_file_print(file, "   stop_\n");
        loop(file, "Chem_comp_assembly",
             (const char *const[]){"Entity_assembly_ID", "Entity_ID", "Comp_index_ID", "Comp_ID", "Auth_asym_ID", "Auth_seq_ID", "Auth_comp_ID",
                                   "Auth_variant_ID", "Sequence_linking", "Cis_residue", "Assembly_ID", NULL});
        for (int32_t c = 0; c < w->chain_count; c++)
            for (int32_t i = w->first[c]; i < w->first[c + 1]; i++) {
                const tml_outline_residue *residue = &w->outline->residues[i];
                tml_file_print(file, "      %d %d ", c + 1, c + 1);
                put_index(w, c, i);
                tml_put_star(file, residue->name);
                tml_put_star(file, residue->chain);
                tml_put_star(file, residue->number);
                tml_put_star(file, residue->name);
                tml_put_star(file, residue->variant);
                tml_file_print(file, "%s %s 1\n", LINKING[residue->linking], residue->cis ? "yes" : residue->trans ? "no" : ".");
            }
        tml_file_print(file, "   stop_\n");
    }
    if (w->outline->link_count > 0) {
        loop(file, "Bond",
             (const char *const[]){"ID", "Type", "Value_order", "Entity_assembly_ID_1", "Comp_index_ID_1", "Comp_ID_1", "Atom_ID_1",
                                   "Entity_assembly_ID_2", "Comp_index_ID_2", "Comp_ID_2", "Atom_ID_2", "Assembly_ID", NULL});
        int32_t id = 0;
        for (size_t i = 0; i < w->outline->link_count; i++) {
            const tml_address *ends[2] = {&w->outline->links[i].a, &w->outline->links[i].b};
            int32_t chains[2], residues[2];
            for (int k = 0; k < 2; k++) chains[k] = chain_of(w, ends[k], &residues[k]);
            if (chains[0] < 0 || chains[1] < 0) {
                w->c->lost[TML_LOSS_LINKS]++;
                continue;
            }
            tml_file_print(file, "      %d covalent SING ", ++id);
            for (int k = 0; k < 2; k++) {
                tml_file_print(file, "%d ", chains[k] + 1);
                put_index(w, chains[k], residues[k]);
                tml_put_star(file, w->outline->residues[residues[k]].name);
                tml_put_star(file, ends[k]->atom);
            }
            tml_file_print(file, "1\n");
        }
        tml_file_print(file, "   stop_\n");
    }
    tml_file_print(file, "save_\n");
}

static void write_entities(writer *w) {
    tml_file *file = w->file;
    for (int32_t c = 0; c < w->chain_count; c++) {
        bool single = w->first[c + 1] - w->first[c] == 1;
        tml_file_print(file, "\nsave_entity_%d\n   _Entity.Sf_category   entity\n   _Entity.Sf_framecode  entity_%d\n   _Entity.ID            %d\n"
                             "   _Entity.Type          %s\n",
                       c + 1, c + 1, c + 1, single ? "non-polymer" : "polymer");
        loop(file, "Entity_comp_index", (const char *const[]){"ID", "Auth_seq_ID", "Comp_ID", "Entity_ID", NULL});
        for (int32_t i = w->first[c]; i < w->first[c + 1]; i++) {
            tml_file_print(file, "      ");
            put_index(w, c, i);
            tml_put_star(file, w->outline->residues[i].number);
            tml_put_star(file, w->outline->residues[i].name);
            tml_file_print(file, "%d\n", c + 1);
        }
        tml_file_print(file, "   stop_\nsave_\n");
    }
}

/* ---- addresses ---- */

/* The atoms that a name means, into w->atoms[side]; where it means none it is written as it is, and the count is 0. */
static void spell_out(writer *w, int side, const tml_address *at) {
    int32_t residue = tml_molecule_find_residue(w->molecule, at->chain, at->number);
    tml_name_kind kind;
    w->counts[side] = residue < 0 ? 0 : tml_names_match(w->molecule, residue, at->atom, w->atoms[side], &kind);
    if (w->counts[side] == 0) return;
    w->c->lost[TML_LOSS_NAMES] += w->counts[side] > 1 && kind != TML_NAME_PSEUDO;
    w->c->lost[TML_LOSS_STEREO] += w->counts[side] > 1 && kind == TML_NAME_WILD && strpbrk(at->atom, "xy") != NULL;
    if (kind == TML_NAME_PSEUDO) w->counts[side] = 0; /* pseudo-atoms are names in this format */
}

static void put_atom(writer *w, const tml_address *at, int side, int32_t k) {
    int32_t residue = -1, chain = chain_of(w, at, &residue);
    if (chain >= 0) {
        tml_file_print(w->file, "%d ", chain + 1);
        put_index(w, chain, residue);
        tml_put_star(w->file, w->outline->residues[residue].name);
    } else {
        tml_file_print(w->file, ". ");
        tml_put_star(w->file, at->number);
        tml_put_star(w->file, at->residue);
    }
    tml_put_star(w->file, side >= 0 && w->counts[side] > 0 ? w->molecule->atoms[w->atoms[side][k]].name : at->atom);
    tml_put_star(w->file, at->chain);
    tml_put_star(w->file, at->number);
    tml_put_star(w->file, at->atom);
}

/* ---- restraints ---- */

static void open_frame(tml_file *file, const char *category, const char *type, const char *list, int number, const tml_row_beside *beside) {
    char name[512];
    snprintf(name, sizeof name, "%.500s", list);
    for (char *p = name; *p != '\0'; p++)
        if ((unsigned char)*p <= ' ' || *p == '\'' || *p == '"' || *p == '#' || *p == '$') *p = '_';
    tml_file_print(file, "\nsave_%s\n   _%s.Sf_category      %s\n   _%s.Sf_framecode     %s\n   _%s.ID               %d\n", name, category, type,
                   category, name, category, number);
    const char *const said[][2] = {{"Constraint_type", beside->origin}, {"Potential_type", beside->potential}};
    for (int k = 0; k < 2; k++) {
        if (said[k][1] == NULL) continue;
        tml_file_print(file, "   _%s.%s ", category, said[k][0]);
        tml_put_star(file, said[k][1]);
        tml_file_print(file, "\n");
    }
}

/* How many rows one row of a restraint makes: pairs of single atoms, but for an atom with itself. */
static int32_t rows_of(writer *w, const tml_distance_row *row) {
    const tml_address *addresses = w->c->draft->rows.addresses;
    int32_t made = 0;
    for (int32_t p = 0; p < row->count_a; p++)
        for (int32_t q = 0; q < row->count_b; q++) {
            spell_out(w, 0, &addresses[row->first_a + p]);
            spell_out(w, 1, &addresses[row->first_b + q]);
            made += (w->counts[0] > 0 ? w->counts[0] : 1) * (w->counts[1] > 0 ? w->counts[1] : 1);
        }
    return made;
}

static void write_row(writer *w, const tml_distance_row *row, const char *id, bool several, int list, int *member) {
    const tml_address *addresses = w->c->draft->rows.addresses;
    for (int32_t p = 0; p < row->count_a; p++)
        for (int32_t q = 0; q < row->count_b; q++) {
            const tml_address *a = &addresses[row->first_a + p], *b = &addresses[row->first_b + q];
            spell_out(w, 0, a);
            spell_out(w, 1, b);
            for (int32_t i = 0; i == 0 || i < w->counts[0]; i++)
                for (int32_t j = 0; j == 0 || j < w->counts[1]; j++) {
                    if (w->counts[0] > 0 && w->counts[1] > 0 && w->atoms[0][i] == w->atoms[1][j]) continue;
                    tml_file_print(w->file, "      ");
                    tml_put_star(w->file, id);
                    tml_put_star(w->file, row->combination);
                    tml_file_print(w->file, "%d %s ", ++*member, several ? "OR" : ".");
                    put_atom(w, a, 0, i);
                    put_atom(w, b, 1, j);
                    tml_put_star_number(w->file, row->beside.values ? row->beside.target : NAN);
                    tml_put_star_number(w->file, row->lower);
                    tml_put_star_number(w->file, row->upper);
                    tml_put_star_number(w->file, row->weight);
                    tml_file_print(w->file, "%d\n", list);
                }
        }
}

/* Targets have a column; their uncertainty and linear limits have none. */
static bool loses(const tml_row_beside *beside) {
    return beside->values && !(isnan(beside->uncertainty) && isnan(beside->lower_linear) && isnan(beside->upper_linear));
}

static void write_distances(writer *w) {
    const tml_rows *rows = &w->c->draft->rows;
    int32_t lost[TML_LOSS_COUNT];
    int number = 0;
    for (size_t first = 0, count; first < rows->distance_count; first += count) {
        count = tml_rows_in_list(w->c->lists, first, rows->distance_count);
        open_frame(w->file, "Gen_dist_constraint_list", "general_distance_constraints", w->c->lists[first], ++number, &rows->distances[first].beside);
        loop(w->file, "Gen_dist_constraint",
             (const char *const[]){"ID", "Combination_ID", "Member_ID", "Member_logic_code", "Entity_assembly_ID_1", "Comp_index_ID_1",
                                   "Comp_ID_1", "Atom_ID_1", "Auth_asym_ID_1", "Auth_seq_ID_1", "Auth_atom_ID_1", "Entity_assembly_ID_2",
                                   "Comp_index_ID_2", "Comp_ID_2", "Atom_ID_2", "Auth_asym_ID_2", "Auth_seq_ID_2", "Auth_atom_ID_2",
                                   "Distance_val", "Distance_lower_bound_val", "Distance_upper_bound_val", "Weight", "Gen_dist_constraint_list_ID", NULL});
        int member = 0;
        for (size_t i = first; i < first + count; i++) {
            const tml_distance_row *row = &rows->distances[i];
            char text[64];
            bool after = i > first && !row->alone && rows->distances[i - 1].id == row->id, before = i + 1 < first + count && !row->alone && row[1].id == row->id;
            memcpy(lost, w->c->lost, sizeof lost);
            bool several = after || before || rows_of(w, row) > 1;
            memcpy(w->c->lost, lost, sizeof lost); /* counted once, when written */
            if (!after) member = 0;
            w->c->lost[TML_LOSS_AVERAGE] += row->average;
            w->c->lost[TML_LOSS_BESIDE] += loses(&row->beside);
            write_row(w, row, tml_row_id(row->id, row->alone, i, text, sizeof text), several, number, &member);
        }
        tml_file_print(w->file, "   stop_\nsave_\n");
    }
}

static void write_dihedrals(writer *w) {
    const tml_rows *rows = &w->c->draft->rows;
    const char *const *lists = w->c->lists + rows->distance_count;
    int number = 0;
    for (size_t first = 0, count; first < rows->dihedral_count; first += count) {
        count = tml_rows_in_list(lists, first, rows->dihedral_count);
        open_frame(w->file, "Torsion_angle_constraint_list", "torsion_angle_constraints", lists[first], ++number, &rows->dihedrals[first].beside);
        tml_file_print(w->file, "\n   loop_\n      _Torsion_angle_constraint.ID\n      _Torsion_angle_constraint.Combination_ID\n      _Torsion_angle_constraint.Torsion_angle_name\n");
        for (int k = 1; k <= 4; k++) {
            static const char *const TAGS[] = {"Entity_assembly_ID", "Comp_index_ID", "Comp_ID", "Atom_ID", "Auth_asym_ID", "Auth_seq_ID", "Auth_atom_ID"};
            for (size_t t = 0; t < sizeof TAGS / sizeof *TAGS; t++) tml_file_print(w->file, "      _Torsion_angle_constraint.%s_%d\n", TAGS[t], k);
        }
        tml_file_print(w->file, "      _Torsion_angle_constraint.Angle_target_val\n      _Torsion_angle_constraint.Angle_lower_bound_val\n      _Torsion_angle_constraint.Angle_upper_bound_val\n"
                                "      _Torsion_angle_constraint.Weight\n      _Torsion_angle_constraint.Torsion_angle_constraint_list_ID\n\n");
        for (size_t i = first; i < first + count; i++) {
            const tml_dihedral_row *row = &rows->dihedrals[i];
            char text[64];
            tml_file_print(w->file, "      ");
            tml_put_star(w->file, tml_row_id(row->id, row->alone, i, text, sizeof text));
            tml_put_star(w->file, row->combination);
            tml_put_star(w->file, row->beside.angle == NULL ? "" : row->beside.angle);
            for (int k = 0; k < 4; k++) put_atom(w, &row->atoms[k], -1, 0);
            w->c->lost[TML_LOSS_BESIDE] += loses(&row->beside);
            tml_put_star_number(w->file, row->beside.values ? row->beside.target : NAN);
            tml_put_star_number(w->file, row->lower);
            tml_put_star_number(w->file, row->upper);
            tml_put_star_number(w->file, row->weight);
            tml_file_print(w->file, "%d\n", number);
        }
        tml_file_print(w->file, "   stop_\nsave_\n");
    }
}

#include <math.h>
#include <string.h>

#include "output/convert.h"
#include "output/output.h"

/* Contents: the file - the molecule - restraints. Tags: NEF 1.1 (Gutmanas et al., Nature Struct. Mol. Biol. 22 (2015) 433). */

static void write_molecule(tml_conversion *c);
static void write_distances(tml_conversion *c);
static void write_dihedrals(tml_conversion *c);

void tml_write_nef(tml_conversion *c) {
    const tml_outline *outline = &c->draft->outline;
    tml_file_print(c->file, "data_trammel\n\nsave_nef_nmr_meta_data\n"
                            "   _nef_nmr_meta_data.sf_category     nef_nmr_meta_data\n"
                            "   _nef_nmr_meta_data.sf_framecode    nef_nmr_meta_data\n"
                            "   _nef_nmr_meta_data.format_name     nmr_exchange_format\n"
                            "   _nef_nmr_meta_data.format_version  1.1\n"
                            "   _nef_nmr_meta_data.program_name    Trammel\n"
                            "   _nef_nmr_meta_data.program_version %s\n"
                            "   _nef_nmr_meta_data.creation_date   .\n"
                            "   _nef_nmr_meta_data.uuid            .\nsave_\n\n",
                   TML_VERSION);
    c->lost[TML_LOSS_ATOMS] += (int32_t)outline->atom_count;
    c->lost[TML_LOSS_SHAPES] += (int32_t)(outline->chiral_count + outline->plane_count);
    c->lost[TML_LOSS_ALIKE] += (int32_t)outline->alike_count;
    for (size_t i = 0; i < outline->component_count; i++) c->lost[TML_LOSS_COMPONENTS] += outline->components[i]->made;
    write_molecule(c);
    write_distances(c);
    write_dihedrals(c);
}

static void loop(tml_file *file, const char *category, const char *const *tags) {
    tml_file_print(file, "\n   loop_\n");
    for (; *tags != NULL; tags++) tml_file_print(file, "      _%s.%s\n", category, *tags);
    tml_file_print(file, "\n");
}

static void end_loop(tml_file *file) {
    tml_file_print(file, "   stop_\n");
}

static void put_atom(tml_file *file, const tml_address *at) {
    tml_put_star(file, *at->chain == '\0' ? "." : at->chain);
    tml_put_star(file, *at->number == '\0' ? "." : at->number);
    tml_put_star(file, at->residue);
    tml_put_star(file, at->atom);
}

/* The name of the residue that an address means, where the input gave none. */
static tml_address with_residue(const tml_conversion *c, const tml_address *at) {
    tml_address whole = *at;
    const tml_molecule *molecule = &c->draft->problem->molecule;
    int32_t residue = *at->residue == '\0' ? tml_molecule_find_residue(molecule, at->chain, at->number) : -1;
    if (residue >= 0) whole.residue = molecule->residues[residue].name;
    return whole;
}

/* ---- the molecule ---- */

static tml_ends ends_of(const tml_outline *outline, const char *chain) {
    tml_ends ends = TML_ENDS_CHARGED;
    for (size_t i = 0; i < outline->ends_count; i++)
        if (outline->ends[i].chain == chain) ends = outline->ends[i].ends;
    return ends;
}

/* Linking in NEF's words. Ends without end groups are breaks. */
static const char *linking_word(const tml_outline *outline, size_t i) {
    const tml_outline_residue *residue = &outline->residues[i];
    static const char *const WORDS[] = {"", "start", "middle", "end", "single", "break", "cyclic"};
    bool first = i == 0 || residue[-1].chain != residue->chain, last = i + 1 == outline->residue_count || residue[1].chain != residue->chain;
    if (residue->linking != TML_LINKING_DEFAULT) return WORDS[residue->linking];
    if ((first || last) && ends_of(outline, residue->chain) == TML_ENDS_OPEN) return "break";
    return first && last ? "single" : first ? "start" : last ? "end" : "middle";
}

/* A variant that also says that an end is neutral; ends are charged where nothing is said. */
static void put_variant(tml_conversion *c, size_t i) {
    const tml_outline *outline = &c->draft->outline;
    const tml_outline_residue *residue = &outline->residues[i];
    bool first = i == 0 || residue[-1].chain != residue->chain, last = i + 1 == outline->residue_count || residue[1].chain != residue->chain;
    bool neutral = residue->linking == TML_LINKING_DEFAULT && ends_of(outline, residue->chain) == TML_ENDS_NEUTRAL;
    char text[512];
    snprintf(text, sizeof text, "%s%s%s%s", neutral && first ? "-H3" : "", neutral && first && last ? "," : "", neutral && last ? "+HXT" : "",
             neutral && (first || last) && *residue->variant != '\0' ? "," : "");
    size_t used = strlen(text);
    snprintf(text + used, sizeof text - used, "%s", residue->variant);
    tml_put_star(c->file, text);
}

static bool in_sequence(const tml_outline *outline, const tml_address *at) {
    for (size_t i = 0; i < outline->residue_count; i++)
        if (outline->residues[i].chain == at->chain && outline->residues[i].number == at->number) return true;
    return false;
}

static void write_molecule(tml_conversion *c) {
    const tml_outline *outline = &c->draft->outline;
    tml_file *file = c->file;
    size_t links = 0;
    tml_file_print(file, "save_nef_molecular_system\n"
                         "   _nef_molecular_system.sf_category   nef_molecular_system\n"
                         "   _nef_molecular_system.sf_framecode  nef_molecular_system\n");
    if (outline->residue_count > 0) {
        loop(file, "nef_sequence",
             (const char *const[]){"index", "chain_code", "sequence_code", "residue_name", "linking", "residue_variant", "cis_peptide", NULL});
        for (size_t i = 0; i < outline->residue_count; i++) {
            const tml_outline_residue *residue = &outline->residues[i];
            tml_file_print(file, "      %zu ", i + 1);
            tml_put_star(file, residue->chain);
            tml_put_star(file, residue->number);
            tml_put_star(file, residue->name);
            tml_put_star(file, linking_word(outline, i));
            put_variant(c, i);
            tml_file_print(file, "%s\n", residue->cis ? "true" : residue->trans ? "false" : ".");
        }
        end_loop(file);
    }
    for (size_t i = 0; i < outline->link_count; i++)
        links += in_sequence(outline, &outline->links[i].a) && in_sequence(outline, &outline->links[i].b);
    c->lost[TML_LOSS_LINKS] += (int32_t)(outline->link_count - links);
    if (links > 0) {
        loop(file, "nef_covalent_links",
             (const char *const[]){"chain_code_1", "sequence_code_1", "residue_name_1", "atom_name_1", "chain_code_2", "sequence_code_2",
                                   "residue_name_2", "atom_name_2", NULL});
        for (size_t i = 0; i < outline->link_count; i++) {
            if (!in_sequence(outline, &outline->links[i].a) || !in_sequence(outline, &outline->links[i].b)) continue;
            tml_address a = with_residue(c, &outline->links[i].a), b = with_residue(c, &outline->links[i].b);
            tml_file_print(file, "      ");
            put_atom(file, &a);
            put_atom(file, &b);
            tml_file_print(file, "\n");
        }
        end_loop(file);
    }
    tml_file_print(file, "save_\n");
}

/* ---- restraints ---- */

/* A frame's name begins with its category; what is not made of plain signs becomes an underscore. */
static void open_frame(tml_file *file, const char *category, const char *list, const tml_row_beside *beside) {
    char name[600];
    size_t length = strlen(category);
    bool has = strncmp(list, category, length) == 0;
    snprintf(name, sizeof name, "%s%s%.500s", has ? "" : category, has ? "" : "_", list);
    for (char *p = name; *p != '\0'; p++)
        if ((unsigned char)*p <= ' ' || *p == '\'' || *p == '"' || *p == '#' || *p == '$') *p = '_';
    tml_file_print(file, "\nsave_%s\n   _%s.sf_category     %s\n   _%s.sf_framecode    %s\n   _%s.potential_type  ", name, category,
                   category, category, name, category);
    tml_put_star(file, beside->potential == NULL ? "undefined" : beside->potential);
    tml_file_print(file, "\n");
    if (beside->origin == NULL) return;
    tml_file_print(file, "   _%s.restraint_origin ", category);
    tml_put_star(file, beside->origin);
    tml_file_print(file, "\n");
}

static void write_distances(tml_conversion *c) {
    const tml_rows *rows = &c->draft->rows;
    for (size_t first = 0, count; first < rows->distance_count; first += count) {
        size_t index = 0;
        count = tml_rows_in_list(c->lists, first, rows->distance_count);
        open_frame(c->file, "nef_distance_restraint_list", c->lists[first], &rows->distances[first].beside);
        loop(c->file, "nef_distance_restraint",
             (const char *const[]){"index", "restraint_id", "restraint_combination_id", "chain_code_1", "sequence_code_1", "residue_name_1",
                                   "atom_name_1", "chain_code_2", "sequence_code_2", "residue_name_2", "atom_name_2", "weight", "target_value",
                                   "target_value_uncertainty", "lower_linear_limit", "upper_linear_limit", "lower_limit", "upper_limit", NULL});
        for (size_t i = first; i < first + count; i++) {
            const tml_distance_row *row = &rows->distances[i];
            char text[64];
            c->lost[TML_LOSS_AVERAGE] += row->average;
            for (int32_t p = 0; p < row->count_a; p++)
                for (int32_t q = 0; q < row->count_b; q++) {
                    tml_address a = with_residue(c, &rows->addresses[row->first_a + p]), b = with_residue(c, &rows->addresses[row->first_b + q]);
                    tml_file_print(c->file, "      %zu ", ++index);
                    tml_put_star(c->file, tml_row_id(row->id, row->alone, i, text, sizeof text));
                    tml_put_star(c->file, row->combination);
                    put_atom(c->file, &a);
                    put_atom(c->file, &b);
                    tml_put_star_number(c->file, row->weight);
                    tml_put_beside(c->file, &row->beside);
                    tml_put_star_number(c->file, row->lower);
                    tml_put_star_number(c->file, row->upper);
                    tml_file_print(c->file, "\n");
                }
        }
        end_loop(c->file);
        tml_file_print(c->file, "save_\n");
    }
}

static void write_dihedrals(tml_conversion *c) {
    const tml_rows *rows = &c->draft->rows;
    const char *const *lists = c->lists + rows->distance_count;
    for (size_t first = 0, count; first < rows->dihedral_count; first += count) {
        count = tml_rows_in_list(lists, first, rows->dihedral_count);
        open_frame(c->file, "nef_dihedral_restraint_list", lists[first], &rows->dihedrals[first].beside);
        loop(c->file, "nef_dihedral_restraint",
             (const char *const[]){"index", "restraint_id", "restraint_combination_id", "chain_code_1", "sequence_code_1", "residue_name_1",
                                   "atom_name_1", "chain_code_2", "sequence_code_2", "residue_name_2", "atom_name_2", "chain_code_3",
                                   "sequence_code_3", "residue_name_3", "atom_name_3", "chain_code_4", "sequence_code_4", "residue_name_4",
                                   "atom_name_4", "weight", "target_value", "target_value_uncertainty", "lower_linear_limit", "upper_linear_limit",
                                   "lower_limit", "upper_limit", "name", NULL});
        for (size_t i = first; i < first + count; i++) {
            const tml_dihedral_row *row = &rows->dihedrals[i];
            char text[64];
            tml_file_print(c->file, "      %zu ", i - first + 1);
            tml_put_star(c->file, tml_row_id(row->id, row->alone, i, text, sizeof text));
            tml_put_star(c->file, row->combination);
            for (int k = 0; k < 4; k++) {
                tml_address at = with_residue(c, &row->atoms[k]);
                put_atom(c->file, &at);
            }
            tml_put_star_number(c->file, row->weight);
            tml_put_beside(c->file, &row->beside);
            tml_put_star_number(c->file, row->lower);
            tml_put_star_number(c->file, row->upper);
            tml_put_star(c->file, row->beside.angle == NULL ? "" : row->beside.angle);
            tml_file_print(c->file, "\n");
        }
        end_loop(c->file);
        tml_file_print(c->file, "save_\n");
    }
}

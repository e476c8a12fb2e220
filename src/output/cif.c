/* cif.c: models as PDBx/mmCIF.
 *
 * Sources: CIF 1.1 syntax (International Tables for Crystallography G, 2.2); PDBx/mmCIF dictionary of the wwPDB, version 5.
 */
#include <ctype.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "molecule/elements.h"
#include "output/models.h"
#include "output/words.h"

/* Contents: values - the writer - what the molecule consists of - provenance - links - coordinates */

/* A strand: what one label_asym_id stands for, a polymer or a single residue beside it. */
typedef struct strand {
    int32_t first, count; /* into `members` */
    int32_t entity;       /* 0-based */
    bool polymer;
    char code[16];
} strand;

typedef struct writer {
    tml_file *file;
    const tml_ensemble *ensemble;
    const tml_molecule *molecule;
    const tml_contradictions *found;
    const bool *is_peptide;
    const char *bare_chain;
    strand *strands;    int32_t strand_count;
    int32_t *members;                          /* residues, strand by strand */
    int32_t *strand_of, *position;             /* of each residue; position from 1 */
    int32_t *entity_strand; int32_t entity_count; /* the first strand of each entity */
} writer;

static bool take_stock(writer *w);
static bool write_components(const writer *w);
static void write_entities(const writer *w);
static void write_provenance(const writer *w);
static void write_links(const writer *w);
static void write_sites(const writer *w);

/* ---- values ---- */

static bool reserved(const char *text) {
    static const char *const WORDS[] = {"data_", "save_", "loop_", "stop_", "global_"};
    for (size_t i = 0; i < sizeof WORDS / sizeof WORDS[0]; i++) {
        size_t k = 0;
        while (WORDS[i][k] != '\0' && tolower((unsigned char)text[k]) == WORDS[i][k]) k++;
        if (WORDS[i][k] == '\0') return true;
    }
    return false;
}

/* Whether a quote followed by a blank, or at the end, occurs in it: such text cannot stand between these quotes. */
static bool holds_closing(const char *text, char quote) {
    for (; *text != '\0'; text++)
        if (*text == quote && (text[1] == ' ' || text[1] == '\0')) return true;
    return false;
}

/* A value as CIF writes it, with a blank after it; a text field where nothing else can hold it. Control characters and what is
 * not ASCII are replaced by '?': CIF 1.1 has no others. */
static void value(const writer *w, const char *given) {
    char brief[1024];
    tml_to_ascii(given, brief, sizeof brief);
    size_t length = strlen(brief);
    bool special = length == 0 || strchr("_#$'\"[];", brief[0]) != NULL || strchr(brief, ' ') != NULL || reserved(brief) ||
                   strcmp(brief, ".") == 0 || strcmp(brief, "?") == 0;
    if (!special)
        tml_file_print(w->file, "%s ", brief);
    else if (!holds_closing(brief, '\''))
        tml_file_print(w->file, "'%s' ", brief);
    else if (!holds_closing(brief, '"'))
        tml_file_print(w->file, "\"%s\" ", brief);
    else
        tml_file_print(w->file, "\n;%s\n;\n", brief);
}

static void end_row(const writer *w) {
    tml_file_print(w->file, "\n");
}

static void loop(const writer *w, const char *category, const char *const *names) {
    tml_file_print(w->file, "#\nloop_\n");
    for (; *names != NULL; names++) tml_file_print(w->file, "_%s.%s\n", category, *names);
}

/* ---- the writer ---- */

static void release(writer *w) {
    free(w->strands);
    free(w->members);
    free(w->strand_of);
    free(w->position);
    free(w->entity_strand);
}

tml_status tml_cif_write(tml_file *file, const tml_ensemble *ensemble, const tml_contradictions *found, const bool *is_peptide) {
    const tml_molecule *molecule = &ensemble->problem->molecule;
    writer w = {.file = file, .ensemble = ensemble, .molecule = molecule, .found = found, .is_peptide = is_peptide,
                .bare_chain = tml_bare_chain(molecule)};
    bool good = take_stock(&w);
    if (good) {
        tml_file_print(file, "data_trammel\n#\n_entry.id trammel\n");
        write_provenance(&w);
        good = write_components(&w);
        write_entities(&w);
        write_links(&w);
        write_sites(&w);
    }
    release(&w);
    return good ? TML_OK : TML_NO_MEMORY;
}

/* ---- what the molecule consists of ---- */

/* A, B … Z, AA, BA …: as the Protein Data Bank counts. */
static void strand_code(int32_t index, char *code) {
    enum { LETTERS = 26 };
    do {
        *code++ = (char)('A' + index % LETTERS);
        index = index / LETTERS - 1;
    } while (index >= 0);
    *code = '\0';
}

static bool same_entity(const writer *w, const strand *a, const strand *b) {
    if (a->polymer != b->polymer || a->count != b->count) return false;
    for (int32_t i = 0; i < a->count; i++) {
        const tml_residue *one = &w->molecule->residues[w->members[a->first + i]];
        const tml_residue *two = &w->molecule->residues[w->members[b->first + i]];
        if (strcmp(one->name, two->name) != 0) return false;
    }
    return true;
}

static void add_strand(writer *w, const tml_chain *chain, bool polymer, int32_t first_residue, int32_t *member) {
    strand *at = &w->strands[w->strand_count];
    *at = (strand){.first = *member, .polymer = polymer};
    strand_code(w->strand_count, at->code);
    int32_t last = polymer ? chain->first_residue + chain->residue_count : first_residue + 1;
    for (int32_t r = first_residue; r < last; r++) {
        if (polymer && w->molecule->residues[r].polymer == TML_POLYMER_NONE) continue;
        w->strand_of[r] = w->strand_count;
        w->position[r] = ++at->count;
        w->members[(*member)++] = r;
    }
    at->entity = -1;
    for (int32_t e = 0; e < w->entity_count && at->entity < 0; e++)
        if (same_entity(w, &w->strands[w->entity_strand[e]], at)) at->entity = e;
    if (at->entity < 0) {
        at->entity = w->entity_count;
        w->entity_strand[w->entity_count++] = w->strand_count;
    }
    w->strand_count++;
}

/* Strands and entities: a chain's amino acids are one polymer, every other residue stands by itself. */
static bool take_stock(writer *w) {
    const tml_molecule *molecule = w->molecule;
    size_t most = (size_t)molecule->residue_count;
    w->strands = tml_alloc(most, sizeof *w->strands);
    w->members = tml_alloc(most, sizeof *w->members);
    w->strand_of = tml_alloc(most, sizeof *w->strand_of);
    w->position = tml_alloc(most, sizeof *w->position);
    w->entity_strand = tml_alloc(most, sizeof *w->entity_strand);
    if (w->strands == NULL || w->members == NULL || w->strand_of == NULL || w->position == NULL || w->entity_strand == NULL)
        return false;
    int32_t member = 0;
    for (int32_t c = 0; c < molecule->chain_count; c++) {
        const tml_chain *chain = &molecule->chains[c];
        bool polymer_seen = false;
        for (int32_t r = chain->first_residue; r < chain->first_residue + chain->residue_count; r++) {
            bool in_polymer = molecule->residues[r].polymer != TML_POLYMER_NONE;
            if (!in_polymer || !polymer_seen) add_strand(w, chain, in_polymer, r, &member);
            polymer_seen = polymer_seen || in_polymer;
        }
    }
    return true;
}

/* Is one of a strand's residues not built in? */
static bool has_others(const writer *w, const strand *at) {
    for (int32_t i = 0; i < at->count; i++)
        if (!w->molecule->residues[w->members[at->first + i]].standard) return true;
    return false;
}

/* A nucleotide of DNA: by its dictionary, or by its built-in name. */
static bool is_dna(const tml_residue *residue) {
    return residue->type != NULL ? strstr(residue->type, "DNA") != NULL : residue->name[0] == 'D';
}

/* The dictionary's own type of component, where it is one that the archive has; otherwise by the kind of chain. */
static const char *component_type(const tml_residue *residue) {
    static const char *const WORDS[] = {"linking", "LINKING", "polymer", "POLYMER", "terminus", "TERMINUS", "saccharide", "SACCHARIDE"};
    for (size_t i = 0; residue->type != NULL && i < sizeof WORDS / sizeof *WORDS; i++)
        if (strstr(residue->type, WORDS[i]) != NULL) return residue->type;
    if (residue->polymer == TML_POLYMER_NONE) return "non-polymer";
    if (residue->polymer == TML_POLYMER_NUCLEIC) return is_dna(residue) ? "DNA linking" : "RNA linking";
    return !residue->standard || strcmp(residue->name, "GLY") == 0 ? "peptide linking" : "L-peptide linking";
}

/* Each name once. */
static bool write_components(const writer *w) {
    tml_index *seen = tml_index_new();
    bool room = seen != NULL;
    loop(w, "chem_comp", (const char *const[]){"id", "type", NULL});
    for (int32_t r = 0; room && r < w->molecule->residue_count; r++) {
        const char *name = tml_label_of(w->molecule, r, w->bare_chain).name;
        if (tml_index_find(seen, 0, name) >= 0) continue;
        room = tml_index_add(seen, 0, name, r);
        value(w, name);
        value(w, component_type(&w->molecule->residues[r]));
        end_row(w);
    }
    tml_index_free(seen);
    return room;
}

/* A polymer's type in the dictionary's words, by its first residue. */
static const char *polymer_type(const writer *w, const strand *at) {
    const tml_residue *first = &w->molecule->residues[w->members[at->first]];
    if (first->polymer != TML_POLYMER_NUCLEIC) return "polypeptide(L)";
    return is_dna(first) ? "polydeoxyribonucleotide" : "polyribonucleotide";
}

static void write_entities(const writer *w) {
    loop(w, "entity", (const char *const[]){"id", "type", "src_method", "pdbx_description", NULL});
    for (int32_t e = 0; e < w->entity_count; e++) {
        const strand *at = &w->strands[w->entity_strand[e]];
        tml_file_print(w->file, "%d %s man ", e + 1, at->polymer ? "polymer" : "non-polymer");
        if (at->polymer)
            tml_file_print(w->file, "? ");
        else
            value(w, tml_label_of(w->molecule, w->members[at->first], w->bare_chain).name);
        end_row(w);
    }
    bool polymers = false;
    for (int32_t s = 0; s < w->strand_count; s++) polymers = polymers || w->strands[s].polymer;
    if (polymers) {
        loop(w, "entity_poly", (const char *const[]){"entity_id", "type", "nstd_linkage", "nstd_monomer", NULL});
        for (int32_t e = 0; e < w->entity_count; e++)
            if (w->strands[w->entity_strand[e]].polymer)
                tml_file_print(w->file, "%d %s no %s\n", e + 1, polymer_type(w, &w->strands[w->entity_strand[e]]),
                               has_others(w, &w->strands[w->entity_strand[e]]) ? "yes" : "no");
        loop(w, "entity_poly_seq", (const char *const[]){"entity_id", "num", "mon_id", "hetero", NULL});
        for (int32_t e = 0; e < w->entity_count; e++) {
            const strand *at = &w->strands[w->entity_strand[e]];
            for (int32_t i = 0; at->polymer && i < at->count; i++)
                tml_file_print(w->file, "%d %d %s n\n", e + 1, i + 1, w->molecule->residues[w->members[at->first + i]].name);
        }
    }
    loop(w, "struct_asym", (const char *const[]){"id", "entity_id", "details", NULL});
    for (int32_t s = 0; s < w->strand_count; s++)
        tml_file_print(w->file, "%s %d ?\n", w->strands[s].code, w->strands[s].entity + 1);
}

/* ---- provenance ---- */

/* Text of any length within a text field, broken into lines; indented, as a line of it must not begin with ';'. */
static void plain_field(const writer *w, const char *text) {
    enum { WIDTH = 120 };
    char ascii[2048];
    tml_to_ascii(text, ascii, sizeof ascii);
    tml_file_paragraph(w->file, WIDTH, " ", "  ", "%s", ascii);
}

static void write_method(const writer *w) {
    char rule[512], text[1024];
    tml_say_selection(w->ensemble, rule, sizeof rule);
    snprintf(text, sizeof text, "Models: %s; best first. %s", rule, tml_words_passing);
    tml_file_print(w->file, "_pdbx_nmr_refine.details\n;\n");
    plain_field(w, text);
    plain_field(w, tml_words_warning);
    plain_field(w, "B_iso_or_equiv holds each atom's spread over the models: the r.m.s. distance from its mean position after "
                   "superposition on the well-defined part, in Å.");
    for (int32_t m = 0; m < w->ensemble->model_count; m++) {
        if (w->ensemble->models[m].passed) continue;
        snprintf(text, sizeof text, "Model %d did not pass: do not use it without looking at its violations.", m + 1);
        plain_field(w, text);
    }
    const tml_contradictions *found = w->found;
    for (size_t i = 0; found != NULL && i < found->count; i++) {
        snprintf(text, sizeof text, "Contradiction %zu: ", i + 1);
        size_t used = strlen(text);
        tml_say_conflict(w->ensemble->problem, &found->items[i], text + used, sizeof text - used);
        plain_field(w, text);
        for (size_t k = 0; k < found->items[i].step_count; k++) {
            snprintf(text, sizeof text, "  step %zu: ", k + 1);
            used = strlen(text);
            tml_say_step(w->ensemble->problem, &found->items[i].steps[k], text + used, sizeof text - used);
            plain_field(w, text);
        }
    }
    tml_file_print(w->file, ";\n");
}

/* Per model figures, in a category of our own: the dictionary has none for them. */
static void write_figures(const writer *w) {
    loop(w, "trammel_model", (const char *const[]){"id", "trial", "error", "passed", "distance_over_0.1", "distance_over_0.2",
                                                   "distance_over_0.5", "distance_max", "dihedral_over_5", "dihedral_max", NULL});
    for (int32_t m = 0; m < w->ensemble->model_count; m++) {
        const tml_model *model = &w->ensemble->models[m];
        const tml_measures *of = &model->measures;
        tml_file_print(w->file, "%d %d %.4f %s %d %d %d %.3f %d %.2f\n", m + 1, model->trial, model->error,
                       model->passed ? "yes" : "no", of->distance_over_01, of->distance_over_02, of->distance_over_05,
                       of->distance_max, of->dihedral_over_5, of->dihedral_max);
    }
}

static void write_provenance(const writer *w) {
    char rule[512];
    const char *title = w->ensemble->problem->title;
    tml_file_print(w->file, "_struct.entry_id trammel\n_struct.title ");
    value(w, title == NULL || title[0] == '\0' ? "Models from limits on distances" : title);
    tml_file_print(w->file, "\n#\n_software.pdbx_ordinal 1\n_software.name Trammel\n_software.version %s\n"
                            "_software.classification 'model building'\n",
                   TML_VERSION);
    tml_file_print(w->file, "#\n_pdbx_nmr_ensemble.entry_id trammel\n_pdbx_nmr_ensemble.conformers_calculated_total_number %d\n"
                            "_pdbx_nmr_ensemble.conformers_submitted_total_number %d\n"
                            "_pdbx_nmr_ensemble.conformer_selection_criteria ",
                   w->ensemble->trials, w->ensemble->model_count);
    tml_say_selection(w->ensemble, rule, sizeof rule);
    value(w, rule);
    tml_file_print(w->file, "\n#\n_pdbx_nmr_refine.entry_id trammel\n_pdbx_nmr_refine.method 'distance geometry, simulated annealing'\n"
                            "_pdbx_nmr_refine.software_ordinal 1\n");
    write_method(w);
    tml_file_print(w->file, "#\n_trammel.version %s\n_trammel.seed %llu\n_trammel.trials %d\n_trammel.passed %d\n", TML_VERSION,
                   (unsigned long long)w->ensemble->seed, w->ensemble->trials, w->ensemble->passed);
    write_figures(w);
}

/* ---- links ---- */

static void label_ids(const writer *w, int32_t atom, const tml_label *label) {
    const tml_atom *at = &w->molecule->atoms[atom];
    const strand *in = &w->strands[w->strand_of[at->residue]];
    value(w, at->name);
    tml_file_print(w->file, ". ");
    value(w, label->name);
    tml_file_print(w->file, "%s ", in->code);
    if (in->polymer)
        tml_file_print(w->file, "%d ", w->position[at->residue]);
    else
        tml_file_print(w->file, ". ");
}

static void auth_number(const writer *w, const tml_label *label) {
    if (label->numbered)
        tml_file_print(w->file, "%d ", label->number);
    else
        value(w, label->code);
}

static void partner(const writer *w, int32_t atom) {
    tml_label label = tml_label_of(w->molecule, w->molecule->atoms[atom].residue, w->bare_chain);
    label_ids(w, atom, &label);
    value(w, label.chain);
    auth_number(w, &label);
    tml_file_print(w->file, "%c 1_555 ", label.insertion == ' ' ? '?' : label.insertion);
}

static const char *connection(const writer *w, const tml_bond *bond) {
    const tml_atom *a = &w->molecule->atoms[bond->a], *b = &w->molecule->atoms[bond->b];
    if (tml_element_is_metal(a->element) || tml_element_is_metal(b->element)) return "metalc";
    return tml_is_disulfide(w->molecule, bond) ? "disulf" : "covale";
}

static void write_links(const writer *w) {
    int count = 0;
    for (int32_t i = 0; i < w->molecule->bond_count; i++) {
        const tml_bond *bond = &w->molecule->bonds[i];
        if (!tml_bond_links(w->molecule, w->is_peptide, i)) continue;
        if (count++ == 0) {
            loop(w, "struct_conn_type", (const char *const[]){"id", NULL});
            tml_file_print(w->file, "disulf\ncovale\nmetalc\n");
            loop(w, "struct_conn",
                 (const char *const[]){
                     "id", "conn_type_id", "ptnr1_label_atom_id", "pdbx_ptnr1_label_alt_id", "ptnr1_label_comp_id",
                     "ptnr1_label_asym_id", "ptnr1_label_seq_id", "ptnr1_auth_asym_id", "ptnr1_auth_seq_id",
                     "pdbx_ptnr1_PDB_ins_code", "ptnr1_symmetry", "ptnr2_label_atom_id", "pdbx_ptnr2_label_alt_id",
                     "ptnr2_label_comp_id", "ptnr2_label_asym_id", "ptnr2_label_seq_id", "ptnr2_auth_asym_id",
                     "ptnr2_auth_seq_id", "pdbx_ptnr2_PDB_ins_code", "ptnr2_symmetry", "pdbx_dist_value", NULL});
        }
        tml_file_print(w->file, "link%d %s ", count, connection(w, bond));
        partner(w, bond->a);
        partner(w, bond->b);
        tml_file_print(w->file, "%.3f\n", tml_first_length(w->ensemble, bond));
    }
}

/* ---- coordinates ---- */

static void write_site(const writer *w, int32_t model, int32_t atom, long long id) {
    static const double HALF = 0.0005;
    const tml_atom *at = &w->molecule->atoms[atom];
    const double *xyz = &w->ensemble->models[model].xyz[3 * (size_t)atom];
    tml_label label = tml_label_of(w->molecule, at->residue, w->bare_chain);
    double spread = w->ensemble->spread == NULL ? 0.0 : w->ensemble->spread[atom];
    tml_file_print(w->file, "%s %lld %s ", label.standard ? "ATOM" : "HETATM", id, tml_element_symbol(at->element));
    label_ids(w, atom, &label);
    tml_file_print(w->file, "%d %c %.3f %.3f %.3f 1.00 %.3f ", w->strands[w->strand_of[at->residue]].entity + 1,
                   label.insertion == ' ' ? '?' : label.insertion, tml_unsigned_zero(xyz[0], HALF), tml_unsigned_zero(xyz[1], HALF),
                   tml_unsigned_zero(xyz[2], HALF), isfinite(spread) ? spread : 0.0);
    if (at->charge != 0)
        tml_file_print(w->file, "%d ", at->charge);
    else
        tml_file_print(w->file, "? ");
    auth_number(w, &label);
    value(w, label.name);
    value(w, label.chain);
    value(w, at->name);
    tml_file_print(w->file, "%d\n", model + 1);
}

static void write_sites(const writer *w) {
    loop(w, "atom_site",
         (const char *const[]){"group_PDB", "id", "type_symbol", "label_atom_id", "label_alt_id", "label_comp_id", "label_asym_id",
                               "label_seq_id", "label_entity_id", "pdbx_PDB_ins_code", "Cartn_x", "Cartn_y", "Cartn_z",
                               "occupancy", "B_iso_or_equiv", "pdbx_formal_charge", "auth_seq_id", "auth_comp_id",
                               "auth_asym_id", "auth_atom_id", "pdbx_PDB_model_num", NULL});
    long long id = 0;
    for (int32_t m = 0; m < w->ensemble->model_count; m++)
        for (int32_t a = 0; a < w->molecule->atom_count; a++) write_site(w, m, a, ++id);
    tml_file_print(w->file, "#\n");
}

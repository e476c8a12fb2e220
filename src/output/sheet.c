#include "output/sheet.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/pcg.h"
#include "base/vector.h"
#include "input/selection.h"
#include "molecule/molecule.h"
#include "molecule/residue_data.h"
#include "output/file.h"
#include "output/output.h"

/* Contents: the steps - the sequence - which atoms take part - pairs - writing */

enum { MOST_ATOMS = 30000, MOST_PAIRS = 50 * 1000 * 1000 };

typedef struct pair { int32_t a, b; double lower, upper; } pair; /* a, b: into `chosen` */

typedef struct deriving {
    const tml_coordinates *from;
    const tml_derive_options *options;
    tml_error *error;
    tml_strings *pool;
    tml_outline outline;     /* with `covalent` … */
    tml_molecule molecule;   /* … and what it describes */
    const char **chains;     /* of each residue: the code that the sheet uses; NULL where it takes no part */
    int32_t *chosen, *atom_of; int32_t chosen_count; /* sites that take part; and their atoms in the molecule, or -1 */
    pair *pairs; size_t pair_count, pair_capacity;
    int32_t left_out;
} deriving;

static tml_status lay_out_sequence(deriving *d);
static tml_status choose_atoms(deriving *d);
static tml_status find_pairs(deriving *d, const volatile int *stop);
static tml_status write_sheet(const deriving *d, const char *path);

/* ---- the steps ---- */

static void release(deriving *d) {
    tml_molecule_clear(&d->molecule);
    tml_outline_clear(&d->outline);
    tml_strings_free(d->pool);
    free(d->chains);
    free(d->chosen);
    free(d->atom_of);
    free(d->pairs);
}

tml_status tml_sheet_derive(const tml_coordinates *coordinates, const tml_derive_options *options, const char *path,
                            const volatile int *stop, tml_derived *derived, tml_error *error) {
    deriving d = {.from = coordinates, .options = options, .error = error, .pool = tml_strings_new()};
    d.chains = tml_alloc(coordinates->residue_count, sizeof *d.chains);
    d.chosen = tml_alloc(coordinates->atom_count, sizeof *d.chosen);
    d.atom_of = tml_alloc(coordinates->atom_count, sizeof *d.atom_of);
    bool good = d.pool != NULL && d.chains != NULL && d.chosen != NULL && d.atom_of != NULL;
    tml_status status = good ? tml_selection_check(options->atoms, error) : tml_no_memory(error);
    if (status == TML_OK && options->model >= coordinates->model_count)
        status = tml_fail(error, TML_BAD_INPUT, "model %d is asked for; there are %d", options->model + 1, coordinates->model_count);
    if (status == TML_OK && options->covalent) status = lay_out_sequence(&d);
    if (status == TML_OK) status = choose_atoms(&d);
    if (status == TML_OK) status = find_pairs(&d, stop);
    if (status == TML_OK) status = write_sheet(&d, path);
    *derived = (tml_derived){d.chosen_count, (int32_t)d.pair_count, d.left_out};
    release(&d);
    return status;
}

/* ---- the sequence ---- */

static bool built_in(const char *name) {
    return tml_find_builtin(name) != NULL;
}

/* What is looked for in each residue: sites, or -1. */
typedef struct backbone { int32_t n, ca, c, hd1, he2; } backbone;

static backbone *find_backbones(const tml_coordinates *from) {
    backbone *list = tml_alloc(from->residue_count, sizeof *list);
    if (list == NULL) return NULL;
    for (size_t r = 0; r < from->residue_count; r++) list[r] = (backbone){-1, -1, -1, -1, -1};
    for (size_t a = 0; a < from->atom_count; a++) {
        backbone *of = &list[from->atoms[a].residue];
        const struct { const char *name; int32_t *site; } wanted[] = {
            {"N", &of->n}, {"CA", &of->ca}, {"C", &of->c}, {"HD1", &of->hd1}, {"HE2", &of->he2}};
        for (size_t k = 0; k < sizeof wanted / sizeof wanted[0]; k++)
            if (strcmp(from->atoms[a].name, wanted[k].name) == 0) *wanted[k].site = (int32_t)a;
    }
    return list;
}

/* The place of a site in the first model that counts; NULL where it is not there. */
static const double *place_of(const deriving *d, int32_t site) {
    if (site < 0) return NULL;
    const double *xyz = tml_coordinates_at(d->from, d->options->model < 0 ? 0 : d->options->model, (size_t)site);
    return isnan(xyz[0]) ? NULL : xyz;
}

/* Whether one residue is linked to the next by a peptide bond; without these atoms, by their numbers. */
static bool linked(const deriving *d, const backbone *one, const backbone *two, int32_t number_1, int32_t number_2) {
    static const double LONGEST = 2.0; /* Å; the bond has 1.33, the next-nearest contact 2.4 */
    const double *c = place_of(d, one->c), *n = place_of(d, two->n);
    if (number_2 != number_1 + 1) return false;
    return c == NULL || n == NULL || tml_distance(c, n) < LONGEST;
}

static bool is_cis(const deriving *d, const backbone *one, const backbone *two) {
    const double *ca1 = place_of(d, one->ca), *c = place_of(d, one->c), *n = place_of(d, two->n), *ca2 = place_of(d, two->ca);
    if (ca1 == NULL || c == NULL || n == NULL || ca2 == NULL) return false;
    return fabs(tml_dihedral_of(ca1, c, n, ca2)) < TML_PI / 2;
}

/* A residue number without an insertion code. */
static bool whole_number(const char *text, int32_t *number) {
    char *end;
    long value = strtol(text, &end, 10);
    *number = (int32_t)value;
    return end != text && *end == '\0' && value > -10000000 && value < 10000000;
}

/* Codes of the chains that go on after a break: A_2, A_3 … */
static const char *stretch_code(deriving *d, const char *chain, int part) {
    char code[96];
    if (part == 1) return chain;
    snprintf(code, sizeof code, "%s_%d", chain, part);
    return tml_strings_add(d->pool, code);
}

static tml_status add_residue(deriving *d, int32_t residue, const backbone *of, const char *chain, bool cis) {
    tml_outline *outline = &d->outline;
    const tml_site_residue *from = &d->from->residues[residue];
    if (!tml_grow(&outline->residues, &outline->residue_capacity, outline->residue_count + 1, sizeof *outline->residues))
        return tml_no_memory(d->error);
    bool histidine = strcmp(from->name, "HIS") == 0;
    outline->residues[outline->residue_count++] = (tml_outline_residue){
        .chain = chain,
        .number = from->number,
        .name = from->name,
        .variant = histidine && of->hd1 >= 0 && of->he2 < 0 ? "-HE2" : histidine && of->he2 >= 0 && of->hd1 < 0 ? "-HD1" : "",
        .cis = cis,
        .place = {-1, 0, 0}};
    d->chains[residue] = chain;
    return TML_OK;
}

static tml_status add_links(deriving *d);

/* The file's amino acids, in its order, as an outline and the molecule that it describes. */
static tml_status lay_out_sequence(deriving *d) {
    const tml_coordinates *from = d->from;
    backbone *backbones = find_backbones(from);
    tml_status status = backbones == NULL ? tml_no_memory(d->error) : TML_OK;
    tml_index *parts = tml_index_new(); /* stretches of each chain so far */
    if (parts == NULL) status = tml_no_memory(d->error);
    int32_t last = -1, last_number = 0;
    const char *chain = NULL;
    for (size_t r = 0; r < from->residue_count && status == TML_OK; r++) {
        const tml_site_residue *residue = &from->residues[r];
        int32_t number = 0;
        if (!built_in(residue->name)) continue;
        if (!whole_number(residue->number, &number)) {
            status = tml_fail(d->error, TML_BAD_INPUT,
                              "residue %.32s:%.32s has an insertion code, which a sequence in a sheet cannot have; use --covalent no",
                              residue->chain, residue->number);
            break;
        }
        bool goes_on = last >= 0 && strcmp(from->residues[last].chain, residue->chain) == 0 &&
                       linked(d, &backbones[last], &backbones[r], last_number, number);
        if (goes_on) {
            d->outline.residues[d->outline.residue_count - 1].cis = is_cis(d, &backbones[last], &backbones[r]);
        } else {
            int part = 1;
            while (tml_index_find(parts, part, residue->chain) >= 0) part++;
            chain = stretch_code(d, residue->chain, part);
            if (chain == NULL || !tml_index_add(parts, part, residue->chain, 1)) status = tml_no_memory(d->error);
        }
        if (status == TML_OK) status = add_residue(d, (int32_t)r, &backbones[r], chain, false);
        last = (int32_t)r;
        last_number = number;
    }
    tml_index_free(parts);
    free(backbones);
    if (status == TML_OK && d->outline.residue_count == 0)
        status = tml_fail(d->error, TML_BAD_INPUT, "there is none of the built-in amino acids; use --covalent no");
    if (status == TML_OK) status = add_links(d);
    const char *no_file = "";
    if (status == TML_OK) status = tml_molecule_build(&d->outline, &no_file, d->pool, &d->molecule, d->error);
    return status;
}

static tml_address address_of(const deriving *d, int32_t site) {
    const tml_site *at = &d->from->atoms[site];
    return (tml_address){d->chains[at->residue], d->from->residues[at->residue].number, "", at->name, {-1, 0, 0}};
}

/* Disulfides and whatever else is linked within the sequence but a peptide bond. */
static tml_status add_links(deriving *d) {
    tml_outline *outline = &d->outline;
    for (size_t i = 0; i < d->from->link_count; i++) {
        tml_site_link link = d->from->links[i];
        const tml_site *a = &d->from->atoms[link.a], *b = &d->from->atoms[link.b];
        if (d->chains[a->residue] == NULL || d->chains[b->residue] == NULL) continue;
        if (strcmp(a->name, "SG") != 0 || strcmp(b->name, "SG") != 0) continue; /* others may be no covalent bonds at all */
        if (!tml_grow(&outline->links, &outline->link_capacity, outline->link_count + 1, sizeof *outline->links))
            return tml_no_memory(d->error);
        outline->links[outline->link_count++] = (tml_outline_link){address_of(d, link.a), address_of(d, link.b), {-1, 0, 0}};
    }
    return TML_OK;
}

/* ---- which atoms take part ---- */

static bool fits_sheet(const char *text) {
    return text[0] != '\0' && text[0] != '"' && strpbrk(text, " \t:,#%*") == NULL;
}

/* The molecule's atom of a site; -1 where the built-in residue has none of that name. */
static int32_t atom_in_molecule(const deriving *d, const tml_site *site) {
    const tml_site_residue *in = &d->from->residues[site->residue];
    if (d->chains[site->residue] == NULL) return -1;
    int32_t residue = tml_molecule_find_residue(&d->molecule, d->chains[site->residue], in->number);
    return residue < 0 ? -1 : tml_molecule_find_atom(&d->molecule, residue, site->name);
}

static tml_status choose_atoms(deriving *d) {
    const tml_coordinates *from = d->from;
    for (size_t a = 0; a < from->atom_count; a++) {
        const tml_site *site = &from->atoms[a];
        const tml_site_residue *in = &from->residues[site->residue];
        if (in->water || !tml_selected(d->options->atoms, site)) continue;
        if (d->options->model >= 0 && isnan(tml_coordinates_at(from, d->options->model, a)[0])) continue;
        int32_t atom = d->options->covalent ? atom_in_molecule(d, site) : -1;
        if (d->options->covalent && atom < 0) {
            d->left_out++;
            continue;
        }
        if (!d->options->covalent) d->chains[site->residue] = in->chain;
        if (!fits_sheet(site->name) || !fits_sheet(in->number) || !fits_sheet(in->chain))
            return tml_fail(d->error, TML_BAD_INPUT,
                            "%.32s:%.32s:%.32s has signs that have a meaning of their own in a sheet; rename it or leave it out with "
                            "--atoms",
                            in->chain, in->number, site->name);
        d->chosen[d->chosen_count] = (int32_t)a;
        d->atom_of[d->chosen_count++] = atom;
    }
    if (d->chosen_count == 0)
        return tml_fail(d->error, TML_BAD_INPUT, "no atom is selected by '%.64s'", d->options->atoms);
    if (d->chosen_count > MOST_ATOMS)
        return tml_fail(d->error, TML_TOO_LARGE, "%d atoms are selected, %d are the most; choose fewer with --atoms", d->chosen_count,
                        MOST_ATOMS);
    return TML_OK;
}

/* ---- pairs ---- */

/* Whether a bond or an angle fixes the distance. */
static bool fixed(const tml_molecule *molecule, int32_t a, int32_t b) {
    for (int32_t i = molecule->neighbour_first[a]; i < molecule->neighbour_first[a + 1]; i++) {
        int32_t middle = molecule->neighbours[i];
        if (middle == b) return true;
        for (int32_t k = molecule->neighbour_first[middle]; k < molecule->neighbour_first[middle + 1]; k++)
            if (molecule->neighbours[k] == b) return true;
    }
    return false;
}

/* Least and greatest distance over the models that have both atoms; false where none has. */
static bool range_of(const deriving *d, int32_t a, int32_t b, double *least, double *greatest) {
    int32_t first = d->options->model < 0 ? 0 : d->options->model;
    int32_t last = d->options->model < 0 ? d->from->model_count - 1 : d->options->model;
    *least = INFINITY;
    *greatest = -INFINITY;
    for (int32_t m = first; m <= last; m++) {
        double distance = tml_distance(tml_coordinates_at(d->from, m, (size_t)a), tml_coordinates_at(d->from, m, (size_t)b));
        if (isnan(distance)) continue;
        *least = fmin(*least, distance);
        *greatest = fmax(*greatest, distance);
    }
    return isfinite(*least);
}

static tml_status add_pair(deriving *d, int32_t a, int32_t b, double least, double greatest, tml_pcg *pcg) {
    const tml_derive_options *options = d->options;
    double noise = options->noise > 0 ? options->noise * tml_pcg_normal(pcg) : 0.0;
    if (d->pair_count >= MOST_PAIRS)
        return tml_fail(d->error, TML_TOO_LARGE, "more than %d limits; lower --cutoff or choose fewer atoms", MOST_PAIRS);
    if (!tml_grow(&d->pairs, &d->pair_capacity, d->pair_count + 1, sizeof *d->pairs)) return tml_no_memory(d->error);
    double lower = fmax(least + noise, 0.0), upper = fmax(greatest + noise, 0.0);
    lower = fmax(lower - options->error - options->fraction * lower, 0.0);
    upper += options->error + options->fraction * upper;
    d->pairs[d->pair_count++] = (pair){a, b, lower, upper};
    return TML_OK;
}

static tml_status find_pairs(deriving *d, const volatile int *stop) {
    tml_pcg pcg;
    tml_pcg_seed_trial(&pcg, d->options->seed, 0);
    for (int32_t i = 0; i < d->chosen_count; i++) {
        if (stop != NULL && *stop != 0) return tml_fail(d->error, TML_INTERRUPTED, "interrupted");
        for (int32_t j = i + 1; j < d->chosen_count; j++) {
            double least, greatest;
            if (!range_of(d, d->chosen[i], d->chosen[j], &least, &greatest) || least > d->options->cutoff) continue;
            if (d->options->covalent && fixed(&d->molecule, d->atom_of[i], d->atom_of[j])) continue;
            if (d->options->keep < 1.0 && tml_pcg_uniform(&pcg) >= d->options->keep) continue;
            tml_status status = add_pair(d, i, j, least, greatest, &pcg);
            if (status != TML_OK) return status;
        }
    }
    return TML_OK;
}

/* ---- writing ---- */

static void write_sequence(const deriving *d, tml_file *file) {
    enum { IN_LINE = 15 };
    const tml_outline *outline = &d->outline;
    int on_line = 0;
    for (size_t i = 0; i < outline->residue_count; i++) {
        const tml_outline_residue *residue = &outline->residues[i];
        if (i > 0 && (residue->chain != outline->residues[i - 1].chain || on_line == IN_LINE)) on_line = 0;
        if (on_line++ == 0) tml_file_print(file, "%ssequence %s %s", i == 0 ? "" : "\n", residue->chain, residue->number);
        tml_file_print(file, " %s", residue->name);
    }
    tml_file_print(file, "\n");
    for (size_t i = 0; i < outline->residue_count; i++) {
        const tml_outline_residue *residue = &outline->residues[i];
        if (residue->variant[0] != '\0') tml_file_print(file, "variant %s %s %s\n", residue->chain, residue->number, residue->variant);
        if (residue->cis) tml_file_print(file, "peptide %s %s cis\n", residue->chain, residue->number);
    }
    for (size_t i = 0; i < outline->link_count; i++) {
        const tml_outline_link *link = &outline->links[i];
        tml_file_print(file, "link %s:%s:%s %s:%s:%s\n", link->a.chain, link->a.number, link->a.atom, link->b.chain, link->b.number,
                       link->b.atom);
    }
}

static void write_address(const deriving *d, tml_file *file, int32_t site) {
    tml_address at = address_of(d, site);
    tml_file_print(file, " %s:%s:%s", at.chain, at.number, at.atom);
}

/* Beads: as atoms of an element they would keep the distances of atoms that are not bonded. */
static void write_beads(const deriving *d, tml_file *file) {
    for (int32_t i = 0; i < d->chosen_count; i++) {
        tml_file_print(file, "atom");
        write_address(d, file, d->chosen[i]);
        tml_file_print(file, " bead\n");
    }
}

/* Limits are rounded away from the distance, so that the coordinates meet them. */
static void write_limits(const deriving *d, tml_file *file) {
    static const double STEPS = 1000.0; /* a thousandth of an Å, as coordinates have */
    for (size_t i = 0; i < d->pair_count; i++) {
        const pair *at = &d->pairs[i];
        tml_file_print(file, "limit");
        write_address(d, file, d->chosen[at->a]);
        write_address(d, file, d->chosen[at->b]);
        tml_file_print(file, " %.3f %.3f as d%zu\n", floor(at->lower * STEPS) / STEPS, ceil(at->upper * STEPS) / STEPS, i + 1);
    }
}

static tml_status write_sheet(const deriving *d, const char *path) {
    const tml_derive_options *options = d->options;
    bool compressed;
    tml_file *file;
    tml_format_of(path, &compressed);
    tml_status status = tml_file_open(path, compressed, &file, d->error);
    if (status != TML_OK) return status;
    tml_file_print(file, "sheet 1\n# Derived from coordinates by Trammel %s: pairs nearer than %g A, limits %g A + %g of the distance wide on "
                         "each side",
                   TML_VERSION, options->cutoff, options->error, options->fraction);
    if (options->noise > 0) tml_file_print(file, ", noise %g A", options->noise);
    if (options->keep < 1) tml_file_print(file, ", a share of %g kept", options->keep);
    if (options->noise > 0 || options->keep < 1) tml_file_print(file, ", seed %llu", (unsigned long long)options->seed);
    tml_file_print(file, "\n# Atoms: ");
    tml_file_paragraph(file, 120, "", "# ", "%s", options->atoms);
    if (d->left_out > 0) tml_file_print(file, "# %d selected atoms are left out: the built-in residues do not have them\n", d->left_out);
    if (d->from->alternatives > 0) tml_file_print(file, "# %zu alternative places are passed over\n", d->from->alternatives);
    if (options->covalent)
        write_sequence(d, file);
    else
        write_beads(d, file);
    write_limits(d, file);
    return tml_file_close(file, d->error);
}

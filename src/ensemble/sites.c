#include "ensemble/sites.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* Contents: the index of the models - chains - atoms */

enum { CODES = -1, ATOMS = 1 << 30 };

typedef struct matching {
    const tml_molecule *molecule;
    const tml_coordinates *models;
    tml_index *index;     /* (CODES, code) to chains; (chain, number) to residues; (ATOMS + residue, name) to sites */
    int32_t chain_count;  /* of the models */
    int32_t *chain_of;    /* per chain of the molecule: the models', -1 */
    bool *taken;          /* per chain of the models */
    bool *used;           /* per site */
    tml_sites *out;
} matching;

static bool index_models(matching *m);
static bool pair_chains(matching *m);
static void match_atoms(matching *m);

tml_status tml_sites_match(const tml_molecule *molecule, const tml_coordinates *models, tml_sites *out, tml_error *error) {
    *out = (tml_sites){.of = tml_alloc((size_t)molecule->atom_count, sizeof *out->of), .first_missing = -1, .first_left = -1, .first_other = -1};
    matching m = {.molecule = molecule, .models = models, .index = tml_index_new(), .out = out,
                  .chain_of = tml_alloc((size_t)molecule->chain_count, sizeof *m.chain_of),
                  .used = tml_alloc(models->atom_count, sizeof *m.used)};
    bool room = out->of != NULL && m.index != NULL && m.chain_of != NULL && m.used != NULL && models->residue_count < ATOMS &&
                index_models(&m) && pair_chains(&m);
    if (room) match_atoms(&m);
    tml_index_free(m.index);
    free(m.chain_of);
    free(m.taken);
    free(m.used);
    return room ? TML_OK : tml_no_memory(error);
}

void tml_sites_clear(tml_sites *sites) {
    free(sites->of);
    *sites = (tml_sites){0};
}

void tml_sites_place(const tml_sites *sites, const tml_molecule *molecule, const tml_coordinates *models, int32_t model, double *xyz) {
    for (int32_t i = 0; i < molecule->atom_count; i++)
        for (int k = 0; k < 3; k++)
            xyz[3 * i + k] = sites->of[i] < 0 ? NAN : tml_coordinates_at(models, model, (size_t)sites->of[i])[k];
}

/* ---- the index of the models ---- */

/* Of atoms and residues that stand twice in a file the first counts. */
static bool index_models(matching *m) {
    const tml_coordinates *models = m->models;
    for (size_t r = 0; r < models->residue_count; r++) {
        const tml_site_residue *residue = &models->residues[r];
        if (residue->water) continue;
        int32_t chain = tml_index_find(m->index, CODES, residue->chain);
        if (chain < 0) {
            chain = m->chain_count++;
            if (!tml_index_add(m->index, CODES, residue->chain, chain)) return false;
        }
        if (tml_index_find(m->index, chain, residue->number) < 0 && !tml_index_add(m->index, chain, residue->number, (int32_t)r)) return false;
    }
    for (size_t a = 0; a < models->atom_count; a++) {
        const tml_site *site = &models->atoms[a];
        if (tml_index_find(m->index, ATOMS + site->residue, site->name) < 0 &&
            !tml_index_add(m->index, ATOMS + site->residue, site->name, (int32_t)a))
            return false;
    }
    m->taken = tml_alloc((size_t)m->chain_count, sizeof *m->taken);
    return m->taken != NULL;
}

/* ---- chains ---- */

/* The models' residue in place of one of the molecule's; -1 for none. Single atoms of a sheet, which have no residue, are none. */
static int32_t residue_in(const matching *m, int32_t chain, const tml_residue *residue) {
    return chain < 0 ? -1 : tml_index_find(m->index, chain, residue->number);
}

/* How many residues of a chain agree in number and name with a chain of the models. */
static int32_t agreement(const matching *m, const tml_chain *chain, int32_t with) {
    int32_t agreeing = 0;
    for (int32_t k = 0; k < chain->residue_count; k++) {
        const tml_residue *residue = &m->molecule->residues[chain->first_residue + k];
        int32_t other = residue_in(m, with, residue);
        agreeing += other >= 0 && strcmp(m->models->residues[other].name, residue->name) == 0;
    }
    return agreeing;
}

static bool pair_chains(matching *m) {
    const tml_molecule *molecule = m->molecule;
    for (int32_t c = 0; c < molecule->chain_count; c++) {
        m->chain_of[c] = tml_index_find(m->index, CODES, molecule->chains[c].code);
        if (m->chain_of[c] >= 0) m->taken[m->chain_of[c]] = true;
    }
    for (int32_t c = 0; c < molecule->chain_count; c++) {
        const tml_chain *chain = &molecule->chains[c];
        int32_t best = -1, most = (chain->residue_count - 1) / 2; /* more than this: at least half */
        for (int32_t with = 0; m->chain_of[c] < 0 && with < m->chain_count; with++) {
            int32_t agreeing = m->taken[with] ? 0 : agreement(m, chain, with);
            if (agreeing <= most) continue;
            most = agreeing;
            best = with;
        }
        if (best < 0) continue;
        m->chain_of[c] = best;
        m->taken[best] = true;
        m->out->renamed_chains++;
    }
    return true;
}

/* ---- atoms ---- */

static int32_t site_named(const matching *m, int32_t residue, const char *name) {
    static const char *const AMIDE[] = {"H", "HN", "H1"};
    int32_t site = tml_index_find(m->index, ATOMS + residue, name);
    bool amide = false;
    for (int k = 0; k < 3; k++) amide = amide || strcmp(name, AMIDE[k]) == 0;
    for (int k = 0; site < 0 && amide && k < 3; k++) {
        site = tml_index_find(m->index, ATOMS + residue, AMIDE[k]);
        if (site >= 0 && m->used[site]) site = -1;
    }
    return site;
}

static void match_atoms(matching *m) {
    const tml_molecule *molecule = m->molecule;
    tml_sites *out = m->out;
    for (int32_t r = 0; r < molecule->residue_count; r++) {
        const tml_residue *residue = &molecule->residues[r];
        int32_t other = residue_in(m, m->chain_of[residue->chain_index], residue);
        if (other >= 0 && *residue->name != '\0' && strcmp(m->models->residues[other].name, residue->name) != 0) {
            if (out->other_residues++ == 0) out->first_other = r;
            other = -1;
        }
        for (int32_t i = residue->first_atom; i < residue->first_atom + residue->atom_count; i++) {
            int32_t site = other < 0 ? -1 : site_named(m, other, molecule->atoms[i].name);
            out->of[i] = site;
            if (site >= 0) m->used[site] = true;
            if (site >= 0) continue;
            if (out->missing++ == 0) out->first_missing = i;
        }
    }
    for (size_t a = 0; a < m->models->atom_count; a++) {
        if (m->used[a] || m->models->residues[m->models->atoms[a].residue].water) continue;
        if (out->left++ == 0) out->first_left = (int32_t)a;
    }
}

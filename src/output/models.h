/* models.h: what the writers of model files share: names that both formats understand, and the writers themselves. */
#ifndef TML_MODELS_H
#define TML_MODELS_H

#include "output/file.h"
#include "output/output.h"

/* How a residue is called in a model file. Atoms without a residue are an unknown ligand (UNL, the name the Protein Data Bank
 * has for it) number 1 in a chain of their own. */
typedef struct tml_label {
    const char *chain, *name;
    const char *code;   /* the input's residue code; "1" for atoms without one */
    int32_t number;     /* its whole number, where it has one and nothing else but an insertion code … */
    bool numbered;      /* … which this tells */
    char insertion;     /* or ' ' */
    bool standard;      /* one of the twenty amino acids, part of a polymer */
} tml_label;

tml_label tml_label_of(const tml_molecule *molecule, int32_t residue, const char *bare_chain);

/* A chain code of one letter that no chain has, for atoms without one; "-" where all are taken. */
const char *tml_bare_chain(const tml_molecule *molecule);

/* Whether a bond joins residues beyond the peptide bond from one to the next. */
bool tml_bond_links(const tml_molecule *molecule, const bool *is_peptide, int32_t bond);

/* A flag for each bond, set for peptide bonds along a chain; NULL without memory. The caller frees it. */
bool *tml_peptide_bonds(const tml_molecule *molecule);

/* +0 for what would round to -0.000. */
static inline double tml_unsigned_zero(double value, double half) {
    return value > -half && value < half ? 0.0 : value;
}

/* The whole of a model file; the mmCIF writer may return TML_NO_MEMORY. */
void tml_pdb_write(tml_file *file, const tml_ensemble *ensemble, const tml_contradictions *found, const bool *is_peptide);
tml_status tml_cif_write(tml_file *file, const tml_ensemble *ensemble, const tml_contradictions *found, const bool *is_peptide);

/* ASCII alone, at most `size` bytes with the end: Å is A, ° is deg, anything else '?'. */
void tml_to_ascii(const char *in, char *out, size_t size);

bool tml_is_disulfide(const tml_molecule *molecule, const tml_bond *bond);

/* A bond's length in the first model, or its ideal one where there are no models; Å. */
double tml_first_length(const tml_ensemble *ensemble, const tml_bond *bond);

/* Whether coordinates fit their columns. */
tml_status tml_pdb_coordinates_fit(const tml_ensemble *ensemble, tml_error *error);
tml_status tml_pdb_fits(const tml_molecule *molecule, int32_t models, tml_error *error);

#endif

/* polymer.h: the kinds of chain that residues form. */
#ifndef TML_POLYMER_H
#define TML_POLYMER_H

typedef enum tml_polymer {
    TML_POLYMER_NONE,    /* a molecule by itself, or single atoms */
    TML_POLYMER_PROTEIN, /* N, CA, C of one residue, then N of the next */
    TML_POLYMER_NUCLEIC  /* P … O3' of one residue, then P of the next */
} tml_polymer;

#endif

/* elements.h: the elements' symbols and radii, as data. */
#ifndef TML_ELEMENTS_H
#define TML_ELEMENTS_H

#include <stdbool.h>

/* Atomic number for a symbol in any case ("C", "cl", "ZN"), 0 for "bead", -1 for no element. "D" is hydrogen. */
int tml_element_number(const char *symbol);

/* "H", "Cl" …; "X" for a bead (0) or a number out of range. */
const char *tml_element_symbol(int number);

/* Elements that make up metal sites: all but hydrogen, helium and the non-metals of the right upper corner. */
bool tml_element_is_metal(int number);

double tml_element_vdw_radius(int number);      /* van der Waals, Å; 0 for a bead */
double tml_element_covalent_radius(int number); /* single bond, Å; 0 for a bead */

#endif

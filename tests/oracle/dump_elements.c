/* Prints number, symbol, van der Waals and covalent radius of every element, tab-separated, for test_elements.py. */
#include <stdio.h>

#include "molecule/elements.h"

int main(void) {
    for (int number = 1; number <= 118; number++)
        printf("%d\t%s\t%.4f\t%.4f\n", number, tml_element_symbol(number), tml_element_vdw_radius(number),
               tml_element_covalent_radius(number));
    return 0;
}

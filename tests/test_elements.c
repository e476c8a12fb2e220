#include <criterion/criterion.h>

#include "molecule/elements.h"

Test(elements, symbols_and_numbers_are_each_others_inverse) {
    for (int number = 1; number <= 118; number++)
        cr_assert_eq(tml_element_number(tml_element_symbol(number)), number, "%s", tml_element_symbol(number));
}

Test(elements, symbols_are_read_in_any_case_and_deuterium_is_hydrogen) {
    cr_assert_eq(tml_element_number("cl"), 17);
    cr_assert_eq(tml_element_number("ZN"), 30);
    cr_assert_eq(tml_element_number("D"), 1);
    cr_assert_eq(tml_element_number("bead"), 0);
    cr_assert_eq(tml_element_number("Qq"), -1);
    cr_assert_eq(tml_element_number(""), -1);
    cr_assert_str_eq(tml_element_symbol(0), "X");
    cr_assert_str_eq(tml_element_symbol(119), "X");
    cr_assert_str_eq(tml_element_symbol(-1), "X");
}

/* Sources: Bondi 1964; Rowland & Taylor 1996 (H); Cordero et al. 2008. Typed from memory. */
Test(elements, radii_are_the_published_ones) {
    static const struct {
        const char *symbol;
        double vdw, covalent;
    } published[] = {{"H", 1.10, 0.31}, {"C", 1.70, 0.76}, {"N", 1.55, 0.71}, {"O", 1.52, 0.66},
                     {"P", 1.80, 1.07}, {"S", 1.80, 1.05}, {"Cl", 1.75, 1.02}};
    for (size_t i = 0; i < sizeof published / sizeof *published; i++) {
        int number = tml_element_number(published[i].symbol);
        cr_assert_eq(tml_element_vdw_radius(number), published[i].vdw, "%s", published[i].symbol);
        cr_assert_eq(tml_element_covalent_radius(number), published[i].covalent, "%s", published[i].symbol);
    }
    cr_assert_eq(tml_element_vdw_radius(0), 0);
    cr_assert_eq(tml_element_covalent_radius(0), 0);
}

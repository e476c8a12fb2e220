/* Names that mean groups of atoms, where residues of the twenty kinds cannot show it; tests/oracle/test_names.py has those. */
#include <string.h>

#include "given_text.h"
#include "restraint/names.h"

static int32_t matches(const char *name) {
    tml_problem *problem = read_good("sheet 1\natom A:1:H1A2 H\natom A:1:H11 H\natom A:1:H2'' H\natom A:1:Hx H\natom A:1:C C\n");
    int32_t atoms[64];
    tml_name_kind kind;
    int32_t count = tml_names_match(&problem->molecule, 0, name, atoms, &kind);
    tml_problem_free(problem);
    return count;
}

Test(names, a_star_is_not_forgotten_after_a_number_that_began_too_early) {
    cr_assert_eq(matches("H*%"), 2); /* H1A2 with * for 1A, H11 */
    cr_assert_eq(matches("H*%2"), 0);
    cr_assert_eq(matches("H%*2"), 1);
    cr_assert_eq(matches("*%*%*"), 2);
}

Test(names, a_number_has_at_least_one_digit_and_a_star_may_mean_nothing) {
    cr_assert_eq(matches("C%"), 0);
    cr_assert_eq(matches("C*"), 1);
    cr_assert_eq(matches("H%"), 1);
    cr_assert_eq(matches("H2'y"), 1);
}

Test(names, a_name_of_its_own_goes_before_the_wildcard_it_could_be) {
    cr_assert_eq(matches("Hx"), 1);
}

Test(names, a_pattern_of_any_length_is_answered) {
    char name[4096];
    memset(name, '*', sizeof name - 1);
    name[sizeof name - 1] = '\0';
    cr_assert_eq(matches(name), 5); /* a row of stars means anything */
}

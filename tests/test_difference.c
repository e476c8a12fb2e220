/* Two problems compared restraint by restraint: each kind of relation, chains of other codes, restraints that stand twice.
 *
 * Contents: distances - dihedrals - molecules
 */
#include "given_text.h"

#include "restraint/difference.h"

#define SEQUENCE "sheet 1\nsequence A 1 GLY SER VAL GLY\n"

static tml_difference compare(const char *here, const char *there) {
    tml_difference d;
    tml_problem *one = read_good(here), *other = read_good(there);
    cr_assert_eq(tml_difference_find(one, other, &d, NULL), TML_OK);
    return d;
}

static void done(tml_difference *d) {
    tml_problem *one = (tml_problem *)d->one, *other = (tml_problem *)d->other;
    tml_difference_clear(d);
    tml_problem_free(one);
    tml_problem_free(other);
}

static void expect_distances(const char *here, const char *there, tml_relation relation, int32_t count) {
    char one[512], other[512];
    snprintf(one, sizeof one, SEQUENCE "%s", here);
    snprintf(other, sizeof other, SEQUENCE "%s", there);
    tml_difference d = compare(one, other);
    cr_assert_eq(d.distance_of[relation], count, "%s | %s: %d", here, there, d.distance_of[relation]);
    cr_assert_eq(d.distance_count, count);
    done(&d);
}

/* ---- distances ---- */

Test(distances, each_relation_is_told) {
    expect_distances("limit A:1:HA2 A:3:H 1.8 5\n", "limit A:3:H A:1:HA2 1.8 5 as other\n", TML_SAME, 1);
    expect_distances("limit A:1:HA2 A:3:H 1.8 5\n", "limit A:1:HA2 A:3:H 1.8 6\n", TML_OTHER_LIMITS, 1);
    expect_distances("limit A:1:HA2 A:3:H 1.8 -\n", "limit A:1:HA2 A:3:H 1.8 6\n", TML_OTHER_LIMITS, 1);
    expect_distances("limit A:2:HBx A:3:H 1.8 5\n", "limit A:2:HB3 A:3:H 1.8 5\n", TML_WITHIN, 1);
    expect_distances("limit A:1:HA2 A:3:H 1.8 5\n", "limit A:1:HA3 A:3:H 1.8 5\n", TML_OTHER_ATOMS, 1);
    expect_distances("limit A:1:HA2 A:3:H 1.8 5\n", "", TML_ONLY_ONE, 1);
    expect_distances("", "limit A:1:HA2 A:3:H 1.8 5\n", TML_ONLY_OTHER, 1);
}

Test(distances, rows_split_or_joined_mean_the_same) {
    expect_distances("limit A:1:HA% A:3:H 1.8 5\n", "limit A:1:HA2 A:3:H 1.8 5 as x\nlimit A:1:HA3 A:3:H 1.8 5 as x\n", TML_SAME, 1);
    expect_distances("limit A:1:HA2 A:3:H,A:4:H 1.8 5\n", "limit A:4:H A:1:HA2 1.8 5 as x\nlimit A:3:H A:1:HA2 1.8 5 as x\n", TML_SAME, 1);
}

Test(distances, what_holds_together_is_another_thing_than_alternatives) {
    tml_difference d = compare(SEQUENCE "limit A:1:HA2 A:3:H 1.8 5 as x together k\nlimit A:1:HA3 A:4:H 1.8 5 as x together k\n",
                               SEQUENCE "limit A:1:HA2 A:3:H 1.8 5 as x\nlimit A:1:HA3 A:4:H 1.8 5 as x\n");
    cr_assert_eq(d.distance_of[TML_SAME], 0);
    done(&d);
}

Test(distances, one_that_stands_twice_has_one_partner) {
    tml_difference d = compare(SEQUENCE "limit A:1:HA2 A:3:H 1.8 5\nlimit A:1:HA2 A:3:H 1.8 5\n", SEQUENCE "limit A:1:HA2 A:3:H 1.8 5\n");
    cr_assert(d.distance_of[TML_SAME] == 1 && d.distance_of[TML_ONLY_ONE] == 1);
    done(&d);
}

/* ---- dihedrals ---- */

Test(dihedrals, either_direction_and_any_turn_are_the_same) {
    tml_difference d = compare(SEQUENCE "dihedral A:1:C A:2:N A:2:CA A:2:C 170 -170\n", SEQUENCE "dihedral A:2:C A:2:CA A:2:N A:1:C -190 -170\n");
    cr_assert_eq(d.dihedral_of[TML_SAME], 1);
    done(&d);
    d = compare(SEQUENCE "dihedral A:1:C A:2:N A:2:CA A:2:C -80 -40\n", SEQUENCE "dihedral A:1:C A:2:N A:2:CA A:2:C -80 -41\n");
    cr_assert_eq(d.dihedral_of[TML_OTHER_LIMITS], 1);
    done(&d);
    d = compare(SEQUENCE "dihedral A:1:C A:2:N A:2:CA A:2:C -80 -40\n", SEQUENCE "dihedral A:2:C A:3:N A:3:CA A:3:C -80 -40\n");
    cr_assert(d.dihedral_of[TML_ONLY_ONE] == 1 && d.dihedral_of[TML_ONLY_OTHER] == 1);
    done(&d);
}

/* ---- molecules ---- */

Test(molecules, atoms_and_bonds_of_one_alone_are_counted) {
    tml_difference d = compare("sheet 1\nsequence A 1 CYS GLY CYS\n", "sheet 1\nsequence A 1 CYS GLY CYS\nlink A:1:SG A:3:SG\n");
    cr_assert(d.atoms_only_one == 2 && d.atoms_only_other == 0); /* the two HG */
    cr_assert(d.bonds_only_one == 0 && d.bonds_only_other == 1);
    done(&d);
}

Test(molecules, a_chain_of_another_code_is_the_same_chain) {
    tml_difference d = compare(SEQUENCE "limit A:1:HA2 A:3:H 1.8 5\n", "sheet 1\nsequence Q 1 GLY SER VAL GLY\nlimit Q:1:HA2 Q:3:H 1.8 5\n");
    cr_assert(d.atoms_only_one == 0 && d.atoms_only_other == 0 && d.distance_of[TML_SAME] == 1);
    done(&d);
}

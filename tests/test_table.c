/* Tables whose columns the user names: how they are written, what they say, and what is said of mistakes. */
#include <math.h>

#include "given_text.h"

static const char SEQUENCE[] =
    "sheet 1\nsequence A 5 LYS GLY ALA PRO SER VAL\nsequence B 1 LEU HIS\natom P bead\natom Q bead\n";
#define USUAL "chain_1 residue_1 atom_1 chain_2 residue_2 atom_2 lower upper"

static void put(char *path, const char *text) {
    strcpy(path, "/tmp/trammel-test-XXXXXX");
    int file = mkstemp(path);
    cr_assert_geq(file, 0);
    cr_assert_eq(write(file, text, strlen(text)), (ssize_t)strlen(text));
    close(file);
}

/* The sequence above, and a table; old_names is a mapping's name or, with a line end in it, its text. */
static tml_status read_table(const char *text, const char *columns, const char *form, const char *old_names,
                             tml_problem **problem, tml_error *error) {
    char sheet[32], path[32], mapping[32] = "";
    put(sheet, SEQUENCE);
    put(path, text);
    if (old_names != NULL && strchr(old_names, '\n') != NULL) {
        put(mapping, old_names);
        old_names = mapping;
    }
    const char *inputs[] = {sheet};
    tml_table table = {.path = path, .columns = columns, .form = form, .old_names = old_names};
    tml_read_options options = {.tables = &table, .table_count = 1};
    *error = (tml_error){0};
    tml_status status = tml_problem_read(inputs, 1, &options, problem, error);
    unlink(sheet);
    unlink(path);
    if (*mapping != '\0') unlink(mapping);
    return status;
}

static tml_problem *good_with(const char *text, const char *columns, const char *form, const char *old_names) {
    tml_problem *problem = NULL;
    tml_error error;
    tml_status status = read_table(text, columns, form, old_names, &problem, &error);
    cr_assert_eq(status, TML_OK, "%s\n%ld:%ld: %s", text, error.line, error.column, error.message);
    return problem;
}

static tml_problem *good(const char *text, const char *columns, const char *form) {
    return good_with(text, columns, form, NULL);
}

static void refused_with(const char *text, const char *columns, const char *form, const char *old_names, long line, long column,
                         const char *says) {
    tml_problem *problem = NULL;
    tml_error error;
    tml_status status = read_table(text, columns, form, old_names, &problem, &error);
    cr_assert_eq(status, TML_BAD_INPUT, "status %d: %s\n%s", status, columns, text);
    cr_assert_null(problem);
    cr_assert(error.line == line && error.column == column, "%s\nis refused at %ld:%ld: %s", text, error.line, error.column,
              error.message);
    cr_assert_not_null(strstr(error.message, says), "%s\nis refused with: %s", text, error.message);
}

static void refused(const char *text, const char *columns, const char *form, long line, long column, const char *says) {
    refused_with(text, columns, form, NULL, line, column, says);
}

/* The only restraint is between these atoms, with these limits. */
static void holds(const char *text, const char *columns, const char *form, const char *a, const char *b, double lower,
                  double upper) {
    tml_problem *problem = good(text, columns, form);
    const tml_restraints *r = &problem->restraints;
    char name[64];
    cr_assert_eq(r->distance_count, 1, "%d restraints from %s", r->distance_count, text);
    const tml_distance_restraint *d = &r->distances[0];
    const tml_alternative *pair = &r->alternatives[d->first_alternative];
    tml_problem_atom(problem, r->group_atoms[pair->first_a], name, sizeof name);
    cr_assert_str_eq(name, a);
    tml_problem_atom(problem, r->group_atoms[pair->first_b], name, sizeof name);
    cr_assert_str_eq(name, b);
    cr_assert(fabs(d->lower - lower) < 1e-9, "lower %g", d->lower);
    cr_assert(d->upper == upper || fabs(d->upper - upper) < 1e-9, "upper %g", d->upper);
    tml_problem_free(problem);
}

/* ---- how it is written ---- */

Test(table, the_separator_shows_in_the_first_line) {
    holds("A\t5\tHA\tA\t6\tH\t1.8\t3.5\n", USUAL, NULL, "A:5:HA", "A:6:H", 1.8, 3.5);
    holds("A,5,HA,A,6,H,1.8,3.5\n", USUAL, NULL, "A:5:HA", "A:6:H", 1.8, 3.5);
    holds("A;5;HA;A;6;H;1.8;3.5\r\n", USUAL, NULL, "A:5:HA", "A:6:H", 1.8, 3.5);
    holds("  A  5   HA\tA 6 H 1.8 3.5  ", USUAL, "blanks", "A:5:HA", "A:6:H", 1.8, 3.5);
    holds("A 5 HA A 6 H 1.8 3.5\n", USUAL, NULL, "A:5:HA", "A:6:H", 1.8, 3.5);
    holds("A | 5 | HA | A | 6 | H | 1.8 | 3.5\n", USUAL, "bar", "A:5:HA", "A:6:H", 1.8, 3.5);
    holds("A;5;HA;A;6;H;1,8;3,5\n", USUAL, "decimal-comma", "A:5:HA", "A:6:H", 1.8, 3.5);
    holds("A 5 HA A 6 H 1,8 3,5\n", USUAL, "decimal-comma", "A:5:HA", "A:6:H", 1.8, 3.5);
    holds("A 5 HA A 6 H 0.18 0.35\n", USUAL, "nm", "A:5:HA", "A:6:H", 1.8, 3.5);
}

Test(table, quotes_hold_separators_and_quotes) {
    holds("\"A\", \"5\" ,HA,A,6,H,1.8,3.5\n", USUAL, NULL, "A:5:HA", "A:6:H", 1.8, 3.5);
    tml_problem *problem = good("A,5,HA,A,6,H,1.8,3.5,\"a \"\"b\"\", c\"\n", USUAL " id", NULL);
    cr_assert_str_eq(problem->restraints.distances[0].id, "a \"b\", c");
    tml_problem_free(problem);
    refused("A,5,HA,A,6,H,1.8,\"3.5\n", USUAL, NULL, 1, 18, "quote is not closed");
    refused("A,5,HA,A,6,H,1.8,\"3.5\"x\n", USUAL, NULL, 1, 23, "goes on after its quote");
}

Test(table, comments_and_empty_lines_are_passed_over) {
    holds("# one\n\n \t\nA,5,HA,A,6,H,1.8,3.5\n  # two\n", USUAL, NULL, "A:5:HA", "A:6:H", 1.8, 3.5);
    holds("! one\nA,5,HA,A,6,H,1.8,3.5\n", USUAL, "comment=!", "A:5:HA", "A:6:H", 1.8, 3.5);
    refused("# one\nA,5,HA,A,6,H,1.8,3.5\n", USUAL, "comment=none", 1, 6, "ends after 2 fields");
}

Test(table, a_heading_is_told_by_words_where_numbers_belong) {
    holds("c,r,a,c,r,a,low,up\nA,5,HA,A,6,H,1.8,3.5\n", USUAL, NULL, "A:5:HA", "A:6:H", 1.8, 3.5);
    holds("1,2,3,4,5,6,7,8\nA,5,HA,A,6,H,1.8,3.5\n", USUAL, "heading", "A:5:HA", "A:6:H", 1.8, 3.5);
    refused("c,r,a,c,r,a,low,up\nA,5,HA,A,6,H,1.8,3.5\n", USUAL, "no-heading", 1, 13, "low");
    refused("A,5,HA,A,6,H,1.8x,3.5\n", USUAL, NULL, 1, 14, "'1.8x'");
    refused("A,5,HA,A,6,H,1.8,3.5\nc,r,a,c,r,a,low,up\n", USUAL, NULL, 2, 13, "low");
    tml_problem *problem = good("c,r,a,c,r,a,low,up\nA,5,HA,A,6,H,1.8,3.5\n", USUAL, NULL);
    cr_assert(has_note(problem, "heading"));
    tml_problem_free(problem);
}

/* ---- which column holds what ---- */

Test(table, columns_are_found_by_their_headings) {
    const char *columns = "chain=A residue_1@i atom_1@ai residue_2@j atom_2@aj upper@'d max'";
    holds("ai,i,aj,j,x,d max\nHA,5,H,6,17,3.5\n", columns, NULL, "A:5:HA", "A:6:H", 0, 3.5);
    holds("ai,i,aj,j,x,\"d max\"\nHA,5,H,6,17,3.5,\n", columns, NULL, "A:5:HA", "A:6:H", 0, 3.5);
    refused("ai,i,aj,j,x,dmax\nHA,5,H,6,17,3.5\n", columns, NULL, 1, 1, "dmax");
    refused("ai,i,aj,j,j,d max\nHA,5,H,6,17,3.5\n", columns, NULL, 1, 11, "two columns");
    refused("ai,i,aj,j,x,d max\nHA,5,H,6,17\n", columns, NULL, 2, 12, "the heading has 6");
    refused("ai,i,aj,j,x,d max\nHA,5,H,6,17,3.5,4\n", columns, NULL, 2, 17, "the heading has 6");
}

Test(table, values_may_hold_for_all_rows) {
    holds("5 6 8\n", "residue_1 residue_2 upper chain=A atom_1=CA atom_2=C lower=2", NULL, "A:5:CA", "A:6:C", 2, 8);
    holds("5 2 8\n", "residue_1 residue_2 upper chain=A chain_2=B atom_1=CA atom_2=CA", NULL, "A:5:CA", "B:2:CA", 0, 8);
}

Test(table, an_intra_residue_table_needs_one_number) {
    holds("A 5 HA HB2 3\n", "chain residue atom_1 atom_2 upper", NULL, "A:5:HA", "A:5:HB2", 0, 3);
}

Test(table, bare_atoms_need_no_residue) {
    holds("P Q 10 40\n", "atom_1 atom_2 lower upper", NULL, "P", "Q", 10, 40);
}

Test(table, addresses_in_one_column) {
    holds("A:5:HA B:2:HD2 3\n", "address_1 address_2 upper", NULL, "A:5:HA", "B:2:HD2", 0, 3);
    holds("5:HA 6:H 3\n", "address_1 address_2 upper chain=A", NULL, "A:5:HA", "A:6:H", 0, 3);
    holds("P A:6:H 3\n", "address_1 address_2 upper", NULL, "P", "A:6:H", 0, 3);
    tml_problem *problem = good("A:5:HA,A:7:HA\tA:6:H\t3\n", "address_1 address_2 upper", NULL);
    cr_assert_eq(problem->restraints.distances[0].alternative_count, 2);
    tml_problem_free(problem);
    refused("A:5 A:6:H 3\n", "address_1 address_2 upper", NULL, 1, 1, "chain:residue:atom");
    refused("A:5:HA: A:6:H 3\n", "address_1 address_2 upper", NULL, 1, 1, "chain:residue:atom");
    refused("A:5:HA A:6:H 3\n", "address_1 address_2 upper chain=A", NULL, 1, 1, "residue:atom");
}

Test(table, further_columns_are_passed_over_only_where_that_is_said) {
    holds("A 5 HA A 6 H 1.8 3.5 x y\n", USUAL " ...", NULL, "A:5:HA", "A:6:H", 1.8, 3.5);
    holds("x A 5 HA A 6 H 1.8 y 3.5\n", "- chain_1 residue_1 atom_1 chain_2 residue_2 atom_2 lower - upper", NULL, "A:5:HA",
          "A:6:H", 1.8, 3.5);
    refused("A 5 HA A 6 H 1.8 3.5 x y\n", USUAL, NULL, 1, 22, "the row has 10 fields apart by blanks; the columns name 8");
    refused("A 5 HA A 6 H 1.8\n", USUAL, NULL, 1, 17, "the row ends after 7 fields");
}

Test(table, words_for_columns_are_checked) {
    static const struct { const char *columns, *form, *says; } CASES[] = {
        {"", NULL, "none is named"},
        {"chain_1 residue_1 atom_1 chain_2 residue_2 atom_2 lowr upper", NULL, "the nearest: lower"},
        {"address_1 address_2 upper upper", NULL, "named twice"},
        {"address_1 address_2 upper=", NULL, "a value is expected"},
        {"address_1 address_2 upper@", NULL, "a heading is expected"},
        {"address_1 address_2 upper@'x", NULL, "quote is not closed"},
        {"address_1 address_2 ... upper", NULL, "comes last"},
        {"address_1 upper", NULL, "atom_2 or address_2 is missing"},
        {"address_1 address_2 address_3 lower upper", NULL, "atom_4 or address_4 is missing"},
        {"address_1 atom_1 address_2 upper", NULL, "need no column of their own"},
        {"residue_1 atom_1 address_2 upper", NULL, "chain_1"},
        {"chain_1 atom_1 address_2 upper", NULL, "residue_1 is missing"},
        {"address_1 address_2", NULL, "lower, upper or target is missing"},
        {"address_1 address_2 target upper", NULL, "either lower and upper, or target"},
        {"address_1 address_2 target", NULL, "target needs error"},
        {"address_1 address_2 upper error", NULL, "need target"},
        {"address_1 address_2 target error minus", NULL, "either error, or minus and plus"},
        {"address_1 address_2 address_3 address_4 upper", NULL, "needs both lower and upper"},
        {"address_1 address_2 address_3 address_4 target minus", NULL, "needs both minus and plus"},
        {"address_1 address_2 address_3 address_4 target error", "nm", "nm is for distances"},
        {"residue angle target error", NULL, "chain=A"},
        {"chain residue atom_1 angle target error", NULL, "not with atoms"},
        {"atom_5 atom_2 upper", NULL, "no column is called so"},
        {"address_1 address_2 upper", "semicolons", "the nearest: semicolon"},
        {"address_1 address_2 upper", "tab comma", "twice"},
        {"address_1 address_2 upper", "comma decimal-comma", "cannot be both"},
        {"address_1 address_2 upper@u", "no-heading", "needs a heading line"},
    };
    for (size_t i = 0; i < sizeof CASES / sizeof *CASES; i++)
        refused("A:5:HA A:6:H 3\n", CASES[i].columns, CASES[i].form, 0, 0, CASES[i].says);
}

/* ---- what the rows say ---- */

Test(table, the_residue_s_name_must_be_the_sequence_s) {
    const char *columns = "chain=A residue_name_1 residue_1 atom_1 residue_name_2 residue_2 atom_2 upper";
    holds("LYS 5 HA Gly 6 H 3.5\n", columns, NULL, "A:5:HA", "A:6:H", 0, 3.5);
    holds("K 5 HA G 6 H 3.5\n", columns, NULL, "A:5:HA", "A:6:H", 0, 3.5);
    holds("- 5 HA - 6 H 3.5\n", columns, NULL, "A:5:HA", "A:6:H", 0, 3.5);
    refused("LYS 5 HA ALA 6 H 3.5\n", columns, NULL, 1, 10, "found 'ALA' where A:6 is GLY in the sequence");
    refused("K 5 HA A 6 H 3.5\n", columns, NULL, 1, 8, "found 'A' where A:6 is GLY");
    const char *joined = "chain=A residue_1 atom_1 residue_2 atom_2 upper";
    holds("LYS5 HA G6 H 3.5\n", joined, NULL, "A:5:HA", "A:6:H", 0, 3.5);
    refused("LYS5 HA A6 H 3.5\n", joined, NULL, 1, 9, "found 'A' where A:6 is GLY");
    refused("A:ARG5:HA A:6:H 3.5\n", "address_1 address_2 upper", NULL, 1, 1, "found 'ARG' where A:5 is LYS");
}

Test(table, names_that_are_not_there_are_listed_with_the_nearest) {
    tml_problem *problem = good("A 5 HB1 A 6 H 1.8 3.5\nA 50 HA A 6 H 1.8 3.5\n", USUAL, NULL);
    cr_assert_eq(problem->restraints.distance_count, 0);
    cr_assert_eq(problem->restraints.unmapped_count, 2);
    cr_assert_not_null(strstr(problem->restraints.unmapped[0].reason, "A:5:HB1: no such atom in LYS; it has HB2, HB3"));
    cr_assert_eq(problem->restraints.unmapped[1].place.line, 2);
    tml_problem_free(problem);
}

Test(table, open_limits_are_dashes_or_empty) {
    holds("A,5,HA,A,6,H,-,3.5\n", USUAL, NULL, "A:5:HA", "A:6:H", 0, 3.5);
    holds("A,5,HA,A,6,H,,3.5\n", USUAL, NULL, "A:5:HA", "A:6:H", 0, 3.5);
    holds("A,5,HA,A,6,H,1.8,?\n", USUAL, NULL, "A:5:HA", "A:6:H", 1.8, INFINITY);
    holds("A,5,HA,A,6,H,1.8,.\n", USUAL, NULL, "A:5:HA", "A:6:H", 1.8, INFINITY);
    tml_problem *problem = good("A,5,HA,A,6,H,-,-\n", USUAL, NULL);
    cr_assert_eq(problem->restraints.distance_count, 0);
    cr_assert(has_note(problem, "has no limits"));
    tml_problem_free(problem);
}

Test(table, targets_have_errors_below_and_above) {
    const char *both = "address_1 address_2 target minus plus", *one = "address_1 address_2 target error";
    holds("A:5:HA A:6:H 4 2.2 1\n", both, NULL, "A:5:HA", "A:6:H", 1.8, 5);
    holds("A:5:HA A:6:H 4 - 1\n", both, NULL, "A:5:HA", "A:6:H", 0, 5);
    holds("A:5:HA A:6:H 4 1 -\n", both, NULL, "A:5:HA", "A:6:H", 3, INFINITY);
    holds("A:5:HA A:6:H 4 0.5\n", one, NULL, "A:5:HA", "A:6:H", 3.5, 4.5);
    holds("A:5:HA A:6:H 4\n", "address_1 address_2 target error=0.5", NULL, "A:5:HA", "A:6:H", 3.5, 4.5);
    tml_problem *problem = good("A:5:HA A:6:H 1 3\n", one, NULL);
    cr_assert_eq(problem->restraints.distances[0].lower, 0);
    cr_assert(has_note(problem, "lower limit is 0"));
    tml_problem_free(problem);
    refused("A:5:HA A:6:H 4 -1\n", one, NULL, 1, 16, "an error, 0 or more");
    refused("A:5:HA A:6:H -4 1\n", one, NULL, 1, 14, "never negative");
}

Test(table, numbers_are_numbers) {
    static const char *const BAD[] = {"nan", "inf", "0x10", "1e999", "3.5A", "3.5(2)", "3..5", "--3", "1 000", "5,0"};
    for (size_t i = 0; i < sizeof BAD / sizeof *BAD; i++) {
        char text[80];
        snprintf(text, sizeof text, "A:5:HA;A:6:H;1\nA:5:HA;A:6:H;%s\n", BAD[i]);
        refused(text, "address_1 address_2 upper", NULL, 2, 14, BAD[i]);
    }
    refused("A:5:HA;A:6:H;1\nA:5:HA;A:6:H;5,0\n", "address_1 address_2 upper", NULL, 2, 14, "decimal-comma");
    refused("A:5:HA;A:6:H;1.5\n", "address_1 address_2 upper", "decimal-comma", 1, 14, "decimal comma");
    refused("A:5:HA A:6:H 4 3\n", "address_1 address_2 lower upper", NULL, 1, 16, "not below the lower");
    refused("A:5:HA A:6:H -4 3\n", "address_1 address_2 lower upper", NULL, 1, 14, "never negative");
    refused("A:5:HA A:6:H 4 -1\n", "address_1 address_2 upper weight", NULL, 1, 16, "a weight, 0 or more");
}

Test(table, equal_ids_are_alternatives_and_rows_without_one_stand_alone) {
    tml_problem *problem = good("A:5:HA A:6:H 3 n1\nA:5:HA A:7:H 3 n1\nA:5:HA A:9:H 3 -\nA:5:HA A:9:H 3 -\n",
                                "address_1 address_2 upper id", NULL);
    cr_assert_eq(problem->restraints.distance_count, 3);
    cr_assert_eq(distance_by_id(problem, "n1")->alternative_count, 2);
    cr_assert_eq(distance_by_id(problem, "row4")->alternative_count, 1);
    cr_assert_str_eq(problem->restraints.distances[0].list, "table");
    tml_problem_free(problem);
    problem = good("A:5:HA A:6:H 3 2.5 mine\n", "address_1 address_2 upper weight list", NULL);
    cr_assert_eq(problem->restraints.distances[0].weight, 2.5);
    cr_assert_str_eq(problem->restraints.distances[0].list, "mine");
    tml_problem_free(problem);
}

/* ---- dihedrals ---- */

static void dihedral_is(const char *text, const char *columns, const char *const atoms[4], double lower, double width) {
    tml_problem *problem = good(text, columns, NULL);
    char name[64];
    cr_assert_eq(problem->restraints.dihedral_count, 1, "%s", text);
    const tml_dihedral_interval *interval = &problem->restraints.intervals[0];
    for (int k = 0; k < 4; k++) {
        tml_problem_atom(problem, interval->atoms[k], name, sizeof name);
        cr_assert_str_eq(name, atoms[k]);
    }
    const double degrees = 180 / 3.14159265358979323846;
    cr_assert(fabs(interval->lower * degrees - lower) < 1e-6, "lower %g", interval->lower * degrees);
    cr_assert(fabs((interval->upper - interval->lower) * degrees - width) < 1e-6);
    tml_problem_free(problem);
}

/* Names and atoms of the angles: IUPAC-IUB, Biochemistry 9 (1970) 3471. */
Test(table, dihedrals_by_name) {
    const char *named = "chain residue residue_name angle target error";
    dihedral_is("A 6 GLY PHI -60 20\n", named, (const char *[]){"A:5:C", "A:6:N", "A:6:CA", "A:6:C"}, -80, 40);
    dihedral_is("A 6 G psi -45 0\n", named, (const char *[]){"A:6:N", "A:6:CA", "A:6:C", "A:7:N"}, -45, 0);
    dihedral_is("A 7 ALA Omega 180 5\n", named, (const char *[]){"A:7:CA", "A:7:C", "A:8:N", "A:8:CA"}, 175, 10);
    dihedral_is("A 5 LYS CHI4 180 30\n", named, (const char *[]){"A:5:CG", "A:5:CD", "A:5:CE", "A:5:NZ"}, 150, 60);
    dihedral_is("A 9 SER CHI1 60 30\n", named, (const char *[]){"A:9:N", "A:9:CA", "A:9:CB", "A:9:OG"}, 30, 60);
    dihedral_is("B 2 HIS chi2 -90 30\n", named, (const char *[]){"B:2:CA", "B:2:CB", "B:2:CG", "B:2:ND1"}, -120, 60);
    dihedral_is("A 6 PHI 170 -170\n", "chain residue angle lower upper", (const char *[]){"A:5:C", "A:6:N", "A:6:CA", "A:6:C"},
                170, 20);
    refused("A 6 GLY PHY -60 20\n", named, NULL, 1, 9, "the nearest: PHI");
    refused("A 6 ALA PHI -60 20\n", named, NULL, 1, 5, "A:6 is GLY in the sequence");
}

Test(table, angles_that_a_residue_lacks_are_unmapped) {
    tml_problem *problem = good("A 5 PHI -60 20\nA 10 PSI -45 20\nA 7 CHI1 60 20\nA 9 CHI2 60 20\nC 1 PHI -60 20\n",
                                "chain residue angle target error", NULL);
    cr_assert_eq(problem->restraints.dihedral_count, 0);
    cr_assert_eq(problem->restraints.unmapped_count, 5);
    tml_problem_free(problem);
}

Test(table, dihedrals_by_four_atoms) {
    dihedral_is("A:5:C A:6:N A:6:CA A:6:C -80 -40\n", "address_1 address_2 address_3 address_4 lower upper",
                (const char *[]){"A:5:C", "A:6:N", "A:6:CA", "A:6:C"}, -80, 40);
    refused("A:5:C,A:5:CA\tA:6:N\tA:6:CA\tA:6:C\t-80\t-40\n", "address_1 address_2 address_3 address_4 lower upper", NULL, 1, 1,
            "one atom");
}

/* ---- old names ---- */

static void renamed(const char *address, const char *mapping, const char *now) {
    char text[80], name[64];
    snprintf(text, sizeof text, "%s P 3\n", address);
    tml_problem *problem = good_with(text, "address_1 address_2 upper", NULL, mapping);
    cr_assert_eq(problem->restraints.distance_count, 1, "%s: %s", address,
                 problem->restraints.unmapped_count > 0 ? problem->restraints.unmapped[0].reason : "");
    tml_problem_atom(problem, problem->restraints.group_atoms[0], name, sizeof name);
    cr_assert_str_eq(name, now);
    cr_assert(has_note(problem, strcmp(address, now) == 0 ? "0 of 2 atom names changed"
                                                          : "1 of 2 atom names changed, the first of them"));
    tml_problem_free(problem);
}

/* Pairs of hydrogens on one carbon are 2 and 3, amide hydrogens H: Markley et al., Pure Appl. Chem. 70 (1998) 117. */
Test(table, old_names_change_where_a_mapping_is_switched_on) {
    renamed("A:5:HB1", "hydrogens-1-2", "A:5:HB2");
    renamed("A:5:HB2", "hydrogens-1-2", "A:5:HB3");
    renamed("A:5:HB1", "hydrogens-1-2-crossed", "A:5:HB3");
    renamed("A:5:HB2", "hydrogens-1-2-crossed", "A:5:HB2");
    renamed("A:6:HA1", "hydrogens-1-2", "A:6:HA2");
    renamed("A:6:HN", "hydrogens-1-2", "A:6:H");
    renamed("A:5:1HB", "hydrogens-1-2", "A:5:HB2");
    renamed("A:7:1HB", "hydrogens-1-2", "A:7:HB1");
    renamed("A:7:HB1", "hydrogens-1-2", "A:7:HB1");
    renamed("A:10:2HG1", "hydrogens-1-2", "A:10:HG12");
    renamed("A:7:HX", "old-names 1\nALA HX HA # mine\n* HY H\n", "A:7:HA");
    renamed("A:7:HY", "old-names 1\nALA HX HA # mine\n* HY H\n", "A:7:H");
}

Test(table, old_and_present_names_do_not_mix) {
    const char *columns = "address_1 address_2 upper";
    refused_with("P A:5:HB1 3\nP A:5:HB3 3\n", columns, NULL, "hydrogens-1-2", 2, 3, "old and present names are mixed");
    renamed("A:5:HB3", "hydrogens-1-2-crossed", "A:5:HB3"); /* there it can only be itself */
}

Test(table, without_a_mapping_no_name_changes) {
    tml_problem *problem = good("A:5:HB1 P 3\nA:7:HB1 P 3\n", "address_1 address_2 upper", NULL);
    cr_assert_eq(problem->restraints.unmapped_count, 1);
    cr_assert_not(has_note(problem, "old names"));
    tml_problem_free(problem);
}

Test(table, mappings_are_checked) {
    static const struct { const char *mapping; long line, column; const char *says; } CASES[] = {
        {"ALA HX HA\n", 1, 1, "'old-names 1'"},
        {"old-names 1\n\nALA HX\n", 3, 1, "two words"},
        {"old-names 1\nALA HX HA HB1\n", 2, 1, "more than three"},
        {"old-names 1\nALA HX HA\n ALA HX HB1\n", 3, 6, "has a new name already"},
        {"# nothing\n", 0, 0, "empty"},
    };
    for (size_t i = 0; i < sizeof CASES / sizeof *CASES; i++)
        refused_with("P Q 3\n", "atom_1 atom_2 upper", NULL, CASES[i].mapping, CASES[i].line, CASES[i].column, CASES[i].says);
}

Test(table, an_empty_table_is_an_error) {
    refused("", USUAL, NULL, 0, 0, "no rows");
    refused("# nothing\n", USUAL, NULL, 0, 0, "no rows");
    refused("c,r,a,c,r,a,low,up\n", USUAL, NULL, 0, 0, "no rows");
}

Test(table, old_names_of_other_inputs) {
    char sheet[32];
    put(sheet, "sheet 1\nsequence A 1 LYS GLY\nlimit A:1:HB1 A:2:HN 1.8 5\n");
    const char *inputs[] = {sheet};
    tml_read_options options = {.old_names = "hydrogens-1-2"};
    tml_problem *problem = NULL;
    tml_error error = {0};
    tml_status status = tml_problem_read(inputs, 1, &options, &problem, &error);
    unlink(sheet);
    cr_assert_eq(status, TML_OK, "%s", error.message);
    cr_assert(has_note(problem, "2 of 2 atom names changed, the first of them HB1 of A:1 (LYS) to HB2"));
    cr_assert_eq(problem->restraints.group_atoms[0], atom_at(problem, "A", "1", "HB2"));
    tml_problem_free(problem);
}

/* The lexer by the rules of STAR (Hall 1991) and CIF 1.1 (International Tables for Crystallography G, chapter 2.2), typed from
 * memory; `stop_` as NEF and NMR-STAR use it. */
#include <criterion/criterion.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "input/star.h"

static tml_star parse_good(const char *text) {
    tml_star star;
    tml_error error = {0};
    cr_assert_eq(tml_star_parse(text, strlen(text), "text", &star, &error), TML_OK, "%ld:%ld %s", error.line, error.column, error.message);
    return star;
}

static void parse_bad(const char *text, long line, long column) {
    tml_star star;
    tml_error error = {0};
    cr_assert_eq(tml_star_parse(text, strlen(text), "text", &star, &error), TML_BAD_INPUT, "%s", text);
    cr_assert_eq(error.line, line, "%s: line %ld, %s", text, error.line, error.message);
    cr_assert_eq(error.column, column, "%s: column %ld, %s", text, error.column, error.message);
    tml_star_clear(&star);
}

static void expect(const tml_star_value *value, const char *text) {
    cr_assert_eq((size_t)value->length, strlen(text), "'%.*s' is not '%s'", value->length, value->text, text);
    cr_assert_eq(memcmp(value->text, text, strlen(text)), 0, "'%.*s' is not '%s'", value->length, value->text, text);
}

Test(star, a_quote_ends_only_before_a_blank) {
    tml_star star = parse_good("data_a\n_x.a 'O5''_x'\n_x.b \"5'-end \"quoted\"\n_x.c 'it's'\n");
    cr_assert_eq(star.item_count, 3);
    expect(&star.items[0].value, "O5''_x");
    expect(&star.items[1].value, "5'-end \"quoted");
    tml_star_clear(&star);
}

Test(star, text_between_semicolons_keeps_its_lines) {
    tml_star star = parse_good("data_a\n_x.a\n;first\n second; not the end\n;\n_x.b 1\n");
    expect(&star.items[0].value, "first\n second; not the end");
    expect(&star.items[1].value, "1");
    cr_assert_eq(star.items[1].tag.line, 6);
    tml_star_clear(&star);
}

Test(star, a_semicolon_within_a_line_is_an_ordinary_word) {
    tml_star star = parse_good("data_a\n_x.a ;b\n");
    expect(&star.items[0].value, ";b");
    tml_star_clear(&star);
}

Test(star, null_values_are_bare_and_quoted_ones_are_text) {
    tml_star star = parse_good("data_a\n_x.a .\n_x.b ?\n_x.c '.'\n_x.d ''\n");
    cr_assert(tml_star_is_null(&star.items[0].value));
    cr_assert(tml_star_is_null(&star.items[1].value));
    cr_assert_not(tml_star_is_null(&star.items[2].value));
    cr_assert_not(tml_star_is_null(&star.items[3].value));
    tml_star_clear(&star);
}

Test(star, loops_end_at_stop_at_a_tag_at_a_loop_and_at_a_frame) {
    tml_star star = parse_good("data_a loop_ _p.a _p.b 1 2 3 4 stop_ loop_ _q.a 5 loop_ _r.a 6 _s.a 7 save_f loop_ _t.a 8 save_ _u.a 9");
    cr_assert_eq(star.loop_count, 4);
    cr_assert_eq(star.loops[0].row_count, 2);
    cr_assert_eq(star.loops[3].row_count, 1);
    cr_assert_eq(star.frame_count, 3);
    cr_assert(star.frames[1].is_save);
    expect(&star.frames[1].name, "f");
    cr_assert_not(star.frames[2].is_save);
    expect(&star.frames[2].name, "a");
    const tml_star_loop *loop = tml_star_find_loop(&star, &star.frames[0], "_P");
    cr_assert_not_null(loop);
    cr_assert_eq(tml_star_column(&star, loop, "B"), 1);
    cr_assert_eq(tml_star_column(&star, loop, "c"), -1);
    expect(tml_star_at(&star, loop, 1, 0), "3");
    cr_assert(tml_star_is_null(tml_star_at(&star, loop, 1, -1)));
    tml_star_clear(&star);
}

Test(star, comments_line_ends_and_a_byte_order_mark_do_not_matter) {
    tml_star star = parse_good("\xef\xbb\xbf# head\r\ndata_a # block\r\n_x.a 1#2 # comment\r\n_x.b\r\n;text\r\n;\r\n# end without a newline");
    expect(&star.items[0].value, "1#2");
    expect(&star.items[1].value, "text");
    tml_star_clear(&star);
}

Test(star, keywords_in_any_case_but_quoted_ones_are_values) {
    tml_star star = parse_good("DATA_a LOOP_ _x.a 'loop_' \"data_b\" Stop_ _y.a 'save_'");
    cr_assert_eq(star.loops[0].row_count, 2);
    expect(&star.items[0].value, "save_");
    tml_star_clear(&star);
}

Test(star, errors_name_line_and_column) {
    parse_bad("data_a\n_x.a 'open\n", 2, 6);
    parse_bad("data_a\n_x.a\n;open\n", 3, 1);
    parse_bad("data_a\nloop_ _x.a _x.b\n1 2 3\n", 2, 1);
    parse_bad("data_a\n  value\n", 2, 3);
    parse_bad("_x.a 1\n", 1, 1);
    parse_bad("data_a\n_x.a\n_x.b 1\n", 3, 1);
    parse_bad("data_a\nsave_f\n_x.a 1\n", 4, 1);
    parse_bad("data_a\nsave_f\nsave_g\n", 3, 1);
    parse_bad("data_a\nsave_\n", 2, 1);
    parse_bad("data_a\nloop_\n1 2\n", 3, 1);
}

Test(star, a_value_of_a_megabyte_is_read_whole) {
    enum { SIZE = 1 << 20 };
    char *text = malloc(SIZE + 32);
    cr_assert_not_null(text);
    int head = sprintf(text, "data_a _x.a ");
    memset(text + head, 'z', SIZE);
    text[head + SIZE] = '\0';
    tml_star star = parse_good(text);
    cr_assert_eq(star.items[0].value.length, SIZE);
    tml_star_clear(&star);
    free(text);
}

Test(star, numbers_are_decimal_and_finite) {
    static const struct { const char *text; bool good; double value; } CASES[] = {
        {"1.5", true, 1.5}, {"-3", true, -3}, {"+.5", true, 0.5}, {"1e2", true, 100}, {"1.54(2)", true, 1.54}, {"nan", false, 0},
        {"inf", false, 0}, {"0x10", false, 0}, {"1e999", false, 0}, {"1.2.3", false, 0}, {"-", false, 0}, {"1(", false, 0}, {".", false, 0},
    };
    for (size_t i = 0; i < sizeof CASES / sizeof *CASES; i++) {
        tml_star_value value = {.text = CASES[i].text, .length = (int32_t)strlen(CASES[i].text)};
        double out = 0;
        cr_assert_eq(tml_star_number(&value, &out), CASES[i].good, "%s", CASES[i].text);
        if (CASES[i].good) cr_assert_float_eq(out, CASES[i].value, 1e-12, "%s", CASES[i].text);
    }
}

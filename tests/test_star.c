/* The lexer by the rules of STAR (Hall 1991) and CIF 1.1 (International Tables for Crystallography G, chapter 2.2), typed from
 * memory; `stop_` as NEF and NMR-STAR use it. */
#include <criterion/criterion.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/clock.h"
#include "base/memory.h"
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

/* As the Protein Data Bank writes a table of one row, such as a single disulfide. */
Test(star, items_of_a_category_are_a_table_of_one_row) {
    tml_star star = parse_good("data_a _p.a 1 _pq.a 2 _P.b '3 4' loop_ _q.a 5 6 data_b _p.a 7");
    tml_star_loop table;
    bool found;
    tml_error error = {0};
    cr_assert_eq(tml_star_find_table(&star, &star.frames[0], "_p", &table, &found, &error), TML_OK);
    cr_assert(found);
    cr_assert_eq(table.tag_count, 2);
    cr_assert_eq(table.row_count, 1);
    expect(tml_star_at(&star, &table, 0, tml_star_column(&star, &table, "a")), "1");
    expect(tml_star_at(&star, &table, 0, tml_star_column(&star, &table, "b")), "3 4");
    cr_assert_eq(tml_star_find_table(&star, &star.frames[0], "_q", &table, &found, &error), TML_OK);
    cr_assert(found);
    cr_assert_eq(table.row_count, 2);
    cr_assert_eq(tml_star_find_table(&star, &star.frames[1], "_q", &table, &found, &error), TML_OK);
    cr_assert_not(found);
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

/* The only item's value in a block of its own. */
static void expect_value(const char *written, const char *text, char quote) {
    char document[512];
    snprintf(document, sizeof document, "data_x\n_a.b %s\n_c.d end\n", written);
    tml_star star = parse_good(document);
    cr_assert_eq(star.item_count, 2, "%s", written);
    const tml_star_value *value = &star.items[0].value;
    expect(value, text);
    cr_assert_eq(value->quote, quote, "%s", written);
    tml_star_clear(&star);
}

static void expect_error(const char *text, long line, long column, const char *says) {
    tml_star star;
    tml_error error = {0};
    cr_assert_eq(tml_star_parse(text, strlen(text), "t.cif", &star, &error), TML_BAD_INPUT, "%s", text);
    cr_assert_str_eq(error.file, "t.cif");
    cr_assert_eq(error.line, line, "%s: line %ld: %s", text, error.line, error.message);
    cr_assert_eq(error.column, column, "%s: column %ld: %s", text, error.column, error.message);
    cr_assert(strstr(error.message, says) != NULL, "%s", error.message);
    tml_star_clear(&star);
}

static bool is(const tml_star_value *value, const char *text) {
    return (size_t)value->length == strlen(text) && memcmp(value->text, text, strlen(text)) == 0;
}

/* ---- values ---- */

Test(star, a_quote_ends_only_before_a_blank_in_every_form) {
    expect_value("'a dog's life'", "a dog's life", '\'');
    expect_value("\"5'-end\"", "5'-end", '"');
    expect_value("'O5''", "O5'", '\'');
    expect_value("'\"'", "\"", '\'');
    expect_value("''", "", '\'');
    expect_value("'tab'\t", "tab", '\'');
    expect_value("'loop_'", "loop_", '\'');
}

Test(star, a_quote_inside_a_bare_word_is_part_of_it) {
    expect_value("O5'", "O5'", 0);
    expect_value("H5''", "H5''", 0);
    expect_value("a\"b\"", "a\"b\"", 0);
}

Test(star, a_number_sign_inside_a_word_or_quote_starts_no_comment) {
    expect_value("a#b", "a#b", 0);
    expect_value("'a #b' # but this does", "a #b", '\'');
    expect_value("# first a comment\n  late", "late", 0);
}

Test(star, text_between_semicolons_keeps_its_lines_in_every_form) {
    expect_value("\n;first\n second; not the end\n;", "first\n second; not the end", ';');
    expect_value("\n;\n;", "", ';');
    expect_value("\n;one\n\n;", "one\n", ';');
    expect_value("\n;loop_ data_ # all text\n;", "loop_ data_ # all text", ';');
    expect_value("\n;dos\r\nlines\r\n;", "dos\r\nlines", ';');
}

Test(star, a_semicolon_away_from_the_line_start_is_a_word) {
    expect_value(" ;word", ";word", 0);
}

Test(star, nulls_are_bare_points_and_question_marks_only) {
    static const struct { const char *written; bool null; } CASES[] = {{".", true}, {"?", true}, {"'.'", false}, {"\"?\"", false},
                                                                       {"\n;.\n;", false}, {"..", false}, {".5", false}, {"?x", false}};
    for (size_t i = 0; i < sizeof CASES / sizeof *CASES; i++) {
        char document[64];
        snprintf(document, sizeof document, "data_x\n_a.b %s\n", CASES[i].written);
        tml_star star = parse_good(document);
        cr_assert_eq(tml_star_is_null(&star.items[0].value), CASES[i].null, "%s", CASES[i].written);
        tml_star_clear(&star);
    }
}

Test(star, reserved_words_are_told_without_case) {
    tml_star star = parse_good("DATA_x\nLoop_ _a.b\n1 2\nSTOP_\nSave_f _c.d 3 SAVE_\n");
    cr_assert_eq(star.loop_count, 1);
    cr_assert_eq(star.loops[0].row_count, 2);
    cr_assert_eq(star.frame_count, 3);
    cr_assert(star.frames[1].is_save && is(&star.frames[1].name, "f"));
    tml_star_clear(&star);
}

/* ---- frames and loops ---- */

Test(star, frames_hold_their_items_and_loops) {
    tml_star star = parse_good("# NEF\ndata_one\n_x.y 0\nsave_f1\n_f.a 1\n_f.b 'two'\nloop_ _g.p _g.q\n1 2 3 4 stop_\nloop_\n_h.r\n5\nstop_\nsave_\n"
                         "save_f2 loop_ _g.p _g.q stop_ save_\n_x.z 9\ndata_two _x.y 8");
    cr_assert_eq(star.frame_count, 6);
    static const struct { const char *name; bool save; size_t items, loops; } FRAMES[] = {
        {"one", false, 1, 0}, {"f1", true, 2, 2}, {"one", false, 0, 0}, {"f2", true, 0, 1}, {"one", false, 1, 0}, {"two", false, 1, 0}};
    for (size_t i = 0; i < star.frame_count; i++) {
        cr_assert(is(&star.frames[i].name, FRAMES[i].name), "frame %zu", i);
        cr_assert_eq(star.frames[i].is_save, FRAMES[i].save);
        cr_assert_eq(star.frames[i].item_count, FRAMES[i].items, "frame %zu", i);
        cr_assert_eq(star.frames[i].loop_count, FRAMES[i].loops, "frame %zu", i);
    }
    cr_assert_eq(star.loops[0].row_count, 2);
    cr_assert(is(tml_star_at(&star, &star.loops[0], 1, 0), "3"));
    cr_assert_eq(star.loops[2].row_count, 0);
    tml_star_clear(&star);
}

Test(star, every_token_knows_its_line_and_column) {
    tml_star star = parse_good("data_x\r\n\r\n  _a.b\t'v'\r\nloop_ _c.d _c.e\r\n1  22\r\n\n;text\r\nof two lines\r\n; 333\n");
    cr_assert_eq(star.items[0].tag.line, 3);
    cr_assert_eq(star.items[0].tag.column, 3);
    cr_assert_eq(star.items[0].value.line, 3);
    cr_assert_eq(star.items[0].value.column, 8);
    static const int32_t PLACES[4][2] = {{5, 1}, {5, 4}, {7, 1}, {9, 3}};
    for (size_t i = 0; i < 4; i++) {
        cr_assert_eq(star.values[i].line, PLACES[i][0], "value %zu is on line %d", i, star.values[i].line);
        cr_assert_eq(star.values[i].column, PLACES[i][1], "value %zu is in column %d", i, star.values[i].column);
    }
    tml_star_clear(&star);
}

Test(star, the_last_line_needs_no_end) {
    tml_star star = parse_good("data_x _a.b 'v'");
    cr_assert(is(&star.items[0].value, "v"));
    tml_star_clear(&star);
    star = parse_good("data_x loop_ _a.b 1 2 # end");
    cr_assert_eq(star.loops[0].row_count, 2);
    tml_star_clear(&star);
}

Test(star, an_empty_text_is_an_empty_document) {
    static const char *const TEXTS[] = {"", "\n \t\r\n", "# only a comment", "\xef\xbb\xbf"};
    for (size_t i = 0; i < sizeof TEXTS / sizeof *TEXTS; i++) {
        tml_star star = parse_good(TEXTS[i]);
        cr_assert_eq(star.frame_count, 0);
        tml_star_clear(&star);
    }
}

/* ---- look-ups ---- */

Test(star, categories_and_columns_are_found_without_case_and_only_whole) {
    tml_star star = parse_good("data_x loop_ _Nef_Sequence_more.index 1 loop_ _NEF_sequence.Index _nef_sequence.Chain_Code 1 A 2 B\n_a.B v");
    const tml_star_loop *loop = tml_star_find_loop(&star, &star.frames[0], "_nef_sequence");
    cr_assert_not_null(loop);
    cr_assert_eq(loop, &star.loops[1]);
    int column = tml_star_column(&star, loop, "chain_code");
    cr_assert_eq(column, 1);
    cr_assert_eq(tml_star_column(&star, loop, "chain"), -1);
    cr_assert(is(tml_star_at(&star, loop, 1, column), "B"));
    cr_assert(tml_star_is_null(tml_star_at(&star, loop, 1, -1)));
    cr_assert_not_null(tml_star_find_item(&star, &star.frames[0], "_A.b"));
    cr_assert_null(tml_star_find_item(&star, &star.frames[0], "_A.bc"));
    tml_star_clear(&star);
}

/* ---- numbers ---- */

/* CIF 1.1, <Numeric>: a sign, digits, a point, an exponent, and a standard uncertainty in brackets. */
Test(star, numbers_are_as_in_cif) {
    static const struct { const char *text; double value; } GOOD[] = {{"1", 1}, {"-2.5", -2.5}, {"+.5", 0.5}, {"5.", 5}, {"1e3", 1000},
                                                                      {"1.54(2)", 1.54}, {"12(3)", 12}, {"-1.5E-2", -0.015}};
    static const char *const BAD[] = {".", "?", "nan", "inf", "-inf", "NAN", "1e999", "0x10", "1.5x", "1 2", "1.5(", "1.5()x", "(2)", "e5", "--1", "1,5", ""};
    double number;
    for (size_t i = 0; i < sizeof GOOD / sizeof *GOOD; i++) {
        tml_star_value value = {.text = GOOD[i].text, .length = (int32_t)strlen(GOOD[i].text)};
        cr_assert(tml_star_number(&value, &number), "%s", GOOD[i].text);
        cr_assert_float_eq(number, GOOD[i].value, 1e-15, "%s gave %g", GOOD[i].text, number);
    }
    for (size_t i = 0; i < sizeof BAD / sizeof *BAD; i++) {
        tml_star_value value = {.text = BAD[i], .length = (int32_t)strlen(BAD[i])};
        cr_assert_not(tml_star_number(&value, &number), "%s gave %g", BAD[i], number);
    }
}

/* ---- bad texts ---- */

Test(star, errors_name_line_column_and_what_was_expected) {
    expect_error("_a.b 1\n", 1, 1, "a data block");
    expect_error("word\n", 1, 1, "found 'word'");
    expect_error("data_x\n_a.b\n", 3, 1, "the file ends where a tag's value");
    expect_error("data_x\n_a.b _c.d 1\n", 2, 6, "found '_c.d' where a tag's value");
    expect_error("data_x\n_a.b 'open\n'\n", 2, 6, "quote");
    expect_error("data_x\n_a.b \"open", 2, 6, "quote");
    expect_error("data_x\n_a.b\n;never ended\n", 3, 1, "semicolon");
    expect_error("data_x\nloop_\n1 2\n", 3, 1, "a loop's first tag");
    expect_error("data_x\n  loop_\n_a.b _a.c\n1 2 3\n", 2, 3, "2 tags and 3 values");
    expect_error("data_x\nsave_f\n_a.b 1\n", 4, 1, "the end of the save frame");
    expect_error("data_x\nsave_f\nsave_g\nsave_\n", 3, 1, "the end of the save frame");
    expect_error("data_x\nsave_f\ndata_y\n", 3, 1, "the end of the save frame");
    expect_error("data_x\nsave_\n", 2, 1, "where a data block");
    expect_error("save_f\nsave_\n", 1, 1, "a data block");
    expect_error("data_x\nstop_\n", 2, 1, "found 'stop_'");
    expect_error("data_x\n_a.b 1 2\n", 2, 8, "found '2'");
}

Test(star, every_beginning_of_a_document_is_read_or_refused) {
    const char *text = "data_x\nsave_f\n_a.b 'v w'\nloop_ _c.d _c.e\n1 .\n;t\n;\n\"u\"\nstop_ save_\n";
    int refused = 0;
    for (size_t length = 0; length <= strlen(text); length++) {
        char *part = strndup(text, length); /* exact size, so that reading beyond it shows */
        tml_star star;
        tml_error error = {0};
        tml_status status = tml_star_parse(part, length, "t", &star, &error);
        cr_assert(status == TML_OK || (status == TML_BAD_INPUT && error.line > 0 && error.column > 0 && *error.message != '\0'));
        refused += status != TML_OK;
        tml_star_clear(&star);
        free(part);
    }
    cr_assert_gt(refused, 50);
}

/* ---- sizes ---- */

Test(star, a_value_of_megabytes_and_a_long_message_are_no_trouble) {
    const size_t length = 4 << 20;
    char *text = tml_alloc(length + 16, 1);
    memcpy(text, "data_x _a.b ", 12);
    memset(text + 12, 'v', length);
    tml_star star = parse_good(text);
    cr_assert_eq((size_t)star.items[0].value.length, length);
    tml_star_clear(&star);
    memset(text, 'v', length);
    tml_error error = {0};
    cr_assert_eq(tml_star_parse(text, length, "t", &star, &error), TML_BAD_INPUT);
    cr_assert_lt(strlen(error.message), 200);
    tml_star_clear(&star);
    free(text);
}

/* Large files of coordinates have millions of values: time grows with the text and not faster. */
Test(star, two_million_values_take_less_than_two_seconds) {
    const size_t rows = 100000;
    char *text = tml_alloc(rows * 64 + 512, 1), *at = text;
    at += sprintf(at, "data_x loop_");
    for (int i = 0; i < 20; i++) at += sprintf(at, " _a.c%d", i);
    for (size_t i = 0; i < rows; i++) at += sprintf(at, "\n1 2 3 4 5 6 7 8 9 0 a b c d e f 'g' h . ?");
    double start = tml_seconds();
    tml_star star = parse_good(text);
    double spent = tml_seconds() - start;
    cr_assert_eq(star.loops[0].row_count, rows);
    cr_assert_lt(spent, getenv("TRAMMEL_SANITIZED") != NULL ? 40.0 : 2.0, "%.2f s", spent);
    tml_star_clear(&star);
    free(text);
}

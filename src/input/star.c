/* star.c: STAR and CIF documents.
 *
 *   tokens      one at a time, with line and column
 *   document    blocks, frames, items, loops
 *   look-ups
 */
#include "input/star.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "base/memory.h"

typedef enum token_kind { TOKEN_END, TOKEN_VALUE, TOKEN_TAG, TOKEN_DATA, TOKEN_SAVE, TOKEN_SAVE_END, TOKEN_LOOP, TOKEN_STOP } token_kind;

typedef struct lexer {
    const char *at, *end, *line_start, *path;
    int32_t line;
    tml_error *error;
    token_kind kind;
    tml_star_value token;
} lexer;

static tml_status next_token(lexer *lex);
static tml_status parse_frames(lexer *lex, tml_star *out);

tml_status tml_star_parse(const char *text, size_t length, const char *path, tml_star *out, tml_error *error) {
    *out = (tml_star){0};
    if (length > INT32_MAX) return tml_fail_at(error, TML_TOO_LARGE, path, 0, 0, "the file is too large");
    lexer lex = {.at = text, .end = text + length, .line_start = text, .path = path, .line = 1, .error = error};
    if (length >= 3 && memcmp(text, "\xef\xbb\xbf", 3) == 0) lex.at = lex.line_start = text + 3; /* byte order mark */
    tml_status status = next_token(&lex);
    return status == TML_OK ? parse_frames(&lex, out) : status;
}

void tml_star_clear(tml_star *star) {
    free(star->frames);
    free(star->items);
    free(star->loops);
    free(star->tags);
    free(star->values);
    *star = (tml_star){0};
}

/* ---- tokens ---- */

static bool is_blank(char c) {
    return c == ' ' || c == '\t' || c == '\n' || c == '\r' || c == '\v' || c == '\f';
}

static int32_t column_of(const lexer *lex, const char *place) {
    return (int32_t)(place - lex->line_start) + 1;
}

static void new_line(lexer *lex, const char *start) {
    lex->line++;
    lex->line_start = start;
}

static void skip_blanks_and_comments(lexer *lex) {
    while (lex->at < lex->end && (*lex->at == '#' || is_blank(*lex->at))) {
        if (*lex->at == '#') {
            const char *newline = memchr(lex->at, '\n', (size_t)(lex->end - lex->at));
            lex->at = newline == NULL ? lex->end : newline;
        } else {
            lex->at++;
            if (lex->at[-1] == '\n') new_line(lex, lex->at);
        }
    }
}

static bool starts(const tml_star_value *token, const char *word) {
    size_t length = strlen(word);
    return (size_t)token->length >= length && strncasecmp(token->text, word, length) == 0;
}

/* A text between semicolons that both begin a line. */
static tml_status read_semicolon_text(lexer *lex) {
    const char *start = lex->at + 1;
    for (const char *p = start;;) {
        const char *newline = memchr(p, '\n', (size_t)(lex->end - p));
        if (newline == NULL)
            return tml_fail_at(lex->error, TML_BAD_INPUT, lex->path, lex->token.line, 1,
                               "a text begun by a semicolon is never ended by a line that begins with one");
        new_line(lex, newline + 1);
        if (newline + 1 < lex->end && newline[1] == ';') {
            const char *stop = newline > start && newline[-1] == '\r' ? newline - 1 : newline;
            lex->token.text = start;
            lex->token.length = (int32_t)(stop > start ? stop - start : 0);
            lex->at = newline + 2;
            return TML_OK;
        }
        p = newline + 1;
    }
}

/* A quote ends where it is followed by a blank, so that 5'-end and O5'' need no care. */
static tml_status read_quoted(lexer *lex) {
    char quote = *lex->at;
    for (const char *p = lex->at + 1; p < lex->end && *p != '\n'; p++) {
        if (*p != quote || (p + 1 < lex->end && !is_blank(p[1]))) continue;
        lex->token.text = lex->at + 1;
        lex->token.length = (int32_t)(p - lex->at - 1);
        lex->at = p + 1;
        return TML_OK;
    }
    return tml_fail_at(lex->error, TML_BAD_INPUT, lex->path, lex->token.line, lex->token.column, "the quote %c is not closed on its line",
                       quote);
}

static void read_bare(lexer *lex) {
    const char *start = lex->at;
    while (lex->at < lex->end && !is_blank(*lex->at)) lex->at++;
    tml_star_value *token = &lex->token;
    token->text = start;
    token->length = (int32_t)(lex->at - start);
    if (*start == '_') {
        lex->kind = TOKEN_TAG;
    } else if (starts(token, "data_")) {
        lex->kind = TOKEN_DATA;
        token->text += 5;
        token->length -= 5;
    } else if (token->length == 7 && starts(token, "global_")) { /* a block without a name, in dictionaries */
        lex->kind = TOKEN_DATA;
        token->text += 7;
        token->length = 0;
    } else if (starts(token, "save_")) {
        lex->kind = token->length == 5 ? TOKEN_SAVE_END : TOKEN_SAVE;
        token->text += 5;
        token->length -= 5;
    } else if (token->length == 5 && starts(token, "loop_")) {
        lex->kind = TOKEN_LOOP;
    } else if (token->length == 5 && starts(token, "stop_")) {
        lex->kind = TOKEN_STOP;
    }
}

static tml_status next_token(lexer *lex) {
    skip_blanks_and_comments(lex);
    lex->token = (tml_star_value){.line = lex->line, .column = column_of(lex, lex->at)};
    if (lex->at >= lex->end) {
        lex->kind = TOKEN_END;
        return TML_OK;
    }
    lex->kind = TOKEN_VALUE;
    if (*lex->at == ';' && lex->at == lex->line_start) {
        lex->token.quote = ';';
        return read_semicolon_text(lex);
    }
    if (*lex->at == '\'' || *lex->at == '"') {
        lex->token.quote = *lex->at;
        return read_quoted(lex);
    }
    read_bare(lex);
    return TML_OK;
}

/* ---- document ---- */

static tml_status wrong(const lexer *lex, const char *expected) {
    int shown = lex->token.length > 40 ? 40 : lex->token.length;
    if (lex->kind == TOKEN_END)
        return tml_fail_at(lex->error, TML_BAD_INPUT, lex->path, lex->token.line, lex->token.column, "the file ends where %s is expected",
                           expected);
    return tml_fail_at(lex->error, TML_BAD_INPUT, lex->path, lex->token.line, lex->token.column, "found '%.*s' where %s is expected", shown,
                       lex->token.text, expected);
}

static tml_star_frame *open_frame(tml_star *star, tml_star_value name, bool is_save) {
    if (!tml_grow(&star->frames, &star->frame_capacity, star->frame_count + 1, sizeof *star->frames)) return NULL;
    tml_star_frame *frame = &star->frames[star->frame_count++];
    *frame = (tml_star_frame){.name = name, .is_save = is_save, .first_item = star->item_count, .first_loop = star->loop_count};
    return frame;
}

static tml_status parse_item(lexer *lex, tml_star *star) {
    if (!tml_grow(&star->items, &star->item_capacity, star->item_count + 1, sizeof *star->items)) return tml_no_memory(lex->error);
    tml_star_item *item = &star->items[star->item_count];
    item->tag = lex->token;
    tml_status status = next_token(lex);
    if (status != TML_OK) return status;
    if (lex->kind != TOKEN_VALUE) return wrong(lex, "a tag's value");
    item->value = lex->token;
    star->item_count++;
    star->frames[star->frame_count - 1].item_count++;
    return next_token(lex);
}

/* A small packed file can hold a billion values; ask before so much is taken that the system ends the program. */
static bool has_memory(size_t value_count) {
    static const size_t MANY = 1 << 22;
    return value_count < MANY || value_count * 2 * sizeof(tml_star_value) < tml_memory_available();
}

static tml_status parse_loop(lexer *lex, tml_star *star) {
    tml_star_loop loop = {.first_tag = star->tag_count, .first_value = star->value_count};
    int32_t line = lex->token.line, column = lex->token.column;
    tml_status status = next_token(lex);
    while (status == TML_OK && lex->kind == TOKEN_TAG) {
        if (!tml_grow(&star->tags, &star->tag_capacity, star->tag_count + 1, sizeof *star->tags)) return tml_no_memory(lex->error);
        star->tags[star->tag_count++] = lex->token;
        status = next_token(lex);
    }
    if (status != TML_OK) return status;
    loop.tag_count = star->tag_count - loop.first_tag;
    if (loop.tag_count == 0) return wrong(lex, "a loop's first tag");
    while (status == TML_OK && lex->kind == TOKEN_VALUE) {
        if (star->value_count == star->value_capacity && !has_memory(star->value_count))
            return tml_fail_at(lex->error, TML_TOO_LARGE, lex->path, lex->token.line, lex->token.column,
                               "more values than memory has room for: %zu up to here", star->value_count);
        if (!tml_grow(&star->values, &star->value_capacity, star->value_count + 1, sizeof *star->values)) return tml_no_memory(lex->error);
        star->values[star->value_count++] = lex->token;
        status = next_token(lex);
    }
    if (status != TML_OK) return status;
    size_t count = star->value_count - loop.first_value;
    if (count % loop.tag_count != 0)
        return tml_fail_at(lex->error, TML_BAD_INPUT, lex->path, line, column,
                           "this loop has %zu tags and %zu values: its last row, up to line %d, is not full", loop.tag_count, count,
                           (int)lex->token.line);
    loop.row_count = count / loop.tag_count;
    if (!tml_grow(&star->loops, &star->loop_capacity, star->loop_count + 1, sizeof *star->loops)) return tml_no_memory(lex->error);
    star->loops[star->loop_count++] = loop;
    star->frames[star->frame_count - 1].loop_count++;
    return lex->kind == TOKEN_STOP ? next_token(lex) : TML_OK;
}

static tml_status parse_frames(lexer *lex, tml_star *star) {
    tml_star_value block = {.text = ""};
    bool in_block = false, in_save = false;
    tml_status status = TML_OK;
    while (status == TML_OK && lex->kind != TOKEN_END) {
        bool opens = lex->kind == TOKEN_DATA || lex->kind == TOKEN_SAVE || lex->kind == TOKEN_SAVE_END;
        if (!opens && !in_block) return wrong(lex, "a data block (data_…)");
        if (lex->kind == TOKEN_SAVE && (in_save || !in_block)) return wrong(lex, in_save ? "the end of the save frame (save_)" : "a data block");
        if (lex->kind == TOKEN_SAVE_END && !in_save) return wrong(lex, "a data block, a frame, an item or a loop");
        if (lex->kind == TOKEN_DATA && in_save) return wrong(lex, "the end of the save frame (save_)");
        if (opens) {
            if (lex->kind == TOKEN_DATA) block = lex->token;
            in_block = true;
            in_save = lex->kind == TOKEN_SAVE;
            if (open_frame(star, in_save ? lex->token : block, in_save) == NULL) return tml_no_memory(lex->error);
            status = next_token(lex);
        } else if (lex->kind == TOKEN_TAG) {
            status = parse_item(lex, star);
        } else if (lex->kind == TOKEN_LOOP) {
            status = parse_loop(lex, star);
        } else {
            return wrong(lex, "a tag, a loop or a frame");
        }
    }
    if (status == TML_OK && in_save) return wrong(lex, "the end of the save frame (save_)");
    return status;
}

/* ---- look-ups ---- */

bool tml_star_is_null(const tml_star_value *value) {
    return value->quote == 0 && (value->length == 0 || (value->length == 1 && (*value->text == '.' || *value->text == '?')));
}

bool tml_star_is(const tml_star_value *value, const char *text) {
    return strlen(text) == (size_t)value->length && strncasecmp(value->text, text, (size_t)value->length) == 0;
}

/* "_category.name" in its two parts, without case. */
static bool in_category(const tml_star_value *tag, const char *category) {
    size_t length = strlen(category);
    return (size_t)tag->length > length && strncasecmp(tag->text, category, length) == 0 && tag->text[length] == '.';
}

const tml_star_loop *tml_star_find_loop(const tml_star *star, const tml_star_frame *frame, const char *category) {
    for (size_t i = frame->first_loop; i < frame->first_loop + frame->loop_count; i++)
        if (in_category(&star->tags[star->loops[i].first_tag], category)) return &star->loops[i];
    return NULL;
}

tml_status tml_star_find_table(tml_star *star, const tml_star_frame *frame, const char *category, tml_star_loop *table, bool *found,
                               tml_error *error) {
    const tml_star_loop *loop = tml_star_find_loop(star, frame, category);
    *table = loop != NULL ? *loop : (tml_star_loop){.first_tag = star->tag_count, .first_value = star->value_count, .row_count = 1};
    for (size_t i = frame->first_item; loop == NULL && i < frame->first_item + frame->item_count; i++) {
        if (!in_category(&star->items[i].tag, category)) continue;
        if (!tml_grow(&star->tags, &star->tag_capacity, star->tag_count + 1, sizeof *star->tags) ||
            !tml_grow(&star->values, &star->value_capacity, star->value_count + 1, sizeof *star->values))
            return tml_no_memory(error);
        star->tags[star->tag_count++] = star->items[i].tag;
        star->values[star->value_count++] = star->items[i].value;
        table->tag_count++;
    }
    *found = table->tag_count > 0;
    return TML_OK;
}

int tml_star_column(const tml_star *star, const tml_star_loop *loop, const char *name) {
    for (size_t i = 0; i < loop->tag_count; i++) {
        const tml_star_value *tag = &star->tags[loop->first_tag + i];
        const char *dot = memchr(tag->text, '.', (size_t)tag->length);
        if (dot == NULL) continue;
        tml_star_value part = {.text = dot + 1, .length = tag->length - (int32_t)(dot + 1 - tag->text)};
        if (tml_star_is(&part, name)) return (int)i;
    }
    return -1;
}

const tml_star_value *tml_star_at(const tml_star *star, const tml_star_loop *loop, size_t row, int column) {
    static const tml_star_value NOTHING = {.text = ".", .length = 1};
    return column < 0 ? &NOTHING : &star->values[loop->first_value + row * loop->tag_count + (size_t)column];
}

const tml_star_value *tml_star_find_item(const tml_star *star, const tml_star_frame *frame, const char *tag) {
    for (size_t i = frame->first_item; i < frame->first_item + frame->item_count; i++)
        if (tml_star_is(&star->items[i].tag, tag)) return &star->items[i].value;
    return NULL;
}

bool tml_star_number(const tml_star_value *value, double *out) {
    char text[64], *end;
    if (value->length == 0 || value->length >= (int32_t)sizeof text || tml_star_is_null(value)) return false;
    memcpy(text, value->text, (size_t)value->length);
    text[value->length] = '\0';
    if (text[strspn(text, "+-.0123456789eE()")] != '\0') return false; /* no "nan", "inf", "0x…" */
    double number = strtod(text, &end);
    if (end != text && *end == '(') {
        end += 1 + strspn(end + 1, "0123456789");
        end = *end == ')' ? end + 1 : text;
    }
    if (end == text || *end != '\0' || !isfinite(number)) return false;
    *out = number;
    return true;
}

/* Any bytes as a STAR document: what is read lies inside the text, stands where it says, and adds up. */
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "input/star.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

typedef struct span { const char *text, *end; } span;

static void check_value(span within, const tml_star_value *value) {
    if (value->length < 0 || value->text < within.text || value->text + value->length > within.end) abort();
    if (value->line < 1 || value->column < 1) abort();
    if (value->quote == 0 || value->quote == '\'' || value->quote == '"') { /* on one line, where it says */
        if (memchr(value->text, '\n', (size_t)value->length) != NULL) abort();
        int32_t line = 1;
        for (const char *at = within.text; at < value->text; at++) line += *at == '\n';
        if (line != value->line) abort();
    }
    double number;
    if (tml_star_number(value, &number) && !(number - number == 0)) abort();
}

static void check_document(span within, const tml_star *star) {
    size_t items = 0, loops = 0, tags = 0, values = 0;
    for (size_t i = 0; i < star->frame_count; i++) {
        const tml_star_frame *frame = &star->frames[i];
        if (frame->first_item != items || frame->first_loop != loops) abort();
        items += frame->item_count;
        loops += frame->loop_count;
        check_value(within, &frame->name);
    }
    if (items != star->item_count || loops != star->loop_count) abort();
    for (size_t i = 0; i < loops; i++) {
        const tml_star_loop *loop = &star->loops[i];
        if (loop->tag_count == 0 || loop->first_tag != tags || loop->first_value != values) abort();
        tags += loop->tag_count;
        values += loop->tag_count * loop->row_count;
    }
    if (tags != star->tag_count || values != star->value_count) abort();
    for (size_t i = 0; i < items; i++) {
        check_value(within, &star->items[i].tag);
        check_value(within, &star->items[i].value);
        if (*star->items[i].tag.text != '_') abort();
    }
    for (size_t i = 0; i < tags; i++) check_value(within, &star->tags[i]);
    for (size_t i = 0; i < values; i++) check_value(within, &star->values[i]);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
    tml_star star;
    tml_error error = {0};
    char *text = malloc(size + 1);
    if (text == NULL) return 0;
    memcpy(text, data, size);
    text[size] = '\0'; /* as the reader of files hands it on */
    tml_status status = tml_star_parse(text, size, "fuzz", &star, &error);
    if (status == TML_OK)
        check_document((span){text, text + size}, &star);
    else if (status != TML_BAD_INPUT || *error.message == '\0' || error.line < 1 || error.column < 1)
        abort();
    tml_star_clear(&star);
    free(text);
    return 0;
}

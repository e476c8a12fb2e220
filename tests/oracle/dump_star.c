/* Prints the tags and values of a STAR or CIF text from standard input, each as length:text (length negative for a null): items
 * and then loops of each frame, loops by column; or "refused" and the line. */
#include <stdio.h>
#include <stdlib.h>

#include "input/star.h"

static void put(const tml_star_value *value) {
    printf("%d:%.*s\n", tml_star_is_null(value) ? -value->length : value->length, value->length, value->text);
}

static void print(const tml_star *star) {
    for (size_t f = 0; f < star->frame_count; f++) {
        const tml_star_frame *frame = &star->frames[f];
        for (size_t i = frame->first_item; i < frame->first_item + frame->item_count; i++) {
            put(&star->items[i].tag);
            put(&star->items[i].value);
        }
        for (size_t l = frame->first_loop; l < frame->first_loop + frame->loop_count; l++) {
            const tml_star_loop *loop = &star->loops[l];
            for (size_t k = 0; k < loop->tag_count; k++) {
                put(&star->tags[loop->first_tag + k]);
                for (size_t row = 0; row < loop->row_count; row++) put(tml_star_at(star, loop, row, (int)k));
            }
        }
    }
}

int main(void) {
    enum { MOST = 1 << 24 };
    char *text = malloc(MOST);
    if (text == NULL) return 3;
    size_t length = fread(text, 1, MOST, stdin);
    tml_star star;
    tml_error error = {0};
    tml_status status = tml_star_parse(text, length, "standard input", &star, &error);
    if (status == TML_OK)
        print(&star);
    else
        printf("refused %ld\n", error.line);
    tml_star_clear(&star);
    free(text);
    return 0;
}

/* Prints a STAR or CIF document as JSON, for the oracle scripts:
 *
 *   dump_star FILE
 *
 * a list of frames {"name", "save", "items": [[tag, value], …], "loops": [{"tags": […], "values": […]}, …]}; a value is null for a
 * bare `.` or `?`, else its text.
 */
#include <jansson.h>
#include <stdio.h>
#include <stdlib.h>

#include "input/source.h"
#include "input/star.h"

static json_t *text_of(const tml_star_value *value) {
    return tml_star_is_null(value) ? json_null() : json_stringn(value->text, (size_t)value->length);
}

static json_t *loop_of(const tml_star *star, const tml_star_loop *loop) {
    json_t *tags = json_array(), *values = json_array();
    for (size_t i = 0; i < loop->tag_count; i++) json_array_append_new(tags, text_of(&star->tags[loop->first_tag + i]));
    for (size_t i = 0; i < loop->tag_count * loop->row_count; i++) json_array_append_new(values, text_of(&star->values[loop->first_value + i]));
    return json_pack("{s:o, s:o}", "tags", tags, "values", values);
}

static json_t *frame_of(const tml_star *star, const tml_star_frame *frame) {
    json_t *items = json_array(), *loops = json_array();
    for (size_t i = frame->first_item; i < frame->first_item + frame->item_count; i++)
        json_array_append_new(items, json_pack("[o, o]", text_of(&star->items[i].tag), text_of(&star->items[i].value)));
    for (size_t i = frame->first_loop; i < frame->first_loop + frame->loop_count; i++)
        json_array_append_new(loops, loop_of(star, &star->loops[i]));
    return json_pack("{s:s%, s:b, s:o, s:o}", "name", frame->name.text, (size_t)frame->name.length, "save", frame->is_save, "items", items,
                     "loops", loops);
}

int main(int argc, char **argv) {
    tml_error error = {0};
    tml_star star = {0};
    char *text = NULL;
    size_t length = 0;
    if (argc != 2) return 2;
    tml_status status = tml_source_read(argv[1], &text, &length, &error);
    if (status == TML_OK) status = tml_star_parse(text, length, argv[1], &star, &error);
    if (status == TML_OK) {
        json_t *frames = json_array();
        for (size_t i = 0; i < star.frame_count; i++) json_array_append_new(frames, frame_of(&star, &star.frames[i]));
        json_dumpf(frames, stdout, 0);
        json_decref(frames);
    } else {
        fprintf(stderr, "%s:%ld:%ld: %s\n", error.file, error.line, error.column, error.message);
    }
    tml_star_clear(&star);
    free(text);
    return status == TML_OK ? 0 : 2;
}

/* values.h: what the reports for programs are made of: JSON values that carry a lack of memory upwards, and the file at the end.
 */
#ifndef TML_VALUES_H
#define TML_VALUES_H

#include <jansson.h>

#include "base/status.h"

/* Add to an array or an object. Without memory it is freed and becomes NULL, which goes up through all that hold it. */
void tml_json_append(json_t **list, json_t *item);
void tml_json_put(json_t **object, const char *key, json_t *item);

json_t *tml_json_number(double value);    /* null for infinities and NaN, which JSON lacks */
json_t *tml_json_rounded(double value);   /* figures in Å, degrees and seconds: what lies beyond six decimals is noise */
json_t *tml_json_text(const char *text);  /* of any input; what is no UTF-8 is told byte by byte; null for NULL */

/* Where two problems differ, as an object of a report. */
struct tml_difference;
json_t *tml_difference_json(const struct tml_difference *difference);

/* Write and free; a root that lacks memory is NULL. */
tml_status tml_json_write(json_t *root, const char *path, tml_error *error);

#endif

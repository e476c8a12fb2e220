#include "molecule/outline.h"

#include <stdlib.h>

void tml_outline_clear(tml_outline *outline) {
    for (size_t i = 0; i < outline->plane_count; i++) free(outline->planes[i].atoms);
    free(outline->residues);
    free(outline->atoms);
    free(outline->links);
    free(outline->chirals);
    free(outline->planes);
    free(outline->ends);
    *outline = (tml_outline){0};
}

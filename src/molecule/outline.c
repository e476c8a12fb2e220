#include "molecule/outline.h"

#include <stdlib.h>

void tml_outline_clear(tml_outline *outline) {
    for (size_t i = 0; i < outline->plane_count; i++) free(outline->planes[i].atoms);
    for (size_t i = 0; i < outline->component_count; i++) tml_component_free(outline->components[i]);
    free(outline->components);
    free(outline->residues);
    free(outline->atoms);
    free(outline->links);
    free(outline->chirals);
    free(outline->planes);
    free(outline->ends);
    *outline = (tml_outline){0};
}

#include "restraint/rows.h"

#include <stdlib.h>

void tml_rows_clear(tml_rows *rows) {
    free(rows->distances);
    free(rows->dihedrals);
    free(rows->addresses);
    *rows = (tml_rows){0};
}

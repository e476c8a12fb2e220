#include "restraint/rows.h"

#include <stdlib.h>
#include <string.h>

#include "base/memory.h"

bool tml_rows_add_distance(tml_rows *rows, const tml_distance_row *row, const tml_address *addresses) {
    size_t count = (size_t)row->count_a + (size_t)row->count_b;
    if (!tml_grow(&rows->addresses, &rows->address_capacity, rows->address_count + count, sizeof *rows->addresses)) return false;
    if (!tml_grow(&rows->distances, &rows->distance_capacity, rows->distance_count + 1, sizeof *rows->distances)) return false;
    memcpy(&rows->addresses[rows->address_count], addresses, count * sizeof *addresses);
    tml_distance_row *added = &rows->distances[rows->distance_count++];
    *added = *row;
    added->first_a = (int32_t)rows->address_count;
    added->first_b = added->first_a + row->count_a;
    rows->address_count += count;
    return true;
}

bool tml_rows_add_dihedral(tml_rows *rows, const tml_dihedral_row *row) {
    if (!tml_grow(&rows->dihedrals, &rows->dihedral_capacity, rows->dihedral_count + 1, sizeof *rows->dihedrals)) return false;
    rows->dihedrals[rows->dihedral_count++] = *row;
    return true;
}

void tml_rows_clear(tml_rows *rows) {
    free(rows->distances);
    free(rows->dihedrals);
    free(rows->addresses);
    *rows = (tml_rows){0};
}

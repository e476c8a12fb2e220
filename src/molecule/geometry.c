#include "molecule/geometry.h"

#include <math.h>
#include <stdlib.h>

#include "base/memory.h"

static uint64_t key_of(int32_t a, int32_t b) {
    uint32_t low = (uint32_t)(a < b ? a : b), high = (uint32_t)(a < b ? b : a);
    return ((uint64_t)low << 32 | high) + 1; /* never 0, the mark of an empty slot */
}

static size_t slot_of(const tml_geometry *table, uint64_t key) {
    size_t at = (size_t)((key * 0x9e3779b97f4a7c15u) >> 20) & (table->slots - 1);
    while (table->keys[at] != 0 && table->keys[at] != key) at = (at + 1) & (table->slots - 1);
    return at;
}

static bool enlarge(tml_geometry *table) {
    tml_geometry larger = {.slots = table->slots == 0 ? 1024 : table->slots * 2, .used = table->used};
    larger.keys = tml_alloc(larger.slots, sizeof *larger.keys);
    larger.values = tml_alloc(larger.slots, sizeof *larger.values);
    if (larger.keys == NULL || larger.values == NULL) {
        tml_geometry_clear(&larger);
        return false;
    }
    for (size_t i = 0; i < table->slots; i++)
        if (table->keys[i] != 0) {
            size_t at = slot_of(&larger, table->keys[i]);
            larger.keys[at] = table->keys[i];
            larger.values[at] = table->values[i];
        }
    tml_geometry_clear(table);
    *table = larger;
    return true;
}

typedef struct filling {
    tml_geometry *table;
    bool (*visit)(void *context, tml_fixed fixed, int32_t a, int32_t b, double length);
    void *context;
} filling;

/* The first value of a pair stays. */
static bool add(filling *f, tml_fixed fixed, int32_t a, int32_t b, double length) {
    if (isnan(length) || !isnan(tml_geometry_distance(f->table, a, b))) return true;
    if (f->table->used * 2 >= f->table->slots && !enlarge(f->table)) return false;
    size_t at = slot_of(f->table, key_of(a, b));
    f->table->keys[at] = key_of(a, b);
    f->table->values[at] = length; /* NOLINT(clang-analyzer-unix.Malloc): enlarge replaced the array that it freed */
    f->table->used++;
    return f->visit == NULL || f->visit(f->context, fixed, a, b, length);
}

bool tml_geometry_fill(tml_geometry *geometry, const tml_molecule *molecule,
                       bool (*visit)(void *context, tml_fixed fixed, int32_t a, int32_t b, double length), void *context) {
    filling f = {geometry, visit, context};
    for (int32_t i = 0; i < molecule->bond_count; i++)
        if (!add(&f, TML_FIXED_BOND, molecule->bonds[i].a, molecule->bonds[i].b, molecule->bonds[i].length)) return false;
    for (int32_t i = 0; i < molecule->angle_count; i++) {
        const tml_angle *angle = &molecule->angles[i];
        double ab = tml_geometry_distance(geometry, angle->a, angle->b), bc = tml_geometry_distance(geometry, angle->b, angle->c);
        if (!add(&f, TML_FIXED_ANGLE, angle->a, angle->c, sqrt(ab * ab + bc * bc - 2 * ab * bc * cos(angle->angle)))) return false;
    }
    for (int32_t i = 0; i < molecule->plane_count; i++) {
        const tml_plane *plane = &molecule->planes[i];
        const int32_t *atoms = &molecule->plane_atoms[plane->first];
        const double *xy = &molecule->plane_xy[2 * plane->first];
        for (int32_t j = 0; plane->has_xy && j < plane->count; j++)
            for (int32_t k = 0; k < j; k++)
                if (!add(&f, TML_FIXED_PLANE, atoms[k], atoms[j], hypot(xy[2 * j] - xy[2 * k], xy[2 * j + 1] - xy[2 * k + 1])))
                    return false;
    }
    return true;
}

void tml_geometry_clear(tml_geometry *geometry) {
    free(geometry->keys);
    free(geometry->values);
    *geometry = (tml_geometry){0};
}

double tml_geometry_distance(const tml_geometry *geometry, int32_t a, int32_t b) {
    if (geometry->slots == 0) return NAN;
    size_t at = slot_of(geometry, key_of(a, b));
    return geometry->keys[at] == 0 ? NAN : geometry->values[at];
}

double tml_geometry_across(const tml_geometry *geometry, int32_t a, int32_t b, int32_t c, int32_t d, double angle) {
    double ab = tml_geometry_distance(geometry, a, b), bc = tml_geometry_distance(geometry, b, c),
           cd = tml_geometry_distance(geometry, c, d), ac = tml_geometry_distance(geometry, a, c),
           bd = tml_geometry_distance(geometry, b, d);
    /* b at the origin, c at (bc, 0): feet and heights of a and d over the axis. */
    double foot_a = (ab * ab + bc * bc - ac * ac) / (2 * bc), foot_d = (bd * bd + bc * bc - cd * cd) / (2 * bc);
    double height_a = sqrt(fmax(ab * ab - foot_a * foot_a, 0)), height_d = sqrt(fmax(bd * bd - foot_d * foot_d, 0));
    double along = foot_a - foot_d;
    return sqrt(along * along + height_a * height_a + height_d * height_d - 2 * height_a * height_d * cos(angle));
}

bool tml_geometry_each(const tml_geometry *geometry, bool (*visit)(void *context, int32_t a, int32_t b), void *context) {
    for (size_t i = 0; i < geometry->slots; i++) {
        if (geometry->keys[i] == 0) continue;
        uint64_t key = geometry->keys[i] - 1;
        if (!visit(context, (int32_t)(key >> 32), (int32_t)(key & 0xffffffffu))) return false;
    }
    return true;
}

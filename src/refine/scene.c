/* scene.c: a thread's arrays, and the neighbour list over a grid of cells.
 *
 * The list holds the pairs that are closer than their own contact distance plus the skin: hydrogens, half of all atoms, have
 * short contacts, so this is a third of what one common cutoff would list.
 */
#include "refine/scene.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"

/* Atoms sorted by cell, x fastest, so that three neighbouring cells of a row are one run of memory. */
struct tml_cells {
    int32_t *first;          /* of each cell, and one past the last */
    size_t first_capacity;
    int32_t *cell_of, *order; /* per atom; sorted */
    float *x, *y, *z;        /* sorted */
    float *square;           /* distances² of one atom from a run */
    int32_t *hits;           /* the slots of a run that are near */
};

enum { CELL_LIMIT = 1 << 21 };

tml_status tml_scene_new(const tml_refiner *refiner, tml_scene **out, tml_error *error) {
    size_t count = (size_t)refiner->atom_count + 2;
    tml_scene *scene = tml_alloc(1, sizeof *scene);
    *out = scene;
    if (scene == NULL) return tml_no_memory(error);
    scene->refiner = refiner;
    scene->x = tml_alloc_aligned(count, sizeof *scene->x);
    scene->f = tml_alloc_aligned(count, sizeof *scene->f);
    scene->v = tml_alloc_aligned(count, sizeof *scene->v);
    scene->listed_at = tml_alloc_aligned(count, sizeof *scene->listed_at);
    scene->cells = tml_alloc(1, sizeof *scene->cells);
    scene->sum_pairs = tml_alloc((size_t)refiner->sum_pair_count, sizeof *scene->sum_pairs);
    scene->swapped = tml_alloc((size_t)refiner->problem->restraints.stereo_count, sizeof *scene->swapped);
    scene->copies = tml_alloc(6 * count, sizeof *scene->copies);
    bool room = scene->copies != NULL && scene->x != NULL && scene->f != NULL && scene->v != NULL && scene->listed_at != NULL && scene->cells != NULL &&
                scene->sum_pairs != NULL && scene->swapped != NULL;
    if (room && refiner->sum_pair_count > 0)
        memcpy(scene->sum_pairs, refiner->sum_pairs, (size_t)refiner->sum_pair_count * sizeof *scene->sum_pairs);
    if (room) {
        struct tml_cells *cells = scene->cells;
        cells->cell_of = tml_alloc(count, sizeof *cells->cell_of);
        cells->order = tml_alloc(count, sizeof *cells->order);
        cells->x = tml_alloc(count, sizeof *cells->x);
        cells->y = tml_alloc(count, sizeof *cells->y);
        cells->z = tml_alloc(count, sizeof *cells->z);
        cells->square = tml_alloc(count, sizeof *cells->square);
        cells->hits = tml_alloc(count, sizeof *cells->hits);
        room = cells->cell_of != NULL && cells->order != NULL && cells->x != NULL && cells->y != NULL && cells->z != NULL &&
               cells->square != NULL && cells->hits != NULL;
    }
    if (!room) {
        tml_scene_free(scene);
        *out = NULL;
        return tml_no_memory(error);
    }
    for (size_t i = 0; i < count; i++) scene->x[i] = scene->v[i] = scene->f[i] = scene->listed_at[i] = TML_V4(0);
    scene->x[count - 1][0] = 1.0;
    scene->skin = -1;
    return TML_OK;
}

void tml_scene_free(tml_scene *scene) {
    if (scene == NULL) return;
    if (scene->cells != NULL) {
        free(scene->cells->first);
        free(scene->cells->cell_of);
        free(scene->cells->order);
        free(scene->cells->x);
        free(scene->cells->y);
        free(scene->cells->z);
        free(scene->cells->square);
        free(scene->cells->hits);
    }
    free(scene->cells);
    free(scene->x);
    free(scene->f);
    free(scene->v);
    free(scene->listed_at);
    free(scene->near);
    free(scene->near_contact);
    free(scene->sum_pairs);
    free(scene->swapped);
    free(scene->copies);
    free(scene);
}

void tml_scene_load(tml_scene *scene, const double *xyz) {
    for (int32_t i = 0; i < scene->refiner->atom_count; i++) scene->x[i] = (tml_v4){xyz[3 * i], xyz[3 * i + 1], xyz[3 * i + 2], 0};
    scene->skin = -1;
}

void tml_scene_store(const tml_scene *scene, double *xyz) {
    for (int32_t i = 0; i < scene->refiner->atom_count; i++)
        for (int k = 0; k < 3; k++) xyz[3 * i + k] = scene->x[i][k];
}

void tml_scene_repel_hydrogens(tml_scene *scene, bool repel) {
    if (scene->heavy_only == repel) scene->skin = -1;
    scene->heavy_only = !repel;
}

/* ---- the neighbour list ---- */

typedef struct grid { double low[3], size; int32_t cells[3]; } grid;

/* Cells at least `reach` wide over the atoms' box; wider ones where the box is so large that there would be too many. */
static grid lay_grid(const tml_scene *scene, double reach) {
    grid g = {.size = reach > 0.5 ? reach : 0.5};
    double high[3] = {-INFINITY, -INFINITY, -INFINITY};
    for (int k = 0; k < 3; k++) g.low[k] = INFINITY;
    for (int32_t i = 0; i < scene->refiner->atom_count; i++)
        for (int k = 0; k < 3; k++) {
            double at = scene->x[i][k];
            if (at < g.low[k]) g.low[k] = at;
            if (at > high[k]) high[k] = at;
        }
    for (;;) {
        double total = 1;
        for (int k = 0; k < 3; k++) {
            double span = fmin(fmax(floor((high[k] - g.low[k]) / g.size) + 1, 1), (double)CELL_LIMIT);
            g.cells[k] = (int32_t)span;
            total *= span;
        }
        if (total <= CELL_LIMIT) return g;
        g.size *= 1.5;
    }
}

static int32_t cell_along(const grid *g, int axis, double at) {
    double cell = (at - g->low[axis]) / g->size;
    if (!(cell >= 0)) return 0; /* not a number, too */
    return cell < g->cells[axis] ? (int32_t)cell : g->cells[axis] - 1;
}

/* Counting sort of the listed atoms by cell; the others' cell is -1. */
static bool sort_atoms(tml_scene *scene, const grid *g) {
    struct tml_cells *cells = scene->cells;
    int32_t count = scene->refiner->atom_count;
    size_t total = (size_t)g->cells[0] * (size_t)g->cells[1] * (size_t)g->cells[2];
    if (!tml_grow(&cells->first, &cells->first_capacity, total + 2, sizeof *cells->first)) return false;
    memset(cells->first, 0, (total + 2) * sizeof *cells->first);
    for (int32_t i = 0; i < count; i++) {
        const tml_v4 *at = &scene->x[i];
        int32_t cell = (cell_along(g, 2, (*at)[2]) * g->cells[1] + cell_along(g, 1, (*at)[1])) * g->cells[0] + cell_along(g, 0, (*at)[0]);
        bool left_out = scene->heavy_only && scene->refiner->problem->molecule.atoms[i].element == 1;
        cells->cell_of[i] = left_out ? -1 : cell;
        if (!left_out) cells->first[cell + 2]++;
    }
    for (size_t c = 2; c < total + 2; c++) cells->first[c] += cells->first[c - 1];
    for (int32_t i = 0; i < count; i++) {
        if (cells->cell_of[i] < 0) continue;
        int32_t slot = cells->first[cells->cell_of[i] + 1]++;
        cells->order[slot] = i;
        cells->x[slot] = (float)scene->x[i][0];
        cells->y[slot] = (float)scene->x[i][1];
        cells->z[slot] = (float)scene->x[i][2];
    }
    return true;
}

static bool silent(const tml_refiner *refiner, int32_t a, int32_t b) {
    int32_t low = a < b ? a : b, high = a < b ? b : a, ahead = high - low;
    if (ahead <= 128) return refiner->near_mask[low][(ahead - 1) / 64] >> ((ahead - 1) % 64) & 1;
    for (int32_t i = refiner->far_first[low]; i < refiner->far_first[low + 1]; i++)
        if (refiner->far[i] == high) return true;
    return false;
}

/* The slots of [begin, end) within the distance² `cut` of one slot go to near; returns how many. */
TML_WIDE static int32_t within(const struct tml_cells *cells, int32_t slot, int32_t begin, int32_t end, float cut, int32_t *near) {
    float x = cells->x[slot], y = cells->y[slot], z = cells->z[slot];
    const float *restrict xs = cells->x, *restrict ys = cells->y, *restrict zs = cells->z;
    float *restrict square = cells->square;
    for (int32_t i = begin; i < end; i++) {
        float dx = xs[i] - x, dy = ys[i] - y, dz = zs[i] - z;
        square[i - begin] = dx * dx + dy * dy + dz * dz;
    }
    int32_t count = 0;
    for (int32_t i = begin; i < end; i++) { /* no branch: hits are too irregular to be predicted */
        near[count] = i;
        count += square[i - begin] < cut;
    }
    return count;
}

/* List the pairs of the atom in `slot` with the run of slots [begin, end). */
static bool list_run(tml_scene *scene, int32_t slot, int32_t begin, int32_t end, float skin) {
    const tml_refiner *refiner = scene->refiner;
    const struct tml_cells *cells = scene->cells;
    if (begin >= end) return true;
    int32_t a = cells->order[slot], class_a = refiner->contacts.class_of[a];
    float far = refiner->contacts.reach[class_a] + skin;
    int32_t hits = within(cells, slot, begin, end, far * far, cells->hits);
    size_t need = (size_t)scene->near_count + (size_t)hits + 4;
    if (need > scene->near_capacity) {
        if (!tml_grow(&scene->near, &scene->near_capacity, need, sizeof *scene->near)) return false;
        if (!tml_grow(&scene->near_contact, &scene->contact_capacity, need, sizeof *scene->near_contact)) return false;
    }
    const float *contact = &refiner->contacts.soft[class_a * refiner->contacts.class_count];
    /* Again without a branch: of the hits, those within their own contact distance and the skin. */
    tml_pair *near = &scene->near[scene->near_count];
    float *touch = &scene->near_contact[scene->near_count];
    int32_t close = 0, kept = 0;
    for (int32_t k = 0; k < hits; k++) {
        int32_t b = cells->order[cells->hits[k]];
        float own = contact[refiner->contacts.class_of[b]], reach = own + skin;
        near[close] = (tml_pair){a, b};
        touch[close] = own;
        close += (own > 0) & (cells->square[cells->hits[k] - begin] < reach * reach);
    }
    for (int32_t k = 0; k < close; k++) {
        near[kept] = near[k];
        touch[kept] = touch[k];
        kept += !silent(refiner, a, near[k].b);
    }
    scene->near_count += kept;
    return true;
}

tml_status tml_scene_list(tml_scene *scene, double skin) {
    const tml_refiner *refiner = scene->refiner;
    const struct tml_cells *cells = scene->cells;
    double reach = refiner->contacts.longest + skin;
    scene->near_count = 0;
    scene->skin = skin;
    memcpy(scene->listed_at, scene->x, ((size_t)refiner->atom_count + 2) * sizeof *scene->x);
    if (refiner->contacts.longest <= 0 || refiner->atom_count == 0) return TML_OK;
    grid g = lay_grid(scene, reach);
    if (!sort_atoms(scene, &g)) return TML_NO_MEMORY;
    const int32_t nx = g.cells[0], ny = g.cells[1], nz = g.cells[2], *first = cells->first;
    for (int32_t z = 0; z < nz; z++)
        for (int32_t y = 0; y < ny; y++)
            for (int32_t x = 0; x < nx; x++) {
                int32_t row = (z * ny + y) * nx, last = x + 1 < nx ? x + 1 : x, before = x > 0 ? x - 1 : x;
                for (int32_t slot = first[row + x]; slot < first[row + x + 1]; slot++) {
                    /* The rest of the own cell and the next one of the row; then the rows ahead. */
                    bool room = list_run(scene, slot, slot + 1, first[row + last + 1], (float)skin);
                    for (int32_t dz = 0; room && dz <= 1 && z + dz < nz; dz++)
                        for (int32_t dy = dz == 0 ? 1 : -1; room && dy <= 1; dy++) {
                            if (y + dy < 0 || y + dy >= ny) continue;
                            int32_t other = ((z + dz) * ny + y + dy) * nx;
                            room = list_run(scene, slot, first[other + before], first[other + last + 1], (float)skin);
                        }
                    if (!room) return TML_NO_MEMORY;
                }
            }
    while (scene->near_count % 4 != 0) {
        scene->near[scene->near_count] = (tml_pair){refiner->atom_count, refiner->atom_count + 1};
        scene->near_contact[scene->near_count++] = 0;
    }
    return TML_OK;
}

tml_status tml_scene_relist(tml_scene *scene, double skin) {
    bool stale = scene->skin < 0;
    double allowed = scene->skin * scene->skin / 4;
    for (int32_t i = 0; !stale && i < scene->refiner->atom_count; i++) {
        tml_v4 d = scene->x[i] - scene->listed_at[i];
        d *= d;
        stale = d[0] + d[1] + d[2] > allowed;
    }
    return stale ? tml_scene_list(scene, skin) : TML_OK;
}

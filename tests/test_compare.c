/* Models compared: clusters, matching of chains, selections of residues, the whole on small files. */
#include <criterion/criterion.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "base/memory.h"
#include "base/pcg.h"
#include "ensemble/compare.h"
#include "input/selection.h"

/* ---- clusters ---- */

/* Points on a line, their distances. */
static float *line_distances(const double *at, int32_t count) {
    float *out = tml_alloc((size_t)count * ((size_t)count - 1) / 2, sizeof *out);
    for (int32_t a = 0; a < count; a++)
        for (int32_t b = a + 1; b < count; b++) out[tml_pair_index(count, a, b)] = (float)fabs(at[a] - at[b]);
    return out;
}

Test(cluster, every_pair_has_a_place_of_its_own) {
    enum { COUNT = 37 };
    bool seen[COUNT * (COUNT - 1) / 2] = {false};
    for (int32_t a = 0; a < COUNT; a++)
        for (int32_t b = a + 1; b < COUNT; b++) {
            size_t at = tml_pair_index(COUNT, a, b);
            cr_assert_eq(at, tml_pair_index(COUNT, b, a));
            cr_assert_lt(at, COUNT * (COUNT - 1) / 2);
            cr_assert(!seen[at]);
            seen[at] = true;
        }
}

Test(cluster, heights_are_mean_distances_worked_out_by_hand) {
    const double at[] = {0, 1, 4, 9};
    float *distances = line_distances(at, 4);
    tml_merge merges[3];
    int32_t labels[4], clusters, made;
    cr_assert_eq(tml_cluster_link(distances, 4, NULL, merges, NULL), TML_OK);
    cr_assert_float_eq(merges[0].height, 1, 1e-6);        /* 0 and 1 */
    cr_assert_float_eq(merges[1].height, 3.5, 1e-6);      /* with 4: (4 + 3) / 2 */
    cr_assert_float_eq(merges[2].height, 22.0 / 3, 1e-5); /* with 9: (9 + 8 + 5) / 3 */
    cr_assert_eq(tml_cluster_merges_below(merges, 4, 0.5), 0);
    cr_assert_eq(tml_cluster_merges_below(merges, 4, 3.5), 2);
    cr_assert_eq(tml_cluster_merges_below(merges, 4, 100), 3);
    /* Mean spreads 1, 8/3, 5 with 3, 2, 1 clusters: penalties 1 + 3, (2/4)(5/3) + 1 + 2, 3 + 1. */
    cr_assert_eq(tml_cluster_least_penalty(merges, 4, &made, NULL), TML_OK);
    cr_assert_eq(made, 2);
    cr_assert_eq(tml_cluster_labels(merges, 4, 2, labels, &clusters, NULL), TML_OK);
    cr_assert_eq(clusters, 2);
    cr_assert(labels[0] == 0 && labels[1] == 0 && labels[2] == 0 && labels[3] == 1);
    free(distances);
}

Test(cluster, one_point_alone_and_points_in_one_place) {
    const double at[5] = {0};
    tml_merge merges[4];
    int32_t labels[5], clusters, made;
    float *distances = line_distances(at, 5);
    cr_assert_eq(tml_cluster_link(distances, 5, NULL, merges, NULL), TML_OK);
    cr_assert_eq(tml_cluster_least_penalty(merges, 5, &made, NULL), TML_OK);
    cr_assert_eq(made, 4); /* no spread at all: one cluster */
    cr_assert_eq(tml_cluster_link(distances, 1, NULL, merges, NULL), TML_OK);
    cr_assert_eq(tml_cluster_least_penalty(merges, 1, &made, NULL), TML_OK);
    cr_assert_eq(made, 0);
    cr_assert_eq(tml_cluster_labels(merges, 1, 0, labels, &clusters, NULL), TML_OK);
    cr_assert(clusters == 1 && labels[0] == 0);
    free(distances);
}

Test(cluster, larger_clusters_come_first_and_merges_name_lowest_members) {
    const double at[] = {100, 0, 1, 101, 2, 50};
    float *distances = line_distances(at, 6);
    tml_merge merges[5];
    int32_t labels[6], clusters;
    cr_assert_eq(tml_cluster_link(distances, 6, NULL, merges, NULL), TML_OK);
    for (int k = 1; k < 5; k++) cr_assert_geq(merges[k].height, merges[k - 1].height);
    cr_assert_eq(tml_cluster_labels(merges, 6, tml_cluster_merges_below(merges, 6, 5), labels, &clusters, NULL), TML_OK);
    const int32_t expected[] = {1, 0, 0, 1, 0, 2};
    cr_assert_eq(clusters, 3);
    for (int i = 0; i < 6; i++) cr_assert_eq(labels[i], expected[i]);
    for (int k = 0; k < 5; k++) cr_assert(merges[k].one != merges[k].other && merges[k].one >= 0 && merges[k].other >= 0);
    free(distances);
}

Test(cluster, a_stop_ends_the_work) {
    const double at[] = {0, 1, 4};
    const volatile int stop = 1;
    float *distances = line_distances(at, 3);
    tml_merge merges[2];
    cr_assert_eq(tml_cluster_link(distances, 3, &stop, merges, NULL), TML_INTERRUPTED);
    free(distances);
}

/* ---- stretches of residues ---- */

static bool holds(const char *text, const char *chain, const char *number) {
    const tml_site_residue residue = {.chain = chain, .number = number, .name = "ALA"};
    tml_stretch stretch;
    bool any = false;
    cr_assert_eq(tml_stretches_check(text, NULL), TML_OK, "%s", text);
    while (tml_stretch_next(&text, &stretch)) any = any || tml_stretch_holds(&stretch, &residue);
    return any;
}

Test(stretch, numbers_insertion_codes_and_chains) {
    cr_assert(holds("A:8-69,B:8-68", "A", "8") && holds("A:8-69,B:8-68", "B", "68") && !holds("A:8-69,B:8-68", "B", "69"));
    cr_assert(holds("-5--3", "X", "-4") && !holds("-5--3", "X", "-2") && !holds("-5--3", "X", "4"));
    cr_assert(holds("A", "A", "anything") && !holds("A", "AA", "1") && !holds("A:1-9", "A", "anything"));
    cr_assert(holds("H:52-52C", "H", "52B") && holds("H:52-52C", "H", "52") && !holds("H:52A-53", "H", "52"));
    cr_assert(holds("H:52A", "H", "52A") && !holds("H:52A", "H", "52B"));
    cr_assert(holds("A:1-2, B:4", "B", "4") && holds(" A:1-2,   B:4", "A", "2") && !holds("A:1-2, B:4", "A", "4"));
    cr_assert(holds("2", "_", "2") && !holds("2", "_", "22") && holds("1:2", "1", "2"));
}

Test(stretch, what_cannot_be_understood_is_refused) {
    const char *const texts[] = {"",      ",",       "A:1-2,", "A:1-2, ", "A:1 ",      "A:", ":1", "A:5-",
                                 "A:9-5", "A:1-2-3", "A:x",    "A:1..3",  "A:52C-52A", "1-", "-",  "A:1234567890"};
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++) {
        tml_error error = {0};
        cr_assert_eq(tml_stretches_check(texts[i], &error), TML_BAD_INPUT, "'%s'", texts[i]);
        cr_assert(strstr(error.message, "no stretch of residues") != NULL);
    }
}

/* ---- matching ---- */

typedef struct text {
    char *at;
    size_t size, used;
} text;

static void add_chain(text *to, const char *chain, const char *const *names, int first, int count) {
    for (int r = 0; r < count; r++)
        to->used += (size_t)snprintf(to->at + to->used, to->size - to->used,
                                     "ATOM      1  CA  %-3s %s%4d    %8.3f%8.3f%8.3f  1.00  0.00           C\n", names[r],
                                     chain, first + r, 1.0 * r, 2.0 * (chain[0] - 'A'), 0.5 * r * r);
}

static void parse(const text *from, tml_coordinates *out) {
    cr_assert_eq(tml_coordinates_parse(from->at, from->used, "text", out, NULL), TML_OK);
}

static const char *partner(const tml_match *match, const char *chain) {
    const char *one, *other;
    for (int32_t i = 0; tml_match_chain(match, i, &one, &other); i++)
        if (strcmp(one, chain) == 0) return other;
    return "no such chain";
}

static const char *const FIRST[] = {"ALA", "GLY", "SER", "TRP", "LEU", "LYS", "GLU", "ASP"};
static const char *const SECOND[] = {"LYS", "LYS", "GLU", "GLU", "VAL", "VAL", "PHE", "TYR"};

Test(match, codes_first_then_residues_and_alike_ones_are_exchanged_in_all_ways) {
    char room[2][8192];
    text one = {room[0], sizeof room[0], 0}, other = {room[1], sizeof room[1], 0};
    tml_coordinates a, b;
    tml_match *match;
    bool counts[64];
    for (int i = 0; i < 64; i++) counts[i] = true;
    add_chain(&one, "A", FIRST, 1, 8);
    add_chain(&one, "B", SECOND, 1, 8);
    add_chain(&one, "C", FIRST, 1, 8);
    add_chain(&one, "D", FIRST, 1, 8);
    add_chain(&other, "Q", SECOND, 1, 8); /* alone in its kind, under another code */
    add_chain(&other, "D", FIRST, 1, 8);
    add_chain(&other, "A", FIRST, 1, 7);
    add_chain(&other, "X", FIRST, 1, 8);
    parse(&one, &a);
    parse(&other, &b);
    cr_assert_eq(tml_match_new(&a, &b, counts, &match, NULL), TML_OK);
    cr_assert_str_eq(partner(match, "A"), "A");
    cr_assert_str_eq(partner(match, "B"), "Q");
    cr_assert_str_eq(partner(match, "C"), "X");
    cr_assert_str_eq(partner(match, "D"), "D");
    cr_assert_eq(tml_match_atoms(match)[7], -1); /* the eighth residue, which A lacks there */
    int ways = 1;
    char seen[6][4] = {"AXD"};
    for (; tml_match_next(match); ways++) {
        cr_assert_lt(ways, 6);
        snprintf(seen[ways], sizeof seen[ways], "%c%c%c", *partner(match, "A"), *partner(match, "C"), *partner(match, "D"));
        for (int k = 0; k < ways; k++) cr_assert_str_neq(seen[k], seen[ways]);
        cr_assert_str_eq(partner(match, "B"), "Q");
        if (ways == 3) tml_match_keep(match);
    }
    cr_assert_eq(ways, 6);
    cr_assert_str_eq(partner(match, "C"), "X"); /* what codes tell is back */
    tml_match_restore(match);
    cr_assert(*partner(match, "A") == seen[3][0] && *partner(match, "C") == seen[3][1]);
    for (int32_t k = 0; k < 8; k++) {
        int32_t to = tml_match_atoms(match)[16 + k];
        cr_assert(to >= 0 || (seen[3][1] == 'A' && k == 7));
        if (to >= 0) cr_assert_eq(b.residues[b.atoms[to].residue].chain[0], seen[3][1]);
    }
    cr_assert_eq(tml_match_renamed(match), 0);
    tml_match_free(match);
    tml_coordinates_clear(&a);
    tml_coordinates_clear(&b);
}

Test(match, the_same_code_goes_before_the_same_residues_and_strangers_stay_alone) {
    char room[2][8192];
    text one = {room[0], sizeof room[0], 0}, other = {room[1], sizeof room[1], 0};
    tml_coordinates a, b;
    tml_match *match;
    bool counts[64];
    for (int i = 0; i < 64; i++) counts[i] = true;
    add_chain(&one, "A", FIRST, 1, 8);
    add_chain(&one, "Z", FIRST, 1, 8);
    add_chain(&other, "A", SECOND, 1, 8); /* a mutant */
    add_chain(&other, "B", SECOND, 1, 8);
    parse(&one, &a);
    parse(&other, &b);
    cr_assert_eq(tml_match_new(&a, &b, counts, &match, NULL), TML_OK);
    cr_assert_str_eq(partner(match, "A"), "A");
    cr_assert_null(partner(match, "Z"));
    cr_assert_eq(tml_match_renamed(match), 8);
    cr_assert(!tml_match_next(match));
    tml_match_free(match);
    tml_coordinates_clear(&a);
    tml_coordinates_clear(&b);
}

Test(match, too_many_alike_chains_stay_where_their_codes_put_them) {
    char room[16384], code[2] = "A";
    text one = {room, sizeof room, 0};
    tml_coordinates a;
    tml_match *match;
    bool counts[128];
    for (int i = 0; i < 128; i++) counts[i] = true;
    for (int k = 0; k < 8; k++, code[0]++) add_chain(&one, code, FIRST, 1, 4);
    parse(&one, &a);
    cr_assert_eq(tml_match_new(&a, &a, counts, &match, NULL), TML_OK);
    cr_assert(tml_match_too_many(match));
    cr_assert(!tml_match_next(match));
    for (int32_t i = 0; i < 32; i++) cr_assert_eq(tml_match_atoms(match)[i], i);
    tml_match_free(match);
    memset(counts, 0, sizeof counts);
    memset(counts, 1, 8); /* two chains alone are superposed: only these are worth exchanging */
    cr_assert_eq(tml_match_new(&a, &a, counts, &match, NULL), TML_OK);
    cr_assert(!tml_match_too_many(match));
    int ways = 1;
    while (tml_match_next(match)) ways++;
    cr_assert_eq(ways, 2);
    tml_match_free(match);
    tml_coordinates_clear(&a);
}

/* ---- the public functions ---- */

static void write_file(char path[32], const text *from) {
    snprintf(path, 32, "/tmp/trammel-test-XXXXXX");
    int file = mkstemp(path);
    cr_assert_geq(file, 0);
    cr_assert_eq(write(file, from->at, from->used), (ssize_t)from->used);
    close(file);
}

Test(compare, figures_and_ends_of_lists) {
    char room[8192], path[32];
    text models = {room, sizeof room, 0};
    for (int m = 0; m < 3; m++) {
        add_chain(&models, "A", FIRST, 1, 8);
        models.used += (size_t)snprintf(room + models.used, sizeof room - models.used, "ENDMDL\n");
    }
    write_file(path, &models);
    tml_compare_options options;
    tml_comparison *c;
    tml_compare_facts facts;
    tml_compared_model model;
    tml_compared_residue residue;
    tml_compared_atom atom;
    tml_compare_defaults(&options);
    cr_assert_eq(tml_compare(path, NULL, &options, NULL, &c, NULL), TML_OK);
    tml_comparison_facts(c, &facts);
    cr_assert(facts.models == 3 && facts.atoms == 8 && facts.residues == 8 && facts.core_residues == 8 &&
              facts.superposed_atoms == 8);
    cr_assert(facts.pair_greatest < 1e-5 && facts.clusters == 1 && facts.reference_models == 0 && isnan(facts.reference_mean));
    cr_assert(tml_comparison_model(c, 2, &model) && !tml_comparison_model(c, 3, &model) &&
              !tml_comparison_model(c, -1, &model));
    cr_assert(isnan(model.to_reference));
    cr_assert(tml_comparison_residue(c, 7, &residue) && !tml_comparison_residue(c, 8, &residue));
    cr_assert(strcmp(residue.number, "8") == 0 && residue.core && isnan(residue.order_phi));
    cr_assert(tml_comparison_atom(c, 7, &atom) && !tml_comparison_atom(c, 8, &atom) && atom.superposed);
    cr_assert(isnan(tml_comparison_pair(c, 0, 3)) && tml_comparison_pair(c, 1, 1) == 0);
    cr_assert(tml_comparison_coordinates(c, 2) != NULL && tml_comparison_coordinates(c, 3) == NULL);
    tml_comparison_free(c);
    tml_comparison_free(NULL);
    int stop = 1;
    const tml_watch watch = {.stop = &stop};
    cr_assert_eq(tml_compare(path, path, &options, &watch, &c, NULL), TML_INTERRUPTED);
    cr_assert_null(c);
    options.core = "A:";
    cr_assert_eq(tml_compare(path, NULL, &options, NULL, &c, NULL), TML_BAD_INPUT);
    unlink(path);
}

/* difference.c: where two problems differ, for people and for programs. */
#include "restraint/difference.h"

#include <math.h>
#include <string.h>

#include "base/vector.h"
#include "output/output.h"
#include "output/report.h"
#include "output/values.h"

/* Contents: words - for people - for programs */

enum { WIDTH = TML_REPORT_WIDTH, LINE = 700, SHOWN = 12 };

/* ---- words ---- */

static const char *const WORDS[TML_RELATION_COUNT] = {
    "the same in both", "the same atoms, other limits", "the same limits, more atoms in one than in the other",
    "the same limits and residues, other atoms", "only here", "only there"};
static const char *const KEYS[TML_RELATION_COUNT] = {"same", "other_limits", "within", "other_atoms", "only_here", "only_there"};

/* "17 of list (set.nef:120): A:5:HB2 - A:9:H and 3 other pairs, 1.80 to 5.00 Å" */
static void say_distance(const tml_problem *problem, int32_t index, char *text, size_t size) {
    const tml_restraints *restraints = &problem->restraints;
    const tml_distance_restraint *at = &restraints->distances[index];
    const tml_alternative *first = &restraints->alternatives[at->first_alternative];
    char a[128], b[128], upper[32] = "", others[48] = "";
    tml_molecule_address(&problem->molecule, restraints->group_atoms[first->first_a], a, sizeof a);
    tml_molecule_address(&problem->molecule, restraints->group_atoms[first->first_b], b, sizeof b);
    if (!isinf(at->upper)) snprintf(upper, sizeof upper, " to %.2f", at->upper);
    if (at->pair_count > 1) snprintf(others, sizeof others, " and %d other pair%s", at->pair_count - 1, at->pair_count == 2 ? "" : "s");
    snprintf(text, size, "%.40s (line %d): %s - %s%s, %.2f%s Å", at->id, at->place.line, a, b, others, at->lower, upper);
}

static void say_dihedral(const tml_problem *problem, int32_t index, char *text, size_t size) {
    const double degrees = 180.0 / TML_PI;
    const tml_dihedral_restraint *at = &problem->restraints.dihedrals[index];
    const tml_dihedral_interval *first = &problem->restraints.intervals[at->first_interval];
    char names[4][96];
    for (int k = 0; k < 4; k++) tml_molecule_address(&problem->molecule, first->atoms[k], names[k], sizeof names[k]);
    snprintf(text, size, "%.40s (line %d): %s - %s - %s - %s, %.2f to %.2f°", at->id, at->place.line, names[0], names[1], names[2], names[3],
             first->lower * degrees, first->upper * degrees);
}

/* ---- for people ---- */

static void tell_atoms(tml_file *file, const tml_difference *d) {
    char name[128];
    const struct { int32_t count, first; const tml_molecule *molecule; const char *where; } sides[] = {
        {d->atoms_only_one, d->first_only_one, &d->one->molecule, "here"}, {d->atoms_only_other, d->first_only_other, &d->other->molecule, "there"}};
    for (int k = 0; k < 2; k++) {
        if (sides[k].count == 0) continue;
        tml_molecule_address(sides[k].molecule, sides[k].first, name, sizeof name);
        tml_file_print(file, "%8d atom%s only %s; the first: %s\n", sides[k].count, sides[k].count == 1 ? "" : "s", sides[k].where, name);
    }
    if (d->atoms_only_one + d->atoms_only_other == 0) tml_file_print(file, "%8d atoms, the same in both\n", d->one->molecule.atom_count);
    if (d->bonds_only_one > 0) tml_file_print(file, "%8d bonds only here\n", d->bonds_only_one);
    if (d->bonds_only_other > 0) tml_file_print(file, "%8d bonds only there\n", d->bonds_only_other);
}

static void tell_related(tml_file *file, const tml_difference *d, const tml_related *list, int32_t count, const int32_t *of, const char *what,
                         void (*say)(const tml_problem *, int32_t, char *, size_t)) {
    for (int k = 0; k < TML_RELATION_COUNT; k++)
        if (of[k] > 0) tml_file_print(file, "%8d %s: %s\n", of[k], what, WORDS[k]);
    for (int k = TML_OTHER_LIMITS; k < TML_RELATION_COUNT; k++) {
        int32_t shown = 0;
        char here[LINE], there[LINE];
        if (of[k] == 0) continue;
        tml_file_print(file, "\n%s: %s\n", what, WORDS[k]);
        for (int32_t i = 0; i < count && shown < SHOWN; i++) {
            if ((int)list[i].relation != k) continue;
            shown++;
            if (list[i].one >= 0) say(d->one, list[i].one, here, sizeof here);
            if (list[i].other >= 0) say(d->other, list[i].other, there, sizeof there);
            if (list[i].one >= 0) tml_file_paragraph(file, WIDTH, "  here  ", "        ", "%s", here);
            if (list[i].other >= 0) tml_file_paragraph(file, WIDTH, "  there ", "        ", "%s", there);
        }
        if (shown < of[k]) tml_file_print(file, "  … and %d more; --json lists all\n", of[k] - shown);
    }
}

tml_status tml_print_difference(FILE *out, const tml_difference *d, tml_error *error) {
    tml_file *file;
    tml_status status = tml_file_wrap(out, &file, error);
    if (status != TML_OK) return status;
    const char *other = d->other->file_count > 0 ? d->other->files[0] : "";
    tml_file_print(file, "\n");
    tml_file_paragraph(file, WIDTH, "", "  ", "Against %s (there), by atoms and limits", other);
    tell_atoms(file, d);
    tell_related(file, d, d->distances, d->distance_count, d->distance_of, "distances", say_distance);
    tell_related(file, d, d->dihedrals, d->dihedral_count, d->dihedral_of, "dihedrals", say_dihedral);
    return tml_file_close(file, error);
}

/* ---- for programs ---- */

static json_t *named(const char *list, const char *id, int32_t line) {
    return json_pack("{s:o, s:o, s:i}", "list", tml_json_text(list), "id", tml_json_text(id), "line", line);
}

static json_t *distance_name(const tml_problem *problem, int32_t index) {
    if (index < 0) return json_null();
    const tml_distance_restraint *at = &problem->restraints.distances[index];
    return named(at->list, at->id, at->place.line);
}

static json_t *dihedral_name(const tml_problem *problem, int32_t index) {
    if (index < 0) return json_null();
    const tml_dihedral_restraint *at = &problem->restraints.dihedrals[index];
    return named(at->list, at->id, at->place.line);
}

static json_t *related_json(const tml_difference *d, const tml_related *list, int32_t count, const int32_t *of,
                            json_t *(*name)(const tml_problem *, int32_t)) {
    json_t *counts = json_object(), *items = json_array();
    for (int k = 0; k < TML_RELATION_COUNT; k++) tml_json_put(&counts, KEYS[k], json_integer(of[k]));
    for (int32_t i = 0; i < count; i++)
        if (list[i].relation != TML_SAME)
            tml_json_append(&items, json_pack("{s:s, s:o, s:o}", "relation", KEYS[list[i].relation], "here", name(d->one, list[i].one), "there",
                                              name(d->other, list[i].other)));
    return json_pack("{s:o, s:o}", "counts", counts, "differences", items);
}

json_t *tml_difference_json(const tml_difference *d) {
    return json_pack("{s:o, s:i, s:i, s:i, s:i, s:o, s:o}", "file", tml_json_text(d->other->file_count > 0 ? d->other->files[0] : ""),
                     "atoms_only_here", d->atoms_only_one, "atoms_only_there", d->atoms_only_other, "bonds_only_here", d->bonds_only_one,
                     "bonds_only_there", d->bonds_only_other, "distances",
                     related_json(d, d->distances, d->distance_count, d->distance_of, distance_name), "dihedrals",
                     related_json(d, d->dihedrals, d->dihedral_count, d->dihedral_of, dihedral_name));
}

/* comparison.c: the report of a comparison for people, 100 columns wide at most. */
#include <math.h>
#include <string.h>

#include "output/file.h"
#include "output/output.h"
#include "output/words.h"

/* Contents: words - head - figures - clusters - tables */

enum { WIDTH = 100, LINE = 512, NAME = 160, STRETCHES = 4000 };

static const char *plural(int64_t count) {
    return count == 1 ? "" : "s";
}

/* ---- words ---- */

void tml_say_core(const tml_comparison *c, char *text, size_t size) {
    if (c->alone)
        snprintf(text, size, "all of it: one model alone does not tell its core");
    else if (c->kind == TML_CORE_ALL)
        snprintf(text, size, "all of it, as asked");
    else if (c->kind == TML_CORE_GIVEN)
        snprintf(text, size, "as asked");
    else if (c->kind == TML_CORE_ORDER)
        snprintf(text, size, "order parameters of phi and psi (Hyberts et al. 1992) of %.1f or more", TML_ORDER_LEAST);
    else if (isinf(c->met))
        snprintf(text, size, "all of it: no part was found on which the models agree");
    else
        snprintf(text, size,
                 "superposed by turns, leaving out what strays (after Gerstein & Altman 1995): spread about the mean of %.1f Å "
                 "or less%s",
                 c->met, c->met > TML_CORE_CUTOFF ? ", which is wide: nothing agrees better" : "");
}

void tml_say_cut(const tml_comparison *c, char *text, size_t size) {
    if (c->cut_given)
        snprintf(text, size, "average linkage, joined up to a mean distance of %g Å, as asked", c->cut_asked);
    else
        snprintf(text, size,
                 "average linkage, joined up to a mean distance of %.2f Å, where the penalty of Kelley, Gardner & "
                 "Sutcliffe (1996) is least",
                 c->cut);
}

static const char *chain_of(const tml_site_residue *residue) {
    return strcmp(residue->chain, "_") == 0 ? "" : residue->chain;
}

static void say_residue(const tml_site_residue *residue, char *text, size_t size) {
    const char *chain = chain_of(residue);
    snprintf(text, size, "%s%s%s", chain, *chain == '\0' ? "" : ":", residue->number);
}

void tml_say_compared_atom(const tml_comparison *c, int32_t atom, char *text, size_t size) {
    char residue[NAME];
    say_residue(&c->models.residues[c->residues[c->residue_of[atom]]], residue, sizeof residue);
    snprintf(text, size, "%s:%s", residue, tml_compared_site(c, atom)->name);
}

/* ---- head ---- */

/* Stretches of residues whose atoms are superposed, or these atoms' names; what does not fit is cut off with an ellipsis. */
static void say_stretches(const tml_comparison *c, char *text) {
    size_t used = 0;
    text[0] = '\0';
    for (int32_t k = 0; k < c->fitted_count;) {
        char first[NAME], part[LINE];
        int32_t begin = c->residue_of[c->fitted[k]], end = begin;
        const tml_site_residue *from = &c->models.residues[c->residues[begin]];
        if (!c->polymer) {
            tml_say_compared_atom(c, c->fitted[k++], part, sizeof part);
        } else {
            for (; k < c->fitted_count; k++) {
                int32_t next = c->residue_of[c->fitted[k]];
                if (next > end + 1 || strcmp(c->models.residues[c->residues[next]].chain, from->chain) != 0) break;
                end = next;
            }
            say_residue(from, first, sizeof first);
            snprintf(part, sizeof part, begin == end ? "%s" : "%s-%s", first, c->models.residues[c->residues[end]].number);
        }
        if (used + strlen(part) + 8 > STRETCHES) {
            snprintf(text + used, STRETCHES - used, ", …");
            return;
        }
        used += (size_t)snprintf(text + used, STRETCHES - used, "%s%s", used == 0 ? "" : ", ", part);
    }
}

static void tell_head(tml_file *file, const tml_comparison *c, const tml_compare_facts *facts) {
    char core[LINE], stretches[STRETCHES];
    tml_say_core(c, core, sizeof core);
    say_stretches(c, stretches);
    tml_file_paragraph(file, WIDTH, "", "  ", "%d model%s; %d atom%s of %d residue%s%s", facts->models, plural(facts->models),
                       facts->atoms, plural(facts->atoms), facts->residues, plural(facts->residues),
                       facts->models > 1 ? " that all of them have" : "");
    if (c->missing > 0)
        tml_file_paragraph(file, WIDTH, "", "  ", "%d atom%s that some models lack %s left out", c->missing, plural(c->missing),
                           c->missing == 1 ? "is" : "are");
    if (c->models.alternatives > 0)
        tml_file_paragraph(file, WIDTH, "", "  ", "%zu alternative place%s passed over", c->models.alternatives,
                           c->models.alternatives == 1 ? " is" : "s are");
    tml_file_paragraph(file, WIDTH, "superposed: ", "  ", "%d atom%s (%s%s) of %d residue%s", facts->superposed_atoms,
                       plural(facts->superposed_atoms), c->atoms_text,
                       c->heavy_instead ? ": there is none, so heavy atoms" : "", facts->core_residues,
                       plural(facts->core_residues));
    tml_file_paragraph(file, WIDTH, "core: ", "  ", "%s", stretches);
    tml_file_paragraph(file, WIDTH, "  ", "  ", "(%s)", core);
}

/* ---- figures ---- */

static void range_of(const double *values, int32_t count, double *least, double *greatest) {
    *least = INFINITY;
    *greatest = -INFINITY;
    for (int32_t i = 0; i < count; i++) {
        *least = fmin(*least, values[i]);
        *greatest = fmax(*greatest, values[i]);
    }
}

static void tell_figures(tml_file *file, const tml_comparison *c, const tml_compare_facts *facts) {
    double least, greatest;
    bool several = facts->models > 1;
    tml_file_print(file, "\nr.m.s. distances, Å                         mean    least  greatest\n");
    if (several) {
        range_of(c->to_mean, c->model_count, &least, &greatest);
        tml_file_print(file, "two models from each other              %8.3f %8.3f  %8.3f\n", facts->pair_mean,
                       facts->pair_least, facts->pair_greatest);
        tml_file_print(file, "models from their mean structure        %8.3f %8.3f  %8.3f\n", facts->mean_to_mean, least,
                       greatest);
    }
    if (c->reference.match != NULL) {
        tml_file_print(file, "models from the reference               %8.3f %8.3f  %8.3f\n", c->reference.mean,
                       c->reference.least, c->reference.greatest);
        if (several) {
            tml_file_print(file, "mean structure from the reference       %8.3f\n", facts->mean_to_reference);
            tml_file_print(file, "medoid from the reference               %8.3f\n", facts->medoid_to_reference);
        }
    }
    if (several)
        tml_file_print(file, "\nmedoid: model %d, on average %.3f Å from the others\n", facts->medoid + 1,
                       c->to_others[c->medoid]);
}

static void tell_chains(tml_file *file, const tml_comparison *c) {
    const tml_match *match = c->reference.match;
    const char *one, *other;
    int32_t renamed = tml_match_renamed(match);
    for (int32_t i = 0; tml_match_chain(match, i, &one, &other); i++) {
        if (other == NULL)
            tml_file_paragraph(file, WIDTH, "  ", "    ", "chain %s of the models has no partner in the reference", one);
        else if (strcmp(one, other) != 0)
            tml_file_paragraph(file, WIDTH, "  ", "    ", "chain %s of the models is compared with chain %s of the reference",
                               one, other);
    }
    if (c->reference.exchanged)
        tml_file_paragraph(
            file, WIDTH, "  ", "    ",
            "alike chains were exchanged, because they fit the reference better than in the order of their codes");
    if (tml_match_too_many(match))
        tml_file_paragraph(file, WIDTH, "  ", "    ",
                           "there are too many chains to try which alike ones fit best; their codes decide");
    if (renamed > 0)
        tml_file_paragraph(file, WIDTH, "  ", "    ", "%d residue%s another name in the reference", renamed,
                           renamed == 1 ? " has" : "s have");
}

static void tell_reference(tml_file *file, const tml_comparison *c) {
    const tml_reference *reference = &c->reference;
    if (reference->match == NULL) return;
    int32_t models = reference->coordinates.model_count;
    tml_file_print(file, "\n");
    if (models > 1)
        tml_file_paragraph(file, WIDTH, "reference: ", "  ", "model %d of %d, the medoid of them on the atoms in common",
                           reference->medoid + 1, models);
    else
        tml_file_paragraph(file, WIDTH, "reference: ", "  ", "one model");
    tml_file_paragraph(file, WIDTH, "  ", "    ", "%d of the %d superposed atoms are in it, %d of all %d", reference->common,
                       c->fitted_count, reference->common_all, c->atom_count);
    tell_chains(file, c);
}

/* ---- clusters ---- */

static void tell_clusters(tml_file *file, const tml_comparison *c) {
    char rule[LINE];
    if (c->model_count < 2) return;
    tml_say_cut(c, rule, sizeof rule);
    tml_file_paragraph(file, WIDTH, "\nclusters: ", "  ", "%d (%s)", c->cluster_count, rule);
    for (int32_t k = 0; k < c->cluster_count; k++) {
        char members[STRETCHES] = "", first[LINE];
        size_t used = 0;
        int32_t size = 0;
        for (int32_t m = 0; m < c->model_count; m++) {
            if (c->cluster[m] != k) continue;
            size++;
            if (used + 32 < sizeof members) used += (size_t)snprintf(members + used, sizeof members - used, " %d", m + 1);
            if (used + 32 >= sizeof members) snprintf(members + used, sizeof members - used, " …");
        }
        snprintf(first, sizeof first, "%6d  %d model%s, model %d in the middle:", k + 1, size, plural(size),
                 c->representatives[k] + 1);
        tml_file_paragraph(file, WIDTH, first, "        ", "%s", members);
    }
}

/* ---- tables ---- */

/* A figure in a column, or a dash where there is none. */
static const char *figure(double value, int decimals, char text[32]) {
    if (isnan(value))
        snprintf(text, 32, "-");
    else
        snprintf(text, 32, "%.*f", decimals, value);
    return text;
}

static void tell_models(tml_file *file, const tml_comparison *c) {
    bool reference = c->reference.match != NULL;
    tml_file_print(file, "\nmodel  to others, Å  to mean, Å%s  cluster\n", reference ? "  to reference, Å" : "");
    for (int32_t m = 0; m < c->model_count; m++) {
        char text[32];
        tml_compared_model model;
        tml_comparison_model(c, m, &model);
        tml_file_print(file, "%5d  %12s  %10.3f", m + 1, figure(model.to_others, 3, text), model.to_mean);
        if (reference) tml_file_print(file, "  %15.3f", model.to_reference);
        tml_file_print(file, "  %7d%s\n", model.cluster + 1, m == c->medoid && c->model_count > 1 ? "  medoid" : "");
    }
}

static void tell_residues(tml_file *file, const tml_comparison *c) {
    tml_compared_residue residue;
    if (c->model_count < 2) return;
    tml_file_print(file, "\nresidue           spread, Å  of heavy atoms  S(phi)  S(psi)\n");
    for (int32_t r = 0; tml_comparison_residue(c, r, &residue); r++) {
        char name[NAME], label[NAME], text[4][32];
        say_residue(&c->models.residues[c->residues[r]], label, sizeof label);
        snprintf(name, sizeof name, "%.60s %.60s", label, residue.name);
        tml_file_paragraph(file, WIDTH, "", "", "%-16s  %9s  %14s  %6s  %6s%s", name, figure(residue.spread, 2, text[0]),
                           figure(residue.heavy_spread, 2, text[1]), figure(residue.order_phi, 2, text[2]),
                           figure(residue.order_psi, 2, text[3]), residue.core ? "  core" : "");
    }
}

tml_status tml_print_comparison(FILE *out, const tml_comparison *c, tml_error *error) {
    tml_file *file;
    tml_compare_facts facts;
    tml_status status = tml_file_wrap(out, &file, error);
    if (status != TML_OK) return status;
    tml_comparison_facts(c, &facts);
    tell_head(file, c, &facts);
    tell_reference(file, c);
    tell_figures(file, c, &facts);
    tell_clusters(file, c);
    tell_models(file, c);
    tell_residues(file, c);
    return tml_file_close(file, error);
}

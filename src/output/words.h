/* words.h: findings in words and figures, shared by all reports and model files. */
#ifndef TML_WORDS_H
#define TML_WORDS_H

#include "bounds/bounds.h"
#include "ensemble/compare.h"
#include "ensemble/ensemble.h"
#include "output/file.h"

/* One step of a proof as a line's worth of text: "A:5:HA - A:9:HB2  at least 6.00 Å  restraint 17 of list noe (set.nef:120)". */
void tml_say_step(const tml_problem *problem, const tml_step *step, char *text, size_t size);

/* What the proof proves, in one sentence. */
void tml_say_conflict(const tml_problem *problem, const tml_contradiction *conflict, char *text, size_t size);

/* The rule by which models were chosen, in one sentence. */
void tml_say_selection(const tml_ensemble *ensemble, char *text, size_t size);

/* The rule of passing, what the models are not, and what an assessment is not. */
extern const char tml_words_passing[], tml_words_warning[], tml_words_measured[];

/* Where a restraint stands and what it is called: list, id, place; "" and the unknown place for a step that is none. */
typedef struct tml_source { const char *list, *id, *file; int32_t line; bool is_restraint; } tml_source;
tml_source tml_source_of(const tml_problem *problem, const tml_given *given);

/* The smallest change of one of the user's distance limits that ends a contradiction: which, and by how many Å. false where
 * only dihedral restraints take part. */
typedef struct tml_repair { int32_t restraint; bool upper; double loosen; } tml_repair;
bool tml_repair_of(const tml_problem *problem, const tml_contradiction *conflict, tml_repair *repair);

/* Distance restraints by range, each id once. */
void tml_count_ranges(const tml_problem *problem, int32_t counts[TML_RANGE_COUNT]);
extern const char *const tml_range_words[TML_RANGE_COUNT]; /* intra, sequential, medium, long, inter_chain */

/* How the core of a comparison was chosen, and by which rule its clusters were cut; one sentence's worth each. */
void tml_say_core(const tml_comparison *comparison, char *text, size_t size);
void tml_say_cut(const tml_comparison *comparison, char *text, size_t size);

/* An atom or a residue of a comparison; without the chain where the file has none. */
void tml_say_compared_atom(const tml_comparison *comparison, int32_t atom, char *text, size_t size);

#endif

/* report.h: parts that the reports for people have in common. Each writes its lines, with a heading and an empty line before it where
 * it has something to say.
 */
#ifndef TML_REPORT_H
#define TML_REPORT_H

#include "ensemble/ensemble.h"
#include "output/file.h"

enum { TML_REPORT_WIDTH = 100 };

/* What the inputs hold: title, atoms, restraints. */
void tml_tell_problem(tml_file *file, const tml_problem *problem);

/* Restraints violated in some model by more than `over` Å or `over_angle` degrees, in most models first. TML_OK or TML_NO_MEMORY. */
tml_status tml_tell_worst(tml_file *file, const tml_ensemble *ensemble, double over, double over_angle, tml_error *error);

/* Spread, and the stretches of residues that are well defined. */
void tml_tell_agreement(tml_file *file, const tml_ensemble *ensemble);

/* Open stereo pairs that all models assign alike. */
void tml_tell_stereo(tml_file *file, const tml_ensemble *ensemble);

void tml_tell_unmapped(tml_file *file, const tml_problem *problem);
void tml_tell_notes(tml_file *file, const tml_problem *problem);

#endif

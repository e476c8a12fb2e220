/* build.h: the whole way from a problem to an ensemble: bounds, trials on all threads, judging in order, selection.
 *
 * What it offers, tml_build and its options, is public and stands in trammel.h.
 */
#ifndef TML_BUILD_H
#define TML_BUILD_H

#include "bounds/bounds.h"
#include "ensemble/ensemble.h"

#endif

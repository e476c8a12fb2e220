/* clock.h: elapsed time for summaries; it never decides what is computed. */
#ifndef TML_CLOCK_H
#define TML_CLOCK_H

double tml_seconds(void); /* monotonic, from an arbitrary start */

#endif

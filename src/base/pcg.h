/* pcg.h: PCG XSH RR 64/32 random numbers.
 *
 * Source: M. E. O'Neill, "PCG: A Family of Simple Fast Space-Efficient Statistically Good Algorithms for Random Number
 * Generation", Harvey Mudd College HMC-CS-2014-0905 (2014). The same seed and stream give the same numbers everywhere.
 */
#ifndef TML_PCG_H
#define TML_PCG_H

#include <stdint.h>

typedef struct tml_pcg {
    uint64_t state, increment;
    double spare;
    int has_spare;
} tml_pcg;

/* Start at `state` of sequence `stream`, as the paper's reference does. */
void tml_pcg_seed(tml_pcg *pcg, uint64_t state, uint64_t stream);

/* Start the generator of one trial (or any numbered task) of a run: state and stream are hashed from both. */
void tml_pcg_seed_trial(tml_pcg *pcg, uint64_t seed, uint64_t trial);

uint32_t tml_pcg_next(tml_pcg *pcg);
uint32_t tml_pcg_below(tml_pcg *pcg, uint32_t bound); /* uniform in 0 … bound-1, no bias; bound > 0 */
double tml_pcg_uniform(tml_pcg *pcg);                 /* uniform in [0, 1), 53 bits */
double tml_pcg_normal(tml_pcg *pcg);                  /* mean 0, variance 1 (Box & Muller 1958) */

#endif

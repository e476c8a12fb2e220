#include "base/pcg.h"

#include <math.h>

static const uint64_t MULTIPLIER = 6364136223846793005u;

void tml_pcg_seed(tml_pcg *pcg, uint64_t state, uint64_t stream) {
    pcg->has_spare = 0;
    pcg->spare = 0.0;
    pcg->state = 0;
    pcg->increment = (stream << 1) | 1u;
    tml_pcg_next(pcg);
    pcg->state += state;
    tml_pcg_next(pcg);
}

/* The finaliser of SplitMix64 (Steele, Lea & Flood 2014): every input bit reaches every output bit. */
static uint64_t mix(uint64_t x) {
    x += 0x9e3779b97f4a7c15u;
    x = (x ^ (x >> 30)) * 0xbf58476d1ce4e5b9u;
    x = (x ^ (x >> 27)) * 0x94d049bb133111ebu;
    return x ^ (x >> 31);
}

void tml_pcg_seed_trial(tml_pcg *pcg, uint64_t seed, uint64_t trial) {
    tml_pcg_seed(pcg, mix(seed ^ mix(trial)), mix(trial + 0x5851f42du));
}

uint32_t tml_pcg_next(tml_pcg *pcg) {
    uint64_t old = pcg->state;
    pcg->state = old * MULTIPLIER + pcg->increment;
    uint32_t shifted = (uint32_t)(((old >> 18) ^ old) >> 27);
    uint32_t turn = (uint32_t)(old >> 59);
    return (shifted >> turn) | (shifted << ((-turn) & 31));
}

uint32_t tml_pcg_below(tml_pcg *pcg, uint32_t bound) {
    uint32_t threshold = -bound % bound;
    for (;;) {
        uint32_t drawn = tml_pcg_next(pcg);
        if (drawn >= threshold) return drawn % bound;
    }
}

double tml_pcg_uniform(tml_pcg *pcg) {
    uint64_t high = tml_pcg_next(pcg) >> 5, low = tml_pcg_next(pcg) >> 6;
    return (double)(high * 67108864u + low) / 9007199254740992.0;
}

double tml_pcg_normal(tml_pcg *pcg) {
    if (pcg->has_spare) {
        pcg->has_spare = 0;
        return pcg->spare;
    }
    const double two_pi = 6.283185307179586;
    double radius = sqrt(-2.0 * log(1.0 - tml_pcg_uniform(pcg)));
    double turn = two_pi * tml_pcg_uniform(pcg);
    pcg->spare = radius * sin(turn);
    pcg->has_spare = 1;
    return radius * cos(turn);
}

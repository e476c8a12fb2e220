// base/pcg against the generator's own reference implementation, by the author of the paper (headers from Debian).

#include <cstdio>
#include <cstdint>

#include <pcg_random.hpp>

extern "C" {
#include "base/pcg.h"
}

static int passed, failed;

static void tell(bool good, const char *what) {
    good ? passed++ : failed++;
    if (!good) std::printf("failed: %s\n", what);
}

static bool same_numbers(uint64_t state, uint64_t stream, int count) {
    pcg32 theirs(state, stream);
    tml_pcg ours;
    tml_pcg_seed(&ours, state, stream);
    for (int i = 0; i < count; i++)
        if (theirs() != tml_pcg_next(&ours)) return false;
    return true;
}

static bool same_below(uint32_t bound, int count) {
    pcg32 theirs(7u, 11u);
    tml_pcg ours;
    tml_pcg_seed(&ours, 7u, 11u);
    for (int i = 0; i < count; i++)
        if (theirs(bound) != tml_pcg_below(&ours, bound)) return false;
    return true;
}

int main() {
    tell(same_numbers(42u, 54u, 100000), "seed 42, sequence 54");
    tell(same_numbers(0u, 0u, 100000), "seed 0, sequence 0");
    tell(same_numbers(UINT64_MAX, UINT64_MAX, 100000), "largest seed and sequence");
    bool all = true;
    for (uint64_t i = 0; i < 1000; i++) all = all && same_numbers(i * 0x9e3779b97f4a7c15u, i * i, 100);
    tell(all, "a thousand seeds and sequences");
    tell(same_below(6u, 10000), "numbers below 6");
    tell(same_below(0x80000001u, 10000), "numbers below 2^31 + 1, where half of the draws are thrown away");
    std::printf("%d passed, %d failed\n", passed, failed);
    return failed != 0;
}

#include <criterion/criterion.h>

#include "base/pcg.h"

/* Source: O'Neill's reference C implementation, output of its demonstration program for seed 42, sequence 54; also in
 * HMC-CS-2014-0905's companion code. Values typed from memory of that published output. */
Test(pcg, first_outputs_are_the_published_ones) {
    const uint32_t published[6] = {0xa15c02b7, 0x7b47f409, 0xba1d3330, 0x83d2f293, 0xbfa4784b, 0xcbed606e};
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 42, 54);
    for (int i = 0; i < 6; i++) cr_assert_eq(tml_pcg_next(&pcg), published[i], "number %d", i);
}

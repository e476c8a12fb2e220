/* Superposes sets of points from standard input, for test_superpose.py: each set is a count, then so many points to be moved and
 * so many to stay; for each the r.m.s. distance, nine numbers of the rotation and three each of the two centres. */
#include <stdio.h>
#include <stdlib.h>

#include "base/memory.h"
#include "base/superpose.h"

int main(void) {
    int count;
    while (scanf("%d", &count) == 1 && count > 0 && count < 1000000) {
        double *points = tml_alloc(6 * (size_t)count, sizeof *points);
        tml_motion motion;
        for (int i = 0; i < 6 * count; i++)
            if (points == NULL || scanf("%lf", &points[i]) != 1) return 2;
        printf("%.17g", tml_superpose(points, points + 3 * count, NULL, count, &motion));
        for (int i = 0; i < 9; i++) printf(" %.17g", motion.rotation[i / 3][i % 3]);
        for (int i = 0; i < 3; i++) printf(" %.17g", motion.from[i]);
        for (int i = 0; i < 3; i++) printf(" %.17g", motion.to[i]);
        printf("\n");
        free(points);
    }
    return 0;
}

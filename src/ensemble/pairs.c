/* pairs.c: the distances between all pairs of models, and which model is nearest to all others. */
#include <math.h>
#include <omp.h>
#include <stdlib.h>

#include "base/superpose.h"
#include "ensemble/compare.h"

/* With the clusters' copy. */
static tml_status take_room(int32_t count, float **out, tml_error *error) {
    size_t pairs = (size_t)count * ((size_t)count - 1) / 2, bytes;
    if (__builtin_mul_overflow(pairs, 2 * sizeof **out, &bytes) || bytes > tml_memory_available() / 2)
        return tml_fail(error, TML_TOO_LARGE, "%d models make %zu pairs, which is more than the memory holds; compare fewer",
                        count, pairs);
    *out = tml_alloc(pairs, sizeof **out);
    return *out == NULL ? tml_no_memory(error) : TML_OK;
}

tml_status tml_pairs_measure(const tml_stack *stack, const int32_t *chosen, int32_t chosen_count, int threads,
                             const tml_watch *watch, float **out, tml_error *error) {
    const int32_t count = stack->model_count;
    *out = NULL;
    if (count < 2) return TML_OK;
    tml_status status = take_room(count, out, error);
    if (status != TML_OK) return status;
    bool stopped = false;
    int32_t done = 0;
    float *pairs = *out;
#pragma omp parallel for schedule(dynamic, 1) num_threads(threads > 0 ? threads : omp_get_num_procs())
    for (int32_t a = 0; a < count - 1; a++) {
        bool stop;
#pragma omp critical(tml_pairs)
        {
            if (watch != NULL && watch->stop != NULL && *watch->stop != 0) stopped = true;
            if (!stopped && watch != NULL && watch->progress != NULL)
                watch->progress(watch->context, "pairs", ++done, count - 1);
            stop = stopped;
        }
        for (int32_t b = a + 1; !stop && b < count; b++) {
            tml_motion motion;
            pairs[tml_pair_index(count, a, b)] =
                (float)tml_superpose(stack->xyz[b], stack->xyz[a], chosen, chosen_count, &motion);
        }
    }
    return stopped ? tml_fail(error, TML_INTERRUPTED, "interrupted") : TML_OK;
}

int32_t tml_pairs_medoid(const float *pairs, int32_t count, double *to_others) {
    int32_t medoid = 0;
    for (int32_t a = 0; a < count; a++) to_others[a] = 0;
    for (int32_t a = 0; a < count; a++)
        for (int32_t b = a + 1; b < count; b++) {
            double distance = pairs[tml_pair_index(count, a, b)];
            to_others[a] += distance;
            to_others[b] += distance;
        }
    for (int32_t a = 0; a < count; a++) {
        to_others[a] = count > 1 ? to_others[a] / (count - 1) : NAN;
        if (to_others[a] < to_others[medoid]) medoid = a;
    }
    return medoid;
}

/* stereo.c: which member of an open stereo pair is x, while a model is refined. */
#include "refine/scene.h"

/* Bring the pairs of one sum in line with the assignments. */
static void follow(tml_scene *scene, const tml_sum_term *sum) {
    const bool *swapped = scene->swapped;
    for (int32_t k = sum->first_open; k < sum->first_open + sum->open_count; k++) {
        const tml_open_pair *open = &scene->refiner->open_pairs[k];
        scene->sum_pairs[open->at] = (tml_pair){open->a[open->stereo_a >= 0 && swapped[open->stereo_a]],
                                                open->b[open->stereo_b >= 0 && swapped[open->stereo_b]]};
    }
}

static void swap(tml_scene *scene, const tml_open_use *uses, int32_t count) {
    const tml_refiner *refiner = scene->refiner;
    scene->swapped[uses->stereo] = !scene->swapped[uses->stereo];
    for (int32_t i = 0; i < count; i++) {
        if (uses[i].sum >= 0) {
            follow(scene, &refiner->sums[uses[i].sum]);
            continue;
        }
        const tml_choice_term *choice = &refiner->choices[uses[i].choice];
        for (int32_t s = 0; s < choice->sum_count; s++) follow(scene, &refiner->sums[choice->first_sum + s]);
    }
}

static double energy_of(const tml_scene *scene, const tml_open_use *uses, int32_t count, const tml_weights *weights) {
    double energy = 0;
    for (int32_t i = 0; i < count; i++) energy += tml_energy_of_use(scene, &uses[i], weights);
    return energy;
}

bool tml_scene_assign(tml_scene *scene, const tml_weights *weights) {
    enum { ROUNDS = 10 };
    static const double GAIN = 1e-9; /* equal assignments stay as they are */
    const tml_refiner *refiner = scene->refiner;
    bool any = false, changed = true;
    for (int round = 0; changed && round < ROUNDS; round++) {
        changed = false;
        for (int32_t first = 0, last; first < refiner->open_use_count; first = last) {
            const tml_open_use *uses = &refiner->open_uses[first];
            for (last = first + 1; last < refiner->open_use_count && refiner->open_uses[last].stereo == uses->stereo;) last++;
            double before = energy_of(scene, uses, last - first, weights);
            if (before <= GAIN) continue;
            swap(scene, uses, last - first);
            if (energy_of(scene, uses, last - first, weights) < before - GAIN)
                changed = any = true;
            else
                swap(scene, uses, last - first);
        }
    }
    return any;
}

/* build.c: the way from a problem to an ensemble.
 *
 *   tml_build       prepares the limits, runs the trials, selects
 *   trials          taken in order by the threads, judged in order under one lock
 *   one trial       metrize, embed, refine both images
 *   selection       the best first
 */
#include "ensemble/ensemble.h"

#include <cblas.h>
#include <math.h>
#include <omp.h>
#include <stdlib.h>
#include <string.h>

#include "base/clock.h"
#include "base/memory.h"
#include "base/vector.h"
#include "embed/embed.h"
#include "ensemble/cis.h"
#include "base/superpose.h"
#include "refine/refine.h"
#include "sample/metrize.h"

extern void openblas_set_num_threads(int count);
extern int openblas_get_num_threads(void);

enum { MAJORIZE_STEPS = 10, SQUEEZE_STEPS = 20, MODELS_DEFAULT = 20, TRIALS_PER_MODEL = 5, PROBING_TRIALS = 4 };
/* What is left of the fourth coordinate after one squeezing step. */
static const double SQUEEZE = 0.8;
/* Memory beside the matrices, bytes. */
static const size_t OTHER_MEMORY = 100u << 20;

/* What all threads of a run share. Fields below the lock's line are written only by its holder. */
typedef struct run {
    const tml_problem *problem;
    const tml_build_options *options;
    const tml_bounds *bounds;
    const tml_refiner *refiner;
    const tml_watch *watch;
    int enough;              /* trials after which N that pass are enough */
    bool both;               /* refine both images in every trial */
    /* -- */
    int trial_limit;         /* trials at most */
    tml_model *models;       /* one for each trial */
    bool *ready;
    int next, judged, passed;
    bool done;
    tml_timing timing;
    tml_status status;
    tml_error error;
} run;

static tml_status check_request(const tml_problem *problem, const tml_build_options *options, tml_error *error);
static tml_status fit_threads(const tml_problem *problem, int wanted, int *threads, tml_error *error);
static tml_status run_trials(run *work, int threads, tml_error *error);
static tml_status keep_best(run *work, tml_ensemble *ensemble, tml_error *error);

void tml_build_defaults(tml_build_options *options) {
    *options = (tml_build_options){.models = MODELS_DEFAULT, .seed = 1, .select_lowest = true, .dimensions = 3, .effort = 1.0};
}

tml_status tml_build(tml_problem *problem, const tml_build_options *options, const tml_watch *watch, tml_ensemble **out,
                     tml_contradictions *found, tml_error *error) {
    static const tml_watch NO_WATCH = {0};
    double start = tml_seconds();
    int threads = 1;
    *out = NULL;
    if (watch == NULL) watch = &NO_WATCH;
    tml_status status = check_request(problem, options, error);
    if (status == TML_OK) status = fit_threads(problem, options->threads, &threads, error);
    if (status == TML_OK) status = tml_find_cis(problem, options->seed, watch->stop, error);
    if (status != TML_OK) return status;

    tml_bounds *bounds = NULL;
    tml_refiner *refiner = NULL;
    tml_ensemble *ensemble = NULL;
    bool contradicted = false;
    double before_smoothing = tml_seconds();
    status = tml_bounds_prepare(problem, threads, watch, &bounds, found, error);
    double smoothing = tml_seconds() - before_smoothing;
    if (status == TML_CONTRADICTED) {
        contradicted = true;
        status = options->strict ? tml_fail(error, TML_CONTRADICTED, "the limits contradict each other") : TML_OK;
    }
    if (status == TML_OK) tml_bounds_cap(bounds);
    if (status == TML_OK) status = tml_refiner_new(problem, options->free_backbone, &refiner, error);
    if (status == TML_OK) {
        run work = {.problem = problem, .options = options, .bounds = bounds, .refiner = refiner, .watch = watch,
                    .trial_limit = options->trials > 0 ? options->trials : TRIALS_PER_MODEL * options->models,
                    .enough = options->select_lowest ? (3 * options->models + 1) / 2 : options->models};
        status = run_trials(&work, threads, error);
        ensemble = status == TML_OK ? tml_alloc(1, sizeof *ensemble) : NULL;
        if (ensemble != NULL) {
            *ensemble = (tml_ensemble){.problem = problem, .trials = work.judged, .passed = work.passed, .wanted = options->models,
                                       .seed = options->seed, .threads = threads, .select_lowest = options->select_lowest,
                                       .timing = work.timing};
            ensemble->timing.smooth = smoothing;
            status = keep_best(&work, ensemble, error);
            if (status == TML_OK) status = tml_ensemble_superpose(ensemble, error);
            if (status == TML_OK && ensemble->passed < ensemble->wanted) status = TML_SHORT;
        } else if (status == TML_OK) {
            status = tml_no_memory(error);
        }
        for (int i = 0; work.models != NULL && i < work.trial_limit; i++) {
            free(work.models[i].xyz);
            free(work.models[i].swapped);
        }
        free(work.models);
        free(work.ready);
    }
    tml_bounds_free(bounds);
    tml_refiner_free(refiner);
    if (ensemble == NULL || (status != TML_OK && status != TML_SHORT)) {
        tml_ensemble_free(ensemble);
        return status;
    }
    ensemble->timing.total = tml_seconds() - start;
    *out = ensemble;
    return contradicted ? TML_CONTRADICTED : status;
}

static tml_status check_request(const tml_problem *problem, const tml_build_options *options, tml_error *error) {
    enum { MOST_MODELS = 9999, MOST_TRIALS = 1000000 };
    if (problem->molecule.atom_count < 2)
        return tml_fail(error, TML_BAD_INPUT, "the inputs describe %d atoms; a model needs at least 2", problem->molecule.atom_count);
    if (options->models < 1 || options->models > MOST_MODELS)
        return tml_fail(error, TML_BAD_INPUT, "%d models wanted; possible are 1 to %d", options->models, MOST_MODELS);
    if (options->trials < 0 || options->trials > MOST_TRIALS)
        return tml_fail(error, TML_BAD_INPUT, "%d trials wanted; possible are 1 to %d", options->trials, MOST_TRIALS);
    if (options->trials > 0 && options->trials < options->models)
        return tml_fail(error, TML_BAD_INPUT, "%d trials cannot give %d models", options->trials, options->models);
    if (options->dimensions != 3 && options->dimensions != 4)
        return tml_fail(error, TML_BAD_INPUT, "embedding in %d dimensions; possible are 3 and 4", options->dimensions);
    if (!(options->effort > 0 && options->effort <= 100))
        return tml_fail(error, TML_BAD_INPUT, "effort %g; possible is more than 0, at most 100", options->effort);
    if (options->strict && problem->restraints.unmapped_count > 0)
        return tml_fail(error, TML_BAD_INPUT, "%d restraints name atoms that are not in the molecule; the first: %s",
                        problem->restraints.unmapped_count, problem->restraints.unmapped[0].reason);
    return TML_OK;
}

/* As many threads as wanted, fewer where the memory does not hold all their matrices: the result is the same. */
static tml_status fit_threads(const tml_problem *problem, int wanted, int *threads, tml_error *error) {
    size_t n = (size_t)problem->molecule.atom_count, matrix;
    *threads = wanted > 0 ? wanted : omp_get_num_procs();
    if (__builtin_mul_overflow(n + 16, (n + 16) * sizeof(float), &matrix)) matrix = SIZE_MAX / 8;
    size_t available = tml_memory_available(), least = 3 * matrix + OTHER_MEMORY;
    if (least > available)
        return tml_fail(error, TML_TOO_LARGE, "%zu atoms need %zu MB of memory, and %zu MB are free", n, least >> 20, available >> 20);
    while (*threads > 1 && (1 + 2 * (size_t)*threads) * matrix + OTHER_MEMORY > available) --*threads;
    return TML_OK;
}

/* ---- one trial ---- */

/* What a thread works with. */
typedef struct bench {
    float *distance;
    int32_t *order;        /* of the rows of distance */
    double *drawn;         /* coordinates in that order, up to four an atom */
    double *start, *spare; /* three an atom */
    bool *swapped;         /* of the image in spare */
    tml_timing timing;
} bench;

/* Coordinates in three dimensions from the drawn distances; a fourth dimension is squeezed out by degrees. */
static tml_status place(const run *work, bench *tools, double *eigenvalues, tml_error *error) {
    int32_t n = work->bounds->n, dimensions = work->options->dimensions;
    size_t stride = work->bounds->stride;
    tml_status status = tml_embed(tools->distance, n, stride, dimensions, tools->drawn, eigenvalues, error);
    if (status == TML_OK) status = tml_majorize(tools->distance, n, stride, dimensions, MAJORIZE_STEPS, tools->drawn, error);
    for (int step = 0; status == TML_OK && dimensions == 4 && step < SQUEEZE_STEPS; step++) {
        for (int32_t i = 0; i < n; i++) tools->drawn[4 * i + 3] *= SQUEEZE;
        status = tml_majorize(tools->distance, n, stride, dimensions, 1, tools->drawn, error);
    }
    for (int32_t i = 0; i < n; i++)
        for (int k = 0; k < 3; k++) tools->start[3 * tools->order[i] + k] = tools->drawn[dimensions * i + k];
    return status;
}

typedef struct gap { int32_t point; double distance; } gap;

static int by_gap(const void *left, const void *right) {
    const gap *l = left, *r = right;
    if (l->distance != r->distance) return l->distance < r->distance ? -1 : 1;
    return l->point < r->point ? -1 : l->point > r->point;
}

/* R.m.s. distance over those two thirds of some points that superpose best, Å: loose ends are apart in every two models. */
static bool apart_at_best(const double *one, const double *other, int32_t *points, int32_t count, double *apart) {
    enum { FITS = 10, FEWEST = 12 };
    tml_motion motion;
    int32_t kept = count < FEWEST ? count : (2 * count + 2) / 3, fitted = count;
    gap *gaps = tml_alloc((size_t)count, sizeof *gaps);
    if (gaps == NULL) return false;
    *apart = tml_superpose(one, other, points, count, &motion);
    for (int fit = 0; fit < FITS && kept < count; fit++) {
        for (int32_t i = 0; i < count; i++) {
            double moved[3];
            memcpy(moved, &one[3 * points[i]], sizeof moved);
            tml_motion_apply(&motion, moved, 1);
            gaps[i] = (gap){points[i], tml_distance(moved, &other[3 * points[i]])};
        }
        qsort(gaps, (size_t)count, sizeof *gaps, by_gap);
        for (int32_t i = 0; i < count; i++) points[i] = gaps[i].point;
        double before = *apart;
        *apart = tml_superpose(one, other, points, kept, &motion);
        if (fitted == kept && *apart >= before - 1e-6) break;
        fitted = kept;
    }
    free(gaps);
    return true;
}

/* How far two models are from each other in what superposes best of their alpha carbons, or of all atoms where there are few, Å. */
static tml_status images_apart(const tml_problem *problem, const double *one, const double *other, double *apart, tml_error *error) {
    const tml_molecule *molecule = &problem->molecule;
    int32_t *points = tml_alloc((size_t)molecule->atom_count, sizeof *points), count = 0;
    if (points == NULL) return tml_no_memory(error);
    for (int32_t i = 0; i < molecule->atom_count; i++)
        if (molecule->residues[molecule->atoms[i].residue].polymer == TML_POLYMER_PROTEIN && strcmp(molecule->atoms[i].name, "CA") == 0) points[count++] = i;
    if (count < 4)
        for (count = 0; count < molecule->atom_count; count++) points[count] = count;
    bool room = apart_at_best(one, other, points, count, apart);
    free(points);
    return room ? TML_OK : tml_no_memory(error);
}

/* One image of an embedding, refined and measured. */
typedef struct image { double error; bool passed; tml_measures measures; } image;

static tml_status improve(const run *work, tml_pcg *pcg, double *xyz, bool *swapped, image *out, tml_error *error) {
    tml_status status = tml_refine(work->refiner, work->options->effort, pcg, xyz, swapped, work->watch->stop, &out->error, error);
    if (status == TML_OK) status = tml_measure(work->problem, swapped, xyz, &out->measures, error);
    out->passed = tml_measures_pass(&out->measures);
    return status;
}

static bool better(bool passed, double energy, bool other_passed, double other_energy) {
    return passed != other_passed ? passed : energy < other_energy;
}

static void reflect(double *xyz, size_t count) {
    for (size_t i = 0; i < count; i++) xyz[3 * i] = -xyz[3 * i];
}

/* Both images of an embedding obey the same distances. The drawn one, of random hand, is refined to the end; the other one, too,
 * where the first does not pass, and in every trial as long as it is not known that the hand settles itself (see `both`). */
static tml_status try_images(const run *work, bench *tools, tml_pcg *pcg, bool both, tml_model *model, tml_error *error) {
    const size_t n = (size_t)work->bounds->n, bytes = 3 * n * sizeof *model->xyz;
    image first = {0}, second = {0};
    bool mirrored = tml_pcg_next(pcg) & 1;
    if (mirrored) reflect(tools->start, n);
    memcpy(model->xyz, tools->start, bytes);
    tml_status status = improve(work, pcg, model->xyz, model->swapped, &first, error);
    bool keep_first = true;
    if (status == TML_OK && (both || !first.passed)) {
        memcpy(tools->spare, tools->start, bytes);
        reflect(tools->spare, n);
        status = improve(work, pcg, tools->spare, tools->swapped, &second, error);
        keep_first = !better(second.passed, second.error, first.passed, first.error);
        if (status == TML_OK && both) status = images_apart(work->problem, model->xyz, tools->spare, &model->images_apart, error);
        model->both_passed = first.passed && second.passed;
        model->other_error = keep_first ? second.error : first.error;
        if (!keep_first) memcpy(model->xyz, tools->spare, bytes);
        if (!keep_first) memcpy(model->swapped, tools->swapped, (size_t)work->problem->restraints.stereo_count * sizeof *model->swapped);
    }
    const image *kept = keep_first ? &first : &second;
    model->measures = kept->measures;
    model->error = kept->error;
    model->passed = kept->passed;
    model->mirrored = mirrored == keep_first;
    return status;
}

static tml_status try_once(const run *work, bench *tools, int trial, bool both, tml_model *model, tml_error *error) {
    const size_t n = (size_t)work->bounds->n;
    tml_pcg pcg;
    tml_pcg_seed_trial(&pcg, work->options->seed, (uint64_t)trial);
    *model = (tml_model){.trial = trial, .xyz = tml_alloc(3 * n, sizeof *model->xyz), .other_error = NAN, .images_apart = NAN,
                         .swapped = tml_alloc((size_t)work->problem->restraints.stereo_count, sizeof *model->swapped)};
    if (model->xyz == NULL || model->swapped == NULL) return tml_no_memory(error);
    double t0 = tml_seconds();
    tml_status status = tml_metrize(work->bounds, work->options->metrize_roots > 0 ? work->options->metrize_roots : work->bounds->n,
                                    &pcg, tools->distance, tools->order, error);
    double t1 = tml_seconds();
    if (status == TML_OK) status = place(work, tools, model->eigenvalues, error);
    double t2 = tml_seconds();
    if (status == TML_OK) status = try_images(work, tools, &pcg, both, model, error);
    tools->timing.metrize += t1 - t0;
    tools->timing.embed += t2 - t1;
    tools->timing.refine += tml_seconds() - t2;
    return status;
}

/* ---- trials ---- */

/* Judge what is ready, strictly in the order of the trials; what comes after the deciding one is left aside. */
static void judge(run *work) {
    while (!work->done && work->judged < work->trial_limit && work->ready[work->judged]) {
        work->passed += work->models[work->judged++].passed;
        work->done = (work->passed >= work->options->models && work->judged >= work->enough);
    }
    if (work->watch->progress != NULL)
        work->watch->progress(work->watch->context, "trials", work->passed < work->options->models ? work->passed : work->options->models,
                              work->options->models);
}

static int take_trial(run *work) {
    int trial = 0;
#pragma omp critical(tml_trials)
    if (!work->done && work->status == TML_OK && work->next < work->trial_limit) trial = ++work->next;
    return trial;
}

static void give_trial(run *work, int trial, const tml_model *model, tml_status status, const tml_error *error) {
#pragma omp critical(tml_trials)
    {
        work->models[trial - 1] = *model;
        work->ready[trial - 1] = status == TML_OK;
        if (status != TML_OK && work->status == TML_OK) {
            work->status = status;
            work->error = *error;
        }
        if (work->status == TML_OK) judge(work);
    }
}

/* Whether the hand has to be settled by refining both images in every trial: in some probing trial both passed as different
 * folds. Where they ended as one fold, or only one of them passed, the error function knows the hand by itself. */
static bool hand_in_doubt(const run *work) {
    for (int i = 0; i < work->next; i++)
        if (work->ready[i] && tml_model_hand_in_doubt(&work->models[i])) return true;
    return false;
}

static void work_on_trials(run *work) {
    const size_t n = (size_t)work->bounds->n;
    tml_error error = {0};
    bench tools = {.distance = tml_alloc_aligned(n * work->bounds->stride, sizeof(float)),
                   .order = tml_alloc(n, sizeof(int32_t)),
                   .drawn = tml_alloc(4 * n, sizeof(double)),
                   .start = tml_alloc(3 * n, sizeof(double)),
                   .spare = tml_alloc(3 * n, sizeof(double)),
                   .swapped = tml_alloc((size_t)work->problem->restraints.stereo_count, sizeof(bool))};
    if (tools.swapped == NULL || tools.distance == NULL || tools.order == NULL || tools.drawn == NULL || tools.start == NULL || tools.spare == NULL) {
#pragma omp critical(tml_trials)
        work->status = tml_no_memory(&work->error);
    } else {
        for (int trial; (trial = take_trial(work)) > 0;) {
            tml_model model = {0};
            tml_status status = try_once(work, &tools, trial, work->both, &model, &error);
            give_trial(work, trial, &model, status, &error);
        }
    }
#pragma omp critical(tml_trials)
    {
        work->timing.metrize += tools.timing.metrize;
        work->timing.embed += tools.timing.embed;
        work->timing.refine += tools.timing.refine;
    }
    free(tools.distance);
    free(tools.order);
    free(tools.drawn);
    free(tools.start);
    free(tools.spare);
    free(tools.swapped);
}

static tml_status run_trials(run *work, int threads, tml_error *error) {
    work->models = tml_alloc((size_t)work->trial_limit, sizeof *work->models);
    work->ready = tml_alloc((size_t)work->trial_limit, sizeof *work->ready);
    if (work->models == NULL || work->ready == NULL) return tml_no_memory(error);
    int blas_threads = openblas_get_num_threads();
    openblas_set_num_threads(1);
    /* The first trials probe whether the images end as one fold; what they tell decides for all others, in any order. */
    const int all = work->trial_limit;
    work->both = true;
    work->trial_limit = all < PROBING_TRIALS ? all : PROBING_TRIALS;
#pragma omp parallel num_threads(threads)
    work_on_trials(work);
    work->both = hand_in_doubt(work);
    work->trial_limit = all;
#pragma omp parallel num_threads(threads)
    work_on_trials(work);
    openblas_set_num_threads(blas_threads);
    if (work->status != TML_OK && error != NULL) *error = work->error;
    return work->status;
}

/* ---- selection ---- */

static int compare_models(const void *left, const void *right) {
    const tml_model *l = left, *r = right;
    if (better(l->passed, l->error, r->passed, r->error)) return -1;
    if (better(r->passed, r->error, l->passed, l->error)) return 1;
    return l->trial < r->trial ? -1 : l->trial > r->trial;
}

static int compare_first(const void *left, const void *right) {
    const tml_model *l = left, *r = right;
    if (l->passed != r->passed) return l->passed ? -1 : 1;
    return l->trial < r->trial ? -1 : l->trial > r->trial;
}

/* The first `wanted` of the judged trials, in the order of the rule; then best first. Takes their coordinates over. */
static tml_status keep_best(run *work, tml_ensemble *ensemble, tml_error *error) {
    int count = work->judged < ensemble->wanted ? work->judged : ensemble->wanted;
    qsort(work->models, (size_t)work->judged, sizeof *work->models, ensemble->select_lowest ? compare_models : compare_first);
    qsort(work->models, (size_t)count, sizeof *work->models, compare_models);
    ensemble->models = tml_alloc((size_t)count, sizeof *ensemble->models);
    if (ensemble->models == NULL) return tml_no_memory(error);
    memcpy(ensemble->models, work->models, (size_t)count * sizeof *ensemble->models);
    ensemble->model_count = count;
    for (int i = 0; i < count; i++) {
        work->models[i].xyz = NULL;
        work->models[i].swapped = NULL;
    }
    return TML_OK;
}

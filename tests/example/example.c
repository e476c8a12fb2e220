/* A worked example of libtrammel: read a problem, look at its limits, prove a contradiction, build an ensemble, write it.
 *
 *     cc example.c $(pkg-config --cflags --libs trammel) -lm -o example && ./example FOLDER
 *
 * It writes two small sheets of its own into FOLDER and exits with 0 when all went as told here.
 */
#include <math.h>
#include <stdio.h>
#include <string.h>
#include <trammel/trammel.h>

/* Four beads on the corners of a square with sides of 4 Å: the diagonals follow. */
static const char SQUARE[] = "sheet 1\n"
                             "title \"Four beads in a square\"\n"
                             "atom A bead\n"
                             "atom B bead\n"
                             "atom C bead\n"
                             "atom D bead\n"
                             "limit A B 3.9 4.1 as side1\n"
                             "limit B C 3.9 4.1 as side2\n"
                             "limit C D 3.9 4.1 as side3\n"
                             "limit D A 3.9 4.1 as side4\n"
                             "limit A C 5.5 -   as diagonal1\n"
                             "limit B D 5.5 -   as diagonal2\n";

/* The same with a diagonal that two sides cannot span: 8.2 Å at most, 9 Å asked for. */
static const char STRETCHED[] = "sheet 1\n"
                                "atom A bead\n"
                                "atom B bead\n"
                                "atom C bead\n"
                                "limit A B 3.9 4.1 as side1\n"
                                "limit B C 3.9 4.1 as side2\n"
                                "limit A C 9.0 -   as diagonal\n";

static int failures;

static void expect(int good, const char *what) {
    printf("%s: %s\n", good ? "ok" : "FAILED", what);
    failures += !good;
}

static int write_text(const char *path, const char *text) {
    FILE *file = fopen(path, "w");
    if (file == NULL) return 0;
    int good = fputs(text, file) >= 0;
    return fclose(file) == 0 && good;
}

static tml_problem *read_problem(const char *path) {
    tml_problem *problem = NULL;
    tml_error error = {0};
    if (tml_problem_read(&path, 1, NULL, &problem, &error) == TML_OK) return problem;
    printf("%s:%ld:%ld: %s\n", error.file, error.line, error.column, error.message);
    return NULL;
}

/* Smoothed limits: no diagonal can be longer than two sides. */
static void look_at_limits(const tml_problem *problem) {
    tml_bounds *bounds = NULL;
    tml_contradictions *found = tml_contradictions_new();
    double lower = 0.0, upper = 0.0;
    tml_status status = tml_bounds_prepare(problem, 0, NULL, &bounds, found, NULL);
    expect(status == TML_OK && tml_contradictions_count(found) == 0, "the square's limits are consistent");
    if (status == TML_OK) expect(tml_bounds_pair(bounds, 0, 2, &lower, &upper), "atoms 0 and 2 have limits");
    expect(fabs(lower - 5.5) < 1e-4 && fabs(upper - 8.2) < 1e-4, "two sides limit the diagonal to 8.2 Å");
    tml_bounds_free(bounds);
    tml_contradictions_free(found);
}

static void prove_contradiction(const tml_problem *problem) {
    tml_bounds *bounds = NULL;
    tml_contradictions *found = tml_contradictions_new();
    tml_status status = tml_bounds_prepare(problem, 0, NULL, &bounds, found, NULL);
    expect(status == TML_CONTRADICTED && tml_contradictions_count(found) == 1, "the stretched diagonal is contradicted once");
    tml_conflict conflict = {0};
    if (tml_contradictions_get(found, 0, &conflict))
        for (int32_t i = 0; i < conflict.step_count; i++) {
            tml_conflict_step step;
            char from[64], to[64];
            if (!tml_contradictions_step(found, problem, 0, i, &step)) break;
            tml_problem_atom(problem, step.atom_1, from, sizeof from);
            tml_problem_atom(problem, step.atom_2, to, sizeof to);
            printf("    %s %s: at %s %.2f Å (%s %s, line %ld)\n", from, to, step.is_upper ? "most" : "least", step.value, step.kind,
                   step.id, step.origin.line);
        }
    expect(fabs(conflict.excess - 0.8) < 1e-6 && conflict.step_count == 3, "its proof has three steps and lacks 0.8 Å");
    tml_bounds_free(bounds);
    tml_contradictions_free(found);
}

static void build_models(tml_problem *problem, const char *path) {
    tml_build_options options;
    tml_build_defaults(&options);
    options.models = 3;
    options.threads = 1;
    tml_error error = {0};
    tml_ensemble *ensemble = NULL;
    tml_contradictions *found = tml_contradictions_new();
    tml_status status = tml_build(problem, &options, NULL, &ensemble, found, &error);
    if (status != TML_OK) printf("%s\n", error.message);
    expect(status == TML_OK && tml_ensemble_count(ensemble) == 3, "three models");
    if (status == TML_OK) {
        const double *xyz = tml_ensemble_coordinates(ensemble, 0);
        double side = sqrt(pow(xyz[0] - xyz[3], 2) + pow(xyz[1] - xyz[4], 2) + pow(xyz[2] - xyz[5], 2));
        expect(side > 3.8 && side < 4.2, "the best model has its first side");
        expect(tml_ensemble_measures(ensemble, 0)->distance_max < 0.1, "the best model meets its limits");
        expect(tml_ensemble_write(ensemble, found, path, &error) == TML_OK, "models are written");
        expect(tml_ensemble_write(ensemble, found, "models.unknown", &error) == TML_BAD_INPUT, "an unknown suffix is refused");
    }
    tml_ensemble_free(ensemble);
    tml_contradictions_free(found);
}

int main(int argc, char **argv) {
    if (argc != 2) return 2;
    char square[512], stretched[512], models[512];
    snprintf(square, sizeof square, "%s/square.sheet", argv[1]);
    snprintf(stretched, sizeof stretched, "%s/stretched.sheet", argv[1]);
    snprintf(models, sizeof models, "%s/models.cif", argv[1]);
    if (!write_text(square, SQUARE) || !write_text(stretched, STRETCHED)) return 2;
    printf("libtrammel %s\n", tml_version());

    tml_problem *problem = read_problem(square);
    expect(problem != NULL, "the square is read");
    if (problem != NULL) {
        tml_counts counts;
        tml_problem_count(problem, &counts);
        expect(counts.atoms == 4 && counts.distance_restraints == 6, "four atoms, six restraints");
        expect(strcmp(tml_problem_title(problem), "Four beads in a square") == 0, "its title");
        look_at_limits(problem);
        build_models(problem, models);
        tml_problem_free(problem);
    }
    problem = read_problem(stretched);
    expect(problem != NULL, "the stretched set is read");
    if (problem != NULL) prove_contradiction(problem);
    tml_problem_free(problem);
    return failures != 0;
}

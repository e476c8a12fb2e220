#include "molecule/making.h"

#include <math.h>

#include "base/vector.h"

/* Contents: missing angles - directions that realise given angles */

static const double TETRAHEDRAL = 1.9106332362490186; /* acos(-1/3), 109.47° */
static const double TRIGONAL = 2.0943951023931953;    /* 120° */

/* ---- missing angles ---- */

static void complete_planar(double angle[TML_ARMS_MAX][TML_ARMS_MAX]);
static void complete_from_one(double angle[TML_ARMS_MAX][TML_ARMS_MAX]);
static void complete_from_three(double angle[TML_ARMS_MAX][TML_ARMS_MAX]);

static void set(double angle[TML_ARMS_MAX][TML_ARMS_MAX], int i, int j, double value) {
    angle[i][j] = angle[j][i] = value;
}

static int known_angles(double angle[TML_ARMS_MAX][TML_ARMS_MAX], int count) {
    int known = 0;
    for (int i = 0; i < count; i++)
        for (int j = i + 1; j < count; j++) known += !isnan(angle[i][j]);
    return known;
}

/* Fill in the angles (radians; NAN where not known) between the `count` arms of an atom, so that all can be realised together.
 * A planar atom's angles come to 360°: what is missing is shared equally, and so is a published set's rounding. In a
 * tetrahedral one, two arms beside a known angle enclose 109.47° and lie in the plane that halves it, and a fourth arm makes
 * equal angles with the other three. */
void tml_arms_complete(double angle[TML_ARMS_MAX][TML_ARMS_MAX], int count, bool planar) {
    int known = known_angles(angle, count);
    if (count == 3 && planar)
        complete_planar(angle);
    else if (count == 4 && known == 1)
        complete_from_one(angle);
    else if (count == 4 && known == 3)
        complete_from_three(angle);
    double usual = planar ? TRIGONAL : TETRAHEDRAL;
    for (int i = 0; i < count; i++)
        for (int j = i + 1; j < count; j++)
            if (isnan(angle[i][j])) set(angle, i, j, usual);
}

static void complete_planar(double angle[TML_ARMS_MAX][TML_ARMS_MAX]) {
    static const int pair[3][2] = {{0, 1}, {0, 2}, {1, 2}};
    static const double LEAST = 0.3, MOST = 3.1; /* radians */
    double sum = 0;
    int known = known_angles(angle, 3);
    for (int k = 0; k < 3; k++)
        if (!isnan(angle[pair[k][0]][pair[k][1]])) sum += angle[pair[k][0]][pair[k][1]];
    for (int k = 0; k < 3; k++) {
        double value = angle[pair[k][0]][pair[k][1]];
        if (known == 3)
            value += (2 * TML_PI - sum) / 3;
        else if (isnan(value))
            value = (2 * TML_PI - sum) / (3 - known);
        set(angle, pair[k][0], pair[k][1], fmin(fmax(value, LEAST), MOST)); /* given angles may be any */
    }
}

static void complete_from_one(double angle[TML_ARMS_MAX][TML_ARMS_MAX]) {
    int p = 0, q = 1;
    for (int i = 0; i < 4; i++)
        for (int j = i + 1; j < 4; j++)
            if (!isnan(angle[i][j])) {
                p = i;
                q = j;
            }
    double other = acos(-cos(TETRAHEDRAL / 2) * cos(angle[p][q] / 2));
    for (int i = 0; i < 4; i++)
        for (int j = i + 1; j < 4; j++)
            if (isnan(angle[i][j])) set(angle, i, j, i == p || i == q || j == p || j == q ? other : TETRAHEDRAL);
}

/* Three arms with all their angles known; the fourth makes equal angles with them. */
static void complete_from_three(double angle[TML_ARMS_MAX][TML_ARMS_MAX]) {
    int fourth = -1;
    for (int i = 0; i < 4; i++) {
        bool unknown = true;
        for (int j = 0; j < 4; j++) unknown = unknown && (i == j || isnan(angle[i][j]));
        if (unknown) fourth = i;
    }
    if (fourth < 0) return;
    double three[TML_ARMS_MAX][TML_ARMS_MAX] = {{0}}, direction[TML_ARMS_MAX][3];
    int index[3], n = 0;
    for (int i = 0; i < 4; i++)
        if (i != fourth) index[n++] = i;
    for (int i = 0; i < 3; i++)
        for (int j = 0; j < 3; j++) three[i][j] = i == j ? 0 : angle[index[i]][index[j]];
    if (!tml_arms_directions(three, 3, direction)) return;
    /* The axis of the cone through three unit vectors is normal to the plane through their tips. */
    double u[3], v[3], axis[3];
    tml_sub(u, direction[1], direction[0]);
    tml_sub(v, direction[2], direction[0]);
    tml_cross(axis, u, v);
    double length = sqrt(tml_dot(axis, axis));
    if (length < 1e-6) return; /* two of them fall on each other */
    double equal = acos(-fabs(tml_dot(axis, direction[0])) / length);
    for (int k = 0; k < 3; k++) set(angle, fourth, index[k], equal);
}

/* ---- directions that realise given angles ---- */

/* Unit vectors with the given angles between them; of three or more, the volume of the first three is positive (or 0).
 * The fourth is placed by its angles to the first three in the least-squares sense. false if the first three cannot be. */
bool tml_arms_directions(double angle[TML_ARMS_MAX][TML_ARMS_MAX], int count, double direction[TML_ARMS_MAX][3]) {
    direction[0][0] = 1;
    direction[0][1] = direction[0][2] = 0;
    if (count < 2) return true;
    double s01 = sin(angle[0][1]);
    if (s01 < 1e-6) return false;
    direction[1][0] = cos(angle[0][1]);
    direction[1][1] = s01;
    direction[1][2] = 0;
    for (int k = 2; k < count; k++) {
        double x = cos(angle[0][k]), y = (cos(angle[1][k]) - x * direction[1][0]) / s01, z2 = 1 - x * x - y * y;
        if (z2 < -1e-3) return false;
        double z = sqrt(z2 > 0 ? z2 : 0);
        if (k == 3) {
            double up = x * direction[2][0] + y * direction[2][1] + z * direction[2][2];
            double down = x * direction[2][0] + y * direction[2][1] - z * direction[2][2];
            double wanted = cos(angle[2][3]);
            if (fabs(down - wanted) < fabs(up - wanted)) z = -z;
        }
        direction[k][0] = x;
        direction[k][1] = y;
        direction[k][2] = z;
    }
    return true;
}

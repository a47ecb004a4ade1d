/* Neighbours: by hand, against all pairs, and the errors of the header. Library figures:
 * tests/external/points.c. */
#include "metrics/neighbours.h"

#include "base/quantity.h"
#include "check.h"
#include "planes.h"

static const window unit = { 0.0, 0.0, 10.0, 6.0 };

static void check_by_hand(void) {
    static const double x[] = { 1.0, 4.0, 4.0, 9.5 }, y[] = { 1.0, 5.0, 2.0, 3.0 };
    double nn[4];
    error e = { 0 };
    CHECK(nearest_neighbours(x, y, 4, unit, nn, &e) == ST_OK);
    CHECK_NEAR(nn[0], sqrt(10.0), 1e-12);
    CHECK_NEAR(nn[1], 3.0, 1e-12);
    CHECK_NEAR(nn[2], 3.0, 1e-12);
    CHECK_NEAR(nn[3], sqrt(30.25 + 1.0), 1e-12);
    /* Every point has the frame nearer than its neighbour: none counts. */
    measured m = nn_mean_hanisch(x, y, nn, 4, unit);
    CHECK(m.n == 0 && isnan(m.value));
    const window wide = { -4.0, -4.0, 12.0, 10.0 };
    m = nn_mean_hanisch(x, y, nn, 4, wide);
    double w0 = 1.0 / ((16.0 - 2.0 * sqrt(10.0)) * (14.0 - 2.0 * sqrt(10.0))), w1 = 1.0 / (10.0 * 8.0);
    CHECK(m.n == 3);
    CHECK_NEAR(m.value, (w0 * sqrt(10.0) + 2.0 * w1 * 3.0) / (w0 + 2.0 * w1), 1e-12);
    CHECK_NEAR(hanisch_weight(4.0, 2.0, 3.0, wide), w1, 1e-15);
    CHECK(!(hanisch_weight(9.5, 3.0, 5.0, wide) > 0.0));
}

static void check_against_all_pairs(void) {
    enum { N = 700 };
    double x[N], y[N], nn[N];
    dice d = { 3 };
    error e = { 0 };
    for (int i = 0; i < N; i++) { /* clustered, some outside the window */
        x[i] = 100.0 * pow(dice_uniform(&d), 3.0) - 1.0;
        y[i] = 20.0 * dice_uniform(&d) - 1.0;
    }
    CHECK(nearest_neighbours(x, y, N, (window){ 0.0, 0.0, 98.0, 18.0 }, nn, &e) == ST_OK);
    double worst = 0.0;
    for (int i = 0; i < N; i++) {
        double best = 1e9;
        for (int j = 0; j < N; j++)
            if (j != i) best = fmin(best, hypot(x[i] - x[j], y[i] - y[j]));
        worst = fmax(worst, fabs(best - nn[i]));
    }
    CHECK_NEAR(worst, 0.0, 1e-12);
}

static void check_pairs(void) {
    /* Two points 1 apart in a window of 10 x 6: one pair, counted in both directions. */
    static const double x[] = { 4.0, 5.0 }, y[] = { 3.0, 3.0 }, r[] = { 0.0, 0.6, 1.0, 1.2 };
    double g[4];
    error e = { 0 };
    CHECK(pair_correlation(x, y, 2, unit, 0.25, r, 4, g, &e) == ST_OK);
    double area = 60.0, edge = area / (9.0 * 6.0), peak = 0.75 / 0.25;
    CHECK(isnan(g[0]));
    CHECK_NEAR(g[1], 0.0, 1e-15);
    CHECK_NEAR(g[2], area / 2.0 / (2.0 * PI) * 2.0 * edge * peak, 1e-9);
    CHECK_NEAR(g[3], area / 2.0 / (2.0 * PI * 1.2) * 2.0 * edge * peak * (1.0 - 0.64), 1e-9);
    double k[4];
    CHECK(ripley_k(x, y, 2, unit, r, 4, k, &e) == ST_OK);
    for (int i = 0; i < 4; i++) CHECK_NEAR(k[i], i < 2 ? 0.0 : area * edge, 1e-12); /* at r = 1 the pair counts */
}

static void check_errors(void) {
    double x[] = { 1.0, 2.0 }, y[] = { 1.0, 2.0 }, out[2];
    error e = { 0 };
    CHECK_FAILS(nearest_neighbours(x, y, 1, unit, out, &e), ST_BAD_INPUT, e, "at least two");
    CHECK_FAILS(nearest_neighbours(x, y, 2, (window){ 0.0, 0.0, 0.0, 1.0 }, out, &e), ST_BAD_INPUT, e,
                "area");
    CHECK_FAILS(pair_correlation(x, y, 1, unit, 0.1, x, 2, out, &e), ST_BAD_INPUT, e, "two points");
    CHECK_FAILS(pair_correlation(x, y, 2, unit, 0.0, x, 2, out, &e), ST_BAD_INPUT, e, "kernel");
    CHECK_FAILS(ripley_k(x, y, 1, unit, x, 2, out, &e), ST_BAD_INPUT, e, "two points");
    CHECK_FAILS(ripley_k(x, y, 2, unit, x, 0, out, &e), ST_BAD_INPUT, e, "distance");
    CHECK(isnan(clark_evans_naive(out, 0, unit)) && isnan(clark_evans_donnelly(out, 0, unit)));
    CHECK(isnan(clark_evans_guard(x, y, out, 2, unit, 4.0, NULL)) && isnan(clark_evans_z(out, 1, unit)));
}

int main(void) {
    check_by_hand();
    check_against_all_pairs();
    check_pairs();
    check_errors();
    return check_done();
}

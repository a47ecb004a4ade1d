/* Uncertainties against what they promise: the scatter over many fields of the same pattern, for random
 * points, for a jittered lattice (far steadier), for values that are independent and for areas that
 * compensate each other. */
#include "metrics/uncertainty.h"

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "planes.h"

enum { SIDE = 20, MOST = 700, FIELDS = 60 };
static const window field = { 0.0, 0.0, SIDE, SIDE };

/* Random points of density 1 (Poisson: a random number of them), or a jittered square lattice at a random
 * offset. */
static size_t points(int lattice, dice *d, double *x, double *y) {
    size_t n = 0;
    double ox = dice_uniform(d), oy = dice_uniform(d);
    if (!lattice) {
        double gap = 0.0; /* exponential gaps along a line make the number of points Poisson */
        for (gap -= log(dice_uniform(d)); gap < SIDE * SIDE && n < MOST; gap -= log(dice_uniform(d))) {
            x[n] = SIDE * dice_uniform(d);
            y[n++] = SIDE * dice_uniform(d);
        }
        return n;
    }
    for (int j = -2; j < SIDE + 2; j++)
        for (int i = -2; i < SIDE + 2; i++) {
            double px = i + ox + 0.15 * dice_normal(d), py = j + oy + 0.15 * dice_normal(d);
            if (px < 0.0 || py < 0.0 || px >= SIDE || py >= SIDE) continue;
            x[n] = px;
            y[n++] = py;
        }
    return n;
}

static void check_counting(int lattice, double least, double most) {
    double x[MOST], y[MOST], one[MOST], count[FIELDS], u[FIELDS];
    dice d = { 17 };
    error e = { 0 };
    for (int i = 0; i < MOST; i++) one[i] = 1.0;
    for (int k = 0; k < FIELDS; k++) {
        size_t n = points(lattice, &d, x, y);
        count[k] = (double)n;
        CHECK(field_sum_sd(x, y, one, n, field, 1.0, &u[k], &e) == ST_OK);
    }
    double seen = series_sd(count, FIELDS), said = series_mean(u, FIELDS);
    CHECK(seen > least && seen < most);
    CHECK_NEAR(said / seen, 1.0, 0.35);
}

/* Values of random points: independent, then with neighbours that make up for each other (a wave along x). */
static void check_values(int wave) {
    double x[MOST], y[MOST], v[MOST], w[MOST], q[FIELDS], m[FIELDS], g[FIELDS], um[FIELDS], ug[FIELDS];
    dice d = { 23 };
    error e = { 0 };
    for (int k = 0; k < FIELDS; k++) {
        size_t n = points(1, &d, x, y);
        double phase = TAU * dice_uniform(&d), sum = 0.0, logs = 0.0, logs2 = 0.0;
        for (size_t i = 0; i < n; i++) {
            w[i] = 1.0;
            v[i] = wave ? 10.0 + 2.0 * sin(0.5 * TAU * x[i] + phase) : exp(2.3 + 0.2 * dice_normal(&d));
            sum += v[i];
            logs += log(v[i]);
            logs2 += log(v[i]) * log(v[i]);
        }
        double nn = (double)n, mean_log = logs / nn;
        m[k] = sum / nn;
        g[k] = exp(sqrt(logs2 / nn - mean_log * mean_log));
        sample_of_features s = { x, y, v, w, n, field, 1.0 };
        CHECK(u_of_mean(&s, m[k], &um[k], &e) == ST_OK);
        CHECK(u_of_gsd(&s, g[k], &ug[k], &e) == ST_OK);
        q[k] = nn;
    }
    double seen = series_sd(m, FIELDS), said = series_mean(um, FIELDS),
           independent = 2.0 / sqrt(series_mean(q, FIELDS));
    if (wave) {
        CHECK(said < 0.75 * independent / sqrt(2.0)); /* knows that the wave averages out */
        CHECK(said > 0.5 * seen);
    } else {
        CHECK_NEAR(said / seen, 1.0, 0.35);
        CHECK_NEAR(series_mean(ug, FIELDS) / series_sd(g, FIELDS), 1.0, 0.35);
    }
}

static void check_quantile(void) {
    enum { N = 400 };
    double x[N], y[N], v[N], w[N], u = 0.0;
    dice d = { 5 };
    error e = { 0 };
    for (int i = 0; i < N; i++) {
        x[i] = SIDE * dice_uniform(&d);
        y[i] = SIDE * dice_uniform(&d);
        v[i] = dice_uniform(&d);
        w[i] = 1.0;
    }
    /* The median of N uniform values has a standard deviation of 0.5 / sqrt(N). */
    sample_of_features s = { x, y, v, w, N, field, 1.0 };
    CHECK(u_of_quantile(&s, 0.5, 0.5, 0.1, 0.4, 0.6, &u, &e) == ST_OK);
    CHECK_NEAR(u / (0.5 / sqrt(N)), 1.0, 0.35);
    s.field = (window){ 0.0, 0.0, SIDE, 3.0 }; /* too narrow for tiles: as if independent */
    CHECK(u_of_quantile(&s, 0.5, 0.5, 0.1, 0.4, 0.6, &u, &e) == ST_OK);
    CHECK_NEAR(u, 0.5 / sqrt(N), 1e-6);
    s.field = field;
    for (int i = 0; i < N; i++) w[i] = 0.0;
    CHECK(u_of_mean(&s, 0.5, &u, &e) == ST_OK && isnan(u));
    mem_fail_after(1);
    w[0] = 1.0;
    CHECK_FAILS(u_of_mean(&s, 0.5, &u, &e), ST_NO_MEMORY, e, "memory");
    mem_fail_after(1);
    CHECK_FAILS(field_sum_sd(x, y, w, N, field, 1.0, &u, &e), ST_NO_MEMORY, e, "memory");
    CHECK(field_sum_sd(x, y, w, 3, field, 1.0, &u, &e) == ST_OK && isnan(u));
}

int main(void) {
    check_counting(0, 15.0, 26.0); /* random: sqrt(400) */
    check_counting(1, 1.0, 8.0);
    check_values(0);
    check_values(1);
    check_quantile();
    return check_done();
}

/* Sizes against closed forms, published sequences and libraries (C-01 .. C-25). */
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "metrics/sizes.h"
#include "metrics/watershed.h"

enum { SIDE = 320 };

/* A label map with one body (label 2) on its ground (label 1); returns what is said of the body. */
static feature described(int (*inside)(double x, double y, double r), double r) {
    static uint32_t cells[SIDE * SIDE];
    feature f[2] = { { .x = 0.0 }, { .x = 0.0 } };
    for (size_t i = 0; i < SIDE * SIDE; i++)
        cells[i] = 1u + (uint32_t)inside((double)(i % SIDE) - SIDE / 2, (double)(i / SIDE) - SIDE / 2, r);
    error e = { 0 };
    CHECK(cells_describe(cells, SIDE, SIDE, f, 2, &e) == ST_OK);
    CHECK(f[0].n_neighbours == 1 && f[1].n_neighbours == 1);
    return f[1];
}

static int disc(double x, double y, double r) { return x * x + y * y <= r * r; }
static int ellipse(double x, double y, double r) { /* a = 40, b = 20, 30 deg */
    (void)r;
    double c = cos(PI / 6.0), s = sin(PI / 6.0), u = x * c + y * s, v = -x * s + y * c;
    return u * u / 1600.0 + v * v / 400.0 <= 1.0;
}
static int hexagon(double x, double y,
                   double a) { /* cell of a hexagonal lattice of constant a, flat sides left and right */
    double h = 0.5 * a, p = 0.5 * x + sqrt(0.75) * y, q = 0.5 * x - sqrt(0.75) * y;
    return fabs(x) <= h && fabs(p) <= h && fabs(q) <= h;
}

static void check_discs(void) {
    static const double r[] = { 5, 10, 20, 50, 100 }, n[] = { 81, 317, 1257, 7845, 31417 };
    static const double ecd[] = { 10.1554125039, 20.0902199013, 40.0057759296, 99.9428047858,
                                  200.0034169132 };
    for (int i = 0; i < 5; i++) {
        feature f = described(disc, r[i]);
        CHECK_SOURCE(f.cell_area_px2, n[i], 0.0, "C-01 Gauss circle problem, OEIS A000328");
        CHECK_SOURCE(f.cell_ecd_px, ecd[i], 1e-9, "C-02 equivalent circular diameter, ISO 9276-6");
        CHECK_SOURCE(f.feret_max_px, 2.0 * r[i] + 1.0, 0.6, "C-02 a disc, from pixel corners");
    }
}

static void check_ellipse(void) {
    feature f = described(ellipse, 0.0);
    CHECK_SOURCE(f.cell_area_px2, 2505.0, 0.0, "C-04 scikit-image 0.19.3");
    CHECK_SOURCE(f.cell_ecd_px, 56.4753491318, 1e-9, "C-04 scikit-image 0.19.3");
    CHECK_SOURCE(f.feret_max_px, 81.0055743965, 1e-3, "C-05 Feret from pixel corners, steps of 0.5 deg");
    /* The smallest width has a tangent along a side of the hull, which steps of 0.5 deg do not meet exactly.
     */
    CHECK_SOURCE(f.feret_min_px, 40.7182440852, 0.1, "C-05 Feret from pixel corners, steps of 0.5 deg");
    CHECK(f.feret_min_px <= 40.7182440852);
}

static void check_hexagon(void) {
    feature f = described(hexagon, 40.0);
    CHECK_SOURCE(f.cell_ecd_px, 40.0 * 1.050075135809, 0.02 * 42.0, "C-07 geometry");
    CHECK_SOURCE(f.feret_min_px - 1.0, 40.0, 0.8, "C-07 geometry, pixel corners add one");
    CHECK_SOURCE(f.feret_max_px - 1.0, 40.0 * 1.154700538379, 0.02 * 46.2, "C-07 geometry");
}

/* A sample that is log-normal by construction: its i-th value is the quantile (i - 1/2) / n (Newton on the
 * error function). */
static void lognormal_sample(double median, double gsd, double *x, double *w, size_t n) {
    double z = -5.0;
    for (size_t i = 0; i < n; i++) {
        double p = ((double)i + 0.5) / (double)n;
        for (int k = 0; k < 30; k++) {
            double f = 0.5 * erfc(-z / sqrt(2.0)) - p, step = f * sqrt(2.0 * PI) * exp(0.5 * z * z);
            z -= fmax(-0.5, fmin(0.5, step));
        }
        x[i] = median * exp(z * log(gsd));
        w[i] = 1.0;
    }
}

static double moment_mean(const double *x, size_t n, double p,
                          double q) { /* D[p,q] = (M_p / M_q)^(1/(p-q)) */
    double a = 0.0, b = 0.0;
    for (size_t i = 0; i < n; i++) {
        a += pow(x[i], p);
        b += pow(x[i], q);
    }
    return pow(a / b, 1.0 / (p - q));
}

/* tail: how much of the high moments lies beyond the ends of a finite sample, in units of a narrow
 * distribution's. */
static void check_lognormal_row(double median, double gsd, const double *want, double tail, const char *src) {
    enum { N = 20001 };
    static double x[N], w[N], w2[N], w3[N];
    static const double p[] = { 0.1, 0.5, 0.9, 0.841344746 };
    double q[4];
    error e = { 0 };
    lognormal_sample(median, gsd, x, w, N);
    for (size_t i = 0; i < N; i++) {
        w2[i] = x[i] * x[i];
        w3[i] = w2[i] * x[i];
    }
    CHECK(quantiles(x, w, N, p, 4, q, &e) == ST_OK);
    CHECK_SOURCE(q[0], want[0], 1e-4 * want[0], src);
    CHECK_SOURCE(q[1], median, 1e-4 * median, src);
    CHECK_SOURCE(q[2], want[1], 1e-4 * want[1], src);
    CHECK_SOURCE(q[3] / q[1], gsd, 1e-4, "C-19 sigma_g = D84 / D50");
    CHECK_SOURCE(log(q[2] / q[0]) / 2.563103131, log(gsd), 1e-4, "C-19");
    CHECK_SOURCE(weighted_mean(x, w, N), want[2], 2e-4 * want[2], src);
    CHECK_SOURCE(geometric_sd(x, w, N), gsd, 1e-3, src);
    /* Weighted by x^q the mean is D[q+1,q]; weighted quantiles are the medians by area and by volume. */
    CHECK_SOURCE(weighted_mean(x, w2, N), want[3], tail * 1e-3 * want[3], src);
    CHECK_SOURCE(weighted_mean(x, w3, N), want[4], tail * 2e-3 * want[4], src);
    CHECK(quantiles(x, w2, N, p + 1, 1, q, &e) == ST_OK);
    CHECK_SOURCE(q[0], want[5], tail * 2e-3 * want[5], src);
    CHECK(quantiles(x, w3, N, p + 1, 1, q, &e) == ST_OK);
    CHECK_SOURCE(q[0], want[6], tail * 3e-3 * want[6], src);
    lognormal_fit fit;
    CHECK(lognormal(x, N, &fit, &e) == ST_OK);
    CHECK_SOURCE(exp(fit.mu), median, 1e-6 * median, src);
    CHECK(fit.a2_star < 0.752); /* its own distribution is not rejected */
}

static void check_hatch_choate(void) {
    static const char src[] = "C-16 .. C-18 Hatch & Choate 1929";
    /* D10, D90, mean, D[3,2], D[4,3], median by area, by volume */
    static const double a[] = { 71.4456379492,  139.9665576099, 103.5016639743, 118.7781781158,
                                127.2422451124, 114.7596797528, 122.9373907882 };
    static const double b[] = { 187.8212946398, 332.7631199640, 256.3022571771, 283.1405816066,
                                297.5959141673, 276.1783925794, 290.2782806568 };
    static const double c[] = { 43.8025812285,  146.1101108773, 89.3425930866, 138.9737634886,
                                173.3284890864, 124.4412177326, 155.2034550135 };
    check_lognormal_row(100.0, 1.3, a, 1.0, src);
    check_lognormal_row(250.0, 1.25, b, 1.0, src);
    check_lognormal_row(80.0, 1.6, c, 8.0, src);
}

static void check_ten_sizes(void) {
    static const double x[] = { 60, 70, 80, 90, 100, 110, 120, 140, 160, 200 };
    double w[10], w1[10], w2[10], w3[10], q[3];
    static const double p[] = { 0.1, 0.5, 0.9 };
    error e = { 0 };
    for (int i = 0; i < 10; i++) {
        w[i] = 1.0;
        w1[i] = x[i];
        w2[i] = x[i] * x[i];
        w3[i] = w2[i] * x[i];
    }
    static const char moments[] = "C-20 moment means, ISO 9276-2";
    CHECK_SOURCE(weighted_mean(x, w, 10), 113.0, 1e-10, moments);
    CHECK_SOURCE(weighted_mean(x, w1, 10), 128.0530973451, 1e-9, moments);
    CHECK_SOURCE(weighted_mean(x, w2, 10), 143.0476848652, 1e-9, moments);
    CHECK_SOURCE(weighted_mean(x, w3, 10), 156.3761534374, 1e-9, moments);
    CHECK_SOURCE(moment_mean(x, 10, 2.0, 0.0), 120.2913130696, 1e-9, moments);
    CHECK_SOURCE(geometric_sd(x, w, 10), 1.4563997279, 1e-9, moments);
    CHECK(quantiles(x, w, 10, p, 3, q, &e) == ST_OK);
    static const char hazen[] = "C-21 type 5 of Hyndman & Fan 1996; numpy 1.24.2";
    CHECK_SOURCE(q[0], 65.0, 1e-10, hazen);
    CHECK_SOURCE(q[1], 105.0, 1e-10, hazen);
    CHECK_SOURCE(q[2], 180.0, 1e-10, hazen);
    lognormal_fit fit;
    CHECK(lognormal(x, 10, &fit, &e) == ST_OK);
    static const char fitted[] = "C-22 maximum likelihood, Anderson & Darling 1954; scipy 1.10.1";
    CHECK_SOURCE(fit.mu, 4.6632952008, 1e-9, fitted);
    CHECK_SOURCE(fit.sigma, 0.3566740409, 1e-9, fitted);
    CHECK_SOURCE(fit.a2, 0.0939199691, 1e-8, fitted);
}

static void check_border(void) {
    static const char src[] = "C-23 Miles 1974, Lantuejoul 1980; ISO 13322-1";
    CHECK_SOURCE(border_weight(1000.0, 800.0, 50.0, 40.0), 1.108033240997, 1e-12, src);
    CHECK_SOURCE(border_weight(1000.0, 800.0, 100.0, 100.0), 1.269841269841, 1e-12, src);
    CHECK_SOURCE(border_weight(1000.0, 800.0, 300.0, 200.0), 1.904761904762, 1e-12, src);
    CHECK_SOURCE(border_weight(1000.0, 800.0, 0.0, 0.0), 1.0, 1e-12, src);
    static const double d[] = { 20, 20, 40, 40, 60, 60, 80, 100 };
    double w[8], sum = 0.0;
    for (int i = 0; i < 8; i++) sum += w[i] = border_weight(1000.0, 800.0, d[i], d[i]);
    CHECK_SOURCE(sum, 9.063870657807, 1e-11, "C-24 worked table");
    CHECK_SOURCE(weighted_mean(d, w, 8), 54.192634807366, 1e-11, "C-24 worked table");
}

static double uniform(uint64_t *s) { /* xorshift64, Marsaglia 2003 */
    *s ^= *s << 13;
    *s ^= *s >> 7;
    *s ^= *s << 17;
    return ((double)(*s >> 11) + 0.5) / 9007199254740992.0;
}

/* C-25: discs of 20 and 100 in equal numbers over a plane; only those wholly inside a frame of 400 are seen.
 */
static void check_bias(void) {
    uint64_t seed = 99;
    double seen[2] = { 0.0, 0.0 }, weighed[2] = { 0.0, 0.0 };
    for (int k = 0; k < 400000; k++) {
        int large = k & 1;
        double d = large ? 100.0 : 20.0, x = 520.0 * uniform(&seed) - 60.0, y = 520.0 * uniform(&seed) - 60.0;
        if (fmin(x, y) < 0.5 * d || fmax(x, y) > 400.0 - 0.5 * d) continue;
        seen[large] += 1.0;
        weighed[large] += border_weight(400.0, 400.0, d, d);
    }
    static const char src[] = "C-25 (300^2) / (300^2 + 380^2) uncorrected, one half corrected";
    CHECK_SOURCE(seen[1] / (seen[0] + seen[1]), 0.383959, 0.006, src);
    CHECK_SOURCE(weighed[1] / (weighed[0] + weighed[1]), 0.5, 0.006, src);
}

int main(void) {
    check_discs();
    check_ellipse();
    check_hexagon();
    check_hatch_choate();
    check_ten_sizes();
    check_border();
    check_bias();
    return check_done();
}

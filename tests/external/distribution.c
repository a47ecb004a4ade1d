/* Moment means, log-normal relations, circularity and hexagonal order against closed forms and published values: C-06, C-07,
 * C-16 .. C-20, A-08. */
#include <stdlib.h>

#include "base/quantity.h"
#include "check.h"
#include "metrics/sizedist.h"
#include "metrics/sizes.h"
#include "metrics/student.h"
#include "metrics/watershed.h"

static void worked_moments(void) {
    static const double x[] = { 60, 70, 80, 90, 100, 110, 120, 140, 160, 200 }, w[] = { 1, 1, 1, 1, 1, 1, 1, 1, 1, 1 };
    static const struct {
        int p, q;
        double d;
    } t[] = { { 1, 0, 113.0 },          { 2, 0, 120.2913130696 }, { 3, 0, 127.4431375303 },
              { 2, 1, 128.0530973451 }, { 3, 2, 143.0476848652 }, { 4, 3, 156.3761534374 } };
    for (size_t i = 0; i < sizeof t / sizeof t[0]; i++)
        CHECK_SOURCE(moment_mean(x, w, 10, t[i].p, t[i].q), t[i].d, 1e-9, "C-20, ISO 9276-2 moment-ratio notation");
    CHECK(isnan(moment_mean(x, w, 10, 2, 2)) && isnan(moment_mean(x, w, 0, 2, 1)));
}

/* A log-normal distribution as 20 001 equally likely sizes; its tails are cut at 1/40 000. */
static void hatch_choate(double median, double gsd, const double *want, const char *src) {
    enum { N = 20001 };
    static feature f[N];
    texture t = { .features = f, .n_found = N };
    error e = { 0 };
    size_summary s;
    for (int i = 0; i < N; i++) {
        double d = median * exp(log(gsd) * student_t_at(((double)i + 0.5) / N, HUGE_VAL));
        f[i] = (feature){ .cell_ecd_px = d, .cell_area_px2 = 0.25 * PI * d * d, .weight = 1.0, .perimeter_px = PI * d,
                          .feret_max_px = d, .feret_min_px = d, .n_neighbours = 6 };
    }
    CHECK(size_summarise(&t, &s, &e) == ST_OK && s.n == N);
    CHECK_SOURCE(s.d10, want[0], 1e-3 * want[0], src);
    CHECK_SOURCE(s.d20, want[1], 1e-3 * want[1], src);
    CHECK_SOURCE(s.d32, want[2], 3e-3 * want[2], src);
    CHECK_SOURCE(s.d43, want[3], 6e-3 * want[3], src);
    CHECK_SOURCE(s.area_d50, want[4], 3e-3 * want[4], src);
    CHECK_SOURCE(s.lognormal_median, median, 1e-6 * median, src);
    CHECK_SOURCE(s.lognormal_gsd, gsd, 1e-3, src);
    CHECK_SOURCE(s.span, exp(1.281551566 * log(gsd)) - exp(-1.281551566 * log(gsd)), 1e-4, src);
    CHECK(s.a2 < 0.752); /* as log-normal as can be */
    CHECK_NEAR(s.circularity, 1.0, 1e-12);
    CHECK_NEAR(s.aspect_ratio, 1.0, 1e-12);
    CHECK_NEAR(s.neighbours[3], 1.0, 1e-12);
    enum { K = 301 };
    double x[K], y[K], sum = 0.0;
    CHECK(size_density(&t, &s, x, y, K, &e) == ST_OK);
    for (int k = 1; k < K; k++) sum += 0.5 * (y[k] + y[k - 1]) * (x[k] - x[k - 1]);
    CHECK_NEAR(sum, 1.0, 2e-3);
    size_t bins = 0;
    double area = 0.0, middle = 0.0;
    CHECK(size_histogram(&t, &s, x, y, K, &bins, &e) == ST_OK && bins > 20);
    for (size_t k = 0; k < bins; k++) {
        area += y[k] * s.bin;
        middle += y[k] * s.bin * x[k];
    }
    CHECK_NEAR(area, 1.0, 1e-9);
    CHECK_SOURCE(middle, want[0], 0.002 * want[0], src);
}

enum { SIDE = 240 };
static uint32_t cells[SIDE * SIDE];

/* Cell 2 inside cell 1. */
static void shape_is(int (*inside)(double, double), double area, double perimeter, double tolerance, const char *src) {
    feature f[2] = { { 0 } };
    error e = { 0 };
    for (int y = 0; y < SIDE; y++)
        for (int x = 0; x < SIDE; x++) cells[y * SIDE + x] = inside(x - 119.7, y - 120.2) ? 2 : 1;
    CHECK(cells_describe(cells, SIDE, SIDE, f, 2, &e) == ST_OK);
    CHECK_SOURCE(f[1].perimeter_px, perimeter, tolerance * perimeter, src);
    CHECK_SOURCE(4.0 * PI * f[1].cell_area_px2 / (f[1].perimeter_px * f[1].perimeter_px), 4.0 * PI * area / (perimeter * perimeter),
                 2.5 * tolerance, src);
}

static int in_disc(double x, double y) { return x * x + y * y <= 2500.0; }
static int in_ellipse(double x, double y) {
    double u = x * cos(PI / 6.0) + y * sin(PI / 6.0), v = -x * sin(PI / 6.0) + y * cos(PI / 6.0);
    return u * u / 6400.0 + v * v / 1600.0 <= 1.0;
}
static int in_hexagon(double x, double y) { /* lattice constant 100 */
    for (int k = 0; k < 3; k++)
        if (fabs(x * cos(k * PI / 3.0) + y * sin(k * PI / 3.0)) > 50.0) return 0;
    return 1;
}

static void order(double jitter, double want, double tolerance, const char *src) {
    enum { ROWS = 30, N = ROWS * ROWS };
    static double x[N], y[N];
    static int keep[N];
    uint64_t s = 88172645463325252u;
    for (int k = 0; k < N; k++) {
        double shift[2];
        for (int d = 0; d < 2; d++) {
            s ^= s << 13;
            s ^= s >> 7;
            s ^= s << 17;
            shift[d] = jitter * ((double)(s >> 11) / 9007199254740992.0 - 0.5);
        }
        x[k] = k % ROWS + 0.5 * (k / ROWS % 2) + shift[0];
        y[k] = sqrt(0.75) * (k / ROWS) + shift[1];
        keep[k] = k % ROWS > 1 && k % ROWS < ROWS - 2 && k / ROWS > 1 && k / ROWS < ROWS - 2;
    }
    double psi = 0.0;
    error e = { 0 };
    CHECK(hexagonal_order(x, y, keep, N, 1.37, &psi, &e) == ST_OK);
    CHECK_SOURCE(psi, want, tolerance, src);
}

int main(void) {
    static const double c16[] = { 103.5016639743, 107.1259444546, 118.7781781158, 127.2422451124, 114.7596797528 },
                        c17[] = { 256.3022571771, 262.7633881363, 283.1405816066, 297.5959141673, 276.1783925794 },
                        c18[] = { 89.3425930866, 99.7762367431, 138.9737634886, 173.3284890864, 124.4412177326 };
    worked_moments();
    hatch_choate(100.0, 1.3, c16, "C-16 Hatch T., Choate S.P. 1929, J. Franklin Inst. 207:369");
    hatch_choate(250.0, 1.25, c17, "C-17 Hatch and Choate 1929");
    hatch_choate(80.0, 1.6, c18, "C-18 Hatch and Choate 1929");
    shape_is(in_disc, PI * 2500.0, PI * 100.0, 0.01, "disc, closed form");
    shape_is(in_ellipse, PI * 3200.0, 2.0 * 193.768964410954, 0.02, "C-06 ellipse 2:1, elliptic integral");
    shape_is(in_hexagon, 8660.25403784, 346.4101615138, 0.035, "C-07 hexagonal cell; four directions see its sides unequally");
    order(0.0, 1.0, 1e-12, "hexagonal lattice: psi6 = 1 (A-08)");
    return check_done();
}

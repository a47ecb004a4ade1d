/* Detection: every bump of a jittered lattice is found where it is, pores as well, from a wrong first scale,
 * through clipping and noise; relief is told apart; the errors of the header. */
#include "metrics/detect.h"

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "metrics/filter.h"
#include "metrics/relief.h"
#include "metrics/spacing.h"
#include "planes.h"

enum { NX = 320, NY = 256, MAX = 1000 };

typedef struct {
    double x[MAX], y[MAX];
    size_t n;
} truth;
static truth known; /* hexagonal() reports points through a callback without a context */

static void put(float *f, size_t nx, size_t ny, double x, double y, double size, double h) {
    if (x < -1.5 * size || y < -1.5 * size || x > (double)nx + 1.5 * size || y > (double)ny + 1.5 * size)
        return;
    raise_cone(f, nx, ny, x, y, size, h);
    if (known.n < MAX) {
        known.x[known.n] = x;
        known.y[known.n++] = y;
    }
}

static float *texture_of(double a, double jitter, double noise, double ceiling, uint64_t seed) {
    float *f = plane_new(NX, NY);
    dice d = { seed };
    known.n = 0;
    hexagonal(f, NX, NY, a, jitter, 1.0, 0.75 * a, put, &d);
    for (size_t i = 0; i < NX * NY; i++) f[i] = (float)fmin((double)f[i], ceiling);
    if (noise > 0.0) add_noise(f, NX * NY, noise, &d);
    return f;
}

static int inside(double x, double y, double guard) {
    return x >= guard - 0.5 && y >= guard - 0.5 && x < NX - 0.5 - guard && y < NY - 0.5 - guard;
}

/* Features without a true centre within `reach`, true centres without a feature, and the rms distance. */
static void compare(const detection *d, double a, double reach, size_t *extra, size_t *missed, double *rms) {
    double ss = 0.0;
    size_t n = 0;
    *extra = *missed = 0;
    for (size_t i = 0; i < d->n; i++) {
        double best = HUGE_VAL;
        for (size_t k = 0; k < known.n; k++)
            best = fmin(best, hypot(known.x[k] - d->features[i].x, known.y[k] - d->features[i].y));
        if (!inside(d->features[i].x, d->features[i].y, 0.75 * a)) continue;
        *extra += best > reach;
        ss += best * best;
        n++;
    }
    for (size_t k = 0; k < known.n; k++) {
        double best = HUGE_VAL;
        for (size_t i = 0; i < d->n; i++)
            best = fmin(best, hypot(known.x[k] - d->features[i].x, known.y[k] - d->features[i].y));
        *missed += inside(known.x[k], known.y[k], 0.75 * a) && best > reach;
    }
    *rms = sqrt(ss / (double)n);
}

static void check_case(double a, double jitter, double noise, double ceiling, int sign, double d0,
                       double most_rms) {
    float *f = texture_of(a, jitter, noise, ceiling, 5);
    if (sign < 0)
        for (size_t i = 0; i < NX * NY; i++) f[i] = -f[i];
    detection d = { 0 };
    error e = { 0 };
    size_t extra = 0, missed = 0;
    double rms = 0.0;
    CHECK(detect(f, NX, NY, d0, sign, noise_sd(f, NX, NY), &d, &e) == ST_OK);
    compare(&d, a, 0.4 * a, &extra, &missed, &rms);
    CHECK(extra == 0);
    CHECK(missed == 0);
    CHECK(rms < most_rms * a);
    CHECK_NEAR(d.scale_px, a, 0.08 * a);
    double density = guarded_density(d.features, d.n, NX, NY, 0.5 * a, NULL);
    CHECK_NEAR(spacing_hex(density), a, 0.03 * a);
    for (size_t i = 1; i < d.n; i++) CHECK(d.marker[i] > d.marker[i - 1]);
    relief_evidence r;
    CHECK(relief_look(f, NX, NY, a, &r, &e) == ST_OK);
    CHECK(r.relief == (sign > 0 ? RELIEF_HILLOCK : RELIEF_PORE) && !r.unsure && r.skew * sign > 0.0);
    detection_free(&d);
    free(f);
}

static void check_guard(void) {
    const feature f[] = { { .x = 4.6, .y = 20.0 }, { .x = 4.4, .y = 20.0 }, { .x = 20.0, .y = 35.4 } };
    size_t n = 0;
    CHECK_NEAR(guarded_density(f, 3, 40, 40, 5.0, &n), 1.0 / 900.0, 1e-12);
    CHECK(n == 1);
    CHECK_NEAR(guarded_density(f, 3, 40, 40, 0.0, &n), 3.0 / 1600.0, 1e-12);
    CHECK(isnan(guarded_density(f, 3, 40, 40, 20.0, &n)));
}

static void check_errors(void) {
    float *f = plane_new(NX, NY);
    detection d = { 0 };
    relief_evidence r;
    error e = { 0 };
    CHECK_FAILS(detect(f, NX, NY, 20.0, 1, 0.0, &d, &e), ST_NO_RESULT, e, "features found");
    CHECK_FAILS(detect(f, NX, NY, MISSING, 1, 0.0, &d, &e), ST_BAD_INPUT, e, "scale");
    CHECK_FAILS(detect(f, NX, NY, 0.0, 1, 0.0, &d, &e), ST_BAD_INPUT, e, "scale");
    CHECK(relief_look(f, NX, NY, 20.0, &r, &e) == ST_OK && r.unsure);
    free(f);
    f = texture_of(24.0, 0.1, 0.0, 1.0, 5);
    size_t k = 1;
    for (; k < 200; k++) { /* every allocation in turn */
        mem_fail_after(k);
        e = (error){ ST_OK, "" };
        status st = detect(f, NX, NY, 24.0, 1, 0.0, &d, &e);
        mem_fail_after(0);
        if (st == ST_OK) break;
        CHECK(st == ST_NO_MEMORY && !d.features);
    }
    CHECK(k > 5 && k < 200);
    detection_free(&d);
    free(f);
}

int main(void) {
    check_case(24.0, 0.08, 0.0, 1.0, 1, 24.0, 0.03);
    check_case(24.0, 0.08, 0.0, 1.0, -1, 24.0, 0.03);
    check_case(24.0, 0.08, 0.0, 1.0, 1, 30.0, 0.03); /* first scale 25 % long and 10 % short */
    check_case(24.0, 0.08, 0.0, 1.0, 1, 21.6, 0.03);
    check_case(24.0, 0.08, 0.15, 1.0, 1, 24.0, 0.05);
    check_case(24.0, 0.08, 0.0, 0.75, 1, 24.0, 0.05); /* clipped tops */
    check_case(12.0, 0.08, 0.0, 1.0, -1, 12.0, 0.04);
    check_guard();
    check_errors();
    return check_done();
}

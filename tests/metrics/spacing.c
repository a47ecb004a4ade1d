/* First scale, ring, stretch, peaks and spectral peak on lattices, jittered lattices, random placement and
 * noise. */
#include "metrics/spacing.h"

#include "base/mem.h"
#include "check.h"
#include "metrics/filter.h"
#include "planes.h"

typedef struct {
    first_scale first;
    ring r;
    status found;
    error why;
    measured psd;
    status psd_found;
} look;

static look look_at(const float *f, size_t nx, size_t ny, double d) {
    look l = { .found = ST_BUG };
    error e = { 0 };
    float *k = plane_new(nx, ny);
    acf2d plain = { 0 }, curved = { 0 };
    curve pc = { 0 }, kc = { 0 }, sc = { 0 };
    size_t n = (size_t)((double)(nx * ny) / (d * d * 0.866));
    CHECK(acf2d_make(f, nx, ny, 256, &plain, &e) == ST_OK && acf_radial(&plain, &pc, &e) == ST_OK);
    spacing_first_scale(&pc, nx, ny, &l.first);
    CHECK(filter_curvature(f, nx, ny, 0.12 * d, 1, k, &e) == ST_OK);
    CHECK(acf2d_make(k, nx, ny, (size_t)(4.0 * d), &curved, &e) == ST_OK &&
          acf_radial(&curved, &kc, &e) == ST_OK);
    CHECK(psd_radial(k, nx, ny, &sc, &e) == ST_OK);
    l.found = spacing_ring(&curved, &kc, d, n, &l.r, &l.why);
    l.psd_found = spacing_psd_peak(&sc, d, n, &l.psd, &e);
    free(pc.points);
    free(kc.points);
    free(sc.points);
    free(k);
    acf2d_free(&plain);
    acf2d_free(&curved);
    return l;
}

static void check_lattices(void) {
    enum { N = 512 };
    dice d = { 5 };
    float *f = plane_new(N, N);
    hexagonal(f, N, N, 23.3, 0.0, 1.0, 0.25 * 23.3, add_bump, &d);
    look l = look_at(f, N, N, 23.3);
    CHECK(l.found == ST_OK && l.r.from_peaks);
    CHECK_NEAR(l.r.spacing.value / 23.3, 1.0, 0.003);
    CHECK_NEAR(l.r.radial_ring_px / 23.3, 0.967, 0.006);
    CHECK_NEAR(l.r.stretch.value, 1.0, 0.005);
    CHECK_NEAR(l.first.first_minimum_px / 23.3, 0.528, 0.012); /* J0: 3.8317 / 7.0156 of 0.967 */
    CHECK(l.first.z > 20.0);
    CHECK_NEAR(l.psd.value / 23.3, 0.866, 0.02);

    memset(f, 0, N * N * sizeof *f);
    hexagonal(f, N, N, 21.7, 0.14, 1.0, 0.25 * 21.7, add_bump, &d);
    l = look_at(f, N, N, 21.7);
    CHECK(l.found == ST_OK);
    CHECK_NEAR(l.r.spacing.value / 21.7, 1.0, 0.03);
    CHECK(l.r.stretch.value < 1.05 && l.r.spacing.u_sampling > 0.0 && l.r.spacing.u_sampling < 0.02 * 21.7);
    add_noise(f, N * N, 0.5, &d); /* half as strong as a bump is high */
    l = look_at(f, N, N, 21.7);
    CHECK(l.found == ST_OK);
    CHECK_NEAR(l.r.spacing.value / 21.7, 1.0, 0.03);
    free(f);
}

static void check_stretch(void) {
    enum { N = 640 };
    dice d = { 77 };
    float *f = plane_new(N, N), *g = plane_new(N, N);
    hexagonal(f, N, N, 24.0, 0.12, 1.15, 6.0, add_bump, &d);
    look l = look_at(f, N, N, 24.0);
    CHECK(l.found == ST_OK);
    CHECK_NEAR(l.r.stretch.value, 1.15, 0.03);
    CHECK_NEAR(fmod(l.r.stretch_angle_deg.value + 90.0, 180.0) - 90.0, 0.0, 5.0);
    CHECK_NEAR(l.r.spacing.value / 24.0, 1.0, 0.03);
    /* the same turned by 90 degrees */
    for (size_t y = 0; y < N; y++)
        for (size_t x = 0; x < N; x++) g[x * N + y] = f[y * N + x];
    l = look_at(g, N, N, 24.0);
    CHECK_NEAR(l.r.stretch.value, 1.15, 0.03);
    CHECK_NEAR(l.r.stretch_angle_deg.value, 90.0, 5.0);
    free(f);
    free(g);
}

static void check_nothing_there(void) {
    enum { N = 512 };
    dice d = { 4242 };
    error e = { 0 };
    float *f = plane_new(N, N);
    add_noise(f, N * N, 1.0, &d);
    look l = look_at(f, N, N, 20.0);
    CHECK(isnan(l.first.scale_px) && l.first.z < 6.0);
    CHECK(filter_gauss(f, N, N, 4.0, f, &e) == ST_OK);
    l = look_at(f, N, N, 20.0);
    CHECK(!(l.first.z >= 6.0));
    memset(f, 0, N * N * sizeof *f);
    for (int i = 0; i < 500; i++) add_bump(f, N, N, N * dice_uniform(&d), N * dice_uniform(&d), 5.0, 1.0);
    l = look_at(f, N, N, 24.0);
    CHECK(!(l.first.z >= 6.0) || l.found == ST_NO_RESULT);
    free(f);
}

static void check_two_populations(void) {
    enum { N = 512 };
    dice d = { 31337 };
    error e = { 0 };
    float *f = plane_new(N, N), *g = plane_new(N, N);
    curve c = { 0 };
    hexagonal(f, N, N, 16.0, 0.14, 1.0, 0.62 * 16.0, raise_cone, &d);
    hexagonal(g, N, N, 44.0, 0.14, 1.0, 0.62 * 44.0, raise_cone, &d);
    CHECK(psd_radial(f, N, N, &c, &e) == ST_OK);
    CHECK(isnan(spacing_second(&c, 16.0, N, N)) && isnan(spacing_second(&c, (double)NAN, N, N)));
    free(c.points);
    for (size_t i = 0; i < N * N; i++) f[i] += 1.5f * g[i];
    CHECK(psd_radial(f, N, N, &c, &e) == ST_OK);
    CHECK_NEAR(spacing_second(&c, 16.0, N, N), 44.0, 2.5);
    CHECK_NEAR(spacing_second(&c, 44.0, N, N), 16.0, 1.0);
    free(c.points);
    free(f);
    free(g);
}

static void check_refusals(void) {
    error e;
    ring r = { 0 };
    measured m = { 0 };
    curve_point falling[60], none[1] = { { 0.0, 1.0 } };
    for (int i = 0; i < 60; i++) falling[i] = (curve_point){ (double)i, exp(-i / 9.0) };
    curve c = { .points = falling, .n = 60 }, empty = { .points = none, .n = 1 };
    acf2d a = { .max_lag = 0, .nx = 100, .ny = 100 };
    CHECK_FAILS(spacing_ring(&a, &c, 20.0, 100, &r, &e), ST_NO_RESULT, e, "no ring");
    CHECK_FAILS(spacing_ring(&a, &empty, 20.0, 100, &r, &e), ST_NO_RESULT, e, "no ring");
    CHECK_FAILS(spacing_ring(&a, &c, (double)NAN, 100, &r, &e), ST_NO_RESULT, e, "no");
    for (int i = 0; i < 60; i++)
        falling[i].y = 1e-3 * cos(TAU * i / 20.0); /* a ring far below its standard error */
    CHECK_FAILS(spacing_ring(&a, &c, 20.0, 100, &r, &e), ST_NO_RESULT, e, "standard error");
    for (int i = 0; i < 60; i++) falling[i] = (curve_point){ i / 120.0, 1.0 / (1.0 + i) };
    CHECK_FAILS(spacing_psd_peak(&c, 20.0, 9, &m, &e), ST_NO_RESULT, e, "no peak");
    CHECK_FAILS(spacing_psd_peak(&empty, 20.0, 9, &m, &e), ST_NO_RESULT, e, "no peak");
    CHECK_FAILS(spacing_psd_peak(&c, (double)NAN, 9, &m, &e), ST_NO_RESULT, e, "no scale");
    first_scale first;
    spacing_first_scale(&empty, 100, 100, &first);
    CHECK(isnan(first.scale_px) && fabs(first.z) < 1e-12);
}

static void check_formulas(void) {
    curve_point p[200];
    for (int i = 0; i < 200; i++) p[i] = (curve_point){ (double)i, i ? exp(-(i * i) / 200.0) : 1.0 };
    curve c = { .points = p, .n = 200 };
    /* C = exp(-r^2 / 2 s^2), s = 10: 2 pi integral C^2 r dr = pi s^2 */
    double a2 = 1.0 + TAU / 2.0 * 100.0;
    CHECK_NEAR(acf_standard_error(&c, 100.0, 500, 400) / sqrt(a2 / 2e5 / (TAU / 2.0 * 100.0 / sqrt(a2))), 1.0,
               0.01);
    /* up to r = 3: 2 pi 50 (1 - exp(-0.09)) */
    a2 = 1.0 + TAU * 50.0 * (1.0 - exp(-0.09));
    CHECK_NEAR(acf_standard_error(&c, 3.0, 500, 400) / sqrt(a2 / 2e5 / (TAU / 2.0 * 3.0 / sqrt(a2))), 1.0,
               0.03);
    CHECK_NEAR(spacing_hex(1.0), 1.0745699318, 1e-9);
}

int main(void) {
    check_lattices();
    check_stretch();
    check_nothing_there();
    check_two_populations();
    check_refusals();
    check_formulas();
    return check_done();
}

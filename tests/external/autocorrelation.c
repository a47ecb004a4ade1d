/* B-01 .. B-24: autocorrelation, power spectrum, Sal and Str against closed forms and direct sums.
 * The transforms are single precision, so that identities hold to a few 1e-7 of the variance, not to 1e-12.
 * B-04 (units) is a matter of the caller: this room knows px only. B-12 documents a parabola that is not
 * used here. B-25 and the tail probabilities are checked where series are. */
#include "check.h"
#include "metrics/direction.h"
#include "metrics/filter.h"
#include "metrics/planes.h"
#include "metrics/spacing.h"
#include "metrics/spectrum.h"

static const char *const wiener = "B-01 Wiener (1930), Khinchin (1934); direct sums";
static const char *const bessel = "B-07 Abramowitz and Stegun (1964), table 9.5: zeros of J1";
static const char *const iso = "ISO 25178-2 definitions (clause from memory), level 0.2";

static void small_image(float *f) {
    for (int y = 0; y < 6; y++)
        for (int x = 0; x < 8; x++) f[8 * y + x] = (float)((7 * x * x + 13 * y + 3 * x * y) % 17);
}

static void b01_b03(void) {
    /* The image is 8 x 6, lags reach 3: those of B-01 within them. */
    static const struct {
        int dy, dx;
        double c;
    } t[] = { { 0, 0, 1.0 },
              { 0, 1, -0.110357727379 },
              { 1, 0, 0.031423895254 },
              { 1, 1, 0.071826046294 },
              { 1, -1, -0.014589665653 },
              { 2, 3, 0.326022913257 } };
    float f[48], p[30];
    error e = { 0 };
    acf2d a = { 0 };
    small_image(f);
    CHECK(acf2d_make(f, 8, 6, 3, &a, &e) == ST_OK && a.max_lag == 3);
    CHECK_SOURCE(a.variance, 1222.0 / 48.0, 1e-5, wiener);
    for (size_t i = 0; i < sizeof t / sizeof *t; i++)
        CHECK_SOURCE((double)a.values[t[i].dy * 7 + t[i].dx + 3], t[i].c, 1e-6, wiener);
    acf2d_free(&a);

    /* Longer lags: repeat the image in an empty frame of its own mean, where the sums are the same. */
    static const struct {
        int dy, dx;
        double sum;
    } far[] = { { 5, 0, 21.0 }, { 0, 7, 0.0 }, { 5, 7, 28.0 }, { 3, -4, -101.0 } };
    float g[24 * 24];
    for (int i = 0; i < 24 * 24; i++) g[i] = 7.0f;
    for (int y = 0; y < 6; y++) memcpy(g + (y + 9) * 24 + 8, f + 8 * y, 8 * sizeof *f);
    CHECK(acf2d_make(g, 24, 24, 12, &a, &e) == ST_OK);
    for (size_t i = 0; i < sizeof far / sizeof *far; i++) {
        double overlap = (24.0 - abs(far[i].dx)) * (24.0 - far[i].dy);
        double c = (double)a.values[far[i].dy * 25 + far[i].dx + 12] * a.variance * overlap;
        CHECK_SOURCE(c, far[i].sum, 1222.0 * 3e-6, wiener);
    }
    acf2d_free(&a);

    CHECK(psd2d(f, 8, 6, p, &e) == ST_OK);
    double sum = 0.0;
    for (int j = 0; j < 6; j++)
        for (int i = 0; i < 5; i++) sum += (i && i < 4 ? 2.0 : 1.0) * (double)p[5 * j + i] / 48.0;
    CHECK_SOURCE(sum, 25.14583516716, 25.0 * 1e-6,
                 "B-02, B-03 Parseval with a periodic Hann window, direct sum");
}

static void b05_b06(void) {
    enum { N = 512 };
    error e = { 0 };
    float *f = plane_new(N, N), *p = plane_new(N / 2 + 1, N);
    add_grating(f, N, N, 32.0, 0.0, 0.2);
    CHECK(psd2d(f, N, N, p, &e) == ST_OK);
    size_t best = 0;
    double all = 0.0, line = 0.0;
    for (size_t i = 0; i < N * (N / 2 + 1); i++) {
        if (p[i] > p[best]) best = i;
        double w = i % (N / 2 + 1) ? 2.0 : 1.0;
        all += w * (double)p[i] / (N * N);
        size_t kx = i % (N / 2 + 1), ky = i / (N / 2 + 1);
        if (kx >= 15 && kx <= 17 && (ky <= 1 || ky == N - 1)) line += w * (double)p[i] / (N * N);
    }
    CHECK(best == 16);
    CHECK_SOURCE(all, 0.02, 0.02 * 1e-5, "B-05 variance of a grating a^2/2");
    CHECK_SOURCE(line / all, 1.0, 1e-6, "B-05 one line (three bins wide behind a Hann window)");
    memset(f, 0, N * N * sizeof *f);
    add_grating(f, N, N, 37.3, 23.0 * TAU / 360.0, 0.2);
    curve c = { 0 };
    measured m = { 0 };
    CHECK(psd_radial(f, N, N, &c, &e) == ST_OK);
    CHECK(spacing_psd_peak(&c, 1.1 * 37.3, 100, &m, &e) == ST_OK);
    CHECK_SOURCE(m.value, 37.3, 37.3 * 0.005, "B-06 period of a grating that does not divide the field");
    free(c.points);
    free(f);
    free(p);
}

/* Ring of the radial autocorrelation itself: no curvature map, d chosen so that the search begins below the
 * minimum. */
static ring ring_of(const float *f, size_t n, size_t lag, double d, curve *radial, acf2d *a) {
    ring r = { 0 };
    error e = { 0 };
    CHECK(acf2d_make(f, n, n, lag, a, &e) == ST_OK && acf_radial(a, radial, &e) == ST_OK);
    CHECK(spacing_ring(a, radial, d, 1000, &r, &e) == ST_OK);
    return r;
}

static void drop(curve *c, acf2d *a) {
    free(c->points);
    *c = (curve){ 0 };
    acf2d_free(a);
}

static void b07_b08_b18(void) {
    enum { N = 1024, WAVES = 180 };
    float *f = plane_new(N, N);
    acf2d a = { 0 };
    curve c = { 0 };
    /* one grating at a time, the radial mean turns it into J0 */
    add_grating(f, N, N, 32.0, 0.0, 0.2);
    ring r = ring_of(f, N, 128, 32.0, &c, &a);
    CHECK_SOURCE(r.radial_ring_px / 32.0, 1.1165652972, 1.1166 * 0.005, bessel);
    CHECK_SOURCE(r.ring_height, 0.300115752526, 0.006, bessel);
    first_scale first;
    spacing_first_scale(&c, N, N, &first);
    CHECK_SOURCE(first.first_minimum_px / 32.0, 0.6098349456, 0.61 * 0.02, bessel);
    measured sal, str;
    double angle;
    texture_decay(&a, 0.2, &sal, &str, &angle);
    /* 505 of 512 columns overlap at this lag, not whole periods: C is off by up to p / (4 pi 505) */
    CHECK_SOURCE(sal.value / 32.0, 0.217952891576, 2e-3, "B-20 arccos(0.2) / 2 pi");
    CHECK_SOURCE(str.value, 0.0, 1e-12, "B-20 no decay along the lines");
    CHECK_SOURCE(angle, 90.0, 1.0, "B-20 lines of cos(2 pi x / p) run along y");
    drop(&c, &a);

    dice d = { 20240501 };
    memset(f, 0, N * N * sizeof *f);
    double ring_sum = 0.0, sal_sum = 0.0;
    enum { FIELDS = 1 };
    for (int k = 0; k < FIELDS; k++) {
        memset(f, 0, N * N * sizeof *f);
        for (int w = 0; w < WAVES; w++) { /* real and imaginary part: random phase */
            double t = TAU * (w + dice_uniform(&d)) / WAVES, q = TAU * dice_uniform(&d);
            double kx = TAU / 12.0 * cos(t), ky = TAU / 12.0 * sin(t), cx = cos(kx), sx = sin(kx);
            for (size_t y = 0; y < N; y++) {
                double re = cos(ky * (double)y + q), im = sin(ky * (double)y + q), next;
                for (size_t x = 0; x < N; x++) {
                    f[y * N + x] += (float)re;
                    next = re * cx - im * sx;
                    im = re * sx + im * cx;
                    re = next;
                }
            }
        }
        r = ring_of(f, N, 64, 12.0, &c, &a);
        ring_sum += r.radial_ring_px / FIELDS;
        texture_decay(&a, 0.2, &sal, &str, &angle);
        sal_sum += sal.value / FIELDS;
        CHECK(str.value > 0.9 && str.value <= 1.0);
        drop(&c, &a);
    }
    CHECK_SOURCE(ring_sum / 12.0, 1.1165652972, 1.1166 * 0.01, "B-08 Berry (1977): autocorrelation J0");
    /* The field holds about pi L / p = 270 independent directions: the power of a direction scatters, the
     * second harmonic of C by sqrt(2 / 135) J2 = 0.04, and the shortest of all directions lies that much
     * low: -6 .. +2 %. */
    CHECK_SOURCE(sal_sum / 12.0, 0.98 * 0.324919525484, 0.04 * 0.325, "B-18 J0 falls to 0.2");
    free(f);
}

static void b09_b22(void) {
    enum { N = 768 };
    const double a0 = 24.0, p = a0 * sqrt(3.0) / 2.0;
    float *f = plane_new(N, N), *k = plane_new(N, N);
    error e = { 0 };
    acf2d a = { 0 };
    curve c = { 0 };
    for (int i = 0; i < 3; i++) add_grating(f, N, N, p, i * TAU / 6.0, 1.0);
    ring r = ring_of(f, N, 96, a0, &c, &a);
    CHECK_SOURCE(r.radial_ring_px / a0, 0.966973912351, 0.967 * 0.005, "B-09 geometry, B-07");
    CHECK(r.from_peaks);
    CHECK_SOURCE(r.spacing.value / a0, 1.0, 0.005, "B-09 first shell of the lattice");
    CHECK_SOURCE(r.stretch.value, 1.0, 0.005, "B-22 an isotropic lattice is not stretched");
    measured sal, str, psd = { 0 };
    double angle;
    texture_decay(&a, 0.2, &sal, &str, &angle);
    CHECK_SOURCE(sal.value / p, 0.324179343174, 2e-3, "B-22");
    CHECK_SOURCE(str.value, 0.995392, 3e-3, "B-22"); /* the same at 768 px */
    drop(&c, &a);
    CHECK(filter_curvature(f, N, N, 0.12 * a0, 1, k, &e) == ST_OK && psd_radial(k, N, N, &c, &e) == ST_OK);
    CHECK(spacing_psd_peak(&c, a0, 1000, &psd, &e) == ST_OK);
    CHECK_SOURCE(psd.value / a0, 0.866025403784, 0.866 * 0.005, "B-09 row spacing");
    CHECK_SOURCE(spacing_hex(2.0 / (sqrt(3.0) * a0 * a0)) / a0, 1.0, 1e-12, "B-09, A-09 geometry");
    free(c.points);
    free(f);
    free(k);
}

static void square(float *f, size_t n, double a, double sd) {
    for (double y = -2.0 * a; y < (double)n + 2.0 * a; y += a)
        for (double x = -2.0 * a; x < (double)n + 2.0 * a; x += a) add_bump(f, n, n, x, y, sd, 1.0);
}

static void b10_b11(void) {
    enum { N = 768 };
    static const struct {
        double sd, hex, height, square;
    } t[] = { { 0.30, 0.966987, 0.300099, 1.115141 },
              { 0.20, 0.969196, 0.296715, 1.099506 },
              { 0.15, 0.977668, 0.279041, 1.042943 },
              { 0.10, 0.989846, 0.228254, 0.994068 } };
    const double a0 = 24.0;
    const char *src = "B-10, B-11 sum over the reciprocal lattice of |F|^2 J0(G r)";
    float *f = plane_new(N, N);
    acf2d a = { 0 };
    curve c = { 0 };
    dice d = { 1 };
    for (size_t i = 0; i < sizeof t / sizeof *t; i++) {
        memset(f, 0, N * N * sizeof *f);
        hexagonal(f, N, N, a0, 0.0, 1.0, t[i].sd * a0, add_bump, &d);
        ring r = ring_of(f, N, 72, a0, &c, &a);
        CHECK_SOURCE(r.radial_ring_px / a0, t[i].hex, 0.005 * t[i].hex, src);
        CHECK_SOURCE(r.ring_height, t[i].height, 0.008, src);
        drop(&c, &a);
        memset(f, 0, N * N * sizeof *f);
        square(f, N, a0, t[i].sd * a0);
        r = ring_of(f, N, 72, a0, &c, &a);
        CHECK_SOURCE(r.radial_ring_px / a0, t[i].square, 0.008 * t[i].square, src);
        drop(&c, &a);
    }
    free(f);
}

static void b13_b14_b15(void) {
    enum { N = 512, LAG = 32 };
    error e = { 0 };
    dice d = { 8675309 };
    float *f = plane_new(N, N), *p = plane_new(N / 2 + 1, N);
    acf2d a = { 0 };
    add_noise(f, N * N, 0.1, &d);
    CHECK(acf2d_make(f, N, N, LAG, &a, &e) == ST_OK);
    size_t beyond = 0, lags = 0;
    for (int y = 0; y <= LAG; y++)
        for (int x = y ? -LAG : 1; x <= LAG; x++) {
            double overlap = (double)(N - abs(x)) * (double)(N - y);
            beyond += fabs((double)a.values[y * (2 * LAG + 1) + x + LAG]) > 1.96 / sqrt(overlap);
            lags++;
        }
    CHECK_SOURCE((double)beyond / (double)lags, 0.05, 0.0195, "B-13 Bartlett (1946)");
    acf2d_free(&a);
    CHECK(psd2d(f, N, N, p, &e) == ST_OK);
    double sum = 0.0, ss = 0.0, n = 0.0;
    for (size_t j = 0; j < N; j++)
        for (size_t i = 2; i + 2 < N / 2; i++, n += 1.0) {
            double v = (double)p[j * (N / 2 + 1) + i];
            sum += v;
            ss += v * v;
        }
    double mean = sum / n, sd = sqrt(ss / n - mean * mean);
    /* The window correlates neighbouring bins: fewer of them count, hence 2 and 4 %. */
    CHECK_SOURCE(mean, 0.01, 0.01 * 0.02, "B-14 white level sigma^2 px2, Priestley (1981)");
    CHECK_SOURCE(sd / mean, 1.0, 0.04, "B-14 single bins are exponential");
    free(f);
    free(p);

    int false_rings = 0;
    f = plane_new(160, 160);
    for (int k = 0; k < 100; k++) {
        curve c = { 0 };
        first_scale first;
        memset(f, 0, 160 * 160 * sizeof *f);
        add_noise(f, 160 * 160, 0.2, &d);
        CHECK(acf2d_make(f, 160, 160, 80, &a, &e) == ST_OK && acf_radial(&a, &c, &e) == ST_OK);
        spacing_first_scale(&c, 160, 160, &first);
        false_rings += first.z >= 6.0;
        drop(&c, &a);
    }
    CHECK_SOURCE((double)false_rings, 0.0, 5.0, "B-15 white noise has no ring");
    free(f);
}

typedef double (*formula)(double x, double y);
static double gaussian(double x, double y) { return exp(-(x * x + y * y) / 2500.0); }
static double exponential(double x, double y) { return exp(-sqrt(x * x + y * y) / 50.0); }
static double twice_along_x(double x, double y) { return exp(-(x * x / 4.0 + y * y) / 1600.0); }
static double crossed(double x, double y) { return 0.5 * (cos(TAU * x / 80.0) + cos(TAU * y / 80.0)); }

static void decay_of(formula f, measured *sal, measured *str, double *angle) {
    enum { LAG = 120 };
    acf2d a = {
        .values = plane_new(2 * LAG + 1, LAG + 1), .max_lag = LAG, .variance = 1.0, .nx = 512, .ny = 512
    };
    for (int y = 0; y <= LAG; y++)
        for (int x = -LAG; x <= LAG; x++)
            a.values[y * (2 * LAG + 1) + x + LAG] = (float)f((double)x, (double)y);
    texture_decay(&a, 0.2, sal, str, angle);
    acf2d_free(&a);
}

static void b16_b21(void) {
    measured sal, str;
    double angle;
    decay_of(gaussian, &sal, &str, &angle);
    CHECK_SOURCE(sal.value / 50.0, 1.268636241180, 2e-5, iso);
    decay_of(exponential, &sal, &str, &angle);
    CHECK_SOURCE(sal.value / 50.0, 1.609437912434, 2e-5, iso);
    decay_of(twice_along_x, &sal, &str, &angle);
    CHECK_SOURCE(sal.value / 40.0, 1.268636241180, 2e-5, iso);
    CHECK_SOURCE(str.value, 0.5, 1e-4, "B-19 ISO 25178-2");
    CHECK_SOURCE(angle, 0.0, 1e-9, "B-19 the long axis is x");
    decay_of(crossed, &sal, &str, &angle);
    CHECK_SOURCE(sal.value / 80.0, 0.308231935225, 1e-3, "B-21 crossed gratings");
    CHECK_SOURCE(str.value, 0.874624309941, 1e-3, "B-21 crossed gratings");

    /* B-16, B-19 on random fields: smoothed white noise, whose autocorrelation is exp(-r^2 / 4 s^2): L = 2
     * s. */
    enum { N = 384, FIELDS = 6 };
    error e = { 0 };
    dice d = { 60221 };
    float *f = plane_new(N, N);
    double mean = 0.0;
    for (int k = 0; k < FIELDS; k++) {
        acf2d a = { 0 };
        memset(f, 0, N * N * sizeof *f);
        add_noise(f, N * N, 1.0, &d);
        CHECK(filter_gauss(f, N, N, 2.5, f, &e) == ST_OK && acf2d_make(f, N, N, 40, &a, &e) == ST_OK);
        texture_decay(&a, 0.2, &sal, &str, &angle);
        mean += sal.value / 5.0 / FIELDS;
        acf2d_free(&a);
    }
    CHECK_SOURCE(mean / 1.268636241180, 0.985, 0.025,
                 "B-16 -4 .. +1 %: a minimum over directions is biased low");
    free(f);
}

static void b23(void) {
    enum { N = 512 };
    dice d = { 299 };
    float *f = plane_new(N, N);
    acf2d a = { 0 };
    curve c = { 0 };
    error e = { 0 };
    ring r = { 0 };
    /* random features of a jittered lattice, seen tilted by 30 degrees about x: y shrinks by cos 30 */
    hexagonal(f, N, N, 22.0, 0.13, 1.0 / cos(TAU / 12.0), 5.0, add_bump, &d);
    CHECK(filter_curvature(f, N, N, 2.6, 1, f, &e) == ST_OK);
    CHECK(acf2d_make(f, N, N, 90, &a, &e) == ST_OK && acf_radial(&a, &c, &e) == ST_OK);
    CHECK(spacing_ring(&a, &c, 22.0, 600, &r, &e) == ST_OK);
    CHECK_SOURCE(1.0 / r.stretch.value, 0.866025403784, 0.866 * 0.03, "B-23 cos 30 deg");
    CHECK_SOURCE(fmod(r.stretch_angle_deg.value + 90.0, 180.0), 90.0, 5.0,
                 "B-23 the shorter spacing is along y");
    drop(&c, &a);
    free(f);
}

static void b24(void) {
    enum { N = 512 };
    static const struct {
        double r, share;
    } t[] = { { 0.5, 0.685037642474 }, { 1.0, 0.391002218956 }, { 1.5, 0.144293612814 } };
    float *f = plane_new(N, N);
    acf2d a = { 0 };
    curve c = { 0 };
    error e = { 0 };
    double area = 0.0;
    for (int y = 0; y < N; y++)
        for (int x = 0; x < N; x++) {
            f[y * N + x] = (x - 256) * (x - 256) + (y - 256) * (y - 256) <= 100 * 100 ? 1.0f : 0.0f;
            area += (double)f[y * N + x];
        }
    CHECK(acf2d_make(f, N, N, 200, &a, &e) == ST_OK);
    double mean = area / (N * N);
    for (size_t i = 0; i < 3;
         i++) { /* undo mean removal and overlap: sum f f = C v n + mean terms over the overlap */
        int lag = (int)(100.0 * t[i].r);
        double overlap = (double)(N - lag) * N, c0 = (double)a.values[lag + 200] * a.variance * overlap;
        double both = 2.0 * area; /* the disc lies in the overlap of either copy */
        double raw = c0 + mean * both - mean * mean * overlap;
        CHECK_SOURCE(raw / area, t[i].share, 0.005, "B-24 lens area");
    }
    drop(&c, &a);
    free(f);
}

int main(void) {
    b01_b03();
    b05_b06();
    b07_b08_b18();
    b09_b22();
    b10_b11();
    b13_b14_b15();
    b16_b21();
    b23();
    b24();
    return check_done();
}

/* Transforms against direct sums; interpolation; radial means; Parseval. */
#include "metrics/spectrum.h"

#include "base/mem.h"
#include "check.h"
#include "planes.h"

static double direct(const float *f, long nx, long ny, long dx, long dy, double mean) {
    double sum = 0.0;
    for (long y = 0; y < ny; y++)
        for (long x = 0; x < nx; x++)
            if (x + dx >= 0 && x + dx < nx && y + dy >= 0 && y + dy < ny)
                sum += ((double)f[y * nx + x] - mean) * ((double)f[(y + dy) * nx + x + dx] - mean);
    return sum / (double)((nx - labs(dx)) * (ny - labs(dy)));
}

static void check_acf(size_t nx, size_t ny) {
    float *f = plane_new(nx, ny);
    dice d = { 4711 };
    error e = { 0 };
    acf2d a = { 0 };
    double mean = 0.0, worst = 0.0;
    for (size_t i = 0; i < nx * ny; i++) f[i] = 3.0f + (float)dice_uniform(&d);
    for (size_t i = 0; i < nx * ny; i++) mean += (double)f[i] / (double)(nx * ny);
    CHECK(acf2d_make(f, nx, ny, 1000, &a, &e) == ST_OK);
    size_t lag = (nx < ny ? nx : ny) / 2;
    CHECK(a.max_lag == lag && a.nx == nx && a.ny == ny);
    double zero = direct(f, (long)nx, (long)ny, 0, 0, mean);
    CHECK_NEAR(a.variance / zero, 1.0, 1e-5);
    for (long dy = 0; dy <= (long)lag; dy++)
        for (long dx = -(long)lag; dx <= (long)lag; dx++) {
            double want = direct(f, (long)nx, (long)ny, dx, dy, mean) / zero;
            double got = (double)a.values[(size_t)dy * (2 * lag + 1) + (size_t)(dx + (long)lag)];
            worst = fmax(worst, fabs(got - want));
        }
    CHECK_NEAR(worst, 0.0, 3e-6);
    CHECK_NEAR(acf2d_at(&a, 3.0, 2.0), direct(f, (long)nx, (long)ny, 3, 2, mean) / zero, 3e-6);
    CHECK_NEAR(acf2d_at(&a, -3.4, -2.2), acf2d_at(&a, 3.4, 2.2), 1e-9);
    CHECK(isnan(acf2d_at(&a, (double)lag - 1.0, 0.0)));
    acf2d again = { 0 };
    CHECK(acf2d_make(f, nx, ny, 1000, &again, &e) == ST_OK);
    CHECK(!memcmp(a.values, again.values, (lag + 1) * (2 * lag + 1) * sizeof *a.values));
    acf2d_free(&a);
    acf2d_free(&again);
    CHECK(!a.values);
    free(f);
}

static void check_interpolation(void) {
    enum { N = 200 };
    float *f = plane_new(N, N);
    error e = { 0 };
    acf2d a = { 0 };
    curve c = { 0 };
    add_grating(f, N, N, 20.0, 0.0, 1.0);
    CHECK(acf2d_make(f, N, N, 60, &a, &e) == ST_OK);
    CHECK_NEAR(acf2d_at(&a, 7.3, 4.6), cos(TAU * 7.3 / 20.0),
               0.015); /* unbiased up to whole periods in the overlap */
    CHECK(acf_radial(&a, &c, &e) == ST_OK);
    CHECK(c.n == 61 && fabs(c.points[0].x) < 1e-12 && fabs(c.points[0].y - 1.0) < 1e-6);
    int rising = 1, near_middle = 1;
    for (size_t i = 1; i < c.n; i++) {
        rising &= c.points[i].x > c.points[i - 1].x;
        near_middle &= fabs(c.points[i].x - (double)i) < 0.51;
    }
    CHECK(rising && near_middle);
    CHECK_NEAR(c.points[1].x, (4.0 + 4.0 * sqrt(2.0)) / 8.0, 1e-3); /* 8 neighbours, weights all but equal */
    free(c.points);
    acf2d_free(&a);
    free(f);
}

static void check_psd(size_t nx, size_t ny) {
    float *f = plane_new(nx, ny), *p = plane_new(nx / 2 + 1, ny);
    dice d = { 31 };
    error e = { 0 };
    curve c = { 0 };
    add_noise(f, nx * ny, 0.4, &d);
    CHECK(psd2d(f, nx, ny, p, &e) == ST_OK);
    double mean = 0.0, want = 0.0, norm = 0.0, sum = 0.0;
    for (size_t i = 0; i < nx * ny; i++) mean += (double)f[i] / (double)(nx * ny);
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx; x++) {
            double w = (0.5 - 0.5 * cos(TAU * (double)x / (double)nx)) *
                       (0.5 - 0.5 * cos(TAU * (double)y / (double)ny));
            double z = w * ((double)f[y * nx + x] - mean);
            want += z * z;
            norm += w * w;
        }
    for (size_t j = 0; j < ny; j++)
        for (size_t i = 0; i <= nx / 2; i++)
            sum += (i && 2 * i != nx ? 2.0 : 1.0) * (double)p[j * (nx / 2 + 1) + i];
    CHECK_NEAR(sum / (double)(nx * ny) / (want / norm), 1.0, 1e-5);
    CHECK(psd_radial(f, nx, ny, &c, &e) == ST_OK);
    double level = 0.0;
    for (size_t i = 4; i < c.n; i++) level += c.points[i].y / (double)(c.n - 4);
    /* White: the variance, px2, at every frequency; the inner rings have few bins: s.e. 3 %. */
    CHECK_NEAR(level / (want / norm), 1.0, 0.08);
    CHECK(c.points[c.n - 1].x <= 0.51 && c.points[c.n - 1].x > 0.45);
    free(c.points);
    free(f);
    free(p);
}

static void check_no_memory(void) {
    float *f = plane_new(40, 40);
    error e;
    acf2d a = { 0 };
    curve c = { 0 };
    mem_fail_after(1);
    CHECK_FAILS(acf2d_make(f, 40, 40, 9, &a, &e), ST_NO_MEMORY, e, "autocorrelation");
    mem_fail_after(0);
    CHECK(acf2d_make(f, 40, 40, 9, &a, &e) == ST_OK && fabs(a.variance) < 1e-12 && isfinite(a.values[0]));
    for (size_t n = 1; n <= 2; n++) {
        mem_fail_after(n);
        CHECK_FAILS(acf_radial(&a, &c, &e), ST_NO_MEMORY, e, "radial");
    }
    for (size_t n = 1; n <= 4; n++) {
        mem_fail_after(n);
        CHECK_FAILS(psd_radial(f, 40, 40, &c, &e), ST_NO_MEMORY, e, "memory");
    }
    mem_fail_after(0);
    CHECK(!c.points);
    acf2d_free(&a);
    free(f);
}

int main(void) {
    check_acf(37, 29);
    check_acf(32, 50);
    check_interpolation();
    check_psd(128, 96);
    check_psd(101, 67);
    check_no_memory();
    return check_done();
}

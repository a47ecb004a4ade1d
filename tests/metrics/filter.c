/* Flattening removes what it says and no more; filters agree with their closed forms at every scale and at
 * the edge. */
#include "metrics/filter.h"

#include "base/mem.h"
#include "check.h"
#include "planes.h"

enum { NX = 150, NY = 113 };

static double mirrored_gauss(double at, double x, double n, double sd, double *second) {
    double g = 0.0, s = 0.0;
    for (int k = -4; k <= 4; k++)
        for (int flip = 0; flip < 2; flip++) {
            double u = ((flip ? -1.0 - at : at) + 2.0 * k * n - x) / sd,
                   w = exp(-0.5 * u * u) / (sd * sqrt(TAU));
            g += w;
            s += (u * u - 1.0) / (sd * sd) * w;
        }
    *second = s;
    return g;
}

/* An impulse near a corner against the mirrored closed form: largest error, share of the peak. */
static void impulse_errors(double sd, double px, double py, double *gauss, double *curvature) {
    float *f = plane_new(NX, NY), *g = plane_new(NX, NY), *k = plane_new(NX, NY);
    error e = { 0 };
    double peak = 1.0 / (TAU * sd * sd);
    f[(size_t)py * NX + (size_t)px] = 1.0f;
    CHECK(filter_gauss(f, NX, NY, sd, g, &e) == ST_OK);
    CHECK(filter_curvature(f, NX, NY, sd, 1, k, &e) == ST_OK);
    *gauss = *curvature = 0.0;
    for (size_t y = 0; y < NY; y++)
        for (size_t x = 0; x < NX; x++) {
            double sx, sy, gx = mirrored_gauss(px, (double)x, NX, sd, &sx),
                           gy = mirrored_gauss(py, (double)y, NY, sd, &sy);
            double want = -sd * sd * (sx * gy + gx * sy);
            *gauss = fmax(*gauss, fabs((double)g[y * NX + x] - gx * gy) / peak);
            *curvature = fmax(*curvature, fabs((double)k[y * NX + x] - want) / (2.0 * peak));
        }
    free(f);
    free(g);
    free(k);
}

static void check_filters(void) {
    static const double sd[] = { 1.3, 2.7, 3.9, 4.1, 6.3, 11.7, 29.3 };
    for (size_t i = 0; i < sizeof sd / sizeof *sd; i++) {
        double g, k;
        impulse_errors(sd[i], 3.0, 5.0, &g, &k);
        CHECK_NEAR(g, 0.0, 2e-5);
        CHECK_NEAR(k, 0.0, i == 0 ? 2e-3 : 3e-4); /* sampling a second derivative at sd 1.3 */
        impulse_errors(sd[i], 71.0, 55.0, &g, &k);
        CHECK_NEAR(g, 0.0, 2e-5);
    }
    float *f = plane_new(NX, NY), *g = plane_new(NX, NY);
    error e = { 0 };
    for (size_t i = 0; i < NX * NY; i++) f[i] = 0.37f;
    CHECK(filter_curvature(f, NX, NY, 0.9, 1, g, &e) == ST_OK);
    CHECK_NEAR((double)g[NX * 50 + 70], 0.0, 1e-6);
    for (size_t y = 0; y < NY; y++) /* a paraboloid has one curvature: -sigma^2 (2 + 2) / 1000 */
        for (size_t x = 0; x < NX; x++)
            f[y * NX + x] =
                (float)((((double)x - 70.0) * ((double)x - 70.0) + ((double)y - 50.0) * ((double)y - 50.0)) /
                        1000.0);
    CHECK(filter_curvature(f, NX, NY, 0.8, 1, g, &e) == ST_OK);
    CHECK_NEAR((double)g[NX * 50 + 70], -0.64 * 4.0 / 1000.0, 2e-6);
    CHECK(filter_curvature(f, NX, NY, 5.2, -1, g, &e) == ST_OK);
    CHECK_NEAR((double)g[NX * 50 + 70], 5.2 * 5.2 * 4.0 / 1000.0, 2e-4);
    /* in place, and sigma 0 */
    dice d = { 1234567 };
    float *h = plane_new(NX, NY);
    add_noise(f, NX * NY, 1.0, &d);
    for (int big = 0; big < 2; big++) {
        double s = big ? 7.3 : 2.2;
        CHECK(filter_gauss(f, NX, NY, s, g, &e) == ST_OK);
        memcpy(h, f, NX * NY * sizeof *f);
        CHECK(filter_gauss(h, NX, NY, s, h, &e) == ST_OK && !memcmp(g, h, NX * NY * sizeof *g));
    }
    CHECK(filter_gauss(f, NX, NY, 0.0, h, &e) == ST_OK && !memcmp(f, h, NX * NY * sizeof *f));
    /* a kernel wider than the picture */
    CHECK(filter_gauss(f, 33, 32, 40.0, h, &e) == ST_OK && isfinite(h[0]) &&
          fabsf(h[0] - h[33 * 32 - 1]) < 0.02f);
    free(f);
    free(g);
    free(h);
}

static void check_noise(void) {
    enum { N = 512 };
    float *f = plane_new(N, N), *g = plane_new(N, N);
    dice d = { 99 };
    error e = { 0 };
    add_noise(f, N * N, 0.173, &d);
    CHECK_NEAR(noise_sd(f, N, N), 0.173, 0.002);
    static const double sd[] = { 2.6, 7.1 };
    for (int i = 0; i < 2; i++)
        for (int curved = 0; curved < 2; curved++) {
            size_t edge = (size_t)(4.0 * sd[i]), n = 0; /* mirrored noise is stronger near the edge */
            double ss = 0.0;
            if (curved)
                CHECK(filter_curvature(f, N, N, sd[i], 1, g, &e) == ST_OK);
            else
                CHECK(filter_gauss(f, N, N, sd[i], g, &e) == ST_OK);
            for (size_t y = edge; y < N - edge; y++)
                for (size_t x = edge; x < N - edge; x++, n++)
                    ss += (double)g[y * N + x] * (double)g[y * N + x];
            double want = curved ? noise_after_log(0.173, sd[i]) : noise_after_gauss(0.173, sd[i]);
            CHECK_NEAR(sqrt(ss / (double)n) / want, 1.0, 0.08);
        }
    CHECK(isnan(noise_sd(f, 2, 9)));
    free(f);
    free(g);
}

static void check_flatten(void) {
    float *f = plane_new(NX, NY), *g = plane_new(NX, NY);
    error e = { 0 };
    plane p = { .px = f, .nx = NX, .ny = NY, .bit_depth = 8 };
    for (size_t y = 0; y < NY; y++)
        for (size_t x = 0; x < NX; x++) {
            double u = (double)x / NX, v = (double)y / NY;
            f[y * NX + x] =
                (float)(0.3 + 0.2 * u - 0.1 * v + 0.4 * u * v * v - 0.3 * u * u * u + 0.1 * v * v);
        }
    CHECK(flatten(&p, g, &e) == ST_OK);
    double most = 0.0, mean = 0.0;
    for (size_t i = 0; i < NX * NY; i++) most = fmax(most, fabs((double)g[i]));
    CHECK_NEAR(most, 0.0, 3e-3); /* block means of a cubic are not the cubic at the block centre */
    add_grating(f, NX, NY, 14.3, 0.4, 0.2);
    CHECK(flatten(&p, g, &e) == ST_OK);
    double ss = 0.0;
    for (size_t i = 0; i < NX * NY; i++) {
        ss += (double)g[i] * (double)g[i];
        mean += (double)g[i];
    }
    CHECK_NEAR(mean / (NX * NY), 0.0, 1e-7);
    CHECK_NEAR(ss / (NX * NY), 0.02, 2e-4);
    /* planes too narrow for a cubic are flattened as far as they go */
    p.nx = 2;
    CHECK(flatten(&p, g, &e) == ST_OK && isfinite(g[0]));
    free(f);
    free(g);
}

static void check_no_memory(void) {
    float *f = plane_new(64, 64), *g = plane_new(64, 64);
    plane p = { .px = f, .nx = 64, .ny = 64, .bit_depth = 8 };
    error e;
    mem_fail_after(1);
    CHECK_FAILS(flatten(&p, g, &e), ST_NO_MEMORY, e, "memory");
    for (size_t n = 1; n <= 6; n++) {
        mem_fail_after(n);
        CHECK_FAILS(filter_gauss(f, 64, 64, 2.0, g, &e), ST_NO_MEMORY, e, "memory");
        mem_fail_after(n + 7);
        CHECK_FAILS(filter_curvature(f, 64, 64, 9.0, 1, g, &e), ST_NO_MEMORY, e, "memory");
    }
    mem_fail_after(0);
    free(f);
    free(g);
}

int main(void) {
    check_filters();
    check_noise();
    check_flatten();
    check_no_memory();
    return check_done();
}

/* Gratings and grids of known pitch, pixel shape, skew and angle: pixel size within 0.05 %, intervals that cover;
 * pictures that are no standard. */
#include "metrics/grating.h"

#include <stdint.h>
#include <stdlib.h>

#include "base/quantity.h"
#include "check.h"

typedef struct {
    size_t nx, ny;
    grating_kind kind;
    double px_x, px_y; /* pitches per px */
    double skew_deg, angle_deg, noise, sharp, distortion;
} recipe;

static uint64_t seed = 20260314;

static double uniform01(void) { /* xorshift64*, Vigna 2016 */
    seed ^= seed >> 12;
    seed ^= seed << 25;
    seed ^= seed >> 27;
    return (double)((seed * 2685821657736338717u) >> 11) / 9007199254740992.0;
}

static double gauss(void) {
    double s = -6.0;
    for (int i = 0; i < 12; i++) s += uniform01();
    return s;
}

static double wave(double t, double sharp) {
    double c = cos(2.0 * PI * t);
    return sharp > 0.0 ? tanh(sharp * c) / tanh(sharp) : c;
}

static float *paint(const recipe *r) {
    float *px = malloc(r->nx * r->ny * sizeof *px);
    if (!px) exit(1);
    double s = r->skew_deg * PI / 180.0, t = r->angle_deg * PI / 180.0, u0 = uniform01(), v0 = uniform01();
    for (size_t y = 0; y < r->ny; y++)
        for (size_t x = 0; x < r->nx; x++) {
            double dx = (double)x, dy = (double)y;
            double bx = (dx / (double)r->nx - 0.5), by = (dy / (double)r->ny - 0.5);
            dx += r->distortion * bx * (bx * bx + by * by) * (double)r->nx;
            double X = r->px_x * dx + r->px_y * sin(s) * dy, Y = r->px_y * cos(s) * dy;
            double u = X * cos(t) - Y * sin(t) + u0, v = X * sin(t) + Y * cos(t) + v0, f;
            if (r->kind == GRATING_LINES)
                f = wave(u, r->sharp);
            else if (r->kind == GRATING_SQUARE)
                f = 0.5 * (wave(u, r->sharp) + wave(v, r->sharp));
            else { /* three waves at 120 degrees: hexagonal with lattice constant 1 */
                double k = 2.0 / sqrt(3.0);
                f = (wave(k * u, 0.0) + wave(k * (-0.5 * u + sqrt(0.75) * v), 0.0) +
                     wave(k * (-0.5 * u - sqrt(0.75) * v), 0.0)) /
                    3.0;
            }
            f = 0.5 + 0.25 * f + 0.1 * (by + bx * bx) + r->noise * gauss();
            px[y * r->nx + x] = (float)(floor(fmin(1.0, fmax(0.0, f)) * 255.0 + 0.5) / 255.0);
        }
    return px;
}

static void truth(void) {
    static const recipe r[] = {
        { 512, 512, GRATING_SQUARE, 0.0463, 0.0463, 0.0, 0.0, 0.05, 3.0, 0.0 },
        { 640, 480, GRATING_SQUARE, 0.0463, 0.04686, 0.3, 7.0, 0.05, 0.0, 0.0 },
        { 600, 600, GRATING_SQUARE, 0.01713, 0.01713, -0.2, 33.0, 0.10, 5.0,
          0.0 },                                                                 /* coarse: 58 px a period */
        { 512, 512, GRATING_SQUARE, 0.1313, 0.1299, 0.0, 12.0, 0.05, 0.0, 0.0 }, /* fine: 7.6 px */
        { 512, 512, GRATING_HEXAGONAL, 0.0521, 0.0526, 0.4, 5.0, 0.05, 0.0, 0.0 },
        { 512, 512, GRATING_HEXAGONAL, 0.031, 0.031, 0.0, 41.0, 0.10, 0.0, 0.0 },
        { 512, 512, GRATING_LINES, 0.0463, 0.0463, 0.0, 0.0, 0.05, 3.0, 0.0 },
        { 640, 480, GRATING_LINES, 0.0257, 0.0257, 0.0, 62.0, 0.10, 0.0, 0.0 },
        { 480, 480, GRATING_LINES, 0.0819, 0.0819, 0.0, 91.5, 0.05, 0.0, 0.0 },
    };
    for (size_t i = 0; i < sizeof r / sizeof r[0]; i++) {
        float *px = paint(&r[i]);
        plane p = { .px = px, .nx = r[i].nx, .ny = r[i].ny, .bit_depth = 8 };
        grating g = { 0 };
        error e = { 0 };
        CHECK(grating_measure(&p, GRATING_AUTO, &g, &e) == ST_OK && g.kind == r[i].kind);
        if (e.code) printf("  %zu: %s\n", i, e.text);
        CHECK_NEAR(g.px_x / r[i].px_x, 1.0, 5e-4);
        CHECK_NEAR(g.px_y / r[i].px_y, 1.0, 5e-4);
        CHECK_NEAR(g.skew_deg, r[i].skew_deg, 0.05);
        CHECK(g.n_peaks >= 8 && g.residual_px < 1.0 && g.u_x < 1e-3 * g.px_x && g.u_y < 1e-3 * g.px_y);
        if (getenv("SWARD_TALK"))
            printf("  %zu: x %+.5f %% +- %.5f y %+.5f %% +- %.5f skew %.4f angle %.3f n %zu rest %.4f\n", i,
                   100.0 * (g.px_x / r[i].px_x - 1.0), 100.0 * g.u_x / g.px_x,
                   100.0 * (g.px_y / r[i].px_y - 1.0), 100.0 * g.u_y / g.px_y, g.skew_deg, g.angle_deg,
                   g.n_peaks, g.residual_px);
        free(px);
    }
}

/* 95 % intervals: two standard uncertainties. */
static void coverage(void) {
    int inside = 0, all = 0;
    double worst = 0.0;
    for (int k = 0; k < 24; k++) {
        recipe r = { 256,
                     256,
                     k % 3 == 0   ? GRATING_LINES
                     : k % 3 == 1 ? GRATING_SQUARE
                                  : GRATING_HEXAGONAL,
                     0.06 + 0.04 * uniform01(),
                     0.0,
                     0.0,
                     90.0 * uniform01(),
                     0.15,
                     0.0,
                     0.0 };
        r.px_y = r.px_x * (k % 3 ? 1.01 : 1.0);
        float *px = paint(&r);
        plane p = { .px = px, .nx = r.nx, .ny = r.ny, .bit_depth = 8 };
        grating g = { 0 };
        error e = { 0 };
        CHECK(grating_measure(&p, GRATING_AUTO, &g, &e) == ST_OK);
        if (e.code) printf("  coverage %d: %s\n", k, e.text);
        inside += fabs(g.px_x - r.px_x) <= 2.0 * g.u_x;
        inside += fabs(g.px_y - r.px_y) <= 2.0 * g.u_y;
        all += 2;
        worst = fmax(worst, fabs(g.px_x / r.px_x - 1.0));
        free(px);
    }
    CHECK(inside >= all * 93 / 100);
    CHECK(worst < 1e-3); /* small fields under noise as strong as half the contrast */
    if (getenv("SWARD_TALK")) printf("  coverage %d of %d, worst %.4f %%\n", inside, all, 100.0 * worst);
}

/* Dots and bars of any share of the pitch, painted by sub-pixels, slightly blurred by them, without noise to hide a bias. */
static void shapes(void) {
    enum { N = 400, SUB = 4 };
    static const struct {
        double pitch_px, angle_deg, skew_deg, duty;
        int dots;
    } t[] = { { 42.37, 27.2, -0.5, 0.29, 1 }, { 14.73, -19.7, 0.5, 0.5, 0 }, { 31.9, 44.0, 0.9, 0.22, 1 }, { 27.3, 8.0, 0.0, 0.78, 0 },
              { 8.61, -33.0, 0.0, 0.6, 1 },   { 48.7, 3.0, 0.0, 0.35, 0 } };
    float *px = malloc(N * N * sizeof *px);
    if (!px) exit(1);
    for (size_t i = 0; i < sizeof t / sizeof t[0]; i++) {
        double s = t[i].skew_deg * PI / 180.0, a = t[i].angle_deg * PI / 180.0;
        for (size_t k = 0; k < N * N; k++) {
            int ink = 0;
            for (int j = 0; j < SUB * SUB; j++) {
                double x = (double)(k % N) + ((double)(j % SUB) + 0.5) / SUB, y = (double)(k / N) + ((double)j / SUB + 0.5) / SUB;
                double X = x + sin(s) * y, Y = cos(s) * y;
                double u = (X * cos(a) - Y * sin(a)) / t[i].pitch_px, v = (X * sin(a) + Y * cos(a)) / t[i].pitch_px;
                u -= floor(u), v -= floor(v);
                ink += t[i].dots ? hypot(u - 0.5, v - 0.5) < 0.5 * t[i].duty : u < t[i].duty || v < t[i].duty;
            }
            px[k] = (float)(floor((60.0 + 120.0 * ink / (SUB * SUB)) + 0.5) / 255.0);
        }
        plane p = { .px = px, .nx = N, .ny = N, .bit_depth = 8 };
        grating g = { 0 };
        error e = { 0 };
        CHECK(grating_measure(&p, GRATING_AUTO, &g, &e) == ST_OK && g.kind == GRATING_SQUARE);
        CHECK_NEAR(g.px_x * t[i].pitch_px, 1.0, 2e-4);
        CHECK_NEAR(g.px_y * t[i].pitch_px, 1.0, 2e-4);
        CHECK_NEAR(g.skew_deg, t[i].skew_deg, 0.02);
        if (getenv("SWARD_TALK"))
            printf("  shape %zu: x %+.5f %% +- %.5f y %+.5f %% +- %.5f\n", i, 100.0 * (g.px_x * t[i].pitch_px - 1.0),
                   100.0 * g.u_x / g.px_x, 100.0 * (g.px_y * t[i].pitch_px - 1.0), 100.0 * g.u_y / g.px_y);
    }
    free(px);
}

static void refusals(void) {
    recipe r = { 256, 256, GRATING_SQUARE, 0.02, 0.02, 0.0, 10.0, 0.02, 0.0, 0.0 };
    plane p = { .nx = 256, .ny = 256, .bit_depth = 8 };
    grating g = { .n_peaks = 77 };
    error e;
    float *px = paint(&r);
    p.px = px;
    CHECK_FAILS(grating_measure(&p, GRATING_AUTO, &g, &e), ST_NO_RESULT, e, "periods fit into the picture");
    for (size_t i = 0; i < p.nx * p.ny; i++) px[i] = (float)uniform01();
    CHECK_FAILS(grating_measure(&p, GRATING_AUTO, &g, &e), ST_NO_RESULT, e, "");
    CHECK(e.text[0]);
    for (size_t i = 0; i < p.nx * p.ny; i++) px[i] = 0.5f;
    CHECK_FAILS(grating_measure(&p, GRATING_AUTO, &g, &e), ST_NO_RESULT, e, "");
    free(px);
    r = (recipe){
        256, 256, GRATING_SQUARE, 0.06, 0.09, 0.0, 0.0, 0.02, 0.0, 0.0
    }; /* pixels half as high again */
    p.px = px = paint(&r);
    CHECK_FAILS(grating_measure(&p, GRATING_AUTO, &g, &e), ST_NO_RESULT, e, "neither square nor hexagonal");
    CHECK(g.n_peaks == 77); /* untouched on failure */
    free(px);
}

int main(void) {
    truth();
    coverage();
    shapes();
    refusals();
    return check_done();
}

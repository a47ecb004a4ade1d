/* Holes in a field: filling, weights of the autocorrelation against the sums themselves, distances against the definition,
 * and a measurement that hardly changes when a part of the field is taken away. */
#include <math.h>
#include <stdlib.h>

#include "check.h"
#include "metrics/masked.h"
#include "metrics/measure.h"

enum { NX = 72, NY = 60 };

static uint32_t state = 1;
static double uniform(void) {
    state = state * 1664525u + 1013904223u;
    return (double)(state >> 8) / 16777216.0;
}

static unsigned char *some_mask(size_t nx, size_t ny) {
    unsigned char *mask = calloc(nx * ny, 1);
    for (size_t y = ny / 2; y < ny / 2 + ny / 8; y++)
        for (size_t x = nx / 3; x < nx / 3 + nx / 4; x++) mask[y * nx + x] = 1;
    for (size_t x = 0; x < nx; x++) mask[3 * nx + x] = 1;
    mask[0] = mask[nx * ny - 1] = 1;
    return mask;
}

static void filling(void) {
    float px[NX * NY], out[NX * NY];
    unsigned char *mask = some_mask(NX, NY);
    error e = { 0 };
    for (size_t i = 0; i < NX * NY; i++) px[i] = mask[i] ? 9.0f : 0.2f + 0.003f * (float)(i % NX) + 0.005f * (float)(i / NX);
    plane p = { .px = px, .nx = NX, .ny = NY, .bit_depth = 8, .mask = mask };
    CHECK(masked_fill(&p, out, &e) == ST_OK);
    for (size_t i = 0; i < NX * NY; i++) {
        if (!mask[i]) CHECK_NEAR((double)out[i], (double)px[i], 0.0);
        else CHECK_NEAR((double)out[i], 0.2 + 0.003 * (double)(i % NX) + 0.005 * (double)(i / NX), 0.03); /* a slope goes on */
    }
    memset(mask, 1, NX * NY);
    CHECK_FAILS(masked_fill(&p, out, &e), ST_BAD_INPUT, e, "all of it is masked");
    free(mask);
}

/* Sum over pairs of specimen at a lag, divided by their number, and by the same at lag 0. */
static void weights(void) {
    enum { LAG = 20 };
    float f[NX * NY];
    unsigned char *mask = some_mask(NX, NY);
    error e = { 0 };
    acf2d a = { 0 };
    for (size_t i = 0; i < NX * NY; i++) f[i] = (float)(cos(0.7 * (double)(i % NX)) + 0.5 * sin(0.4 * (double)(i / NX)) + uniform());
    double mean = 0.0, n_seen = 0.0, zero = 0.0;
    for (size_t i = 0; i < NX * NY; i++)
        if (!mask[i]) mean += (double)f[i], n_seen += 1.0;
    mean /= n_seen;
    masked_level(mask, NX * NY, f);
    CHECK(acf2d_make(f, NX, NY, LAG, &a, &e) == ST_OK && masked_weigh(mask, &a, &e) == ST_OK);
    for (size_t i = 0; i < NX * NY; i++)
        if (!mask[i]) zero += ((double)f[i] - mean) * ((double)f[i] - mean) / n_seen;
    for (long dy = 0; dy <= LAG; dy += 4)
        for (long dx = -LAG; dx <= LAG; dx += 5) {
            double s = 0.0, n = 0.0;
            for (long y = 0; y + dy < NY; y++)
                for (long x = 0; x < NX; x++) {
                    if (x + dx < 0 || x + dx >= NX || mask[y * NX + x] || mask[(y + dy) * NX + x + dx]) continue;
                    s += ((double)f[y * NX + x] - mean) * ((double)f[(y + dy) * NX + x + dx] - mean);
                    n += 1.0;
                }
            CHECK_NEAR((double)a.values[dy * (2 * LAG + 1) + dx + LAG], s / n / zero, 2e-4);
        }
    CHECK_NEAR(a.variance, zero, 1e-4 * zero);
    acf2d_free(&a);
    free(mask);
}

static void distances(void) {
    float *d = NULL;
    error e = { 0 };
    unsigned char *mask = some_mask(NX, NY);
    CHECK(masked_distance(mask, NX, NY, &d, &e) == ST_OK);
    for (long y = 0; d && y < NY; y += 3)
        for (long x = 0; x < NX; x += 3) {
            double least = 1e9;
            for (long v = 0; v < NY; v++)
                for (long u = 0; u < NX; u++)
                    if (mask[v * NX + u]) least = fmin(least, hypot((double)(u - x), (double)(v - y)));
            CHECK_NEAR((double)d[y * NX + x], least, 1e-4);
        }
    free(d);
    free(mask);
}

/* Bumps on a shaken hexagonal lattice, 600 x 500. */
static void measuring(void) {
    enum { W = 600, H = 500 };
    float *px = calloc(W * H, sizeof *px);
    const double spacing = 18.0, s = 5.0;
    int row = 0;
    for (double cy = 0; cy < H + spacing; cy += spacing * 0.8660254, row++)
        for (double cx = row % 2 ? 0.0 : 0.5 * spacing; cx < W + spacing; cx += spacing) {
            double x0 = cx + 4.0 * (uniform() - 0.5), y0 = cy + 4.0 * (uniform() - 0.5);
            for (int y = (int)fmax(y0 - 16, 0); y < H && y < y0 + 16; y++)
                for (int x = (int)fmax(x0 - 16, 0); x < W && x < x0 + 16; x++)
                    px[y * W + x] += (float)(0.6 * exp(-0.5 * ((x - x0) * (x - x0) + (y - y0) * (y - y0)) / (s * s)));
        }
    for (size_t i = 0; i < W * H; i++) px[i] = fminf(px[i] + 0.02f * (float)uniform(), 1.0f);
    unsigned char *mask = calloc(W * H, 1);
    plane p = { .px = px, .nx = W, .ny = H, .bit_depth = 16 };
    measure_options o = measure_defaults();
    texture whole = { 0 }, holed = { 0 };
    error e = { 0 };
    CHECK(measure_plane(&p, &o, &whole, &e) == ST_OK);
    for (size_t y = 400; y < 470; y++)
        for (size_t x = 330; x < 570; x++) mask[y * W + x] = 1, px[y * W + x] = (x / 9 + y / 7) % 2 ? 1.0f : 0.0f;
    p.mask = mask;
    CHECK(measure_plane(&p, &o, &holed, &e) == ST_OK);
    CHECK(!holed.reasons && holed.n_features < whole.n_features && holed.n_features > whole.n_features * 85 / 100);
    const measured *a[] = { &whole.spacing_acf, &whole.density, &whole.nn_mean, &whole.size_d50, &whole.clark_evans, &whole.bright_share, &whole.sal },
                   *b[] = { &holed.spacing_acf, &holed.density, &holed.nn_mean, &holed.size_d50, &holed.clark_evans, &holed.bright_share, &holed.sal };
    for (size_t k = 0; k < sizeof a / sizeof a[0]; k++) CHECK_NEAR(b[k]->value, a[k]->value, 0.012 * a[k]->value);
    for (size_t i = 0; i < holed.n_found; i++) {
        const feature *f = &holed.features[i];
        CHECK(!mask[(size_t)(f->y + 0.5) * W + (size_t)(f->x + 0.5)] || !f->in_guard);
        if (f->x > 324 && f->x < 576 && f->y > 394 && f->y < 476) CHECK(!f->in_guard);
    }
    for (size_t i = 0; i < W * H; i++)
        if (mask[i]) CHECK(!(holed.features[holed.cells[i] - 1].weight > 0.0));
    texture_free(&whole);
    texture_free(&holed);
    free(px);
    free(mask);
}

int main(void) {
    filling();
    weights();
    distances();
    measuring();
    return check_done();
}

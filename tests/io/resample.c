/* Rows at another spacing: parabolas exactly, plane waves closely, sizes, mean, limits. */
#include "io/resample_priv.h"

#include <stdlib.h>

#include "base/limits.h"
#include "base/quantity.h"
#include "check.h"

enum { NX = 3, NY = 200 };

static float *make(double (*f)(double)) {
    float *px = malloc(NX * NY * sizeof *px);
    if (!px) exit(1);
    for (int y = 0; y < NY; y++)
        for (int x = 0; x < NX; x++) px[y * NX + x] = (float)f(y);
    return px;
}

static double parabola(double y) { return 0.1 + 0.8 * (y / NY) * (y / NY); }
static double wave(double y) { return 0.5 + 0.4 * sin(2.0 * PI * y / 20.0); }
static double zigzag(double y) { return fmod(y, 2.0); }

int main(void) {
    static const double factors[] = { 1.0, 1.0154, 1.5557, 2.0, 4.0, 0.8, 0.5, 0.25 };
    error e = { 0 };
    for (size_t k = 0; k < sizeof factors / sizeof factors[0]; k++) {
        double f = factors[k], worst = 0.0, worst_wave = 0.0;
        float *a = make(parabola), *b = make(wave);
        size_t rows = NY, rows_b = NY;
        CHECK(resample_rows(&a, NX, &rows, f, LIMIT_PIXELS, &e) == ST_OK &&
              rows == (size_t)floor(NY * f + 0.5));
        CHECK(resample_rows(&b, NX, &rows_b, f, LIMIT_PIXELS, &e) == ST_OK);
        size_t edge = (size_t)(4.0 * f + 4.0);
        for (size_t y = edge; y + edge < rows; y++) {
            double at = ((double)y + 0.5) / f - 0.5;
            worst = fmax(worst, fabs((double)a[y * NX + 1] - parabola(at)));
            worst_wave = fmax(worst_wave, fabs((double)b[y * NX] - wave(at)));
        }
        /* A widened kernel adds its own second moment to a parabola; it is exact only where rows are not fewer. */
        CHECK(worst < (f < 1.0 ? 1e-4 : 1e-6));
        CHECK(worst_wave < (f < 0.4 ? 0.2 : f < 0.9 ? 0.02 : 0.004));
        free(a);
        free(b);
    }
    float *z = make(zigzag); /* finer than the new rows: becomes its mean, not a beat */
    size_t rows = NY;
    CHECK(resample_rows(&z, NX, &rows, 0.45, LIMIT_PIXELS, &e) == ST_OK);
    for (size_t y = 4; y + 4 < rows; y++) CHECK_NEAR((double)z[y * NX], 0.5, 0.06);
    CHECK_FAILS(resample_rows(&z, NX, &rows, 4.0, 100, &e), ST_NO_MEMORY, e,
                "too large once its rows are stretched 4.00");
    CHECK(rows == 90);
    free(z);
    return check_done();
}

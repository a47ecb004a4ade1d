/* The frequency domain: zero-padded autocorrelation (Wiener 1930, Khinchin 1934), power spectral density,
 * and their radial means. FFTW single precision, ESTIMATE plans, one thread: same bits every time. */
#ifndef SWARD_METRICS_SPECTRUM_H
#define SWARD_METRICS_SPECTRUM_H
#include "base/status.h"
#include "metrics/texture.h"

/* Unbiased, mean-removed autocorrelation for lags up to max_lag in both directions.
 * values[(dy) * (2 max_lag + 1) + (dx + max_lag)], dy 0..max_lag (upper half plane), normalised to 1 at lag
 * 0. */
typedef struct {
    float *values;   /* owned */
    size_t max_lag;  /* <= min(nx, ny) / 2 */
    double variance; /* of f, the normalisation */
    size_t nx, ny;   /* of the field */
} acf2d;
status acf2d_make(const float *f, size_t nx, size_t ny, size_t max_lag, acf2d *out, error *e);
void acf2d_free(acf2d *a);
/* Value at a sub-pixel lag (any direction; C(-d) = C(d)), bicubic. |lag| <= max_lag - 2, else NAN. */
double acf2d_at(const acf2d *a, double dx, double dy);

/* Radial mean: rings 1 px wide, weighted with the overlap count, abscissa = weighted mean radius. Point 0 is
 * lag 0. Points are owned by the curve (caller frees out->points). */
status acf_radial(const acf2d *a, curve *out, error *e);

/* PSD = |FFT(w f)|^2 / sum w^2 (Hann), radial mean over rings of one frequency step, px2 against 1/px.
 * sum over all bins / (nx ny) equals the weighted mean square (Parseval). */
status psd_radial(const float *f, size_t nx, size_t ny, curve *out, error *e);
/* The 2-D PSD itself: out[ny][nx/2+1], px2 (for tests and for directional work). Caller's memory. */
status psd2d(const float *f, size_t nx, size_t ny, float *out, error *e);
/* Its radial mean, the second half of psd_radial: for whoever needs both. */
status psd2d_radial(const float *psd, size_t nx, size_t ny, curve *out, error *e);

#endif

/* Flattening, noise and the two filters every step shares. Edges are mirrored (half-sample symmetric). */
#ifndef SWARD_METRICS_FILTER_H
#define SWARD_METRICS_FILTER_H
#include "base/status.h"
#include "metrics/plane.h"

/* out[ny][nx] = px minus the least-squares polynomial of total degree 3 (fitted on block means), mean zero.
 * err ST_NO_MEMORY */
status flatten(const plane *p, float *out, error *e);

/* Noise standard deviation, grey levels: Immerkaer 1996, Comput. Vis. Image Underst. 64:300. */
double noise_sd(const float *f, size_t nx, size_t ny);
/* Standard deviation left of white noise of sd s after Gaussian smoothing / sigma^2 LoG (continuous, exact).
 * */
double noise_after_gauss(double s, double sigma_px);
double noise_after_log(double s, double sigma_px);

/* Gaussian smoothing, separable; sigma 0 copies. in == out is allowed. err ST_NO_MEMORY */
status filter_gauss(const float *in, size_t nx, size_t ny, double sigma_px, float *out, error *e);

/* Curvature map: out = -sign * sigma^2 LoG_sigma(in); positive on hillocks for sign +1, on pores for -1.
 * in == out is allowed. err ST_NO_MEMORY */
status filter_curvature(const float *in, size_t nx, size_t ny, double sigma_px, int sign, float *out,
                        error *e);

#endif

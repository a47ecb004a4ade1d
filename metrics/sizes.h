/* Size distributions: weighted quantiles, moments, log-normal fit. */
#ifndef SWARD_METRICS_SIZES_H
#define SWARD_METRICS_SIZES_H
#include <stddef.h>

#include "base/status.h"

/* Miles-Lantuejoul (ISO 13322-1): frame Z1 x Z2, bounding box fx x fy wholly inside. */
double border_weight(double z1, double z2, double fx, double fy);

/* Weighted midpoint rule (Hazen for equal weights): c_i = (sum_{j<=i} w_j - w_i / 2) / sum w, linear, clamped at the
 * ends. x need not be sorted. p 0..1. err ST_NO_MEMORY, ST_BAD_INPUT n = 0 or sum w = 0 */
status quantiles(const double *x, const double *w, size_t n, const double *p, size_t n_p, double *q, error *e);

double weighted_mean(const double *x, const double *w, size_t n);
double geometric_sd(const double *x, const double *w, size_t n); /* exp of the sd of ln x */

/* Maximum-likelihood log-normal fit and its Anderson-Darling statistic A^2 (1954) with the n-1 sigma. */
typedef struct { double mu, sigma, a2; } lognormal_fit;
status lognormal(const double *x, size_t n, lognormal_fit *out, error *e);

#endif

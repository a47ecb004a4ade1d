/* Standard uncertainties (JCGM 100) of what is summed or averaged over the features of one field, and the few
 * classical figures behind them. Pure functions; lengths in the caller's unit. */
#ifndef SWARD_METRICS_UNCERTAINTY_H
#define SWARD_METRICS_UNCERTAINTY_H
#include <stddef.h>

#include "base/status.h"
#include "metrics/neighbours.h"

/* Standard deviation that the sum of the marks over the window would show from field to field of the same
 * texture, found inside the one field: the variance of the sum over tiles of several sizes follows V(tile) =
 * a * area + b * perimeter (a: randomness; b: order, a regular texture varies only where the border cuts it),
 * extrapolated to the window.
 *   in   x, y, mark[n] in the window; unit a length of the order of the spacing, > 0
 *   out  sd; NAN with fewer than 4 points or a window narrower than four units
 *   err  ST_NO_MEMORY
 *   src  number variance of ordered patterns: Torquato S., Stillinger F.H. (2003) Phys. Rev. E 68:041113 (from memory) */
status field_sum_sd(const double *x, const double *y, const double *mark, size_t n, window w, double unit,
                    double *sd, error *e);

/* Degrees of freedom of an u_sampling that one field of so many features found by itself: it scatters from field to field
 * by about 100 %/sqrt(n / 8), found on repeated renders (1/2 (u / scatter of u)^2, JCGM 100 G.4.2). At least 1. */
double field_dof(double n_features);

/* u_sampling of weighted statistics of values v at x, y (weights w; 0 leaves a feature out). The influence of
 * each feature on the statistic is its mark in field_sum_sd; where the field is too small for tiles, features
 * count as independent. err ST_NO_MEMORY */
typedef struct {
    const double *x, *y, *v, *w;
    size_t n;
    window field;
    double unit;
} sample_of_features;
status u_of_mean(const sample_of_features *s, double mean, double *u, error *e);
status u_of_gsd(const sample_of_features *s, double gsd, double *u, error *e);
/* low and high: the quantiles at p - step and p + step, for the slope of the distribution there. */
status u_of_quantile(const sample_of_features *s, double p, double q, double step, double low, double high,
                     double *u, error *e);

/* Two-pass mean and standard deviation (n - 1; NAN below 2), and the lag-1 autocorrelation of a series. */
double series_mean(const double *v, size_t n);
double series_sd(const double *v, size_t n);
double series_lag1(const double *v, size_t n);

/* Exact limits of a Poisson mean when n were counted, two-sided coverage 0..1: Garwood F. 1936, Biometrika
 * 28:437. */
void poisson_limits(size_t n, double coverage, double *low, double *high);

#endif

/* What a size distribution says beyond its quantiles: moment means, weighting by area, density curve; and the order of the
 * features' places. Lengths in the caller's unit. */
#ifndef SWARD_METRICS_SIZEDIST_H
#define SWARD_METRICS_SIZEDIST_H
#include <stddef.h>

#include "base/status.h"
#include "metrics/texture.h"

/* Moment-ratio mean D[p,q] = (sum w x^p / sum w x^q)^(1/(p-q)) of a number distribution with weights w: D[1,0] the arithmetic mean,
 * D[3,2] the Sauter mean. NAN for p = q or no weight.
 *   src ISO 9276-2 (moment-ratio notation) */
double moment_mean(const double *x, const double *w, size_t n, int p, int q);

enum { NEIGHBOUR_BINS = 10 }; /* 3 and fewer, 4, 5 .. 11, 12 and more */

/* Of the whole cells of a field (border weight > 0), weighted by it; NAN where there are too few. */
typedef struct {
    size_t n;
    double d10, d20, d30, d21, d32, d43;        /* moment means D[1,0] .. D[4,3], px */
    double area_d10, area_d50, area_d90;        /* quantiles by area instead of number, px */
    double span;                                /* (D90 - D10) / D50 by number */
    double lognormal_median, lognormal_gsd, a2; /* maximum-likelihood fit, px and 1; its A2* (0.752: 5 % point) */
    double bandwidth;                           /* of size_density, px: Silverman B.W. 1986, 0.9 min(sd, IQR / 1.34) n^(-1/5) */
    double bin;                                 /* of size_histogram, px: Freedman D., Diaconis P. 1981, 2 IQR n^(-1/3) */
    double circularity;                         /* mean of sqrt(4 pi A) / P (ISO 9276-6) */
    double aspect_ratio;                        /* mean of feret_min / feret_max (ISO 9276-6) */
    double feret_min, feret_max;                /* means, px */
    double psi6;                                /* hexagonal order, below */
    double neighbours[NEIGHBOUR_BINS];          /* share of the cells with 3 or fewer, 4, .. 12 or more neighbours */
} size_summary;

/*   in  t with features; needs spacing_hex for psi6
 *   err ST_NO_MEMORY */
status size_summarise(const texture *t, size_summary *out, error *e);

/* Density of the diameters of whole cells by Gaussian kernels of s->bandwidth, at n points over the range and three bandwidths beyond;
 * its integral is 1. in n >= 2; out x[n], y[n] (1 / unit of x); all 0 without a bandwidth. err ST_NO_MEMORY */
status size_density(const texture *t, const size_summary *s, double *x, double *y, size_t n, error *e);

/* Histogram of the same diameters, border-weighted: bins of s->bin from a multiple of it; density per unit of x, so that it
 * integrates to 1 and lies beside size_density.
 *   out  x[] middle of each bin, y[] density; *n bins, at most `most` (the rest goes into the last); 0 without a bin width
 *   err ST_NO_MEMORY */
status size_histogram(const texture *t, const size_summary *s, double *x, double *y, size_t most, size_t *n, error *e);

/* Mean over the points with keep[i] of |mean over neighbours of exp(6 i angle)|; neighbours are the other points nearer than `reach`.
 * 1 on a hexagonal lattice with reach between 1 and 1.73 lattice constants; points without neighbours count 0. NAN for none kept.
 *   src bond-orientational order: Halperin B.I., Nelson D.R. 1978, Phys. Rev. Lett. 41:121 (from memory)
 *   err ST_NO_MEMORY */
status hexagonal_order(const double *x, const double *y, const int *keep, size_t n, double reach, double *psi6, error *e);

#endif

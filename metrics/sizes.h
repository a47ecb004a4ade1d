/* Size distributions: weighted quantiles, moments, log-normal fit. */
#ifndef SWARD_METRICS_SIZES_H
#define SWARD_METRICS_SIZES_H
#include <stddef.h>

#include "base/status.h"

/* Miles-Lantuejoul (ISO 13322-1): frame Z1 x Z2, bounding box fx x fy wholly inside. NAN when the box does
 * not fit. */
double border_weight(double z1, double z2, double fx, double fy);

/* Weighted midpoint rule (Hazen for equal weights): c_i = (sum_{j<=i} w_j - w_i / 2) / sum w, linear, clamped
 * at the ends. x need not be sorted; members of weight 0 are left out. p 0..1. err ST_NO_MEMORY, ST_BAD_INPUT
 * n = 0 or sum w = 0 */
status quantiles(const double *x, const double *w, size_t n, const double *p, size_t n_p, double *q,
                 error *e);

double weighted_mean(const double *x, const double *w, size_t n); /* NAN when sum w = 0 */
double geometric_sd(const double *x, const double *w, size_t n);  /* exp of the sd of ln x (n - 1 rule for
                                                                   * equal  weights); NAN below two sizes */

/* Maximum-likelihood log-normal fit (mu, sigma with divisor n) and its Anderson-Darling statistic A^2
 * (Anderson and Darling 1954), standardised with the n-1 sigma. a2_star = A^2 (1 + 0.75/n + 2.25/n^2), the
 * small-sample form with both parameters fitted: 0.752 is the 5 % point (Stephens M.A. 1974, J. Am. Stat.
 * Assoc. 69:730; constants from memory). err ST_BAD_INPUT fewer than 3 sizes or one that is not above 0;
 * ST_NO_RESULT all equal; ST_NO_MEMORY */
typedef struct {
    double mu, sigma, a2, a2_star;
} lognormal_fit;
status lognormal(const double *x, size_t n, lognormal_fit *out, error *e);

/* Diameters between parallel tangents (Feret) of a set of points in the plane: the largest, and the smallest,
 * which has one tangent along an edge of the convex hull. For pixels as areas pass their corners.
 *   in   xy[2 n] pairs x, y; sorted by the call. hull[2 n + 2] working memory of the caller
 *   out  *max, *min; 0 for fewer than two distinct points */
void feret_diameters(double *xy, size_t n, double *hull, double *max, double *min);

#endif

/* What moves a process: robust slope, step between two settings, straight line on a setting and its inverse. Pure. */
#ifndef SWARD_JUDGE_TREND_H
#define SWARD_JUDGE_TREND_H
#include <stddef.h>

#include "base/status.h"

/* Median of the slopes between all pairs, with the 95 % interval of Kendall's test.
 *   in   x[n], y[n] finite; of more than TREND_MOST the last are taken
 *   out  s   per unit of x; lo..hi NAN with too few points for 95 %
 *   err  ST_BAD_INPUT n < 3; ST_NO_RESULT all x are the same; ST_NO_MEMORY
 *   src  Theil H. (1950); Sen P.K. (1968) J. Am. Stat. Assoc. 63, 1379-1389; ties in x: Kendall (1970), from memory */
typedef struct {
    double slope, lo, hi;
    double intercept; /* median of y - slope x */
    double p;         /* of no drift at all: Kendall's test, normal law with continuity, two-sided */
    size_t n;
} trend_slope;
#define TREND_MOST 1500
status trend_robust(const double *x, const double *y, size_t n, trend_slope *s, error *e);

/* Is the difference between two settings real? b - a.
 *   out  95 % interval with Welch-Satterthwaite degrees of freedom, two-sided p, effect size in pooled sd (small-sample
 *        corrected) with its interval
 *   err  ST_NO_RESULT fewer than 2 values on a side, or no spread on both
 *   src  Welch B.L. (1947) Biometrika 34, 28-35; Hedges L.V. (1981) J. Educ. Stat. 6, 107-128 */
typedef struct {
    size_t n_a, n_b;
    double mean_a, mean_b, sd_a, sd_b;
    double difference, lo, hi, df, p;
    double effect, effect_lo, effect_hi;
} trend_step;
status trend_welch(const double *a, size_t n_a, const double *b, size_t n_b, trend_step *s, error *e);

/* Least-squares straight line y = intercept + slope x.
 *   err  ST_NO_RESULT fewer than 3 points, or all x the same
 *   src  JCGM 100:2008, H.3; limits of prediction: any text on regression */
typedef struct {
    size_t n;
    double intercept, slope, intercept_sd, slope_sd, correlation; /* of the two coefficients */
    double residual_sd, slope_p;                                                                   /* p: of no dependence at all */
    double x_mean, x_spread, x_min, x_max;                        /* spread: sum of squares about the mean */
} trend_line;
status trend_fit(const double *x, const double *y, size_t n, trend_line *l, error *e);

/* y at x: the line's value, its standard uncertainty, and where 95 % of single etches are expected. Nothing is said
 * outside the data.
 *   err  ST_NO_RESULT x outside x_min..x_max */
typedef struct {
    double y, u, lo, hi;
} trend_forecast;
status trend_predict(const trend_line *l, double x, trend_forecast *f, error *e);

/* The x at which the line reaches y, with its 95 % interval (Fieller), cut at the ends of the data.
 *   err  ST_NO_RESULT no dependence at 5 %, or the x lies outside the data
 *   src  Fieller E.C. (1954) J. R. Stat. Soc. B 16, 175-185 */
typedef struct {
    double x, lo, hi;
    int cut; /* an end of the interval is an end of the data */
} trend_setting;
status trend_invert(const trend_line *l, double y, trend_setting *s, error *e);

#endif

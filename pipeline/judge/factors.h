/* Constants of control charts and quantiles of the laws they rest on. Pure. */
#ifndef SWARD_JUDGE_FACTORS_H
#define SWARD_JUDGE_FACTORS_H
#include <stddef.h>

#define FACTORS_MIN_N 2
#define FACTORS_MAX_N 25

/* Of a subgroup of n normal values with sd 1.
 *   src  Tippett L.H.C. (1925) Biometrika 17, 364-387; names as in ISO 7870-2 */
typedef struct {
    double d2, d3;         /* mean and sd of the range */
    double c4;             /* mean of the sd with n - 1 */
    double A2, A3;         /* limits of the mean from the mean range, from the mean sd */
    double B3, B4, D3, D4; /* limits of the sd, of the range */
    double E2;             /* limits of individuals from the mean range of n in a row: 3 / d2 */
} chart_factors;

/* in n in 2..25; all NAN outside. By integration, good to 1e-7; about a millisecond. */
chart_factors factors_of(size_t n);
/* c4 alone, for any n of at least 2; NAN below. */
double factor_c4(size_t n);
/* d2 of two values, 2 / sqrt(pi): the mean moving range of individuals with sd 1. */
#define FACTOR_D2_OF_2 1.1283791670955126

/* Probability below z of the normal law, and its inverse (NAN outside 0 < p < 1). */
double normal_below(double z);
double normal_quantile(double p);
/* The same of Student's t and of chi squared with df > 0 degrees of freedom, which need not be whole; NAN where df or p
 * is out of range. Good to 1e-10. */
double student_below(double t, double df);
double student_quantile(double p, double df);
double chi2_below(double x, double df);
double chi2_quantile(double p, double df);

#endif

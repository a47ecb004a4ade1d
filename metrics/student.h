/* Quantiles that turn a standard uncertainty with few degrees of freedom into an interval. Pure functions; degrees of
 * freedom need not be whole, HUGE_VAL stands for an exactly known spread. */
#ifndef SWARD_METRICS_STUDENT_H
#define SWARD_METRICS_STUDENT_H

/* Regularised incomplete beta function I_x(a, b), a and b > 0, x 0..1; NAN outside.
 *   src  continued fraction DLMF 8.17.22, summed as Lentz W.J. 1976, Appl. Opt. 15:668 */
double beta_share(double a, double b, double x);

/* P(T <= t) of Student's t, and the t below which a share p (0..1, ends excluded) lies. NAN when dof is not above 0.
 *   src  "Student" 1908, Biometrika 6:1; normal law in the limit */
double student_t_below(double t, double dof);
double student_t_at(double p, double dof);

/* P(F > f) of Fisher's ratio of two variances; NAN for degrees of freedom not above 0. A numerator or denominator of
 * HUGE_VAL is taken as 1e9.
 *   src  Fisher R.A. 1924; beta form as in DLMF 8.17 */
double fisher_above(double f, double dof1, double dof2);

#endif

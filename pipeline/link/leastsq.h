/* Bounded non-linear least squares: Levenberg-Marquardt from several starts, with covariance and plain words when
 * it did not arrive. */
#ifndef SWARD_LINK_LEASTSQ_H
#define SWARD_LINK_LEASTSQ_H
#include <stddef.h>

#include "base/status.h"

/* r[m] at x[n]; j[k * m + i] = dr_i / dx_k. A status other than ST_OK ends the fit with that status; where a
 * residual is not finite the step was too long and is taken shorter. */
typedef status (*least_residuals)(void *user, const double *x, double *r, error *e);
typedef status (*least_jacobian)(void *user, const double *x, double *j, error *e);

typedef struct {
    size_t n, m; /* parameters, residuals */
    least_residuals residuals;
    least_jacobian jacobian; /* NULL: central differences */
    void *user;
    const double *lower, *upper; /* [n], +-INFINITY where open; NULL: no bounds at all */
    const double *step;          /* [n] of the central differences; NULL: 6e-6 of the value */
    const double *starts;        /* [n_starts * n], within the bounds */
    size_t n_starts;
    double sigma;        /* known standard deviation of every residual; NAN: from their scatter */
    double tolerance;    /* relative, of sum of squares and parameters */
    int max_evaluations; /* of the residuals for each start, without those of central differences */
} least_problem;
least_problem least_defaults(void); /* no bounds, sigma unknown, 1e-10, 2000 */

typedef struct {
    size_t n, m;
    double *x,
        *u; /* [n] best point; standard uncertainties, INFINITY where the data say nothing, 0 at a bound */
    double *covariance; /* [n * n], rows and columns of parameters without a finite u are 0 */
    int *at_bound;      /* [n] -1 the lower, 1 the upper, else 0: then taken as given, not as fitted */
    double *r;          /* [m] residuals at x */
    double sum_of_squares;
    double variance;      /* of one residual, as used for the covariance; NAN when nothing is left over */
    size_t rank, freedom; /* independent directions; m - rank */
    double *end_x;        /* [n_starts * n] where each start ended */
    double *end_sum;      /* [n_starts] sum of squares there, NAN: nowhere */
    int *end_arrived;     /* [n_starts] 1 converged */
    size_t n_starts, n_arrived, best_start, evaluations;
    int converged;     /* the best point is a minimum */
    const char *ended; /* how the best start ended, words */
} least_fit;           /* {0} = empty */

/*   out  the best converged point, or the best point reached; owned (least_free), filled on ST_NO_RESULT too
 *   err  ST_BAD_INPUT no parameter, fewer residuals than parameters, no start, bounds out of order, a start outside
 *        them; ST_NO_RESULT no start arrived at a minimum; what the callbacks return; ST_NO_MEMORY
 *   src  More J.J. (1978), in Numerical Analysis (ed. Watson G.A.), Springer, 105 (MINPACK's lmder, through cminpack) */
status least_squares(const least_problem *p, least_fit *out, error *e);
void least_free(least_fit *f);

/* Correlation of two parameters, 0 where one has no finite, positive u. */
double least_correlation(const least_fit *f, size_t a, size_t b);

#endif

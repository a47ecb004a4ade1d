/* Small linear systems. */
#ifndef SWARD_METRICS_LINEAR_H
#define SWARD_METRICS_LINEAR_H
#include <stddef.h>

/* Gauss-Jordan elimination with row exchange.
 *   in   m[n][n + 1] row by row, the right-hand side in the last column; changed
 *        least_pivot the smallest pivot that still counts as a number, >= 0
 *   out  x[n]
 *   err  0 when a pivot is not above least_pivot (or is NAN): x untouched; else 1 */
int linear_solve(double *m, size_t n, double least_pivot, double *x);

#endif

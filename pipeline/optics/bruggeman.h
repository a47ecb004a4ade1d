/* The Bruggeman equation for three and more phases. Internal to the room. */
#ifndef SWARD_OPTICS_BRUGGEMAN_H
#define SWARD_OPTICS_BRUGGEMAN_H
#include "optics/lanes.h"

/* Left side of the equation, sum of f_i (e_i - e)/(e_i + (d - 1) e): 0 at the answer. */
double complex bruggeman_residual(const double complex *eps, const double *f, size_t phases, int dimensions,
                                  double complex e);

/* The physical root of n wavelengths.
 *   in   eps[phases] lanes, Im >= 0; f[phases] shares, sum 1; dimensions 2 or 3; e: a start, inside the cone
 * of the phases out  e the root */
void bruggeman_solve(const lanes *eps, const double *f, size_t phases, int dimensions, size_t n, lanes *e);

#endif

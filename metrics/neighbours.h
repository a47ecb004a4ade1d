/* Point statistics on a rectangular window. Pure functions on coordinates; units are the caller's. */
#ifndef SWARD_METRICS_NEIGHBOURS_H
#define SWARD_METRICS_NEIGHBOURS_H
#include <stddef.h>

#include "base/status.h"
#include "metrics/texture.h"

typedef struct { double x0, y0, x1, y1; } window;

/* nn[n]: distance to the nearest other point. err ST_NO_MEMORY, ST_BAD_INPUT n < 2 */
status nearest_neighbours(const double *x, const double *y, size_t n, window w, double *nn, error *e);

/* Hanisch 1984: points with nn <= distance to the frame, weights 1/((W - 2 nn)(H - 2 nn)).
 * n of the result = points that count; value NAN if none. */
measured nn_mean_hanisch(const double *x, const double *y, const double *nn, size_t n, window w);

/* Clark and Evans 1954; Donnelly 1978 edge correction (constants 0.0514, 0.0412). */
double clark_evans_naive(const double *nn, size_t n, window w);
double clark_evans_donnelly(const double *nn, size_t n, window w);
double clark_evans_guard(const double *x, const double *y, const double *nn, size_t n, window w, double guard,
                         size_t *n_guard);

/* Pair correlation, translation correction, Epanechnikov kernel of half-width h, at r[n_r]. err ST_NO_MEMORY */
status pair_correlation(const double *x, const double *y, size_t n, window w, double h, const double *r, size_t n_r,
                        double *g, error *e);

#endif

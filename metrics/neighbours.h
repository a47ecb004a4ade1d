/* Point statistics on a rectangular window. Pure functions on coordinates; units are the caller's. */
#ifndef SWARD_METRICS_NEIGHBOURS_H
#define SWARD_METRICS_NEIGHBOURS_H
#include <stddef.h>

#include "base/status.h"
#include "metrics/texture.h"

typedef struct {
    double x0, y0, x1, y1;
} window;

/* nn[n]: distance to the nearest other point. Points a little outside the window are allowed.
 * err ST_NO_MEMORY, ST_BAD_INPUT n < 2 or an empty window */
status nearest_neighbours(const double *x, const double *y, size_t n, window w, double *nn, error *e);

/* Weight of a point in the Hanisch estimator: 1/((W - 2 nn)(H - 2 nn)), 0 where the frame is nearer than the
 * neighbour (a nearer one could lie outside). */
double hanisch_weight(double x, double y, double nn, window w);

/* Hanisch 1984: points with nn <= distance to the frame, weights 1/((W - 2 nn)(H - 2 nn)).
 * n of the result = points that count; value NAN if none. u_sampling takes the points as independent. */
measured nn_mean_hanisch(const double *x, const double *y, const double *nn, size_t n, window w);

/* Clark and Evans 1954; Donnelly 1978 edge correction (constants 0.0514, 0.0412). NAN for n = 0.
 * The guard version counts only points at least `guard` inside the window; the others serve as neighbours. */
double clark_evans_naive(const double *nn, size_t n, window w);
double clark_evans_donnelly(const double *nn, size_t n, window w);
double clark_evans_guard(const double *x, const double *y, const double *nn, size_t n, window w, double guard,
                         size_t *n_guard);
/* Standard score of the naive index under random placement (Clark and Evans 1954); NAN for n < 2. */
double clark_evans_z(const double *nn, size_t n, window w);

/* Pair correlation, translation correction, Epanechnikov kernel of half-width h, at r[n_r] (ascending); g is
 * NAN at r = 0. err ST_NO_MEMORY, ST_BAD_INPUT n < 2, no r, an empty window, h <= 0
 * src Stoyan D., Stoyan H. 1994, Fractals, Random Shapes and Point Fields */
status pair_correlation(const double *x, const double *y, size_t n, window w, double h, const double *r,
                        size_t n_r, double *g, error *e);

/* K(r): mean number of other points within r of a point, divided by the density; pi r^2 for random placement. Translation
 * correction, denominator n (n - 1) / A, at r[n_r] (ascending). err as pair_correlation
 * src Ripley B.D. 1977, J. R. Stat. Soc. B 39:172; translation correction Ohser J. 1983 */
status ripley_k(const double *x, const double *y, size_t n, window w, const double *r, size_t n_r, double *k, error *e);

/* The first ring of a pair correlation: its highest local maximum between 0.5 and 1.6 / sqrt(density) when that stands 2.5
 * standard errors of random placement above 1 and above the trough before it; else all NAN. A clustered or random pattern has
 * none.
 *   in  g at r[n_r] as made by pair_correlation with half-width h from n points in w */
typedef struct {
    double r, g, z; /* place, height, standard score */
} pair_ring;
pair_ring pair_first_ring(const double *r, const double *g, size_t n_r, size_t n, window w, double h);

#endif

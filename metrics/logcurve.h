/* A radial curve on a logarithmic abscissa, smoothed by a fixed share of the abscissa, and the vertex of an
 * extremum on the curve itself. Inside the room only: spacing and ring share it. */
#ifndef SWARD_METRICS_LOGCURVE_H
#define SWARD_METRICS_LOGCURVE_H
#include "metrics/texture.h"

enum { LOG_PER_E = 60, LOG_POINTS = 768 }; /* points per factor e; 12 factors e in all */
typedef struct {
    double x[LOG_POINTS], y[LOG_POINTS]; /* abscissa (not its logarithm), smoothed value */
    size_t n;
} log_curve;

/* Points from x_first to x_last of c (point 0, lag or frequency 0, takes no part), smoothed with sd `share`
 * of x. */
void log_curve_make(const curve *c, double x_first, double x_last, double share, log_curve *out);

/* Linear interpolation on c without its point 0; NAN outside. */
double curve_at(const curve *c, double x);

/* Vertex of a cubic fitted to the points of c (point 0 left out) within +-width * x0 of x0, but at least 2.2
 * steps: sign +1 maximum, -1 minimum; weight[c->n] of the points, NULL for equal ones. x0 itself when the
 * fit has no such vertex in its window; *y (may be NULL) gets the fitted value. */
double curve_vertex(const curve *c, const double *weight, double x0, double width, int sign, double *y);

#endif

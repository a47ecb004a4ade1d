/* Hillock or pore: what a single picture can say about it. */
#ifndef SWARD_METRICS_RELIEF_H
#define SWARD_METRICS_RELIEF_H
#include "base/status.h"
#include "metrics/plane.h"

typedef struct {
    double dynamics_ratio; /* ln(summed dynamics of the maxima / of the minima) of the smoothed picture */
    double count_ratio;    /* ln(maxima / minima) that stand out of it */
    double skew;           /* skewness of the curvature map at sigma = 0.17 d, hillock positive */
    double score;          /* the first two weighed: > 0 hillock */
    relief relief;         /* RELIEF_HILLOCK or RELIEF_PORE */
    int unsure;            /* 1: the evidence is weak or contradicts itself; the protocol should say it */
} relief_evidence;

/*   in  f flattened, d_px the scale of the texture
 *   err ST_NO_MEMORY. out untouched on failure */
status relief_look(const float *f, size_t nx, size_t ny, double d_px, relief_evidence *out, error *e);

#endif

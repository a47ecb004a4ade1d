/* The halves of the grating measurement, for each other only. */
#ifndef SWARD_METRICS_GRATING_PRIV_H
#define SWARD_METRICS_GRATING_PRIV_H
#include <stddef.h>

#include "base/status.h"

typedef struct {
    double x, y;
} vec;

/* Part of a plane of `stride` columns. */
typedef struct {
    const float *f;
    size_t stride, x0, y0, nx, ny;
} patch;

/* Sharpens reciprocal lattice vectors (cycles per px), known to a fraction of a period over the patch: the maxima of the
 * tapered spectrum near their low harmonics, and the vectors that fit them best, each weighted with its power.
 *   in   g1, g2 as found; g2 NULL: lines
 *   out  the same, better; untouched where the spectrum shows no maximum there
 *   err  ST_NO_MEMORY
 *   src  maximum of the tapered periodogram: common practice; taper: Harris, Proc. IEEE 66 (1978) 51 (Hann) */
status waves_refine(const patch *p, vec *g1, vec *g2, error *e);

#endif

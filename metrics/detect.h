/* Features: markers at the scale of the texture, one per hillock or pore. */
#ifndef SWARD_METRICS_DETECT_H
#define SWARD_METRICS_DETECT_H
#include <stdint.h>

#include "base/status.h"
#include "metrics/texture.h"

typedef struct {
    feature *features;  /* [n], row-major order of the unrefined marker; owned */
    uint32_t *marker;   /* [n] pixel index of the unrefined marker, owned */
    size_t n;
    double scale_px;    /* d the detection ended with */
    double merged_share; /* markers rejected by the dynamic / markers kept: how far the count depends on the criterion */
} detection;

/* Iterates the scale from d0 (two rounds, stop at 2 %), then detects with the dynamic criterion (height above the
 * saddle to a higher maximum >= 0.10 of the median response; union-find in grey order), above 4 noise sd, and refines
 * each centre on Gaussian 0.10 d.
 *   in  f flattened, sign +1 hillock, -1 pore
 *   err ST_NO_RESULT fewer than 5 features; ST_NO_MEMORY */
status detect(const float *f, size_t nx, size_t ny, double d0_px, int sign, double noise, detection *out, error *e);
void detection_free(detection *d);

/* Skewness of the curvature map at 0.17 and 0.25 of d0, hillock positive. */
status relief_skewness(const float *f, size_t nx, size_t ny, double d0_px, double *at_017, double *at_025, error *e);

#endif

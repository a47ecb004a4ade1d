/* Cells: priority-flood watershed of Gaussian 0.06 d smoothed sign * f from the markers, no mask. Deterministic. */
#ifndef SWARD_METRICS_WATERSHED_H
#define SWARD_METRICS_WATERSHED_H
#include "metrics/detect.h"

/* Fills cells[ny][nx] (feature index + 1 everywhere) and the cell and top members of the features.
 * err ST_NO_MEMORY */
status watershed(const float *f, size_t nx, size_t ny, int sign, detection *d, uint32_t *cells, error *e);

#endif

/* Cells: watershed of Gaussian 0.06 d smoothed sign * f from the markers, no mask.
 * Deterministic. */
#ifndef SWARD_METRICS_WATERSHED_H
#define SWARD_METRICS_WATERSHED_H
#include "metrics/detect.h"

/* Fills cells[ny][nx] (feature index + 1 everywhere) and the cell and top members of the features.
 * err ST_NO_MEMORY; ST_BAD_INPUT no feature */
status watershed(const float *f, size_t nx, size_t ny, int sign, detection *d, uint32_t *cells, error *e);

/* The same members from any label map: area, ECD, Feret diameters (pixels are squares), bounding box, border
 * weight, neighbours (cells that share a pixel edge). Needs every label 1..n; a feature without pixels gets
 * zeros. err ST_NO_MEMORY */
status cells_describe(const uint32_t *cells, size_t nx, size_t ny, feature *features, size_t n, error *e);

#endif

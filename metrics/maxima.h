/* Maxima of a smooth map with their dynamics: how far one must go down from a maximum to reach a higher one.
 */
#ifndef SWARD_METRICS_MAXIMA_H
#define SWARD_METRICS_MAXIMA_H
#include <stddef.h>
#include <stdint.h>

#include "base/status.h"

typedef struct {
    uint32_t pixel;
    float height;
    float dynamic; /* height above the saddle to a higher maximum; INFINITY for the highest */
} maximum;

/* All maxima of map[ny][nx] (8 neighbours; of equal pixels the first in the row-major order is the higher, so
 * a plateau has one maximum that survives any dynamic above 0), in row-major order.
 *   in   with_dynamics 0: dynamic is left 0 and the call is several times cheaper
 *   out  *out [*n], owned by the caller
 *   err  ST_NO_MEMORY */
status maxima_find(const float *map, size_t nx, size_t ny, int with_dynamics, maximum **out, size_t *n,
                   error *e);

/* 1 when no pixel of the square +-reach is higher (of equals: comes first). */
int maximum_rules(const float *map, size_t nx, size_t ny, uint32_t pixel, size_t reach);

/* Steepest ascent from *pixel to a maximum, into *pixel. 0 when that leads further away than reach_px: *pixel
 * stays. */
int maximum_uphill(const float *map, size_t nx, size_t ny, double reach_px, uint32_t *pixel);

#endif

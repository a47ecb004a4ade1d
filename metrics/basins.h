/* Basins of a map: every pixel belongs to the maximum its way up leads to; passes join basins. */
#ifndef SWARD_METRICS_BASINS_H
#define SWARD_METRICS_BASINS_H
#include <stddef.h>
#include <stdint.h>

#include "base/status.h"

/* Turns pointers into labels: up[i] is the next pixel uphill of i, or i itself for a root; the roots are numbered in
 * row-major order, and up[i] becomes the number of the root that i leads to. Returns the number of roots. n_px < 2^31. */
size_t basins_number(uint32_t *up, size_t n_px);

typedef struct {
    float height;  /* the higher of no two ways between the basins goes lower than this */
    uint32_t a, b; /* basins it joins, a < b */
} pass;

/* The highest pass between each two basins that touch (8 neighbours), highest first; equal ones in order of a, b.
 *   out *out [*n], owned by the caller
 *   err ST_NO_MEMORY */
status passes_find(const float *map, const uint32_t *basin, size_t nx, size_t ny, size_t n_basins, pass **out,
                   size_t *n, error *e);

/* Root of i in a union-find forest; shortens the way. */
uint32_t set_find(uint32_t *parent, uint32_t i);

#endif

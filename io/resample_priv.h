/* Rows at another spacing. Not for other rooms. */
#ifndef SWARD_IO_RESAMPLE_PRIV_H
#define SWARD_IO_RESAMPLE_PRIV_H
#include <stddef.h>

#include "base/status.h"

/* Replaces the plane *px [*ny][nx] by one of round(*ny factor) rows over the same height.
 *   in   factor 0.2 to 5
 *   own  the old plane is freed, the new one is the caller's
 *   err  ST_NO_MEMORY, also past max_pixels; the plane is then untouched
 *   src  Keys, IEEE Trans. ASSP 29 (1981) 1153 */
status resample_rows(float **px, size_t nx, size_t *ny, double factor, size_t max_pixels, error *e);

/* The same for a mask of `before` rows that shall have `rows`: a row is masked where any it is made of was.
 * err ST_NO_MEMORY; the mask is then untouched */
status resample_mask(unsigned char **mask, size_t nx, size_t before, size_t rows, error *e);

#endif

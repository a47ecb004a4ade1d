/* What was found, drawn on the micrograph, so that a look of two seconds tells whether to trust the numbers: thin cell
 * borders, one small marker per feature at its sub-pixel centre (filled where it counts for the density, hollow outside
 * the guard frame), the guard frame; below the picture a scale bar of a round length, one spacing as a ruler, and a band
 * that names the reasons when the micrograph is excluded. */
#ifndef SWARD_REPORT_OVERLAY_H
#define SWARD_REPORT_OVERLAY_H
#include <stdint.h>

#include "base/status.h"
#include "io/micrograph.h"
#include "metrics/texture.h"

/*   in   m the plane that was measured; its grey levels are stretched for display (0.2 to 99.8 % of the pixels)
 *        t what was found on it; needs t->cells for the cell borders (NULL: none are drawn)
 *   out  *rgb [*ny][m->nx][3]: the plane (strip cropped), below it the legend and the reasons; the caller frees it
 *   err  ST_BAD_INPUT an empty micrograph; ST_BUG t was measured on a plane of another size; ST_NO_MEMORY */
status overlay_draw(const micrograph *m, const texture *t, uint8_t **rgb, size_t *ny, error *e);

/* Radius of a marker, px: 0.09 spacings, but always visible and never large. */
double overlay_marker_radius_px(const texture *t, size_t nx);

#endif

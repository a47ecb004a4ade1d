/* What was found, drawn on the micrograph, so that a look of two seconds tells whether to trust the numbers: thin cell
 * borders, one marker per feature at its sub-pixel centre (a disc where it counts for the density, an open diamond where it
 * lies in the guard frame), cells that the frame cuts veiled, the guard frame, one ring of the measured spacing around a
 * feature in the middle. Info strip and marks drawn over
 * the specimen stay where they were, greyed. Below: a scale bar of a round length, what the
 * signs mean, and a band with the reasons when the micrograph is excluded. */
#ifndef SWARD_REPORT_OVERLAY_H
#define SWARD_REPORT_OVERLAY_H
#include <stdint.h>

#include "base/status.h"
#include "io/micrograph.h"
#include "metrics/texture.h"

typedef struct {
    uint8_t *index;          /* [ny][nx] places in the palette; owned */
    size_t nx, ny;
    size_t plane_y, plane_ny; /* rows of the plane in it: strip above, then strip below and legend */
    uint8_t palette[3 * 256]; /* red, green, blue of each place */
} overlay_picture;           /* {0} = empty */
void overlay_free(overlay_picture *p);

/*   in   m the plane that was measured; its grey levels are stretched for display (0.2 to 99.8 % of the pixels without marks)
 *        t what was found on it; needs t->cells for the cell borders (NULL: none are drawn)
 *   err  ST_BAD_INPUT an empty micrograph; ST_BUG t was measured on a plane of another size; ST_NO_MEMORY */
status overlay_draw(const micrograph *m, const texture *t, overlay_picture *out, error *e);

/* Radius of a marker, px: 0.09 spacings, but always visible and never large. */
double overlay_marker_radius_px(const texture *t, size_t nx);
/* Radius of the ring, px: the spacing it stands for. NAN: none is drawn. */
double overlay_ring_px(const texture *t);
/* Length of the scale bar: the largest of 1, 2, 5 x 10^k up to 0.22 of the width, in nm (in px without a pixel size). */
double overlay_bar_length(const micrograph *m);

#endif

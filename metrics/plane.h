/* What metrics sees of a picture: grey levels and nothing else. All lengths of this room are in px; the join with the
 * pixel size happens in one place outside. Coordinates: x right, y down, pixel centres at integers, the field spans
 * -0.5 .. nx - 0.5. */
#ifndef SWARD_METRICS_PLANE_H
#define SWARD_METRICS_PLANE_H
#include <stddef.h>

typedef struct {
    const float *px; /* [ny][nx], 0..1; borrowed */
    size_t nx, ny;
    int bit_depth;   /* of the file: sets the quantisation step */
    double clipped_low, clipped_high; /* shares at the file's own ends */
    const unsigned char *mask; /* [ny][nx] 1: no specimen (a mark drawn over it); NULL: all is; borrowed */
} plane;

typedef enum { RELIEF_AUTO, RELIEF_HILLOCK, RELIEF_PORE } relief;

#endif

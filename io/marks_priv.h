/* Burnt-in marks inside the field: scale bars, boxes, letters, cross hairs, arrows. Not for other rooms. */
#ifndef SWARD_IO_MARKS_PRIV_H
#define SWARD_IO_MARKS_PRIV_H
#include <stddef.h>

#include "base/status.h"

/* Finds what somebody drew over the specimen.
 *   in   px[ny][nx] 0..1, strip already cropped; lossy: levels are not exact
 *   out  *mask [ny][nx], 1 over and closely around marks; NULL when there is none. *n pixels of it
 *   own  caller frees *mask
 *   err  ST_NO_MEMORY */
status marks_find(const float *px, size_t nx, size_t ny, int lossy, unsigned char **mask, size_t *n, error *e);

/* ---- the two halves, for each other only: straight edges (marks_edges.c), strokes of a pen (marks_strokes.c) ---- */

enum { INK_NONE, INK_NEAR, INK_CORE };

/* A picture seen as ink of one level and the rest. */
typedef struct {
    const float *px;
    size_t nx, ny;
    float level;        /* of the ink */
    unsigned char *ink; /* [ny][nx] INK_... */
    unsigned char *mask;
    int lossy;
    int cautious;   /* only straight edges and what stands beside them */
    double share;   /* of the field that is ink */
    int at_end;     /* the ink is black or white: usual for a pen; of other levels only thick straight things count */
    int in_texture; /* ink of this level lies all over the field: it is also one of the specimen */
    unsigned char joins; /* INK_NEAR, or INK_CORE where levels near to it lie all over the field */
} ink_view;

/* Marks bars, lines and boxes with edges along rows and columns. Returns how many. */
size_t marks_edges(const ink_view *v);

/* Marks what is drawn with a pen: letters, arrows, slanted lines. err ST_NO_MEMORY */
status marks_strokes(const ink_view *v, error *e);

#endif

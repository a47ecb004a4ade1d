/* What the parts of an overlay share: the micrograph and what was found, sizes of the marks, the tile that is being drawn.
 * Not for other rooms. */
#ifndef SWARD_REPORT_OVERLAY_PRIV_H
#define SWARD_REPORT_OVERLAY_PRIV_H
#include <stddef.h>
#include <stdint.h>

#include "report/overlay.h"
#include "report/pen_priv.h"

/* Light inks with dark rims: each is seen on dark and on light ground, and they differ in brightness and in the blue-yellow
 * direction, which nearly every eye has. */
#define COUNTED_INK INK_RGB(0xffb400)
#define FRAME_INK INK_RGB(0xff8ad8)
#define CELL_INK INK_RGB(0x5fd0ff)
#define PAPER_INK INK_RGB(0xffffff)
#define PANEL_INK INK_RGB(0x101419)
#define REASON_INK INK_RGB(0x96280f)

typedef struct {
    const micrograph *m;
    const texture *t;
    double low, span;    /* grey levels that are shown: below low black, above low + span white */
    double scale;        /* of lines and markers: 1 up to 1200 px of width */
    double line;         /* width of the cell borders, px: fine where the cells are small */
    int seam;            /* 1: borders have dark edges; 0: there is no room for them */
    double em;           /* of the lettering, px */
    size_t plane_y;      /* first row of the plane in the picture */
    double ring;         /* px; NAN none */
    size_t ring_feature; /* around this one */
} overlay_scene;

/* A part of the picture, drawn on its own so that memory stays bounded whatever the size of the micrograph. */
typedef struct {
    size_t x0, y0, nx, ny; /* in the picture */
    unsigned char *data;   /* cairo's, 4 bytes a pixel */
    size_t stride;         /* bytes */
} overlay_tile;

/* The grey levels that hold 0.2 to 99.8 % of the pixels, marks left out. err ST_NO_MEMORY */
status overlay_stretch(const micrograph *m, double *low, double *span, error *e);
/* Micrograph and strip as grey, cells that the frame cuts veiled, strip and marks greyed. Rows outside both are left alone. */
void overlay_ground(const overlay_scene *s, const overlay_tile *tile);
/* Cell borders as masks under the pen: a dark seam, then the line. err ST_NO_MEMORY */
status overlay_borders(const overlay_scene *s, const overlay_tile *tile, pen *p, error *e);

/* Paths of the signs, without ink: a circle (a counted feature, a ring) and a diamond (a feature in the guard frame). */
void overlay_disc(pen *p, double x, double y, double r);
void overlay_diamond(pen *p, double x, double y, double r);

/* The legend below the picture: a flow of signs with their meaning, then the reasons. The top left corner is (0, y).
 * Returns the height; draws nothing with draw = 0. */
double overlay_legend(const overlay_scene *s, pen *p, double y, int draw);

#endif

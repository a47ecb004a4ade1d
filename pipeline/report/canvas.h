/* An RGB picture to draw on: anti-aliased discs, strokes and rectangles, bitmap lettering. Positions in px, pixel centres
 * at integers, x right, y down; whatever lies outside the picture is clipped. */
#ifndef SWARD_REPORT_CANVAS_H
#define SWARD_REPORT_CANVAS_H
#include <stddef.h>
#include <stdint.h>

typedef struct {
    uint8_t *rgb; /* [ny][nx][3], borrowed */
    size_t nx, ny;
} canvas;

typedef struct {
    uint8_t r, g, b;
    double alpha; /* 0 invisible .. 1 opaque */
} ink;

/* Lays the ink over one pixel; `cover` 0..1 is the share of the pixel the shape covers. */
void canvas_blend(canvas *c, long x, long y, ink i, double cover);

void canvas_disc(canvas *c, double x, double y, double radius, ink i);
void canvas_ring(canvas *c, double x, double y, double radius, double width, ink i);
void canvas_line(canvas *c, double x0, double y0, double x1, double y1, double width, ink i);
/* Whole pixels, x0..x1-1 and y0..y1-1. */
void canvas_fill(canvas *c, long x0, long y0, long x1, long y1, ink i);

/* Lettering: a glyph is FONT_WIDTH x FONT_HEIGHT units of `scale` px; (x, y) is the top left corner. The baseline lies
 * FONT_ASCENT units below the top. */
enum { FONT_WIDTH = 5, FONT_ADVANCE = 6, FONT_ASCENT = 7, FONT_HEIGHT = 9 };
void canvas_text(canvas *c, long x, long y, int scale, const char *text, ink i);
long canvas_text_width(const char *text, int scale);

extern const char overlay_characters[];
extern const uint8_t overlay_glyphs[][9];

#endif

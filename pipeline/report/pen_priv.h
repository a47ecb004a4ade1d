/* A cairo context with the program's own typeface: what overlays and figures are drawn with. Lettering never asks the
 * machine for fonts, so that the same drawing gives the same bytes everywhere. Not for other rooms. */
#ifndef SWARD_REPORT_PEN_PRIV_H
#define SWARD_REPORT_PEN_PRIV_H
#include <cairo.h>

#include "base/status.h"
#include "base/text.h"

typedef struct {
    double r, g, b, a; /* 0..1 */
} ink;
#define INK_RGB(hex) ((ink){ ((hex) >> 16 & 255) / 255.0, ((hex) >> 8 & 255) / 255.0, ((hex)&255) / 255.0, 1.0 })

typedef struct {
    cairo_t *cr;
    cairo_font_face_t *face;
    double em;  /* size of the letters, in units of the surface */
    int failed; /* a text was lost for want of memory */
} pen;         /* {0} = none */

/* A pen on the surface, which stays the caller's. The typeface is loaded anew for each pen, so that threads share nothing.
 *   out  free with pen_close, also after a failure
 *   err  ST_NO_MEMORY */
status pen_open(cairo_surface_t *surface, pen *p, error *e);
void pen_close(pen *p);
/* What went wrong in the drawing so far, if anything. err ST_NO_MEMORY; ST_BUG */
status pen_check(const pen *p, error *e);

void pen_ink(pen *p, ink i);
void pen_em(pen *p, double em);
/* Strokes the path in the ink with a dark edge, so that it reads on any ground. */
void pen_two_tone(pen *p, double width, ink i);

/* Text is made safe first: bytes that are no UTF-8 and control characters show as U+FFFD, a character the typeface lacks as a
 * box. align 0: x is the left end, 0.5 the middle, 1 the right end; y is the baseline. */
void pen_text(pen *p, double x, double y, double align, const char *text);
/* The same, shortened with an ellipsis to at most `width`. */
void pen_text_within(pen *p, double x, double y, double align, double width, const char *text);
double pen_width(pen *p, const char *text);
/* Width after shortening. */
double pen_width_within(pen *p, double width, const char *text);

#endif

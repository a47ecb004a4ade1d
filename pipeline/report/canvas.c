/* Drawing by signed distance: a pixel's coverage is how far its centre lies inside the shape, clamped to one pixel. It
 * is exact for straight edges along the axes and good to some percent elsewhere, which is all an overlay needs, and it
 * places a marker at its sub-pixel position. */
#include "report/canvas.h"

#include <ctype.h>
#include <math.h>
#include <string.h>

static double clamp01(double v) { return v < 0.0 ? 0.0 : v > 1.0 ? 1.0 : v; }

void canvas_blend(canvas *c, long x, long y, ink i, double cover) {
    if (x < 0 || y < 0 || (size_t)x >= c->nx || (size_t)y >= c->ny || cover <= 0.0) return;
    uint8_t *p = c->rgb + 3 * ((size_t)y * c->nx + (size_t)x);
    double a = i.alpha * cover;
    p[0] = (uint8_t)lround(p[0] + a * (i.r - p[0]));
    p[1] = (uint8_t)lround(p[1] + a * (i.g - p[1]));
    p[2] = (uint8_t)lround(p[2] + a * (i.b - p[2]));
}

/* The pixels a shape around [x0, x1] x [y0, y1] can touch; empty when it lies wholly outside. */
typedef struct {
    long x0, y0, x1, y1;
} box;

static long inside(double v, size_t n) {
    if (!(v > 0.0)) return 0;
    return v > (double)n - 1.0 ? (long)n - 1 : (long)v;
}

static box touched(const canvas *c, double x0, double y0, double x1, double y1) {
    if (!(x1 >= -1.0 && y1 >= -1.0 && x0 <= (double)c->nx && y0 <= (double)c->ny))
        return (box){ 0, 0, -1, -1 };
    return (box){ inside(floor(x0), c->nx), inside(floor(y0), c->ny), inside(ceil(x1), c->nx),
                  inside(ceil(y1), c->ny) };
}

void canvas_disc(canvas *c, double x, double y, double radius, ink i) {
    double reach = radius + 1.0;
    box b = touched(c, x - reach, y - reach, x + reach, y + reach);
    for (long v = b.y0; v <= b.y1; v++)
        for (long u = b.x0; u <= b.x1; u++)
            canvas_blend(c, u, v, i, clamp01(radius + 0.5 - hypot((double)u - x, (double)v - y)));
}

void canvas_ring(canvas *c, double x, double y, double radius, double width, ink i) {
    double reach = radius + width + 1.0;
    box b = touched(c, x - reach, y - reach, x + reach, y + reach);
    for (long v = b.y0; v <= b.y1; v++)
        for (long u = b.x0; u <= b.x1; u++) {
            double d = fabs(hypot((double)u - x, (double)v - y) - radius);
            canvas_blend(c, u, v, i, clamp01(0.5 * width + 0.5 - d));
        }
}

void canvas_line(canvas *c, double x0, double y0, double x1, double y1, double width, ink i) {
    double reach = 0.5 * width + 1.0, dx = x1 - x0, dy = y1 - y0, length2 = dx * dx + dy * dy;
    box b =
        touched(c, fmin(x0, x1) - reach, fmin(y0, y1) - reach, fmax(x0, x1) + reach, fmax(y0, y1) + reach);
    for (long v = b.y0; v <= b.y1; v++)
        for (long u = b.x0; u <= b.x1; u++) {
            double px = (double)u - x0, py = (double)v - y0;
            double t = length2 > 0.0 ? clamp01((px * dx + py * dy) / length2) : 0.0;
            double d = hypot(px - t * dx, py - t * dy);
            canvas_blend(c, u, v, i, clamp01(0.5 * width + 0.5 - d));
        }
}

void canvas_fill(canvas *c, long x0, long y0, long x1, long y1, ink i) {
    if (x0 < 0) x0 = 0;
    if (y0 < 0) y0 = 0;
    for (long v = y0; v < y1 && v < (long)c->ny; v++)
        for (long u = x0; u < x1 && u < (long)c->nx; u++) canvas_blend(c, u, v, i, 1.0);
}

static void draw_glyph(canvas *c, long x, long y, int scale, char letter, ink i) {
    const char *found = strchr(overlay_characters, tolower((unsigned char)letter));
    if (!found || !*found) found = strchr(overlay_characters, '?');
    const uint8_t *rows = overlay_glyphs[found - overlay_characters];
    for (long r = 0; r < FONT_HEIGHT; r++)
        for (long k = 0; k < FONT_WIDTH; k++)
            if (rows[r] >> (FONT_WIDTH - 1 - k) & 1)
                canvas_fill(c, x + k * scale, y + r * scale, x + (k + 1) * scale, y + (r + 1) * scale, i);
}

void canvas_text(canvas *c, long x, long y, int scale, const char *text, ink i) {
    for (; *text; text++, x += (long)FONT_ADVANCE * scale) draw_glyph(c, x, y, scale, *text, i);
}

long canvas_text_width(const char *text, int scale) {
    long n = (long)strlen(text);
    return n ? (n * FONT_ADVANCE - (FONT_ADVANCE - FONT_WIDTH)) * scale : 0;
}

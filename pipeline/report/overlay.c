/* Layers from below: stretched grey levels, cell borders (half transparent, one pixel per 1200 px of width), guard
 * frame (dark and bright dashes, so that it shows on any ground), markers (bright core, dark rim). Legend and reasons
 * stand below the picture, never on it. The hues differ in brightness too and stay apart for colour-blind eyes. The picture is for people: no number is
 * ever read back from it. */
#include "report/overlay.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/flags.h"
#include "base/limits.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "report/canvas.h"
#include "report/rows.h"

static const ink border_ink = { 62, 196, 255, 0.55 }, border_out_ink = { 62, 196, 255, 0.28 };
static const ink marker_ink = { 255, 190, 20, 1.0 }, rim_ink = { 24, 16, 0, 0.65 };
static const ink dash_bright = { 255, 255, 255, 0.55 }, dash_dark = { 0, 0, 0, 0.45 };
static const ink panel_ink = { 10, 14, 20, 0.74 }, paper_ink = { 255, 255, 255, 1.0 };
static const ink band_ink = { 150, 30, 12, 0.90 };

/* Stretch: levels below `low` black, above `low + span` white. */
typedef struct {
    double low, span;
} stretch;

enum { BINS = 4096 };

static double histogram_level(const size_t *count, size_t n, double share) {
    double want = share * (double)n, sum = 0.0;
    for (size_t b = 0; b < BINS; b++) {
        sum += (double)count[b];
        if (sum >= want) return ((double)b + 0.5) / BINS;
    }
    return 1.0;
}

static status find_stretch(const micrograph *m, stretch *s, error *e) {
    size_t n = m->nx * m->ny;
    double lo = HUGE_VAL, hi = -HUGE_VAL;
    for (size_t i = 0; i < n; i++) {
        lo = fmin(lo, (double)m->px[i]);
        hi = fmax(hi, (double)m->px[i]);
    }
    *s = (stretch){ 0.0, 1.0 };
    if (!(hi > lo)) return ST_OK;
    size_t *count = mem_array(BINS, sizeof *count);
    if (!count) return NO_MEMORY(e, "the overlay");
    for (size_t i = 0; i < n; i++) {
        double bin = ((double)m->px[i] - lo) / (hi - lo) * BINS;
        count[bin >= BINS ? BINS - 1 : bin > 0.0 ? (size_t)bin : 0]++;
    }
    double from = histogram_level(count, n, 0.002), to = histogram_level(count, n, 0.998);
    if (to > from) *s = (stretch){ lo + from * (hi - lo), (to - from) * (hi - lo) };
    free(count);
    return ST_OK;
}

static void draw_grey(canvas *c, const micrograph *m, const stretch *s) {
    for (size_t i = 0; i < m->nx * m->ny; i++) {
        double v = ((double)m->px[i] - s->low) / s->span;
        uint8_t grey = (uint8_t)lround(255.0 * (v > 1.0 ? 1.0 : v > 0.0 ? v : 0.0));
        memset(c->rgb + 3 * i, grey, 3);
    }
}

/* A cell that touches the frame is left out of the sizes: its border is drawn fainter. */
static int counts(const texture *t, uint32_t label) {
    return label && label <= t->n_found && t->features[label - 1].weight > 0.0;
}

static void draw_borders(canvas *c, const texture *t, size_t width) {
    if (!t->cells) return;
    size_t nx = t->nx, ny = t->ny;
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx; x++) {
            uint32_t here = t->cells[y * nx + x];
            for (size_t k = 1; k <= width; k++) {
                uint32_t right = x + k < nx ? t->cells[y * nx + x + k] : here;
                uint32_t below = y + k < ny ? t->cells[(y + k) * nx + x] : here;
                if (right == here && below == here) continue;
                uint32_t other = right != here ? right : below;
                int strong = counts(t, here) || counts(t, other);
                canvas_blend(c, (long)x, (long)y, strong ? border_ink : border_out_ink, 1.0);
                break;
            }
        }
}

static void draw_dashes(canvas *c, double x0, double y0, double x1, double y1, double dash, double width) {
    double length = hypot(x1 - x0, y1 - y0);
    if (!(length > 0.0)) return;
    long n = (long)ceil(length / dash);
    for (long k = 0; k < n; k++) {
        double a = (double)k * dash / length, b = fmin(1.0, (double)(k + 1) * dash / length);
        canvas_line(c, x0 + a * (x1 - x0), y0 + a * (y1 - y0), x0 + b * (x1 - x0), y0 + b * (y1 - y0), width,
                    k % 2 ? dash_dark : dash_bright);
    }
}

/* The guard is half a spacing of the detected density wide: features inside it count. */
static void draw_guard(canvas *c, const texture *t, double scale) {
    double g = 0.5 * t->spacing_hex.value;
    if (!(g > 0.0) || 2.0 * g >= (double)c->nx || 2.0 * g >= (double)c->ny) return;
    double x0 = g - 0.5, y0 = g - 0.5, x1 = (double)c->nx - g - 0.5, y1 = (double)c->ny - g - 0.5;
    double dash = 6.0 * scale;
    draw_dashes(c, x0, y0, x1, y0, dash, scale);
    draw_dashes(c, x1, y0, x1, y1, dash, scale);
    draw_dashes(c, x0, y1, x1, y1, dash, scale);
    draw_dashes(c, x0, y0, x0, y1, dash, scale);
}

static double spacing_px(const texture *t) {
    return isfinite(t->spacing_acf.value) && t->spacing_acf.value > 0.0 ? t->spacing_acf.value
                                                                        : t->spacing_hex.value;
}

/* Lines and markers grow with the picture, because a large one is looked at scaled down. */
static double line_scale(size_t nx) { return nx > 1200 ? (double)nx / 1200.0 : 1.0; }

double overlay_marker_radius_px(const texture *t, size_t nx) {
    double s = line_scale(nx), r = 0.09 * spacing_px(t);
    if (!(r > 1.3 * s)) r = 1.3 * s;
    return r > 3.5 * s ? 3.5 * s : r;
}

static void draw_markers(canvas *c, const texture *t, double scale) {
    double r = overlay_marker_radius_px(t, c->nx);
    for (size_t i = 0; i < t->n_found; i++) {
        const feature *f = &t->features[i];
        if (f->in_guard) {
            canvas_disc(c, f->x, f->y, r + 0.8 * scale, rim_ink);
            canvas_disc(c, f->x, f->y, r, marker_ink);
        } else {
            canvas_ring(c, f->x, f->y, r, 2.2 * scale, rim_ink);
            canvas_ring(c, f->x, f->y, r, scale, marker_ink);
        }
    }
}

/* The largest of 1, 2, 5 x 10^k that does not exceed v. */
static double round_length(double v) {
    double decade = pow(10.0, floor(log10(v))), lead = v / decade;
    return decade * (lead >= 5.0 ? 5.0 : lead >= 2.0 ? 2.0 : 1.0);
}

static int spacing_digits(void) {
    for (size_t i = 0; i < n_image_columns; i++)
        if (!strcmp(image_columns[i].name, "spacing_acf_nm")) return image_columns[i].digits;
    return 5;
}

/* A horizontal measure with end ticks. */
static void draw_measure(canvas *c, long x, long y, double length, int unit, ink i) {
    double w = unit, tick = 2.5 * unit;
    canvas_line(c, (double)x, (double)y, (double)x + length, (double)y, w, i);
    canvas_line(c, (double)x, (double)y - tick, (double)x, (double)y + tick, w, i);
    canvas_line(c, (double)x + length, (double)y - tick, (double)x + length, (double)y + tick, w, i);
}

typedef struct {
    double length_px;
    char label[96];
    ink i;
} legend_line;

static long legend_height(size_t n, int unit) { return (long)n * (FONT_HEIGHT + 3L) * unit + 6L * unit; }

static void draw_legend(canvas *c, long top, const legend_line *line, size_t n, int unit) {
    long measure = 0, row = (FONT_HEIGHT + 3L) * unit, pad = 4L * unit;
    for (size_t k = 0; k < n; k++) {
        long l = (long)ceil(line[k].length_px);
        if (l > measure) measure = l;
    }
    canvas_fill(c, 0, top, (long)c->nx, top + legend_height(n, unit), panel_ink);
    for (size_t k = 0; k < n; k++) {
        long y = top + pad + (long)k * row;
        if (line[k].length_px > 0.0)
            draw_measure(c, pad, y + FONT_ASCENT * (long)unit / 2, line[k].length_px, unit, line[k].i);
        canvas_text(c, line[k].length_px > 0.0 ? 3L * pad + measure : pad, y, unit, line[k].label, line[k].i);
    }
}

enum { LEGEND_LINES = 3 };

static size_t make_legend(const micrograph *m, const texture *t, legend_line line[LEGEND_LINES]) {
    size_t n = 0;
    char number[NUMBER_TEXT];
    int known = isfinite(m->px_nm) && m->px_nm > 0.0;
    double px = known ? m->px_nm : 1.0, bar = round_length(0.22 * (double)m->nx * px), d = spacing_px(t);
    const char *length_unit = known ? "nm" : "px";
    snprintf(line[n].label, sizeof line[n].label, "%s %s", number_text(bar, 4, number), length_unit);
    line[n].i = paper_ink;
    line[n++].length_px = bar / px;
    if (isfinite(d) && d > 0.0 && d < (double)m->nx) {
        snprintf(line[n].label, sizeof line[n].label, "spacing %s %s",
                 number_text(d * px, spacing_digits(), number), length_unit);
        line[n].i = marker_ink;
        line[n++].length_px = d;
    }
    snprintf(line[n].label, sizeof line[n].label, "%zu features counted", t->n_features);
    line[n++].i = paper_ink;
    return n;
}

/* "excluded: few pixels, blurred", broken at blanks into lines that fit, from row `top` of the picture on. Returns the
 * rows it takes; draws nothing where c->rgb is NULL. */
static long draw_reasons(canvas *c, long top, flags reasons, int unit) {
    char text[1200] = "excluded: ";
    size_t n = strlen(text);
    for (int bit = 0, first = 1; bit < FLAG_COUNT; bit++) {
        if (!(reasons >> bit & 1)) continue;
        int k = snprintf(text + n, sizeof text - n, "%s%s", first ? "" : ", ", flag_word(bit));
        if (k < 0 || (size_t)k >= sizeof text - n) break;
        for (size_t i = n; i < n + (size_t)k; i++)
            if (text[i] == '_') text[i] = ' ';
        n += (size_t)k;
        first = 0;
    }
    long pad = 4L * unit, row = (FONT_HEIGHT + 2L) * unit;
    size_t fit = (size_t)fmax(4.0, ((double)c->nx - 2.0 * (double)pad) / (FONT_ADVANCE * unit));
    long y = 0;
    if (!reasons) return 0;
    for (char *line = text; *line;) {
        size_t length = strlen(line), take = length <= fit ? length : fit;
        if (length > fit)
            for (size_t k = fit; k > 0; k--)
                if (line[k] == ' ') {
                    take = k;
                    break;
                }
        char kept = line[take];
        line[take] = '\0';
        if (c->rgb) canvas_fill(c, 0, top + y, (long)c->nx, top + y + row + (y ? 0 : pad), band_ink);
        if (c->rgb) canvas_text(c, pad, top + (y ? y : pad), unit, line, paper_ink);
        y += row + (y ? 0 : pad);
        line[take] = kept;
        line += take;
        while (*line == ' ') line++;
    }
    return y;
}

/* One unit of the lettering: letters about 10 px high when the picture is looked at 640 px wide. */
static int lettering(size_t nx) {
    int unit = (int)lround((double)nx / 460.0);
    return nx < 500 ? 1 : unit < 2 ? 2 : unit;
}

status overlay_draw(const micrograph *m, const texture *t, uint8_t **rgb, size_t *ny, error *e) {
    if (!m->px || !m->nx || !m->ny)
        return fail(e, ST_BAD_INPUT, "the overlay needs a picture, this one is empty");
    if (m->nx > LIMIT_PIXELS / m->ny) return fail(e, ST_NO_MEMORY, "the picture is too large for an overlay");
    if (t->cells && (t->nx != m->nx || t->ny != m->ny))
        return fail(e, ST_BUG, "cells of %zu x %zu px do not fit a picture of %zu x %zu px", t->nx, t->ny,
                    m->nx, m->ny);
    stretch s;
    status st = find_stretch(m, &s, e);
    if (st) return st;
    double scale = line_scale(m->nx);
    int unit = lettering(m->nx);
    flags reasons = t->reasons | (isfinite(m->px_nm) ? 0 : FLAG(NO_PIXEL_SIZE));
    legend_line line[LEGEND_LINES] = { 0 };
    size_t n = make_legend(m, t, line);
    canvas whole = { NULL, m->nx, m->ny };
    whole.ny += (size_t)(legend_height(n, unit) + draw_reasons(&whole, 0, reasons, unit));
    whole.rgb = mem_array(m->nx * whole.ny, 3);
    if (!whole.rgb) return NO_MEMORY(e, "the overlay");
    canvas c = { whole.rgb, m->nx, m->ny }; /* the picture: nothing is written over it but what was found */
    draw_grey(&c, m, &s);
    draw_borders(&c, t, (size_t)lround(scale));
    draw_guard(&c, t, scale);
    draw_markers(&c, t, scale);
    draw_legend(&whole, (long)m->ny, line, n, unit);
    draw_reasons(&whole, (long)m->ny + legend_height(n, unit), reasons, unit);
    *rgb = whole.rgb;
    *ny = whole.ny;
    return ST_OK;
}

/* A micrograph on a sheet, as wide as the sheet: grey levels stretched as in an overlay, a scale bar in a corner on a ground of its own, signs
 * over the features where they are wanted. SVG and PDF carry the picture at its own resolution. */
#include <math.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "report/overlay_priv.h"
#include "report/scalebar_priv.h"
#include "report/sheet_priv.h"

enum { LONGEST = 32000 }; /* px, of cairo's pictures */
static const double mm_per_pt = 25.4 / 72.0, bar_share = 0.3;

static status paint_grey(sheet *s, const sheet_picture *p, double scale, double top, error *e) {
    double low, span;
    status st = overlay_stretch(p->m, &low, &span, e);
    if (st) return st;
    cairo_surface_t *image = cairo_image_surface_create(CAIRO_FORMAT_RGB24, (int)p->m->nx, (int)p->m->ny);
    if (cairo_surface_status(image)) {
        cairo_surface_destroy(image);
        return NO_MEMORY(e, "the micrograph");
    }
    cairo_surface_flush(image);
    unsigned char *data = cairo_image_surface_get_data(image);
    size_t stride = (size_t)cairo_image_surface_get_stride(image);
    for (size_t y = 0; y < p->m->ny; y++)
        for (size_t x = 0; x < p->m->nx; x++) {
            double level = ((double)p->m->px[y * p->m->nx + x] - low) / span;
            uint32_t g = (uint32_t)(255.0 * (level > 1.0 ? 1.0 : level > 0.0 ? level : 0.0) + 0.5), v = g << 16 | g << 8 | g;
            memcpy(data + y * stride + 4 * x, &v, sizeof v);
        }
    cairo_surface_mark_dirty(image);
    cairo_save(s->pen.cr);
    cairo_translate(s->pen.cr, 0.0, top);
    cairo_scale(s->pen.cr, scale, scale);
    cairo_set_source_surface(s->pen.cr, image, 0.0, 0.0);
    cairo_pattern_set_filter(cairo_get_source(s->pen.cr), scale * s->o->dpi / 72.0 < 1.0 ? CAIRO_FILTER_BEST : CAIRO_FILTER_NEAREST);
    cairo_paint(s->pen.cr);
    cairo_restore(s->pen.cr);
    cairo_surface_destroy(image);
    return ST_OK;
}

static void counted_sign(sheet *s, double x, double y, double r) {
    overlay_disc(&s->pen, x, y, r);
    pen_ink(&s->pen, COUNTED_INK);
    cairo_fill_preserve(s->pen.cr);
    pen_ink(&s->pen, (ink){ 0.0, 0.0, 0.0, 0.7 });
    cairo_set_line_width(s->pen.cr, 0.3 * r);
    cairo_stroke(s->pen.cr);
}

static void frame_sign(sheet *s, double x, double y, double r) {
    overlay_diamond(&s->pen, x, y, 1.6 * r);
    pen_two_tone(&s->pen, 0.48 * r, FRAME_INK);
}

static void ring_sign(sheet *s, double x, double y, double r) {
    overlay_disc(&s->pen, x, y, r);
    pen_two_tone(&s->pen, 0.11 * s->em, PAPER_INK);
}

static void draw_signs(sheet *s, const sheet_picture *p, double scale, double top) {
    double r = 0.17 * s->em;
    if (isfinite(p->ring_px)) ring_sign(s, (p->ring_x + 0.5) * scale, (p->ring_y + 0.5) * scale + top, p->ring_px * scale);
    for (size_t i = 0; p->x && i < p->n; i++) {
        double x = (p->x[i] + 0.5) * scale, y = (p->y[i] + 0.5) * scale + top;
        if (!isfinite(x) || !isfinite(y)) continue;
        if (p->counted[i]) counted_sign(s, x, y, r);
        else frame_sign(s, x, y, r);
    }
}

/* The signs with their meaning in one row below the picture. */
static void draw_key(sheet *s, const sheet_picture *p, double y) {
    const struct {
        void (*sign)(sheet *, double, double, double);
        double r;
        const char *label;
    } keys[] = { { ring_sign, 0.4, isfinite(p->ring_px) ? p->ring_label : NULL }, { counted_sign, 0.27, "counted" },
                 { frame_sign, 0.24, "in the guard frame" } };
    double em = s->em, x = 0.8 * em;
    for (size_t k = 0; k < 3; k++) {
        double room = fmax(s->width - x - 1.2 * em, em);
        if (!keys[k].label) continue;
        keys[k].sign(s, x, y, keys[k].r * em);
        pen_ink(&s->pen, s->colours.ink);
        pen_text_within(&s->pen, x + 0.8 * em, y + 0.36 * em, 0.0, room, keys[k].label);
        x += 2.4 * em + pen_width_within(&s->pen, room, keys[k].label);
    }
}

static void draw_scale_bar(sheet *s, const sheet_picture *p, double scale, double bottom) {
    char label[64];
    double em = s->em, nm = scalebar_length(bar_share * (double)p->m->nx * p->px_nm), length = nm / p->px_nm * scale, pad = 0.5 * em;
    scalebar_label(nm, label, sizeof label);
    double width = fmax(length, pen_width(&s->pen, label)) + 2.0 * pad, height = 2.6 * em;
    double left = s->width - width - 0.6 * em, top = bottom - height - 0.6 * em;
    cairo_rectangle(s->pen.cr, left, top, width, height);
    pen_ink(&s->pen, (ink){ 0.0, 0.0, 0.0, 0.62 });
    cairo_fill(s->pen.cr);
    pen_ink(&s->pen, PAPER_INK);
    pen_text(&s->pen, left + 0.5 * width, top + 1.2 * em, 0.5, label);
    scalebar_draw(&s->pen, left + 0.5 * (width - length), top + 1.95 * em, length, 0.8 * em);
}

status sheet_draw_picture(const sheet_picture *p, const sheet_options *o, char **bytes, size_t *n, error *e) {
    sheet s = { 0 };
    if (!p->m->nx || !p->m->ny || p->m->nx > LONGEST || p->m->ny > LONGEST)
        return fail(e, ST_BAD_INPUT, "a micrograph of %zu x %zu px is too large for a figure", p->m->nx, p->m->ny);
    double em = o->text_pt, scale = o->width_mm / mm_per_pt / (double)p->m->nx, height = scale * (double)p->m->ny;
    double title = o->titled ? 1.8 * em : 0.0, key = p->x ? 1.9 * em : 0.0;
    sheet_options own = *o;
    own.height_mm = 0.0; /* pixels are square: the width settles it */
    status st = sheet_open(&own, (height + title + key) * mm_per_pt, &s, e);
    if (!st) {
        double top = sheet_title(&s, p->title);
        st = paint_grey(&s, p, scale, top, e);
        cairo_save(s.pen.cr);
        cairo_rectangle(s.pen.cr, 0.0, top, s.width, height);
        cairo_clip(s.pen.cr);
        draw_signs(&s, p, scale, top);
        cairo_restore(s.pen.cr);
        if (p->px_nm > 0.0) draw_scale_bar(&s, p, scale, top + height);
        if (p->x) draw_key(&s, p, top + height + 1.0 * em);
        if (!st) st = sheet_finish(&s, p->title, p->description, bytes, n, e);
    }
    sheet_close(&s);
    return st;
}

/* Layers from below: stretched grey levels with the cut cells veiled, cell borders with a dark seam, guard frame (dark
 * and bright dashes), ring, markers with dark rims. Every line is light with a dark edge, so that it reads on any
 * ground. The picture is drawn in tiles through cairo and kept as places in a palette: a few megabytes of work however large the
 * micrograph, and a file half the size. The picture is for people: no number is ever read back from it. */
#include "report/overlay.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "report/overlay_priv.h"
#include "report/palette_priv.h"

enum { TILE_NX = 2048, TILE_NY = 384, BATCH = 256 };

void overlay_free(overlay_picture *p) {
    free(p->index);
    *p = (overlay_picture){ 0 };
}

void overlay_disc(pen *p, double x, double y, double r) {
    cairo_new_sub_path(p->cr);
    cairo_arc(p->cr, x, y, r, 0.0, 2.0 * PI);
}

void overlay_diamond(pen *p, double x, double y, double r) {
    cairo_move_to(p->cr, x, y - r);
    cairo_line_to(p->cr, x + r, y);
    cairo_line_to(p->cr, x, y + r);
    cairo_line_to(p->cr, x - r, y);
    cairo_close_path(p->cr);
}

static double spacing_px(const texture *t) {
    return isfinite(t->spacing_acf.value) && t->spacing_acf.value > 0.0 ? t->spacing_acf.value : t->spacing_hex.value;
}

double overlay_ring_px(const texture *t) {
    double d = t->spacing_acf.value;
    return isfinite(d) && d > 0.0 ? d : MISSING;
}

/* Lines and markers grow with the picture, because a large one is looked at scaled down. */
static double line_scale(size_t nx) { return nx > 1200 ? (double)nx / 1200.0 : 1.0; }

double overlay_marker_radius_px(const texture *t, size_t nx) {
    double s = line_scale(nx), r = 0.09 * spacing_px(t);
    if (!(r > 1.3 * s)) r = 1.3 * s;
    return r > 3.5 * s ? 3.5 * s : r;
}

/* The ring goes around the counted feature nearest to the middle, where all its neighbours are in the picture. */
static void place_ring(overlay_scene *s) {
    const texture *t = s->t;
    double best = HUGE_VAL, cx = 0.5 * (double)s->m->nx, cy = 0.5 * (double)s->m->ny, d = overlay_ring_px(t);
    s->ring = MISSING;
    for (size_t i = 0; i < t->n_found; i++) {
        double far = hypot(t->features[i].x - cx, t->features[i].y - cy);
        if (!t->features[i].in_guard || !(far < best)) continue;
        best = far;
        s->ring_feature = i;
    }
    if (isfinite(best) && d < 0.5 * fmin((double)s->m->nx, (double)s->m->ny)) s->ring = d;
}

/* A line of dashes in both tones. */
static void draw_dashes(pen *p, double x0, double y0, double x1, double y1, double scale) {
    const double dash = 6.0 * scale;
    cairo_set_line_width(p->cr, 1.2 * scale);
    for (int k = 0; k < 2; k++) {
        cairo_set_dash(p->cr, &dash, 1, k ? dash : 0.0);
        cairo_move_to(p->cr, x0, y0);
        cairo_line_to(p->cr, x1, y1);
        pen_ink(p, k ? (ink){ 0.0, 0.0, 0.0, 0.6 } : (ink){ 1.0, 1.0, 1.0, 0.75 });
        cairo_stroke(p->cr);
    }
    cairo_set_dash(p->cr, NULL, 0, 0.0);
}

/* The guard is half a spacing of the detected density wide: features inside it count. */
static void draw_guard(const overlay_scene *s, pen *p) {
    double g = 0.5 * s->t->spacing_hex.value, nx = (double)s->m->nx, ny = (double)s->m->ny;
    if (!(g > 0.0) || 2.0 * g >= nx || 2.0 * g >= ny) return;
    draw_dashes(p, g, g, nx - g, g, s->scale);
    draw_dashes(p, nx - g, g, nx - g, ny - g, s->scale);
    draw_dashes(p, g, ny - g, nx - g, ny - g, s->scale);
    draw_dashes(p, g, g, g, ny - g, s->scale);
}

/* One pass over the markers of a kind that reach into the tile, as filled or stroked paths. Coordinates of the plane. */
static void mark_pass(const overlay_scene *s, const overlay_tile *tile, pen *p, int counted, double r, double line, ink i) {
    double reach = r + line + 2.0, x0 = (double)tile->x0 - reach, x1 = (double)(tile->x0 + tile->nx) + reach;
    double y0 = (double)tile->y0 - (double)s->plane_y - reach, y1 = y0 + (double)tile->ny + 2.0 * reach;
    size_t in_batch = 0;
    pen_ink(p, i);
    cairo_set_line_width(p->cr, line);
    for (size_t k = 0; k <= s->t->n_found; k++) {
        const feature *f = k < s->t->n_found ? &s->t->features[k] : NULL;
        if (f && f->in_guard == counted && f->x > x0 && f->x < x1 && f->y > y0 && f->y < y1) {
            if (counted) overlay_disc(p, f->x + 0.5, f->y + 0.5, r);
            else overlay_diamond(p, f->x + 0.5, f->y + 0.5, r);
            in_batch++;
        }
        if (in_batch < BATCH && f) continue;
        if (counted) cairo_fill(p->cr);
        else cairo_stroke(p->cr);
        in_batch = 0;
    }
}

static void draw_markers(const overlay_scene *s, const overlay_tile *tile, pen *p) {
    static const ink rim = { 0.08, 0.04, 0.0, 0.7 };
    double r = overlay_marker_radius_px(s->t, s->m->nx), k = s->scale;
    mark_pass(s, tile, p, 0, 1.35 * r + 0.8 * k, 3.0 * k, rim);
    mark_pass(s, tile, p, 0, 1.35 * r + 0.8 * k, 1.5 * k, FRAME_INK);
    mark_pass(s, tile, p, 1, r + 0.9 * k, 0.0, rim);
    mark_pass(s, tile, p, 1, r, 0.0, COUNTED_INK);
}

static void draw_ring(const overlay_scene *s, pen *p) {
    if (!isfinite(s->ring)) return;
    const feature *f = &s->t->features[s->ring_feature];
    static const double width[] = { 4.2, 2.0 };
    for (int k = 0; k < 2; k++) {
        overlay_disc(p, f->x + 0.5, f->y + 0.5, s->ring);
        cairo_set_line_width(p->cr, width[k] * s->scale);
        pen_ink(p, k ? PAPER_INK : (ink){ 0.0, 0.0, 0.0, 0.65 });
        cairo_stroke(p->cr);
    }
}

/* Everything of one tile; the pen's units are pixels of the picture. */
static status draw_tile(const overlay_scene *s, const overlay_tile *tile, pen *p, cairo_surface_t *surface, error *e) {
    size_t strip_top = s->m->strip ? s->m->strip_top : 0, strip = s->m->strip ? s->m->strip_rows : 0;
    size_t legend_y = s->m->ny + strip;
    cairo_identity_matrix(p->cr);
    pen_ink(p, PANEL_INK);
    cairo_paint(p->cr);
    cairo_surface_flush(surface);
    overlay_ground(s, tile);
    cairo_surface_mark_dirty(surface);
    cairo_translate(p->cr, -(double)tile->x0, -(double)tile->y0);
    status st = overlay_borders(s, tile, p, e);
    if (st) return st;
    cairo_save(p->cr);
    cairo_rectangle(p->cr, 0.0, (double)strip_top, (double)s->m->nx, (double)s->m->ny);
    cairo_clip(p->cr);
    cairo_translate(p->cr, 0.0, (double)strip_top);
    draw_guard(s, p);
    draw_ring(s, p); /* below the markers: it shall hide none */
    draw_markers(s, tile, p);
    cairo_restore(p->cr);
    if (tile->y0 + tile->ny > legend_y) overlay_legend(s, p, (double)legend_y, 1);
    return pen_check(p, e);
}

static status draw_tiles(const overlay_scene *s, palette *colours, overlay_picture *out, cairo_surface_t *surface, pen *p,
                         error *e) {
    status st = ST_OK;
    unsigned char *data = cairo_image_surface_get_data(surface);
    size_t stride = (size_t)cairo_image_surface_get_stride(surface);
    for (size_t y = 0; y < out->ny; y += TILE_NY)
        for (size_t x = 0; x < out->nx && !st; x += TILE_NX) {
            overlay_tile tile = { x, y, out->nx - x < TILE_NX ? out->nx - x : TILE_NX, out->ny - y < TILE_NY ? out->ny - y : TILE_NY,
                                  data, stride };
            st = draw_tile(s, &tile, p, surface, e);
            if (st) break;
            cairo_surface_flush(surface);
            for (size_t k = 0; k < tile.ny; k++)
                palette_index(colours, (const uint32_t *)(const void *)(data + k * stride), tile.nx, out->index + (y + k) * out->nx + x);
        }
    return st;
}

static status make_picture(const overlay_scene *s, cairo_surface_t *surface, pen *p, overlay_picture *out, error *e) {
    static const ink inks[] = { { 1.0, 0.706, 0.0, 1.0 }, { 1.0, 0.541, 0.847, 1.0 }, { 0.373, 0.816, 1.0, 1.0 }, { 0.588, 0.157, 0.059, 1.0 } };
    size_t legend = (size_t)overlay_legend(s, p, 0.0, 0);
    overlay_picture o = { .nx = s->m->nx, .plane_y = s->plane_y, .plane_ny = s->m->ny };
    o.ny = s->m->ny + (s->m->strip ? s->m->strip_rows : 0) + legend;
    palette *colours = mem_array(1, sizeof *colours);
    o.index = mem_array(o.ny, o.nx);
    status st = colours && o.index ? ST_OK : NO_MEMORY(e, "the overlay");
    if (!st) {
        palette_make(inks, sizeof inks / sizeof inks[0], colours);
        st = draw_tiles(s, colours, &o, surface, p, e);
    }
    if (st) {
        overlay_free(&o);
    } else {
        memcpy(o.palette, colours->colour, sizeof o.palette);
        *out = o;
    }
    free(colours);
    return st;
}

status overlay_draw(const micrograph *m, const texture *t, overlay_picture *out, error *e) {
    if (!m->px || !m->nx || !m->ny) return fail(e, ST_BAD_INPUT, "the overlay needs a picture, this one is empty");
    if (m->nx > LIMIT_PIXELS / m->ny) return fail(e, ST_NO_MEMORY, "the picture is too large for an overlay");
    if (t->cells && (t->nx != m->nx || t->ny != m->ny))
        return fail(e, ST_BUG, "cells of %zu x %zu px do not fit a picture of %zu x %zu px", t->nx, t->ny, m->nx, m->ny);
    overlay_scene s = { .m = m, .t = t, .scale = line_scale(m->nx), .plane_y = m->strip ? m->strip_top : 0 };
    s.em = fmax(11.0, 0.0205 * (double)m->nx); /* letters about 10 px high when the picture is looked at 520 px wide */
    double d = spacing_px(t);
    s.line = d > 0.0 ? fmax(1.0, fmin(s.scale, 0.05 * d)) : s.scale;
    s.seam = !(d < 14.0);
    status st = overlay_stretch(m, &s.low, &s.span, e);
    if (st) return st;
    place_ring(&s);
    int width = (int)(m->nx < TILE_NX ? m->nx : TILE_NX);
    cairo_surface_t *surface = cairo_image_surface_create(CAIRO_FORMAT_RGB24, width, TILE_NY);
    pen p = { 0 };
    st = pen_open(surface, &p, e);
    if (!st) st = make_picture(&s, surface, &p, out, e);
    pen_close(&p);
    cairo_surface_destroy(surface);
    return st;
}

/* Wafer maps on a sheet: small multiples with one scale of colours; every position carries its value, so that the colour is never
 * needed to read it. The circle lies outside the outermost position: the wafer's own edge is not known. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "report/sheet_priv.h"

static const double mm_per_pt = 25.4 / 72.0;

typedef struct {
    double lo, hi, radius_mm; /* of all wafers */
    size_t columns, rows;
    double side, row_height, bar; /* pt */
} wafer_layout;

static wafer_layout lay_wafers(const sheet_wafers *w, double width, double em) {
    wafer_layout l = { .lo = HUGE_VAL, .hi = -HUGE_VAL, .bar = 5.4 * em };
    for (size_t k = 0; k < w->n; k++)
        for (size_t i = 0; i < w->wafers[k].n; i++) {
            const sheet_wafer *one = &w->wafers[k];
            l.lo = fmin(l.lo, one->v[i]);
            l.hi = fmax(l.hi, one->v[i]);
            l.radius_mm = fmax(l.radius_mm, hypot(one->x_mm[i], one->y_mm[i]));
        }
    if (!(l.hi > l.lo)) {
        l.lo -= 0.5;
        l.hi += 0.5;
    }
    size_t fit = (size_t)fmax(1.0, floor((width - l.bar) / (11.0 * em)));
    l.columns = w->n < fit ? w->n : fit;
    l.rows = (w->n + l.columns - 1) / l.columns;
    l.side = fmin((width - l.bar) / (double)l.columns, 28.0 * em);
    l.row_height = l.side + 0.8 * em;
    return l;
}

static void draw_disc(sheet *s, double x, double y, ink i) {
    cairo_arc(s->pen.cr, x, y, 0.62 * s->em, 0.0, 2.0 * PI);
    pen_ink(&s->pen, i);
    cairo_fill_preserve(s->pen.cr);
    pen_ink(&s->pen, s->colours.ink);
    cairo_set_line_width(s->pen.cr, 0.08 * s->em);
    cairo_stroke(s->pen.cr);
}

static void draw_wafer(sheet *s, const sheet_wafer *w, const wafer_layout *l, double left, double top, error *e) {
    double em = s->em, r = 0.5 * l->side - 0.8 * em, cx = left + 0.5 * l->side, cy = top + 1.9 * em + r;
    double scale = l->radius_mm > 0.0 ? (r - 1.8 * em) / l->radius_mm : 0.0;
    sheet_box *taken = mem_array(w->n, 2 * sizeof *taken);
    if (!taken) {
        NO_MEMORY(e, "the wafer map");
        s->pen.failed = 1;
        return;
    }
    pen_ink(&s->pen, s->colours.ink);
    pen_text_within(&s->pen, cx, top + 1.2 * em, 0.5, l->side - em, w->name);
    pen_ink(&s->pen, s->colours.soft);
    cairo_set_line_width(s->pen.cr, 0.08 * em);
    sheet_dash(s, 1);
    cairo_arc(s->pen.cr, cx, cy, r, 0.0, 2.0 * PI);
    cairo_stroke(s->pen.cr);
    sheet_dash(s, 0);
    for (size_t i = 0; i < w->n; i++) {
        double x = cx + scale * w->x_mm[i], y = cy - scale * w->y_mm[i], half = 0.62 * em;
        draw_disc(s, x, y, sheet_ramp((w->v[i] - l->lo) / (l->hi - l->lo)));
        taken[w->n + i] = (sheet_box){ x - half, y - half, x + half, y + half };
    }
    for (size_t i = 0; i < w->n; i++) { /* unused boxes are empty */
        double x = cx + scale * w->x_mm[i], y = cy - scale * w->y_mm[i], width = pen_width(&s->pen, w->labels[i]);
        sheet_place_label(x, y, width, em, taken, 2 * w->n, &taken[i]);
        pen_ink(&s->pen, s->colours.ink);
        pen_text(&s->pen, taken[i].x0, taken[i].y1 - 0.14 * em, 0.0, w->labels[i]);
    }
    free(taken);
}

static void draw_wafer_bar(sheet *s, const sheet_wafers *w, const wafer_layout *l, double top) {
    double em = s->em, bottom = s->height - 2.2 * em, tick[AXES_TICKS], x = s->width - l->bar + 0.4 * em;
    axes bar = { .top = top + 1.2 * em, .bottom = bottom, .y_lo = l->lo, .y_hi = l->hi };
    size_t n = axes_y_ticks(&bar, (bottom - bar.top) / (2.6 * em), tick);
    sheet_draw_ramp(s, x, bar.top, 0.9 * em, bottom);
    for (size_t i = 0; i < n; i++) {
        double y = axes_y(&bar, tick[i]);
        cairo_move_to(s->pen.cr, x + 0.9 * em, y);
        cairo_line_to(s->pen.cr, x + 1.2 * em, y);
        cairo_stroke(s->pen.cr);
        sheet_number(s, x + 1.4 * em, y + 0.36 * em, 0.0, tick[i]);
    }
    pen_ink(&s->pen, s->colours.ink);
    cairo_save(s->pen.cr);
    cairo_translate(s->pen.cr, s->width - 0.4 * em, 0.5 * (bar.top + bottom));
    cairo_rotate(s->pen.cr, -0.5 * PI);
    pen_text_within(&s->pen, 0.0, 0.0, 0.5, bottom - bar.top + 2.0 * em, w->label);
    cairo_restore(s->pen.cr);
}

status sheet_draw_wafers(const sheet_wafers *w, const sheet_options *o, char **bytes, size_t *n, error *e) {
    sheet s = { 0 };
    double title = o->titled ? 1.8 * o->text_pt : 0.0, em = o->text_pt;
    wafer_layout l = lay_wafers(w, o->width_mm / mm_per_pt, em);
    status st = sheet_open(o, ((double)l.rows * l.row_height + title + 2.0 * em) * mm_per_pt, &s, e);
    if (!st) {
        char note[96], number[NUMBER_TEXT];
        double top = sheet_title(&s, w->title);
        for (size_t k = 0; k < w->n; k++)
            draw_wafer(&s, &w->wafers[k], &l, (double)(k % l.columns) * l.side, top + (double)(k / l.columns) * l.row_height, e);
        draw_wafer_bar(&s, w, &l, top);
        snprintf(note, sizeof note, "outermost position at %s mm; dashed: not the wafer's edge", number_text(l.radius_mm, 4, number));
        pen_ink(&s.pen, s.colours.soft);
        pen_text_within(&s.pen, 0.6 * em, s.height - 0.8 * em, 0.0, s.width - em, note);
        st = sheet_finish(&s, w->title, w->description, bytes, n, e);
    }
    sheet_close(&s);
    return st;
}

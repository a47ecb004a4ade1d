/* A `plot` on a sheet: laid out by the widths of its own labels, then drawn back to front: cells, target, grid, bands, curves,
 * points, frame. Ranges and ticks are those of report/axes.c, as on the page. */
#include <math.h>
#include <string.h>

#include "base/quantity.h"
#include "report/sheet_priv.h"

/* ---- layout ---- */

static size_t y_ticks(const sheet_scene *c, double tick[AXES_TICKS]) {
    return axes_y_ticks(&c->a, (c->a.bottom - c->a.top) / (1.8 * c->s->em), tick);
}

static double tick_width(sheet_scene *c) {
    double tick[AXES_TICKS], widest = 0.0;
    size_t n = y_ticks(c, tick);
    for (size_t i = 0; i < n; i++) widest = fmax(widest, sheet_number_width(c->s, tick[i]));
    return widest;
}

/* Names stand level when all fit side by side, else turned by 40 degrees and thinned so that they never touch; the last one is
 * always there. */
static const double turn = 40.0 * PI / 180.0;
static void place_names(sheet_scene *c, double width) {
    double em = c->s->em, slot = width / ((double)c->p->n_names + 0.2), widest = 0.0;
    for (size_t i = 0; i < c->p->n_names; i++)
        widest = fmax(widest, pen_width_within(&c->s->pen, 9.0 * em, c->p->names[i] ? c->p->names[i] : ""));
    c->name_step = 1;
    c->turned = 0.0;
    if (widest + 0.8 * em <= slot) return;
    c->turned = widest;
    c->name_step = (size_t)fmax(1.0, ceil(1.25 * em / sin(turn) / slot));
}

static int lay_out(sheet_scene *c) {
    sheet *s = c->s;
    double em = s->em, top = sheet_title(s, c->p->title);
    axes *a = &c->a;
    double legend = sheet_legend(s, c->p, 0.6 * em, s->width - 0.6 * em, top + 0.3 * em, 1);
    *a = (axes){ .left = 4.0 * em, .right = s->width - 1.6 * em, .top = top + 0.3 * em + legend, .bottom = s->height - 3.6 * em };
    if (!axes_find(c->p, a)) return 0;
    if (c->cells) {
        const sheet_cells *g = c->cells;
        double dx = g->nx > 1 ? 0.5 * (g->x[1] - g->x[0]) : 1.0, dy = g->ny > 1 ? 0.5 * (g->y[1] - g->y[0]) : 1.0;
        a->x_lo = g->x[0] - dx;
        a->x_hi = g->x[g->nx - 1] + dx;
        a->y_lo = g->y[0] - dy;
        a->y_hi = g->y[g->ny - 1] + dy;
        a->right -= 5.2 * em;
    }
    a->left = tick_width(c) + 2.6 * em;
    if (c->p->names) {
        place_names(c, a->right - a->left);
        a->bottom = s->height - (c->turned > 0.0 ? 2.6 * em + c->turned * sin(turn) + 0.8 * em * cos(turn) : 3.6 * em);
    }
    return 1;
}

/* ---- cells ---- */

static void cell_range(sheet_scene *c) {
    c->cell_lo = HUGE_VAL;
    c->cell_hi = -HUGE_VAL;
    for (size_t i = 0; i < c->cells->nx * c->cells->ny; i++) {
        double v = c->cells->v[i];
        if (!isfinite(v) || !(v > 0.0)) continue;
        c->cell_lo = fmin(c->cell_lo, log10(v));
        c->cell_hi = fmax(c->cell_hi, log10(v));
    }
    if (!isfinite(c->cell_lo)) c->cell_lo = c->cell_hi = 0.0;
    if (!(c->cell_hi > c->cell_lo)) c->cell_hi = c->cell_lo + 1.0;
}

/* Each cell is many equal dots of a small picture, so that no viewer smooths one into the next or leaves seams between them. */
static void draw_cells(sheet_scene *c) {
    enum { DOTS = 12 };
    const sheet_cells *g = c->cells;
    int nx = (int)g->nx * DOTS, ny = (int)g->ny * DOTS;
    cairo_surface_t *image = cairo_image_surface_create(CAIRO_FORMAT_RGB24, nx, ny);
    if (cairo_surface_status(image)) {
        c->s->pen.failed = 1;
        cairo_surface_destroy(image);
        return;
    }
    cairo_surface_flush(image);
    unsigned char *data = cairo_image_surface_get_data(image);
    size_t stride = (size_t)cairo_image_surface_get_stride(image);
    for (size_t y = 0; y < (size_t)ny; y++)
        for (size_t x = 0; x < (size_t)nx; x++) {
            double v = g->v[(g->ny - 1 - y / DOTS) * g->nx + x / DOTS];
            ink i = isfinite(v) && v > 0.0 ? sheet_ramp((log10(v) - c->cell_lo) / (c->cell_hi - c->cell_lo)) : c->s->colours.faint;
            uint32_t dot = (uint32_t)lround(255.0 * i.r) << 16 | (uint32_t)lround(255.0 * i.g) << 8 | (uint32_t)lround(255.0 * i.b);
            memcpy(data + y * stride + 4 * x, &dot, sizeof dot);
        }
    cairo_surface_mark_dirty(image);
    cairo_t *cr = c->s->pen.cr;
    cairo_save(cr);
    cairo_translate(cr, c->a.left, c->a.top);
    cairo_scale(cr, (c->a.right - c->a.left) / nx, (c->a.bottom - c->a.top) / ny);
    cairo_set_source_surface(cr, image, 0.0, 0.0);
    cairo_pattern_set_filter(cairo_get_source(cr), CAIRO_FILTER_NEAREST);
    cairo_paint(cr);
    cairo_restore(cr);
    cairo_surface_destroy(image);
}

static void draw_bar(sheet_scene *c) {
    sheet *s = c->s;
    double em = s->em, x = c->a.right + 1.2 * em, tick[AXES_TICKS];
    axes bar = { .top = c->a.top, .bottom = c->a.bottom, .y_lo = c->cell_lo, .y_hi = c->cell_hi, .log_y = 1 };
    size_t n = axes_y_ticks(&bar, 0.0, tick);
    sheet_draw_ramp(s, x, bar.top, 0.9 * em, bar.bottom);
    for (size_t i = 0; i < n; i++) {
        double y = axes_y(&bar, tick[i]);
        cairo_move_to(s->pen.cr, x + 0.9 * em, y);
        cairo_line_to(s->pen.cr, x + 1.2 * em, y);
        cairo_stroke(s->pen.cr);
        pen_ink(&s->pen, s->colours.soft);
        sheet_number(s, x + 1.4 * em, y + 0.36 * em, 0.0, tick[i]);
    }
    pen_ink(&s->pen, s->colours.ink);
    cairo_save(s->pen.cr);
    cairo_translate(s->pen.cr, s->width - 0.5 * em, 0.5 * (bar.top + bar.bottom));
    cairo_rotate(s->pen.cr, -0.5 * PI);
    pen_text_within(&s->pen, 0.0, 0.0, 0.5, bar.bottom - bar.top, c->cells->label);
    cairo_restore(s->pen.cr);
}

/* ---- axes ---- */

/* Unlabelled ticks at 2 to 9 times the powers of ten. */
static void draw_minor(sheet_scene *c) {
    if (!c->a.log_y) return;
    for (double d = floor(c->a.y_lo); d <= c->a.y_hi; d += 1.0)
        for (int k = 2; k < 10; k++) {
            double l = d + log10(k);
            if (l < c->a.y_lo || l > c->a.y_hi) continue;
            double y = axes_y(&c->a, pow(10.0, l));
            sheet_line(c, c->a.left, y, c->a.left - 0.22 * c->s->em, y);
        }
}

static void draw_grid(sheet_scene *c) {
    double tick[AXES_TICKS];
    size_t n = y_ticks(c, tick);
    pen_ink(&c->s->pen, c->s->colours.faint);
    cairo_set_line_width(c->s->pen.cr, 0.05 * c->s->em);
    for (size_t i = 0; i < n; i++) sheet_line(c, c->a.left, axes_y(&c->a, tick[i]), c->a.right, axes_y(&c->a, tick[i]));
}

static void draw_y_axis(sheet_scene *c) {
    sheet *s = c->s;
    double em = s->em, tick[AXES_TICKS];
    size_t n = y_ticks(c, tick);
    pen_ink(&s->pen, s->colours.ink);
    cairo_set_line_width(s->pen.cr, 0.08 * em);
    for (size_t i = 0; i < n; i++) {
        double y = axes_y(&c->a, tick[i]);
        sheet_line(c, c->a.left, y, c->a.left - 0.4 * em, y);
        sheet_number(s, c->a.left - 0.6 * em, y + 0.36 * em, 1.0, tick[i]);
    }
    draw_minor(c);
    cairo_save(s->pen.cr);
    cairo_translate(s->pen.cr, 1.1 * em, 0.5 * (c->a.top + c->a.bottom));
    cairo_rotate(s->pen.cr, -0.5 * PI);
    pen_text_within(&s->pen, 0.0, 0.0, 0.5, c->a.bottom - c->a.top + em, c->p->y_label);
    cairo_restore(s->pen.cr);
}

static void draw_names(sheet_scene *c) {
    sheet *s = c->s;
    double em = s->em;
    for (size_t i = 0; i < c->p->n_names; i++) {
        double x = axes_x(&c->a, (double)i);
        const char *name = c->p->names[i] ? c->p->names[i] : "";
        sheet_line(c, x, c->a.bottom, x, c->a.bottom + 0.3 * em);
        if ((c->p->n_names - 1 - i) % c->name_step) continue;
        if (!(c->turned > 0.0)) {
            pen_text_within(&s->pen, x, c->a.bottom + 1.4 * em, 0.5, 9.0 * em, name);
            continue;
        }
        cairo_save(s->pen.cr);
        cairo_translate(s->pen.cr, x + 0.3 * em, c->a.bottom + 1.0 * em);
        cairo_rotate(s->pen.cr, -turn);
        pen_text_within(&s->pen, 0.0, 0.0, 1.0, 9.0 * em, name);
        cairo_restore(s->pen.cr);
    }
}

static void draw_x_axis(sheet_scene *c) {
    sheet *s = c->s;
    double em = s->em, tick[AXES_TICKS];
    pen_ink(&s->pen, s->colours.ink);
    cairo_set_line_width(s->pen.cr, 0.08 * em);
    if (c->p->names) {
        draw_names(c);
    } else {
        size_t n = axes_x_ticks(&c->a, (c->a.right - c->a.left) / (3.6 * em), tick);
        for (size_t i = 0; i < n; i++) {
            double x = axes_x(&c->a, tick[i]);
            sheet_line(c, x, c->a.bottom, x, c->a.bottom + 0.4 * em);
            sheet_number(s, x, c->a.bottom + 1.45 * em, 0.5, tick[i]);
        }
    }
    pen_text_within(&s->pen, 0.5 * (c->a.left + c->a.right), s->height - 0.7 * em, 0.5, s->width - em, c->p->x_label);
    cairo_rectangle(s->pen.cr, c->a.left, c->a.top, c->a.right - c->a.left, c->a.bottom - c->a.top);
    cairo_stroke(s->pen.cr);
}

static void draw_content(sheet_scene *c) {
    cairo_t *cr = c->s->pen.cr;
    cairo_save(cr);
    cairo_rectangle(cr, c->a.left, c->a.top, c->a.right - c->a.left, c->a.bottom - c->a.top);
    cairo_clip(cr);
    if (c->cells) draw_cells(c);
    else draw_grid(c);
    sheet_draw_target(c);
    cairo_restore(cr);
    draw_y_axis(c);
    draw_x_axis(c);
    cairo_save(cr);
    cairo_rectangle(cr, c->a.left - c->s->line, c->a.top - c->s->line, c->a.right - c->a.left + 2.0 * c->s->line,
                    c->a.bottom - c->a.top + 2.0 * c->s->line);
    cairo_clip(cr);
    sheet_draw_series(c);
    cairo_restore(cr);
}

/* What suits the width, with room for the legend's further rows. */
static status find_height(const plot *p, const sheet_options *o, double *height_mm, error *e) {
    sheet s = { 0 };
    double base = o->width_mm > 130.0 ? 0.5 * o->width_mm : fmax(0.62 * o->width_mm, 20.0);
    status st = sheet_open(o, base, &s, e);
    if (!st) {
        double legend = sheet_legend(&s, p, 0.6 * s.em, s.width - 0.6 * s.em, 0.0, 0);
        *height_mm = base + fmax(0.0, legend - 1.8 * s.em) * 25.4 / 72.0;
        st = pen_check(&s.pen, e);
    }
    sheet_close(&s);
    return st;
}

status sheet_plot(const plot *p, const sheet_cells *cells, const sheet_options *o, char **bytes, size_t *n, error *e) {
    sheet s = { 0 };
    double height_mm = 0.0;
    status st = find_height(p, o, &height_mm, e);
    if (!st) st = sheet_open(o, height_mm, &s, e);
    if (!st) {
        sheet_scene c = { .s = &s, .p = p, .cells = cells };
        if (!lay_out(&c)) {
            pen_ink(&s.pen, s.colours.soft);
            pen_text(&s.pen, 0.5 * s.width, 0.5 * s.height, 0.5, "no values to draw");
        } else {
            if (cells) cell_range(&c);
            draw_content(&c);
            if (cells) draw_bar(&c);
        }
        st = sheet_finish(&s, p->title, p->description ? p->description : p->title, bytes, n, e);
    }
    sheet_close(&s);
    return st;
}

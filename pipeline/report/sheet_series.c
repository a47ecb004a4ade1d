/* What a plot shows within its frame, back to front: target, bands, histograms, curves, rules, points and their names. */
#include <math.h>

#include "base/quantity.h"
#include "report/sheet_priv.h"

void sheet_line(sheet_scene *c, double x0, double y0, double x1, double y1) {
    cairo_move_to(c->s->pen.cr, x0, y0);
    cairo_line_to(c->s->pen.cr, x1, y1);
    cairo_stroke(c->s->pen.cr);
}

void sheet_draw_target(sheet_scene *c) {
    const plot *p = c->p;
    sheet *s = c->s;
    if (!isfinite(p->target_lo) && !isfinite(p->target_hi)) return;
    double top = isfinite(p->target_hi) ? axes_y(&c->a, p->target_hi) : c->a.top;
    double bottom = isfinite(p->target_lo) ? axes_y(&c->a, p->target_lo) : c->a.bottom;
    ink t = s->colours.target;
    cairo_rectangle(s->pen.cr, c->a.left, top, c->a.right - c->a.left, fmax(0.0, bottom - top));
    pen_ink(&s->pen, (ink){ t.r, t.g, t.b, 0.14 });
    cairo_fill(s->pen.cr);
    sheet_dash(s, 1);
    cairo_set_line_width(s->pen.cr, 0.6 * s->line);
    pen_ink(&s->pen, t);
    if (isfinite(p->target_hi)) sheet_line(c, c->a.left, top, c->a.right, top);
    if (isfinite(p->target_lo)) sheet_line(c, c->a.left, bottom, c->a.right, bottom);
    sheet_dash(s, 0);
}

/* One closed area for each unbroken run of lo..hi. */
static void draw_band(sheet_scene *c, const plot_series *q) {
    cairo_t *cr = c->s->pen.cr;
    for (size_t from = 0, to; from < q->n; from = to + 1) {
        for (to = from; to < q->n && axes_in_band(q, to);) to++;
        if (to - from < 2) continue;
        for (size_t i = from; i < to; i++) cairo_line_to(cr, axes_x(&c->a, q->x[i]), axes_y(&c->a, q->hi[i]));
        for (size_t i = to; i-- > from;) cairo_line_to(cr, axes_x(&c->a, q->x[i]), axes_y(&c->a, q->lo[i]));
        cairo_close_path(cr);
    }
    ink t = c->s->colours.tone[q->tone];
    pen_ink(&c->s->pen, (ink){ t.r, t.g, t.b, c->bands > 2 ? 0.09 : c->bands > 1 ? 0.15 : 0.22 });
    cairo_fill(cr);
}

/* -1 below the axis, 1 above it. */
static int beyond(const axes *a, double y) {
    if (axes_below(a, y)) return -1;
    return (a->log_y ? log10(y) : y) > a->y_hi;
}

/* A stretch of the curve beyond the axis is not drawn along its edge: that would look like values. */
static void draw_curve(sheet_scene *c, const plot_series *q) {
    cairo_t *cr = c->s->pen.cr;
    int down = 0, was = 0;
    for (size_t i = 0; i < q->n; i++) {
        if (!isfinite(q->x[i]) || !isfinite(q->y[i])) {
            down = 0;
            continue;
        }
        int out = beyond(&c->a, q->y[i]);
        double x = axes_x(&c->a, q->x[i]), y = axes_y(&c->a, q->y[i]);
        if (down && !(out && out == was)) cairo_line_to(cr, x, y);
        else cairo_move_to(cr, x, y);
        down = 1;
        was = out;
    }
    if (c->cells) { /* an edge in the colour of the paper, for the cells have all colours */
        cairo_set_line_width(cr, 2.2 * c->s->line);
        pen_ink(&c->s->pen, c->s->colours.paper);
        cairo_stroke_preserve(cr);
    }
    sheet_dash(c->s, q->style == PLOT_DASHED ? 1 : q->style == PLOT_DOTTED ? 2 : 0);
    cairo_set_line_width(cr, c->s->line);
    pen_ink(&c->s->pen, c->s->colours.tone[q->tone]);
    cairo_stroke(cr);
    sheet_dash(c->s, 0);
}

/* The outline of the bins and the area below it; outlines of several samples differ by their dashes too. */
static void draw_steps(sheet_scene *c, const plot_series *q) {
    cairo_t *cr = c->s->pen.cr;
    double half = 0.5 * axes_bin_step(q), floor_y = axes_y(&c->a, c->a.y_lo);
    if (!q->n) return;
    cairo_move_to(cr, axes_x(&c->a, q->x[0] - half), floor_y);
    for (size_t i = 0; i < q->n; i++) {
        double y = axes_y(&c->a, isfinite(q->y[i]) ? q->y[i] : c->a.y_lo);
        cairo_line_to(cr, axes_x(&c->a, q->x[i] - half), y);
        cairo_line_to(cr, axes_x(&c->a, q->x[i] + half), y);
    }
    cairo_line_to(cr, axes_x(&c->a, q->x[q->n - 1] + half), floor_y);
    ink t = c->s->colours.tone[q->tone];
    pen_ink(&c->s->pen, (ink){ t.r, t.g, t.b, 0.16 });
    cairo_fill_preserve(cr);
    sheet_dash(c->s, q->tone % 4);
    cairo_set_line_width(cr, 0.85 * c->s->line);
    pen_ink(&c->s->pen, t);
    cairo_stroke(cr);
    sheet_dash(c->s, 0);
}

/* Labels stand along their rules, from the top down, on the side where there is room. */
static void draw_rules(sheet_scene *c) {
    sheet *s = c->s;
    double em = s->em;
    for (size_t k = 0; k < c->p->n_rules; k++) {
        const plot_rule *r = &c->p->rules[k];
        double x = axes_x(&c->a, r->at);
        if (!(x >= c->a.left && x <= c->a.right)) continue;
        pen_ink(&s->pen, s->colours.tone[r->tone]);
        cairo_set_line_width(s->pen.cr, 0.7 * s->line);
        sheet_dash(s, 3);
        sheet_line(c, x, c->a.top, x, c->a.bottom);
        sheet_dash(s, 0);
        if (!r->label) continue;
        cairo_save(s->pen.cr);
        cairo_translate(s->pen.cr, x + (x + 1.3 * em > c->a.right ? -0.35 : 1.05) * em, c->a.top + 0.4 * em);
        cairo_rotate(s->pen.cr, -0.5 * PI);
        double width = pen_width_within(&s->pen, c->a.bottom - c->a.top, r->label);
        cairo_rectangle(s->pen.cr, -width - 0.1 * em, -0.85 * em, width + 0.2 * em, 1.1 * em);
        pen_ink(&s->pen, (ink){ s->colours.paper.r, s->colours.paper.g, s->colours.paper.b, 0.75 });
        cairo_fill(s->pen.cr);
        pen_ink(&s->pen, s->colours.ink);
        pen_text_within(&s->pen, 0.0, 0.0, 1.0, c->a.bottom - c->a.top, r->label);
        cairo_restore(s->pen.cr);
    }
}

static int is_shown(const plot_series *q, size_t i) { return isfinite(q->x[i]) && isfinite(q->y[i]); }

static void draw_points(sheet_scene *c, const plot_series *q) {
    sheet *s = c->s;
    double r = c->p->names && c->p->n_names > 40 ? 0.26 * s->em : 0.34 * s->em, cap = 0.3 * s->em;
    for (size_t i = 0; i < q->n; i++) {
        if (!is_shown(q, i)) continue;
        double x = axes_x(&c->a, q->x[i]);
        if (q->lo && q->hi && axes_in_band(q, i)) {
            double top = axes_y(&c->a, q->hi[i]), bottom = axes_y(&c->a, q->lo[i]);
            pen_ink(&s->pen, s->colours.soft);
            cairo_set_line_width(s->pen.cr, 0.6 * s->line);
            sheet_line(c, x, top, x, bottom);
            sheet_line(c, x - cap, top, x + cap, top);
            sheet_line(c, x - cap, bottom, x + cap, bottom);
        }
        sheet_mark(s, q->marks ? q->marks[i] : MARK_DISC, x, axes_y(&c->a, q->y[i]), r);
    }
}

enum { MOST_NAMED = 32, MOST_BOXES = 640 };

typedef struct {
    sheet_box box[MOST_BOXES];
    size_t n;
} boxes;

static void take(boxes *t, double x, double y, double r) {
    if (t->n < MOST_BOXES - MOST_NAMED) t->box[t->n++] = (sheet_box){ x - r, y - r, x + r, y + r };
}

/* Where the curves run, in steps of half a letter. */
static void take_curve(const sheet_scene *c, const plot_series *q, boxes *t) {
    double em = c->s->em;
    for (size_t i = 1; i < q->n; i++) {
        if (!is_shown(q, i - 1) || !is_shown(q, i)) continue;
        double x0 = axes_x(&c->a, q->x[i - 1]), y0 = axes_y(&c->a, q->y[i - 1]), x1 = axes_x(&c->a, q->x[i]), y1 = axes_y(&c->a, q->y[i]);
        double steps = fmin(64.0, ceil(hypot(x1 - x0, y1 - y0) / (0.5 * em)));
        for (double k = 0.0; k < steps; k += 1.0) take(t, x0 + (x1 - x0) * k / steps, y0 + (y1 - y0) * k / steps, 0.15 * em);
    }
}

static void draw_point_name(sheet_scene *c, double x, double y, const char *name, boxes *t) {
    sheet *s = c->s;
    double em = s->pen.em, width = pen_width_within(&s->pen, 10.0 * em, name);
    sheet_box b;
    if (sheet_place_label(x, y, width, em, t->box, t->n, &b) > 0.0 || b.x0 < c->a.left || b.x1 > c->a.right) return;
    cairo_rectangle(s->pen.cr, b.x0 - 0.15 * em, b.y0, width + 0.3 * em, em * 1.05);
    pen_ink(&s->pen, (ink){ s->colours.paper.r, s->colours.paper.g, s->colours.paper.b, 0.72 });
    cairo_fill(s->pen.cr);
    pen_ink(&s->pen, s->colours.ink);
    pen_text_within(&s->pen, b.x0, b.y1 - 0.14 * em, 0.0, 10.0 * em, name);
    if (t->n < MOST_BOXES) t->box[t->n++] = b;
}

/* Names beside points, where nothing is hidden by them. */
static void draw_point_names(sheet_scene *c) {
    boxes t = { .n = 0 };
    size_t points = 0;
    for (size_t k = 0; k < c->p->n_series; k++) {
        const plot_series *q = &c->p->series[k];
        for (size_t i = 0; q->style == PLOT_POINTS && i < q->n; i++) {
            if (!is_shown(q, i)) continue;
            take(&t, axes_x(&c->a, q->x[i]), axes_y(&c->a, q->y[i]), 0.5 * c->s->em);
            points += q->point_names != NULL;
        }
    }
    if (!points || points > MOST_NAMED) return; /* too many to name any */
    for (size_t k = 0; k < c->p->n_series; k++)
        if (c->p->series[k].style <= PLOT_DOTTED) take_curve(c, &c->p->series[k], &t);
    pen_em(&c->s->pen, 0.85 * c->s->em);
    for (size_t k = 0; k < c->p->n_series; k++) {
        const plot_series *q = &c->p->series[k];
        for (size_t i = 0; q->style == PLOT_POINTS && q->point_names && i < q->n; i++)
            if (is_shown(q, i) && q->point_names[i] && *q->point_names[i])
                draw_point_name(c, axes_x(&c->a, q->x[i]), axes_y(&c->a, q->y[i]), q->point_names[i], &t);
    }
    pen_em(&c->s->pen, c->s->em);
}

static int has_band(const plot_series *q) { return q->style != PLOT_POINTS && q->style != PLOT_STEPS && q->lo && q->hi; }

void sheet_draw_series(sheet_scene *c) {
    for (size_t k = 0; k < c->p->n_series; k++) c->bands += (size_t)has_band(&c->p->series[k]);
    for (size_t k = 0; k < c->p->n_series; k++)
        if (has_band(&c->p->series[k])) draw_band(c, &c->p->series[k]);
    for (size_t k = 0; k < c->p->n_series; k++)
        if (c->p->series[k].style == PLOT_STEPS) draw_steps(c, &c->p->series[k]);
    for (int style = PLOT_LINE; style <= PLOT_DOTTED; style++) /* broken lines over whole ones, that neither hides the other */
        for (size_t k = 0; k < c->p->n_series; k++)
            if ((int)c->p->series[k].style == style) draw_curve(c, &c->p->series[k]);
    draw_rules(c);
    for (size_t k = 0; k < c->p->n_series; k++)
        if (c->p->series[k].style == PLOT_POINTS) draw_points(c, &c->p->series[k]);
    draw_point_names(c);
}

/* The legend of a plot: samples of the lines and marks with their labels, set one after the other and broken into rows. */
#include <math.h>

#include "report/sheet_priv.h"

static double sign_width(const sheet *s, const plot_series *q) { return (q->style == PLOT_POINTS ? 0.9 : 2.4) * s->em; }

static int pattern_of(const plot_series *q) { return q->style == PLOT_DASHED ? 1 : q->style == PLOT_DOTTED ? 2 : 0; }

static void swatch(sheet *s, double x, double y, double width, ink i, double a) {
    cairo_rectangle(s->pen.cr, x, y - 0.35 * s->em, width, 0.7 * s->em);
    pen_ink(&s->pen, (ink){ i.r, i.g, i.b, a });
    cairo_fill(s->pen.cr);
}

static void draw_sign(sheet *s, const plot_series *q, double x, double y) {
    double width = sign_width(s, q);
    ink tone = s->colours.tone[q->tone];
    if (q->style == PLOT_POINTS) {
        sheet_mark(s, q->marks ? q->marks[0] : MARK_DISC, x + 0.5 * width, y, 0.32 * s->em);
        return;
    }
    if ((q->lo && q->hi) || q->style == PLOT_STEPS) swatch(s, x, y, width, tone, 0.2);
    cairo_move_to(s->pen.cr, x, y);
    cairo_line_to(s->pen.cr, x + width, y);
    sheet_dash(s, q->style == PLOT_STEPS ? q->tone % 4 : pattern_of(q));
    cairo_set_line_width(s->pen.cr, s->line);
    pen_ink(&s->pen, tone);
    cairo_stroke(s->pen.cr);
    sheet_dash(s, 0);
}

static void draw_target_sign(sheet *s, double x, double y, double width) {
    swatch(s, x, y, width, s->colours.target, 0.14);
    for (int k = -1; k <= 1; k += 2) {
        cairo_move_to(s->pen.cr, x, y + 0.35 * k * s->em);
        cairo_line_to(s->pen.cr, x + width, y + 0.35 * k * s->em);
    }
    sheet_dash(s, 1);
    cairo_set_line_width(s->pen.cr, 0.6 * s->line);
    pen_ink(&s->pen, s->colours.target);
    cairo_stroke(s->pen.cr);
    sheet_dash(s, 0);
}

double sheet_legend(sheet *s, const plot *p, double left, double right, double top, int draw) {
    double row = 1.5 * s->em, x = left, y = top + 0.5 * row;
    int any = 0, target = p->target_label && (isfinite(p->target_lo) || isfinite(p->target_hi));
    for (size_t k = 0; k < p->n_series + (size_t)target && !p->no_legend; k++) {
        const plot_series *q = k < p->n_series ? &p->series[k] : NULL;
        const char *label = q ? q->label : p->target_label;
        if (!label || (q && !q->n)) continue;
        double sign = q ? sign_width(s, q) : 2.4 * s->em, room = fmax(right - left - sign - 0.4 * s->em, s->em);
        double width = sign + 0.4 * s->em + pen_width_within(&s->pen, room, label);
        if (x > left && x + width > right) {
            x = left;
            y += row;
        }
        if (draw && q) draw_sign(s, q, x, y);
        else if (draw) draw_target_sign(s, x, y, sign);
        if (draw) {
            pen_ink(&s->pen, s->colours.ink);
            pen_text_within(&s->pen, x + sign + 0.4 * s->em, y + 0.36 * s->em, 0.0, room, label);
        }
        x += width + 1.3 * s->em;
        any = 1;
    }
    return any ? y + 0.5 * row + 0.3 * s->em - top : 0.4 * s->em;
}

/* A chart is laid out once (frame, scales) and drawn back to front: target range, grid, bands, lines, points, labels.
 * Only what the report needs: linear and logarithmic y, numeric or named x. Coordinates are written with a tenth of a
 * pixel; numbers a person reads go through number_text. */
#include "report/plot.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/number.h"
#include "report/axes_priv.h"
#include "report/html.h"

static const char *const tone_colour[PLOT_TONES] = { "var(--blue,#1660a8)", "var(--amber,#a85d00)",
                                                     "var(--grey,#6b7280)", "var(--teal,#00756a)", "var(--violet,#7a3fa0)" };
#define INK "var(--ink,#1b2430)"
#define FAINT "var(--rule,#d5dbe3)"
#define SOFT "var(--soft,#56606e)"

static int lay_out(const plot *p, axes *f) {
    *f = (axes){
        .left = 58, .right = p->width - 20.0, .top = p->no_legend ? 30 : 50, .bottom = p->height - (p->names ? 60.0 : 46.0)
    };
    return axes_find(p, f);
}

static void draw_text(textbuf *out, double x, double y, const char *anchor, const char *colour,
                      const char *more, const char *text) {
    text_addf(out, "<text x=\"%.1f\" y=\"%.1f\" text-anchor=\"%s\" style=\"fill:%s\"%s>", x, y, anchor,
              colour, more);
    html_text(out, text);
    text_add(out, "</text>\n");
}

static void draw_line(textbuf *out, double x0, double y0, double x1, double y1, const char *colour,
                      const char *more) {
    text_addf(out, "<line x1=\"%.1f\" y1=\"%.1f\" x2=\"%.1f\" y2=\"%.1f\" style=\"stroke:%s\"%s/>\n", x0, y0,
              x1, y1, colour, more);
}

static void draw_target(const plot *p, const axes *f, textbuf *out) {
    if (!isfinite(p->target_lo) && !isfinite(p->target_hi)) return;
    double top = isfinite(p->target_hi) ? axes_y(f, p->target_hi) : f->top;
    double bottom = isfinite(p->target_lo) ? axes_y(f, p->target_lo) : f->bottom;
    text_addf(out,
              "<rect x=\"%.1f\" y=\"%.1f\" width=\"%.1f\" height=\"%.1f\" style=\"fill:%s\" "
              "fill-opacity=\"0.13\"/>\n",
              f->left, top, f->right - f->left, fmax(0.0, bottom - top), tone_colour[3]);
    const char *dash = " stroke-width=\"1.2\" stroke-dasharray=\"7 4\"";
    if (isfinite(p->target_hi)) draw_line(out, f->left, top, f->right, top, tone_colour[3], dash);
    if (isfinite(p->target_lo)) draw_line(out, f->left, bottom, f->right, bottom, tone_colour[3], dash);
}

static void draw_y_axis(const plot *p, const axes *f, textbuf *out) {
    double tick[AXES_TICKS];
    char number[NUMBER_TEXT];
    size_t n = axes_y_ticks(f, (f->bottom - f->top) / 34.0, tick);
    for (size_t i = 0; i < n; i++) {
        double y = axes_y(f, tick[i]);
        draw_line(out, f->left, y, f->right, y, FAINT, "");
        draw_text(out, f->left - 7, y + 4, "end", SOFT, "", number_text(tick[i], 6, number));
    }
    double middle = 0.5 * (f->top + f->bottom);
    text_addf(out,
              "<text transform=\"translate(15 %.1f) rotate(-90)\" text-anchor=\"middle\" style=\"fill:%s\">",
              middle, INK);
    html_text(out, p->y_label);
    text_add(out, "</text>\n");
}

enum { NAME_LETTERS = 18 };

static double name_width(const plot *p) {
    size_t most = 0;
    for (size_t i = 0; i < p->n_names; i++) {
        size_t n = p->names[i] ? strlen(p->names[i]) : 0;
        if (n > most) most = n;
    }
    return 7.2 * (double)(most < NAME_LETTERS ? most : NAME_LETTERS) + 14.0;
}

/* Two rows of names when one is too narrow, then thinned so that two never touch; the last one is always there. */
static void draw_names(const plot *p, const axes *f, textbuf *out) {
    double slot = (f->right - f->left) / ((double)p->n_names + 0.2), width = name_width(p);
    size_t rows = slot < width ? 2 : 1, step = (size_t)fmax(1.0, ceil(width / (slot * (double)rows)));
    for (size_t i = 0; i < p->n_names; i++) {
        size_t back = p->n_names - 1 - i, row = back / step % rows;
        double x = axes_x(f, (double)i), end = f->bottom + (back % step ? 3.0 : 6.0 + 15.0 * (double)row);
        draw_line(out, x, f->bottom, x, end, back % step || !row ? SOFT : FAINT, "");
        if (back % step) continue;
        const char *name = p->names[i] ? p->names[i] : "";
        textbuf cut = { 0 };
        size_t keep = html_fit(name, NAME_LETTERS);
        text_add_n(&cut, name, keep);
        if (name[keep]) text_add(&cut, "\xe2\x80\xa6");
        draw_text(out, x, f->bottom + 19.0 + 15.0 * (double)row, "middle", SOFT, "", cut.s ? cut.s : "");
        if (cut.failed) out->failed = 1;
        text_free(&cut);
    }
}

static void draw_x_axis(const plot *p, const axes *f, textbuf *out) {
    double tick[AXES_TICKS];
    char number[NUMBER_TEXT];
    draw_line(out, f->left, f->bottom, f->right, f->bottom, SOFT, "");
    if (p->names) {
        draw_names(p, f, out);
    } else {
        size_t n = axes_x_ticks(f, (f->right - f->left) / 44.0, tick);
        for (size_t i = 0; i < n; i++) {
            double x = axes_x(f, tick[i]);
            draw_line(out, x, f->bottom, x, f->bottom + 5, SOFT, "");
            draw_text(out, x, f->bottom + 18, "middle", SOFT, "", number_text(tick[i], 6, number));
        }
    }
    draw_text(out, 0.5 * (f->left + f->right), p->height - 9.0, "middle", INK, "", p->x_label);
}

/* A path in tenths of a pixel, each point told by its distance from the last: half the bytes, and no drift, as the tenths are whole. */
typedef struct {
    long x, y;
} pen_place;

static void add_tenths(textbuf *out, long v, int first) {
    text_addf(out, "%s%ld", v < 0 ? "-" : first ? "" : " ", labs(v) / 10);
    if (labs(v) % 10) text_addf(out, ".%ld", labs(v) % 10);
}

static void path_to(textbuf *out, pen_place *at, int jump, double x, double y) {
    pen_place to = { lround(10.0 * x), lround(10.0 * y) };
    text_add(out, jump ? "M" : "l");
    add_tenths(out, jump ? to.x : to.x - at->x, 1);
    add_tenths(out, jump ? to.y : to.y - at->y, 0);
    *at = to;
}

/* One closed area for each unbroken run of lo..hi. */
static void draw_band(const plot_series *s, const axes *f, textbuf *out) {
    for (size_t from = 0, to; from < s->n; from = to + 1) {
        for (to = from; to < s->n && axes_in_band(s, to);) to++;
        if (to - from < 2) continue;
        text_add(out, "<path d=\"");
        pen_place at = { 0, 0 };
        for (size_t i = from; i < to; i++) path_to(out, &at, i == from, axes_x(f, s->x[i]), axes_y(f, s->hi[i]));
        for (size_t i = to; i-- > from;) path_to(out, &at, 0, axes_x(f, s->x[i]), axes_y(f, s->lo[i]));
        text_addf(out, "Z\" style=\"fill:%s;stroke:none\" fill-opacity=\"0.22\"/>\n", tone_colour[s->tone]);
    }
}

static const char *dashes(plot_style style) {
    return style == PLOT_DASHED   ? " stroke-dasharray=\"8 4\""
           : style == PLOT_DOTTED ? " stroke-dasharray=\"2 4\""
                                  : "";
}

/* A stretch of the curve below the axis is not drawn along it: that would look like values. */
static void draw_curve(const plot_series *s, const axes *f, textbuf *out) {
    int pen = 0, was_below = 0;
    pen_place at = { 0, 0 };
    text_add(out, "<path d=\"");
    for (size_t i = 0; i < s->n; i++) {
        int below = axes_below(f, s->y[i]);
        if (!isfinite(s->y[i])) {
            pen = 0;
            continue;
        }
        path_to(out, &at, !pen || (below && was_below), axes_x(f, s->x[i]), axes_y(f, s->y[i]));
        pen = 1;
        was_below = below;
    }
    text_addf(out, "\" style=\"fill:none;stroke:%s\" stroke-width=\"%s\"%s/>\n", tone_colour[s->tone],
              s->style == PLOT_LINE ? "2.2" : "1.6", dashes(s->style));
}

/* The outline of the bins and the area below it. */
static void draw_steps(const plot_series *s, const axes *f, textbuf *out) {
    double half = 0.5 * axes_bin_step(s), floor_y = axes_y(f, f->y_lo);
    if (!s->n) return;
    text_addf(out, "<path d=\"M%.1f %.1f", axes_x(f, s->x[0] - half), floor_y);
    for (size_t i = 0; i < s->n; i++)
        text_addf(out, "V%.1fH%.1f", axes_y(f, isfinite(s->y[i]) ? s->y[i] : f->y_lo), axes_x(f, s->x[i] + half));
    text_addf(out, "V%.1f\" style=\"fill:%s;stroke:%s\" fill-opacity=\"0.22\" stroke-width=\"1.8\"/>\n", floor_y, tone_colour[s->tone],
              tone_colour[s->tone]);
}

static void draw_rules(const plot *p, const axes *f, textbuf *out) {
    for (size_t k = 0; k < p->n_rules; k++) {
        double x = axes_x(f, p->rules[k].at);
        if (isfinite(x) && x >= f->left && x <= f->right)
            draw_line(out, x, f->top, x, f->bottom, tone_colour[p->rules[k].tone], " stroke-width=\"1.6\" stroke-dasharray=\"8 4\"");
    }
}

static void draw_mark(textbuf *out, plot_mark mark, double x, double y) {
    switch (mark) {
    case MARK_DIAMOND:
        text_addf(out,
                  "<path d=\"M%.1f %.1fl6.5 6.5l-6.5 6.5l-6.5 -6.5Z\" style=\"fill:var(--amber,#a85d00)\"/>",
                  x, y - 6.5);
        break;
    case MARK_TRIANGLE:
        text_addf(out, "<path d=\"M%.1f %.1fl6.8 11.6h-13.6Z\" style=\"fill:var(--red,#b02a1c)\"/>", x,
                  y - 7.4);
        break;
    case MARK_SQUARE:
        text_addf(
            out,
            "<rect x=\"%.1f\" y=\"%.1f\" width=\"9\" height=\"9\" style=\"fill:var(--paper,#fff);stroke:%s\" "
            "stroke-width=\"2\"/>",
            x - 4.5, y - 4.5, SOFT);
        break;
    case MARK_DISC:
    default:
        text_addf(out, "<circle cx=\"%.1f\" cy=\"%.1f\" r=\"5\" style=\"fill:%s\"/>", x, y, tone_colour[3]);
        break;
    }
}

static void draw_points(const plot *p, const plot_series *s, const axes *f, textbuf *out) {
    char number[NUMBER_TEXT];
    for (size_t i = 0; i < s->n; i++) {
        if (!isfinite(s->y[i])) continue;
        double x = axes_x(f, s->x[i]);
        text_add(out, "<g><title>");
        if (p->names && p->names[i]) html_text(out, p->names[i]);
        if (s->point_names) html_text(out, s->point_names[i]);
        text_addf(out, ": %s</title>", number_text(s->y[i], 6, number));
        if (s->lo && s->hi && axes_in_band(s, i)) {
            double top = axes_y(f, s->hi[i]), bottom = axes_y(f, s->lo[i]);
            draw_line(out, x, top, x, bottom, INK, " stroke-width=\"1.4\"");
            draw_line(out, x - 4, top, x + 4, top, INK, " stroke-width=\"1.4\"");
            draw_line(out, x - 4, bottom, x + 4, bottom, INK, " stroke-width=\"1.4\"");
        }
        draw_mark(out, s->marks ? s->marks[i] : MARK_DISC, x, axes_y(f, s->y[i]));
        text_add(out, "</g>\n");
    }
}

static void draw_legend(const plot *p, const axes *f, textbuf *out) {
    double x = f->left, y = 36;
    for (size_t i = 0; i < p->n_series; i++) {
        const plot_series *s = &p->series[i];
        if (!s->label || s->unlisted) continue;
        if (s->style == PLOT_POINTS)
            draw_mark(out, MARK_DISC, x + 12, y - 4);
        else
            text_addf(out,
                      "<line x1=\"%.1f\" y1=\"%.1f\" x2=\"%.1f\" y2=\"%.1f\" style=\"stroke:%s\" "
                      "stroke-width=\"2.4\"%s/>\n",
                      x, y - 4, x + 24, y - 4, tone_colour[s->tone], dashes(s->style));
        draw_text(out, x + 30, y, "start", SOFT, "", s->label);
        x += 46.0 + 7.4 * (double)strlen(s->label);
    }
    if (p->target_label && (isfinite(p->target_lo) || isfinite(p->target_hi))) {
        text_addf(out,
                  "<rect x=\"%.1f\" y=\"%.1f\" width=\"24\" height=\"11\" style=\"fill:%s;stroke:%s\" "
                  "fill-opacity=\"0.13\" stroke-dasharray=\"5 3\"/>\n",
                  x, y - 10, tone_colour[3], tone_colour[3]);
        draw_text(out, x + 30, y, "start", SOFT, "", p->target_label);
    }
}

void plot_svg(const plot *given, textbuf *out) {
    plot p = *given;
    axes f;
    if (p.width <= 0) p.width = 720;
    if (p.height <= 0) p.height = 320;
    text_addf(
        out,
        "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 %d %d\" role=\"img\" font-size=\"12.5\" "
        "font-family=\"system-ui,sans-serif\" aria-label=\"",
        p.width, p.height);
    html_text(out, p.description ? p.description : p.title);
    text_add(out, "\">\n");
    draw_text(out, 4, 18, "start", INK, " font-size=\"14\" font-weight=\"600\"", p.title);
    if (!lay_out(&p, &f)) {
        draw_text(out, 0.5 * p.width, 0.5 * p.height, "middle", SOFT, "", "no values to draw");
        text_add(out, "</svg>\n");
        return;
    }
    draw_target(&p, &f, out);
    draw_y_axis(&p, &f, out);
    draw_x_axis(&p, &f, out);
    for (size_t i = 0; i < p.n_series; i++)
        if (p.series[i].style != PLOT_POINTS && p.series[i].lo && p.series[i].hi)
            draw_band(&p.series[i], &f, out);
    for (size_t i = 0; i < p.n_series; i++)
        if (p.series[i].style == PLOT_STEPS) draw_steps(&p.series[i], &f, out);
        else if (p.series[i].style != PLOT_POINTS) draw_curve(&p.series[i], &f, out);
    draw_rules(&p, &f, out);
    for (size_t i = 0; i < p.n_series; i++)
        if (p.series[i].style == PLOT_POINTS) draw_points(&p, &p.series[i], &f, out);
    if (!p.no_legend) draw_legend(&p, &f, out);
    text_add(out, "</svg>\n");
}

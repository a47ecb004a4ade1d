/* Wafer maps: where on the wafer the spacing is wide or narrow. One map per lot and wafer with at least three located
 * samples; every point carries its value where there is room, and all stand in the table below, so the colour (blue
 * narrower, amber wider than the mean of the wafer) is never needed to read it. The circle is drawn through the outermost point: the wafer's own edge is not known. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "report/html.h"
#include "report/page.h"

enum { LEAST_POINTS = 3, MAX_MAPS = 24, SIDE = 320, RADIUS = 112 };

static int located(const results *r, size_t i) {
    return r->sample_x_mm && r->sample_y_mm && isfinite(r->sample_x_mm[i]) && isfinite(r->sample_y_mm[i]) &&
           isfinite(r->samples[i].spacing_nm);
}

static int same_text(const char *a, const char *b) { return !strcmp(a ? a : "", b ? b : ""); }

static int same_wafer(const results *r, size_t i, size_t k) {
    return same_text(r->samples[i].lot, r->samples[k].lot) &&
           same_text(r->samples[i].wafer, r->samples[k].wafer);
}

/* What the map says in figures. Centre: within a third of the outermost radius; edge: beyond two thirds. */
typedef struct {
    double mean, sd, outermost_mm, centre, edge;
    size_t n;
} wafer_figures;

static double radius_mm(const results *r, size_t i) { return hypot(r->sample_x_mm[i], r->sample_y_mm[i]); }

static wafer_figures figures_of(const results *r, const size_t *at, size_t n) {
    wafer_figures f = { .n = n };
    double centre = 0.0, edge = 0.0, squares = 0.0;
    size_t n_centre = 0, n_edge = 0;
    for (size_t k = 0; k < n; k++) {
        f.mean += r->samples[at[k]].spacing_nm / (double)n;
        f.outermost_mm = fmax(f.outermost_mm, radius_mm(r, at[k]));
    }
    for (size_t k = 0; k < n; k++) {
        double v = r->samples[at[k]].spacing_nm,
               share = f.outermost_mm > 0.0 ? radius_mm(r, at[k]) / f.outermost_mm : 0.0;
        squares += (v - f.mean) * (v - f.mean);
        if (share <= 1.0 / 3.0) {
            centre += v;
            n_centre++;
        } else if (share >= 2.0 / 3.0) {
            edge += v;
            n_edge++;
        }
    }
    f.sd = n > 1 ? sqrt(squares / (double)(n - 1)) : MISSING;
    f.centre = n_centre ? centre / (double)n_centre : MISSING;
    f.edge = n_edge ? edge / (double)n_edge : MISSING;
    return f;
}

enum { DOT = 9, LETTER = 8, LINE = 13 };
static const double full_colour = 0.10; /* deviation from the mean, the same for all maps, so that they compare */

typedef struct {
    double x0, y0, x1, y1;
} box;

static int apart(const box *a, const box *b) { return a->x1 <= b->x0 || b->x1 <= a->x0 || a->y1 <= b->y0 || b->y1 <= a->y0; }

static void place_of(const results *r, size_t i, const wafer_figures *f, double *x, double *y) {
    double scale = f->outermost_mm > 0.0 ? RADIUS / f->outermost_mm : 0.0;
    *x = 0.5 * SIDE + scale * r->sample_x_mm[i];
    *y = 0.5 * SIDE - scale * r->sample_y_mm[i];
}

static const char *value_text(const sample_row *s, char *out) {
    return number_places(s->spacing_nm, number_places_of(2.0 * s->spacing_nm_u, 2), out);
}

static void draw_dot(const results *r, size_t i, const wafer_figures *f, textbuf *out) {
    const sample_row *s = &r->samples[i];
    char text[NUMBER_TEXT];
    double x, y, depth = fmin(1.0, fabs(s->spacing_nm / f->mean - 1.0) / full_colour);
    place_of(r, i, f, &x, &y);
    text_add(out, "<g><title>");
    html_text(out, s->sample);
    text_addf(out, ": %s nm</title><circle cx=\"%.1f\" cy=\"%.1f\" r=\"%d\" style=\"fill:var(%s);stroke:var(--ink,#1b2430)\" fill-opacity=\"%.2f\"/></g>\n",
              value_text(s, text), x, y, DOT, s->spacing_nm < f->mean ? "--blue,#1660a8" : "--amber,#a85d00", 0.12 + 0.78 * depth);
}

/* Below, above, right or left of its dot: the first place that covers no dot and no label so far. taken: [n] dots, then labels. */
static void draw_label(const results *r, size_t i, const wafer_figures *f, box *taken, size_t *n_taken, textbuf *out) {
    char text[NUMBER_TEXT];
    double x, y, half;
    place_of(r, i, f, &x, &y);
    value_text(&r->samples[i], text);
    half = 0.5 * LETTER * (double)strlen(text);
    const double middle[4][2] = { { x, y + DOT + 8.0 }, { x, y - DOT - 8.0 }, { x + DOT + 3.0 + half, y }, { x - DOT - 3.0 - half, y } };
    for (size_t k = 0; k < 4; k++) {
        box b = { middle[k][0] - half, middle[k][1] - 0.5 * LINE, middle[k][0] + half, middle[k][1] + 0.5 * LINE };
        int free_place = b.x0 >= 0.0 && b.x1 <= SIDE && b.y0 >= LINE && b.y1 <= SIDE;
        for (size_t t = 0; t < *n_taken && free_place; t++) free_place = apart(&b, &taken[t]);
        if (!free_place) continue;
        taken[(*n_taken)++] = b;
        text_addf(out, "<text x=\"%.1f\" y=\"%.1f\" text-anchor=\"middle\" style=\"fill:var(--ink,#1b2430)\">%s</text>\n", middle[k][0], middle[k][1] + 4.5,
                  text);
        return;
    }
}

static void draw_points(const results *r, const size_t *at, size_t n, const wafer_figures *f, textbuf *out) {
    box *taken = mem_array(2 * n, sizeof *taken);
    size_t n_taken = 0;
    if (!taken) {
        out->failed = 1;
        return;
    }
    for (size_t k = 0; k < n; k++) {
        double x, y;
        draw_dot(r, at[k], f, out);
        place_of(r, at[k], f, &x, &y);
        taken[n_taken++] = (box){ x - DOT, y - DOT, x + DOT, y + DOT };
    }
    for (size_t k = 0; k < n; k++) draw_label(r, at[k], f, taken, &n_taken, out);
    free(taken);
}

static void map_table(const results *r, const size_t *at, size_t n, textbuf *out) {
    char text[NUMBER_TEXT];
    const sample_row *first = &r->samples[at[0]];
    text_add(out, "<details class=\"data\"><summary>Data: wafer ");
    html_text(out, first->wafer);
    text_add(out, "</summary><div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"Data: map of wafer ");
    html_text(out, first->lot);
    text_add(out, " ");
    html_text(out, first->wafer);
    text_add(out, "\"><table class=\"csv numbers\"><thead><tr><th scope=\"col\">sample</th><th scope=\"col\">x (mm)</th><th scope=\"col\">y (mm)</th>"
                  "<th scope=\"col\">spacing (nm)</th></tr></thead><tbody>\n");
    for (size_t k = 0; k < n; k++) {
        text_add(out, "<tr><th scope=\"row\">");
        html_text(out, r->samples[at[k]].sample);
        text_addf(out, "</th><td>%s", number_text(r->sample_x_mm[at[k]], 5, text));
        text_addf(out, "<td>%s<td>", number_text(r->sample_y_mm[at[k]], 5, text));
        html_value(out, page_sample_column("spacing_nm", ""), page_sample_column("spacing_nm", "_u"), &r->samples[at[k]], 0);
        text_add(out, "\n");
    }
    text_add(out, "</tbody></table></div></details>\n");
}

static void add_percent(textbuf *out, double v) {
    char text[NUMBER_TEXT];
    text_add(out, number_text(100.0 * v, 2, text));
}

static void add_caption(const wafer_figures *f, textbuf *out) {
    char text[NUMBER_TEXT];
    text_addf(
        out, "<figcaption>Spacing in nm at %zu positions; outermost at %s mm. Spread over the wafer (1 sd): ",
        f->n, number_text(f->outermost_mm, 4, text));
    add_percent(out, f->sd / f->mean);
    text_add(out, " % of the mean");
    if (isfinite(f->centre) && isfinite(f->edge)) {
        text_add(out, f->edge < f->centre ? "; the edge is narrower than the centre by "
                                          : "; the edge is wider than the "
                                            "centre by ");
        add_percent(out, fabs(f->edge / f->centre - 1.0));
        text_add(out, " %");
    }
    text_add(out, ".</figcaption>");
}

static void draw_map(const results *r, const size_t *at, size_t n, textbuf *out) {
    const sample_row *s = &r->samples[at[0]];
    wafer_figures f = figures_of(r, at, n);
    text_addf(out,
              "<figure><svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 %d %d\" role=\"img\" "
              "font-size=\"12.5\" "
              "font-family=\"system-ui,sans-serif\" aria-label=\"Map of the spacing on wafer ",
              SIDE, SIDE);
    html_text(out, s->wafer);
    text_addf(out,
              "\"><circle cx=\"%.1f\" cy=\"%.1f\" r=\"%d\" style=\"fill:none;stroke:var(--rule,#d5dbe3)\" "
              "stroke-dasharray=\"5 4\"/>\n<text x=\"4\" y=\"16\" font-size=\"14\" font-weight=\"600\" "
              "style=\"fill:var(--ink,#1b2430)\">",
              0.5 * SIDE, 0.5 * SIDE, RADIUS);
    if (s->lot && *s->lot) {
        html_text(out, s->lot);
        text_add(out, " ");
    }
    html_text(out, s->wafer && *s->wafer ? s->wafer : "wafer");
    text_add(out, "</text>\n");
    draw_points(r, at, n, &f, out);
    text_add(out, "</svg>\n");
    map_table(r, at, n, out);
    add_caption(&f, out);
    text_add(out, "</figure>\n");
}

/* The located samples of the wafer of sample i, if i is the first of them; else none. */
static size_t wafer_members(const results *r, size_t i, size_t *at) {
    size_t n = 0;
    if (!located(r, i)) return 0;
    for (size_t k = 0; k < r->n_samples; k++) {
        if (!located(r, k) || !same_wafer(r, i, k)) continue;
        if (k < i) return 0;
        at[n++] = k;
    }
    return n;
}

void page_maps(const results *r, textbuf *out) {
    if (!r->sample_x_mm || !r->sample_y_mm || !r->n_samples) return;
    size_t *at = mem_array(r->n_samples, sizeof *at), maps = 0;
    if (!at) {
        out->failed = 1;
        return;
    }
    for (size_t i = 0; i < r->n_samples && maps < MAX_MAPS; i++) {
        size_t n = wafer_members(r, i, at);
        if (n < LEAST_POINTS) continue;
        if (!maps++)
            text_add(out, "<section id=\"maps\"><h2>Wafer maps</h2>\n<p class=\"lead\">Blue: narrower than "
                          "the mean of the "
                          "wafer, amber: wider; the deeper, the further, full at 10 % from it. Small differences may lie within U: "
                          "compare.</p>\n"
                          "<div class=\"maps\">\n");
        draw_map(r, at, n, out);
    }
    if (maps) text_add(out, "</div></section>\n");
    free(at);
}

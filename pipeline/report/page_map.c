/* Wafer maps: where on the wafer the spacing is wide or narrow. One map per lot and wafer with at least three located
 * samples; every point carries its value, so the colour (blue narrower, amber wider than the mean of the wafer) is never
 * needed to read it. The circle is drawn through the outermost point: the wafer's own edge is not known. */
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
    double mean, sd, worst, outermost_mm, centre, edge;
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
        f.worst = fmax(f.worst, fabs(v - f.mean));
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

static void draw_point(const results *r, size_t i, const wafer_figures *f, textbuf *out) {
    const column *c = column_find(sample_columns, n_sample_columns, "spacing_nm");
    const sample_row *s = &r->samples[i];
    double scale = f->outermost_mm > 0.0 ? RADIUS / f->outermost_mm : 0.0;
    double x = 0.5 * SIDE + scale * r->sample_x_mm[i], y = 0.5 * SIDE - scale * r->sample_y_mm[i];
    double depth = f->worst > 0.0 ? fabs(s->spacing_nm - f->mean) / f->worst : 0.0;
    text_add(out, "<g><title>");
    html_text(out, s->sample);
    text_addf(
        out,
        "</title><circle cx=\"%.1f\" cy=\"%.1f\" r=\"9\" style=\"fill:var(%s);stroke:var(--ink,#1b2430)\" "
        "fill-opacity=\"%.2f\"/>",
        x, y, s->spacing_nm < f->mean ? "--blue,#1660a8" : "--amber,#a85d00", 0.12 + 0.78 * depth);
    text_addf(out, "<text x=\"%.1f\" y=\"%.1f\" text-anchor=\"middle\" style=\"fill:var(--ink,#1b2430)\">", x,
              y + 24.0);
    if (c) html_cell(out, c, s);
    text_add(out, "</text></g>\n");
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
    for (size_t k = 0; k < n; k++) draw_point(r, at[k], &f, out);
    text_add(out, "</svg>");
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
                          "wafer, amber: wider; the deeper, the further. Small differences may lie within U: "
                          "compare.</p>\n"
                          "<div class=\"maps\">\n");
        draw_map(r, at, n, out);
    }
    if (maps) text_add(out, "</div></section>\n");
    free(at);
}

/* Size distribution and autocorrelation of every sample, from the tables its micrographs wrote: all charts share their axes,
 * so that two samples compare by eye. Weighting of the sizes: ISO 13322-1. The ring is where spacing_acf_nm is read. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "report/curves.h"
#include "report/html.h"
#include "report/page.h"
#include "report/plot.h"

enum { MAX_BINS = 60, BINS = 32, MAX_LINES = 4 };

/* What the micrographs of one sample add up to. */
typedef struct {
    xy_curve sizes;
    xy_curve acf[MAX_LINES]; /* of its first micrographs */
    double ring[MAX_LINES];  /* spacing_acf_nm of each */
    size_t n_acf;
} gathered;

static int has_word(const char *s, const char *word) { return s && !strcmp(s, word); }

static status append(xy_curve *to, const xy_curve *from, error *e) {
    xy_curve all = { mem_array(to->n + from->n, sizeof(double)), mem_array(to->n + from->n, sizeof(double)),
                     to->n + from->n };
    if (!all.x || !all.y) {
        xy_curve_free(&all);
        return NO_MEMORY(e, "the sizes");
    }
    for (size_t i = 0; i < all.n; i++) {
        all.x[i] = i < to->n ? to->x[i] : from->x[i - to->n];
        all.y[i] = i < to->n ? to->y[i] : from->y[i - to->n];
    }
    xy_curve_free(to);
    *to = all;
    return ST_OK;
}

static void gather_image(const results *r, size_t i, const char *dir, gathered *g, error *e) {
    xy_curve sizes = { 0 };
    if (!r->image_stems || !r->image_stems[i]) return;
    if (!sizes_read(dir, r->image_stems[i], &sizes, e)) (void)append(&g->sizes, &sizes, e);
    xy_curve_free(&sizes);
    if (g->n_acf < MAX_LINES && !curve_read(dir, r->image_stems[i], "acf_curvature", &g->acf[g->n_acf], e) &&
        g->acf[g->n_acf].n) {
        g->ring[g->n_acf] = r->images[i].spacing_acf_nm;
        g->n_acf++;
    }
}

static void gather(const results *r, size_t sample, const char *dir, gathered *g, error *e) {
    for (size_t i = 0; i < r->n_images; i++)
        if (has_word(r->images[i].status, "ok") && has_word(r->images[i].sample, r->samples[sample].sample))
            gather_image(r, i, dir, g, e);
}

static void gathered_free(gathered *g) {
    xy_curve_free(&g->sizes);
    for (size_t k = 0; k < MAX_LINES; k++) xy_curve_free(&g->acf[k]);
}

/* The common axes. */
typedef struct {
    double size_lo, size_step, share_hi, lag_hi, acf_lo;
    size_t bins;
} axes;

static axes find_axes(const gathered *g, size_t n) {
    axes a = { HUGE_VAL, 0.0, 0.0, 0.0, 0.0, 0 };
    double size_hi = -HUGE_VAL;
    for (size_t s = 0; s < n; s++) {
        for (size_t i = 0; i < g[s].sizes.n; i++) {
            a.size_lo = fmin(a.size_lo, g[s].sizes.x[i]);
            size_hi = fmax(size_hi, g[s].sizes.x[i]);
        }
        for (size_t k = 0; k < g[s].n_acf; k++)
            if (isfinite(g[s].ring[k])) a.lag_hi = fmax(a.lag_hi, 3.0 * g[s].ring[k]);
    }
    if (size_hi > a.size_lo) {
        a.size_step = bin_width(&a.size_lo, size_hi, BINS);
        while (a.bins < MAX_BINS && a.size_lo + (double)a.bins * a.size_step <= size_hi) a.bins++;
    }
    for (size_t s = 0; s < n; s++) {
        double share[MAX_BINS];
        sizes_histogram(&g[s].sizes, a.size_lo, a.size_step, a.bins, share);
        for (size_t k = 0; k < a.bins; k++) a.share_hi = fmax(a.share_hi, 110.0 * share[k]);
        for (size_t k = 0; k < g[s].n_acf; k++)
            for (size_t i = 0; i < g[s].acf[k].n && g[s].acf[k].x[i] <= a.lag_hi; i++)
                a.acf_lo = fmin(a.acf_lo, 1.1 * g[s].acf[k].y[i]);
    }
    return a;
}

static plot small_chart(const char *title, const char *x_label, const char *y_label, const plot_series *s, size_t n) {
    return (plot){ .title = title, .x_label = x_label, .y_label = y_label, .y_lo = MISSING, .y_hi = MISSING,
                   .target_lo = MISSING, .target_hi = MISSING, .series = s, .n_series = n, .width = 340, .height = 230,
                   .no_legend = 1 };
}

/* Shares of the bins; dashes at D10, D50 and D90. */
static void draw_sizes(const sample_row *s, const gathered *g, const axes *a, textbuf *out) {
    double share[MAX_BINS], middle[MAX_BINS];
    const plot_rule quantiles[3] = { { s->size_d10_nm, "D10", 1 }, { s->size_d50_nm, "D50", 1 }, { s->size_d90_nm, "D90", 1 } };
    sizes_histogram(&g->sizes, a->size_lo, a->size_step, a->bins, share);
    for (size_t k = 0; k < a->bins; k++) {
        share[k] *= 100.0;
        middle[k] = a->size_lo + ((double)k + 0.5) * a->size_step;
    }
    plot_series bins = { .x = middle, .y = share, .n = a->bins, .style = PLOT_STEPS };
    plot p = small_chart(s->sample, "cell diameter, middle of the bin (nm)", "share of features (%)", &bins, 1);
    p.from_zero = 1;
    p.y_lo = 0.0;
    p.y_hi = a->share_hi;
    p.rules = quantiles;
    p.n_rules = 3;
    text_add(out, "<figure>");
    plot_chart(&p, 0, NULL, out);
    text_add(out, "</figure>\n");
}

static void draw_acf(const sample_row *s, const gathered *g, const axes *a, textbuf *out) {
    plot_series lines[MAX_LINES];
    plot_rule rings[MAX_LINES];
    static const char *const label[MAX_LINES] = { "micrograph 1", "micrograph 2", "micrograph 3", "micrograph 4" };
    for (size_t k = 0; k < g->n_acf; k++) {
        size_t n = 0;
        while (n < g->acf[k].n && g->acf[k].x[n] <= a->lag_hi) n++;
        lines[k] = (plot_series){ .x = g->acf[k].x, .y = g->acf[k].y, .n = n, .tone = (int)k, .label = label[k] };
        rings[k] = (plot_rule){ g->ring[k], "ring", (int)k };
    }
    plot p = small_chart(s->sample, "distance (nm)", "autocorrelation", lines, g->n_acf);
    p.y_lo = a->acf_lo;
    p.y_hi = 1.0;
    p.rules = rings;
    p.n_rules = g->n_acf;
    text_add(out, "<figure>");
    plot_chart(&p, 0, NULL, out);
    text_add(out, "</figure>\n");
}

static void draw_all(const results *r, const size_t *picked, const gathered *g, size_t n, const axes *a, textbuf *out) {
    text_add(out, "<h3>Size distribution</h3>\n<p class=\"small\">Equivalent circular diameters of the cells of all micrographs "
                  "used, by number, border features weighted (ISO 13322-1). Dashes: D10, D50, D90. All charts have the same "
                  "axes.</p>\n<div class=\"charts small-multiples\">\n");
    for (size_t i = 0; i < n; i++)
        if (g[i].sizes.n && a->bins) draw_sizes(&r->samples[picked[i]], &g[i], a, out);
    text_add(out, "</div>\n<h3>Autocorrelation and its ring</h3>\n<p class=\"small\">Radial autocorrelation of the curvature map, "
                  "one line a micrograph; dashes: the first ring, which is the spacing (spacing_acf_nm). A clear hump at the "
                  "dashes is what the spacing rests on.</p>\n<div class=\"charts small-multiples\">\n");
    for (size_t i = 0; i < n; i++)
        if (g[i].n_acf) draw_acf(&r->samples[picked[i]], &g[i], a, out);
    text_add(out, "</div>\n");
}

void page_profiles(const results *r, const char *out_dir, textbuf *out) {
    size_t n = 0, found = 0, *picked = r->n_samples ? page_pick(r, &n, out) : NULL;
    error e = { 0 };
    gathered *g = n ? mem_array(n, sizeof *g) : NULL;
    if (n && !g) out->failed = 1;
    for (size_t i = 0; g && i < n; i++) {
        gather(r, picked[i], out_dir, &g[i], &e);
        found += g[i].sizes.n || g[i].n_acf;
    }
    if (found) {
        axes a = find_axes(g, n);
        draw_all(r, picked, g, n, &a, out);
    } else if (g) {
        text_add(out, "<p>No size distribution and no autocorrelation: no micrograph with a pixel size was used.</p>\n");
    }
    if (found && found < n)
        text_addf(out, "<p class=\"small\">%zu samples have no chart: none of their micrographs was used.</p>\n", n - found);
    page_pick_note(r, n, "the curves", "are in profiles/ and features/", out);
    if (e.code) {
        text_add(out, "<p class=\"small\">Not all tables could be read: ");
        html_text(out, e.text);
        text_add(out, "</p>\n");
    }
    for (size_t i = 0; g && i < n; i++) gathered_free(&g[i]);
    free(g);
    free(picked);
}

/* Evenness over a wafer. Three or five positions are the rule, so nothing is fitted: means of an inner and an outer group,
 * range, sd. The 10 % above which an uneven wafer calls for a look at the tool is a habit of the trade, no standard.
 * What this file does not do: maps, tilts, other figures of unevenness. */
#include "judge/wafer.h"

#include <math.h>

#include "base/number.h"
#include "base/quantity.h"

#define NOTEWORTHY 0.10

typedef struct {
    double sum;
    size_t n;
} mean_of;

static void put(mean_of *m, double v) {
    m->sum += v;
    m->n++;
}
static double mean(const mean_of *m) { return m->n ? m->sum / (double)m->n : MISSING; }

static int usable(const double *v, const double *x, const double *y, size_t i) {
    return isfinite(v[i]) && isfinite(x[i]) && isfinite(y[i]);
}

int wafer_even(const double *v, const double *x_mm, const double *y_mm, size_t n, wafer_evenness *out) {
    wafer_evenness w = { 0 };
    mean_of all = { 0 }, inner = { 0 }, outer = { 0 };
    double low = (double)INFINITY, high = -(double)INFINITY, square = 0.0;
    for (size_t i = 0; i < n; i++) {
        if (!usable(v, x_mm, y_mm, i)) continue;
        put(&all, v[i]);
        low = fmin(low, v[i]);
        high = fmax(high, v[i]);
        w.radius_mm = fmax(w.radius_mm, hypot(x_mm[i], y_mm[i]));
    }
    if (all.n < 3 || !(w.radius_mm > 0.0)) return 0;
    for (size_t i = 0; i < n; i++) {
        if (!usable(v, x_mm, y_mm, i)) continue;
        double r = hypot(x_mm[i], y_mm[i]);
        square += (v[i] - mean(&all)) * (v[i] - mean(&all));
        if (3.0 * r <= w.radius_mm) put(&inner, v[i]);
        if (3.0 * r >= 2.0 * w.radius_mm) put(&outer, v[i]);
    }
    w.n = all.n;
    w.mean = mean(&all);
    w.sd = sqrt(square / ((double)all.n - 1.0));
    w.sd_rel = w.sd / w.mean;
    w.range = high - low;
    w.n_centre = inner.n;
    w.n_edge = outer.n;
    w.edge_minus_centre = mean(&outer) - mean(&inner);
    w.edge_minus_centre_rel = w.edge_minus_centre / mean(&inner);
    *out = w;
    return 1;
}

static void add_both(const sentence_subject *s, double v, double share, int sign, textbuf *t) {
    char a[NUMBER_TEXT];
    const char *plus = sign && v > 0.0 ? "+" : "";
    text_addf(t, "%s%s%s%s", plus, number_text(v, 3, a), s->unit[0] ? " " : "", s->unit);
    text_addf(t, " (%s%s %%)", plus, number_percent(share, 2, a));
}

void wafer_sentence(const sentence_subject *s, const char *wafer, const wafer_evenness *w, textbuf *t) {
    char a[NUMBER_TEXT];
    sentence_name(s, t);
    text_addf(t, " on wafer %s: ", wafer);
    if (isfinite(w->edge_minus_centre)) {
        text_add(t, "edge less centre ");
        add_both(s, w->edge_minus_centre, w->edge_minus_centre_rel, 1, t);
        text_add(t, ", ");
    }
    text_addf(t, "range %s%s%s, sd ", number_text(w->range, 3, a), s->unit[0] ? " " : "", s->unit);
    add_both(s, w->sd, w->sd_rel, 0, t);
    text_addf(t, ", %zu samples", w->n);
    if (fabs(w->edge_minus_centre_rel) > NOTEWORTHY)
        text_add(t, "; more than 10 %: look at gas distribution, clamping and cooling, loading, or at agitation and bath temperature");
}

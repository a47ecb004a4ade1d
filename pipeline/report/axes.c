/* Round ticks (1, 2, 5 x 10^k) on linear and logarithmic axes. A logarithmic axis shows four decades at most, because below them
 * there is nothing a person can act on. */
#include "report/axes_priv.h"

#include <math.h>

size_t plot_ticks(double lo, double hi, size_t max, double *ticks) {
    if (!(hi > lo) || max < 2) return 0;
    double raw = (hi - lo) / (double)(max - 1), decade = pow(10.0, floor(log10(raw))), lead = raw / decade;
    double step = decade * (lead <= 1.0 ? 1.0 : lead <= 2.0 ? 2.0 : lead <= 5.0 ? 5.0 : 10.0);
    size_t n = 0;
    double first = ceil(lo / step - 1e-9);
    for (double k = first; n < max && k * step <= hi + 1e-9 * step; k += 1.0) ticks[n++] = k * step;
    return n;
}

/* 1, 2, 5 x 10^k within the logarithmic range; only the decades when that is plenty. */
static size_t log_ticks(double lo, double hi, size_t max, double *ticks) {
    static const double lead[] = { 1.0, 2.0, 5.0 };
    size_t step = hi - lo > 2.2 ? 3 : 1, n = 0;
    if (!isfinite(lo) || !isfinite(hi)) return 0;
    for (double d = floor(lo); d <= hi; d += 1.0)
        for (size_t k = 0; k < 3 && n < max; k += step) {
            double v = lead[k] * pow(10.0, d), l = log10(v);
            if (l >= lo - 1e-9 && l <= hi + 1e-9) ticks[n++] = v;
        }
    return n;
}

static size_t whole_room(double room) { return (size_t)fmin(AXES_TICKS, fmax(3.0, room)); }

size_t axes_x_ticks(const axes *a, double room, double tick[AXES_TICKS]) {
    return plot_ticks(a->x_lo, a->x_hi, whole_room(room), tick);
}

size_t axes_y_ticks(const axes *a, double room, double tick[AXES_TICKS]) {
    return a->log_y ? log_ticks(a->y_lo, a->y_hi, AXES_TICKS, tick) : plot_ticks(a->y_lo, a->y_hi, whole_room(room), tick);
}

double axes_x(const axes *a, double x) { return a->left + (x - a->x_lo) / (a->x_hi - a->x_lo) * (a->right - a->left); }

double axes_y(const axes *a, double y) {
    double v = !a->log_y ? y : y > 0.0 ? log10(y) : a->y_lo;
    v = fmin(fmax(v, a->y_lo), a->y_hi);
    return a->bottom - (v - a->y_lo) / (a->y_hi - a->y_lo) * (a->bottom - a->top);
}

int axes_below(const axes *a, double y) { return a->log_y ? !(y > 0.0) || log10(y) < a->y_lo : y < a->y_lo; }

int axes_in_band(const plot_series *s, size_t i) { return isfinite(s->x[i]) && isfinite(s->lo[i]) && isfinite(s->hi[i]); }

double axes_bin_step(const plot_series *s) { return s->n > 1 ? s->x[1] - s->x[0] : 1.0; }

typedef struct {
    double lo, hi;
} range;

static void widen(range *r, double v) {
    if (!isfinite(v)) return;
    r->lo = fmin(r->lo, v);
    r->hi = fmax(r->hi, v);
}

static void widen_y(const plot *p, range *r, double v) {
    if (!p->log_y)
        widen(r, v);
    else if (v > 0.0)
        widen(r, log10(v));
}

/* The range of what is drawn; 0 when nothing is. */
static int find_ranges(const plot *p, range *x, range *y) {
    *x = *y = (range){ HUGE_VAL, -HUGE_VAL };
    for (size_t s = 0; s < p->n_series; s++)
        for (size_t i = 0; i < p->series[s].n; i++) {
            const plot_series *q = &p->series[s];
            if (!isfinite(q->y[i])) continue;
            double half = q->style == PLOT_STEPS ? 0.5 * axes_bin_step(q) : 0.0;
            widen(x, q->x[i] - half);
            widen(x, q->x[i] + half);
            widen_y(p, y, q->y[i]);
            if (q->lo) widen_y(p, y, q->lo[i]);
            if (q->hi) widen_y(p, y, q->hi[i]);
        }
    if (!(y->hi >= y->lo) || !(x->hi >= x->lo)) return 0;
    widen_y(p, y, p->target_lo);
    widen_y(p, y, p->target_hi);
    return 1;
}

static void settle_y(const plot *p, range *y) {
    double span = y->hi - y->lo;
    if (p->log_y) {
        y->lo = fmax(y->lo, y->hi - 4.0) - 0.05;
        y->hi += 0.05;
    } else {
        if (!(span > 0.0)) span = fabs(y->hi) > 0.0 ? 0.2 * fabs(y->hi) : 1.0;
        y->hi += 0.08 * span;
        y->lo = p->from_zero && y->lo >= 0.0 ? 0.0 : y->lo - 0.08 * span;
    }
    if (isfinite(p->y_lo)) y->lo = p->log_y ? log10(p->y_lo) : p->y_lo;
    if (isfinite(p->y_hi)) y->hi = p->log_y ? log10(p->y_hi) : p->y_hi;
}

int axes_find(const plot *p, axes *a) {
    range x, y;
    a->log_y = p->log_y;
    if (!find_ranges(p, &x, &y)) return 0;
    settle_y(p, &y);
    if (p->names) x = (range){ -0.6, (double)p->n_names - 0.4 };
    if (!(x.hi > x.lo)) x = (range){ x.lo - 1.0, x.hi + 1.0 };
    a->x_lo = x.lo;
    a->x_hi = x.hi;
    a->y_lo = y.lo;
    a->y_hi = y.hi > y.lo ? y.hi : y.lo + 1.0;
    return 1;
}

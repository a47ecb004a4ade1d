/* Slopes, steps, lines.
 *
 * The slope over etches is Theil and Sen's, because one odd picture must not make a drift. A step between two settings is
 * Welch's, because two recipes need not scatter alike. A line on a setting is plain least squares; it is used in reverse
 * with Fieller's limits, the x at which the 95 % band of the mean reaches the wanted y, and never outside the data: a
 * straight line there is a guess.
 * What this file does not do: curved dependence, several settings at once, causes. */
#include "judge/trend.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "judge/factors.h"

static int ascending(const void *a, const void *b) {
    const double *x = a, *y = b;
    return (*x > *y) - (*x < *y);
}

/* The k-th smallest, from 0; v is reordered so that smaller ones stand before it (Hoare C.A.R. (1961) Commun. ACM 4, 321). A
 * million slopes need no sorting for a median and two limits. */
static double select_kth(double *v, size_t n, size_t k) {
    size_t first = 0, last = n - 1;
    while (first < last) {
        double pivot = v[first + (last - first) / 2];
        size_t i = first, j = last;
        for (;;) {
            while (v[i] < pivot) i++;
            while (v[j] > pivot) j--;
            if (i >= j) break;
            double keep = v[i];
            v[i++] = v[j];
            v[j--] = keep;
        }
        /* first..j are at most the pivot, and what follows is at least that */
        if (i == j && k == i) return v[k];
        size_t cut = i == j ? i : j + 1;
        if (k < cut) last = cut - 1;
        else first = cut;
        if (i == j && k > i) first = i + 1;
    }
    return v[k];
}

static double median_of(double *v, size_t n) {
    double upper = select_kth(v, n, n / 2);
    if (n % 2) return upper;
    double lower = v[0];
    for (size_t i = 1; i < n / 2; i++) lower = fmax(lower, v[i]);
    return 0.5 * (lower + upper);
}

/* Variance of Kendall's score without ties in y; x sorted. */
static double kendall_variance(const double *sorted_x, size_t n) {
    double m = (double)n, v = m * (m - 1.0) * (2.0 * m + 5.0);
    for (size_t i = 0; i < n;) {
        size_t k = i;
        while (k < n && !(sorted_x[k] > sorted_x[i])) k++;
        double t = (double)(k - i);
        v -= t * (t - 1.0) * (2.0 * t + 5.0);
        i = k;
    }
    return v / 18.0;
}

/* The ranks of Sen's interval, counted from 1 and rounded outwards; beyond the ends there is no limit. */
static void sen_limits(double *slopes, size_t n, double variance, trend_slope *s) {
    double reach = normal_quantile(0.975) * sqrt(variance);
    double low = floor(0.5 * ((double)n - reach)), high = ceil(0.5 * ((double)n + reach)) + 1.0;
    s->lo = low >= 1.0 ? select_kth(slopes, n, (size_t)low - 1) : MISSING;
    s->hi = high <= (double)n ? select_kth(slopes, n, (size_t)high - 1) : MISSING;
}

/* Kendall's score is the number of rising pairs less that of falling ones. */
static double kendall_p(const double *slopes, size_t n, double variance) {
    double score = 0.0;
    for (size_t i = 0; i < n; i++) score += (slopes[i] > 0.0) - (slopes[i] < 0.0);
    double z = fmax(fabs(score) - 1.0, 0.0) / sqrt(variance);
    return 2.0 * normal_below(-z);
}

status trend_robust(const double *x, const double *y, size_t n, trend_slope *s, error *e) {
    if (n > TREND_MOST) {
        x += n - TREND_MOST;
        y += n - TREND_MOST;
        n = TREND_MOST;
    }
    if (n < 3) return fail(e, ST_BAD_INPUT, "a drift needs at least 3 etches, there are %zu", n);
    double *slopes = mem_array(n * (n - 1) / 2, sizeof *slopes), *work = mem_array(n, sizeof *work);
    trend_slope t = { .n = n };
    size_t m = 0;
    status st = slopes && work ? ST_OK : NO_MEMORY(e, "a drift");
    for (size_t i = 0; st == ST_OK && i < n; i++) {
        work[i] = x[i];
        for (size_t k = 0; k < i; k++)
            if (x[i] > x[k] || x[i] < x[k]) slopes[m++] = (y[i] - y[k]) / (x[i] - x[k]);
    }
    if (st == ST_OK && m == 0) st = fail(e, ST_NO_RESULT, "a drift cannot be said: all etches have the same time");
    if (st == ST_OK) {
        qsort(work, n, sizeof *work, ascending);
        t.slope = median_of(slopes, m);
        sen_limits(slopes, m, kendall_variance(work, n), &t);
        t.p = kendall_p(slopes, m, kendall_variance(work, n));
        for (size_t i = 0; i < n; i++) work[i] = y[i] - t.slope * x[i];
        t.intercept = median_of(work, n);
        *s = t;
    }
    free(slopes);
    free(work);
    return st;
}

static void moments(const double *v, size_t n, double *mean, double *sd) {
    double sum = 0.0, square = 0.0;
    for (size_t i = 0; i < n; i++) sum += v[i];
    *mean = sum / (double)n;
    for (size_t i = 0; i < n; i++) square += (v[i] - *mean) * (v[i] - *mean);
    *sd = sqrt(square / ((double)n - 1.0));
}

status trend_welch(const double *a, size_t n_a, const double *b, size_t n_b, trend_step *s, error *e) {
    if (n_a < 2 || n_b < 2)
        return fail(e, ST_NO_RESULT, "a comparison needs at least 2 etches on each side, there are %zu and %zu", n_a, n_b);
    trend_step t = { .n_a = n_a, .n_b = n_b };
    moments(a, n_a, &t.mean_a, &t.sd_a);
    moments(b, n_b, &t.mean_b, &t.sd_b);
    double na = (double)n_a, nb = (double)n_b, va = t.sd_a * t.sd_a / na, vb = t.sd_b * t.sd_b / nb, u = sqrt(va + vb);
    if (!(u > 0.0)) return fail(e, ST_NO_RESULT, "a comparison cannot be made: the etches on both sides do not scatter at all");
    t.difference = t.mean_b - t.mean_a;
    t.df = (va + vb) * (va + vb) / (va * va / (na - 1.0) + vb * vb / (nb - 1.0));
    double reach = student_quantile(0.975, t.df) * u;
    t.lo = t.difference - reach;
    t.hi = t.difference + reach;
    t.p = 2.0 * student_below(-fabs(t.difference) / u, t.df);
    double df = na + nb - 2.0;
    double pooled = sqrt(((na - 1.0) * t.sd_a * t.sd_a + (nb - 1.0) * t.sd_b * t.sd_b) / df);
    t.effect = t.difference / pooled * (1.0 - 3.0 / (4.0 * df - 1.0));
    double half = normal_quantile(0.975) * sqrt((na + nb) / (na * nb) + t.effect * t.effect / (2.0 * (na + nb)));
    t.effect_lo = t.effect - half;
    t.effect_hi = t.effect + half;
    *s = t;
    return ST_OK;
}

status trend_fit(const double *x, const double *y, size_t n, trend_line *l, error *e) {
    if (n < 3) return fail(e, ST_NO_RESULT, "a line needs at least 3 etches, there are %zu", n);
    trend_line t = { .n = n, .x_min = x[0], .x_max = x[0] };
    double m = (double)n, y_mean = 0.0, cross = 0.0, rest = 0.0;
    for (size_t i = 0; i < n; i++) {
        t.x_mean += x[i] / m;
        y_mean += y[i] / m;
        t.x_min = fmin(t.x_min, x[i]);
        t.x_max = fmax(t.x_max, x[i]);
    }
    if (!(t.x_max > t.x_min)) return fail(e, ST_NO_RESULT, "a line needs different settings, all etches have %g", x[0]);
    for (size_t i = 0; i < n; i++) {
        t.x_spread += (x[i] - t.x_mean) * (x[i] - t.x_mean);
        cross += (x[i] - t.x_mean) * (y[i] - y_mean);
    }
    t.slope = cross / t.x_spread;
    t.intercept = y_mean - t.slope * t.x_mean;
    for (size_t i = 0; i < n; i++) {
        double off = y[i] - y_mean - t.slope * (x[i] - t.x_mean);
        rest += off * off;
    }
    double df = m - 2.0, square = 1.0 / m + t.x_mean * t.x_mean / t.x_spread;
    t.residual_sd = sqrt(rest / df);
    t.slope_sd = t.residual_sd / sqrt(t.x_spread);
    t.intercept_sd = t.residual_sd * sqrt(square);
    t.correlation = -t.x_mean / sqrt(t.x_spread * square);
    t.slope_p = t.slope_sd > 0.0 ? 2.0 * student_below(-fabs(t.slope) / t.slope_sd, df) : fabs(t.slope) > 0.0 ? 0.0 : 1.0;
    *l = t;
    return ST_OK;
}

status trend_predict(const trend_line *l, double x, trend_forecast *f, error *e) {
    if (!(x >= l->x_min && x <= l->x_max))
        return fail(e, ST_NO_RESULT, "nothing is said at %g: the data reach from %g to %g", x, l->x_min, l->x_max);
    double off = x - l->x_mean, share = 1.0 / (double)l->n + off * off / l->x_spread;
    double reach = student_quantile(0.975, (double)l->n - 2.0) * l->residual_sd * sqrt(1.0 + share);
    double y = l->intercept + l->slope * x;
    *f = (trend_forecast){ y, l->residual_sd * sqrt(share), y - reach, y + reach };
    return ST_OK;
}

status trend_invert(const trend_line *l, double y, trend_setting *s, error *e) {
    double t = student_quantile(0.975, (double)l->n - 2.0), x = (y - l->intercept) / l->slope;
    double g = t * l->slope_sd / l->slope;
    g *= g;
    if (!(l->slope_p < 0.05) || !(g < 1.0))
        return fail(e, ST_NO_RESULT, "no setting is named: the dependence is not clear (p = %.2g)", l->slope_p);
    if (!(x >= l->x_min && x <= l->x_max))
        return fail(e, ST_NO_RESULT, "no setting is named: the line reaches %g outside the data, which reach from %g to %g", y,
                    l->x_min, l->x_max);
    double off = x - l->x_mean;
    double half = t * l->residual_sd / fabs(l->slope) * sqrt(off * off / l->x_spread + (1.0 - g) / (double)l->n) / (1.0 - g);
    double middle = l->x_mean + off / (1.0 - g);
    trend_setting r = { x, middle - half, middle + half, 0 };
    r.cut = r.lo < l->x_min || r.hi > l->x_max;
    r.lo = fmax(r.lo, l->x_min);
    r.hi = fmin(r.hi, l->x_max);
    *s = r;
    return ST_OK;
}

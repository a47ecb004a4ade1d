/* Outliers first, so that one odd picture makes neither step nor drift; then breaks.
 *
 * Noise is the median moving range / 0.954: a step or a drift hardly moves it. A value stands out when it lies more than
 * 4.5 of that beyond both the median of the five values before it and that of the five behind it, on the same side: the
 * two conditions keep the edges of a step from looking like outliers. So the last three values of a stretch cannot be
 * told from the beginning of a step; the chart's limits speak of those.
 * A break is a step or a bend (of the slope), with a level on one side at least or on a straight line; Schwarz's criterion takes
 * the form: a drift that sets in is no step, and the return after a chamber clean is one. Its probability comes from shuffling the
 * residuals of the mean or of the line.
 * What this file does not do: causes; correlated noise, for which it finds too much. */
#include "judge/finding.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "judge/dice_priv.h"
#include "judge/factors.h"

#define STANDS_OUT 4.5
#define DRIFTS 0.003
#define CLEARLY 5.0 /* by how much Schwarz's criterion has to prefer a break to the straight line it would be without a level beside it */
#define MEDIAN_RANGE 0.9538725524 /* median of |difference| of two normal values of sd 1: 0.6745 sqrt(2) */
enum { SIDE = 5, LEAST_SIDE = 3, LEAST_STRETCH = 5, SHUFFLES = 999, MOST_ABOVE = 2 }; /* 3 of 1000: p = 0.003 */

typedef struct {
    double *y;     /* [n] kept values */
    size_t *where; /* [n] their index in v */
    double *work;  /* [n] */
    size_t n;
    uint64_t dice;
} kept;

static int ascending(const void *a, const void *b) {
    const double *x = a, *y = b;
    return (*x > *y) - (*x < *y);
}

static double median(double *v, size_t n) {
    qsort(v, n, sizeof *v, ascending);
    return n % 2 ? v[n / 2] : 0.5 * (v[n / 2 - 1] + v[n / 2]);
}

/* ---- outliers ---- */

static double noise_of(const kept *k) {
    for (size_t i = 1; i < k->n; i++) k->work[i - 1] = fabs(k->y[i] - k->y[i - 1]);
    return k->n > 1 ? median(k->work, k->n - 1) / MEDIAN_RANGE : 0.0;
}

static double side_median(const kept *k, size_t first, size_t n) {
    double v[SIDE];
    for (size_t i = 0; i < n; i++) v[i] = k->y[first + i];
    return median(v, n);
}

static int stands_out(const kept *k, size_t i, double noise, double *beside) {
    size_t before = i < SIDE ? i : SIDE, behind = k->n - 1 - i < SIDE ? k->n - 1 - i : SIDE;
    if (before < LEAST_SIDE || behind < LEAST_SIDE) return 0;
    double a = k->y[i] - side_median(k, i - before, before), b = k->y[i] - side_median(k, i + 1, behind);
    if (a * b < 0.0) return 0;
    *beside = k->y[i] - (fabs(a) < fabs(b) ? a : b);
    return fmin(fabs(a), fabs(b)) > STANDS_OUT * noise;
}

static void take_outliers(kept *k, findings *f) {
    double noise = noise_of(k), beside = 0.0;
    size_t left = 0;
    if (!(noise > 0.0) || k->n < 2 * LEAST_SIDE + 1) return;
    for (size_t i = 0; i < k->n; i++) {
        if (f->n_outliers == FINDINGS_MOST || !stands_out(k, i, noise, &beside)) continue;
        f->outliers[f->n_outliers++] = (finding_outlier){ k->where[i], k->y[i], beside };
    }
    for (size_t i = 0, o = 0; i < k->n; i++) {
        if (o < f->n_outliers && f->outliers[o].at == k->where[i]) o++;
        else {
            k->y[left] = k->y[i];
            k->where[left++] = k->where[i];
        }
    }
    k->n = left;
}

/* ---- breaks ---- */

/* Least squares of y on 1, t and one more regressor g(t) that is 0 before a break: a step (1) or a bend (t - place).
 * Both are orthogonalised against 1 and t; gain is the reduction of the sum of squares. */
typedef struct {
    double gain;
    size_t at; /* first value of the new stretch */
    break_kind kind;
} split;

static void keep_better(split *best, double sum, double norm, size_t at, break_kind kind) {
    if (norm > 0.0 && sum * sum / norm > best->gain) *best = (split){ sum * sum / norm, at, kind };
}

/* r[n] are residuals of the straight line, so that only their sums behind the break matter. */
static split best_split(const double *r, size_t n) {
    double m = (double)n, mid = 0.5 * (m - 1.0), tt = m * (m * m - 1.0) / 12.0, tail = 0.0, tail_t = 0.0;
    split best = { 0.0, 0, BREAK_STEP };
    for (size_t i = n; i-- > LEAST_STRETCH;) {
        double count = m - (double)i, place = (double)i;
        tail += r[i];
        tail_t += r[i] * (double)i;
        if (n - i < LEAST_STRETCH) continue;
        double sum_t = count * (place + m - 1.0) / 2.0 - count * mid; /* of t - mid behind the break */
        double step_norm = count - count * count / m - sum_t * sum_t / tt;
        double step = tail;
        /* the bend's regressor is d = t - place + 1, so that it is 0 at the last value of the old stretch */
        double g1 = count * (count + 1.0) / 2.0, g2 = count * (count + 1.0) * (2.0 * count + 1.0) / 6.0;
        double gt = g2 + (place - 1.0 - mid) * g1;
        double bend_norm = g2 - g1 * g1 / m - gt * gt / tt, bend = tail_t - (place - 1.0) * tail;
        keep_better(&best, step, step_norm > 1e-9 * m ? step_norm : 0.0, i, BREAK_STEP);
        keep_better(&best, bend, bend_norm > 1e-9 * m ? bend_norm : 0.0, i, BREAK_BEND);
    }
    return best;
}

/* Residuals of the straight line into r; returns their sum of squares. */
static double straighten(const double *y, size_t n, double *r) {
    double mid = 0.5 * ((double)n - 1.0), mean = 0.0, ty = 0.0, tt = 0.0, rest = 0.0;
    for (size_t i = 0; i < n; i++) mean += y[i];
    mean /= (double)n;
    for (size_t i = 0; i < n; i++) {
        double t = (double)i - mid;
        ty += t * (y[i] - mean);
        tt += t * t;
    }
    for (size_t i = 0; i < n; i++) {
        r[i] = y[i] - mean - ty / tt * ((double)i - mid);
        rest += r[i] * r[i];
    }
    return rest;
}

static void shuffle(kept *k, double *r, size_t n) {
    for (size_t i = n; i > 1; i--) {
        size_t j = (size_t)(dice_next(&k->dice) % i);
        double keep = r[i - 1];
        r[i - 1] = r[j];
        r[j] = keep;
    }
}

/* One regressor besides the mean, so with a level that stays on one side at least: a step between two levels, a level that turns
 * into a ramp, a ramp that turns into a level. c[n] are residuals of the mean. */
static split best_level(const double *c, size_t n) {
    double m = (double)n, tail = 0.0, tail_t = 0.0, head = 0.0, head_t = 0.0;
    split best = { 0.0, 0, BREAK_STEP };
    for (size_t i = n; i-- > LEAST_STRETCH;) {
        double count = m - (double)i, g1 = count * (count + 1.0) / 2.0, g2 = g1 * (2.0 * count + 1.0) / 3.0;
        tail += c[i];
        tail_t += c[i] * (double)i;
        if (n - i < LEAST_STRETCH) continue;
        keep_better(&best, tail, count * (m - count) / m, i, BREAK_STEP);
        keep_better(&best, tail_t - ((double)i - 1.0) * tail, g2 - g1 * g1 / m, i, BREAK_BEND);
    }
    for (size_t i = 0; i + LEAST_STRETCH < n; i++) { /* values 0..i are the ramp */
        double count = (double)i + 1.0, g1 = count * (count + 1.0) / 2.0, g2 = g1 * (2.0 * count + 1.0) / 3.0;
        head += c[i];
        head_t += c[i] * (double)i;
        if (i + 1 >= LEAST_STRETCH) keep_better(&best, count * head - head_t, g2 - g1 * g1 / m, i + 1, BREAK_BEND);
    }
    return best;
}

static double centre(const double *y, size_t n, double *c) {
    double mean = 0.0, rest = 0.0;
    for (size_t i = 0; i < n; i++) mean += y[i];
    mean /= (double)n;
    for (size_t i = 0; i < n; i++) {
        c[i] = y[i] - mean;
        rest += c[i] * c[i];
    }
    return rest;
}

/* Schwarz G. (1978) Ann. Stat. 6, 461-464; the place of a break counts as a parameter. */
static double criterion(double rest, size_t n, double parameters) {
    return (double)n * log(fmax(rest, 1e-300) / (double)n) + parameters * log((double)n);
}

/* The straight line takes two of the residuals' freedoms: shuffled ones are straightened again. */
static double split_p(kept *k, double share, size_t n, int levels, double *r, double *again) {
    size_t above = 0, done = 0;
    while (done < SHUFFLES && above <= MOST_ABOVE) {
        shuffle(k, r, n);
        double total = levels ? centre(r, n, again) : straighten(r, n, again);
        above += (levels ? best_level(again, n) : best_split(again, n)).gain / total >= share;
        done++;
    }
    return ((double)above + 1.0) / ((double)done + 1.0);
}

static void search(kept *k, size_t first, size_t n, double *scratch, findings *f) {
    if (n < FINDINGS_LEAST || f->n_breaks == FINDINGS_MOST) return;
    const double *y = k->y + first;
    double *r = k->work, about_mean = centre(y, n, scratch);
    split level = best_level(scratch, n);
    double about_line = straighten(y, n, r);
    split s = best_split(r, n);
    double as_level = criterion(about_mean - level.gain, n, 3.0);
    int levels = as_level + CLEARLY < criterion(about_line, n, 2.0) && as_level < criterion(about_line - s.gain, n, 4.0);
    double rest = levels ? centre(y, n, r) : about_line;
    if (levels) s = level;
    if (!s.at || !(rest > 0.0)) return;
    double p = split_p(k, s.gain / rest, n, levels, r, scratch);
    if (p > (MOST_ABOVE + 1.0) / (SHUFFLES + 1.0)) return;
    finding_break b = { s.kind, first + s.at - 1, first + s.at, MISSING, MISSING, MISSING, p };
    size_t at = f->n_breaks++;
    for (; at > 0 && f->breaks[at - 1].at > b.at; at--) f->breaks[at] = f->breaks[at - 1];
    f->breaks[at] = b;
    search(k, first, s.at, scratch, f);
    search(k, first + s.at, n - s.at, scratch, f);
}

/* Level of a stretch at one of its ends: the end of its straight line where it drifts, else its mean. */
typedef struct {
    double value, variance, square, df;
} level;

static level level_at(const double *y, size_t n, int drifts, int end, double *r) {
    double m = (double)n, mean = 0.0, square = 0.0, half = 0.5 * (m - 1.0), tt = m * (m * m - 1.0) / 12.0, ty = 0.0;
    for (size_t i = 0; i < n; i++) mean += y[i] / m;
    if (drifts) {
        square = straighten(y, n, r);
        for (size_t i = 0; i < n; i++) ty += ((double)i - half) * y[i];
        double reach = end ? half + 1.0 : -half; /* the last level is wanted where the next stretch begins */
        return (level){ mean + ty / tt * reach, 1.0 / m + reach * reach / tt, square, m - 2.0 };
    }
    for (size_t i = 0; i < n; i++) square += (y[i] - mean) * (y[i] - mean);
    return (level){ mean, 1.0 / m, square, m - 1.0 };
}

static void size_step(kept *k, const findings *f, size_t i, finding_break *b) {
    const finding_stretch *old = &f->stretches[i], *new = &f->stretches[i + 1];
    level was = level_at(k->y + b->at - old->n, old->n, old->drift.p < DRIFTS, 1, k->work);
    level is = level_at(k->y + b->at, new->n, new->drift.p < DRIFTS, 0, k->work);
    double df = was.df + is.df, sd = sqrt((was.square + is.square) / df * (was.variance + is.variance));
    double reach = student_quantile(0.975, df) * sd;
    b->size = is.value - was.value;
    b->lo = b->size - reach;
    b->hi = b->size + reach;
}

static status stretches(kept *k, findings *f, error *e) {
    for (size_t i = 0; i <= f->n_breaks && k->n; i++) {
        size_t first = i ? f->breaks[i - 1].at : 0, end = i < f->n_breaks ? f->breaks[i].at : k->n;
        finding_stretch *s = &f->stretches[i];
        *s = (finding_stretch){ .first = k->where[first], .last = k->where[end - 1], .n = end - first };
        if (s->n < LEAST_STRETCH) continue;
        for (size_t j = 0; j < s->n; j++) k->work[j] = (double)j;
        status st = trend_robust(k->work, k->y + first, s->n, &s->drift, e);
        if (st != ST_OK) return st;
    }
    for (size_t i = 0; i < f->n_breaks; i++)
        if (f->breaks[i].kind == BREAK_STEP) size_step(k, f, i, &f->breaks[i]);
    for (size_t i = 0; i < f->n_breaks; i++) {
        f->breaks[i].before = k->where[f->breaks[i].before];
        f->breaks[i].at = k->where[f->breaks[i].at];
    }
    return ST_OK;
}

status findings_of(const double *v, size_t n, findings *out, error *e) {
    findings f = { .n = n };
    kept k = { mem_array(n, sizeof *k.y), mem_array(n, sizeof *k.where), mem_array(n, sizeof *k.work), 0, 23 };
    double *scratch = mem_array(n, sizeof *scratch);
    status st = k.y && k.where && k.work && scratch ? ST_OK : NO_MEMORY(e, "the findings");
    size_t finite = 0, skip = 0;
    for (size_t i = 0; i < n; i++) finite += isfinite(v[i]) != 0;
    if (finite > TREND_MOST) skip = finite - TREND_MOST;
    for (size_t i = 0; st == ST_OK && i < n; i++) {
        if (!isfinite(v[i])) continue;
        if (skip) {
            skip--;
            continue;
        }
        k.y[k.n] = v[i];
        k.where[k.n++] = i;
    }
    if (st == ST_OK) {
        take_outliers(&k, &f);
        search(&k, 0, k.n, scratch, &f);
        st = stretches(&k, &f, e);
    }
    if (st == ST_OK) *out = f;
    free(k.y);
    free(k.where);
    free(k.work);
    free(scratch);
    return st;
}

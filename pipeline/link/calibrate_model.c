/* The data and the model of a calibration: measured spectra in groups, the graded index behind them, slopes, starts.
 *
 * Values closer than 5 nm are averaged in groups: the reflectance of such a texture has no finer structure, and the noise
 * averages out. Noise: each value against the straight line through its neighbours, median (robust against the texture's
 * own bends) over 0.6745, the deviation's variance being 1 + w^2 + (1 - w)^2 of one value's.
 * Starts: a scan over 46 heights (25 to 3000 nm) and 12 exponents on 48 wavelengths, the offset by its mean. For every
 * exponent the best height of each sample, and the second best minimum; the better half goes on. Tall and blunt at once (height x exponent above
 * 5000 nm) is left out, here and in the fit: such profiles need thousands of slabs, and no etch makes them.
 * What this file does not do: light from the rear, diffuse scattering, the model's own error. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "link/calibrate_priv.h"

static const double GROUP_NM = 5.0;
static const double SCAN_LO_NM = 25.0, SCAN_HI_NM = 3000.0, SCAN_TOLERANCE = 1e-3;
static const double TALL_AND_BLUNT_NM = 5000.0; /* height x exponent */
static const double MAD = 0.6744897501960817;   /* median of |normal| */
enum { FEWEST = 8, SCAN_HEIGHTS = 46, SCAN_POINTS = 48, SCAN_EXPONENTS = FIT_STARTS };

const double fit_lower[FIT_KINDS] = { 10.0, 0.25, 0.0, 0.2, -0.05 };
const double fit_upper[FIT_KINDS] = { 5000.0, 5.0, 0.5, 1.0, 0.05 };
const double fit_step[FIT_KINDS] = { 0.003, 0.01, 0.01, 0.01, 1.0 }; /* of slopes; the height's is relative */

/* ---- data ---- */

static int ascending(const void *a, const void *b) {
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

/* Standard deviation of one value's noise, NAN where nothing can be said; work[n]. */
static double noise_of(const double *x, const double *y, size_t n, double *work) {
    size_t k = 0;
    for (size_t i = 1; i + 1 < n; i++) {
        double w = (x[i] - x[i - 1]) / (x[i + 1] - x[i - 1]);
        double line = y[i - 1] + w * (y[i + 1] - y[i - 1]);
        work[k++] = fabs(y[i] - line) / sqrt(1.0 + w * w + (1.0 - w) * (1.0 - w));
    }
    if (k < 3) return MISSING;
    qsort(work, k, sizeof *work, ascending);
    return (k % 2 ? work[k / 2] : 0.5 * (work[k / 2 - 1] + work[k / 2])) / MAD;
}

status fit_data_make(const fit_sample *s, const fit_options *o, fit_data *out, error *e) {
    size_t first = 0, end = s->n;
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    *out = (fit_data){ .from = s, .noise = MISSING };
    while (first < end && s->wavelength_nm[first] < o->band_lo_nm) first++;
    while (end > first && s->wavelength_nm[end - 1] > o->band_hi_nm) end--;
    size_t n = end - first;
    out->wavelength_nm = mem_array(n, sizeof *out->wavelength_nm);
    out->R = mem_array(n, sizeof *out->R);
    if (!out->wavelength_nm || !out->R) return NO_MEMORY(e, "a spectrum");
    for (size_t i = first; i < end;) {
        double x = 0.0, y = 0.0, start = s->wavelength_nm[i];
        size_t k = 0;
        for (; i < end && s->wavelength_nm[i] < start + GROUP_NM * (1.0 - 1e-9); i++, k++) {
            x += s->wavelength_nm[i];
            y += s->R[i];
        }
        out->wavelength_nm[out->n] = x / (double)k;
        out->R[out->n++] = y / (double)k;
    }
    if (out->n < FEWEST)
        return fail(e, ST_BAD_INPUT,
                    "%s: %zu values between %s and %s nm (%d nm apart at least), expected %d or more",
                    s->name, out->n, number_text(o->band_lo_nm, 6, a), number_text(o->band_hi_nm, 6, b),
                    (int)GROUP_NM, FEWEST);
    out->per_group = (double)n / (double)out->n;
    double *work = mem_array(n, sizeof *work);
    if (!work) return NO_MEMORY(e, "a spectrum");
    double noise = isfinite(o->noise) ? o->noise : noise_of(s->wavelength_nm + first, s->R + first, n, work);
    out->noise = noise / sqrt(out->per_group);
    free(work);
    return ST_OK;
}

void fit_data_free(fit_data *d) {
    free(d->wavelength_nm);
    free(d->R);
    *d = (fit_data){ 0 };
}

/* ---- parameters ---- */

size_t fit_parameters(const fit_model *f) {
    size_t n = fit_is_free(f->o, FIT_HEIGHT) ? f->n : 0;
    for (int k = FIT_EXPONENT; k < FIT_KINDS; k++) n += (size_t)fit_is_free(f->o, (fit_kind)k);
    return n;
}

long fit_index(const fit_model *f, fit_kind k, size_t sample) {
    if (!fit_is_free(f->o, k)) return -1;
    if (k == FIT_HEIGHT) return (long)sample;
    long at = fit_is_free(f->o, FIT_HEIGHT) ? (long)f->n : 0;
    for (int before = FIT_EXPONENT; before < (int)k; before++) at += fit_is_free(f->o, (fit_kind)before);
    return at;
}

fit_point fit_point_at(const fit_model *f, const double *x, size_t sample) {
    const link_options *l = &f->o->link;
    fit_point p = { { f->data[sample].from->height_nm.value, l->exponent, l->height_spread, l->coverage,
                      0.0 } };
    for (int k = 0; k < FIT_KINDS; k++) {
        long at = fit_index(f, (fit_kind)k, sample);
        if (at >= 0) p.value[k] = x[at];
    }
    return p;
}

/* ---- model ---- */

status fit_spectrum(const fit_model *f, const fit_point *p, double spacing_nm, const double *wavelength_nm,
                    size_t n, double *R, error *e) {
    const optics_setup *o = f->optics;
    link_options l = f->o->link;
    reflect_options r = o->reflect;
    profile made = { 0 };
    l.exponent = p->value[FIT_EXPONENT];
    l.height_spread = p->value[FIT_SPREAD];
    l.coverage = p->value[FIT_FLOOR];
    r.tolerance = f->tolerance;
    status st = link_profile(p->value[FIT_HEIGHT], spacing_nm, NULL, 0, f->o->pores, &l, o->coatings,
                             o->n_coatings, &made, e);
    if (st != ST_OK) return st;
    stack s = { .ambient = o->ambient,
                .front = o->front,
                .coatings = o->coatings,
                .n_coatings = o->n_coatings,
                .profile = &made,
                .substrate = o->substrate,
                .mixing = o->mixing };
    error own = { 0 };
    st = reflectance(&s, &r, wavelength_nm, n, R, NULL, &own);
    profile_free(&made);
    if (st == ST_NO_RESULT)
        st = ST_OK; /* the best values of an odd texture on the way to the minimum will do */
    if (st != ST_OK) return fail(e, st, "%s", own.text);
    for (size_t i = 0; i < n; i++) R[i] += p->value[FIT_OFFSET];
    return ST_OK;
}

status fit_residuals(void *user, const double *x, double *r, error *e) {
    const fit_model *f = user;
    for (size_t s = 0; s < f->n; s++) {
        const fit_data *d = &f->data[s];
        fit_point p = fit_point_at(f, x, s);
        if (p.value[FIT_HEIGHT] * p.value[FIT_EXPONENT] > TALL_AND_BLUNT_NM) {
            r[d->first] = MISSING; /* no place to go: the solver turns back */
            continue;
        }
        status st = fit_spectrum(f, &p, d->from->spacing_nm.value, d->wavelength_nm, d->n, r + d->first, e);
        if (st != ST_OK) return st;
        for (size_t i = 0; i < d->n; i++) r[d->first + i] -= d->R[i];
    }
    return ST_OK;
}

/* Central differences, one sample at a time: its height moves no other spectrum, and the offset's slope is 1. */
status fit_jacobian(void *user, const double *x, double *j, error *e) {
    const fit_model *f = user;
    memset(j, 0, fit_parameters(f) * f->m * sizeof *j);
    for (size_t s = 0; s < f->n; s++) {
        const fit_data *d = &f->data[s];
        for (int k = 0; k < FIT_KINDS; k++) {
            long at = fit_index(f, (fit_kind)k, s);
            if (at < 0) continue;
            double *column = j + (size_t)at * f->m + d->first;
            fit_point p = fit_point_at(f, x, s);
            double v = p.value[k], h = fit_step[k] * (k == FIT_HEIGHT ? v : 1.0);
            double lo = fmax(v - h, fit_lower[k]), hi = fmin(v + h, fit_upper[k]);
            for (size_t i = 0; i < d->n; i++) column[i] = 1.0;
            if (k == FIT_OFFSET) continue;
            p.value[k] = lo;
            status st = fit_spectrum(f, &p, d->from->spacing_nm.value, d->wavelength_nm, d->n, f->down, e);
            p.value[k] = hi;
            if (st == ST_OK)
                st = fit_spectrum(f, &p, d->from->spacing_nm.value, d->wavelength_nm, d->n, f->up, e);
            if (st != ST_OK) return st;
            for (size_t i = 0; i < d->n; i++) column[i] = (f->up[i] - f->down[i]) / (hi - lo);
        }
    }
    return ST_OK;
}

/* ---- starts ---- */

typedef struct {
    double x[2], sum[2]; /* best and second best minimum over height; sum INFINITY: none */
} minima;

static double scan_height(int i) {
    return SCAN_LO_NM * pow(SCAN_HI_NM / SCAN_LO_NM, (double)i / (SCAN_HEIGHTS - 1));
}

/* Mean square of the residuals, the offset taken as their mean where it is free. */
static double misfit(const fit_model *f, const double *R, const double *measured, size_t n) {
    double mean = 0.0, sum = 0.0;
    for (size_t i = 0; i < n; i++) mean += (R[i] - measured[i]) / (double)n;
    if (!fit_is_free(f->o, FIT_OFFSET)) mean = 0.0;
    mean = fmin(fmax(mean, fit_lower[FIT_OFFSET]), fit_upper[FIT_OFFSET]);
    for (size_t i = 0; i < n; i++) sum += (R[i] - measured[i] - mean) * (R[i] - measured[i] - mean);
    return sum / (double)n;
}

static status scan(const fit_model *f, size_t sample, const fit_point *shape, minima *out, error *e) {
    const fit_data *d = &f->data[sample];
    double nm[SCAN_POINTS], measured[SCAN_POINTS], R[SCAN_POINTS], at[SCAN_HEIGHTS];
    size_t n = d->n < SCAN_POINTS ? d->n : SCAN_POINTS;
    int steps = fit_is_free(f->o, FIT_HEIGHT) ? SCAN_HEIGHTS : 1;
    *out = (minima){ { MISSING, MISSING }, { (double)INFINITY, (double)INFINITY } };
    for (size_t i = 0; i < n; i++) {
        size_t k = n > 1 ? i * (d->n - 1) / (n - 1) : 0;
        nm[i] = d->wavelength_nm[k];
        measured[i] = d->R[k];
    }
    for (int i = 0; i < steps; i++) {
        fit_point p = *shape;
        p.value[FIT_HEIGHT] = steps > 1 ? scan_height(i) : d->from->height_nm.value;
        at[i] = (double)INFINITY;
        if (steps > 1 && p.value[FIT_HEIGHT] * p.value[FIT_EXPONENT] > TALL_AND_BLUNT_NM) continue;
        if (fit_is_free(f->o, FIT_SPREAD)) p.value[FIT_SPREAD] = 0.0; /* moves no minimum far, and is quick */
        status st = fit_spectrum(f, &p, d->from->spacing_nm.value, nm, n, R, e);
        if (st != ST_OK) return st;
        at[i] = misfit(f, R, measured, n);
    }
    for (int i = 0; i < steps; i++) {
        if (isinf(at[i]) || (i > 0 && at[i - 1] <= at[i]) || (i + 1 < steps && at[i + 1] < at[i])) continue;
        int place = at[i] < out->sum[0] ? 0 : at[i] < out->sum[1] ? 1 : 2;
        if (place == 2) continue;
        out->x[1] = place == 0 ? out->x[0] : out->x[1];
        out->sum[1] = place == 0 ? out->sum[0] : out->sum[1];
        out->x[place] = steps > 1 ? scan_height(i) : d->from->height_nm.value;
        out->sum[place] = at[i];
    }
    return ST_OK;
}

/* A start and what the scan says of it. */
typedef struct {
    double sum;
    size_t at; /* in the list */
} rank;

static int by_sum(const void *a, const void *b) {
    const rank *x = a, *y = b;
    if (x->sum < y->sum || x->sum > y->sum) return x->sum < y->sum ? -1 : 1;
    return (x->at > y->at) - (x->at < y->at);
}

static void write_start(const fit_model *f, const fit_point *shape, const minima *m, int second, double *x) {
    for (int k = 0; k < FIT_KINDS; k++)
        for (size_t s = 0; s < f->n; s++) {
            long at = fit_index(f, (fit_kind)k, s);
            if (at < 0) continue;
            int take = second && isfinite(m[s].sum[1]);
            x[at] = k == FIT_HEIGHT ? m[s].x[take] : shape->value[k];
        }
}

/* The best half of all[n], best first. */
static size_t best_half(const double *all, rank *ranks, size_t n, size_t n_x, double *starts) {
    size_t keep = n > FIT_STARTS ? FIT_STARTS : n;
    qsort(ranks, n, sizeof *ranks, by_sum);
    for (size_t i = 0; i < keep; i++) memcpy(starts + i * n_x, all + ranks[i].at * n_x, n_x * sizeof *all);
    return keep;
}

status fit_starts(const fit_model *f, double *starts, size_t *n, error *e) {
    static const double exponents[] = { 1.0, 0.5, 0.7, 0.85, 1.2, 1.4, 1.65, 1.9, 2.2, 2.6, 3.2, 4.2 };
    _Static_assert(sizeof exponents / sizeof exponents[0] == SCAN_EXPONENTS,
                   "the better half of two starts for every exponent");
    size_t n_x = fit_parameters(f);
    int shapes = fit_is_free(f->o, FIT_EXPONENT) ? SCAN_EXPONENTS : 1;
    minima *m = mem_array(f->n, sizeof *m);
    double *all = mem_array(n_x, 2 * SCAN_EXPONENTS * sizeof *all);
    rank ranks[2 * SCAN_EXPONENTS];
    size_t n_all = 0;
    status st = m && all ? ST_OK : NO_MEMORY(e, "the starts of a fit");
    fit_model coarse = *f;
    coarse.tolerance = SCAN_TOLERANCE;
    *n = 0;
    for (int q = 0; q < shapes && st == ST_OK; q++) {
        const link_options *l = &f->o->link;
        fit_point shape = { { 0.0, shapes > 1 ? exponents[q] : l->exponent, l->height_spread, l->coverage,
                              0.0 } };
        double sum[2] = { 0.0, 0.0 };
        int second = 0;
        if (fit_is_free(f->o, FIT_SPREAD)) shape.value[FIT_SPREAD] = fmin(fmax(l->height_spread, 0.1), 0.4);
        if (fit_is_free(f->o, FIT_FLOOR)) shape.value[FIT_FLOOR] = fmin(fmax(l->coverage, 0.3), 0.9);
        for (size_t s = 0; s < f->n && st == ST_OK; s++) {
            st = scan(&coarse, s, &shape, &m[s], e);
            int has = isfinite(m[s].sum[1]);
            second = second || has;
            sum[0] += m[s].sum[0];
            sum[1] += m[s].sum[has];
        }
        for (int which = 0; which <= second && st == ST_OK; which++) {
            write_start(f, &shape, m, which, all + n_x * n_all);
            ranks[n_all] = (rank){ sum[which], n_all };
            n_all++;
        }
    }
    if (st == ST_OK) *n = best_half(all, ranks, n_all, n_x, starts);
    free(m);
    free(all);
    return st;
}

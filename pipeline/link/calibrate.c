/* The joint fit, what stands in its result, and what samples left out say of it.
 *
 * Least squares of all spectra at once, every averaged value of equal weight. Uncertainties come from the scatter of the
 * residuals (or from a stated noise, where that is larger). Where neighbouring residuals hang together (correlation r,
 * the model missing a bend rather than noise), there are fewer independent values than counted: every u times
 * sqrt((1 + r)/(1 - r)) (Bayley, Hammersley 1946, from memory).
 * Left out: each sample in turn is predicted from the others, height = their mean aspect x its spacing, shape as fitted
 * to them, and compared with its measured photon-weighted reflectance. From three samples on.
 * What this file does not do: weigh samples against each other, look for outliers among them. */
#include "link/calibrate.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "link/calibrate_priv.h"

static const double FIT_TOLERANCE = 1e-6; /* of the reflectance, below any spectrometer */
static const double CONVERGED = 1e-6;     /* of the sum of squares: a thousandth of a standard deviation */
static const double ROUGH = 1e-3;         /* of the same, on the way from the starts */
static const double SAME_POINT = 0.01;    /* of a parameter's own size: two starts ended in one valley */
static const double TOGETHER_MOST = 0.98;
enum { EVALUATIONS = 200 };

static const char *const kind_names[FIT_KINDS] = { "height", "exponent", "spread", "floor", "offset" };

const char *fit_kind_name(fit_kind k) { return kind_names[k]; }

status fit_kinds_parse(const char *list, unsigned *bits, error *e) {
    unsigned got = 0;
    for (const char *s = list; *s;) {
        size_t n = strcspn(s, ","), k = 0;
        while (k < FIT_KINDS && (strlen(kind_names[k]) != n || strncmp(kind_names[k], s, n) != 0)) k++;
        if (k == FIT_KINDS || (got >> k & 1u))
            return fail(e, ST_BAD_INPUT,
                        "found '%.*s', expected words out of height, exponent, spread, floor, offset, "
                        "each once, with commas between",
                        n < 40 ? (int)n : 40, s);
        got |= 1u << k;
        s += n + (s[n] == ',');
    }
    if (!got)
        return fail(e, ST_BAD_INPUT,
                    "names nothing to fit; expected words out of height, exponent, spread, floor, "
                    "offset");
    *bits = got;
    return ST_OK;
}

fit_options fit_defaults(void) {
    return (fit_options){ .free = 1u << FIT_HEIGHT | 1u << FIT_EXPONENT | 1u << FIT_OFFSET,
                          .link = link_defaults(),
                          .band_lo_nm = 300.0,
                          .band_hi_nm = 1000.0,
                          .noise = MISSING };
}

/* ---- one fit ---- */

/* Places the residuals and makes the work space for the samples that data[] now holds. */
static status model_make(fit_model *f, error *e) {
    size_t longest = 0;
    f->m = 0;
    for (size_t s = 0; s < f->n; s++) {
        f->data[s].first = f->m;
        f->m += f->data[s].n;
        if (f->data[s].n > longest) longest = f->data[s].n;
    }
    f->tolerance = FIT_TOLERANCE;
    f->up = mem_array(longest, sizeof *f->up);
    f->down = mem_array(longest, sizeof *f->down);
    return f->up && f->down ? ST_OK : NO_MEMORY(e, "a fit");
}

static void model_free(fit_model *f) {
    free(f->up);
    free(f->down);
    f->up = f->down = NULL;
}

static status fit_from(const fit_model *f, const double *starts, size_t n_starts, int evaluations,
                       least_fit *out, error *e) {
    size_t n = fit_parameters(f);
    double *bounds = mem_array(n, 2 * sizeof *bounds);
    if (!bounds) return NO_MEMORY(e, "a fit");
    for (int k = 0; k < FIT_KINDS; k++)
        for (size_t s = 0; s < f->n; s++) {
            long at = fit_index(f, (fit_kind)k, s);
            if (at < 0) continue;
            bounds[at] = fit_lower[k];
            bounds[n + (size_t)at] = fit_upper[k];
        }
    least_problem p = least_defaults();
    fit_model own = *f;
    int rough = evaluations < EVALUATIONS;
    if (rough) own.tolerance = 100.0 * FIT_TOLERANCE;
    p.n = n;
    p.m = f->m;
    p.residuals = fit_residuals;
    p.jacobian = fit_jacobian;
    p.user = &own;
    p.lower = bounds;
    p.upper = bounds + n;
    p.starts = starts;
    p.n_starts = n_starts;
    p.tolerance = rough ? ROUGH : CONVERGED;
    p.max_evaluations = evaluations;
    status st = least_squares(&p, out, e);
    free(bounds);
    return st;
}

static int same_point(const double *a, const double *b, size_t n) {
    for (size_t k = 0; k < n; k++)
        if (fabs(a[k] - b[k]) > SAME_POINT * fmax(fabs(a[k]), 0.1)) return 0;
    return 1;
}

/* The different ends of a heat, best first and at most `most`, back into starts; those whose sum of squares is `hopeless`
 * times the best one's are left. */
static size_t different_ends(const least_fit *heat, size_t most, double hopeless, double *starts) {
    size_t n = heat->n, kept = 0;
    double least = MISSING;
    for (double last = -1.0; kept < most;) {
        size_t best = heat->n_starts;
        for (size_t s = 0; s < heat->n_starts; s++)
            if (heat->end_sum[s] > last && (best == heat->n_starts || heat->end_sum[s] < heat->end_sum[best]))
                best = s;
        if (best == heat->n_starts || (kept && heat->end_sum[best] > hopeless * least)) break;
        if (!kept) least = heat->end_sum[best];
        const double *x = heat->end_x + best * n;
        int known = 0;
        for (size_t k = 0; k < kept && !known; k++) known = same_point(starts + k * n, x, n);
        if (!known) memcpy(starts + kept++ * n, x, n * sizeof *x);
        last = heat->end_sum[best];
    }
    return kept;
}

/* Few steps from many starts, more from the best of them, then to the minimum from those still apart. */
static status fit_all(fit_model *f, least_fit *out, error *e) {
    static const struct {
        int evaluations;
        size_t most;
        double hopeless;
    } heats[] = { { 5, 5, 4.0 }, { 25, 3, 1.5 } };
    double *starts = mem_array(fit_parameters(f), FIT_STARTS * sizeof *starts);
    size_t n = 0;
    status st = starts ? fit_starts(f, starts, &n, e) : NO_MEMORY(e, "the starts of a fit");
    for (size_t h = 0; h < sizeof heats / sizeof heats[0] && st == ST_OK; h++) {
        least_fit heat = { 0 };
        error own = { 0 };
        st = fit_from(f, starts, n, heats[h].evaluations, &heat, &own);
        if (st == ST_NO_RESULT && heat.n) st = ST_OK; /* still on its way */
        if (st == ST_OK)
            n = different_ends(&heat, heats[h].most, heats[h].hopeless, starts);
        else
            fail(e, st, "%s", own.text);
        least_free(&heat);
    }
    if (st == ST_OK) st = fit_from(f, starts, n, EVALUATIONS, out, e);
    free(starts);
    return st;
}

/* ---- the result ---- */

static status weighted(const optics_setup *o, const fit_data *d, const double *R, double offset, double *work,
                       double *out, error *e) {
    for (size_t i = 0; i < d->n; i++) work[i] = R[i] - offset;
    return sun_weighted(o->sun, d->wavelength_nm, work, d->n, d->wavelength_nm[0], d->wavelength_nm[d->n - 1],
                        out, e);
}

static status curve_make(const fit_model *f, const least_fit *fit, size_t s, double offset, fit_curve *c,
                         error *e) {
    const fit_data *d = &f->data[s];
    long at = fit_index(f, FIT_HEIGHT, s);
    *c = (fit_curve){ .height_nm = d->from->height_nm,
                      .n = d->n,
                      .left_out = MISSING,
                      .weighted = MISSING,
                      .lo_nm = d->wavelength_nm[0],
                      .hi_nm = d->wavelength_nm[d->n - 1] };
    if (at >= 0) c->height_nm = (quantity){ fit->x[at], fit->u[at], 1 };
    c->aspect = c->height_nm.value / d->from->spacing_nm.value; /* NAN without a spacing */
    c->wavelength_nm = mem_array(d->n, sizeof *c->wavelength_nm);
    c->measured = mem_array(d->n, sizeof *c->measured);
    c->fitted = mem_array(d->n, sizeof *c->fitted);
    if (!c->wavelength_nm || !c->measured || !c->fitted) return NO_MEMORY(e, "a fitted spectrum");
    double sum = 0.0;
    for (size_t i = 0; i < d->n; i++) {
        double r = fit->r[d->first + i];
        c->wavelength_nm[i] = d->wavelength_nm[i];
        c->measured[i] = d->R[i];
        c->fitted[i] = d->R[i] + r;
        sum += r * r;
    }
    c->residual_rms = sqrt(sum / (double)d->n);
    return weighted(f->optics, d, d->R, offset, f->up, &c->weighted, e);
}

/* Noise of one averaged value over all samples, floored by what the model computes to. */
static double noise_all(const fit_model *f) {
    double sum = 0.0, n = 0.0;
    for (size_t s = 0; s < f->n; s++) {
        if (!isfinite(f->data[s].noise)) continue;
        sum += (double)f->data[s].n * f->data[s].noise * f->data[s].noise;
        n += (double)f->data[s].n;
    }
    return n > 0.0 ? fmax(sqrt(sum / n), 10.0 * FIT_TOLERANCE) : MISSING;
}

/* Correlation of neighbouring residuals within the samples; 0 where it is no more than chance. */
static double neighbours_of(const fit_model *f, const double *r) {
    double both = 0.0, own = 0.0;
    for (size_t s = 0; s < f->n; s++)
        for (size_t i = 0; i < f->data[s].n; i++) {
            const double *at = r + f->data[s].first + i;
            own += at[0] * at[0];
            if (i + 1 < f->data[s].n) both += at[0] * at[1];
        }
    double c = own > 0.0 ? both / own : 0.0;
    return c > 2.0 / sqrt((double)f->m) ? fmin(c, TOGETHER_MOST) : 0.0;
}

/* What the scatter of the residuals does not say is put on the covariance. */
static void widen(const fit_model *f, least_fit *fit, fit_result *r) {
    double stated = f->o->noise, more;
    r->noise = noise_all(f);
    r->freedom = fit->freedom;
    r->residual_rms = sqrt(fit->sum_of_squares / (double)f->m);
    r->reduced = fit->sum_of_squares / (double)fit->freedom / (r->noise * r->noise);
    r->neighbours = neighbours_of(f, fit->r);
    r->widened = sqrt((1.0 + r->neighbours) / (1.0 - r->neighbours));
    more = r->widened * (isfinite(stated) && r->reduced < 1.0 ? 1.0 / sqrt(r->reduced) : 1.0);
    for (size_t i = 0; i < fit->n * fit->n; i++) fit->covariance[i] *= more * more;
    for (size_t i = 0; i < fit->n; i++) fit->u[i] *= more;
}

static status result_make(const fit_model *f, const least_fit *fit, fit_result *r, error *e) {
    size_t n = fit->n;
    r->n_samples = f->n;
    r->n_numbers = n;
    r->n_starts = fit->n_starts;
    r->n_arrived = fit->n_arrived;
    r->curves = mem_array(f->n, sizeof *r->curves);
    r->numbers = mem_array(n, sizeof *r->numbers);
    r->covariance = mem_array(n * n, sizeof *r->covariance);
    r->correlation = mem_array(n * n, sizeof *r->correlation);
    if (!r->curves || !r->numbers || !r->covariance || !r->correlation)
        return NO_MEMORY(e, "the result of a fit");
    memcpy(r->covariance, fit->covariance, n * n * sizeof *r->covariance);
    for (size_t a = 0; a < n; a++)
        for (size_t b = 0; b < n; b++)
            r->correlation[a * n + b] = a == b ? 1.0 : least_correlation(fit, a, b);
    for (int k = 0; k < FIT_KINDS; k++)
        for (size_t s = 0; s < f->n; s++) {
            long at = fit_index(f, (fit_kind)k, s);
            if (at < 0 || (k != FIT_HEIGHT && s)) continue;
            r->numbers[at] = (fit_number){ (fit_kind)k, s, fit->x[at], fit->u[at], fit->at_bound[at] };
        }
    fit_point p = fit_point_at(f, fit->x, 0);
    long q = fit_index(f, FIT_EXPONENT, 0);
    r->link = f->o->link;
    r->link.exponent = p.value[FIT_EXPONENT];
    if (q >= 0) r->link.exponent_u = fit->u[q];
    r->link.height_spread = p.value[FIT_SPREAD];
    r->link.coverage = p.value[FIT_FLOOR];
    r->offset = p.value[FIT_OFFSET];
    for (size_t s = 0; s < f->n; s++) {
        status st = curve_make(f, fit, s, r->offset, &r->curves[s], e);
        if (st != ST_OK) return st;
    }
    return ST_OK;
}

/* ---- the link ---- */

static void link_make(const fit_model *f, fit_result *r) {
    double n = (double)f->n, u = 0.0, mean = 0.0, squares = 0.0;
    calibration c = { .n_samples = f->n,
                      .spacing_lo_nm = (double)INFINITY,
                      .height_lo_nm = (double)INFINITY,
                      .exponent = r->link.exponent,
                      .exponent_u = r->link.exponent_u,
                      .height_spread = r->link.height_spread,
                      .coverage = r->link.coverage,
                      .offset = r->offset,
                      .height_by_size = r->link.height_by_size,
                      .level_at_tips = r->link.level_at_tips,
                      .residual_rms = r->residual_rms,
                      .left_out = MISSING,
                      .left_out_spectral = MISSING,
                      .band_lo_nm = f->o->band_lo_nm,
                      .band_hi_nm = f->o->band_hi_nm,
                      .pores = f->o->pores,
                      .mixing = f->optics->mixing };
    for (size_t s = 0; s < f->n; s++) {
        quantity spacing = f->data[s].from->spacing_nm, height = r->curves[s].height_nm;
        mean += r->curves[s].aspect / n;
        u += (isfinite(height.u) ? height.u : 0.0) / spacing.value / n; /* shared: not averaged out */
        c.spacing_lo_nm = fmin(c.spacing_lo_nm, spacing.value);
        c.spacing_hi_nm = fmax(c.spacing_hi_nm, spacing.value);
        if (isfinite(spacing.u)) c.spacing_u_nm = fmax(c.spacing_u_nm, spacing.u);
        c.height_lo_nm = fmin(c.height_lo_nm, height.value);
        c.height_hi_nm = fmax(c.height_hi_nm, height.value);
    }
    for (size_t s = 0; s < f->n; s++) squares += (r->curves[s].aspect - mean) * (r->curves[s].aspect - mean);
    c.aspect = mean;
    c.aspect_u = u;
    c.aspect_scatter = f->n > 1 ? sqrt(squares / (n - 1.0)) : MISSING;
    r->link_made = c;
}

/* Fits all but sample `out` and predicts it; adds its squared errors over the spectrum. */
static status leave_out(const fit_model *f, const least_fit *all, size_t out, fit_result *r, double *squares,
                        error *e) {
    fit_model rest = *f;
    least_fit fit = { 0 };
    double *start = mem_array(all->n, sizeof *start), aspect = 0.0, predicted = 0.0, measured = 0.0;
    rest.n = f->n - 1;
    rest.up = rest.down = NULL;
    rest.data = mem_array(rest.n, sizeof *rest.data);
    status st = start && rest.data ? ST_OK : NO_MEMORY(e, "a fit");
    for (size_t s = 0, k = 0; st == ST_OK && s < f->n; s++)
        if (s != out) rest.data[k++] = f->data[s];
    if (st == ST_OK) st = model_make(&rest, e);
    for (int k = 0; st == ST_OK && k < FIT_KINDS; k++)
        for (size_t s = 0; s < f->n; s++) {
            long from = fit_index(f, (fit_kind)k, s), to = fit_index(&rest, (fit_kind)k, s > out ? s - 1 : s);
            if (from >= 0 && (k != FIT_HEIGHT || s != out)) start[to] = all->x[from];
        }
    if (st == ST_OK) st = fit_from(&rest, start, 1, EVALUATIONS, &fit, e);
    for (size_t s = 0; st == ST_OK && s < rest.n; s++) {
        fit_point p = fit_point_at(&rest, fit.x, s);
        aspect += p.value[FIT_HEIGHT] / rest.data[s].from->spacing_nm.value / (double)rest.n;
    }
    const fit_data *d = &f->data[out];
    if (st == ST_OK) {
        fit_point p = fit_point_at(&rest, fit.x, 0);
        double offset = p.value[FIT_OFFSET];
        p.value[FIT_HEIGHT] = aspect * d->from->spacing_nm.value;
        p.value[FIT_OFFSET] = 0.0;
        st = fit_spectrum(f, &p, d->from->spacing_nm.value, d->wavelength_nm, d->n, f->down, e);
        if (st == ST_OK) st = weighted(f->optics, d, f->down, 0.0, f->up, &predicted, e);
        if (st == ST_OK) st = weighted(f->optics, d, d->R, offset, f->up, &measured, e);
        for (size_t i = 0; i < d->n && st == ST_OK; i++) {
            double miss = f->down[i] - (d->R[i] - offset);
            *squares += miss * miss / (double)d->n;
        }
        r->curves[out].left_out = predicted - measured;
    }
    least_free(&fit);
    model_free(&rest);
    free(rest.data);
    free(start);
    return st;
}

static status left_out(const fit_model *f, const least_fit *all, fit_result *r, error *e) {
    double spectral = 0.0, sum = 0.0, n = (double)f->n;
    for (size_t s = 0; s < f->n; s++) {
        error own = { 0 };
        status st = leave_out(f, all, s, r, &spectral, &own);
        if (st != ST_OK && st != ST_NO_RESULT) return fail(e, st, "%s", own.text);
        if (st == ST_NO_RESULT) { /* without this sample nothing is determined: no error can be stated */
            text_addf(&r->remarks,
                      "Without %s the fit does not converge: no error of left-out samples is given.\n",
                      f->data[s].from->name);
            for (size_t k = 0; k < f->n; k++) r->curves[k].left_out = MISSING;
            return ST_OK;
        }
        sum += r->curves[s].left_out * r->curves[s].left_out;
    }
    r->link_made.left_out = sqrt(sum / n);
    r->link_made.left_out_spectral = sqrt(spectral / n);
    return ST_OK;
}

/* ---- all together ---- */

static status check(const fit_sample *samples, size_t n, const fit_options *o, error *e) {
    if (!n) return fail(e, ST_BAD_INPUT, "no spectrum to fit");
    if (!o->free) return fail(e, ST_BAD_INPUT, "no parameter to fit");
    if (!(o->band_hi_nm > o->band_lo_nm)) return fail(e, ST_BAD_INPUT, "the band of the fit is empty");
    for (size_t s = 0; s < n; s++)
        if (!fit_is_free(o, FIT_HEIGHT) && !(samples[s].height_nm.value >= 0.0))
            return fail(e, ST_BAD_INPUT,
                        "%s: the height is neither free nor known; let the fit find it, or give it",
                        samples[s].name);
    return ST_OK;
}

/* A link needs every spacing, and heights and shape that the data tell. */
static int can_link(const fit_model *f, const fit_result *r) {
    for (size_t s = 0; s < f->n; s++)
        if (!(f->data[s].from->spacing_nm.value > 0.0)) return 0;
    for (size_t k = 0; k < r->n_numbers; k++)
        if (!isfinite(r->numbers[k].u) || (r->numbers[k].kind == FIT_HEIGHT && r->numbers[k].at_bound))
            return 0;
    return 1;
}

status fit_spectra(const fit_sample *samples, size_t n, const fit_options *o, const optics_setup *optics,
                   fit_result *out, error *e) {
    *out = (fit_result){ 0 };
    status st = check(samples, n, o, e);
    if (st != ST_OK) return st;
    fit_model f = { .o = o, .optics = optics, .n = n, .data = mem_array(n, sizeof *f.data) };
    least_fit fit = { 0 };
    fit_result r = { 0 };
    if (!f.data) return NO_MEMORY(e, "the spectra");
    for (size_t s = 0; s < n && st == ST_OK; s++) st = fit_data_make(&samples[s], o, &f.data[s], e);
    if (st == ST_OK) st = model_make(&f, e);
    if (st == ST_OK) st = fit_all(&f, &fit, e);
    if (st == ST_OK) {
        widen(&f, &fit, &r);
        st = result_make(&f, &fit, &r, e);
    }
    if (st == ST_OK) fit_remarks(samples, o, optics, &fit, &r);
    if (st == ST_OK && can_link(&f, &r)) {
        link_make(&f, &r);
        if (n >= 3) st = left_out(&f, &fit, &r, e);
    }
    if (st == ST_OK) st = text_check(&r.remarks, "the remarks of a fit", e);
    if (st == ST_OK) {
        *out = r;
        r = (fit_result){ 0 };
    }
    fit_free(&r);
    least_free(&fit);
    model_free(&f);
    for (size_t s = 0; s < n; s++) fit_data_free(&f.data[s]);
    free(f.data);
    return st;
}

void fit_free(fit_result *r) {
    for (size_t s = 0; r->curves && s < r->n_samples; s++) {
        free(r->curves[s].wavelength_nm);
        free(r->curves[s].measured);
        free(r->curves[s].fitted);
    }
    free(r->curves);
    free(r->numbers);
    free(r->covariance);
    free(r->correlation);
    text_free(&r->remarks);
    *r = (fit_result){ 0 };
}

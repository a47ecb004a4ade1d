/* What a fit's numbers mean, in sentences: which parameters the data do not tell, which cannot be told apart, whether
 * the model describes the spectra, and whether it may at all.
 *
 * Not determined: expanded uncertainty (twice u) above a twentieth of the height, an eighth of the exponent, 0.1 in
 * spread or floor share, 0.01 in offset. Not to be told apart: then also a correlation of 0.9 or more with another one.
 * Below that, from 0.95 on, two parameters are known but not one without the other. */
#include <math.h>

#include "base/number.h"
#include "link/calibrate_priv.h"

static const double APART = 0.9, TOGETHER = 0.95;
static const double DESCRIBES = 2.0; /* residuals over noise */
static const double ALTERNATIVE =
    0.2; /* a second minimum with a sum of squares larger by no more than this */

/* Largest expanded uncertainty that still tells something. */
static double tells(const fit_number *v) {
    switch (v->kind) {
    case FIT_HEIGHT:
        return v->value / 20.0;
    case FIT_EXPONENT:
        return v->value / 8.0;
    case FIT_OFFSET:
        return 0.01;
    default:
        return 0.1;
    }
}

static const char *unit_of(fit_kind k) { return k == FIT_HEIGHT ? " nm" : ""; }

static void add_name(textbuf *t, const fit_sample *samples, const fit_result *r, const fit_number *v) {
    text_add(t, fit_kind_name(v->kind));
    if (v->kind == FIT_HEIGHT && r->n_samples > 1) text_addf(t, " of %s", samples[v->sample].name);
}

static void add_value(textbuf *t, const fit_number *v) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    text_addf(t, "%s +- %s%s", number_text(v->value, 4, a), number_text(2.0 * v->u, 2, b), unit_of(v->kind));
}

/* The other parameter with the strongest correlation, or n_numbers; heights of two samples are not compared. */
static size_t partner(const fit_result *r, size_t k, double least) {
    size_t best = r->n_numbers;
    for (size_t j = 0; j < r->n_numbers; j++) {
        double c = fabs(r->correlation[k * r->n_numbers + j]);
        if (j == k || (r->numbers[j].kind == FIT_HEIGHT && r->numbers[k].kind == FIT_HEIGHT) || !(c >= least))
            continue;
        if (best == r->n_numbers || c > fabs(r->correlation[k * r->n_numbers + best])) best = j;
    }
    return best;
}

static void say_apart(const fit_sample *samples, const fit_result *r, size_t a, size_t b, textbuf *t) {
    char c[NUMBER_TEXT];
    add_name(t, samples, r, &r->numbers[a]);
    text_add(t, " and ");
    add_name(t, samples, r, &r->numbers[b]);
    text_addf(t, " cannot be told apart by these data: correlation %s (",
              number_text(r->correlation[a * r->n_numbers + b], 3, c));
    add_value(t, &r->numbers[a]);
    text_add(t, ", ");
    add_value(t, &r->numbers[b]);
    text_add(t, "); give one of them.\n");
}

/* 1: the number is told by the data. */
static int say_number(const fit_sample *samples, fit_result *r, size_t k, textbuf *t) {
    const fit_number *v = &r->numbers[k];
    char a[NUMBER_TEXT];
    if (v->at_bound) {
        add_name(t, samples, r, v);
        text_addf(
            t,
            " ended at the %s end of its range, %s%s: the data do not determine it; it was taken as given.\n",
            v->at_bound < 0 ? "lower" : "upper", number_text(v->value, 4, a), unit_of(v->kind));
        return 0;
    }
    if (!isfinite(v->u)) {
        text_add(t, "These data say nothing of ");
        add_name(t, samples, r, v);
        text_add(t, " apart from the other parameters; give it or leave it out of --free.\n");
        return 0;
    }
    if (2.0 * v->u <= tells(v)) return 1;
    size_t other = partner(r, k, APART);
    int said =
        other < k && 2.0 * r->numbers[other].u > tells(&r->numbers[other]) && partner(r, other, APART) == k;
    if (other < r->n_numbers && !said) {
        say_apart(samples, r, k, other, t);
    } else if (other == r->n_numbers) {
        add_name(t, samples, r, v);
        text_add(t, " is not determined by these data: ");
        add_value(t, v);
        text_add(t, ".\n");
    }
    return 0;
}

/* The strongest pair among the determined ones, once. */
static void say_together(const fit_sample *samples, const fit_result *r, textbuf *t) {
    size_t n = r->n_numbers, best_a = n, best_b = n;
    double best = TOGETHER;
    for (size_t a = 0; a < n; a++) {
        size_t b = partner(r, a, best);
        if (b < n && a < b && 2.0 * r->numbers[a].u <= tells(&r->numbers[a]) &&
            2.0 * r->numbers[b].u <= tells(&r->numbers[b])) {
            best = fabs(r->correlation[a * n + b]);
            best_a = a;
            best_b = b;
        }
    }
    if (best_a == n) return;
    char c[NUMBER_TEXT];
    add_name(t, samples, r, &r->numbers[best_a]);
    text_add(t, " and ");
    add_name(t, samples, r, &r->numbers[best_b]);
    text_addf(t, " are both known, but move together (correlation %s): use them as a pair.\n",
              number_text(r->correlation[best_a * n + best_b], 3, c));
}

static void say_fit(const fit_result *r, textbuf *t) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    double times = sqrt(r->reduced);
    if (times > DESCRIBES)
        text_addf(
            t,
            "The residuals are %s times the noise: the model does not describe everything in these spectra "
            "(diffraction at short wavelengths, shape, a step of the instrument); uncertainties follow the "
            "residuals.\n",
            number_text(times, 2, a));
    if (r->neighbours > 0.0)
        text_addf(t,
                  "Neighbouring residuals hang together (correlation %s): every uncertainty was widened %s "
                  "times.\n",
                  number_text(r->neighbours, 2, a), number_text(r->widened, 2, b));
    if (r->n_arrived < r->n_starts)
        text_addf(t, "%zu of %zu starts did not converge; the best minimum is one that did.\n",
                  r->n_starts - r->n_arrived, r->n_starts);
}

/* Another minimum that describes the data nearly as well with another height. */
static void say_alternative(const fit_sample *samples, const fit_options *o, const least_fit *fit,
                            const fit_result *r, textbuf *t) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT];
    if (!fit_is_free(o, FIT_HEIGHT)) return;
    for (size_t s = 0; s < fit->n_starts; s++) {
        const double *x = fit->end_x + s * fit->n;
        if (!fit->end_arrived[s] || !(fit->end_sum[s] <= fit->sum_of_squares * (1.0 + ALTERNATIVE))) continue;
        for (size_t k = 0; k < r->n_samples; k++) {
            double apart = fmax(0.05 * fit->x[k], 4.0 * fit->u[k]);
            if (!(fabs(x[k] - fit->x[k]) > apart)) continue;
            text_addf(t,
                      "%s: a height of %s nm describes the spectra nearly as well as %s nm (sum of squares "
                      "%s times "
                      "as large); a cross-section has to decide.\n",
                      samples[k].name, number_text(x[k], 4, a), number_text(fit->x[k], 4, b),
                      number_text(fit->end_sum[s] / fit->sum_of_squares, 3, c));
            return;
        }
    }
}

/* Where the texture diffracts in the ambient, the graded index is far too low and the fit is misled. */
static void say_validity(const fit_sample *samples, const optics_setup *optics, const fit_result *r,
                         textbuf *t) {
    char a[NUMBER_TEXT];
    for (size_t s = 0; s < r->n_samples; s++) {
        const fit_curve *c = &r->curves[s];
        double spacing = samples[s].spacing_nm.value;
        if (!(spacing > 0.0)) continue;
        size_t k = 0;
        while (k < c->n && trust_orders(spacing, c->wavelength_nm[k],
                                        optics->reflect.hemispherical ? 45.0 : optics->reflect.angle_deg, 1.0,
                                        4.0) == ORDERS_IN_AMBIENT)
            k++;
        if (!k) continue;
        double edge = ceil(c->wavelength_nm[k < c->n ? k : c->n - 1] / 10.0) * 10.0;
        text_addf(
            t,
            "%s: below about %s nm this texture diffracts, where the graded-index model is too low; with "
            "--band %s:1000 the fit leaves that out.\n",
            samples[s].name, number_text(edge, 5, a), a);
        return;
    }
}

void fit_remarks(const fit_sample *samples, const fit_options *o, const optics_setup *optics,
                 const least_fit *fit, fit_result *r) {
    textbuf *t = &r->remarks;
    r->determined = 1;
    for (size_t k = 0; k < r->n_numbers; k++)
        if (!say_number(samples, r, k, t)) r->determined = 0;
    say_together(samples, r, t);
    say_alternative(samples, o, fit, r, t);
    say_fit(r, t);
    say_validity(samples, optics, r, t);
}

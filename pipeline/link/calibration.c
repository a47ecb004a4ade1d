/* The use of a calibrated link.
 *
 * Height of a further sample: mean aspect x spacing. Its standard uncertainty: the scatter of the aspect from sample to
 * sample, widened by sqrt(1 + 1/n) for the mean and by Student's factor for few samples, the fit's own uncertainty of
 * the aspect, and the spacing's. Errors common to all samples of one microscope cancel in aspect x spacing; they are
 * counted all the same.
 * Interval: what samples left out of the fit missed in weighted reflectance (rms, times Student's t) holds the scatter
 * of the heights and the model's error, which the interval holds already: the larger of both counts, not their sum.
 * What this file does not do: judge whether a sample is of the recipe that was calibrated. */
#include "link/calibration.h"

#include <math.h>
#include <string.h>

#include "base/number.h"
#include "base/text.h"

static const double NORMAL_95 = 1.959963984540054;
static const double UNKNOWN_ASPECT = 0.3; /* relative, of an aspect nobody measured: surface.c */

double student_95(size_t freedom) {
    static const double t[] = { 12.7062, 4.3027, 3.1824, 2.7764, 2.5706,
                                2.4469,  2.3646, 2.3060, 2.2622, 2.2281 };
    if (freedom <= sizeof t / sizeof t[0]) return t[freedom ? freedom - 1 : 0];
    /* expansion in 1 / freedom, Abramowitz, Stegun (1964) 26.7.5: within 2e-4 from 11 on */
    double z = NORMAL_95, z3 = z * z * z, z5 = z3 * z * z, z7 = z5 * z * z, f = (double)freedom;
    return z + (z3 + z) / (4.0 * f) + (5.0 * z5 + 16.0 * z3 + 3.0 * z) / (96.0 * f * f) +
           (3.0 * z7 + 19.0 * z5 + 17.0 * z3 - 15.0 * z) / (384.0 * f * f * f);
}

double calibration_scatter_rel(const calibration *c) {
    if (c->n_samples < 2) return UNKNOWN_ASPECT;
    double n = (double)c->n_samples, plain = c->aspect_scatter / c->aspect * sqrt(1.0 + 1.0 / n);
    double few = plain * student_95(c->n_samples - 1) / NORMAL_95;
    return fmax(plain, fmin(few, UNKNOWN_ASPECT));
}

status calibrated_height(const calibration *c, quantity sheet, link_options *o, quantity spacing_nm,
                         quantity *height_nm, height_source *src, error *e) {
    int calibrated = c && c->n_samples > 0;
    if (calibrated) {
        o->exponent = c->exponent;
        o->shape_open = 0;
        o->exponent_u = c->exponent_u;
        o->height_spread = c->height_spread;
        o->height_by_size = c->height_by_size;
        o->coverage = c->coverage;
        o->level_at_tips = c->level_at_tips;
    }
    if (!calibrated || isfinite(sheet.value) || !(spacing_nm.value > 0.0))
        return link_height(sheet, o, spacing_nm, height_nm, src, e);
    double s = spacing_nm.value, su = isfinite(spacing_nm.u) ? spacing_nm.u : 0.0;
    double scatter = c->aspect * calibration_scatter_rel(c);
    *height_nm =
        (quantity){ c->aspect * s, hypot(hypot(scatter, c->aspect_u) * s, c->aspect * su), c->n_samples };
    *src = HEIGHT_CALIBRATED;
    return ST_OK;
}

int calibration_outside(const calibration *c, quantity spacing_nm, int pores) {
    double u = hypot(isfinite(spacing_nm.u) ? spacing_nm.u : 0.0, c->spacing_u_nm), s = spacing_nm.value;
    if ((pores != 0) != (c->pores != 0)) return 1;
    return !(s >= c->spacing_lo_nm - 2.0 * u && s <= c->spacing_hi_nm + 2.0 * u);
}

static void say(const calibration *c, int height_from_it, int outside, double age_days, prediction *p) {
    textbuf t = { 0 };
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    text_addf(&t, "%s calibrated on %zu %s of ", height_from_it ? "Height and shape" : "Shape", c->n_samples,
              c->n_samples == 1 ? "sample" : "samples");
    if (c->spacing_hi_nm > c->spacing_lo_nm)
        text_addf(&t, "%s to %s nm spacing", number_text(c->spacing_lo_nm, 4, a),
                  number_text(c->spacing_hi_nm, 4, b));
    else
        text_addf(&t, "%s nm spacing", number_text(c->spacing_lo_nm, 4, a));
    if (isfinite(age_days)) {
        double days = floor(fabs(age_days) + 0.5);
        text_addf(&t, ", made %s %s %s this etch", number_text(days, 6, a),
                  days > 0.5 && days < 1.5 ? "day" : "days", age_days < 0.0 ? "after" : "before");
    }
    text_add(&t, outside ? "; this sample lies outside. " : ". ");
    /* in front: the note may be cut at its end */
    if (!t.failed && t.s) {
        text_add(&t, p->note);
        size_t n = t.n < sizeof p->note - 1 ? t.n : sizeof p->note - 1;
        if (!t.failed) {
            memcpy(p->note, t.s, n);
            p->note[n] = '\0';
        }
    }
    text_free(&t);
}

static void widen(double value, double reach, double *lo, double *hi) {
    if (!isfinite(*lo) || !isfinite(*hi)) return;
    *lo = fmin(*lo, fmax(value - reach, 0.0));
    *hi = fmax(*hi, fmin(value + reach, 1.0));
}

void calibration_apply(const calibration *c, int height_from_it, quantity spacing_nm, int pores,
                       double age_days, prediction *p) {
    if (height_from_it && c->n_samples > 2 && !p->refused) {
        double t = student_95(c->n_samples - 1);
        if (isfinite(c->left_out)) widen(p->weighted, t * c->left_out, &p->weighted_lo, &p->weighted_hi);
        for (size_t i = 0; i < p->n && isfinite(c->left_out_spectral); i++)
            widen(p->R[i], t * c->left_out_spectral, &p->R_lo[i], &p->R_hi[i]);
    }
    say(c, height_from_it, calibration_outside(c, spacing_nm, pores), age_days, p);
}

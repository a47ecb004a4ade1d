/* A fit in plain words, as JSON and as CSV. Intervals in words are expanded (twice the standard uncertainty), those of
 * JSON are standard, as everywhere in the program. */
#include "app/fit_print.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/number.h"
#include "io/json.h"

enum { VALUE_DIGITS = 5, U_DIGITS = 2 };

static int is_free(const fit_view *v, fit_kind k) { return (int)(v->options->free >> k & 1u); }

/* ---- words ---- */

/* "412.3 +- 5.6", the value with the places of its uncertainty. */
static const char *with_u(double value, double u, char *out, size_t size) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    double U = 2.0 * u;
    int digits = VALUE_DIGITS;
    if (U > 0.0 && isfinite(U) && fabs(value) > 0.0) {
        double places = floor(log10(fabs(value))) - floor(log10(U)) + U_DIGITS;
        digits = places < 2.0 ? 2 : places > 8.0 ? 8 : (int)places;
    }
    number_text(value, digits, a);
    if (isinf(u))
        snprintf(out, size, "%s +- unknown", a);
    else if (U > 0.0)
        snprintf(out, size, "%s +- %s", a, number_text(U, U_DIGITS, b));
    else
        snprintf(out, size, "%s", a);
    return out;
}

static const char *percent(double share, int digits, char *out) {
    return number_percent(fabs(share) < 1e-9 ? 0.0 : share, digits, out);
}

static void say_samples(const fit_view *v, textbuf *out) {
    const fit_result *r = v->result;
    char height[80], a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT], d[NUMBER_TEXT], left[NUMBER_TEXT + 4];
    size_t wide = 6;
    for (size_t s = 0; s < r->n_samples; s++)
        if (strlen(v->samples[s].name) > wide) wide = strlen(v->samples[s].name);
    if (wide > 40) wide = 40;
    text_addf(out, "%-*s  %10s  %-20s %8s  %10s  %10s  %10s\n", (int)wide, "Sample", "spacing nm",
              "height nm", "aspect", "residual %", "R %", "left out %");
    for (size_t s = 0; s < r->n_samples; s++) {
        const fit_curve *k = &r->curves[s];
        snprintf(left, sizeof left, "%s%s", k->left_out >= 0.0 ? "+" : "", percent(k->left_out, 2, d));
        text_addf(
            out, "%-*s  %10s  %-20s %8s  %10s  %10s  %10s\n", (int)wide, v->samples[s].name,
            number_text(v->samples[s].spacing_nm.value, 5, a),
            with_u(k->height_nm.value, is_free(v, FIT_HEIGHT) ? k->height_nm.u : 0.0, height, sizeof height),
            number_text(k->aspect, 4, b), percent(k->residual_rms, 2, c), percent(k->weighted, 4, d),
            isfinite(k->left_out) ? left : "");
    }
    text_add(out, "\n");
}

static void say_heights_of_sheet(const fit_view *v, textbuf *out) {
    char a[80], b[80];
    for (size_t s = 0; s < v->result->n_samples; s++) {
        quantity known = v->sheet_height[s], got = v->result->curves[s].height_nm;
        if (!is_free(v, FIT_HEIGHT) || !isfinite(known.value)) continue;
        double u = hypot(isfinite(known.u) ? known.u : 0.0, got.u);
        text_addf(out, "%s: the sheet says %s nm, the light %s nm%s.\n", v->samples[s].name,
                  with_u(known.value, isfinite(known.u) ? known.u : 0.0, a, sizeof a),
                  with_u(got.value, got.u, b, sizeof b),
                  fabs(known.value - got.value) > 2.0 * u
                      ? "; they disagree: the model's height is an effective one"
                      : "");
    }
}

static void say_shared(const fit_view *v, textbuf *out) {
    const fit_result *r = v->result;
    char a[80];
    for (size_t k = 0; k < r->n_numbers; k++) {
        const fit_number *f = &r->numbers[k];
        if (f->kind == FIT_HEIGHT) continue;
        double scale = f->kind == FIT_OFFSET || f->kind == FIT_SPREAD ? 100.0 : 1.0;
        text_addf(out, "%-10s %s%s%s\n", fit_kind_name(f->kind),
                  with_u(scale * f->value, scale * f->u, a, sizeof a), scale > 1.0 ? " %" : "",
                  f->at_bound ? "   (the end of its range)" : "");
    }
    const struct {
        fit_kind kind;
        double value;
    } given[] = {
        { FIT_EXPONENT, r->link.exponent },
        { FIT_SPREAD, r->link.height_spread },
        { FIT_FLOOR, r->link.coverage },
    };
    for (size_t i = 0; i < sizeof given / sizeof given[0]; i++)
        if (!is_free(v, given[i].kind))
            text_addf(out, "%-10s %s   (given)\n", fit_kind_name(given[i].kind),
                      number_text(given[i].value, 5, a));
}

static void say_quality(const fit_view *v, textbuf *out) {
    const fit_result *r = v->result;
    char a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT];
    text_addf(out,
              "\nResiduals  %s %% rms against a noise of %s %% of one fitted value; reduced chi-squared %s\n",
              percent(r->residual_rms, 2, a), percent(r->noise, 2, b), number_text(r->reduced, 3, c));
}

static void say_link(const fit_view *v, textbuf *out) {
    const calibration *c = &v->result->link_made;
    char a[NUMBER_TEXT], b[NUMBER_TEXT], d[NUMBER_TEXT];
    if (!c->n_samples) return;
    text_addf(out, "Link       height = %s x spacing", number_text(c->aspect, 4, a));
    if (c->n_samples > 1)
        text_addf(out, ", scatter from sample to sample %s %%",
                  number_text(100.0 * c->aspect_scatter / c->aspect, 2, a));
    text_addf(out, "; a further sample's height is known to +- %s %%%s\n",
              number_text(200.0 * hypot(calibration_scatter_rel(c), c->aspect_u / c->aspect), 2, b),
              c->n_samples == 1 ? " (one sample says nothing of the scatter)" : "");
    if (isfinite(c->left_out))
        text_addf(out,
                  "Left out   each sample predicted from the others: weighted reflectance within %s %% rms, "
                  "the spectrum "
                  "within %s %%\n",
                  percent(c->left_out, 2, a), percent(c->left_out_spectral, 2, d));
    else if (c->n_samples < 3)
        text_add(out, "Left out   from three samples on, each is predicted from the others; then the error "
                      "of a prediction is "
                      "known\n");
}

void fit_text(const fit_view *v, textbuf *out) {
    const fit_result *r = v->result;
    const protocol *p = v->protocol;
    char a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT];
    size_t values = 0;
    for (size_t s = 0; s < r->n_samples; s++) values += r->curves[s].n;
    text_addf(out, "%zu %s, %zu values from %s to %s nm; ", r->n_samples,
              r->n_samples == 1 ? "spectrum" : "spectra", values, number_text(v->options->band_lo_nm, 6, a),
              number_text(v->options->band_hi_nm, 6, b));
    if (p->hemispherical)
        text_add(out, "diffuse light");
    else
        text_addf(out, "light at %s deg", number_text(p->angle_deg, 4, c));
    text_addf(out, " from %s on %s %s. +- is expanded, about 95 %%.\n", p->ambient, p->substrate,
              v->options->pores ? "with pores" : "hillocks");
    for (size_t s = 0; s < r->n_samples; s++)
        if (v->notes[s][0]) text_addf(out, "%s was read as: %s.\n", v->samples[s].name, v->notes[s]);
    text_add(out, "\n");
    say_samples(v, out);
    say_shared(v, out);
    say_quality(v, out);
    say_link(v, out);
    if (r->remarks.n) text_add(out, "\n");
    say_heights_of_sheet(v, out);
    if (r->remarks.n) text_add(out, r->remarks.s);
}

/* ---- JSON ---- */

static void member(textbuf *out, const char *name, double v, int digits, const char *after) {
    text_addf(out, "\"%s\": ", name);
    json_number(out, isfinite(v) ? v : MISSING, digits);
    text_add(out, after);
}

static void matrix_json(textbuf *out, const char *name, const double *m, size_t n) {
    text_addf(out, "  \"%s\": [", name);
    for (size_t a = 0; a < n; a++) {
        text_add(out, a ? ",\n    [" : "\n    [");
        for (size_t b = 0; b < n; b++) {
            text_add(out, b ? ", " : "");
            json_number(out, m[a * n + b], 6);
        }
        text_add(out, "]");
    }
    text_add(out, "\n  ],\n");
}

static void numbers_json(const fit_view *v, textbuf *out) {
    const fit_result *r = v->result;
    text_add(out, "  \"parameters\": [");
    for (size_t k = 0; k < r->n_numbers; k++) {
        const fit_number *f = &r->numbers[k];
        text_addf(out, "%s\n    {\"parameter\": \"%s\", \"sample\": ", k ? "," : "", fit_kind_name(f->kind));
        json_string(out, f->kind == FIT_HEIGHT ? v->samples[f->sample].name : NULL);
        text_add(out, ", ");
        member(out, "value", f->value, 7, ", ");
        member(out, "u", f->at_bound ? MISSING : f->u, 4, ", ");
        text_addf(out, "\"at_bound\": %s}", f->at_bound ? "true" : "false");
    }
    text_add(out, "\n  ],\n");
    matrix_json(out, "covariance", r->covariance, r->n_numbers);
    matrix_json(out, "correlation", r->correlation, r->n_numbers);
}

static void samples_json(const fit_view *v, textbuf *out) {
    const fit_result *r = v->result;
    text_add(out, "  \"samples\": [");
    for (size_t s = 0; s < r->n_samples; s++) {
        const fit_curve *c = &r->curves[s];
        text_add(out, s ? ",\n    {\"sample\": " : "\n    {\"sample\": ");
        json_string(out, v->samples[s].name);
        text_add(out, ", \"read_as\": ");
        json_string(out, v->notes[s]);
        text_add(out, ", ");
        member(out, "spacing_nm", v->samples[s].spacing_nm.value, 6, ", ");
        member(out, "height_nm", c->height_nm.value, 6, ", ");
        member(out, "height_nm_u", c->height_nm.u, 4, ", ");
        member(out, "aspect", c->aspect, 5, ", ");
        member(out, "residual_rms", c->residual_rms, 4, ", ");
        member(out, "weighted_reflectance", c->weighted, 5, ", ");
        member(out, "left_out_error", c->left_out, 4, ",\n     \"spectrum\": [");
        for (size_t i = 0; i < c->n; i++) {
            text_add(out, i ? ",\n       {" : "\n       {");
            member(out, "wavelength_nm", c->wavelength_nm[i], 7, ", ");
            member(out, "measured", c->measured[i], 6, ", ");
            member(out, "fitted", c->fitted[i], 6, ", ");
            member(out, "residual", c->fitted[i] - c->measured[i], 4, "}");
        }
        text_add(out, "]}");
    }
    text_add(out, "\n  ],\n");
}

void fit_json(const fit_view *v, textbuf *out) {
    const fit_result *r = v->result;
    const calibration *c = &r->link_made;
    text_add(out, "{\n");
    samples_json(v, out);
    numbers_json(v, out);
    const struct {
        const char *name;
        double v;
    } rest[] = {
        { "exponent", r->link.exponent },
        { "height_spread", r->link.height_spread },
        { "coverage", r->link.coverage },
        { "offset", r->offset },
        { "residual_rms", r->residual_rms },
        { "noise", r->noise },
        { "reduced_chi_squared", r->reduced },
        { "neighbour_correlation", r->neighbours },
        { "u_widened_by", r->widened },
        { "aspect", c->n_samples ? c->aspect : MISSING },
        { "aspect_scatter", c->n_samples ? c->aspect_scatter : MISSING },
        { "left_out_error_rms", c->n_samples ? c->left_out : MISSING },
    };
    for (size_t i = 0; i < sizeof rest / sizeof rest[0]; i++) {
        text_add(out, "  ");
        member(out, rest[i].name, rest[i].v, 6, ",\n");
    }
    text_addf(out,
              "  \"starts\": %zu,\n  \"starts_converged\": %zu,\n  \"determined\": %s,\n  \"remarks\": [",
              r->n_starts, r->n_arrived, r->determined ? "true" : "false");
    const char *s = r->remarks.s ? r->remarks.s : "";
    for (int i = 0; *s; i++) {
        size_t n = strcspn(s, "\n");
        textbuf one = { 0 };
        text_add_n(&one, s, n);
        text_add(out, i ? ",\n    " : "\n    ");
        json_string(out, one.s);
        text_free(&one);
        s += n + (s[n] == '\n');
    }
    text_add(out, r->remarks.n ? "\n  ]\n}\n" : "]\n}\n");
}

/* ---- CSV ---- */

static void csv_text(textbuf *out, const char *s) {
    if (!strpbrk(s, ",\"\n\r")) {
        text_add(out, s);
        return;
    }
    text_add(out, "\"");
    for (; *s; s++) text_add_n(out, *s == '"' ? "\"\"" : s, *s == '"' ? 2 : 1);
    text_add(out, "\"");
}

void fit_csv(const fit_view *v, textbuf *out) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT], d[NUMBER_TEXT];
    text_add(out, "sample,wavelength_nm,measured,fitted,residual\n");
    for (size_t s = 0; s < v->result->n_samples; s++) {
        const fit_curve *k = &v->result->curves[s];
        for (size_t i = 0; i < k->n; i++) {
            csv_text(out, v->samples[s].name);
            text_addf(out, ",%s,%s,%s,%s\n", number_text(k->wavelength_nm[i], 7, a),
                      number_text(k->measured[i], 6, b), number_text(k->fitted[i], 6, c),
                      number_text(k->fitted[i] - k->measured[i], 4, d));
        }
    }
}

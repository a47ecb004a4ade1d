/* Weighted reflectance against the angle of incidence: one prediction per angle and polarization, on a grid of 5 nm
 * (weighted R within 1e-5 of the 1 nm grid). What this file does not do: azimuths; the model is blind to them. */
#include "app/angles.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"

enum { MAX_ANGLES = 200 };
static const double GRID_NM = 5.0;

status angles_parse(const char *option, const char *text, double *from, double *to, double *step, error *e) {
    double *parts[3] = { from, to, step };
    const char *at = text;
    int ok = 1;
    for (int i = 0; i < 3 && ok; i++) {
        char one[32] = "";
        const char *end = strchr(at, ':');
        size_t n = end ? (size_t)(end - at) : strlen(at);
        ok = n > 0 && n < sizeof one && (i == 2) == !end;
        if (ok) snprintf(one, sizeof one, "%.*s", (int)n, at);
        ok = ok && number_parse(one, parts[i]);
        if (end) at = end + 1;
    }
    if (!ok || !(*from >= 0.0 && *to <= 89.0 && *from <= *to && *step > 0.0) ||
        (*to - *from) / *step >= MAX_ANGLES)
        return fail(e, ST_BAD_INPUT,
                    "%s: found %.40s, expected FROM:TO:STEP in degrees, 0 to 89, at most %d angles, such "
                    "as 0:80:5",
                    option, text, MAX_ANGLES);
    return ST_OK;
}

static status one_angle(const surface_input *in, const optics_setup *set, angle_row *row, char *note,
                        size_t room, error *e) {
    optics_setup o = *set;
    double *values[3] = { &row->mean, &row->s, &row->p };
    static const polarization which[3] = { POL_MEAN, POL_S, POL_P };
    o.reflect.angle_deg = row->angle_deg;
    o.reflect.hemispherical = 0;
    o.step_nm = fmax(o.step_nm, GRID_NM);
    status st = ST_OK;
    for (int i = 0; i < 3 && st == ST_OK; i++) {
        prediction p = { 0 };
        o.reflect.polarization = which[i];
        o.plain = i > 0; /* the interval is that of the mean */
        st = predict(in, &o, &p, e);
        if (st != ST_OK) break;
        *values[i] = p.weighted;
        if (i == 0) {
            row->mean_lo = p.weighted_lo;
            row->mean_hi = p.weighted_hi;
            row->polished = p.polished;
            row->coated = p.coated;
            snprintf(note, room, "%s", p.note);
        }
        prediction_free(&p);
    }
    return st;
}

status angles_sweep(const surface_input *in, const optics_setup *o, double from, double to, double step,
                    angle_sweep *out, error *e) {
    size_t n = (size_t)floor((to - from) / step + 1e-9) + 1;
    angle_sweep s = { .n = n,
                      .spacing_nm = in->spacing_nm.value,
                      .height_nm = in->height_nm.value,
                      .rows = mem_array(n, sizeof *s.rows) };
    status st = s.rows ? ST_OK : NO_MEMORY(e, "the angles");
    for (size_t i = 0; i < n && st == ST_OK; i++) {
        char ignored[sizeof s.note];
        s.rows[i].angle_deg = from + step * (double)i;
        st = one_angle(in, o, &s.rows[i], i < 2 ? s.note : ignored, sizeof s.note, e);
    }
    if (st == ST_OK)
        *out = s;
    else
        angle_sweep_free(&s);
    return st;
}

void angle_sweep_free(angle_sweep *s) {
    free(s->rows);
    *s = (angle_sweep){ 0 };
}

double angles_under(const angle_sweep *s, double limit, int upper) {
    double reached = MISSING;
    for (size_t i = 0; i < s->n; i++) {
        const angle_row *b = &s->rows[i], *a = i ? b - 1 : b;
        double vb = upper ? b->mean_hi : b->mean, va = upper ? a->mean_hi : a->mean;
        if (vb <= limit) {
            reached = b->angle_deg;
            continue;
        }
        if (i && vb > limit)
            reached = a->angle_deg + (limit - va) / (vb - va) * (b->angle_deg - a->angle_deg);
        break;
    }
    return reached;
}

/* ---- as text ---- */

static void member(textbuf *out, const char *name, double v, int digits) {
    text_addf(out, "  \"%s\": ", name);
    json_number(out, v, digits);
    text_add(out, ",\n");
}

void angles_json(const angle_sweep *s, double limit, textbuf *out) {
    text_add(out, "{\n");
    member(out, "spacing_nm", s->spacing_nm, 5);
    member(out, "height_nm", s->height_nm, 5);
    member(out, "limit", limit, 5);
    member(out, "angle_under_limit_deg", angles_under(s, limit, 0), 4);
    member(out, "angle_surely_under_limit_deg", angles_under(s, limit, 1), 4);
    text_add(out, "  \"note\": ");
    json_string(out, s->note);
    text_add(out, ",\n  \"angles\": [");
    for (size_t i = 0; i < s->n; i++) {
        const angle_row *r = &s->rows[i];
        const struct {
            const char *name;
            double v;
        } members[] = { { "angle_deg", r->angle_deg },
                        { "weighted_reflectance_s", r->s },
                        { "weighted_reflectance_p", r->p },
                        { "weighted_reflectance", r->mean },
                        { "weighted_reflectance_lo", r->mean_lo },
                        { "weighted_reflectance_hi", r->mean_hi },
                        { "polished_reflectance", r->polished },
                        { "coated_reflectance", r->coated } };
        text_add(out, i ? ",\n    {" : "\n    {");
        for (size_t k = 0; k < sizeof members / sizeof members[0]; k++) {
            text_addf(out, "%s\"%s\": ", k ? ", " : "", members[k].name);
            json_number(out, members[k].v, 5);
        }
        text_add(out, "}");
    }
    text_add(out, "\n  ]\n}\n");
}

void angles_csv(const angle_sweep *s, textbuf *out) {
    char t[NUMBER_TEXT];
    text_add(out, "angle_deg,weighted_reflectance_s,weighted_reflectance_p,weighted_reflectance,weighted_"
                  "reflectance_lo,"
                  "weighted_reflectance_hi\n");
    for (size_t i = 0; i < s->n; i++) {
        const angle_row *r = &s->rows[i];
        const double v[] = { r->angle_deg, r->s, r->p, r->mean, r->mean_lo, r->mean_hi };
        for (size_t k = 0; k < 6; k++) text_addf(out, "%s%s", number_text(v[k], 5, t), k < 5 ? "," : "\n");
    }
}

void angles_text(const angle_sweep *s, double limit, textbuf *out) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT], d[NUMBER_TEXT];
    text_addf(out,
              "Features of height %s nm, spacing %s nm; weighted reflectance in %%\n\n"
              "angle        s        p     mean   95 %% interval of the mean\n",
              number_text(s->height_nm, 5, a), number_text(s->spacing_nm, 5, b));
    for (size_t i = 0; i < s->n; i++) {
        const angle_row *r = &s->rows[i];
        text_addf(out, "%5s %8s %8s %8s", number_text(r->angle_deg, 4, a), number_percent(r->s, 3, b),
                  number_percent(r->p, 3, c), number_percent(r->mean, 3, d));
        text_addf(out, "   %s to %s\n", number_percent(r->mean_lo, 3, a), number_percent(r->mean_hi, 3, b));
    }
    if (isfinite(limit)) {
        double at = angles_under(s, limit, 0), sure = angles_under(s, limit, 1);
        number_percent(limit, 4, a);
        if (isfinite(at))
            text_addf(out, "\nAt most %s %% up to %s deg", a, number_text(at, 3, b));
        else
            text_addf(out, "\nAbove %s %% already at the first angle", a);
        if (isfinite(sure))
            text_addf(out, "; with 95 %% confidence up to %s deg.\n", number_text(sure, 3, b));
        else
            text_add(out, "; at no angle with 95 % confidence.\n");
    }
    text_addf(out, "\n%s\n", s->note);
}

/* `sward history change` and `setting`: is a difference real, and what does a setting do. Both take single samples, not
 * etches: they compare what was made, and say how many samples that were. */
#include <cjson/cJSON.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/history_verbs.h"
#include "app/series.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "io/json.h"

static int belongs(const history_row *r, const char *name) {
    cJSON *row = cJSON_Parse(r->row_json);
    const cJSON *recipe = cJSON_GetObjectItemCaseSensitive(row, "recipe");
    int is = !strcmp(r->lot, name) || (cJSON_IsString(recipe) && !strcmp(recipe->valuestring, name));
    cJSON_Delete(row);
    return is;
}

/* The values of one lot or recipe into v; how many rows it has, measured or not, into *rows. */
static size_t values_of(const series *s, const char *name, double *v, size_t *rows) {
    size_t n = 0;
    *rows = 0;
    for (size_t i = 0; i < s->n; i++) {
        if (!belongs(s->etches[i].row, name)) continue;
        ++*rows;
        if (isfinite(s->etches[i].value)) v[n++] = s->etches[i].value;
    }
    return n;
}

static void member(textbuf *t, const char *name, double v) {
    text_addf(t, ", \"%s\": ", name);
    json_number(t, v, 8);
}

static void json_step(const history_question *q, const char *a, const char *b, const trend_step *d, textbuf *t) {
    text_add(t, "{\"quantity\": ");
    json_string(t, q->quantity);
    text_add(t, ", \"a\": ");
    json_string(t, a);
    text_add(t, ", \"b\": ");
    json_string(t, b);
    text_addf(t, ", \"n_a\": %zu, \"n_b\": %zu", d->n_a, d->n_b);
    member(t, "mean_a", d->mean_a);
    member(t, "mean_b", d->mean_b);
    member(t, "difference", d->difference);
    member(t, "low", d->lo);
    member(t, "high", d->hi);
    member(t, "df", d->df);
    member(t, "p", d->p);
    member(t, "effect", d->effect);
    member(t, "effect_low", d->effect_lo);
    member(t, "effect_high", d->effect_hi);
    text_add(t, "}\n");
}

status history_change(const history_question *q, const char *a, const char *b, textbuf *out, error *e) {
    series s = { 0 };
    trend_step d;
    size_t rows_a = 0, rows_b = 0, n_a = 0, n_b = 0;
    status st = series_make(q->rows, q->notes, q->quantity, NULL, 1, &s, e);
    double *va = mem_array(s.n, sizeof *va), *vb = mem_array(s.n, sizeof *vb);
    if (st == ST_OK && (!va || !vb)) st = NO_MEMORY(e, "a comparison");
    if (st == ST_OK) {
        n_a = values_of(&s, a, va, &rows_a);
        n_b = values_of(&s, b, vb, &rows_b);
        if (!rows_a || !rows_b)
            st = fail(e, ST_BAD_INPUT, "the history has no lot and no recipe '%s'; 'sward history' lists the lots", rows_a ? b : a);
    }
    if (st == ST_OK) st = trend_welch(va, n_a, vb, n_b, &d, e);
    if (st == ST_OK && q->json) json_step(q, a, b, &d, out);
    else if (st == ST_OK) {
        sentence_subject subject = series_subject(&s, q->quantity, q->min, q->max);
        sentence_step(&subject, a, b, &d, out);
        text_add(out, ".\n");
    }
    free(va);
    free(vb);
    series_free(&s);
    return st == ST_OK ? text_check(out, "a comparison", e) : st;
}

static void json_of_line(const history_question *q, const char *setting, const trend_line *l, const trend_setting *r, textbuf *t) {
    text_add(t, "{\"quantity\": ");
    json_string(t, q->quantity);
    text_add(t, ", \"setting\": ");
    json_string(t, setting);
    text_addf(t, ", \"n\": %zu", l->n);
    member(t, "intercept", l->intercept);
    member(t, "slope", l->slope);
    member(t, "intercept_sd", l->intercept_sd);
    member(t, "slope_sd", l->slope_sd);
    member(t, "correlation", l->correlation);
    member(t, "residual_sd", l->residual_sd);
    member(t, "p", l->slope_p);
    member(t, "from", l->x_min);
    member(t, "to", l->x_max);
    if (r) {
        member(t, "target", q->target);
        member(t, "reached_at", r->x);
        member(t, "low", r->lo);
        member(t, "high", r->hi);
    }
    text_add(t, "}\n");
}

static void say_line(const history_question *q, const sentence_subject *subject, const char *setting, const trend_line *l,
                     const trend_setting *r, const char *why_not, textbuf *out) {
    trend_forecast f;
    sentence_line(subject, setting, l, out);
    text_add(out, ".\n");
    if (r) {
        sentence_setting(subject, setting, q->target, r, out);
        text_add(out, "\n");
        if (trend_predict(l, r->x, &f, NULL) == ST_OK) {
            sentence_subject s = *subject;
            text_add(out, "There 95 % of single samples are expected from ");
            json_number(out, f.lo, s.digits);
            text_add(out, " to ");
            json_number(out, f.hi, s.digits);
            text_addf(out, "%s%s.\n", s.unit[0] ? " " : "", s.unit);
        }
    } else if (why_not[0]) text_addf(out, "%s.\n", why_not);
}

status history_setting(const history_question *q, const char *setting, textbuf *out, error *e) {
    series s = { 0 };
    trend_line l;
    trend_setting r;
    size_t n = 0;
    status st = series_make(q->rows, q->notes, q->quantity, setting, 1, &s, e);
    double *x = mem_array(s.n, sizeof *x), *y = mem_array(s.n, sizeof *y);
    if (st == ST_OK && (!x || !y)) st = NO_MEMORY(e, "a line");
    for (size_t i = 0; st == ST_OK && i < s.n; i++) {
        if (!isfinite(s.etches[i].value) || !isfinite(s.etches[i].setting)) continue;
        x[n] = s.etches[i].setting;
        y[n++] = s.etches[i].value;
    }
    if (st == ST_OK) st = trend_fit(x, y, n, &l, e);
    if (st == ST_OK) {
        error why = { ST_OK, "" };
        int reached = isfinite(q->target) && trend_invert(&l, q->target, &r, &why) == ST_OK;
        sentence_subject subject = series_subject(&s, q->quantity, q->min, q->max);
        if (q->json) json_of_line(q, setting, &l, reached ? &r : NULL, out);
        else say_line(q, &subject, setting, &l, reached ? &r : NULL, why.text, out);
    }
    free(x);
    free(y);
    series_free(&s);
    return st == ST_OK ? text_check(out, "a line", e) : st;
}

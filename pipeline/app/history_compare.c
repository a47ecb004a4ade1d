/* `sward history change` and `setting`: is a difference real, and what does a setting do. Both count etches, each with the mean of
 * its samples: the positions of a wafer would make every interval too narrow. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/history_verbs.h"
#include "app/series.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "io/json.h"

/* The finite values of the etches of one lot or recipe into v. */
static status values_of(const history_question *q, const char *name, series *s, double **v, size_t *n, error *e) {
    const control_question *c = &q->control;
    series_question what = { .quantity = c->quantity, .phase_by = c->phase_by, .only = name };
    status st = series_make(c->rows, c->notes, &what, s, e);
    *n = 0;
    if (st == ST_OK && !s->n)
        st = fail(e, ST_BAD_INPUT, "the history has no lot and no recipe '%s'; 'sward history' lists the lots", name);
    *v = mem_array(s->n, sizeof **v);
    if (st == ST_OK && !*v) st = NO_MEMORY(e, "a comparison");
    for (size_t i = 0; st == ST_OK && i < s->n; i++)
        if (isfinite(s->etches[i].value)) (*v)[(*n)++] = s->etches[i].value;
    return st;
}

/* Positions of one wafer, wafers of one etch: not independent, so they count once. */
static void say_joined(size_t joined, textbuf *out) {
    if (joined)
        text_addf(out, "Counted are etches, each with the mean of its samples (%zu further samples of the same etches): positions and "
                       "wafers of one etch are not independent.\n", joined);
}

static void member(textbuf *t, const char *name, double v) {
    text_addf(t, ", \"%s\": ", name);
    json_number(t, v, 8);
}

static void json_step(const history_question *q, const char *a, const char *b, const trend_step *d, size_t joined, textbuf *t) {
    text_add(t, "{\"quantity\": ");
    json_string(t, q->control.quantity);
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
    text_addf(t, ", \"further_samples\": %zu}\n", joined);
}

status history_change(const history_question *q, const char *a, const char *b, textbuf *out, error *e) {
    series sa = { 0 }, sb = { 0 };
    trend_step d;
    double *va = NULL, *vb = NULL;
    size_t n_a = 0, n_b = 0;
    status st = values_of(q, a, &sa, &va, &n_a, e);
    if (st == ST_OK) st = values_of(q, b, &sb, &vb, &n_b, e);
    if (st == ST_OK) st = trend_welch(va, n_a, vb, n_b, &d, e);
    if (st == ST_OK && q->json) json_step(q, a, b, &d, sa.n_joined + sb.n_joined, out);
    else if (st == ST_OK) {
        sentence_subject subject = series_subject(&sa, q->control.quantity, q->control.min, q->control.max);
        sentence_step(&subject, a, b, &d, out);
        text_add(out, ".\n");
        say_joined(sa.n_joined + sb.n_joined, out);
    }
    free(va);
    free(vb);
    series_free(&sa);
    series_free(&sb);
    return st == ST_OK ? text_check(out, "a comparison", e) : st;
}

/* What is said about a line: its inverse at the target, its forecast at a value, each where asked and possible. */
typedef struct {
    trend_line line;
    trend_setting reached;
    trend_forecast there, expected; /* at the setting reached; at the value asked */
    int is_reached, is_expected;
    char why_not[480]; /* ... reached or expected */
    size_t joined;
} answer;

static void ask(const history_question *q, answer *a) {
    error why = { ST_OK, "" };
    if (isfinite(q->target))
        a->is_reached = trend_invert(&a->line, q->target, &a->reached, &why) == ST_OK &&
                        trend_predict(&a->line, a->reached.x, &a->there, &why) == ST_OK;
    if (isfinite(q->value)) a->is_expected = trend_predict(&a->line, q->value, &a->expected, &why) == ST_OK;
    memcpy(a->why_not, why.text, sizeof a->why_not);
}

static void json_forecast(const char *name, double x, const trend_forecast *f, textbuf *t) {
    text_addf(t, ", \"%s\": {\"setting\": ", name);
    json_number(t, x, 8);
    member(t, "value", f->y);
    member(t, "u", f->u);
    member(t, "low", f->lo);
    member(t, "high", f->hi);
    text_add(t, "}");
}

static void json_of_line(const history_question *q, const char *setting, const answer *a, textbuf *t) {
    const trend_line *l = &a->line;
    text_add(t, "{\"quantity\": ");
    json_string(t, q->control.quantity);
    text_add(t, ", \"setting\": ");
    json_string(t, setting);
    text_addf(t, ", \"n\": %zu, \"further_samples\": %zu", l->n, a->joined);
    member(t, "intercept", l->intercept);
    member(t, "slope", l->slope);
    member(t, "intercept_sd", l->intercept_sd);
    member(t, "slope_sd", l->slope_sd);
    member(t, "correlation", l->correlation);
    member(t, "residual_sd", l->residual_sd);
    member(t, "p", l->slope_p);
    member(t, "from", l->x_min);
    member(t, "to", l->x_max);
    if (a->is_reached) {
        member(t, "target", q->target);
        member(t, "reached_at", a->reached.x);
        member(t, "low", a->reached.lo);
        member(t, "high", a->reached.hi);
        json_forecast("there", a->reached.x, &a->there, t);
    }
    if (a->is_expected) json_forecast("expected", q->value, &a->expected, t);
    if (a->why_not[0]) {
        text_add(t, ", \"why_not\": ");
        json_string(t, a->why_not);
    }
    text_add(t, "}\n");
}

static void say_forecast(const sentence_subject *s, const trend_forecast *f, textbuf *out) {
    text_add(out, "95 % of single etches are expected from ");
    json_number(out, f->lo, s->digits);
    text_add(out, " to ");
    json_number(out, f->hi, s->digits);
    text_addf(out, "%s%s.\n", s->unit[0] ? " " : "", s->unit);
}

static void say_line(const history_question *q, const sentence_subject *subject, const char *setting, const answer *a, textbuf *out) {
    sentence_line(subject, setting, &a->line, out);
    text_add(out, ".\n");
    if (a->is_reached) {
        sentence_setting(subject, setting, q->target, &a->reached, out);
        text_add(out, "\nThere ");
        say_forecast(subject, &a->there, out);
    }
    if (a->is_expected) {
        text_addf(out, "At %s ", setting);
        json_number(out, q->value, 8);
        text_add(out, " the line gives ");
        json_number(out, a->expected.y, subject->digits);
        text_addf(out, "%s%s; ", subject->unit[0] ? " " : "", subject->unit);
        say_forecast(subject, &a->expected, out);
    }
    if (a->why_not[0]) text_addf(out, "%s.\n", a->why_not);
    say_joined(a->joined, out);
}

status history_setting(const history_question *q, const char *setting, textbuf *out, error *e) {
    const control_question *c = &q->control;
    series_question what = { .quantity = c->quantity, .setting = setting, .phase_by = c->phase_by };
    series s = { 0 };
    answer a = { 0 };
    size_t n = 0;
    status st = series_make(c->rows, c->notes, &what, &s, e);
    double *x = mem_array(s.n, sizeof *x), *y = mem_array(s.n, sizeof *y);
    if (st == ST_OK && (!x || !y)) st = NO_MEMORY(e, "a line");
    for (size_t i = 0; st == ST_OK && i < s.n; i++) {
        if (!isfinite(s.etches[i].value) || !isfinite(s.etches[i].setting)) continue;
        x[n] = s.etches[i].setting;
        y[n++] = s.etches[i].value;
    }
    if (st == ST_OK) st = trend_fit(x, y, n, &a.line, e);
    if (st == ST_OK) {
        sentence_subject subject = series_subject(&s, c->quantity, c->min, c->max);
        a.joined = s.n_joined;
        ask(q, &a);
        if (q->json) json_of_line(q, setting, &a, out);
        else say_line(q, &subject, setting, &a, out);
    }
    free(x);
    free(y);
    series_free(&s);
    return st == ST_OK ? text_check(out, "a line", e) : st;
}

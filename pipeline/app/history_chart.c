/* `sward history chart`: a control chart as text and JSON. Points are etches (means of the samples of one time of etching);
 * with subgroups the scatter inside the etches sets the limits instead of that between neighbours. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/history_verbs.h"
#include "app/series.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"

typedef struct {
    series s;
    chart c;
    sentence_subject subject;
    double *value, *index, *day; /* of the newest phase, [n] */
    size_t n;
    trend_slope drift, per_day;
    capability able;
    int has_drift, has_days, is_able;
} picture;

static void picture_free(picture *p) {
    series_free(&p->s);
    chart_free(&p->c);
    free(p->value);
    free(p->index);
    free(p->day);
}

static status draw(const history_question *q, picture *p, error *e) {
    size_t n = p->s.n;
    double *value = mem_array(n, sizeof *value), *sd = mem_array(n, sizeof *sd);
    size_t *count = mem_array(n, sizeof *count);
    int *starts = mem_array(n, sizeof *starts);
    status st = value && sd && count && starts ? ST_OK : NO_MEMORY(e, "a chart");
    for (size_t i = 0; st == ST_OK && i < n; i++) {
        const etch *x = &p->s.etches[i];
        value[i] = x->value;
        sd[i] = x->sd;
        count[i] = x->n;
        starts[i] = x->phase != NULL;
    }
    if (st == ST_OK && q->subgroups) st = chart_means(value, sd, count, starts, n, &q->options, &p->c, e);
    else if (st == ST_OK) st = chart_individuals(value, starts, n, &q->options, &p->c, e);
    free(value);
    free(sd);
    free(count);
    free(starts);
    return st;
}

static status look(const history_question *q, picture *p, error *e) {
    status st = series_make(q->rows, q->notes, q->quantity, NULL, 0, &p->s, e);
    if (st != ST_OK) return st;
    p->subject = series_subject(&p->s, q->quantity, q->min, q->max);
    st = draw(q, p, e);
    p->value = mem_array(p->s.n, sizeof *p->value);
    p->index = mem_array(p->s.n, sizeof *p->index);
    p->day = mem_array(p->s.n, sizeof *p->day);
    if (st == ST_OK && !(p->value && p->index && p->day)) st = NO_MEMORY(e, "a chart");
    if (st != ST_OK) return st;
    p->n = series_values(&p->s, series_last_phase(&p->s), p->value, p->index, p->day);
    p->has_drift = p->n >= CHART_LEAST_BASELINE && trend_robust(p->index, p->value, p->n, &p->drift, NULL) == ST_OK;
    p->has_days = p->has_drift && trend_robust(p->day, p->value, p->n, &p->per_day, NULL) == ST_OK;
    if ((isfinite(q->min) || isfinite(q->max)) && p->n >= CHART_LEAST_BASELINE) {
        st = capability_of(p->value, p->n, q->min, q->max, &p->able, e);
        p->is_able = st == ST_OK;
        if (st == ST_NO_RESULT) { /* no scatter: the chart stands without it */
            *e = (error){ ST_OK, "" };
            st = ST_OK;
        }
    }
    return st;
}

/* ---- text ---- */

static void add_phase(const picture *p, size_t k, textbuf *out) {
    const chart_phase *phase = &p->c.phases[k];
    const char *why = p->s.etches[phase->first].phase;
    if (p->c.n_phases > 1) text_addf(out, "Phase %zu%s%s. ", k + 1, why ? ", from: " : "", why ? why : "");
    sentence_phase(&p->subject, phase, &p->c.options, out);
    text_add(out, ".\n");
}

static void add_point(const picture *p, size_t i, int width, textbuf *out) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT], d[NUMBER_TEXT], f[NUMBER_TEXT];
    const etch *x = &p->s.etches[i];
    const chart_point *q = &p->c.points[i];
    text_addf(out, "  %-25s  %-*s  %10s  %10s  %10s  %8s  %10s", x->row->etched_at, width, x->row->sample,
              number_text(q->value, p->s.digits, a), number_text(q->lo, 4, b), number_text(q->hi, 4, c),
              number_text(q->spread, 3, d), number_text(q->ewma, 4, f));
    for (int bit = 0; bit < CHART_RULES; bit++)
        if (q->alarms & (1u << bit)) text_addf(out, "  %s", chart_rule_word(bit));
    if (x->row->excluded[0] && !x->n) text_addf(out, "  excluded: %s", x->row->excluded);
    else if (!x->n) text_add(out, "  not measured");
    else if (x->n > 1) text_addf(out, "  (mean of %zu)", x->n);
    text_add(out, "\n");
}

static void add_series(const picture *p, textbuf *out) {
    int width = 6;
    for (size_t i = 0; i < p->s.n; i++) {
        int n = (int)strlen(p->s.etches[i].row->sample);
        if (n > width && n < 40) width = n;
    }
    text_addf(out, "  %-25s  %-*s  %10s  %10s  %10s  %8s  %10s\n", "etched_at", width, "sample", "value", "low", "high", "spread",
              "average");
    for (size_t i = 0; i < p->s.n; i++) add_point(p, i, width, out);
}

static void add_conclusions(const picture *p, textbuf *out) {
    size_t alarms = 0;
    for (size_t i = 0; i < p->s.n; i++) {
        if (!p->c.points[i].alarms) continue;
        alarms++;
        text_add(out, "ALARM: ");
        sentence_alarm(&p->subject, p->s.etches[i].label, &p->c.points[i], out);
        text_add(out, ".\n");
    }
    if (!alarms) text_add(out, "No alarm.\n");
    sentence_false_alarms(&p->c.options, out);
    text_add(out, ".\n");
    if (p->has_drift) {
        sentence_drift(&p->subject, &p->drift, p->has_days ? &p->per_day : NULL, out);
        text_add(out, p->c.n_phases > 1 ? ", newest phase.\n" : ".\n");
    } else text_add(out, "Drift needs at least 5 etches in the newest phase.\n");
    if (p->is_able) {
        sentence_capability(&p->subject, &p->able, out);
        text_add(out, ".\n");
    } else if (isnan(p->subject.min) && isnan(p->subject.max))
        text_add(out, "Name the target range with --min and --max to get Ppk.\n");
}

/* ---- JSON ---- */

static void member(textbuf *t, const char *name, double v) {
    text_addf(t, ", \"%s\": ", name);
    json_number(t, v, 8);
}

static void add_words(unsigned rules, textbuf *t) {
    const char *separator = "";
    text_add(t, "[");
    for (int bit = 0; bit < CHART_RULES; bit++)
        if (rules & (1u << bit)) {
            text_addf(t, "%s\"%s\"", separator, chart_rule_word(bit));
            separator = ", ";
        }
    text_add(t, "]");
}

static void json_points(const picture *p, textbuf *t) {
    for (size_t i = 0; i < p->s.n; i++) {
        const etch *x = &p->s.etches[i];
        const chart_point *q = &p->c.points[i];
        text_addf(t, "%s{\"etch\": ", i ? ",\n  " : "");
        json_string(t, x->label);
        text_add(t, ", \"etched_at\": ");
        json_string(t, x->row->etched_at);
        text_addf(t, ", \"samples\": %zu, \"phase\": %zu", x->n, q->phase + 1);
        member(t, "value", q->value);
        member(t, "sd", x->sd);
        member(t, "z", q->z);
        member(t, "low", q->lo);
        member(t, "high", q->hi);
        member(t, "spread", q->spread);
        member(t, "spread_high", q->spread_hi);
        member(t, "average", q->ewma);
        member(t, "average_low", q->ewma_lo);
        member(t, "average_high", q->ewma_hi);
        text_add(t, ", \"alarms\": ");
        add_words(q->alarms, t);
        text_add(t, ", \"excluded\": ");
        json_string(t, x->row->excluded);
        text_add(t, "}");
    }
}

static void json_phases(const picture *p, textbuf *t) {
    for (size_t k = 0; k < p->c.n_phases; k++) {
        const chart_phase *phase = &p->c.phases[k];
        text_addf(t, "%s{\"first\": %zu, \"etches\": %zu, \"baseline\": %zu, \"why\": ", k ? ", " : "", phase->first + 1,
                  phase->n_used, phase->n_baseline);
        json_string(t, p->s.etches[phase->first].phase ? p->s.etches[phase->first].phase : "");
        member(t, "centre", phase->centre);
        member(t, "sigma", phase->sigma);
        member(t, "lag1", phase->lag1);
        text_add(t, "}");
    }
}

static void json_index(const char *name, const capability_index *c, textbuf *t) {
    text_addf(t, ", \"%s\": [", name);
    json_number(t, c->value, 6);
    text_add(t, ", ");
    json_number(t, c->lo, 6);
    text_add(t, ", ");
    json_number(t, c->hi, 6);
    text_add(t, "]");
}

static void json_chart(const picture *p, textbuf *t) {
    text_add(t, "{\"quantity\": ");
    json_string(t, p->subject.quantity);
    text_add(t, ", \"unit\": ");
    json_string(t, p->subject.unit);
    text_add(t, ", \"rules\": ");
    add_words(p->c.options.rules, t);
    member(t, "false_alarm_length", chart_false_alarm_length(p->c.options.rules));
    text_add(t, ",\n \"phases\": [");
    json_phases(p, t);
    text_add(t, "],\n \"points\": [\n  ");
    json_points(p, t);
    text_add(t, "]");
    if (p->has_drift) {
        text_addf(t, ",\n \"drift\": {\"etches\": %zu", p->n);
        member(t, "per_etch", p->drift.slope);
        member(t, "low", p->drift.lo);
        member(t, "high", p->drift.hi);
        if (p->has_days) member(t, "per_day", p->per_day.slope);
        text_add(t, "}");
    }
    if (p->is_able) {
        static const char *const forms[] = { "normal", "log-normal", "neither" };
        text_addf(t, ",\n \"capability\": {\"form\": \"%s\"", forms[p->able.form]);
        json_index("Ppk", &p->able.Ppk, t);
        json_index("Pp", &p->able.Pp, t);
        json_index("Cpk", &p->able.Cpk, t);
        json_index("Cp", &p->able.Cp, t);
        member(t, "normality_p", p->able.normality_p);
        member(t, "expected_outside", p->able.expected_outside);
        text_add(t, "}");
    }
    text_add(t, "}\n");
}

status history_chart(const history_question *q, textbuf *out, error *e) {
    picture p = { 0 };
    status st = look(q, &p, e);
    if (st == ST_OK && q->json) json_chart(&p, out);
    else if (st == ST_OK) {
        for (size_t k = 0; k < p.c.n_phases; k++) add_phase(&p, k, out);
        add_series(&p, out);
        add_conclusions(&p, out);
    }
    picture_free(&p);
    return st == ST_OK ? text_check(out, "a chart", e) : st;
}

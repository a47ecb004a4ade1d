/* Points are etches. Every phase is looked at on its own, before limits are drawn, so that they can rest on its first steady stretch; a phase that follows a change of the process is also held against the
 * last etches of the same recipe before it: did the change move the process? */
#include "app/control.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"

enum { SIDE_OF_CHANGE = 10, LEAST_OF_CHANGE = 3 }; /* etches on each side */

control_question control_defaults(const history_list *rows, const history_notes *notes) {
    return (control_question){ .rows = rows, .notes = notes, .quantity = "spacing_nm", .options = chart_defaults(),
                               .baseline_from = MISSING, .baseline_to = MISSING, .min = MISSING, .max = MISSING };
}

void control_free(control *c) {
    series_free(&c->s);
    chart_free(&c->c);
    free(c->phases);
    *c = (control){ 0 };
}

/* The etches of the first steady stretch of each phase, as the baseline. */
static void mark_steady(const control_question *q, control *c, unsigned char *stated) {
    for (size_t k = 0; k < c->s.n_phases; k++) {
        const findings *f = &c->phases[k].found;
        const finding_stretch *s = &f->stretches[0];
        size_t taken = 0, o = 0;
        if (s->n < q->options.baseline || !s->drift.n || sentence_drifts(&s->drift)) continue;
        c->phases[k].steady = 1;
        for (size_t i = s->first; i <= s->last && taken < CONTROL_STEADY; i++) {
            if (c->s.etches[i].phase != k || !isfinite(c->s.etches[i].value)) continue;
            while (o < f->n_outliers && f->outliers[o].at < i) o++;
            if (o < f->n_outliers && f->outliers[o].at == i) continue;
            stated[i] = 1;
            taken++;
        }
    }
}

static status draw(const control_question *q, control *c, error *e) {
    size_t n = c->s.n;
    double *value = mem_array(n, sizeof *value), *sd = mem_array(n, sizeof *sd);
    size_t *count = mem_array(n, sizeof *count), *phase = mem_array(n, sizeof *phase);
    unsigned char *stated = mem_array(n, 1);
    chart_options o = q->options;
    int period = isfinite(q->baseline_from) || isfinite(q->baseline_to);
    status st = value && sd && count && phase && stated ? ST_OK : NO_MEMORY(e, "a chart");
    for (size_t i = 0; st == ST_OK && i < n; i++) {
        const etch *x = &c->s.etches[i];
        value[i] = x->value;
        sd[i] = x->sd;
        count[i] = x->n;
        phase[i] = x->phase;
        stated[i] = !(x->row->day < q->baseline_from) && !(x->row->day > q->baseline_to);
    }
    if (!period && !q->first_etches && st == ST_OK) {
        memset(stated, 0, n);
        mark_steady(q, c, stated);
    }
    o.stated = period || !q->first_etches ? stated : NULL;
    if (st == ST_OK && q->subgroups) st = chart_means(value, sd, count, phase, n, &o, &c->c, e);
    else if (st == ST_OK) st = chart_individuals(value, phase, n, &o, &c->c, e);
    free(value);
    free(sd);
    free(count);
    free(phase);
    free(stated);
    return st;
}

/* ---- one phase ---- */

typedef struct {
    double *value, *work; /* [s->n] */
    size_t *at;
} room;

static void to_etches(findings *f, const size_t *at) {
    for (size_t i = 0; i < f->n_outliers; i++) f->outliers[i].at = at[f->outliers[i].at];
    for (size_t i = 0; i < f->n_breaks; i++) {
        f->breaks[i].before = at[f->breaks[i].before];
        f->breaks[i].at = at[f->breaks[i].at];
    }
    for (size_t i = 0; i <= f->n_breaks; i++) {
        if (!f->stretches[i].n) continue;
        f->stretches[i].first = at[f->stretches[i].first];
        f->stretches[i].last = at[f->stretches[i].last];
    }
}

/* Finite values of the last stretch with their days. */
static void slope_per_day(const control *c, size_t k, const finding_stretch *last, room *r, trend_slope *out) {
    size_t n = 0;
    for (size_t i = last->first; i <= last->last; i++) {
        const etch *x = &c->s.etches[i];
        if (x->phase != k || !isfinite(x->value)) continue;
        r->work[n] = x->row->day;
        r->value[n++] = x->value;
    }
    if (trend_robust(r->work, r->value, n, out, NULL) != ST_OK) *out = (trend_slope){ 0 };
}

static size_t drop_missing(double *v, size_t n) {
    size_t kept = 0;
    for (size_t i = 0; i < n; i++)
        if (isfinite(v[i])) v[kept++] = v[i];
    return kept;
}

/* The newest phase of the same recipe before the change that opened phase k. */
static int phase_before(const series *s, size_t k, size_t *before) {
    for (size_t i = k; i-- > 0;)
        if (s->phases[i].epoch < s->phases[k].epoch && !strcmp(s->phases[i].recipe, s->phases[k].recipe)) {
            *before = i;
            return 1;
        }
    return 0;
}

/* r->value holds the n values of phase k; those of the phase before go into r->work. */
static void since_change(const control *c, size_t k, size_t n, room *r, trend_step *out) {
    size_t before = 0;
    if (!phase_before(&c->s, k, &before)) return;
    size_t n_before = drop_missing(r->work, series_of_phase(&c->s, before, r->work, r->at));
    size_t a = n_before < SIDE_OF_CHANGE ? n_before : SIDE_OF_CHANGE, b = n < SIDE_OF_CHANGE ? n : SIDE_OF_CHANGE;
    if (a < LEAST_OF_CHANGE || b < LEAST_OF_CHANGE) return;
    if (trend_welch(r->work + n_before - a, a, r->value, b, out, NULL) != ST_OK) *out = (trend_step){ 0 };
}

static status look_at(const control_question *q, control *c, size_t k, room *r, error *e) {
    control_phase *p = &c->phases[k];
    size_t n = series_of_phase(&c->s, k, r->value, r->at);
    status st = findings_of(r->value, n, &p->found, e);
    if (st != ST_OK) return st;
    to_etches(&p->found, r->at);
    p->live = c->s.phases[k].epoch == c->s.phases[c->s.n_phases - 1].epoch;
    n = drop_missing(r->value, n);
    since_change(c, k, n, r, &p->since);
    if ((isfinite(q->min) || isfinite(q->max)) && n >= CHART_LEAST_BASELINE) {
        error why = { ST_OK, "" };
        st = capability_of(r->value, n, q->min, q->max, &p->able, &why);
        if (st == ST_NO_RESULT) { /* no scatter: the chart stands without it */
            p->able = (capability){ 0 };
            st = ST_OK;
        }
        if (st != ST_OK) return fail(e, st, "%s", why.text);
    }
    const finding_stretch *last = &p->found.stretches[p->found.n_breaks];
    p->per_etch = last->drift;
    if (p->per_etch.n) slope_per_day(c, k, last, r, &p->per_day);
    return ST_OK;
}

status control_make(const control_question *q, control *out, error *e) {
    control c = { .notes = q->notes, .phase_by = q->phase_by ? q->phase_by : SERIES_RECIPE, .subgroups = q->subgroups };
    series_question what = { .quantity = q->quantity, .phase_by = q->phase_by };
    room r = { 0 };
    status st = series_make(q->rows, q->notes, &what, &c.s, e);
    if (st == ST_OK) {
        c.subject = series_subject(&c.s, q->quantity, q->min, q->max);
        c.phases = mem_array(c.s.n_phases, sizeof *c.phases);
        r = (room){ mem_array(c.s.n, sizeof(double)), mem_array(c.s.n, sizeof(double)), mem_array(c.s.n, sizeof(size_t)) };
        if (!c.phases || !r.value || !r.work || !r.at) st = NO_MEMORY(e, "a chart");
    }
    for (size_t k = 0; st == ST_OK && k < c.s.n_phases; k++) st = look_at(q, &c, k, &r, e);
    if (st == ST_OK) st = draw(q, &c, e);
    if (st == ST_OK) {
        size_t newest = c.s.etches[c.s.n - 1].phase;
        const chart_phase *p = &c.c.phases[newest];
        int estimated = p->n_baseline > 0 || (c.c.options.rules & (RULE(SPREAD) | RULE(EWMA)));
        c.false_alarms = q->subgroups || !isfinite(p->sigma) ? MISSING
                         : estimated ? chart_false_alarm_drawn(&c.c.options, p->n_baseline)
                                     : chart_false_alarm_length(c.c.options.rules);
    }
    free(r.value);
    free(r.work);
    free(r.at);
    if (st == ST_OK) *out = c;
    else control_free(&c);
    return st;
}

/* The process in a few lines. Only the newest phase speaks: what came before a change says nothing of today. */
#include "app/process.h"

#include <math.h>
#include <stdlib.h>

#include "app/series.h"
#include "base/mem.h"
#include "base/quantity.h"

/* The last etch of the chart, if a rule fired there. */
static status last_alarm(const series *s, size_t first, const sentence_subject *subject, double *work, textbuf *out, error *e) {
    chart c = { 0 };
    chart_options o = chart_defaults();
    size_t n = s->n - first;
    for (size_t i = 0; i < n; i++) work[i] = s->etches[first + i].value;
    status st = chart_individuals(work, NULL, n, &o, &c, e);
    if (st == ST_OK && c.points[n - 1].alarms) {
        sentence_alarm(subject, s->etches[s->n - 1].label, &c.points[n - 1], out);
        text_add(out, ".\n");
    }
    chart_free(&c);
    return st;
}

static status one_quantity(const series *s, const sentence_subject *subject, textbuf *out, error *e) {
    size_t first = series_last_phase(s);
    double *value = mem_array(s->n, sizeof *value), *index = mem_array(s->n, sizeof *index), *day = mem_array(s->n, sizeof *day);
    status st = value && index && day ? ST_OK : NO_MEMORY(e, "the process");
    size_t n = st == ST_OK ? series_values(s, first, value, index, day) : 0;
    if (n >= PROCESS_LEAST_ETCHES) {
        trend_slope steps = { 0 }, days = { 0 };
        capability c;
        st = trend_robust(index, value, n, &steps, e);
        int has_days = st == ST_OK && trend_robust(day, value, n, &days, NULL) == ST_OK;
        if (st == ST_OK) {
            sentence_drift(subject, &steps, has_days ? &days : NULL, out);
            text_add(out, ".\n");
            if (capability_of(value, n, subject->min, subject->max, &c, NULL) == ST_OK) {
                sentence_capability(subject, &c, out);
                text_add(out, ".\n");
            }
            st = last_alarm(s, first, subject, value, out, e);
        }
    }
    free(value);
    free(index);
    free(day);
    return st;
}

status process_sentences(const history_list *l, const history_notes *notes, const protocol *p, textbuf *out, error *e) {
    static char spacing[] = "spacing_nm";
    const target none = { spacing, MISSING, MISSING, ERROR_FULL };
    size_t n = p->n_targets ? p->n_targets : 1;
    status st = ST_OK;
    for (size_t i = 0; st == ST_OK && i < n && i < PROCESS_MOST_QUANTITIES; i++) {
        const target *t = p->n_targets ? &p->targets[i] : &none;
        series s = { 0 };
        error why = { ST_OK, "" };
        st = series_make(l, notes, t->quantity, NULL, 0, &s, &why);
        if (st == ST_BAD_INPUT) { /* never measured: the verdicts say so */
            st = ST_OK;
            continue;
        }
        if (st != ST_OK) return fail(e, st, "%s", why.text);
        sentence_subject subject = series_subject(&s, t->quantity, t->min, t->max);
        st = one_quantity(&s, &subject, out, e);
        series_free(&s);
    }
    return st == ST_OK ? text_check(out, "the process", e) : st;
}

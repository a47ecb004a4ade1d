/* The process in a few lines and as charts. Drift and capability speak of the phases since the last change: what came before it says
 * nothing of today. What stands out, steps and drifts are told as far back as PROCESS_TELL etches. */
#include "app/process.h"

#include <math.h>
#include <string.h>

#include "base/quantity.h"

/* The last etch of the chart, if a rule fired there. */
static void last_alarm(const control *c, textbuf *out) {
    const chart_point *last = &c->c.points[c->s.n - 1];
    if (!last->alarms) return;
    sentence_alarm(&c->subject, c->s.etches[c->s.n - 1].label, last, out);
    text_add(out, ".\n");
}

static int long_enough(const control *c) {
    for (size_t k = 0; k < c->c.n_phases; k++)
        if (c->c.phases[k].n_used >= PROCESS_LEAST_ETCHES) return 1;
    return 0;
}

static int has_today(const control *c) {
    for (size_t k = 0; k < c->c.n_phases; k++)
        if (c->phases[k].live && c->phases[k].per_etch.n) return 1;
    return 0;
}

static status one_quantity(const control_question *q, textbuf *lines, textbuf *charts, size_t *n, error *e) {
    control c = { 0 };
    error why = { ST_OK, "" };
    status st = control_make(q, &c, &why);
    if (st == ST_BAD_INPUT) return ST_OK; /* never measured: the verdicts say so */
    if (st != ST_OK) return fail(e, st, "%s", why.text);
    text_add(charts, *n ? ",\n" : "\n");
    control_json(&c, PROCESS_MOST_POINTS, charts);
    ++*n;
    if (long_enough(&c)) control_findings(&c, PROCESS_TELL, lines);
    if (has_today(&c)) {
        control_today(&c, lines);
        last_alarm(&c, lines);
    }
    control_free(&c);
    return ST_OK;
}

status process_describe(const history_list *l, const history_notes *notes, const protocol *p, textbuf *lines, textbuf *charts, error *e) {
    static const char *const always[] = { "spacing_nm", "weighted_reflectance" };
    control_question q = control_defaults(l, notes);
    status st = p->chart_rules ? chart_rules_parse(p->chart_rules, &q.options.rules, e) : ST_OK;
    size_t n = 0, said = 0;
    textbuf unsaid = { 0 };
    q.phase_by = p->chart_phase;
    q.first_etches = isfinite(p->chart_baseline);
    if (q.first_etches) q.options.baseline = (size_t)p->chart_baseline;
    text_add(charts, "[");
    for (size_t i = 0; st == ST_OK && l->n && i < p->n_targets; i++) {
        q.quantity = p->targets[i].quantity;
        q.min = p->targets[i].min;
        q.max = p->targets[i].max;
        st = one_quantity(&q, said++ < PROCESS_MOST_QUANTITIES ? lines : &unsaid, charts, &n, e);
    }
    q.min = q.max = MISSING;
    for (size_t k = 0; st == ST_OK && l->n && k < sizeof always / sizeof always[0]; k++) {
        int done = 0;
        for (size_t i = 0; i < p->n_targets; i++) done |= !strcmp(p->targets[i].quantity, always[k]);
        q.quantity = always[k];
        if (!done) st = one_quantity(&q, k == 0 && !p->n_targets ? lines : &unsaid, charts, &n, e);
    }
    text_add(charts, "]");
    text_free(&unsaid);
    if (st == ST_OK) st = text_check(lines, "the process", e);
    return st == ST_OK ? text_check(charts, "the charts", e) : st;
}

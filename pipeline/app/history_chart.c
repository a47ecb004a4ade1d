/* `sward history chart`: a control chart as text and JSON. Points are etches (means of the samples of one time of etching);
 * with subgroups the scatter inside the etches sets the limits instead of that between neighbours. */
#include <math.h>
#include <string.h>

#include "app/history_verbs.h"
#include "base/number.h"

static void add_point(const control *c, size_t i, int width, textbuf *out) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT], d[NUMBER_TEXT], f[NUMBER_TEXT], g[NUMBER_TEXT];
    const etch *x = &c->s.etches[i];
    const chart_point *q = &c->c.points[i];
    text_addf(out, "  %-25s  %-*s  %10s  %10s  %10s  %8s  %10s", x->row->etched_at, width, x->row->sample,
              number_text(q->value, c->s.digits, a), number_text(q->lo, 4, b), number_text(q->hi, 4, d),
              number_text(q->spread, 3, f), number_text(q->ewma, 4, g));
    for (int bit = 0; bit < CHART_RULES; bit++)
        if (q->alarms & (1u << bit)) text_addf(out, "  %s", chart_rule_word(bit));
    if (x->row->excluded[0] && !x->n) text_addf(out, "  excluded: %s", x->row->excluded);
    else if (!x->n) text_add(out, "  not measured");
    else if (x->n > 1) text_addf(out, "  (mean of %zu)", x->n);
    text_add(out, "\n");
}

/* Etches with the notes between them. */
static void add_series(const control *c, textbuf *out) {
    int width = 6;
    size_t note = 0;
    for (size_t i = 0; i < c->s.n; i++) {
        int n = (int)strlen(c->s.etches[i].row->sample);
        if (n > width && n < 40) width = n;
    }
    text_addf(out, "  %-25s  %-*s  %10s  %10s  %10s  %8s  %10s\n", "etched_at", width, "sample", "value", "low", "high", "spread",
              "average");
    for (size_t i = 0; i < c->s.n; i++) {
        for (; note < c->notes->n && c->notes->notes[note].day <= c->s.etches[i].row->day; note++)
            if (i) text_addf(out, "  %-25s  --- %s\n", c->notes->notes[note].at, c->notes->notes[note].text);
        add_point(c, i, width, out);
    }
    for (; note < c->notes->n; note++)
        text_addf(out, "  %-25s  --- %s\n", c->notes->notes[note].at, c->notes->notes[note].text);
}

status history_chart(const history_question *q, textbuf *out, error *e) {
    control c = { 0 };
    status st = control_make(&q->control, &c, e);
    if (st == ST_OK && q->json) control_json(&c, 0, out);
    else if (st == ST_OK) {
        control_limits(&c, out);
        add_series(&c, out);
        control_findings(&c, 0, out);
        control_alarms(&c, out);
        control_today(&c, out);
        if (isnan(c.subject.min) && isnan(c.subject.max)) text_add(out, "Name the target range with --min and --max to get Ppk.\n");
    }
    control_free(&c);
    return st == ST_OK ? text_check(out, "a chart", e) : st;
}

/* `sward history differences`: what another protocol or program version made of the same etches. Of every sample that was run more
 * than once the last two runs are held against each other; both stay in the ledger.
 * What this file does not do: it says nothing of uncertainty; the pictures are the same, so sampling cancels. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/history_verbs.h"
#include "app/rowtext.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"

static status number_of(const history_row *r, const char *name, double *out, error *e) {
    const char *at = r->row_json;
    row_member m;
    int more;
    *out = MISSING;
    while ((more = row_next(&at, &m)) == 1)
        if (row_named(&m, name)) *out = row_number(&m);
    return more < 0 ? fail(e, ST_IO, "the ledger holds a damaged row of the sample '%s'", r->sample) : ST_OK;
}

/* "line 3 (1a2b3c4d, 0.1.0)" */
static void add_origin(const history_row *r, textbuf *out) {
    text_addf(out, "%s (%.8s%s%s)", r->protocol, r->protocol_sha256, r->protocol_sha256[0] ? ", " : "", r->version);
}

static int same_etch(const history_row *a, const history_row *b) {
    return !strcmp(a->sample, b->sample) && !strcmp(a->etched_at, b->etched_at);
}

typedef struct {
    const history_question *q;
    textbuf *out;
    size_t n, known;
    double sum, square, most;
} tally;

static status add_pair(const history_row *a, const history_row *b, tally *t, error *e) {
    char shown[3][NUMBER_TEXT];
    double before = MISSING, after = MISSING;
    status st = number_of(a, t->q->control.quantity, &before, e);
    if (st == ST_OK) st = number_of(b, t->q->control.quantity, &after, e);
    if (st != ST_OK) return st;
    double d = after - before;
    t->n++;
    if (isfinite(d)) {
        double off = d - (t->known ? t->sum / (double)t->known : 0.0);
        t->known++;
        t->sum += d;
        t->square += off * (d - t->sum / (double)t->known);
        t->most = fmax(t->most, fabs(d));
    }
    if (t->q->json) {
        text_addf(t->out, "%s\n  {\"sample\": ", t->n > 1 ? "," : "");
        json_string(t->out, b->sample);
        text_add(t->out, ", \"etched_at\": ");
        json_string(t->out, b->etched_at);
        const history_row *const both[] = { a, b };
        static const char *const names[] = { "before", "after" };
        for (int i = 0; i < 2; i++) {
            text_addf(t->out, ", \"%s\": {\"value\": ", names[i]);
            json_number(t->out, i ? after : before, 15);
            text_add(t->out, ", \"protocol\": ");
            json_string(t->out, both[i]->protocol);
            text_add(t->out, ", \"protocol_sha256\": ");
            json_string(t->out, both[i]->protocol_sha256);
            text_add(t->out, ", \"version\": ");
            json_string(t->out, both[i]->version);
            text_add(t->out, ", \"run_at\": ");
            json_string(t->out, both[i]->run_at);
            text_add(t->out, "}");
        }
        text_add(t->out, ", \"difference\": ");
        json_number(t->out, d, 6);
        text_add(t->out, "}");
        return ST_OK;
    }
    text_addf(t->out, "%-20s  %-24s  %10s -> %-10s  %s%s  ", b->etched_at, b->sample, number_text(before, 6, shown[0]),
              number_text(after, 6, shown[1]), d > 0.0 ? "+" : "", number_text(d, 4, shown[2]));
    add_origin(a, t->out);
    text_add(t->out, " -> ");
    add_origin(b, t->out);
    text_add(t->out, "\n");
    return ST_OK;
}

status history_differences(const history_question *q, textbuf *out, error *e) {
    const history_list *l = q->control.rows;
    tally t = { .q = q, .out = out };
    status st = ST_OK;
    if (q->json) text_add(out, "[");
    for (size_t i = 1; st == ST_OK && i < l->n; i++) {
        int is_last = i + 1 == l->n || !same_etch(&l->rows[i], &l->rows[i + 1]);
        if (is_last && same_etch(&l->rows[i - 1], &l->rows[i])) st = add_pair(&l->rows[i - 1], &l->rows[i], &t, e);
    }
    if (q->json) text_add(out, t.n ? "\n]\n" : "]\n");
    else {
        char mean[NUMBER_TEXT], sd[NUMBER_TEXT], most[NUMBER_TEXT];
        double n = (double)t.known;
        text_addf(out, "%zu %s run again", t.n, t.n == 1 ? "etch was" : "etches were");
        if (t.known > 1)
            text_addf(out, "; %s differs by %s on average (sd %s), at most by %s", q->control.quantity, number_text(t.sum / n, 4, mean),
                      number_text(sqrt(t.square / (n - 1.0)), 3, sd), number_text(t.most, 4, most));
        text_add(out, ".\n");
    }
    return st == ST_OK ? text_check(out, "the differences", e) : st;
}

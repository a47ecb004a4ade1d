/* A control chart in words and as JSON. The sentences themselves are judge/sentence.h's. */
#include <math.h>
#include <string.h>

#include "app/control.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"

static const char *label(const control *c, size_t i) { return c->s.etches[i].label; }

/* "recipe B: " where several recipes are charted side by side. */
static void name_phase(const control *c, size_t k, textbuf *t) {
    if (c->s.n_phases > 1 && c->s.phases[k].recipe[0]) text_addf(t, "%s %s: ", c->phase_by, c->s.phases[k].recipe);
}

/* ---- findings, one after another ---- */

typedef enum { FOUND_OUTLIER, FOUND_BREAK, FOUND_DRIFT, FOUND_CHANGE } found_kind;

typedef struct {
    found_kind kind;
    const char *word; /* outlier step bend drift change */
    size_t phase, from, to; /* etches */
    size_t index;           /* in its list */
    double size, lo, hi, p;
} found;

typedef void found_use(const control *c, const found *f, void *user);

static void each_of_phase(const control *c, size_t k, found_use *use, void *user) {
    const control_phase *p = &c->phases[k];
    const double no = MISSING;
    if (p->since.n_a) {
        size_t first = c->s.phases[k].first;
        found f = { FOUND_CHANGE, "change", k, first ? first - 1 : 0, first, 0, p->since.difference, p->since.lo, p->since.hi, p->since.p };
        use(c, &f, user);
    }
    for (size_t i = 0; i < p->found.n_outliers; i++) {
        const finding_outlier *o = &p->found.outliers[i];
        found f = { FOUND_OUTLIER, "outlier", k, o->at, o->at, i, o->value - o->beside, no, no, no };
        use(c, &f, user);
    }
    for (size_t i = 0; i <= p->found.n_breaks; i++) {
        const finding_stretch *s = &p->found.stretches[i];
        if (i > 0) {
            const finding_break *b = &p->found.breaks[i - 1];
            found f = { FOUND_BREAK, b->kind == BREAK_STEP ? "step" : "bend", k, b->before, b->at, i - 1, b->size, b->lo, b->hi, b->p };
            use(c, &f, user);
        }
        if (!s->drift.n || !sentence_drifts(&s->drift)) continue;
        found f = { FOUND_DRIFT, "drift", k, s->first, s->last, i, s->drift.slope, s->drift.lo, s->drift.hi, s->drift.p };
        use(c, &f, user);
    }
}

static void say(const control *c, const found *f, textbuf *t) {
    const control_phase *p = &c->phases[f->phase];
    name_phase(c, f->phase, t);
    switch (f->kind) {
    case FOUND_OUTLIER: sentence_outlier(&c->subject, label(c, f->from), &p->found.outliers[f->index], t); break;
    case FOUND_BREAK: sentence_break(&c->subject, label(c, f->from), label(c, f->to), &p->found.breaks[f->index], t); break;
    case FOUND_DRIFT:
        sentence_stretch(&c->subject, label(c, f->from), label(c, f->to), &p->found.stretches[f->index].drift, t);
        break;
    case FOUND_CHANGE: sentence_since(&c->subject, c->s.phases[f->phase].why ? c->s.phases[f->phase].why : "the change", &p->since, t); break;
    }
}

typedef struct {
    textbuf *out;
    size_t oldest;
    const char *separator;
} listing;

static void add_line(const control *c, const found *f, void *user) {
    listing *l = user;
    /* the drift of today is said with the time that is left */
    if (f->to < l->oldest || (f->kind == FOUND_DRIFT && c->phases[f->phase].live && f->index == c->phases[f->phase].found.n_breaks)) return;
    say(c, f, l->out);
    text_add(l->out, ".\n");
}

void control_findings(const control *c, size_t etches, textbuf *out) {
    listing l = { out, etches && etches < c->s.n ? c->s.n - etches : 0, "" };
    for (size_t k = 0; k < c->c.n_phases; k++) each_of_phase(c, k, add_line, &l);
}

void control_limits(const control *c, textbuf *out) {
    for (size_t k = 0; k < c->c.n_phases; k++) {
        const series_phase *s = &c->s.phases[k];
        if (c->c.n_phases > 1) {
            text_addf(out, "Phase %zu", k + 1);
            if (s->why) text_addf(out, ", from: %s", s->why);
            else if (s->recipe[0]) text_addf(out, ", %s %s", c->phase_by, s->recipe);
            text_add(out, ". ");
        }
        sentence_phase(&c->subject, &c->c.phases[k], &c->c.options, c->phases[k].steady, out);
        text_add(out, ".\n");
    }
}

/* Of one test alone, limits known. */
static double length_alone(const chart_options *o, int bit) {
    chart_options one = *o;
    one.rules = 1u << bit;
    return one.rules & (RULE(SPREAD) | RULE(EWMA)) ? chart_false_alarm_drawn(&one, 0) : chart_false_alarm_length(one.rules);
}

static void say_tests(const chart_options *o, textbuf *t) {
    const char *separator = "Each test alone, limits known, one in: ";
    char shown[NUMBER_TEXT];
    for (int bit = 0; bit < CHART_RULES; bit++) {
        if (!(o->rules & (1u << bit))) continue;
        text_addf(t, "%s%s %s", separator, chart_rule_word(bit), number_text(length_alone(o, bit), 3, shown));
        separator = ", ";
    }
    if (o->rules) text_add(t, ".\n");
}

void control_alarms(const control *c, textbuf *out) {
    size_t alarms = 0;
    for (size_t i = 0; i < c->s.n; i++) {
        if (!c->c.points[i].alarms) continue;
        alarms++;
        text_add(out, "ALARM: ");
        sentence_alarm(&c->subject, label(c, i), &c->c.points[i], out);
        text_add(out, ".\n");
    }
    if (!alarms) text_add(out, "No alarm.\n");
    sentence_false_alarms(&c->c.options, c->false_alarms, c->c.phases[c->s.etches[c->s.n - 1].phase].n_baseline, out);
    text_add(out, ".\n");
    say_tests(&c->c.options, out);
}

void control_today(const control *c, textbuf *out) {
    size_t said = 0;
    for (size_t k = 0; k < c->c.n_phases; k++) {
        const control_phase *p = &c->phases[k];
        if (!p->live) continue;
        if (p->per_etch.n) {
            said++;
            name_phase(c, k, out);
            sentence_drift(&c->subject, &p->per_etch, p->per_day.n ? &p->per_day : NULL, out);
            text_add(out, c->c.n_phases > 1 ? ", newest phase.\n" : ".\n");
        }
        if (p->able.n) {
            name_phase(c, k, out);
            sentence_capability(&c->subject, &p->able, out);
            text_add(out, ".\n");
        }
    }
    if (!said) text_add(out, "Drift needs at least 5 etches in the newest phase.\n");
}

/* ---- JSON ---- */

static void member(textbuf *t, const char *name, double v) {
    text_addf(t, ", \"%s\": ", name);
    json_number(t, v, 8);
}

static void member_text(textbuf *t, const char *name, const char *text) {
    text_addf(t, ", \"%s\": ", name);
    json_string(t, text);
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

static void json_tests(const chart_options *o, textbuf *t) {
    const char *separator = "";
    text_add(t, "\"tests\": [");
    for (int bit = 0; bit < CHART_RULES; bit++) {
        if (!(o->rules & (1u << bit))) continue;
        text_addf(t, "%s{\"test\": \"%s\", \"meaning\": \"%s\"", separator, chart_rule_word(bit), chart_rule_meaning(bit));
        member(t, "false_alarm_length", length_alone(o, bit));
        text_add(t, "}");
        separator = ", ";
    }
    text_add(t, "]");
}

static void json_points(const control *c, size_t first, textbuf *t) {
    for (size_t i = first; i < c->s.n; i++) {
        const etch *x = &c->s.etches[i];
        const chart_point *q = &c->c.points[i];
        text_addf(t, "%s{\"number\": %zu", i > first ? ",\n  " : "", i + 1);
        member_text(t, "etch", x->label);
        member_text(t, "etched_at", x->row->etched_at);
        text_addf(t, ", \"samples\": %zu, \"phase\": %zu", x->n, q->phase + 1);
        const struct { const char *name; double v; } numbers[] = {
            { "value", q->value },         { "u", x->u },
            { "sd", x->sd },               { "z", q->z },
            { "low", q->lo },              { "high", q->hi },
            { "spread", q->spread },       { "spread_low", q->spread_lo },
            { "spread_high", q->spread_hi }, { "average", q->ewma },
            { "average_low", q->ewma_lo }, { "average_high", q->ewma_hi } };
        for (size_t k = 0; k < sizeof numbers / sizeof numbers[0]; k++) member(t, numbers[k].name, numbers[k].v);
        text_add(t, ", \"alarms\": ");
        add_words(q->alarms, t);
        member_text(t, "excluded", x->row->excluded[0] && !x->n ? x->row->excluded : NULL);
        text_add(t, "}");
    }
}

static void json_phases(const control *c, textbuf *t) {
    for (size_t k = 0; k < c->c.n_phases; k++) {
        const chart_phase *p = &c->c.phases[k];
        const series_phase *s = &c->s.phases[k];
        text_addf(t, "%s{\"number\": %zu, \"first\": %zu, \"etches\": %zu, \"baseline\": %zu, \"baseline_of\": \"%s\"", k ? ", " : "", k + 1,
                  p->first + 1, p->n_used, p->n_baseline, !p->stated ? "first" : c->phases[k].steady ? "steady" : "stated");
        member_text(t, "why", s->why ? s->why : "");
        member_text(t, "recipe", s->recipe);
        text_addf(t, ", \"live\": %s", c->phases[k].live ? "true" : "false");
        member(t, "centre", p->centre);
        member(t, "sigma", p->sigma);
        member(t, "low", p->centre - 3.0 * p->sigma);
        member(t, "high", p->centre + 3.0 * p->sigma);
        member(t, "spread_mean", p->spread_mean);
        member(t, "lag1", p->lag1);
        text_add(t, "}");
    }
}

static void json_notes(const control *c, textbuf *t) {
    size_t at = 0;
    for (size_t i = 0; i < c->notes->n; i++) {
        const history_note *n = &c->notes->notes[i];
        while (at < c->s.n && c->s.etches[at].row->day < n->day) at++;
        text_addf(t, "%s{\"at\": ", i ? ", " : "");
        json_string(t, n->at);
        member_text(t, "kind", n->kind);
        member_text(t, "text", n->text);
        member_text(t, "initials", n->initials);
        text_addf(t, ", \"before\": %zu}", at + 1);
    }
}

static void add_finding(const control *c, const found *f, void *user) {
    listing *l = user;
    textbuf words = { 0 };
    text_addf(l->out, "%s{\"kind\": \"%s\", \"phase\": %zu, \"from\": %zu, \"to\": %zu", l->separator, f->word, f->phase + 1, f->from + 1,
              f->to + 1);
    member(l->out, "size", f->size);
    member(l->out, "low", f->lo);
    member(l->out, "high", f->hi);
    member(l->out, "p", f->p);
    say(c, f, &words);
    member_text(l->out, "sentence", words.s);
    text_add(l->out, "}");
    if (words.failed) l->out->failed = 1;
    text_free(&words);
    l->separator = ",\n  ";
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

static void json_today(const control_phase *p, textbuf *t) {
    static const char *const forms[] = { "normal", "log-normal", "neither" };
    if (p->per_etch.n) {
        text_addf(t, ",\n \"drift\": {\"etches\": %zu", p->per_etch.n);
        member(t, "per_etch", p->per_etch.slope);
        member(t, "low", p->per_etch.lo);
        member(t, "high", p->per_etch.hi);
        member(t, "p", p->per_etch.p);
        member(t, "per_day", p->per_day.n ? p->per_day.slope : MISSING);
        text_add(t, "}");
    }
    if (p->able.n) {
        text_addf(t, ",\n \"capability\": {\"form\": \"%s\"", forms[p->able.form]);
        json_index("Ppk", &p->able.Ppk, t);
        json_index("Pp", &p->able.Pp, t);
        json_index("Cpk", &p->able.Cpk, t);
        json_index("Cp", &p->able.Cp, t);
        member(t, "normality_p", p->able.normality_p);
        member(t, "expected_outside", p->able.expected_outside);
        text_add(t, "}");
    }
}

/* Lines as an array of texts. */
static void json_lines(textbuf *lines, textbuf *t) {
    const char *separator = "";
    text_add(t, "[");
    for (char *line = lines->s; line && *line;) {
        char *end = strchr(line, '\n');
        if (end) *end = '\0';
        text_add(t, separator);
        json_string(t, line);
        separator = ",\n  ";
        line = end ? end + 1 : NULL;
    }
    text_add(t, "]");
}

void control_json(const control *c, size_t most, textbuf *t) {
    size_t first = most && c->s.n > most ? c->s.n - most : 0;
    textbuf lines = { 0 };
    text_add(t, "{\"quantity\": ");
    json_string(t, c->subject.quantity);
    member_text(t, "unit", c->subject.unit);
    text_addf(t, ", \"digits\": %d", c->subject.digits);
    member(t, "target_min", c->subject.min);
    member(t, "target_max", c->subject.max);
    member_text(t, "phase_by", c->phase_by);
    text_addf(t, ", \"subgroups\": %s, \"rules\": ", c->subgroups ? "true" : "false");
    add_words(c->c.options.rules, t);
    text_add(t, ",\n ");
    json_tests(&c->c.options, t);
    member(t, "false_alarm_length", c->false_alarms);
    member(t, "false_alarm_length_known", chart_false_alarm_length(c->c.options.rules));
    text_add(t, ",\n \"phases\": [");
    json_phases(c, t);
    text_add(t, "],\n \"points\": [\n  ");
    json_points(c, first, t);
    text_addf(t, "],\n \"points_left_out\": %zu, \"notes\": [", first);
    json_notes(c, t);
    text_add(t, "],\n \"findings\": [");
    listing l = { t, 0, "" };
    for (size_t k = 0; k < c->c.n_phases; k++) each_of_phase(c, k, add_finding, &l);
    text_add(t, "]");
    json_today(&c->phases[c->s.etches[c->s.n - 1].phase], t);
    control_limits(c, &lines);
    control_findings(c, 0, &lines);
    control_alarms(c, &lines);
    control_today(c, &lines);
    text_add(t, ",\n \"sentences\": ");
    json_lines(&lines, t);
    text_add(t, "}\n");
    if (lines.failed) t->failed = 1;
    text_free(&lines);
}

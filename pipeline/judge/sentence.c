/* Sentences. A number with its interval, what it means, and no more: the person decides.
 * What this file does not do: it computes nothing but the number of etches until a limit. */
#include "judge/sentence.h"

#include <math.h>
#include <string.h>

#include "base/number.h"

void sentence_name(const sentence_subject *s, textbuf *t) {
    static const char *const units[] = { "_nm", "_per_um2", "_mA_cm2", "_px", "_deg" };
    size_t n = strlen(s->quantity);
    for (size_t i = 0; i < sizeof units / sizeof units[0]; i++) {
        size_t k = strlen(units[i]);
        if (n > k && !strcmp(s->quantity + n - k, units[i])) {
            n -= k;
            break;
        }
    }
    for (size_t i = 0; i < n; i++) text_add_n(t, s->quantity[i] == '_' ? " " : s->quantity + i, 1);
}

static void add_number(double v, int digits, textbuf *t) {
    char shown[NUMBER_TEXT];
    text_add(t, number_text(v, digits, shown));
}

static void add_value(const sentence_subject *s, double v, int digits, textbuf *t) {
    add_number(v, digits, t);
    if (s->unit[0]) text_addf(t, " %s", s->unit);
}

static void add_interval(double lo, double hi, int digits, textbuf *t) {
    text_add(t, "(95 %: ");
    if (isfinite(lo)) add_number(lo, digits, t);
    else text_add(t, "unknown");
    text_add(t, " to ");
    if (isfinite(hi)) add_number(hi, digits, t);
    else text_add(t, "unknown");
    text_add(t, ")");
}

static int is_clear(const trend_slope *d) { return isfinite(d->lo) && isfinite(d->hi) && (d->lo > 0.0 || d->hi < 0.0); }

int sentence_drifts(const trend_slope *d) { return is_clear(d) && d->p < 0.003; }

enum { FAR = 100 }; /* etches; beyond that a straight line says nothing */

static void add_time_left(const sentence_subject *s, const trend_slope *d, textbuf *t) {
    double limit = d->slope > 0.0 ? s->max : s->min, now = d->intercept + d->slope * (double)(d->n - 1);
    if (!isfinite(limit)) return;
    double left = (limit - now) / d->slope;
    if (left < 0.0) text_add(t, "; it has left its target");
    else if (left < FAR) {
        long n = (long)floor(left) + 1;
        text_addf(t, "; at this rate it leaves its target in %ld %s", n, n == 1 ? "etch" : "etches");
    }
}

void sentence_drift(const sentence_subject *s, const trend_slope *d, const trend_slope *day, textbuf *t) {
    sentence_name(s, t);
    text_add(t, sentence_drifts(d) ? " drifts by " : is_clear(d) ? " may drift: " : " shows no clear drift: ");
    if (d->slope > 0.0) text_add(t, "+");
    add_value(s, d->slope, 3, t);
    text_add(t, " per etch ");
    add_interval(d->lo, d->hi, 3, t);
    if (day && is_clear(day)) {
        text_addf(t, ", %s", day->slope > 0.0 ? "+" : "");
        add_value(s, day->slope, 3, t);
        text_add(t, " per day");
    }
    if (sentence_drifts(d)) add_time_left(s, d, t);
    text_addf(t, " (%zu etches)", d->n);
}

void sentence_phase(const sentence_subject *s, const chart_phase *p, const chart_options *o, int steady, textbuf *t) {
    sentence_name(s, t);
    if (!isfinite(p->sigma) || !isfinite(p->centre)) {
        text_addf(t, ": no limits, %s", p->n_used < CHART_LEAST_BASELINE ? "the phase holds fewer than 5 etches" : "the etches do not scatter");
        return;
    }
    text_add(t, ": centre ");
    add_value(s, p->centre, s->digits, t);
    text_add(t, ", limits ");
    add_number(p->centre - 3.0 * p->sigma, s->digits, t);
    text_add(t, " to ");
    add_value(s, p->centre + 3.0 * p->sigma, s->digits, t);
    if (p->stated) text_addf(t, steady ? ", from the first %zu steady etches" : ", from the %zu etches of the stated period", p->n_baseline);
    else if (p->n_baseline) text_addf(t, ", from the first %zu etches", p->n_baseline);
    else text_add(t, ", as given");
    if (p->n_baseline && !p->stated && o->baseline > p->n_used)
        text_addf(t, " (%zu are better: the limits are provisional)", o->baseline);
    if (p->n_used >= 10 && p->lag1 > 2.0 / sqrt((double)p->n_used)) {
        text_add(t, "; neighbours resemble each other (correlation ");
        add_number(p->lag1, 2, t);
        text_add(t, "), so the limits are too narrow and alarms too frequent");
    }
}

void sentence_alarm(const sentence_subject *s, const char *sample, const chart_point *p, textbuf *t) {
    const char *separator = " ";
    text_add(t, sample);
    for (int bit = 0; bit < CHART_RULES; bit++)
        if (p->alarms & (1u << bit)) {
            text_addf(t, "%s%s", separator, chart_rule_meaning(bit));
            separator = " and ";
        }
    text_addf(t, " (%s side: ", p->z < 0.0 ? "low" : "high");
    add_value(s, p->value, s->digits, t);
    text_add(t, ", ");
    add_number(fabs(p->z), 2, t);
    text_add(t, " sigma from the centre)");
}

/* Etches, as a round number: nobody knows the third digit. */
static void add_length(double length, textbuf *t) { add_number(length < 100.0 ? round(length) : length, 2, t); }

void sentence_false_alarms(const chart_options *o, double drawn, size_t baseline, textbuf *t) {
    double length = chart_false_alarm_length(o->rules);
    if (isfinite(drawn)) {
        const char *with = ", with ", *end = "";
        text_add(t, "On a steady process this chart");
        if (baseline) {
            text_addf(t, "%slimits from %zu etches", with, baseline);
            with = " and ";
            end = ",";
        }
        if (o->rules & RULE(SPREAD)) {
            text_addf(t, "%sthe chart of the spread", with);
            with = " and ";
            end = ",";
        }
        if (o->rules & RULE(EWMA)) {
            text_addf(t, "%sthe weighted average", with);
            end = ",";
        }
        text_addf(t, "%s gives one false alarm in about ", end);
        add_length(drawn, t);
        text_add(t, " etches");
        if (!isfinite(length)) return;
        text_add(t, "; with known limits its pattern tests alone give one in about ");
        add_length(length, t);
        return;
    }
    if (isfinite(length)) {
        text_add(t, "On a steady process with known limits these pattern tests give one false alarm in about ");
        add_length(length, t);
        text_add(t, " etches");
    } else
        text_add(t, "No pattern test is on");
    if (o->rules & RULE(SPREAD)) text_add(t, "; the chart of the spread adds its own");
    if (o->rules & RULE(EWMA)) {
        text_add(t, "; the weighted average adds one in about ");
        add_number(chart_ewma_run_length(o->lambda, o->ewma_k, 1, 0.0, 500, NULL), 2, t);
    }
}

static void add_signed(const sentence_subject *s, double v, int digits, textbuf *t) {
    if (v > 0.0) text_add(t, "+");
    add_value(s, v, digits, t);
}

void sentence_outlier(const sentence_subject *s, const char *etch, const finding_outlier *o, textbuf *t) {
    sentence_name(s, t);
    text_addf(t, " of %s stands out: ", etch);
    add_value(s, o->value, s->digits, t);
    text_add(t, " between neighbours at ");
    add_value(s, o->beside, s->digits, t);
    text_add(t, "; look at the picture first (charging, focus, particle), then keep it or exclude it with a reason");
}

void sentence_break(const sentence_subject *s, const char *before, const char *etch, const finding_break *b, textbuf *t) {
    if (b->kind == BREAK_BEND) {
        text_add(t, "the drift of ");
        sentence_name(s, t);
        text_addf(t, " changes at about %s (p = ", etch);
        add_number(b->p, 1, t);
        text_add(t, ")");
        return;
    }
    sentence_name(s, t);
    text_add(t, " steps by ");
    add_signed(s, b->size, 3, t);
    text_add(t, " ");
    add_interval(b->lo, b->hi, 3, t);
    text_addf(t, " between %s and %s (p = ", before, etch);
    add_number(b->p, 1, t);
    text_add(t, ")");
}

void sentence_stretch(const sentence_subject *s, const char *first, const char *last, const trend_slope *d, textbuf *t) {
    sentence_name(s, t);
    text_add(t, " drifted by ");
    add_signed(s, d->slope, 3, t);
    text_add(t, " per etch ");
    add_interval(d->lo, d->hi, 3, t);
    text_addf(t, " from %s to %s, ", first, last);
    add_signed(s, d->slope * ((double)d->n - 1.0), 2, t);
    text_addf(t, " in all (%zu etches)", d->n);
}

void sentence_since(const sentence_subject *s, const char *change, const trend_step *d, textbuf *t) {
    text_addf(t, "after '%s' ", change);
    sentence_name(s, t);
    text_add(t, d->lo > 0.0 || d->hi < 0.0 ? " stepped by " : " shows no clear step: ");
    add_signed(s, d->difference, 3, t);
    text_add(t, " ");
    add_interval(d->lo, d->hi, 3, t);
    text_addf(t, ", the first %zu etches against the last %zu before (p = ", d->n_b, d->n_a);
    add_number(d->p, 2, t);
    text_add(t, ")");
}

static void add_index(const char *name, const capability_index *c, textbuf *t) {
    if (!isfinite(c->value)) return;
    text_addf(t, "%s ", name);
    add_number(c->value, 3, t);
    if (isfinite(c->lo)) {
        text_add(t, " ");
        add_interval(c->lo, c->hi, 2, t);
    }
}

void sentence_capability(const sentence_subject *s, const capability *c, textbuf *t) {
    sentence_name(s, t);
    text_add(t, " against its target: ");
    add_index("Ppk", &c->Ppk, t);
    add_index(", Pp", &c->Pp, t);
    add_index(", Cpk", &c->Cpk, t);
    add_index(", Cp", &c->Cp, t);
    text_addf(t, ", %zu etches", c->n);
    if (isfinite(c->expected_outside)) {
        char share[NUMBER_TEXT];
        if (c->expected_outside < 1e-4) text_add(t, "; fewer than 0.01 % of such etches lie outside");
        else text_addf(t, "; about %s %% of such etches lie outside", number_percent(c->expected_outside, 2, share));
    }
    if (c->form == CAPABLE_LOG_NORMAL) text_add(t, "; not normal, so Ppk and Pp are those of a log-normal law");
    if (c->form == CAPABLE_NEITHER) text_add(t, "; neither normal nor log-normal, so the indices say little");
    if (isnan(c->normality_p)) text_add(t, "; too few etches to test for normality");
}

void sentence_step(const sentence_subject *s, const char *a, const char *b, const trend_step *d, textbuf *t) {
    int real = d->lo > 0.0 || d->hi < 0.0;
    sentence_name(s, t);
    text_addf(t, " of %s: ", b);
    add_value(s, d->mean_b, s->digits, t);
    text_addf(t, " (%zu), of %s: ", d->n_b, a);
    add_value(s, d->mean_a, s->digits, t);
    text_addf(t, " (%zu); difference %s", d->n_a, d->difference > 0.0 ? "+" : "");
    add_value(s, d->difference, 3, t);
    text_add(t, " ");
    add_interval(d->lo, d->hi, 3, t);
    text_add(t, real ? ", real at 5 % (p = " : ", not shown to be real (p = ");
    add_number(d->p, 2, t);
    text_add(t, "); ");
    add_number(d->effect, 2, t);
    text_add(t, " standard deviations ");
    add_interval(d->effect_lo, d->effect_hi, 2, t);
}

void sentence_line(const sentence_subject *s, const char *setting, const trend_line *l, textbuf *t) {
    sentence_name(s, t);
    text_addf(t, l->slope_p < 0.05 ? " changes by %s" : " does not clearly depend on it: %s", l->slope > 0.0 ? "+" : "");
    add_value(s, l->slope, 3, t);
    text_addf(t, " per unit of %s (standard uncertainty ", setting);
    add_number(l->slope_sd, 2, t);
    text_add(t, ", p = ");
    add_number(l->slope_p, 2, t);
    text_add(t, "), scatter about the line ");
    add_value(s, l->residual_sd, 2, t);
    text_addf(t, "; %zu etches from ", l->n);
    add_number(l->x_min, 5, t);
    text_add(t, " to ");
    add_number(l->x_max, 5, t);
}

void sentence_setting(const sentence_subject *s, const char *setting, double wanted, const trend_setting *r, textbuf *t) {
    text_addf(t, "the %s that brings ", setting);
    sentence_name(s, t);
    text_add(t, " to ");
    add_value(s, wanted, s->digits, t);
    text_add(t, ": ");
    add_number(r->x, 3, t);
    text_add(t, " (");
    add_number(r->lo, 3, t);
    text_add(t, " to ");
    add_number(r->hi, 3, t);
    text_addf(t, ")%s. Other settings must stay as they were. ",
              r->cut ? ", cut at the end of the data" : "");
    text_add(t, "Wet etchants, plasma gases and silane can kill: local codes, safety data sheets and licensed practice come "
                "first, and a qualified person decides what is changed.");
}

/* Verdicts under uncertainty.
 *
 * Rule (ISO 14253-1 default, guarded acceptance of JCGM 106:2012; edition details from memory): a value conforms to a
 * limit when the probability of lying on its good side is at least 95 %, that is when it keeps a guard band of
 * 1.645 u from it; it fails when the same holds for the bad side; between the two nobody can tell. With two limits
 * each has its own guard band. Where the uncertainty is an interval lo..hi (95 %, perhaps lopsided), the whole
 * interval has to lie inside, or wholly outside.
 * A protocol may ask for simple acceptance instead, or for a conformance probability inside both limits at once (JCGM 106).
 * The conformance probability is that of a normal law. An interval does not say how the probability is spread inside: it is
 * left unknown, and only where the rule needs it taken as two half-normals about the value with lo..hi as their 95 %.
 * What this file does not do: it knows no columns; units and digits come with the reading. */
#include "judge/target.h"

#include <math.h>
#include <string.h>

#include "base/number.h"
#include "base/quantity.h"

/* One-sided 95 % point of the normal law. */
#define GUARD 1.6448536269514722

const char *verdict_word(verdict v) {
    static const char *const words[] = { "no_target", "not_measured", "conforms", "undecided", "fails" };
    return words[v];
}

verdict verdict_worst(const verdict *v, size_t n) {
    verdict worst = VERDICT_NO_TARGET;
    for (size_t i = 0; i < n; i++)
        if (v[i] > worst) worst = v[i];
    return worst;
}

const char *decision_word(decision d) {
    static const char *const words[] = { "guard", "simple", "probability" };
    return words[d];
}

void target_rule_text(const target *t, textbuf *out) {
    char shown[NUMBER_TEXT];
    if (t->rule == DECIDE_SIMPLE) text_add(out, "simple acceptance, uncertainty not counted (JCGM 106)");
    else if (t->rule == DECIDE_PROBABILITY)
        text_addf(out, "conformance probability of at least %s (JCGM 106)", number_text(t->at_least, 6, shown));
    else text_add(out, "guard band of 1.645 u inside each limit (ISO 14253-1)");
    if (t->error == ERROR_REPEAT && t->rule != DECIDE_SIMPLE) text_add(out, ", counting only what varies from run to run");
}

target target_defaults(void) {
    return (target){ .min = MISSING, .max = MISSING, .error = ERROR_FULL, .rule = DECIDE_GUARD, .at_least = 0.95 };
}

static double normal_below(double z) { return 0.5 * erfc(-z / sqrt(2.0)); }

/* ---- sentences ---- */

/* An uncertainty: two digits, but never fewer than stand before the point. */
static const char *rough(double u, char *shown) {
    int digits = 2;
    for (double top = 99.5; u >= top && digits < 12; top *= 10.0) digits++;
    return number_text(u, digits, shown);
}

static void add_number(textbuf *t, double v, int digits, const char *unit) {
    char shown[NUMBER_TEXT];
    text_add(t, number_text(v, digits, shown));
    if (unit[0]) {
        text_add(t, " ");
        text_add(t, unit);
    }
}

/* "lies inside 280..420 nm", "keeps the ceiling 0.02", "keeps the floor 9 1/um2" */
static void add_range(textbuf *t, const target *g, const reading *r, const char *unit) {
    char low[NUMBER_TEXT];
    if (isfinite(g->min) && isfinite(g->max)) {
        text_add(t, "lies inside ");
        text_add(t, number_text(g->min, r->digits, low));
        text_add(t, "..");
        add_number(t, g->max, r->digits, unit);
    } else {
        text_add(t, isfinite(g->max) ? "keeps the ceiling " : "keeps the floor ");
        add_number(t, isfinite(g->max) ? g->max : g->min, r->digits, unit);
    }
}

static void finish(textbuf *t, judgement *out) {
    size_t n = t->n < sizeof out->sentence - 1 ? t->n : sizeof out->sentence - 1;
    if (t->failed || !t->s) n = 0; /* no memory for a sentence: the verdict still stands */
    if (n) memcpy(out->sentence, t->s, n);
    out->sentence[n] = '\0';
    text_free(t);
}

/* ---- the rule ---- */

typedef struct {
    double lo, hi; /* the value with its guard bands */
    double u;      /* NAN for an interval */
} reach;

static reach reach_of(const target *g, const reading *r) {
    int repeat = g->error == ERROR_REPEAT;
    if (!repeat && isfinite(r->lo) && isfinite(r->hi)) return (reach){ r->lo, r->hi, MISSING };
    double u = repeat ? r->u_repeat : r->u;
    if (!(isfinite(u) && u >= 0.0)) return (reach){ MISSING, MISSING, MISSING };
    return (reach){ r->value - GUARD * u, r->value + GUARD * u, u };
}

static int inside(const target *g, double v) { return (isnan(g->max) || v <= g->max) && (isnan(g->min) || v >= g->min); }

static double probability(const target *g, double value, double u) {
    if (!(u > 0.0)) /* no spread at all: it is inside or it is not */
        return isnan(u) ? MISSING : inside(g, value);
    double p = isfinite(g->max) ? normal_below((g->max - value) / u) : 1.0;
    if (isfinite(g->min)) p -= normal_below((g->min - value) / u);
    return p > 0.0 ? p : 0.0;
}

/* Below x, of a law with its median at m and the 2.5 % and 97.5 % quantiles lo and hi. */
static double split_below(double x, double m, double lo, double hi) {
    double sd = (x < m ? m - lo : hi - m) / 1.959963984540054;
    return sd > 0.0 ? normal_below((x - m) / sd) : x >= m;
}

static double probability_of(const target *g, const reading *r, const reach *w) {
    if (!isnan(w->u)) return probability(g, r->value, w->u);
    double m = r->value > w->lo && r->value < w->hi ? r->value : 0.5 * (w->lo + w->hi);
    double p = isfinite(g->max) ? split_below(g->max, m, w->lo, w->hi) : 1.0;
    if (isfinite(g->min)) p -= split_below(g->min, m, w->lo, w->hi);
    return p > 0.0 ? p : 0.0;
}

static verdict decide_guard(const target *g, const reach *w) {
    int below_max = isnan(g->max) || w->hi <= g->max, above_min = isnan(g->min) || w->lo >= g->min;
    if (below_max && above_min) return VERDICT_CONFORMS;
    if ((isfinite(g->max) && w->lo > g->max) || (isfinite(g->min) && w->hi < g->min)) return VERDICT_FAILS;
    return VERDICT_UNDECIDED;
}

static verdict decide(const target *g, const reading *r, const reach *w, double p) {
    if (g->rule == DECIDE_SIMPLE) return inside(g, r->value) ? VERDICT_CONFORMS : VERDICT_FAILS;
    if (isnan(w->lo)) return VERDICT_UNDECIDED;
    if (g->rule == DECIDE_GUARD) return decide_guard(g, w);
    return p >= g->at_least ? VERDICT_CONFORMS : 1.0 - p >= g->at_least ? VERDICT_FAILS : VERDICT_UNDECIDED;
}

/* To the nearest limit. */
static double distance(const target *g, double value) {
    double d = HUGE_VAL;
    if (isfinite(g->min)) d = fmin(d, fabs(value - g->min));
    if (isfinite(g->max)) d = fmin(d, fabs(value - g->max));
    return d;
}

double target_settling_u(const target *g, double value) {
    double high = distance(g, value), low = 0.0;
    if (g->rule == DECIDE_SIMPLE) return HUGE_VAL;
    if (g->rule == DECIDE_GUARD || !(high > 0.0)) return high / GUARD;
    high *= 2.0; /* at_least is above one half: at this u neither side reaches 0.7, and one half of it reaches 0.97 */
    reading r = { .value = value };
    for (int i = 0; i < 60; i++) {
        double u = 0.5 * (low + high), p = probability(g, value, u);
        reach w = { value, value, u };
        if (decide(g, &r, &w, p) == VERDICT_UNDECIDED) high = u;
        else low = u;
    }
    return low;
}

/* The limit that the reach straddles, the nearer of two: the one a person has to look at. */
static double near_limit(const target *g, const reach *w, double value) {
    int on_max = isfinite(g->max) && w->hi > g->max, on_min = isfinite(g->min) && w->lo < g->min;
    if (on_max == on_min && isfinite(g->min) && isfinite(g->max)) return fabs(value - g->min) < fabs(value - g->max) ? g->min : g->max;
    return on_max || isnan(g->min) ? g->max : g->min;
}

static void explain_rule(const target *g, double p, textbuf *t) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    if (g->rule == DECIDE_SIMPLE) text_add(t, " (simple acceptance: its uncertainty does not count)");
    if (g->rule == DECIDE_PROBABILITY)
        text_addf(t, " (conformance probability %s, asked: %s)", number_text(p, 3, a), number_text(g->at_least, 4, b));
}

static void explain(const target *g, const reading *r, const reach *w, double p, verdict v, textbuf *t) {
    const char *unit = r->unit ? r->unit : "";
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    text_add(t, g->quantity);
    text_add(t, " ");
    text_add(t, number_text(r->value, r->digits, a));
    if (isfinite(w->u)) text_addf(t, " +- %s%s%s (k = 2)", rough(2.0 * w->u, b), unit[0] ? " " : "", unit);
    else {
        text_addf(t, "%s%s", unit[0] ? " " : "", unit);
        if (isfinite(w->lo))
            text_addf(t, " (95 %% interval %s..%s)", number_text(w->lo, r->digits, a), number_text(w->hi, r->digits, b));
    }
    if (v == VERDICT_CONFORMS) {
        text_add(t, " ");
        add_range(t, g, r, unit);
    } else if (v == VERDICT_FAILS) {
        double low_end = g->rule == DECIDE_GUARD ? w->lo : r->value;
        int high = isfinite(g->max) && (isnan(g->min) || low_end > g->max || r->value - g->max > g->min - r->value);
        text_add(t, high ? " exceeds the limit " : " falls short of the limit ");
        add_number(t, high ? g->max : g->min, r->digits, unit);
    } else {
        text_add(t, " is too close to the limit ");
        add_number(t, near_limit(g, w, r->value), r->digits, unit);
        text_add(t, " to decide with this uncertainty");
    }
    explain_rule(g, p, t);
    if (g->error == ERROR_REPEAT && g->rule != DECIDE_SIMPLE) text_add(t, ", counting only what varies from run to run");
}

void judge(const target *g, const reading *r, judgement *out) {
    textbuf t = { 0 };
    *out = (judgement){ VERDICT_NO_TARGET, MISSING, "" };
    if (isnan(g->min) && isnan(g->max)) {
        text_addf(&t, "%s has no limit", g->quantity);
    } else if (!isfinite(r->value)) {
        out->verdict = VERDICT_NOT_MEASURED;
        text_addf(&t, "%s was not measured", g->quantity);
    } else {
        reach w = reach_of(g, r);
        out->conformance_probability = isnan(w.lo) ? MISSING : probability(g, r->value, w.u);
        if (g->rule == DECIDE_PROBABILITY && isfinite(w.lo)) out->conformance_probability = probability_of(g, r, &w);
        out->verdict = decide(g, r, &w, out->conformance_probability);
        if (isnan(w.lo) && g->rule != DECIDE_SIMPLE) {
            text_addf(&t, "%s ", g->quantity);
            add_number(&t, r->value, r->digits, r->unit ? r->unit : "");
            text_add(&t, g->error == ERROR_REPEAT
                             ? " cannot be judged: how much it varies from run to run is not known (one micrograph?)"
                             : " cannot be judged: its uncertainty is not known");
        } else {
            explain(g, r, &w, out->conformance_probability, out->verdict, &t);
        }
    }
    finish(&t, out);
}

/* Verdicts under uncertainty.
 *
 * Rule (ISO 14253-1 default, guarded acceptance of JCGM 106:2012; edition details from memory): a value conforms to a
 * limit when the probability of lying on its good side is at least 95 %, that is when it keeps a guard band of
 * 1.645 u from it; it fails when the same holds for the bad side; between the two nobody can tell. With two limits
 * each has its own guard band. Where the uncertainty is an interval lo..hi (95 %, perhaps lopsided), the whole
 * interval has to lie inside, or wholly outside.
 * The conformance probability is that of a normal law (JCGM 106). It is left unknown for an interval: lo..hi does not
 * say how the probability is spread inside.
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

static verdict decide(const target *g, const reach *w) {
    int below_max = isnan(g->max) || w->hi <= g->max, above_min = isnan(g->min) || w->lo >= g->min;
    if (below_max && above_min) return VERDICT_CONFORMS;
    if ((isfinite(g->max) && w->lo > g->max) || (isfinite(g->min) && w->hi < g->min)) return VERDICT_FAILS;
    return VERDICT_UNDECIDED;
}

/* The limit that the reach straddles, the nearer of two: the one a person has to look at. */
static double near_limit(const target *g, const reach *w, double value) {
    int on_max = isfinite(g->max) && w->hi > g->max, on_min = isfinite(g->min) && w->lo < g->min;
    if (on_max && on_min) return fabs(value - g->min) < fabs(value - g->max) ? g->min : g->max;
    return on_max ? g->max : g->min;
}

static double probability(const target *g, double value, double u) {
    if (!(u > 0.0)) /* no spread at all: it is inside or it is not */
        return isnan(u) ? MISSING : (isnan(g->max) || value <= g->max) && (isnan(g->min) || value >= g->min);
    double p = isfinite(g->max) ? normal_below((g->max - value) / u) : 1.0;
    if (isfinite(g->min)) p -= normal_below((g->min - value) / u);
    return p > 0.0 ? p : 0.0;
}

static void explain(const target *g, const reading *r, const reach *w, verdict v, textbuf *t) {
    const char *unit = r->unit ? r->unit : "";
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    text_add(t, g->quantity);
    text_add(t, " ");
    text_add(t, number_text(r->value, r->digits, a));
    if (isfinite(w->u)) text_addf(t, " +- %s%s%s (k = 2)", rough(2.0 * w->u, b), unit[0] ? " " : "", unit);
    else {
        text_addf(t, "%s%s", unit[0] ? " " : "", unit);
        text_addf(t, " (95 %% interval %s..%s)", number_text(w->lo, r->digits, a), number_text(w->hi, r->digits, b));
    }
    if (v == VERDICT_CONFORMS) {
        text_add(t, " ");
        add_range(t, g, r, unit);
    } else if (v == VERDICT_FAILS) {
        int high = isfinite(g->max) && w->lo > g->max;
        text_add(t, high ? " exceeds the limit " : " falls short of the limit ");
        add_number(t, high ? g->max : g->min, r->digits, unit);
    } else {
        text_add(t, " is too close to the limit ");
        add_number(t, near_limit(g, w, r->value), r->digits, unit);
        text_add(t, " to decide with this uncertainty");
    }
    if (g->error == ERROR_REPEAT) text_add(t, ", counting only what varies from run to run");
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
        if (isnan(w.lo)) {
            out->verdict = VERDICT_UNDECIDED;
            text_addf(&t, "%s ", g->quantity);
            add_number(&t, r->value, r->digits, r->unit ? r->unit : "");
            text_add(&t, g->error == ERROR_REPEAT
                             ? " cannot be judged: how much it varies from run to run is not known (one micrograph?)"
                             : " cannot be judged: its uncertainty is not known");
        } else {
            out->verdict = decide(g, &w);
            out->conformance_probability = probability(g, r->value, w.u);
            explain(g, r, &w, out->verdict, &t);
        }
    }
    finish(&t, out);
}

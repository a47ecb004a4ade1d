/* The pattern tests, their names, and how often they cry wolf.
 *
 * Every test raises the rate of false alarms: at the limits alone one in 370 etches, with all four zone rules one in 92
 * (Champ C.W., Woodall W.H. (1987) Technometrics 29, 393-399). So the length to a false alarm is said with every chart:
 * from the published table where the set is in it, otherwise by simulating independent normal values with a fixed seed
 * (Box G.E.P., Muller M.E. (1958) Ann. Math. Stat. 29, 610-611).
 * What this file does not do: correlated values, for which every figure here is too hopeful. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "judge/chart.h"
#include "judge/dice_priv.h"

static const struct {
    const char *word, *meaning;
} rule_names[CHART_RULES] = {
#define X(id, word, meaning) { word, meaning },
    CHART_RULE_LIST(X)
#undef X
};

static const struct {
    const char *word;
    unsigned rules;
} sets[] = { { "zone", RULES_ZONE }, { "iso", RULES_ISO }, { "nelson", RULES_NELSON }, { "limits", RULES_LIMITS }, { "none", 0 } };

const char *chart_rule_word(int bit) { return rule_names[bit].word; }
const char *chart_rule_meaning(int bit) { return rule_names[bit].meaning; }

static int word_is(const char *text, size_t n, const char *word) { return strlen(word) == n && !strncmp(text, word, n); }

status chart_rules_parse(const char *text, unsigned *rules, error *e) {
    unsigned all = 0;
    for (const char *p = text;; p++) {
        size_t n = strcspn(p, ",");
        int found = 0;
        for (size_t i = 0; i < sizeof sets / sizeof sets[0]; i++)
            if (word_is(p, n, sets[i].word)) {
                all |= sets[i].rules;
                found = 1;
            }
        for (unsigned i = 0; i < CHART_RULES; i++)
            if (word_is(p, n, rule_names[i].word)) {
                all |= 1u << i;
                found = 1;
            }
        if (!found)
            return fail(e, ST_BAD_INPUT, "rules: '%.*s' is no rule; take zone, iso, nelson, limits, none or words of beyond, "
                                         "2of3, 4of5, run7, run8, run9, trend6, trend7, alternate14, calm15, apart8, spread, ewma",
                        n < 40 ? (int)n : 40, p);
        p += n;
        if (!*p) break;
    }
    *rules = all;
    return ST_OK;
}

/* At least `wanted` of the last `of` lie beyond `limit` on the side of the newest, which is one of them. */
static int some_beyond(const double *z, size_t i, size_t wanted, size_t of, double limit) {
    double side = z[i] > 0.0 ? 1.0 : -1.0;
    size_t count = 0;
    if (side * z[i] <= limit) return 0;
    for (size_t k = 0; k < of && k <= i; k++) count += side * z[i - k] > limit;
    return count >= wanted;
}

static int rises(const double *z, size_t i, size_t n) {
    int up = 1, down = 1;
    if (i + 1 < n) return 0;
    for (size_t k = 0; k + 1 < n; k++) {
        up &= z[i - k] > z[i - k - 1];
        down &= z[i - k] < z[i - k - 1];
    }
    return up || down;
}

static int alternates(const double *z, size_t i, size_t n) {
    if (i + 1 < n) return 0;
    for (size_t k = 0; k + 2 < n; k++)
        if (!((z[i - k] - z[i - k - 1]) * (z[i - k - 1] - z[i - k - 2]) < 0.0)) return 0;
    return 1;
}

/* The last n lie all within 1 sigma, or all beyond it. */
static int all_within(const double *z, size_t i, size_t n, int within) {
    if (i + 1 < n) return 0;
    for (size_t k = 0; k < n; k++)
        if ((fabs(z[i - k]) < 1.0) != within) return 0;
    return 1;
}

unsigned chart_rules_at(const double *z, size_t i, unsigned rules) {
    unsigned fired = 0;
    if (!isfinite(z[i])) return 0;
    if ((rules & RULE(BEYOND)) && fabs(z[i]) > 3.0) fired |= RULE(BEYOND);
    if ((rules & RULE(TWO_OF_THREE)) && some_beyond(z, i, 2, 3, 2.0)) fired |= RULE(TWO_OF_THREE);
    if ((rules & RULE(FOUR_OF_FIVE)) && some_beyond(z, i, 4, 5, 1.0)) fired |= RULE(FOUR_OF_FIVE);
    if ((rules & RULE(RUN_7)) && some_beyond(z, i, 7, 7, 0.0)) fired |= RULE(RUN_7);
    if ((rules & RULE(RUN_8)) && some_beyond(z, i, 8, 8, 0.0)) fired |= RULE(RUN_8);
    if ((rules & RULE(RUN_9)) && some_beyond(z, i, 9, 9, 0.0)) fired |= RULE(RUN_9);
    if ((rules & RULE(TREND_6)) && rises(z, i, 6)) fired |= RULE(TREND_6);
    if ((rules & RULE(TREND_7)) && rises(z, i, 7)) fired |= RULE(TREND_7);
    if ((rules & RULE(ALTERNATE_14)) && alternates(z, i, 14)) fired |= RULE(ALTERNATE_14);
    if ((rules & RULE(CALM_15)) && all_within(z, i, 15, 1)) fired |= RULE(CALM_15);
    if ((rules & RULE(APART_8)) && all_within(z, i, 8, 0)) fired |= RULE(APART_8);
    return fired;
}

/* ---- run lengths ---- */

typedef struct {
    uint64_t state;
    double kept;
    int has_kept;
} dice;

static double uniform(dice *d) { /* inside 0..1, never an end */
    return ((double)(dice_next(&d->state) >> 11) + 0.5) / 9007199254740992.0;
}

static double normal(dice *d) {
    d->has_kept = !d->has_kept;
    if (!d->has_kept) return d->kept;
    double radius = sqrt(-2.0 * log(uniform(d))), angle = 2.0 * PI * uniform(d);
    d->kept = radius * sin(angle);
    return radius * cos(angle);
}

enum { LOOK_BACK = 15, LONGEST_RUN = 1000000 };

static size_t one_run(dice *d, unsigned rules, double shift) {
    double z[LOOK_BACK];
    for (size_t n = 0; n < LONGEST_RUN; n++) {
        size_t at = n < LOOK_BACK ? n : LOOK_BACK - 1;
        if (n >= LOOK_BACK) memmove(z, z + 1, sizeof z - sizeof z[0]);
        z[at] = shift + normal(d);
        if (chart_rules_at(z, at, rules)) return n + 1;
    }
    return LONGEST_RUN;
}

static size_t one_ewma_run(dice *d, double lambda, double k, int exact, double shift) {
    double e = 0.0, left = exact ? 1.0 : 0.0, keep = (1.0 - lambda) * (1.0 - lambda);
    for (size_t n = 0; n < LONGEST_RUN; n++) {
        e = lambda * (shift + normal(d)) + (1.0 - lambda) * e;
        left *= keep;
        if (e * e > k * k * lambda / (2.0 - lambda) * (1.0 - left)) return n + 1;
    }
    return LONGEST_RUN;
}

static double settle(double sum, double square, size_t runs, double *se) {
    double n = (double)runs, mean = sum / n;
    if (se) *se = runs > 1 ? sqrt(fmax(0.0, square - n * mean * mean) / (n - 1.0) / n) : MISSING;
    return runs ? mean : MISSING;
}

double chart_run_length(unsigned rules, double shift, size_t runs, double *se) {
    dice d = { .state = 20 };
    double sum = 0.0, square = 0.0;
    for (size_t i = 0; i < runs; i++) {
        double length = (double)one_run(&d, rules, shift);
        sum += length;
        square += length * length;
    }
    return settle(sum, square, runs, se);
}

double chart_ewma_run_length(double lambda, double k, int exact, double shift, size_t runs, double *se) {
    dice d = { .state = 21 };
    double sum = 0.0, square = 0.0;
    for (size_t i = 0; i < runs; i++) {
        double length = (double)one_ewma_run(&d, lambda, k, exact, shift);
        sum += length;
        square += length * length;
    }
    return settle(sum, square, runs, se);
}

double chart_false_alarm_length(unsigned rules) {
    static const struct {
        unsigned rules;
        double length;
    } known[] = { /* Champ and Woodall (1987), table 1, and the same Markov chain for runs of 7 and 9 and for single tests */
                  { RULE(BEYOND), 370.40 },
                  { RULE(BEYOND) | RULE(TWO_OF_THREE), 225.44 },
                  { RULE(BEYOND) | RULE(FOUR_OF_FIVE), 166.05 },
                  { RULE(BEYOND) | RULE(RUN_8), 152.73 },
                  { RULE(BEYOND) | RULE(TWO_OF_THREE) | RULE(FOUR_OF_FIVE), 132.89 },
                  { RULE(BEYOND) | RULE(TWO_OF_THREE) | RULE(RUN_8), 122.05 },
                  { RULE(BEYOND) | RULE(FOUR_OF_FIVE) | RULE(RUN_8), 105.78 },
                  { RULES_ZONE, 91.75 },
                  { RULE(BEYOND) | RULE(RUN_7), 95.731 },
                  { RULE(BEYOND) | RULE(RUN_9), 216.696 },
                  { RULE(BEYOND) | RULE(TWO_OF_THREE) | RULE(FOUR_OF_FIVE) | RULE(RUN_9), 109.049 },
                  { RULE(TWO_OF_THREE), 510.689 },
                  { RULE(FOUR_OF_FIVE), 291.319 },
                  { RULE(RUN_7), 127.0 }, /* heads or tails k times in a row: 2^k - 1 (Feller W. (1968), XIII.7) */
                  { RULE(RUN_8), 255.0 },
                  { RULE(RUN_9), 511.0 },
                  { RULE(CALM_15), 963.27 }, /* k successes in a row: (1 - p^k) / ((1 - p) p^k), the same */
                  { RULE(APART_8), 14251.4 },
                  { RULES_ISO, 92.6 },
                  { RULES_NELSON, 148.4 } };
    rules &= ~(RULE(SPREAD) | RULE(EWMA));
    if (!rules) return (double)INFINITY;
    for (size_t i = 0; i < sizeof known / sizeof known[0]; i++)
        if (known[i].rules == rules) return known[i].length;
    return chart_run_length(rules, 0.0, 2000, NULL);
}

/* Values of a steady process, their first ones the baseline; alarms behind it, over many charts. */
double chart_false_alarm_drawn(const chart_options *o, size_t baseline) {
    enum { CHARTS = 300, FOLLOW = 100 };
    dice d = { .state = 22 };
    size_t n = baseline + FOLLOW, alarms = 0;
    chart_options steady = *o;
    steady.baseline = baseline;
    steady.stated = NULL;
    steady.centre = baseline ? MISSING : 0.0;
    steady.sigma = baseline ? MISSING : 1.0;
    if (!o->rules) return (double)INFINITY;
    double *v = mem_array(n, sizeof *v);
    status st = v ? ST_OK : ST_NO_MEMORY;
    for (size_t k = 0; st == ST_OK && k < CHARTS; k++) {
        chart c = { 0 };
        for (size_t i = 0; i < n; i++) v[i] = normal(&d);
        st = chart_individuals(v, NULL, n, &steady, &c, NULL);
        for (size_t i = baseline; st == ST_OK && i < n; i++) alarms += c.points[i].alarms != 0;
        chart_free(&c);
    }
    free(v);
    if (st != ST_OK) return MISSING;
    return alarms ? (double)(CHARTS * FOLLOW) / (double)alarms : (double)INFINITY;
}

/* Control charts: individuals with moving ranges, means with standard deviations, EWMA on either, pattern tests. Pure. */
#ifndef SWARD_JUDGE_CHART_H
#define SWARD_JUDGE_CHART_H
#include <stddef.h>

#include "base/status.h"

/* Pattern tests on z, the distance from the centre in sigma. Each looks back within its phase only, and no further than the
 * point after the last alarm: a run that goes on is said once, as the lengths to a false alarm count it. */
/* clang-format off */
#define CHART_RULE_LIST(X)                                                           \
    X(BEYOND,       "beyond", "lies beyond 3 sigma")                                 \
    X(TWO_OF_THREE, "2of3",   "is the second of three beyond 2 sigma on one side")   \
    X(FOUR_OF_FIVE, "4of5",   "is the fourth of five beyond 1 sigma on one side")    \
    X(RUN_7,        "run7",   "is the seventh in a row on one side of the centre")   \
    X(RUN_8,        "run8",   "is the eighth in a row on one side of the centre")    \
    X(RUN_9,        "run9",   "is the ninth in a row on one side of the centre")     \
    X(TREND_6,      "trend6", "ends six in a row that rise or fall")                 \
    X(TREND_7,      "trend7", "ends seven in a row that rise or fall")               \
    X(ALTERNATE_14, "alternate14", "is the fourteenth in a row that goes up and down in turn") \
    X(CALM_15,      "calm15", "is the fifteenth in a row within 1 sigma")            \
    X(APART_8,      "apart8", "is the eighth in a row beyond 1 sigma, on either side") \
    X(SPREAD,       "spread", "differs from its neighbours more than they usually do") \
    X(EWMA,         "ewma",   "takes the weighted average of the last etches beyond its limits")
/* clang-format on */
enum {
#define X(id, word, meaning) CHART_BIT_##id,
    CHART_RULE_LIST(X)
#undef X
        CHART_RULES
};
#define RULE(id) (1u << CHART_BIT_##id)

/* The named sets; `spread` and `ewma` are charts of their own and in none of them. */
#define RULES_LIMITS RULE(BEYOND)
#define RULES_ZONE (RULE(BEYOND) | RULE(TWO_OF_THREE) | RULE(FOUR_OF_FIVE) | RULE(RUN_8)) /* Western Electric (1956) */
#define RULES_ISO (RULE(BEYOND) | RULE(RUN_7) | RULE(TREND_7)) /* ISO 7870-2:2013, wording from memory */
#define RULES_NELSON (RULE(BEYOND) | RULE(RUN_9) | RULE(TREND_6)) /* Nelson (1984) tests 1 to 3 */

const char *chart_rule_word(int bit);
const char *chart_rule_meaning(int bit); /* continues "the etch ..." */
/* A set's name (zone, iso, nelson, limits, none) or rule words, joined by commas: "zone,ewma".
 *   err  ST_BAD_INPUT an unknown word */
status chart_rules_parse(const char *text, unsigned *rules, error *e);

/* Which of the pattern tests fire at z[i], looking back no further than z[0]. A test fires at a point only if that point
 * is one of those it counts. */
unsigned chart_rules_at(const double *z, size_t i, unsigned rules);

/* Mean number of points to the first alarm of the pattern tests on independent normal values with a shift of the mean,
 * in sigma, by simulation with a fixed seed: the same answer every time. `se` (may be NULL): its standard error.
 *   src  Champ C.W., Woodall W.H. (1987) Technometrics 29, 393-399, for the zone rules exactly */
double chart_run_length(unsigned rules, double shift, size_t runs, double *se);
/* The same of an EWMA chart with limits at k sigma of the average, exact or as after many points. */
double chart_ewma_run_length(double lambda, double k, int exact, double shift, size_t runs, double *se);
/* At shift 0, limits known: published where known, simulated (2000 runs) otherwise; infinite without a rule. */
double chart_false_alarm_length(unsigned rules);

typedef struct {
    size_t baseline;      /* so many first points of a phase set its limits; 0: all of it. Never fewer than 5 */
    double centre, sigma; /* given for all phases instead; NAN: from the baseline */
    unsigned rules;
    double lambda, ewma_k; /* of the EWMA */
    const unsigned char *stated; /* [n] of the values: the points of a stated baseline period; a phase with 5 of them takes its
                                    limits from them. NULL: none. Borrowed for the call */
} chart_options;
/* baseline 20, zone rules (the chart of the spread has limits, but adds little and rings half as often again: Rigdon S.E., Cruthis
 * E.N., Champ C.W. (1994) J. Qual. Technol. 26, 274-287, from memory), lambda 0.2, k 2.962 (one false alarm in 500: Lucas and Saccucci 1990) */
chart_options chart_defaults(void);
#define CHART_LEAST_BASELINE 5

/* The same for what really is on a chart of individuals: every rule of the options (spread and ewma too), limits set by
 * `baseline` steady points (0: known limits), over the 100 points that follow. By simulation with a fixed seed.
 *   err  NAN without memory; infinite without a rule */
double chart_false_alarm_drawn(const chart_options *o, size_t baseline);

typedef struct {
    double value;    /* NAN: left out, nothing else is said about it */
    size_t n, phase; /* values behind it; index of its phase */
    double spread;   /* moving range, or sd of the group; NAN: none */
    double z, lo, hi, spread_lo, spread_hi, ewma, ewma_lo, ewma_hi; /* NAN where the phase has no limits */
    unsigned alarms; /* RULE bits */
} chart_point;

typedef struct {
    size_t first, n;      /* index of its first point; how many it has, left-out ones included */
    size_t n_used, n_baseline;
    int stated;           /* the baseline are the stated points, not the first ones */
    double centre, sigma; /* sigma of one value; NAN: too few points */
    double spread_mean;   /* mean moving range or sd of the baseline; NAN when given */
    double lag1;          /* correlation of neighbours in the phase; NAN unknown. High: the limits are too narrow */
} chart_phase;

typedef struct {
    chart_point *points;
    size_t n;
    chart_phase *phases;
    size_t n_phases;
    chart_options options;
} chart;

/* Individuals with moving ranges of two: sigma = mean range / d2.
 *   in   values[n] in time order, NAN = left out; phase_of[n] the phase of each, numbered from 0 in the order of appearance
 *        (NULL: one phase); the points of a phase need not lie side by side
 *   out  the caller's (chart_free), untouched on failure
 *   err  ST_BAD_INPUT n = 0, phases out of order, lambda outside 0..1, k or a given sigma not above 0; ST_NO_MEMORY
 *   src  ISO 7870-2; EWMA with exact limits: ISO 7870-6, Lucas J.M., Saccucci M.S. (1990) Technometrics 32, 1-29 */
status chart_individuals(const double *values, const size_t *phase_of, size_t n, const chart_options *o, chart *out, error *e);
/* Means with standard deviations, of groups that may differ in size: sigma = mean of s / c4 over groups of two or more.
 *   in   mean[n], sd[n] (NAN for a group of one), count[n]; as above otherwise */
status chart_means(const double *mean, const double *sd, const size_t *count, const size_t *phase_of, size_t n,
                   const chart_options *o, chart *out, error *e);
void chart_free(chart *c);

/* Correlation of neighbours about the mean, as NIST's Statistical Reference Datasets define it; NAN below 3 values or
 * without spread. */
double chart_lag1(const double *v, size_t n);

#endif

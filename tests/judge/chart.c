/* Charts: phases, baselines, left-out etches, groups of unequal size, rule names, refusals. */
#include "judge/chart.h"

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "judge/factors.h"

static error e;

static void phases(void) {
    /* two recipes; within each the ranges are 2 everywhere, the third value of the second is left out */
    static const double v[] = { 351, 349, 351, 349, 351, 349, 361, 401, 399, MISSING, 401, 399, 401, 399 };
    static const size_t phase[] = { 0, 0, 0, 0, 0, 0, 0, 1, 1, 1, 1, 1, 1, 1 };
    chart c = { 0 };
    chart_options o = chart_defaults();
    o.baseline = 6;
    o.rules |= RULE(SPREAD);
    CHECK(chart_individuals(v, phase, 14, &o, &c, &e) == ST_OK && c.n_phases == 2);
    CHECK(c.phases[0].n == 7 && c.phases[0].n_used == 7 && c.phases[0].n_baseline == 6);
    CHECK(c.phases[1].first == 7 && c.phases[1].n == 7 && c.phases[1].n_used == 6 && c.phases[1].n_baseline == 6);
    CHECK_NEAR(c.phases[0].centre, 350.0, 1e-12);
    CHECK_NEAR(c.phases[1].centre, 400.0, 1e-12);
    CHECK_NEAR(c.phases[0].sigma, 2.0 / FACTOR_D2_OF_2, 1e-12);
    CHECK(isnan(c.points[0].spread) && isnan(c.points[7].spread)); /* no range across the change */
    CHECK_NEAR(c.points[10].spread, 2.0, 1e-12);                     /* neighbours over the gap */
    CHECK(c.points[6].alarms == (RULE(BEYOND) | RULE(SPREAD)));      /* 361: z 6.2, range 12 */
    CHECK(c.points[9].alarms == 0 && isnan(c.points[9].z) && isnan(c.points[9].ewma));
    for (size_t i = 0; i < 14; i++) CHECK(i == 6 || c.points[i].alarms == 0);
    CHECK(c.points[13].phase == 1 && c.points[6].phase == 0);
    chart_free(&c);
    chart_free(&c);

    CHECK(chart_individuals(v, NULL, 4, &o, &c, &e) == ST_OK); /* four are too few for limits */
    CHECK(isnan(c.phases[0].sigma) && isnan(c.points[3].hi) && c.points[3].alarms == 0 && c.phases[0].n_baseline == 0);
    chart_free(&c);
    o.centre = 350.0;
    o.sigma = 2.0;
    CHECK(chart_individuals(v, NULL, 4, &o, &c, &e) == ST_OK); /* unless they are given */
    CHECK_NEAR(c.points[3].hi, 356.0, 1e-12);
    CHECK_NEAR(c.points[3].ewma_hi, 350.0 + 2.0 * 2.962 * sqrt(0.2 / 1.8 * (1.0 - pow(0.8, 8.0))), 1e-12);
    chart_free(&c);
    static const double same[] = { 3, 3, 3, 3, 3, 3 };
    o = chart_defaults();
    CHECK(chart_individuals(same, NULL, 6, &o, &c, &e) == ST_OK && isnan(c.phases[0].sigma)); /* no spread, no limits */
    chart_free(&c);
}

/* Two recipes by turns keep their own limits; an alarm is said once; a stated period sets the limits. */
static void turns(void) {
    double v[60];
    size_t phase[60];
    unsigned char stated[60] = { 0 };
    chart c = { 0 };
    chart_options o = chart_defaults();
    for (size_t i = 0; i < 60; i++) {
        phase[i] = i % 2;
        v[i] = (i % 2 ? 400.0 : 350.0) + ((i / 2) % 2 ? 1.0 : -1.0);
    }
    o.baseline = 10;
    for (size_t i = 40; i < 60; i += 2) v[i] = 350.5; /* ten of the first recipe on one side, z 0.28 */
    CHECK(chart_individuals(v, phase, 60, &o, &c, &e) == ST_OK && c.n_phases == 2 && c.phases[1].n_used == 30 && c.phases[1].first == 1);
    CHECK_NEAR(c.phases[0].centre, 350.0, 1e-12);
    CHECK_NEAR(c.phases[1].centre, 400.0, 1e-12);
    CHECK_NEAR(c.points[2].spread, 2.0, 1e-12); /* to the etch before the last */
    CHECK((c.points[52].alarms & RULE(RUN_8)) || (c.points[54].alarms & RULE(RUN_8)));
    size_t alarms = 0;
    for (size_t i = 0; i < 60; i++) alarms += c.points[i].alarms != 0;
    CHECK(alarms == 1); /* the run goes on and is not said again */
    chart_free(&c);

    for (size_t i = 0; i < 60; i++) stated[i] = i >= 20 && i < 34;
    o.stated = stated;
    for (size_t i = 20; i < 34; i++) v[i] += 7.0;
    CHECK(chart_individuals(v, phase, 60, &o, &c, &e) == ST_OK && c.phases[0].stated && c.phases[0].n_baseline == 7);
    CHECK_NEAR(c.phases[0].centre, 357.0 - 1.0 / 7.0, 1e-12); /* four of the seven at -1 */
    CHECK(c.options.stated == NULL);
    chart_free(&c);
    for (size_t i = 0; i < 60; i++) stated[i] = i < 4; /* two etches are no baseline: the first ones set the limits */
    CHECK(chart_individuals(v, phase, 60, &o, &c, &e) == ST_OK && !c.phases[0].stated && c.phases[0].n_baseline == 10);
    chart_free(&c);
    phase[0] = 1;
    CHECK_FAILS(chart_individuals(v, phase, 60, &o, &c, &e), ST_BAD_INPUT, e, "order of their first etches");

    /* one odd etch is one alarm: the way back is not its neighbour's */
    double w[30];
    for (size_t i = 0; i < 30; i++) w[i] = i % 2 ? 1.0 : -1.0;
    w[25] = 30.0;
    o = chart_defaults();
    o.rules |= RULE(SPREAD);
    CHECK(chart_individuals(w, NULL, 30, &o, &c, &e) == ST_OK && (c.points[25].alarms & RULE(BEYOND)) && c.points[26].alarms == 0);
    chart_free(&c);
}

static void groups(void) {
    static const double mean[] = { 10.2, 9.8, 10.1, 9.9, 10.0, 13.0 }, sd[] = { 1.1, 0.9, 1.0, 1.2, MISSING, 0.8 };
    static const size_t count[] = { 5, 5, 5, 5, 1, 3 };
    chart c = { 0 };
    chart_options o = chart_defaults();
    o.baseline = 5;
    CHECK(chart_means(mean, sd, count, NULL, 6, &o, &c, &e) == ST_OK);
    chart_factors f = factors_of(5);
    double s = (1.1 + 0.9 + 1.0 + 1.2) / 4.0;
    CHECK_NEAR(c.phases[0].sigma, s / f.c4, 1e-12);
    CHECK_NEAR(c.phases[0].centre, 10.0, 1e-12);
    CHECK_NEAR(c.points[0].hi - c.phases[0].centre, f.A3 * s, 1e-9); /* the factors of the tables */
    CHECK_NEAR(c.points[0].spread_hi, f.B4 * s, 1e-9);
    CHECK_NEAR(c.points[0].spread_lo, f.B3 * s, 1e-9);
    CHECK(isnan(c.points[4].spread) && isfinite(c.points[4].z));
    CHECK((c.points[5].alarms & RULE(BEYOND)) && c.points[5].z > 4.5); /* 3 of size 3 */
    chart_free(&c);
    static const size_t empty[] = { 5, 5, 5, 5, 0, 3 };
    CHECK(chart_means(mean, sd, empty, NULL, 6, &o, &c, &e) == ST_OK && c.phases[0].n_used == 5 && isnan(c.points[4].z));
    chart_free(&c);
}

static void names(void) {
    unsigned r = 0;
    CHECK(chart_rules_parse("zone", &r, &e) == ST_OK && r == RULES_ZONE);
    CHECK(chart_rules_parse("iso,ewma", &r, &e) == ST_OK && r == (RULES_ISO | RULE(EWMA)));
    CHECK(chart_rules_parse("beyond,2of3,trend6", &r, &e) == ST_OK && r == (RULE(BEYOND) | RULE(TWO_OF_THREE) | RULE(TREND_6)));
    CHECK(chart_rules_parse("none", &r, &e) == ST_OK && r == 0);
    CHECK_FAILS(chart_rules_parse("zone,zoned", &r, &e), ST_BAD_INPUT, e, "'zoned' is no rule");
    CHECK_FAILS(chart_rules_parse("", &r, &e), ST_BAD_INPUT, e, "is no rule");
    CHECK_FAILS(chart_rules_parse("zone,", &r, &e), ST_BAD_INPUT, e, "is no rule");
    for (int i = 0; i < CHART_RULES; i++) {
        CHECK(chart_rules_parse(chart_rule_word(i), &r, &e) == ST_OK && r == 1u << i);
        CHECK(strlen(chart_rule_meaning(i)) > 10);
    }
    static const double up[] = { 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7 }, flat[] = { 0.1, 0.2, 0.3, 0.3, 0.5, 0.6, 0.7 };
    CHECK(chart_rules_at(up, 6, RULE(TREND_7)) == RULE(TREND_7) && chart_rules_at(up, 5, RULE(TREND_7)) == 0);
    CHECK(chart_rules_at(up, 5, RULE(TREND_6)) == RULE(TREND_6) && chart_rules_at(flat, 6, RULE(TREND_7)) == 0);
    CHECK(chart_rules_at(up, 6, RULE(RUN_7)) == RULE(RUN_7) && chart_rules_at(up, 6, RULE(RUN_8)) == 0);
    static const double saw[] = { 1, 2, 1, 2, 1, 2, 1, 2, 1, 2, 1, 2, 1, 2, 3 };
    CHECK(chart_rules_at(saw, 13, RULE(ALTERNATE_14)) == RULE(ALTERNATE_14) && !chart_rules_at(saw, 12, RULE(ALTERNATE_14)));
    CHECK(!chart_rules_at(saw, 14, RULE(ALTERNATE_14)));
    static const double calm[] = { .1, -.2, .3, .9, -.9, .1, -.2, .3, .9, -.9, .1, -.2, .3, .9, -.9, 1.1 };
    CHECK(chart_rules_at(calm, 14, RULE(CALM_15)) == RULE(CALM_15) && !chart_rules_at(calm, 13, RULE(CALM_15)) && !chart_rules_at(calm, 15, RULE(CALM_15)));
    static const double apart[] = { 1.1, -1.2, 1.3, 2.9, -1.9, 1.1, -1.2, 1.3, 0.9 };
    CHECK(chart_rules_at(apart, 7, RULE(APART_8)) == RULE(APART_8) && !chart_rules_at(apart, 6, RULE(APART_8)) && !chart_rules_at(apart, 8, RULE(APART_8)));
    chart_options o = chart_defaults();
    o.rules = RULES_ZONE; /* known limits: the published length; estimated ones: shorter */
    CHECK_NEAR(chart_false_alarm_drawn(&o, 0), 91.75, 4.0 * 91.75 / sqrt(300.0));
    CHECK(chart_false_alarm_drawn(&o, 20) < 0.7 * chart_false_alarm_drawn(&o, 0));
    o.rules = 0;
    CHECK(isinf(chart_false_alarm_drawn(&o, 20)));
    CHECK(isinf(chart_false_alarm_length(0)) && isinf(chart_false_alarm_length(RULE(EWMA))));
    CHECK_NEAR(chart_false_alarm_length(RULES_ZONE | RULE(EWMA)), 91.75, 1e-9);
    CHECK_NEAR(chart_false_alarm_length(RULE(RUN_8)), 255.0, 25.0); /* 2^8 - 1: eight heads or eight tails in a row */
    CHECK(chart_ewma_run_length(0.2, 2.962, 1, 0.0, 1000, NULL) < 500.0 * 1.12); /* exact limits are narrower at first */
}

static void refusals(void) {
    static const double v[] = { 1, 2, 3, 4, 5, 6 };
    chart c = { 0 };
    chart_options o = chart_defaults();
    CHECK_FAILS(chart_individuals(v, NULL, 0, &o, &c, &e), ST_BAD_INPUT, e, "at least one etch");
    o.lambda = 0.0;
    CHECK_FAILS(chart_individuals(v, NULL, 6, &o, &c, &e), ST_BAD_INPUT, e, "lambda");
    o = chart_defaults();
    o.ewma_k = -1.0;
    CHECK_FAILS(chart_individuals(v, NULL, 6, &o, &c, &e), ST_BAD_INPUT, e, "more than 0 sigma");
    o = chart_defaults();
    o.sigma = 0.0;
    CHECK_FAILS(chart_individuals(v, NULL, 6, &o, &c, &e), ST_BAD_INPUT, e, "above 0");
    o = chart_defaults();
    for (size_t k = 1; k <= 4; k++) {
        mem_fail_after(k);
        CHECK_FAILS(chart_individuals(v, NULL, 6, &o, &c, &e), ST_NO_MEMORY, e, "not enough memory");
        mem_fail_after(0);
    }
    CHECK(c.points == NULL && isnan(chart_lag1(v, 2)));
}

int main(void) {
    phases();
    turns();
    groups();
    names();
    refusals();
    return check_done();
}

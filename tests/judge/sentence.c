/* The sentences, word for word. */
#include "judge/sentence.h"

#include "base/quantity.h"
#include "check.h"

static textbuf t;
static int says(const char *want) {
    int same = t.s && !strcmp(t.s, want);
    if (!same) printf("got:    %s\nwanted: %s\n", t.s ? t.s : "(nothing)", want);
    text_free(&t);
    return same;
}
static int holds(const char *want) {
    int there = t.s && strstr(t.s, want);
    if (!there) printf("'%s' is not in: %s\n", want, t.s ? t.s : "(nothing)");
    text_free(&t);
    return there;
}

int main(void) {
    sentence_subject s = { "spacing_nm", "nm", 5, 280.0, 420.0 };
    trend_slope d = { 11.2, 8.1, 14.3, 300.0, 0.0027, 7 }, day = { 3.456, 2.0, 5.0, 0.0, 0.003, 7 };
    sentence_drift(&s, &d, NULL, &t); /* now 367.2; 52.8 left */
    CHECK(says("spacing drifts by +11.2 nm per etch (95 %: 8.1 to 14.3); at this rate it leaves its target in 5 etches (7 etches)"));
    sentence_drift(&s, &d, &day, &t);
    CHECK(holds("(95 %: 8.1 to 14.3), +3.46 nm per day; at"));
    d.intercept = 345.0;
    sentence_drift(&s, &d, NULL, &t);
    CHECK(holds("leaves its target in 1 etch ("));
    d.intercept = 380.0;
    sentence_drift(&s, &d, NULL, &t);
    CHECK(holds("; it has left its target"));
    d = (trend_slope){ -0.1, -0.2, -0.01, 350.0, 0.002, 30 };
    sentence_drift(&s, &d, NULL, &t);
    CHECK(says("spacing drifts by -0.1 nm per etch (95 %: -0.2 to -0.01) (30 etches)")); /* too far to say when */
    d.p = 0.02;
    sentence_drift(&s, &d, NULL, &t);
    CHECK(holds("spacing may drift: -0.1 nm per etch"));
    d = (trend_slope){ 0.4, -1.0, 1.9, 350.0, 0.4, 9 };
    sentence_drift(&s, &d, NULL, &t);
    CHECK(says("spacing shows no clear drift: +0.4 nm per etch (95 %: -1 to 1.9) (9 etches)"));
    d.lo = d.hi = MISSING;
    sentence_drift(&s, &d, NULL, &t);
    CHECK(holds("no clear drift: +0.4 nm per etch (95 %: unknown to unknown)"));

    chart_options o = chart_defaults();
    o.rules |= RULE(SPREAD);
    chart_phase p = { .n = 30, .n_used = 30, .n_baseline = 20, .centre = 350.0, .sigma = 8.0, .spread_mean = 9.0, .lag1 = 0.1 };
    sentence_phase(&s, &p, &o, 0, &t);
    CHECK(says("spacing: centre 350 nm, limits 326 to 374 nm, from the first 20 etches"));
    p.lag1 = 0.61;
    sentence_phase(&s, &p, &o, 0, &t);
    CHECK(holds("neighbours resemble each other (correlation 0.61)"));
    p = (chart_phase){ .n = 8, .n_used = 8, .n_baseline = 8, .centre = 350.0, .sigma = 8.0, .spread_mean = 9.0, .lag1 = 0.1 };
    sentence_phase(&s, &p, &o, 0, &t);
    CHECK(holds("from the first 8 etches (20 are better: the limits are provisional)"));
    p.stated = 1;
    sentence_phase(&s, &p, &o, 0, &t);
    CHECK(says("spacing: centre 350 nm, limits 326 to 374 nm, from the 8 etches of the stated period"));
    sentence_phase(&s, &p, &o, 1, &t);
    CHECK(holds("from the first 8 steady etches"));
    p.stated = 0;
    p.n_baseline = 0;
    sentence_phase(&s, &p, &o, 0, &t);
    CHECK(holds("as given"));
    p = (chart_phase){ .n = 3, .n_used = 3, .centre = MISSING, .sigma = MISSING, .spread_mean = MISSING, .lag1 = MISSING };
    sentence_phase(&s, &p, &o, 0, &t);
    CHECK(says("spacing: no limits, the phase holds fewer than 5 etches"));

    chart_point q = { .value = 383.25, .z = 4.1562, .alarms = RULE(BEYOND) | RULE(RUN_8) };
    sentence_alarm(&s, "W7", &q, &t);
    CHECK(says("W7 lies beyond 3 sigma and is the eighth in a row on one side of the centre (high side: 383.25 nm, 4.2 sigma "
               "from the centre)"));
    sentence_false_alarms(&o, 41.3, 20, &t);
    CHECK(says("On a steady process this chart, with limits from 20 etches and the chart of the spread, gives one false alarm in "
               "about 41 etches; with known limits its pattern tests alone give one in about 92"));
    o.rules = RULES_ZONE;
    sentence_false_alarms(&o, 98.4, 0, &t);
    CHECK(holds("On a steady process this chart gives one false alarm in about 98 etches;"));
    o.rules |= RULE(SPREAD) | RULE(EWMA);
    sentence_false_alarms(&o, 50.0, 0, &t);
    CHECK(holds("this chart, with the chart of the spread and the weighted average, gives one"));
    o.rules &= ~RULE(EWMA);
    sentence_false_alarms(&o, MISSING, 20, &t);
    CHECK(says("On a steady process with known limits these pattern tests give one false alarm in about 92 etches; the chart of the spread adds "
               "its own"));
    o.rules = RULE(EWMA);
    sentence_false_alarms(&o, MISSING, 0, &t);
    CHECK(holds("No pattern test is on; the weighted average adds one in about "));

    finding_outlier out = { 4, 402.25, 351.0 };
    sentence_outlier(&s, "W7", &out, &t);
    CHECK(holds("spacing of W7 stands out: 402.25 nm between neighbours at 351 nm; look at the picture first"));
    finding_break b = { BREAK_STEP, 3, 4, -21.26, -24.9, -17.4, 0.0033 };
    sentence_break(&s, "W7", "W8", &b, &t);
    CHECK(says("spacing steps by -21.3 nm (95 %: -24.9 to -17.4) between W7 and W8 (p = 0.003)"));
    b.kind = BREAK_BEND;
    sentence_break(&s, "W7", "W8", &b, &t);
    CHECK(says("the drift of spacing changes at about W8 (p = 0.003)"));
    trend_slope along = { 0.32, 0.25, 0.4, 340.0, 1e-6, 51 };
    sentence_stretch(&s, "W7", "W58", &along, &t);
    CHECK(says("spacing drifted by +0.32 nm per etch (95 %: 0.25 to 0.4) from W7 to W58, +16 nm in all (51 etches)"));
    trend_step since = { .n_a = 10, .n_b = 9, .difference = -12.4, .lo = -15.0, .hi = -9.5, .p = 0.0002 };
    sentence_since(&s, "chamber clean", &since, &t);
    CHECK(says("after 'chamber clean' spacing stepped by -12.4 nm (95 %: -15 to -9.5), the first 9 etches against the last 10 before "
               "(p = 0.0002)"));
    since.hi = 1.0;
    sentence_since(&s, "chamber clean", &since, &t);
    CHECK(holds("shows no clear step: -12.4 nm"));

    capability c = { .n = 20, .Ppk = { 1.234, 0.81, 1.66 }, .Pp = { 1.5, 1.0, 2.0 }, .Cpk = { MISSING, MISSING, MISSING },
                     .Cp = { MISSING, MISSING, MISSING }, .normality_p = 0.4, .expected_outside = 0.0012 };
    sentence_capability(&s, &c, &t);
    CHECK(says("spacing against its target: Ppk 1.23 (95 %: 0.81 to 1.7), Pp 1.5 (95 %: 1 to 2), 20 etches; about 0.12 % of such "
               "etches lie outside"));
    c.expected_outside = 3e-12;
    sentence_capability(&s, &c, &t);
    CHECK(holds("; fewer than 0.01 % of such etches lie outside"));
    c.form = CAPABLE_NEITHER;
    c.normality_p = MISSING;
    sentence_capability(&s, &c, &t);
    CHECK(holds("say little; too few etches to test"));

    trend_step w = { 4, 5, 300.0, 341.0, 2.0, 3.0, 41.0, 36.5, 45.5, 6.9, 1.23e-6, 14.0, 7.0, 21.0 };
    sentence_step(&s, "L1", "L2", &w, &t);
    CHECK(says("spacing of L2: 341 nm (5), of L1: 300 nm (4); difference +41 nm (95 %: 36.5 to 45.5), real at 5 % (p = 1.2e-06); "
               "14 standard deviations (95 %: 7 to 21)"));
    w.lo = -3.0;
    sentence_step(&s, "L1", "L2", &w, &t);
    CHECK(holds("not shown to be real"));
    trend_line l = { 7, 150.0, 0.92, 9.0, 0.04, -0.9, 5.2, 1e-5, 210.0, 25200.0, 120.0, 300.0 };
    sentence_line(&s, "etch_time_s", &l, &t);
    CHECK(says("spacing changes by +0.92 nm per unit of etch_time_s (standard uncertainty 0.04, p = 1e-05), scatter about the line "
               "5.2 nm; 7 etches from 120 to 300"));
    trend_setting r = { 212.2, 198.3, 226.4, 0 };
    sentence_setting(&s, "etch_time_s", 350.0, &r, &t);
    CHECK(t.s && strstr(t.s, "the etch_time_s that brings spacing to 350 nm: 212 (198 to 226). ") == t.s);
    CHECK(holds("a qualified person decides"));
    return check_done();
}

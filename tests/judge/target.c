/* Verdicts and their sentences: every branch of the rule, open limits, intervals, missing values. */
#include "judge/target.h"

#include <stdlib.h>

#include "base/quantity.h"
#include "check.h"

static char spacing[] = "spacing_nm", weighted[] = "weighted_reflectance";

static reading plain(double value, double u) {
    return (reading){ .value = value, .u = u, .u_repeat = MISSING, .lo = MISSING, .hi = MISSING, .unit = "nm",
                      .digits = 5 };
}
static judgement ask(const target *t, const reading *r) {
    judgement j;
    judge(t, r, &j);
    return j;
}
static int says(const judgement *j, const char *words) { return strstr(j->sentence, words) != NULL; }

static void two_limits(void) {
    target t = { .quantity = spacing, .min = 280.0, .max = 420.0, .error = ERROR_FULL };
    reading r = plain(351.2, 8.1);
    judgement j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_CONFORMS && !strcmp(j.sentence, "spacing_nm 351.2 +- 16 nm (k = 2) lies inside 280..420 nm"));
    CHECK_NEAR(j.conformance_probability, 1.0, 1e-12);
    r.value = 451.7;
    j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_FAILS && !strcmp(j.sentence, "spacing_nm 451.7 +- 16 nm (k = 2) exceeds the limit 420 nm"));
    r.value = 250.3;
    j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_FAILS && says(&j, "falls short of the limit 280 nm"));
    r.value = 283.0;
    j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_UNDECIDED && says(&j, "too close to the limit 280 nm to decide"));
    r.value = 411.0;
    j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_UNDECIDED && says(&j, "too close to the limit 420 nm to decide"));
    r = plain(420.0, 0.0); /* exactly known, exactly on the limit: kept */
    j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_CONFORMS);
    CHECK_NEAR(j.conformance_probability, 1.0, 0.0);
    r = plain(350.0, 200.0); /* so uncertain that both limits are straddled */
    j = ask(&t, &r);
    CHECK(says(&j, "350 +- 400 nm (k = 2)"));
    CHECK(j.verdict == VERDICT_UNDECIDED && j.conformance_probability > 0.2 && j.conformance_probability < 0.3);
}

static void open_limits(void) {
    target t = { .quantity = spacing, .min = 280.0, .max = MISSING, .error = ERROR_FULL };
    reading r = plain(300.0, 5.0);
    judgement j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_CONFORMS && says(&j, "keeps the floor 280 nm"));
    t = (target){ .quantity = weighted, .min = MISSING, .max = 0.02, .error = ERROR_FULL };
    r = (reading){ 0.0121, 0.002, MISSING, MISSING, MISSING, NULL, 4 };
    j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_CONFORMS && !strcmp(j.sentence, "weighted_reflectance 0.0121 +- 0.004 (k = 2) keeps the ceiling 0.02"));
    t.max = MISSING;
    j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_NO_TARGET && says(&j, "no limit") && isnan(j.conformance_probability));
}

static void intervals(void) {
    target t = { .quantity = weighted, .min = MISSING, .max = 0.02, .error = ERROR_FULL };
    reading r = { 0.0121, 0.002, 0.0004, 0.011, 0.031, "", 4 };
    judgement j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_UNDECIDED);
    CHECK(says(&j, "0.0121 (95 % interval 0.011..0.031) is too close to the limit 0.02"));
    CHECK(isnan(j.conformance_probability));
    r.hi = 0.0199;
    CHECK(ask(&t, &r).verdict == VERDICT_CONFORMS);
    r.lo = 0.0201;
    r.hi = 0.04;
    CHECK(ask(&t, &r).verdict == VERDICT_FAILS);
    t.error = ERROR_REPEAT; /* now the interval with its common error does not count, only u_repeat */
    j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_CONFORMS && says(&j, "counting only what varies from run to run"));
    r.u_repeat = MISSING;
    j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_UNDECIDED && says(&j, "varies from run to run is not known"));
}

static void rules(void) {
    target t = target_defaults();
    CHECK(t.rule == DECIDE_GUARD && t.error == ERROR_FULL && isnan(t.min) && fabs(t.at_least - 0.95) < 1e-12);
    t.quantity = spacing;
    t.min = 280.0;
    t.max = 420.0;
    t.rule = DECIDE_SIMPLE;
    reading r = plain(419.0, 8.1);
    judgement j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_CONFORMS && says(&j, "419 +- 16 nm (k = 2) lies inside 280..420 nm (simple acceptance: its uncertainty does not count)"));
    r = plain(420.5, MISSING);
    j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_FAILS && says(&j, "420.5 nm exceeds the limit 420 nm (simple") && isnan(j.conformance_probability));
    r = plain(279.9, 5.0);
    CHECK(ask(&t, &r).verdict == VERDICT_FAILS && isinf(target_settling_u(&t, 279.9)));

    t.rule = DECIDE_PROBABILITY;
    t.at_least = 0.9;
    r = plain(410.0, 7.0); /* 10 / 7 = 1.43 sd: 0.923 */
    j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_CONFORMS && says(&j, "(conformance probability 0.923, asked: 0.9)"));
    CHECK_NEAR(j.conformance_probability, 0.9234, 1e-4);
    t.at_least = 0.95;
    j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_UNDECIDED && says(&j, "too close to the limit 420 nm to decide with this uncertainty (conformance"));
    r.value = 440.0;
    CHECK(ask(&t, &r).verdict == VERDICT_FAILS);
    double u = target_settling_u(&t, 410.0); /* one limit matters: 10 nm / 1.645 */
    CHECK_NEAR(u, 10.0 / 1.6448536, 1e-5);
    u = target_settling_u(&t, 350.0); /* both do: 70 nm / 1.96 */
    CHECK_NEAR(u, 70.0 / 1.9599640, 1e-4);
    CHECK_NEAR(target_settling_u(&t, 420.0), 0.0, 1e-12);
    t.rule = DECIDE_GUARD;
    CHECK_NEAR(target_settling_u(&t, 410.0), 10.0 / 1.6448536, 1e-6);

    target c = target_defaults(); /* a lopsided interval: half above the value, sd (0.03 - 0.019) / 1.96 */
    c.quantity = weighted;
    c.max = 0.02;
    c.rule = DECIDE_PROBABILITY;
    reading w = { 0.019, 0.002, 0.0004, 0.018, 0.03, "", 4 };
    j = ask(&c, &w);
    CHECK_NEAR(j.conformance_probability, 0.5706, 2e-4); /* Phi(0.001 1.96 / 0.011) */
    CHECK(j.verdict == VERDICT_UNDECIDED);
    w.value = 0.017; /* outside its own interval: the middle speaks */
    CHECK_NEAR(ask(&c, &w).conformance_probability, 0.0956, 2e-4); /* Phi((0.02 - 0.024) 1.96 / 0.006) */
    CHECK(!strcmp(decision_word(DECIDE_GUARD), "guard") && !strcmp(decision_word(DECIDE_PROBABILITY), "probability"));
}

static void missing(void) {
    target t = { .quantity = spacing, .min = 280.0, .max = 420.0, .error = ERROR_FULL };
    reading r = plain(MISSING, 3.0);
    judgement j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_NOT_MEASURED && says(&j, "was not measured"));
    r = plain(350.0, -1.0); /* no uncertainty that makes sense */
    j = ask(&t, &r);
    CHECK(j.verdict == VERDICT_UNDECIDED && says(&j, "its uncertainty is not known"));
    char long_name[600];
    memset(long_name, 'q', sizeof long_name - 1);
    long_name[sizeof long_name - 1] = '\0';
    t.quantity = long_name; /* longer than the sentence: cut, not overrun */
    r.u = 1.0;
    CHECK(strlen(ask(&t, &r).sentence) == 399);
}

int main(void) {
    two_limits();
    open_limits();
    intervals();
    rules();
    missing();
    verdict v[] = { VERDICT_NOT_MEASURED, VERDICT_CONFORMS, VERDICT_UNDECIDED, VERDICT_NO_TARGET };
    CHECK(verdict_worst(v, 4) == VERDICT_UNDECIDED && verdict_worst(v, 2) == VERDICT_CONFORMS);
    CHECK(verdict_worst(v, 1) == VERDICT_NOT_MEASURED && verdict_worst(v, 0) == VERDICT_NO_TARGET);
    v[0] = VERDICT_FAILS;
    CHECK(verdict_worst(v, 4) == VERDICT_FAILS);
    CHECK(!strcmp(verdict_word(VERDICT_FAILS), "fails") && !strcmp(verdict_word(VERDICT_NO_TARGET), "no_target"));
    CHECK(!strcmp(verdict_word(VERDICT_UNDECIDED), "undecided") && !strcmp(verdict_word(VERDICT_CONFORMS), "conforms"));
    CHECK(!strcmp(verdict_word(VERDICT_NOT_MEASURED), "not_measured"));
    return check_done();
}

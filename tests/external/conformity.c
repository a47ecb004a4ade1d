/* E-15..E-18: conformance probability and decision rule against the published examples and closed forms. */
#include "base/quantity.h"
#include "check.h"
#include "judge/target.h"

static char name[] = "q";

static judgement ask(double min, double max, double value, double u) {
    target t = { .quantity = name, .min = min, .max = max, .error = ERROR_FULL };
    reading r = { .value = value, .u = u, .u_repeat = MISSING, .lo = MISSING, .hi = MISSING, .unit = "", .digits = 6 };
    judgement j;
    judge(&t, &r, &j);
    return j;
}

static judgement ask_by(decision rule, double at_least, double min, double max, double value, double u) {
    target t = { .quantity = name, .min = min, .max = max, .rule = rule, .at_least = at_least };
    reading r = { .value = value, .u = u, .u_repeat = MISSING, .lo = MISSING, .hi = MISSING, .unit = "", .digits = 6 };
    judgement j;
    judge(&t, &r, &j);
    return j;
}

/* The same examples under the other rules a protocol may name. */
static void other_rules(void) {
    static const char breakdown[] = "E-15 JCGM 106:2012, breakdown voltage, p = 0.9192: conforms where 0.9 is asked, not where 0.95 is";
    CHECK_SOURCE(ask_by(DECIDE_PROBABILITY, 0.90, MISSING, -5.40, -5.47, 0.05).verdict, VERDICT_CONFORMS, 0.0, breakdown);
    CHECK_SOURCE(ask_by(DECIDE_PROBABILITY, 0.95, MISSING, -5.40, -5.47, 0.05).verdict, VERDICT_UNDECIDED, 0.0, breakdown);
    CHECK_SOURCE(ask_by(DECIDE_PROBABILITY, 0.90, MISSING, -5.40, -5.33, 0.05).verdict, VERDICT_FAILS, 0.0, breakdown);
    static const char two[] = "E-17 two-sided, p = 0.894350 (JCGM 106)";
    judgement j = ask_by(DECIDE_PROBABILITY, 0.89, 300.0, 400.0, 390.0, 8.0);
    CHECK_SOURCE(j.verdict, VERDICT_CONFORMS, 0.0, two);
    CHECK_SOURCE(j.conformance_probability, 0.894350, 1e-6, two);
    CHECK_SOURCE(ask_by(DECIDE_PROBABILITY, 0.90, 300.0, 400.0, 390.0, 8.0).verdict, VERDICT_UNDECIDED, 0.0, two);
    static const char simple[] = "JCGM 106:2012, simple acceptance: the tolerance interval is the acceptance interval";
    CHECK_SOURCE(ask_by(DECIDE_SIMPLE, MISSING, MISSING, 2.0, 2.0, 0.15).verdict, VERDICT_CONFORMS, 0.0, simple);
    CHECK_SOURCE(ask_by(DECIDE_SIMPLE, MISSING, MISSING, 2.0, 2.001, 0.15).verdict, VERDICT_FAILS, 0.0, simple);
    CHECK_SOURCE(ask_by(DECIDE_SIMPLE, MISSING, MISSING, 2.0, 1.8, 0.15).conformance_probability, 0.908789, 1e-6, "E-16 JCGM 106");
}

int main(void) {
    other_rules();
    CHECK_SOURCE(ask(MISSING, -5.40, -5.47, 0.05).conformance_probability, 0.9192433, 1e-7,
                 "E-15 JCGM 106:2012, one-sided example, breakdown voltage (published 0.92; input from memory)");

    static const char rule[] = "E-16 ISO 14253-1 default rule, guard band 1.645 u (edition detail from memory)";
    static const struct { double value; verdict want; } ceiling[] = {
        { 1.75, VERDICT_CONFORMS }, { 1.76, VERDICT_UNDECIDED }, { 2.24, VERDICT_UNDECIDED }, { 2.25, VERDICT_FAILS } };
    for (size_t i = 0; i < sizeof ceiling / sizeof ceiling[0]; i++)
        CHECK_SOURCE(ask(MISSING, 2.0, ceiling[i].value, 0.15).verdict, ceiling[i].want, 0.0, rule);
    CHECK_SOURCE(ask(MISSING, 2.0, 1.8, 0.15).conformance_probability, 0.908789, 1e-6, rule);
    /* the guard band itself, 0.24673, from both sides */
    CHECK_SOURCE(ask(MISSING, 2.0, 2.0 - 0.246729, 0.15).verdict, VERDICT_CONFORMS, 0.0, rule);
    CHECK_SOURCE(ask(MISSING, 2.0, 2.0 - 0.246727, 0.15).verdict, VERDICT_UNDECIDED, 0.0, rule);

    static const char two[] = "E-17 two-sided, acceptance 313.16..386.84 (ISO 14253-1; JCGM 106)";
    CHECK_SOURCE(ask(300.0, 400.0, 390.0, 8.0).verdict, VERDICT_UNDECIDED, 0.0, two);
    CHECK_SOURCE(ask(300.0, 400.0, 390.0, 8.0).conformance_probability, 0.894350, 1e-6, two);
    CHECK_SOURCE(ask(300.0, 400.0, 386.83, 8.0).verdict, VERDICT_CONFORMS, 0.0, two);
    CHECK_SOURCE(ask(300.0, 400.0, 386.85, 8.0).verdict, VERDICT_UNDECIDED, 0.0, two);
    CHECK_SOURCE(ask(300.0, 400.0, 313.17, 8.0).verdict, VERDICT_CONFORMS, 0.0, two);
    CHECK_SOURCE(ask(300.0, 400.0, 313.15, 8.0).verdict, VERDICT_UNDECIDED, 0.0, two);

    judgement j = ask(MISSING, 2.0, 1.0, MISSING);
    CHECK_SOURCE(j.verdict, VERDICT_UNDECIDED, 0.0, "E-18 JCGM 106: without an uncertainty there is no certainty");
    CHECK(strstr(j.sentence, "uncertainty is not known") != NULL && isnan(j.conformance_probability));
    return check_done();
}

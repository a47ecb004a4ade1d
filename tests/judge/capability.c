/* Capability: drift parts Cpk from Ppk, odd laws are noticed, intervals cover, refusals. */
#include "judge/capability.h"

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "judge/factors.h"

static error e;
static unsigned state = 12345;

static double normal(void) { /* by inversion; the low bits of this generator are not used */
    state = state * 1664525u + 1013904223u;
    return normal_quantile(((double)(state >> 8) + 0.5) / 16777216.0);
}

static void drift_and_laws(void) {
    double v[60];
    capability c;
    for (size_t i = 0; i < 60; i++) v[i] = 350.0 + 0.5 * (double)i + normal();
    CHECK(capability_of(v, 60, 330.0, 400.0, &c, &e) == ST_OK && c.n == 60);
    CHECK(c.Cpk.value > 3.0 * c.Ppk.value && c.sd_within < 1.5 && c.sd > 8.0);
    CHECK(c.Ppk.lo < c.Ppk.value && c.Ppk.value < c.Ppk.hi && c.Pp.lo < c.Pp.value && c.Pp.value < c.Pp.hi);
    CHECK(c.Ppk.value <= c.Pp.value && c.Cpk.value <= c.Cp.value);
    for (size_t i = 0; i < 60; i++) v[i] = 100.0 * exp(0.6 * normal());
    CHECK(capability_of(v, 60, MISSING, 900.0, &c, &e) == ST_OK && c.form == CAPABLE_LOG_NORMAL && c.normality_p < 0.05);
    CHECK(isnan(c.Pp.value) && isnan(c.Ppk.lo) && c.Ppk.value > 0.8 && c.Ppk.value < 2.5);
    CHECK(c.expected_outside >= 0.0 && c.expected_outside < 0.01);
    for (size_t i = 0; i < 60; i++) v[i] = i % 2 ? 100.0 + normal() : 200.0 + normal(); /* two populations */
    CHECK(capability_of(v, 60, 50.0, 250.0, &c, &e) == ST_OK && c.form == CAPABLE_NEITHER && isnan(c.expected_outside));
    v[3] = -5.0; /* no logarithm */
    CHECK(capability_of(v, 60, 50.0, 250.0, &c, &e) == ST_OK && c.form == CAPABLE_NEITHER);
}

/* Of normal samples of 20, 5 % are refuted at 5 %, 1 % at 1 %; the interval of Ppk covers the truth in 95 % of them.
 * Four standard errors of 1500 trials. */
static void coverage(void) {
    size_t refuted5 = 0, refuted1 = 0, covered = 0, covered_within = 0, trials = 1500;
    double v[20];
    capability c;
    for (size_t k = 0; k < trials; k++) {
        for (size_t i = 0; i < 20; i++) v[i] = 10.0 + normal();
        CHECK(capability_of(v, 20, 6.0, 14.0, &c, &e) == ST_OK);
        refuted5 += c.normality_p < 0.05;
        refuted1 += c.normality_p < 0.01;
        if (c.form == CAPABLE_NORMAL) {
            covered += c.Pp.lo <= 8.0 / 6.0 && c.Pp.hi >= 8.0 / 6.0;
            covered_within += c.Cp.lo <= 8.0 / 6.0 && c.Cp.hi >= 8.0 / 6.0;
        }
    }
    double n = (double)trials;
    CHECK_NEAR((double)refuted5 / n, 0.05, 4.0 * sqrt(0.05 * 0.95 / n));
    CHECK_NEAR((double)refuted1 / n, 0.01, 4.0 * sqrt(0.01 * 0.99 / n));
    CHECK_NEAR((double)covered / (n - (double)refuted5), 0.95, 4.0 * sqrt(0.05 * 0.95 / n));
    CHECK_NEAR((double)covered_within / (n - (double)refuted5), 0.95, 4.0 * sqrt(0.05 * 0.95 / n));
}

static void refusals(void) {
    double v[10] = { 1, 2, 3, 4, 5, 6, 7, 8, 9, 10 }, p = 0.0;
    capability c;
    CHECK_FAILS(capability_of(v, 10, MISSING, MISSING, &c, &e), ST_BAD_INPUT, e, "needs a target range");
    CHECK_FAILS(capability_of(v, 10, 4.0, 4.0, &c, &e), ST_BAD_INPUT, e, "does not lie below");
    CHECK_FAILS(capability_of(v, 4, 1.0, 4.0, &c, &e), ST_NO_RESULT, e, "at least 5");
    mem_fail_after(1);
    CHECK_FAILS(capability_of(v, 10, 1.0, 4.0, &c, &e), ST_NO_MEMORY, e, "not enough memory");
    mem_fail_after(0);
    for (size_t i = 0; i < 10; i++) v[i] = 7.5;
    CHECK_FAILS(capability_of(v, 10, 1.0, 9.0, &c, &e), ST_NO_RESULT, e, "the same value");
    for (size_t i = 0; i < 10; i++) v[i] = 0.1; /* no binary number: the mean is off by a rounding */
    CHECK_FAILS(capability_of(v, 10, 0.0, 1.0, &c, &e), ST_NO_RESULT, e, "the same value");
    CHECK(isnan(normality_statistic(v, 10, &p)) && isnan(p));
    CHECK(isnan(normality_statistic(v, 7, &p)) && isnan(p));
    CHECK(isnan(capability_by_quantiles(MISSING, MISSING, 1.0, 2.0, 3.0)));
}

int main(void) {
    drift_and_laws();
    coverage();
    refusals();
    return check_done();
}

/* Nested analysis of variance: known variances come back on average, also unbalanced; causes that never vary; refusals. */
#include "metrics/anova.h"

#include <stdint.h>

#include "check.h"
#include "noise.h"

static uint64_t state = 88172645463325252u;
static double normal(void) { return noise_of_twelve(&state); }

/* 400 unbalanced studies of places (sd 5), operators (2), sessions (1), repeats (3): the means of the components, each
 * known to about sqrt(2 / dof / 400). */
static void known_variances(void) {
    enum { STUDIES = 400, MOST = 400 };
    static double v[MOST];
    static int label[3 * MOST];
    double mean[4] = { 0.0 };
    for (int study = 0; study < STUDIES; study++) {
        size_t n = 0;
        for (int p = 0; p < 6; p++) {
            double place = 300.0 + 5.0 * normal();
            for (int o = 0; o < 3 + p % 2; o++) {
                double operator_shift = 2.0 * normal();
                for (int s = 0; s < 2 + o % 2; s++) {
                    double session = 1.0 * normal();
                    for (int k = 0; k < 1 + (p + o + s) % 3; k++) {
                        label[3 * n] = p;
                        label[3 * n + 1] = o;
                        label[3 * n + 2] = s;
                        v[n++] = place + operator_shift + session + 3.0 * normal();
                    }
                }
            }
        }
        anova a;
        error e = { 0 };
        CHECK(anova_nested(v, label, n, 3, &a, &e) == ST_OK);
        double total = 0.0, all = 0.0;
        for (size_t i = 0; i < 4; i++) {
            mean[i] += a.line[i].variance / STUDIES;
            total += a.line[i].ss;
        }
        for (size_t k = 0; k < n; k++) all += (v[k] - a.mean) * (v[k] - a.mean);
        if (study == 0) CHECK_NEAR(total, all, 1e-8 * all);
    }
    CHECK_NEAR(mean[0], 25.0, 3.5); /* 5 degrees of freedom: s.e. 0.8 */
    CHECK_NEAR(mean[1], 4.0, 0.7);
    CHECK_NEAR(mean[2], 1.0, 0.9); /* cut at 0, so a little high */
    CHECK_NEAR(mean[3], 9.0, 0.45);
}

int main(void) {
    known_variances();
    anova a;
    error e = { 0 };
    /* By hand: 2 groups of 2 and 1; n0 = (3 - 5/3) / 1 = 4/3. */
    static const double v[] = { 1.0, 3.0, 8.0 };
    static const int one[] = { 4, 4, 9 };
    CHECK(anova_nested(v, one, 3, 1, &a, &e) == ST_OK);
    CHECK_NEAR(a.line[0].ss, 24.0, 1e-12);
    CHECK_NEAR(a.line[1].variance, 2.0, 1e-12);
    CHECK_NEAR(a.line[0].variance, (24.0 - 2.0) / (4.0 / 3.0), 1e-12);
    /* order of the rows does not matter */
    static const double w[] = { 8.0, 3.0, 1.0 };
    static const int turned[] = { 9, 4, 4 };
    anova b;
    CHECK(anova_nested(w, turned, 3, 1, &b, &e) == ST_OK);
    CHECK_NEAR(b.line[0].variance, a.line[0].variance, 1e-12);
    /* A cause that never varies says nothing; without repeats there is no residual; a negative estimate is 0. */
    static const int same[] = { 1, 1, 1 }, each[] = { 1, 2, 3 };
    CHECK(anova_nested(v, same, 3, 1, &a, &e) == ST_OK && isnan(a.line[0].variance) && a.line[0].dof <= 0.0);
    CHECK(anova_nested(v, each, 3, 1, &a, &e) == ST_OK && isnan(a.line[1].variance));
    static const double alike[] = { 1.0, 5.0, 1.0, 5.0 };
    static const int pairs[] = { 1, 1, 2, 2 };
    CHECK(anova_nested(alike, pairs, 4, 1, &a, &e) == ST_OK);
    CHECK_NEAR(a.line[0].variance, 0.0, 0.0);
    CHECK_NEAR(a.line[1].variance, 8.0, 1e-12);
    CHECK(anova_nested(v, NULL, 3, 0, &a, &e) == ST_OK);
    CHECK_NEAR(a.line[0].variance, 13.0, 1e-12);
    static const double gap[] = { 1.0, (double)NAN };
    CHECK_FAILS(anova_nested(v, same, 1, 1, &a, &e), ST_BAD_INPUT, e, "expected at least 2");
    CHECK_FAILS(anova_nested(v, same, 3, 4, &a, &e), ST_BAD_INPUT, e, "at most 3");
    CHECK_FAILS(anova_nested(gap, same, 2, 1, &a, &e), ST_BAD_INPUT, e, "a value is missing");
    return check_done();
}

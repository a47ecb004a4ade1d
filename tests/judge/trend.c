/* Slopes, steps, lines: ties, one odd etch, refusals, and that the inverse agrees with the band it inverts. */
#include "judge/trend.h"

#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "judge/factors.h"

static error e;

static void robust(void) {
    double x[12], y[12];
    trend_slope s;
    for (size_t i = 0; i < 12; i++) {
        x[i] = (double)i;
        y[i] = 350.0 + 11.2 * x[i] + (i % 2 ? 0.4 : -0.4);
    }
    y[5] = 900.0; /* one odd picture */
    CHECK(trend_robust(x, y, 12, &s, &e) == ST_OK && s.n == 12);
    CHECK_NEAR(s.slope, 11.2, 0.15);
    CHECK(s.lo < 11.2 && s.hi > 11.2 && s.lo > 9.0 && s.hi < 14.0);
    CHECK_NEAR(s.intercept, 350.0, 2.0);
    for (size_t i = 0; i < 12; i++) x[i] = (double)(i / 6); /* two times only */
    CHECK(trend_robust(x, y, 12, &s, &e) == ST_OK);
    for (size_t i = 0; i < 12; i++) x[i] = 3.0;
    CHECK_FAILS(trend_robust(x, y, 12, &s, &e), ST_NO_RESULT, e, "the same time");
    CHECK_FAILS(trend_robust(x, y, 2, &s, &e), ST_BAD_INPUT, e, "at least 3");
    x[0] = 1.0;
    x[1] = 2.0;
    CHECK(trend_robust(x, y, 3, &s, &e) == ST_OK && isnan(s.lo) && isnan(s.hi)); /* three give no 95 % */
    mem_fail_after(1);
    CHECK_FAILS(trend_robust(x, y, 3, &s, &e), ST_NO_MEMORY, e, "not enough memory");
    mem_fail_after(0);
    double *many = mem_array(2 * (TREND_MOST + 40), sizeof *many);
    if (many) {
        for (size_t i = 0; i < TREND_MOST + 40; i++) {
            many[i] = (double)i;
            many[TREND_MOST + 40 + i] = i < 40 ? 1e6 : 2.5 * (double)i;
        }
        CHECK(trend_robust(many, many + TREND_MOST + 40, TREND_MOST + 40, &s, &e) == ST_OK && s.n == TREND_MOST);
        CHECK_NEAR(s.slope, 2.5, 1e-12); /* the first 40 are history */
    }
    free(many);
}

static void steps(void) {
    static const double a[] = { 300, 302, 298, 301 }, b[] = { 340, 345, 338, 343 }, flat[] = { 5, 5, 5 };
    trend_step s;
    CHECK(trend_welch(a, 4, b, 4, &s, &e) == ST_OK);
    CHECK_NEAR(s.difference, 41.25, 1e-12);
    CHECK(s.lo > 35.0 && s.hi < 48.0 && s.p < 1e-4 && s.effect > 8.0 && s.effect_lo < s.effect && s.effect_hi > s.effect);
    CHECK_FAILS(trend_welch(a, 1, b, 4, &s, &e), ST_NO_RESULT, e, "at least 2 etches");
    CHECK_FAILS(trend_welch(flat, 3, flat, 3, &s, &e), ST_NO_RESULT, e, "do not scatter");
}

static void lines(void) {
    static const double x[] = { 120, 150, 180, 210, 240, 270, 300 };
    static const double y[] = { 262, 285, 322, 350, 371, 398, 431 };
    trend_line l;
    trend_setting s;
    trend_forecast f;
    CHECK(trend_fit(x, y, 7, &l, &e) == ST_OK && l.slope_p < 1e-6);
    CHECK(trend_invert(&l, 350.0, &s, &e) == ST_OK && s.lo < s.x && s.x < s.hi && !s.cut);
    double t = student_quantile(0.975, 5.0); /* at both ends the band of the mean reaches 350 */
    CHECK(trend_predict(&l, s.x, &f, &e) == ST_OK && fabs(f.y - 350.0) < 1e-9);
    CHECK(f.hi - f.y > 2.0 * f.u); /* single etches scatter more than the line is unsure */
    CHECK(trend_predict(&l, s.lo, &f, &e) == ST_OK);
    CHECK_NEAR(f.y + t * f.u, 350.0, 1e-9);
    CHECK(trend_predict(&l, s.hi, &f, &e) == ST_OK);
    CHECK_NEAR(f.y - t * f.u, 350.0, 1e-9);
    CHECK_FAILS(trend_invert(&l, 600.0, &s, &e), ST_NO_RESULT, e, "outside the data");
    CHECK(trend_invert(&l, 429.0, &s, &e) == ST_OK && s.cut && fabs(s.hi - 300.0) < 1e-9);
    CHECK_FAILS(trend_predict(&l, 119.9, &f, &e), ST_NO_RESULT, e, "nothing is said at 119.9");
    CHECK_FAILS(trend_predict(&l, MISSING, &f, &e), ST_NO_RESULT, e, "nothing is said");
    static const double none[] = { 351, 349, 352, 348, 352, 349, 351 };
    CHECK(trend_fit(x, none, 7, &l, &e) == ST_OK && l.slope_p > 0.5);
    CHECK_FAILS(trend_invert(&l, 350.0, &s, &e), ST_NO_RESULT, e, "dependence is not clear");
    CHECK_FAILS(trend_fit(x, y, 2, &l, &e), ST_NO_RESULT, e, "at least 3");
    static const double same[] = { 60, 60, 60 };
    CHECK_FAILS(trend_fit(same, y, 3, &l, &e), ST_NO_RESULT, e, "different settings");
    static const double exact[] = { 10, 20, 30 };
    CHECK(trend_fit(exact, exact, 3, &l, &e) == ST_OK && trend_invert(&l, 15.0, &s, &e) == ST_OK);
    CHECK_NEAR(s.x, 15.0, 1e-9);
}

int main(void) {
    robust();
    steps();
    lines();
    return check_done();
}

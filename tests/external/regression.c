/* E-04, E-13, E-34, E-35 and the like: lines, slopes, steps and capability against certified values, standards and
 * published examples. */
#include "base/quantity.h"
#include "check.h"
#include "judge/capability.h"
#include "judge/trend.h"

static error e;

static void norris(void) {
    static const char source[] = "E-04 NIST StRD linear: Norris, certified";
    static const double x[] = { 0.2, 337.4, 118.2, 884.6, 10.1, 226.5, 666.3, 996.3, 448.6, 777.0, 558.2, 0.4,
                                0.6, 775.5, 666.9, 338.0, 447.5, 11.6, 556.0, 228.1, 995.8, 887.6, 120.2, 0.3,
                                0.3, 556.8, 339.1, 887.2, 999.0, 779.0, 11.1, 118.3, 229.2, 669.1, 448.9, 0.5 };
    static const double y[] = { 0.1, 338.8, 118.1, 888.0, 9.2, 228.1, 668.5, 998.5, 449.1, 778.9, 559.2, 0.3,
                                0.1, 778.1, 668.8, 339.3, 448.9, 10.8, 557.7, 228.3, 998.0, 888.8, 119.6, 0.3,
                                0.6, 557.6, 339.3, 888.0, 998.5, 778.9, 10.2, 117.6, 228.9, 668.4, 449.2, 0.2 };
    trend_line l;
    CHECK(trend_fit(x, y, 36, &l, &e) == ST_OK);
    CHECK_SOURCE(l.intercept, -0.262323073774029, 1e-10, source);
    CHECK_SOURCE(l.slope, 1.00211681802045, 1e-12, source);
    CHECK_SOURCE(l.intercept_sd, 0.232818234301152, 1e-10, source);
    CHECK_SOURCE(l.slope_sd, 0.000429796848199937, 1e-13, source);
    CHECK_SOURCE(l.residual_sd, 0.884796396144373, 1e-10, source);
}

static void thermometer(void) {
    static const char source[] = "E-13 JCGM 100:2008 (GUM) H.3, data from memory, all results agree";
    static const double t[] = { 21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.010, 26.511 };
    static const double b[] = { -0.171, -0.169, -0.166, -0.159, -0.164, -0.165, -0.156, -0.157, -0.159, -0.161, -0.160 };
    double x[11];
    trend_line l;
    for (size_t i = 0; i < 11; i++) x[i] = t[i] - 20.0;
    CHECK(trend_fit(x, b, 11, &l, &e) == ST_OK);
    CHECK_SOURCE(l.intercept, -0.1712, 5e-5, source);
    CHECK_SOURCE(l.slope, 0.00218, 5e-6, source);
    CHECK_SOURCE(l.intercept_sd, 0.0029, 5e-5, source);
    CHECK_SOURCE(l.slope_sd, 0.00067, 5e-6, source);
    CHECK_SOURCE(l.correlation, -0.930, 5e-4, source);
    CHECK_SOURCE(l.residual_sd, 0.0035, 5e-5, source);
    double u = sqrt(pow(l.intercept_sd, 2) + pow(10.0 * l.slope_sd, 2) +
                    20.0 * l.correlation * l.intercept_sd * l.slope_sd);
    CHECK_SOURCE(l.intercept + 10.0 * l.slope, -0.1494, 5e-5, source);
    CHECK_SOURCE(u, 0.0041, 5e-5, source);
    trend_forecast f;
    CHECK_FAILS(trend_predict(&l, 10.0, &f, &e), ST_NO_RESULT, e, "nothing is said at 10");
    CHECK(trend_predict(&l, 4.0, &f, &e) == ST_OK); /* GUM H.3 by both ways inside the data */
    CHECK_SOURCE(f.u, sqrt(pow(l.intercept_sd, 2) + pow(4.0 * l.slope_sd, 2) + 8.0 * l.correlation * l.intercept_sd * l.slope_sd),
                 1e-12, source);
}

static void slopes_and_steps(void) {
    static const char sen[] = "Sen (1968), example: slope 4, 93 % interval 3.71 to 4.38 (from memory)";
    static const double x[] = { 1, 2, 3, 4, 10, 12, 18 }, y[] = { 9, 15, 19, 20, 45, 55, 78 };
    trend_slope s;
    CHECK(trend_robust(x, y, 7, &s, &e) == ST_OK);
    CHECK_SOURCE(s.slope, 4.0, 1e-12, sen);
    CHECK(s.lo <= 3.7143 && s.hi >= 4.375); /* 95 % is no narrower than 93 % */
    CHECK_NEAR(s.lo, 11.0 / 3.0, 1e-12); /* the third and the 19th of the 21 slopes, in order */
    CHECK_NEAR(s.hi, 5.0, 1e-12);
    static const char sleep[] = "Student (1908), sleep data, Welch test as printed by R's t.test (from memory)";
    static const double a[] = { 0.7, -1.6, -0.2, -1.2, -0.1, 3.4, 3.7, 0.8, 0.0, 2.0 };
    static const double b[] = { 1.9, 0.8, 1.1, 0.1, -0.1, 4.4, 5.5, 1.6, 4.6, 3.4 };
    trend_step w;
    CHECK(trend_welch(a, 10, b, 10, &w, &e) == ST_OK);
    CHECK_SOURCE(w.mean_a, 0.75, 1e-12, sleep);
    CHECK_SOURCE(w.mean_b, 2.33, 1e-12, sleep);
    CHECK_SOURCE(w.df, 17.776, 5e-4, sleep);
    CHECK_SOURCE(w.p, 0.07939, 5e-6, sleep);
    CHECK_SOURCE(w.lo, -0.2054832, 5e-8, sleep);
    CHECK_SOURCE(w.hi, 3.3654832, 5e-8, sleep);
}

/* NIST StRD Michelso: 299 + v / 1000. */
static const int michelso[100] = {
    850, 740, 900, 1070, 930, 850, 950, 980, 980, 880, 1000, 980, 930, 650, 760, 810, 1000, 1000, 960, 960, 960, 940, 960,
    940, 880, 800, 850, 880, 900, 840, 830, 790, 810, 880, 880, 830, 800, 790, 760, 800, 880, 880, 880, 860, 720, 720, 620,
    860, 970, 950, 880, 910, 850, 870, 840, 840, 850, 840, 840, 840, 890, 810, 810, 820, 800, 770, 760, 740, 750, 760, 910,
    920, 890, 860, 880, 720, 840, 850, 850, 780, 890, 840, 780, 810, 760, 810, 790, 810, 820, 850, 870, 870, 810, 740, 810,
    940, 950, 800, 810, 870 };

static void capabilities(void) {
    static const char source[] = "E-34 ISO 22514-2 performance index on NIST StRD Michelso";
    double v[100];
    capability c;
    for (size_t i = 0; i < 100; i++) v[i] = 299.0 + michelso[i] / 1000.0;
    CHECK(capability_of(v, 100, 299.6, 300.1, &c, &e) == ST_OK);
    CHECK_SOURCE(c.sd, 0.0790105478190518, 1e-12, "E-01 NIST StRD Michelso, certified");
    CHECK_SOURCE(c.Pp.value, 1.054711499080, 1e-10, source);
    CHECK_SOURCE(c.Ppk.value, 1.044586268689, 1e-10, source);
    CHECK(capability_of(v, 100, 299.6, MISSING, &c, &e) == ST_OK && isnan(c.Pp.value));
    CHECK_SOURCE(c.Ppk.value, 1.064836729471, 1e-10, source);
    CHECK_SOURCE(c.normality, 0.4643232564, 1e-8, "Stephens (1974), recomputed with the normal law of Python 3");
    CHECK(c.normality_p > 0.05 && c.form == CAPABLE_NORMAL);
    static const char quantiles[] = "E-35 ISO 22514-2, index by quantiles of a log-normal law";
    double g = log(1.3);
    CHECK_SOURCE(capability_by_quantiles(50.0, 250.0, 100.0 * exp(-3.0 * g), 100.0, 100.0 * exp(3.0 * g)), 0.918, 1e-3, quantiles);
    CHECK_SOURCE(capability_by_quantiles(MISSING, 250.0, 100.0 * exp(-3.0 * g), 100.0, 100.0 * exp(3.0 * g)), 1.2531, 1e-3,
                 quantiles);
}

int main(void) {
    norris();
    thermometer();
    slopes_and_steps();
    capabilities();
    return check_done();
}

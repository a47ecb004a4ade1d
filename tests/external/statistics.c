/* Mean, standard deviation and lag-1 autocorrelation against certified values of the NIST Statistical Reference Datasets
 * (public domain), E-01 .. E-03: a one-pass variance fails on the last two. */
#include "check.h"
#include "metrics/uncertainty.h"

static const int michelso[] = { /* value = 299 + v/1000 */
    850, 740, 900, 1070, 930, 850, 950, 980, 980, 880, 1000, 980, 930, 650, 760, 810, 1000, 1000, 960, 960,
    960, 940, 960, 940, 880, 800, 850, 880, 900, 840, 830, 790, 810, 880, 880, 830, 800, 790, 760, 800,
    880, 880, 880, 860, 720, 720, 620, 860, 970, 950, 880, 910, 850, 870, 840, 840, 850, 840, 840, 840,
    890, 810, 810, 820, 800, 770, 760, 740, 750, 760, 910, 920, 890, 860, 880, 720, 840, 850, 850, 780,
    890, 840, 780, 810, 760, 810, 790, 810, 820, 850, 870, 870, 810, 740, 810, 940, 950, 800, 810, 870 };

static void check_michelso(void) {
    enum { N = sizeof michelso / sizeof *michelso };
    double v[N];
    for (size_t i = 0; i < N; i++) v[i] = 299.0 + (double)michelso[i] / 1000.0;
    CHECK(N == 100);
    CHECK_SOURCE(series_mean(v, N), 299.852400000000, 1e-12, "E-01 NIST StRD Michelso");
    CHECK_SOURCE(series_sd(v, N), 0.0790105478190518, 1e-12, "E-01 NIST StRD Michelso");
    CHECK_SOURCE(series_lag1(v, N), 0.535199668621283, 1e-11, "E-01 NIST StRD Michelso");
}

static void check_numacc(double c, double sd_tolerance, double lag_tolerance, const char *src) {
    static double v[1001];
    v[0] = c + 0.2;
    for (int i = 1; i < 1001; i++) v[i] = c + (i % 2 ? 0.1 : 0.3);
    CHECK_SOURCE(series_mean(v, 1001), c + 0.2, 1e-13 * fmax(1.0, c), src);
    CHECK_SOURCE(series_sd(v, 1001), 0.1, 0.1 * sd_tolerance, src);
    CHECK_SOURCE(series_lag1(v, 1001), -0.999, lag_tolerance, src);
}

int main(void) {
    static const double one[] = { 10000001.0, 10000003.0, 10000002.0 };
    check_michelso();
    CHECK_SOURCE(series_mean(one, 3), 10000002.0, 0.0, "E-02 NIST StRD NumAcc1");
    CHECK_SOURCE(series_sd(one, 3), 1.0, 1e-13, "E-02 NIST StRD NumAcc1");
    CHECK_SOURCE(series_lag1(one, 3), -0.5, 1e-13, "E-02 NIST StRD NumAcc1");
    check_numacc(1.0, 1e-12, 1e-12, "E-03 NIST StRD NumAcc2");
    check_numacc(1000000.0, 1e-9, 1e-9, "E-03 NIST StRD NumAcc3");
    check_numacc(10000000.0, 1e-7, 1e-7, "E-03 NIST StRD NumAcc4");
    CHECK(isnan(series_mean(one, 0)) && isnan(series_sd(one, 1)) && isnan(series_lag1(one, 1)));
    return check_done();
}

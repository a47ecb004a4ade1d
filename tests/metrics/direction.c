/* Sal and Str on planes whose autocorrelation is known; gratings, fields without decay. */
#include "metrics/direction.h"

#include "check.h"
#include "planes.h"

/* A 2-D autocorrelation filled from a formula. */
typedef double (*formula)(double x, double y);
static double gaussian(double x, double y) { return exp(-(x * x + y * y) / (53.0 * 53.0)); }
static double oval(double x, double y) { /* twice as long along 30 degrees, y up: lags have y down */
    double c = cos(TAU / 12.0), s = sin(TAU / 12.0), u = x * c - y * s, v = x * s + y * c;
    return exp(-(u * u / 4.0 + v * v) / (41.0 * 41.0));
}
static double rippled(double x, double y) { return cos(TAU * (x * 0.6 + y * 0.8) / 60.0); }
static double flat(double x, double y) { return 0.9 + 0.0 * (x + y); }

static void decay_of(formula f, measured *sal, measured *str, double *angle) {
    enum { LAG = 150 };
    float *values = plane_new(2 * LAG + 1, LAG + 1);
    acf2d a = { .values = values, .max_lag = LAG, .variance = 1.0, .nx = 1024, .ny = 768 };
    for (int y = 0; y <= LAG; y++)
        for (int x = -LAG; x <= LAG; x++)
            values[y * (2 * LAG + 1) + x + LAG] = (float)f((double)x, (double)y);
    texture_decay(&a, 0.2, sal, str, angle);
    free(values);
}

int main(void) {
    measured sal, str;
    double angle;
    decay_of(gaussian, &sal, &str, &angle);
    CHECK_NEAR(sal.value, 53.0 * sqrt(log(5.0)), 1e-3);
    CHECK_NEAR(str.value, 1.0, 1e-4);
    CHECK(sal.n > 100 && sal.n < 1000 && sal.u_sampling > 0.0);
    decay_of(oval, &sal, &str, &angle);
    CHECK_NEAR(sal.value, 41.0 * sqrt(log(5.0)), 1e-3);
    CHECK_NEAR(str.value, 0.5, 1e-4);
    CHECK_NEAR(angle, 30.0, 1e-9);
    decay_of(rippled, &sal, &str, &angle);
    CHECK_NEAR(sal.value, 60.0 * acos(0.2) / TAU, 2e-3); /* nearest whole degree: 0.5 deg off is 4e-5 */
    CHECK(fabs(str.value) < 1e-12);
    CHECK_NEAR(angle, atan2(0.6, 0.8) * 360.0 / TAU, 1.0); /* lines run across (0.6, 0.8), y down */
    decay_of(flat, &sal, &str, &angle);
    CHECK(isnan(sal.value) && isnan(str.value) && isnan(angle));
    return check_done();
}

/* Sizes: weights, quantiles, diameters by hand and the errors of the header. Published figures:
 * tests/external/sizes.c. */
#include "metrics/sizes.h"

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"

static void check_quantiles(void) {
    static const double x[] = { 30.0, 10.0, 20.0, 999.0 }, w[] = { 1.0, 2.0, 1.0, 0.0 };
    static const double p[] = { 0.0, 0.25, 0.4375, 0.625, 0.75, 1.0 };
    double q[6];
    error e = { 0 };
    CHECK(quantiles(x, w, 4, p, 6, q, &e) == ST_OK); /* midpoints: 10 at 0.25, 20 at 0.625, 30 at 0.875 */
    CHECK_NEAR(q[0], 10.0, 1e-12);
    CHECK_NEAR(q[1], 10.0, 1e-12);
    CHECK_NEAR(q[2], 15.0, 1e-12);
    CHECK_NEAR(q[3], 20.0, 1e-12);
    CHECK_NEAR(q[4], 25.0, 1e-12);
    CHECK_NEAR(q[5], 30.0, 1e-12);
    static const double none[] = { 0.0, 0.0, 0.0, 0.0 };
    CHECK_FAILS(quantiles(x, none, 4, p, 1, q, &e), ST_BAD_INPUT, e, "whole feature");
    CHECK_FAILS(quantiles(x, w, 0, p, 1, q, &e), ST_BAD_INPUT, e, "no weight");
    mem_fail_after(1);
    CHECK_FAILS(quantiles(x, w, 4, p, 1, q, &e), ST_NO_MEMORY, e, "memory");
    CHECK(isnan(weighted_mean(x, none, 4)) && isnan(geometric_sd(x, w, 1)));
    CHECK_NEAR(weighted_mean(x, w, 4), 17.5, 1e-12);
}

static void check_fit(void) {
    static const double same[] = { 5.0, 5.0, 5.0 }, bad[] = { 1.0, -2.0, 3.0 };
    lognormal_fit f;
    error e = { 0 };
    CHECK_FAILS(lognormal(same, 2, &f, &e), ST_BAD_INPUT, e, "at least 3");
    CHECK_FAILS(lognormal(bad, 3, &f, &e), ST_BAD_INPUT, e, "above 0");
    CHECK_FAILS(lognormal(same, 3, &f, &e), ST_NO_RESULT, e, "equal");
    mem_fail_after(1);
    CHECK_FAILS(lognormal(same, 3, &f, &e), ST_NO_MEMORY, e, "memory");
    static const double two[] = { 1.0, 1.0, 1.0, 1.0, 1.1, 50.0, 50.0, 51.0, 50.0, 50.0 };
    CHECK(lognormal(two, 10, &f, &e) == ST_OK && f.a2_star > 0.752); /* two heaps are no log-normal */
}

static void check_feret(void) {
    double hull[32], most, least;
    double square[] = { 0, 0, 2, 0, 2, 2, 0, 2, 1, 1 };
    feret_diameters(square, 5, hull, &most, &least);
    CHECK_NEAR(most, sqrt(8.0), 1e-12);
    CHECK_NEAR(least, 2.0, 1e-12);
    double turned[] = { 0, 0, 3, 4, -1, 7, -4, 3, 0, 0 }; /* a square of side 5, one corner twice */
    feret_diameters(turned, 5, hull, &most, &least);
    CHECK_NEAR(most, sqrt(50.0), 1e-12);
    CHECK_NEAR(least, 5.0, 1e-12);
    double line[] = { 0, 0, 1, 1, 3, 3 };
    feret_diameters(line, 3, hull, &most, &least);
    CHECK_NEAR(most, sqrt(18.0), 1e-12);
    CHECK_NEAR(least, 0.0, 1e-12);
    feret_diameters(line, 1, hull, &most, &least);
    CHECK(!(most > 0.0) && !(least > 0.0));
}

int main(void) {
    check_quantiles();
    check_fit();
    check_feret();
    CHECK(isnan(border_weight(10.0, 10.0, 10.0, 1.0)));
    return check_done();
}

/* Laws and their inverses agree with each other; what is out of range is missing. */
#include "judge/factors.h"

#include "base/quantity.h"
#include "check.h"

int main(void) {
    for (double p = 0.0013; p < 1.0; p += 0.0713) {
        CHECK_NEAR(normal_below(normal_quantile(p)), p, 1e-13);
        for (double df = 0.7; df < 400.0; df *= 3.1) {
            CHECK_NEAR(student_below(student_quantile(p, df), df), p, 1e-11);
            CHECK_NEAR(chi2_below(chi2_quantile(p, df), df), p, 1e-11);
        }
    }
    CHECK_NEAR(student_quantile(0.975, 1e7), normal_quantile(0.975), 1e-6);
    CHECK_NEAR(student_quantile(0.5, 3.0), 0.0, 1e-15);
    CHECK_NEAR(normal_quantile(0.5), 0.0, 1e-15);
    CHECK(isnan(normal_quantile(0.0)) && isnan(normal_quantile(1.0)) && isnan(normal_quantile(MISSING)));
    CHECK(isnan(student_quantile(0.9, 0.0)) && isnan(student_quantile(1.2, 4.0)) && isnan(student_below(1.0, -1.0)));
    CHECK(isnan(chi2_quantile(0.9, 0.0)) && isnan(chi2_quantile(-0.1, 4.0)) && isnan(chi2_below(1.0, MISSING)));
    CHECK_NEAR(chi2_below(0.0, 3.0), 0.0, 0.0);
    CHECK_NEAR(chi2_below(-1.0, 3.0), 0.0, 0.0);
    CHECK(isnan(factors_of(1).d2) && isnan(factors_of(26).D4) && isnan(factor_c4(1)));
    CHECK_NEAR(factors_of(2).d2, FACTOR_D2_OF_2, 1e-7);
    /* the range of two is |a - b|: E(W^2) = 2 */
    CHECK_NEAR(factors_of(2).d3, sqrt(2.0 - 4.0 / PI), 1e-7);
    CHECK_NEAR(factor_c4(1000), 1.0 - 1.0 / 3997.0, 1e-7);
    return check_done();
}

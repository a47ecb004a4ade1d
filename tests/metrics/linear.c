/* A system with a zero on the diagonal, and one that has no answer. */
#include "metrics/linear.h"

#include "check.h"

int main(void) {
    double m[3][4] = { { 0.0, 2.0, -1.0, 0.0 }, { 3.0, -1.0, 4.0, 0.0 }, { -1.0, 0.5, 2.0, 0.0 } }, x[3];
    static const double want[3] = { -0.6, 0.9, -0.05 };
    for (int i = 0; i < 3; i++) m[i][3] = m[i][0] * want[0] + m[i][1] * want[1] + m[i][2] * want[2];
    CHECK(linear_solve(&m[0][0], 3, 1e-12, x));
    for (int i = 0; i < 3; i++) CHECK_NEAR(x[i], want[i], 1e-14);
    double flat[2][3] = { { 1.0, 2.0, 3.0 }, { 2.0, 4.0, 7.0 } };
    x[0] = 5.5;
    CHECK(!linear_solve(&flat[0][0], 2, 1e-12, x));
    CHECK_NEAR(x[0], 5.5, 0.0);
    double nan[1][2] = { { (double)NAN, 1.0 } };
    CHECK(!linear_solve(&nan[0][0], 1, 0.0, x));
    return check_done();
}

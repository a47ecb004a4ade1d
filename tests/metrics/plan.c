/* Planned numbers checked by the definition: that many serve, one fewer does not. */
#include "metrics/plan.h"

#include "check.h"
#include "metrics/student.h"

static double reach(const plan_state *s, long more) {
    double n = (double)s->micrographs, u = s->sampling.u * sqrt(n / (n + (double)more)), c = s->common.u;
    double dof = pow(u * u + c * c, 2) /
                 (pow(u, 4) / (s->sampling.dof + (double)more) + (c > 0.0 ? pow(c, 4) / s->common.dof : 0.0));
    return student_t_at(0.975, dof) * sqrt(u * u + c * c);
}

int main(void) {
    /* Normal law, no common part: u falls as 1/sqrt(m); 1.96 * 6 sqrt(2/m) <= 4 at m = 17.3. */
    plan_state s = { { 6.0, HUGE_VAL }, { 0.0, HUGE_VAL }, 2 };
    plan_answer a = plan_micrographs(&s, 4.0, 0.95);
    CHECK(a.more == 16);
    CHECK_NEAR(a.now, 6.0 * 1.959963985, 1e-7);
    CHECK_NEAR(a.smallest, 0.0, 0.0);
    /* one-sided guard band of 95 %: coverage 0.9 */
    CHECK(plan_micrographs(&s, 1.6448536269514722 * 6.0, 0.9).more <= 1);
    CHECK(plan_micrographs(&s, 1.6449 * 6.0, 0.9).more == 0);
    CHECK(plan_micrographs(&s, 1.6449 * 6.0 / sqrt(2.5), 0.9).more == 3);
    /* Student: few degrees of freedom count twice, once in k and once in u. */
    static const double wanted[] = { 21.0, 13.7, 9.2, 5.1, 3.3 };
    plan_state t = { { 3.1, 2.0 }, { 1.2, 12.5 }, 3 };
    for (size_t i = 0; i < sizeof wanted / sizeof wanted[0]; i++) {
        a = plan_micrographs(&t, wanted[i], 0.95);
        CHECK(a.more >= 0);
        CHECK(reach(&t, a.more) <= wanted[i]);
        CHECK(a.more == 0 || reach(&t, a.more - 1) > wanted[i]);
    }
    CHECK_NEAR(a.smallest, 1.2 * student_t_at(0.975, 12.5), 1e-12);
    CHECK(plan_micrographs(&t, a.smallest, 0.95).more == PLAN_NEVER);
    CHECK(plan_micrographs(&t, a.smallest * 1.0001, 0.95).more == PLAN_MOST);
    const plan_state gap = { { (double)NAN, 2.0 }, { 1.0, 3.0 }, 2 }, none = { { 1.0, 2.0 }, { 1.0, 3.0 }, 0 };
    CHECK(plan_micrographs(&gap, 50.0, 0.95).more == PLAN_NEVER && isnan(plan_micrographs(&gap, 50.0, 0.95).now));
    CHECK(plan_micrographs(&none, 50.0, 0.95).more == PLAN_NEVER);
    return check_done();
}

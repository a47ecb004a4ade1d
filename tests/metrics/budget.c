/* Budgets by hand, the beta function by closed forms, what is refused. */
#include "metrics/budget.h"

#include "check.h"
#include "metrics/student.h"

int main(void) {
    /* One part: its own degrees of freedom and t. */
    const budget_part one[] = { { 0.37, 5.0 } };
    budget_total t = budget_combine(one, 1, 0.95);
    CHECK_NEAR(t.u, 0.37, 1e-15);
    CHECK_NEAR(t.dof, 5.0, 1e-12);
    CHECK_NEAR(t.k, 2.570581835636, 1e-9);
    /* Two equal parts of equal freedom: twice the freedom; an exactly known part adds to u only. */
    const budget_part two[] = { { 3.0, 7.0 }, { 3.0, 7.0 }, { 0.0, 1.0 } };
    t = budget_combine(two, 3, 0.95);
    CHECK_NEAR(t.u, 3.0 * sqrt(2.0), 1e-12);
    CHECK_NEAR(t.dof, 14.0, 1e-9);
    const budget_part known[] = { { 3.0, 4.0 }, { 4.0, HUGE_VAL } };
    t = budget_combine(known, 2, 0.95);
    CHECK_NEAR(t.u, 5.0, 1e-12);
    CHECK_NEAR(t.dof, 4.0 * pow(25.0 / 9.0, 2), 1e-9);
    const budget_part exact[] = { { 4.0, HUGE_VAL } };
    t = budget_combine(exact, 1, 0.95);
    CHECK(isinf(t.dof));
    CHECK_NEAR(t.k, 1.959963985, 1e-8);
    const budget_part nothing[] = { { 0.0, 3.0 } };
    t = budget_combine(nothing, 1, 0.95);
    CHECK(t.u <= 0.0 && isinf(t.dof));
    const budget_part gap[] = { { 4.0, 3.0 }, { (double)NAN, 3.0 } };
    t = budget_combine(gap, 2, 0.95);
    CHECK(isnan(t.u) && isnan(t.dof) && isnan(t.k));
    CHECK(isnan(budget_combine(gap, 0, 0.95).u));
    CHECK_NEAR(dof_of_reliability(0.25), 8.0, 1e-12); /* JCGM 100 G.4.2: a quarter is 8 */

    /* I_x(1, b) = 1 - (1 - x)^b; I_x(a, 1) = x^a; symmetry. */
    CHECK_NEAR(beta_share(1.0, 3.7, 0.21), 1.0 - pow(0.79, 3.7), 1e-14);
    CHECK_NEAR(beta_share(2.3, 1.0, 0.83), pow(0.83, 2.3), 1e-14);
    CHECK_NEAR(beta_share(2.3, 5.1, 0.4), 1.0 - beta_share(5.1, 2.3, 0.6), 1e-14);
    CHECK_NEAR(beta_share(2.0, 2.0, 0.0), 0.0, 0.0);
    CHECK_NEAR(beta_share(2.0, 2.0, 1.0), 1.0, 0.0);
    CHECK(isnan(beta_share(0.0, 1.0, 0.5)) && isnan(beta_share(1.0, 1.0, 1.1)));
    for (double p = 0.013; p < 1.0; p += 0.1)
        for (double dof = 0.7; dof < 300.0; dof *= 3.1)
            CHECK_NEAR(student_t_below(student_t_at(p, dof), dof), p, 1e-12);
    CHECK_NEAR(student_t_at(0.5, 3.0), 0.0, 0.0);
    CHECK(isnan(student_t_at(0.975, 0.0)) && isnan(student_t_at(1.0, 3.0)) && isnan(student_t_below(1.0, -1.0)));
    CHECK(isnan(fisher_above(1.0, 0.0, 2.0)));
    CHECK_NEAR(fisher_above(0.0, 3.0, 2.0), 1.0, 0.0);
    return check_done();
}

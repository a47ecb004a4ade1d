/* Budgets against the worked examples of the GUM (E-10 .. E-12), Student's t and Fisher's F against printed tables. */
#include "check.h"
#include "metrics/budget.h"
#include "metrics/student.h"
#include "metrics/uncertainty.h"

static const char h1[] = "E-10, E-11: JCGM 100:2008 (GUM), example H.1, end gauge calibration";
static const char h2[] = "E-12: JCGM 100:2008 (GUM), example H.2, resistance and reactance measured together, approach 2";
static const char t_table[] = "JCGM 100:2008 (GUM), table G.2, t_p(nu) (printed to 2 decimals)";

static void end_gauge(void) {
    static const budget_part part[] = { { 25.0, 18.0 }, { 9.7, 25.6 }, { 2.9, 50.0 }, { 16.6, 2.0 } };
    budget_total t = budget_combine(part, 4, 0.99);
    CHECK_SOURCE(t.u, 32.0, 0.5, h1);
    CHECK_SOURCE(t.u, sqrt(1003.06), 1e-12, h1);
    CHECK_SOURCE(t.dof, 16.7, 0.1, h1);
    CHECK_SOURCE(student_t_at(0.995, floor(t.dof)), 2.92, 0.005, h1);
    CHECK_SOURCE(student_t_at(0.995, floor(t.dof)) * 32.0, 93.0, 0.5, h1);
    CHECK(t.k > student_t_at(0.995, 17.0) && t.k < student_t_at(0.995, 16.0));
}

/* Each of five sets gives R, X, Z; mean and standard error of the five. The correlations of voltage, current and phase are
 * in it without being asked for. */
static void impedance(void) {
    static const double v[] = { 5.007, 4.994, 5.005, 4.990, 4.999 },
                        ma[] = { 19.663, 19.639, 19.640, 19.685, 19.678 },
                        phi[] = { 1.0456, 1.0438, 1.0468, 1.0428, 1.0433 };
    double r[5], x[5], z[5];
    for (int i = 0; i < 5; i++) {
        z[i] = v[i] / (1e-3 * ma[i]);
        r[i] = z[i] * cos(phi[i]);
        x[i] = z[i] * sin(phi[i]);
    }
    CHECK_SOURCE(series_mean(r, 5), 127.732, 5e-4, h2);
    CHECK_SOURCE(series_mean(x, 5), 219.847, 5e-4, h2);
    CHECK_SOURCE(series_mean(z, 5), 254.260, 5e-4, h2);
    CHECK_SOURCE(series_sd(r, 5) / sqrt(5.0), 0.071, 5e-4, h2);
    CHECK_SOURCE(series_sd(x, 5) / sqrt(5.0), 0.295, 1e-3, h2);
    CHECK_SOURCE(series_sd(z, 5) / sqrt(5.0), 0.236, 5e-4, h2);
}

static void tables(void) {
    static const struct {
        double p, dof, t;
    } g2[] = { { 0.95, 1, 12.71 }, { 0.95, 2, 4.30 },  { 0.95, 3, 3.18 },  { 0.95, 5, 2.57 },   { 0.95, 10, 2.23 },
               { 0.95, 20, 2.09 }, { 0.95, 50, 2.01 }, { 0.99, 1, 63.66 }, { 0.99, 4, 4.60 },   { 0.99, 16, 2.92 },
               { 0.90, 6, 1.94 },  { 0.90, 30, 1.70 }, { 0.99, 100, 2.626 } };
    for (size_t i = 0; i < sizeof g2 / sizeof g2[0]; i++)
        CHECK_SOURCE(student_t_at(0.5 + 0.5 * g2[i].p, g2[i].dof), g2[i].t, 0.0051, t_table);
    /* closed forms: nu = 1 is Cauchy's law, nu = 2 algebraic */
    CHECK_SOURCE(student_t_at(0.975, 1.0), 1.0 / tan(0.025 * 3.14159265358979323846), 1e-10, "Cauchy's law, closed form");
    CHECK_SOURCE(student_t_at(0.975, 2.0), 0.95 * sqrt(2.0 / (4.0 * 0.975 * 0.025)), 1e-10,
                 "t of two degrees of freedom, closed form");
    CHECK_SOURCE(student_t_at(0.975, HUGE_VAL), 1.959963985, 1e-8, "E-14 normal quantile");
    CHECK_SOURCE(student_t_at(0.975, 1e6), 1.959966, 3e-6, "E-14 normal quantile, expansion 1 + (z^2 + 1) / (4 nu)");
    /* F tables, 5 % points */
    static const struct {
        double f, d1, d2;
    } five[] = { { 161.4476, 1, 1 }, { 5.1433, 2, 6 }, { 3.3258, 5, 10 }, { 2.1242, 20, 20 }, { 4.0847, 1, 40 } };
    for (size_t i = 0; i < sizeof five / sizeof five[0]; i++)
        CHECK_SOURCE(fisher_above(five[i].f, five[i].d1, five[i].d2), 0.05, 6e-6, /* half a unit of their last digit */
                     "table of the F distribution, 5 % points (NIST/SEMATECH e-Handbook 1.3.6.7.3 prints 3 decimals)");
    CHECK_SOURCE(fisher_above(4.965 * 4.965, 1.0, 7.0), 2.0 * student_t_below(-4.965, 7.0), 1e-13, "t^2 is F(1, nu)");
}

int main(void) {
    end_gauge();
    impedance();
    tables();
    return check_done();
}

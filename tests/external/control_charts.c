/* E-14, E-20..E-35: quantiles, factors, charts, run lengths and capability against tables, published run lengths and
 * worked examples. */
#include "base/quantity.h"
#include "check.h"
#include "judge/factors.h"

static void quantiles(void) {
    static const char source[] = "E-14 normal quantiles, tables (scipy 1.10.1)";
    static const double p[] = { 0.8, 0.9, 0.95, 0.975, 0.99, 0.999 };
    static const double z[] = { 0.841621234, 1.281551566, 1.644853627, 1.959963985, 2.326347874, 3.090232306 };
    for (size_t i = 0; i < 6; i++) {
        CHECK_SOURCE(normal_quantile(p[i]), z[i], 1e-9, source);
        CHECK_SOURCE(normal_quantile(1.0 - p[i]), -z[i], 1e-9, source);
    }
    static const char t_table[] = "E-11 GUM G.2, table of t: t_99(16) = 2.92; t_95(10) = 2.23, t_95(1) = 12.71";
    CHECK_SOURCE(student_quantile(0.995, 16.0), 2.92, 0.005, t_table);
    CHECK_SOURCE(student_quantile(0.975, 10.0), 2.23, 0.005, t_table);
    CHECK_SOURCE(student_quantile(0.975, 1.0), 12.71, 0.005, t_table);
    /* closed forms: t with 1 and 2 degrees of freedom, chi squared with 2 */
    CHECK_SOURCE(student_quantile(0.975, 1.0), tan(PI * 0.475), 1e-9, "Cauchy law, closed form");
    CHECK_SOURCE(student_quantile(0.9, 2.0), 0.8 / sqrt(2.0 * 0.9 * 0.1), 1e-10, "t with 2 degrees, closed form");
    CHECK_SOURCE(chi2_quantile(0.95, 2.0), -2.0 * log(0.05), 1e-10, "chi squared with 2 degrees, closed form");
    CHECK_SOURCE(chi2_quantile(0.025, 1.0), pow(normal_quantile(0.5125), 2.0), 1e-10, "square of a normal value");
    CHECK_SOURCE(chi2_quantile(0.95, 10.0), 18.307, 5e-4, "chi squared tables, 10 degrees");
    CHECK_SOURCE(chi2_quantile(0.05, 30.0), 18.493, 5e-4, "chi squared tables, 30 degrees");
}

static void factors(void) {
    static const char source[] = "E-20, E-21 ISO 7870-2 table of factors; Tippett (1925), computed by integration in R";
    static const double d2[] = { 1.128379, 1.692569, 2.058751, 2.325929, 2.534413, 2.704357, 2.847201, 2.970026, 3.077505 };
    static const double d3[] = { 0.852502, 0.888368, 0.879808, 0.864082, 0.848040, 0.833205, 0.819831, 0.807834, 0.797051 };
    static const double c4[] = { 0.797885, 0.886227, 0.921318, 0.939986, 0.951533, 0.959369, 0.965030, 0.969311, 0.972659 };
    for (size_t n = 2; n <= 10; n++) {
        chart_factors f = factors_of(n);
        CHECK_SOURCE(f.d2, d2[n - 2], 1e-6, source);
        CHECK_SOURCE(f.d3, d3[n - 2], 1e-6, source);
        CHECK_SOURCE(f.c4, c4[n - 2], 1e-6, source);
    }
    static const char table[] = "E-22 ISO 7870-2 table of factors";
    static const struct { size_t n; double A2, A3, B3, B4, D3, D4; } rows[] = {
        { 5, 0.5768, 1.4273, 0.0, 2.0890, 0.0, 2.1145 }, { 10, 0.3083, 0.9754, 0.2837, 1.7163, 0.2230, 1.7770 } };
    for (size_t i = 0; i < 2; i++) {
        chart_factors f = factors_of(rows[i].n);
        CHECK_SOURCE(f.A2, rows[i].A2, 1e-4, table);
        CHECK_SOURCE(f.A3, rows[i].A3, 1e-4, table);
        CHECK_SOURCE(f.B3, rows[i].B3, 1e-4, table);
        CHECK_SOURCE(f.B4, rows[i].B4, 1e-4, table);
        CHECK_SOURCE(f.D3, rows[i].D3, 1e-4, table);
        CHECK_SOURCE(f.D4, rows[i].D4, 1e-4, table);
    }
    CHECK_SOURCE(factors_of(2).E2, 2.6587, 5e-5, "E-23 E2 of moving ranges of two (2.660 in tables)");
    CHECK_SOURCE(factors_of(2).D4, 3.2665, 5e-5, "E-23 D4 of moving ranges of two (3.267 in tables)");
    CHECK_SOURCE(factors_of(25).d2, 3.931, 5e-4, "ISO 7870-2 table of factors, n = 25 (from memory)");
    CHECK_SOURCE(factors_of(25).c4, 0.9896, 5e-5, "ISO 7870-2 table of factors, n = 25 (from memory)");
}

int main(void) {
    quantiles();
    factors();
    return check_done();
}

/* E-14, E-20..E-35: quantiles, factors, charts, run lengths and capability against tables, published run lengths and
 * worked examples. */
#include "base/quantity.h"
#include "check.h"
#include "judge/chart.h"
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

/* NIST StRD Michelso: 299 + v / 1000. */
static const int michelso[100] = {
    850, 740, 900, 1070, 930, 850, 950, 980, 980, 880, 1000, 980, 930, 650, 760, 810, 1000, 1000, 960, 960, 960, 940, 960,
    940, 880, 800, 850, 880, 900, 840, 830, 790, 810, 880, 880, 830, 800, 790, 760, 800, 880, 880, 880, 860, 720, 720, 620,
    860, 970, 950, 880, 910, 850, 870, 840, 840, 850, 840, 840, 840, 890, 810, 810, 820, 800, 770, 760, 740, 750, 760, 910,
    920, 890, 860, 880, 720, 840, 850, 850, 780, 890, 840, 780, 810, 760, 810, 790, 810, 820, 850, 870, 870, 810, 740, 810,
    940, 950, 800, 810, 870 };

static void individuals(void) {
    /* the figures were made with d2 = 1.128379, E2 = 2.6587, D4 = 3.2665: five digits of the factors, hence 2e-6 */
    static const char source[] = "E-23 ISO 7870-2 on NIST StRD Michelso, factors of five digits";
    double v[100];
    chart c = { 0 };
    error e = { 0 };
    chart_options o = chart_defaults();
    o.baseline = 0;
    o.rules = RULE(BEYOND) | RULE(SPREAD);
    for (size_t i = 0; i < 100; i++) v[i] = 299.0 + michelso[i] / 1000.0;
    CHECK(chart_individuals(v, NULL, 100, &o, &c, &e) == ST_OK && c.n_phases == 1);
    CHECK_SOURCE(c.phases[0].centre, 299.8524, 1e-9, source);
    CHECK_SOURCE(c.phases[0].spread_mean, 0.0525252525, 1e-9, source);
    CHECK_SOURCE(c.phases[0].sigma, 0.0465492999, 1e-8, source);
    CHECK_SOURCE(c.phases[0].lag1, 0.535199668621283, 1e-11, "E-01 NIST StRD Michelso, certified");
    CHECK_SOURCE(c.points[50].lo, 299.7127511, 2e-6, source);
    CHECK_SOURCE(c.points[50].hi, 299.9920489, 2e-6, source);
    CHECK_SOURCE(c.points[50].spread_hi, 0.1715737, 2e-6, source);
    static const size_t beyond[] = { 4, 11, 14, 17, 18, 47 };
    size_t found = 0;
    for (size_t i = 0; i < 100; i++)
        if (c.points[i].alarms & RULE(BEYOND)) {
            CHECK_SOURCE((double)(i + 1), found < 6 ? (double)beyond[found] : 0.0, 0.0, source);
            found++;
        }
    CHECK_SOURCE((double)found, 6.0, 0.0, source);
    chart_free(&c);
}

static void ewma(void) {
    static const char source[] = "E-24 NIST/SEMATECH e-Handbook 6.3.2.4 (data from memory, all results agree)";
    static const double v[] = { 52.0, 47.0, 53.0, 49.3, 50.1, 47.0, 51.0, 50.1, 51.2, 50.5,
                                49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1 };
    static const double want[] = { 50.60, 49.52, 50.56, 50.18, 50.16, 49.21, 49.75, 49.85, 50.26, 50.33,
                                   50.11, 49.36, 49.52, 50.05, 49.38, 49.92, 50.73, 51.23, 51.94, 51.99 };
    chart c = { 0 };
    error e = { 0 };
    chart_options o = { .centre = 50.0, .sigma = 2.0539, .lambda = 0.3, .ewma_k = 3.0, .rules = RULE(EWMA) };
    CHECK(chart_individuals(v, NULL, 20, &o, &c, &e) == ST_OK);
    for (size_t i = 0; i < 20; i++) CHECK_SOURCE(c.points[i].ewma, want[i], 0.005, source);
    CHECK_SOURCE(c.points[19].ewma_hi, 52.5884, 1e-4, source);
    CHECK_SOURCE(c.points[19].ewma_lo, 47.4115, 2e-4, source);
    chart_free(&c);
    static const char exact[] = "E-25 ISO 7870-6; Lucas and Saccucci (1990), exact limits";
    static const size_t at[] = { 1, 2, 5, 10 };
    static const double reach[2][4] = { { 0.9, 1.0985900054, 1.2423250694, 1.2597491834 },
                                        { 0.6, 0.7683749085, 0.9447887688, 0.9942186807 } };
    for (size_t k = 0; k < 2; k++) {
        o = (chart_options){ .centre = 0.0, .sigma = 1.0, .lambda = k ? 0.2 : 0.3, .ewma_k = 3.0 };
        CHECK(chart_individuals(v, NULL, 20, &o, &c, &e) == ST_OK);
        for (size_t i = 0; i < 4; i++) {
            CHECK_SOURCE(c.points[at[i] - 1].ewma_hi, reach[k][i], 1e-9, exact);
            CHECK_SOURCE(c.points[at[i] - 1].ewma_lo, -reach[k][i], 1e-9, exact);
        }
        chart_free(&c);
    }
}

/* Simulated; four standard errors of the simulation are allowed. */
static void run_lengths(void) {
    enum { R1 = RULE(BEYOND), R2 = RULE(TWO_OF_THREE), R3 = RULE(FOUR_OF_FIVE), R4 = RULE(RUN_8) };
    static const char champ[] = "E-27..E-29 Champ and Woodall (1987), table 1, exact by Markov chain";
    static const char others[] = "E-30 Markov chain; E-31 ISO 7870-2; E-32 Nelson (1984) tests 1 to 3";
    static const char alone[] = "zone tests alone, Markov chain over their last flags, computed outside of the program";
    static const char feller[] = "Feller W. (1968) An Introduction to Probability Theory, XIII.7 (section from memory): mean wait for a run";
    static const struct { unsigned rules; double shift, length; size_t runs; const char *source; } cases[] = {
        { R1, 0.0, 370.398, 700, champ }, { R1, 1.0, 43.895, 1500, champ }, { R1, 2.0, 6.303, 1500, champ },
        { R1, 3.0, 2.000, 1500, champ }, { R1 | R2, 0.0, 225.44, 700, champ }, { R1 | R3, 0.0, 166.05, 700, champ },
        { R1 | R4, 0.0, 152.73, 700, champ }, { R1 | R2 | R3, 0.0, 132.89, 700, champ },
        { R1 | R2 | R4, 0.0, 122.05, 700, champ }, { R1 | R3 | R4, 0.0, 105.78, 700, champ },
        { RULES_ZONE, 0.0, 91.75, 2000, champ }, { RULES_ZONE, 0.4, 36.606, 1500, champ },
        { RULES_ZONE, 1.0, 9.222, 1500, champ }, { RULES_ZONE, 2.0, 3.128, 1500, champ },
        { RULES_ZONE, 3.0, 1.667, 1500, champ }, { R1 | RULE(RUN_7), 0.0, 95.731, 700, others },
        { R1 | RULE(RUN_9), 0.0, 216.696, 700, others }, { R1 | R2 | R3 | RULE(RUN_9), 0.0, 109.049, 700, others },
        { R2, 0.0, 510.689, 700, alone }, { R3, 0.0, 291.319, 700, alone }, { RULE(RUN_7), 0.0, 127.0, 1500, feller },
        { RULE(RUN_8), 0.0, 255.0, 700, feller }, { RULE(CALM_15), 0.0, 963.27, 400, feller },
        { RULES_ISO, 0.0, 92.6, 2000, others }, { RULES_NELSON, 0.0, 148.4, 1000, others } };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        double se = MISSING, got = chart_run_length(cases[i].rules, cases[i].shift, cases[i].runs, &se);
        CHECK_SOURCE(got, cases[i].length, 4.0 * se, cases[i].source);
        if (!(cases[i].shift > 0.0)) CHECK_SOURCE(chart_false_alarm_length(cases[i].rules), cases[i].length, 0.01, cases[i].source);
    }
    static const char lucas[] = "E-26 Lucas and Saccucci (1990), designs of ARL 500 (spc 0.6.7)";
    static const struct { double lambda, k, length[3]; } designs[] = {
        { 0.1, 2.814, { 499.58, 10.331, 4.362 } }, { 0.2, 2.962, { 499.74, 10.542, 3.743 } },
        { 0.4, 3.054, { 499.95, 14.263, 3.522 } }, { 0.05, 2.615, { 499.93, 11.383, 5.225 } } };
    for (size_t i = 0; i < 4; i++)
        for (int shift = 0; shift < 3; shift++) {
            double se = MISSING, got = chart_ewma_run_length(designs[i].lambda, designs[i].k, 0, shift, shift ? 2000 : 400, &se);
            CHECK_SOURCE(got, designs[i].length[shift], 4.0 * se, lucas);
        }
}

static void rules_fire(void) {
    static const char source[] = "E-33 definition of the zone rules";
    static const double two[] = { 0.5, 2.1, 0.3, 2.2 }, four[] = { 1.2, 1.1, -0.2, 1.3, 1.4 },
                        sides[] = { 2.1, -2.2, 0.1, 2.3 }, above[] = { 3.01 },
                        run[] = { 0.1, 0.1, 0.1, 0.1, 0.1, 0.1, 0.1, 0.1 };
    static const struct { const double *z; size_t n; unsigned last; } cases[] = {
        { two, 4, RULE(TWO_OF_THREE) }, { four, 5, RULE(FOUR_OF_FIVE) }, { sides, 4, 0 }, { above, 1, RULE(BEYOND) },
        { run, 8, RULE(RUN_8) } };
    for (size_t k = 0; k < sizeof cases / sizeof cases[0]; k++)
        for (size_t i = 0; i < cases[k].n; i++)
            CHECK_SOURCE(chart_rules_at(cases[k].z, i, RULES_ZONE), i + 1 == cases[k].n ? cases[k].last : 0, 0.0, source);
}

/* What the program says of its own alarms has to be in its description. */
static void said(void) {
    static const char source[] = "E-36 false-alarm budget of the default rules, README";
    char path[500], text[4096], *where = NULL;
    snprintf(path, sizeof path, "%s/../README.md", SWARD_TESTS);
    FILE *f = fopen(path, "r");
    CHECK(f != NULL);
    while (f && !where && fgets(text, sizeof text, f)) where = strstr(text, "one in about 92 etches");
    CHECK(where != NULL);
    if (f) fclose(f);
    CHECK_SOURCE(chart_false_alarm_length(chart_defaults().rules), 91.75, 0.01, source);
}

int main(void) {
    said();
    quantiles();
    factors();
    individuals();
    ewma();
    run_lengths();
    rules_fire();
    return check_done();
}

/* Least squares: closed forms, bounds, several minima, blind directions, what ends a fit. */
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "link/leastsq.h"

/* ---- a straight line: everything in closed form ---- */

static const double line_x[] = { 0.3, 1.1, 1.9, 3.2, 4.4, 5.7 };
static const double line_y[] = { 2.41, 3.05, 3.31, 4.62, 5.44, 6.13 };
enum { LINE = 6 };

static status line(void *user, const double *b, double *r, error *e) {
    (void)user;
    (void)e;
    for (size_t i = 0; i < LINE; i++) r[i] = b[0] + b[1] * line_x[i] - line_y[i];
    return ST_OK;
}
static status line_slopes(void *user, const double *b, double *j, error *e) {
    (void)user;
    (void)b;
    (void)e;
    for (size_t i = 0; i < LINE; i++) {
        j[i] = 1.0;
        j[LINE + i] = line_x[i];
    }
    return ST_OK;
}

static least_problem line_problem(const double *start) {
    least_problem p = least_defaults();
    p.n = 2;
    p.m = LINE;
    p.residuals = line;
    p.starts = start;
    p.n_starts = 1;
    return p;
}

static void straight_line(void) {
    double sx = 0, sy = 0, sxx = 0, sxy = 0, sum = 0, n = LINE, start[2] = { 7.0, -3.0 };
    for (size_t i = 0; i < LINE; i++) {
        sx += line_x[i];
        sy += line_y[i];
        sxx += line_x[i] * line_x[i];
        sxy += line_x[i] * line_y[i];
    }
    double d = n * sxx - sx * sx, slope = (n * sxy - sx * sy) / d, cut = (sy - slope * sx) / n;
    for (size_t i = 0; i < LINE; i++) sum += pow(cut + slope * line_x[i] - line_y[i], 2.0);
    for (int given = 0; given < 4; given++) { /* own slopes, a known sigma */
        least_problem p = line_problem(start);
        least_fit f = { 0 };
        error e = { 0 };
        if (given & 1) p.jacobian = line_slopes;
        if (given & 2) p.sigma = 0.2;
        double variance = given & 2 ? 0.04 : sum / (n - 2.0);
        CHECK(least_squares(&p, &f, &e) == ST_OK && f.converged && f.n_arrived == 1 && strstr(f.ended, "converged"));
        CHECK_NEAR(f.x[0], cut, 1e-9);
        CHECK_NEAR(f.x[1], slope, 1e-9);
        CHECK_NEAR(f.sum_of_squares, sum, 1e-12);
        CHECK_NEAR(f.variance, variance, 1e-12);
        CHECK_NEAR(f.u[0], sqrt(variance * sxx / d), 1e-8);
        CHECK_NEAR(f.u[1], sqrt(variance * n / d), 1e-8);
        CHECK_NEAR(f.covariance[1], -variance * sx / d, 1e-8);
        CHECK_NEAR(f.covariance[2], f.covariance[1], 1e-15);
        CHECK_NEAR(least_correlation(&f, 0, 1), -sx / sqrt(n * sxx), 1e-8);
        CHECK(f.rank == 2 && f.freedom == 4 && f.evaluations > 2);
        least_free(&f);
        least_free(&f);
    }
}

/* The slope wants to be above its upper bound: it stays there, and the cut is the best one for it. */
static void bounds(void) {
    static const struct { double lo, hi, start, at; int bound; } cases[] = {
        { -1.0, 0.5, 0.1, 0.5, 1 },           { -1.0, 0.5, 0.5, 0.5, 1 }, /* started on the bound itself */
        { 0.9, 3.0, 2.0, 0.9, -1 },           { -(double)INFINITY, 0.5, -4.0, 0.5, 1 },
        { 0.9, (double)INFINITY, 0.9, 0.9, -1 },
    };
    for (size_t k = 0; k < sizeof cases / sizeof cases[0]; k++) {
        double start[2] = { 0.0, cases[k].start }, cut = 0.0;
        double lo[2] = { -(double)INFINITY, cases[k].lo }, hi[2] = { (double)INFINITY, cases[k].hi };
        least_problem p = line_problem(start);
        least_fit f = { 0 };
        error e = { 0 };
        p.lower = lo;
        p.upper = hi;
        for (size_t i = 0; i < LINE; i++) cut += (line_y[i] - cases[k].at * line_x[i]) / LINE;
        CHECK(least_squares(&p, &f, &e) == ST_OK);
        if (e.code != ST_OK) continue;
        CHECK(f.converged && f.at_bound[1] == cases[k].bound && f.at_bound[0] == 0);
        CHECK_NEAR(f.x[1], cases[k].at, 0.0);
        CHECK_NEAR(f.x[0], cut, 1e-6);
        CHECK(f.u[1] <= 0.0 && f.u[0] > 0.0 && f.rank == 1);
        CHECK_NEAR(least_correlation(&f, 0, 1), 0.0, 0.0);
        least_free(&f);
    }
    double start[2] = { 1.0, 0.6 }, lo[2] = { 0.0, 0.0 }, hi[2] = { 5.0, (double)INFINITY }; /* solution inside */
    least_problem p = line_problem(start);
    least_fit f = { 0 };
    error e = { 0 };
    p.lower = lo;
    p.upper = hi;
    CHECK(least_squares(&p, &f, &e) == ST_OK && !f.at_bound[0] && !f.at_bound[1]);
    double inside = f.x[1];
    least_free(&f);
    p.lower = p.upper = NULL;
    CHECK(least_squares(&p, &f, &e) == ST_OK);
    CHECK_NEAR(inside, f.x[1], 1e-6);
    least_free(&f);
}

/* ---- several minima ---- */

/* (x^2 - 1)^2 + (0.2 (x + 1))^2: the deeper of two valleys is at -1, the other near 1. */
static status valleys(void *user, const double *x, double *r, error *e) {
    (void)user;
    (void)e;
    r[0] = x[0] * x[0] - 1.0;
    r[1] = 0.2 * (x[0] + 1.0);
    r[2] = 0.0;
    return ST_OK;
}

static void starts(void) {
    double all[3] = { 3.0, -0.4, 0.8 };
    least_problem p = least_defaults();
    least_fit f = { 0 };
    error e = { 0 };
    p.n = 1;
    p.m = 3;
    p.residuals = valleys;
    p.starts = all;
    p.n_starts = 3;
    CHECK(least_squares(&p, &f, &e) == ST_OK && f.n_arrived == 3 && f.best_start == 1);
    CHECK_NEAR(f.x[0], -1.0, 1e-6);
    CHECK(f.end_x[0] > 0.9 && f.end_x[2] > 0.9 && f.end_sum[0] > f.end_sum[1] && f.end_arrived[2]);
    least_free(&f);
}

/* ---- blind directions ---- */

/* Only the sum of the first two counts, the fourth not at all. */
static status sum_only(void *user, const double *x, double *r, error *e) {
    (void)user;
    (void)e;
    for (size_t i = 0; i < LINE; i++) r[i] = x[0] + x[1] + x[2] * line_x[i] - line_y[i];
    return ST_OK;
}

static void blind(void) {
    double start[4] = { 0.5, 0.1, 1.0, 3.0 };
    least_problem p = least_defaults();
    least_fit f = { 0 };
    error e = { 0 };
    p.n = 4;
    p.m = LINE;
    p.residuals = sum_only;
    p.starts = start;
    p.n_starts = 1;
    CHECK(least_squares(&p, &f, &e) == ST_OK && f.rank == 2 && f.freedom == 4);
    CHECK(isinf(f.u[0]) && isinf(f.u[1]) && isinf(f.u[3]) && isfinite(f.u[2]) && f.u[2] > 0.0);
    CHECK(fabs(f.covariance[0]) <= 0.0 && fabs(least_correlation(&f, 0, 1)) <= 0.0);
    CHECK_NEAR(f.u[2], 0.0448, 0.02); /* the slope's own, as of the straight line */
    least_free(&f);
}

/* ---- failures ---- */

static status refuses(void *user, const double *x, double *r, error *e) {
    (void)x;
    (void)r;
    return fail(e, *(const status *)user, "the callback says no");
}
static status nowhere(void *user, const double *x, double *r, error *e) {
    (void)user;
    (void)e;
    for (size_t i = 0; i < LINE; i++) r[i] = MISSING * x[0];
    return ST_OK;
}
/* Finite only where x > 0: a step beyond is taken shorter. */
static status half_plane(void *user, const double *x, double *r, error *e) {
    (void)user;
    (void)e;
    for (size_t i = 0; i < LINE; i++) r[i] = log(x[0]) + 0.1 * x[1] - line_y[i];
    return ST_OK;
}

static void failures(void) {
    double start[2] = { 1.0, 1.0 }, lo[2] = { 0.0, 2.0 }, hi[2] = { 3.0, 2.0 }, bad[2] = { 1.0, MISSING };
    least_problem p = line_problem(start);
    least_fit f = { 0 };
    error e;
    p.n = 0;
    CHECK_FAILS(least_squares(&p, &f, &e), ST_BAD_INPUT, e, "at least one");
    p.n = 2;
    p.m = 1;
    CHECK_FAILS(least_squares(&p, &f, &e), ST_BAD_INPUT, e, "1 values cannot determine 2");
    p.m = LINE;
    p.lower = lo;
    p.upper = hi;
    CHECK_FAILS(least_squares(&p, &f, &e), ST_BAD_INPUT, e, "not below");
    hi[1] = 4.0;
    CHECK_FAILS(least_squares(&p, &f, &e), ST_BAD_INPUT, e, "outside");
    p.lower = p.upper = NULL;
    p.starts = bad;
    CHECK_FAILS(least_squares(&p, &f, &e), ST_BAD_INPUT, e, "outside");
    p.starts = start;
    p.n_starts = 0;
    CHECK_FAILS(least_squares(&p, &f, &e), ST_BAD_INPUT, e, "one start");
    p.n_starts = 1;
    status said = ST_IO;
    p.user = &said;
    p.residuals = refuses;
    CHECK_FAILS(least_squares(&p, &f, &e), ST_IO, e, "says no");
    CHECK(f.x == NULL);
    p.residuals = nowhere;
    CHECK_FAILS(least_squares(&p, &f, &e), ST_NO_RESULT, e, "no finite value");
    CHECK(f.x == NULL);
    p.residuals = half_plane;
    e = (error){ 0 };
    status st = least_squares(&p, &f, &e);
    CHECK(st == ST_OK && f.x && f.x[0] > 0.0 && f.rank == 1 && isinf(f.u[0]) && isinf(f.u[1])); /* only a sum shows */
    least_free(&f);
    for (size_t n = 1; n < 40; n++) { /* each allocation in turn */
        p = line_problem(start);
        e = (error){ 0 };
        mem_fail_after(n);
        st = least_squares(&p, &f, &e);
        mem_fail_after(0);
        CHECK(st == ST_OK || (st == ST_NO_MEMORY && e.text[0] && !f.x));
        least_free(&f);
        if (st == ST_OK) break;
    }
    CHECK(st == ST_OK);
}

int main(void) {
    straight_line();
    bounds();
    starts();
    blind();
    failures();
    return check_done();
}

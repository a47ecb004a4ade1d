/* Outliers, steps and bends in made series: found where they are, with their size; a quiet series stays quiet. */
#include "judge/finding.h"

#include <stdint.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "noise.h"

enum { N = 160 };

static void make(double *v, uint64_t seed) {
    for (size_t i = 0; i < N; i++) v[i] = 350.0 + 5.0 * noise_normal(&seed);
}

/* Of 200 quiet series at 1 % each 2 are expected to break; 9 are beyond the 99.9 % point of that law. */
static void quiet(void) {
    error e = { ST_OK, "" };
    size_t breaks = 0, outliers = 0, drifts = 0;
    double v[N];
    for (uint64_t seed = 1; seed <= 200; seed++) {
        findings f;
        make(v, seed);
        CHECK(findings_of(v, N, &f, &e) == ST_OK && f.n == N);
        breaks += f.n_breaks > 0;
        outliers += f.n_outliers > 0;
        drifts += f.stretches[f.n_breaks].drift.p < 0.01;
    }
    printf("of 200 quiet series: %zu with breaks, %zu with outliers, %zu with a drift\n", breaks, outliers, drifts);
    CHECK(breaks < 9 && outliers < 9 && drifts < 9);
}

static void events(void) {
    error e = { ST_OK, "" };
    findings f, again;
    double v[N];
    make(v, 5);
    v[40] += 45.0; /* 9 sigma */
    v[41] = MISSING;
    for (size_t i = 90; i < N; i++) v[i] -= 15.0;
    CHECK(findings_of(v, N, &f, &e) == ST_OK);
    CHECK(f.n_outliers == 1 && f.outliers[0].at == 40 && fabs(f.outliers[0].value - v[40]) < 1e-12);
    CHECK_NEAR(f.outliers[0].beside, 350.0, 8.0);
    CHECK(f.n_breaks == 1 && f.breaks[0].kind == BREAK_STEP && f.breaks[0].at >= 88 && f.breaks[0].at <= 92);
    CHECK(f.breaks[0].before == f.breaks[0].at - 1 && f.breaks[0].p <= 0.01);
    CHECK(f.breaks[0].lo < -15.0 && f.breaks[0].hi > -15.0 && f.breaks[0].hi - f.breaks[0].lo < 5.0);
    CHECK(f.stretches[0].first == 0 && f.stretches[1].last == N - 1 && f.stretches[0].n + f.stretches[1].n == N - 2);
    CHECK(f.stretches[0].drift.p > 0.01 && f.stretches[1].drift.p > 0.01);
    CHECK(findings_of(v, N, &again, &e) == ST_OK && !memcmp(&again.breaks[0], &f.breaks[0], sizeof f.breaks[0])); /* no dice */

    make(v, 6); /* flat, then a ramp: a bend, no step */
    for (size_t i = 70; i < N; i++) v[i] += 0.5 * (double)(i - 70);
    CHECK(findings_of(v, N, &f, &e) == ST_OK && f.n_outliers == 0);
    CHECK(f.n_breaks == 1 && f.breaks[0].kind == BREAK_BEND && isnan(f.breaks[0].size) && f.breaks[0].at > 55 && f.breaks[0].at < 85);
    CHECK(f.stretches[1].drift.p < 1e-6 && fabs(f.stretches[1].drift.slope - 0.5) < 0.06);
    printf("slope %g (%g to %g) from %zu\n", f.stretches[1].drift.slope, f.stretches[1].drift.lo, f.stretches[1].drift.hi, f.breaks[0].at);

    make(v, 7); /* a step is not taken for outliers at its edge, however high */
    for (size_t i = 80; i < N; i++) v[i] += 100.0;
    CHECK(findings_of(v, N, &f, &e) == ST_OK && f.n_outliers == 0 && f.n_breaks == 1 && f.breaks[0].at == 80);
}

static void edges(void) {
    error e = { ST_OK, "" };
    findings f;
    double v[N];
    make(v, 8);
    CHECK(findings_of(v, 0, &f, &e) == ST_OK && !f.n_breaks && !f.n_outliers && !f.stretches[0].n);
    CHECK(findings_of(v, 4, &f, &e) == ST_OK && f.stretches[0].n == 4 && !f.stretches[0].drift.n);
    CHECK(findings_of(v, 19, &f, &e) == ST_OK && !f.n_breaks && f.stretches[0].drift.n == 19);
    for (size_t i = 0; i < N; i++) v[i] = 3.0;
    CHECK(findings_of(v, N, &f, &e) == ST_OK && !f.n_breaks && !f.n_outliers && !(fabs(f.stretches[0].drift.slope) > 0.0));
    for (size_t i = 0; i < N; i++) v[i] = MISSING;
    CHECK(findings_of(v, N, &f, &e) == ST_OK && !f.n_breaks && !f.stretches[0].n);
    make(v, 9);
    for (size_t k = 1; k <= 6; k++) {
        mem_fail_after(k);
        CHECK_FAILS(findings_of(v, N, &f, &e), ST_NO_MEMORY, e, "not enough memory");
        mem_fail_after(0);
    }
}

int main(void) {
    quiet();
    events();
    edges();
    return check_done();
}

/* Joining micrographs: by hand, one alone, missing ones, axes across 0 / 180 deg. */
#include "metrics/pool.h"

#include "base/quantity.h"
#include "check.h"
#include "metrics/uncertainty.h"

/* The joined value without its parts. */
static status value_of(const measured *m, const double *weight, size_t n, measured *out) {
    pooled p;
    status st = pool_parts(m, weight, n, &p);
    *out = p.m;
    return st;
}

int main(void) {
    measured out;
    /* Scatter larger than what each knows: standard error of the weighted mean, n/(n-1) sum w^2 r^2 / (sum
     * w)^2. */
    static const measured far[] = { { 100.0, 0.5, 2.0, 400 }, { 106.0, 0.5, 4.0, 200 } };
    static const double w[] = { 400.0, 200.0 };
    CHECK(value_of(far, w, 2, &out) == ST_OK);
    CHECK_NEAR(out.value, 102.0, 1e-12);
    CHECK_NEAR(out.u_sampling, sqrt(2.0 * (4.0 / 9.0 * 4.0 + 1.0 / 9.0 * 16.0)), 1e-12);
    CHECK_NEAR(out.u_method, 8.0 / 3.0, 1e-12);
    CHECK(out.n == 600);
    /* Agreement by chance must not make a small u. */
    static const measured near[] = { { 100.0, 3.0, 2.0, 10 }, { 100.0, 4.0, 2.0, 10 } };
    static const double even[] = { 1.0, 1.0 };
    CHECK(value_of(near, even, 2, &out) == ST_OK);
    CHECK_NEAR(out.u_sampling, 2.5, 1e-12);
    CHECK_NEAR(out.u_method, 2.0, 1e-12);
    /* One alone, the others missing or without weight. */
    const measured gaps[] = { { MISSING, MISSING, 0.0, 0 }, { 7.0, 0.3, 0.1, 50 }, { 9.0, 0.3, 0.1, 50 } };
    static const double gap_w[] = { 5.0, 2.0, 0.0 };
    CHECK(value_of(gaps, gap_w, 3, &out) == ST_OK);
    CHECK_NEAR(out.value, 7.0, 1e-12);
    CHECK_NEAR(out.u_sampling, 0.3, 1e-12);
    CHECK(out.n == 50);
    CHECK(value_of(gaps, gap_w, 1, &out) == ST_NO_RESULT && isnan(out.value) && isnan(out.u_sampling));
    CHECK(value_of(gaps, gap_w, 0, &out) == ST_NO_RESULT);
    /* A micrograph that does not know its own part leaves the scatter. */
    const measured half[] = { { 1.0, MISSING, 0.0, 5 }, { 2.0, 0.1, 0.0, 5 } };
    CHECK(value_of(half, even, 2, &out) == ST_OK);
    CHECK_NEAR(out.u_sampling, 0.5, 1e-12);
    /* The parts: scatter far beyond what each knows has its own freedom, agreement joins both. */
    pooled p;
    static const measured three[] = { { 100.0, 0.5, 0.0, 400 }, { 106.0, 0.5, 0.0, 400 }, { 97.0, 0.5, 0.0, 400 } };
    static const double equal[] = { 400.0, 400.0, 400.0 };
    CHECK(pool_parts(three, equal, 3, &p) == ST_OK && p.micrographs == 3);
    CHECK_NEAR(p.within, 0.5 / sqrt(3.0), 1e-12);
    CHECK_NEAR(p.between, sqrt(42.0 / 2.0 / 3.0), 1e-12);
    CHECK_NEAR(p.m.u_sampling, p.between, 0.0);
    CHECK_NEAR(p.dof, 2.0, 0.0);
    CHECK(pool_parts(near, equal, 2, &p) == ST_OK);
    CHECK_NEAR(p.within, 2.5, 1e-12);
    CHECK_NEAR(p.dof, 1.0 + pow(6.25, 2) / ((pow(1.5, 4) + pow(2.0, 4)) / field_dof(400.0)), 1e-9);
    CHECK(pool_parts(&gaps[1], equal, 1, &p) == ST_OK && isnan(p.between));
    CHECK_NEAR(p.dof, field_dof(400.0), 1e-9);
    CHECK(pool_parts(gaps, gap_w, 1, &p) == ST_NO_RESULT && isnan(p.dof) && p.micrographs == 0);
    /* Axes: 179 and 3 deg are 4 deg apart. */
    static const measured axes[] = { { 179.0, 1.0, 0.5, 10 }, { 3.0, 1.0, 0.5, 10 } };
    CHECK(pool_axis(axes, even, 2, &out) == ST_OK);
    CHECK_NEAR(out.value, 1.0, 1e-9);
    CHECK_NEAR(out.u_sampling, 2.0, 1e-9);
    CHECK(pool_axis(gaps, gap_w, 1, &out) == ST_NO_RESULT && isnan(out.value));
    /* Strain: alike in three micrographs, or turned from one to the next. */
    static const measured s[] = { { 1.10, 0.02, 0.0, 9 }, { 1.12, 0.02, 0.0, 9 }, { 1.11, 0.02, 0.0, 9 }, { (double)NAN, 0.1, 0.0, 0 } };
    static const measured alike[] = { { 178.0, 5.0, 0.0, 9 }, { 2.0, 5.0, 0.0, 9 }, { 0.0, 5.0, 0.0, 9 }, { 1.0, 5.0, 0.0, 9 } };
    static const measured turned[] = { { 0.0, 5.0, 0.0, 9 }, { 60.0, 5.0, 0.0, 9 }, { 120.0, 5.0, 0.0, 9 }, { 1.0, 5.0, 0.0, 9 } };
    pooled_stretch k;
    CHECK(pool_stretch(s, alike, 4, &k) == ST_OK && k.micrographs == 3);
    CHECK_NEAR(k.stretch, 1.11, 0.002);
    CHECK(k.angle_deg < 1.0 || k.angle_deg > 179.0);
    CHECK(k.z > 8.0 && k.p > 0.5);
    CHECK(pool_stretch(s, turned, 3, &k) == ST_OK && k.z < 1.5 && k.p < 1e-6);
    CHECK(pool_stretch(s, turned, 1, &k) == ST_OK && isnan(k.p));
    CHECK_NEAR(k.stretch, 1.10, 1e-12);
    CHECK(pool_stretch(&s[3], turned, 1, &k) == ST_NO_RESULT && isnan(k.stretch));
    return check_done();
}

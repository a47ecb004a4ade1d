/* Profiles cut into slabs: total thickness and area kept, steps and kinks on boundaries, each refusal. */
#include "optics/slabs.h"

#include "base/mem.h"
#include "check.h"

enum { NODES = 6 };

static void check_cut(const profile *p, int level, double area) {
    slabs s = { 0 };
    error e = { 0 };
    double thick = 0, sum = 0;
    CHECK(profile_check(p, &e) == ST_OK);
    CHECK(slabs_make(&s, p, level, &e) == ST_OK);
    CHECK(s.n == (size_t)8 << level); /* 2 + 3 + 3 of the depth, rounded per piece, at least 1 each */
    for (size_t j = 0; j < s.n; j++) {
        const double *share = s.share + 2 * s.kinds * j;
        thick += s.thickness_nm[j];
        sum += 0.5 * s.thickness_nm[j] * (share[0] + share[s.kinds]);
        for (size_t k = 0; k < 2 * s.kinds; k++) CHECK(share[k] >= 0 && share[k] <= 1);
    }
    CHECK_NEAR(thick, p->depth_nm[p->n - 1], 1e-9);
    CHECK_NEAR(sum, area, 1e-9 * area);
    slabs_free(&s);
    CHECK(!s.n && !s.share);
}

static void refusals(void) {
    double z[] = { 0, 50, 100 }, f[] = { 0, 0.5, 1 }, c[] = { 0, 0.2, 0 };
    profile p = { .n = 3, .depth_nm = z, .solid = f, .coating = { c }, .n_coatings = 1 };
    error e = { 0 };
    CHECK(profile_check(&p, &e) == ST_OK);
    c[2] = 0.2;
    CHECK_FAILS(profile_check(&p, &e), ST_BAD_INPUT, e, "depth 100 nm sum to more than 1");
    c[2] = -0.2;
    CHECK_FAILS(profile_check(&p, &e), ST_BAD_INPUT, e, "outside 0..1");
    c[2] = 0, f[1] = (double)NAN;
    CHECK_FAILS(profile_check(&p, &e), ST_BAD_INPUT, e, "depth 50 nm has a share outside 0..1");
    f[1] = 0.5, z[2] = 40;
    CHECK_FAILS(profile_check(&p, &e), ST_BAD_INPUT, e, "depth 3 turns back");
    z[2] = 0;
    CHECK_FAILS(profile_check(&p, &e), ST_BAD_INPUT, e, "a floor below its top");
    z[2] = 100, p.n = 1;
    CHECK_FAILS(profile_check(&p, &e), ST_BAD_INPUT, e, "at least two depths");
    p.n = 3, p.n_coatings = LIMIT_COATINGS + 1;
    CHECK_FAILS(profile_check(&p, &e), ST_BAD_INPUT, e, "coatings");
    static double many_z[40000], many_f[40000];
    for (int i = 0; i < 40000; i++) many_z[i] = i / 2, many_f[i] = (i + 1) / 2 % 2;
    profile stairs = { .n = 40000, .depth_nm = many_z, .solid = many_f };
    CHECK_FAILS(profile_check(&stairs, &e), ST_BAD_INPUT, e, "steps, more than slabs can follow; smooth it");
    p.n_coatings = 1;
    slabs s = { 0 };
    for (size_t i = 1; i <= 2; i++) {
        mem_fail_after(i);
        CHECK_FAILS(slabs_make(&s, &p, 0, &e), ST_NO_MEMORY, e, "memory");
    }
    mem_fail_after(0);
}

/* Ten thousand rows of a measured, noisy ramp: its noise must not ask for as many slabs. */
static void noisy(void) {
    enum { ROWS = 10000 };
    static double z[ROWS], f[ROWS];
    unsigned long long seed = 3;
    double area = 0;
    for (int i = 0; i < ROWS; i++) {
        seed = seed * 6364136223846793005ULL + 1442695040888963407ULL;
        z[i] = 0.05 * i;
        f[i] = 0.1 + 0.8 * i / ROWS + 0.05 * ((double)(seed >> 11) / 9007199254740992.0 - 0.5);
        if (i) area += 0.5 * (f[i] + f[i - 1]) * (z[i] - z[i - 1]);
    }
    profile p = { .n = ROWS, .depth_nm = z, .solid = f };
    slabs s = { 0 };
    error e = { 0 };
    double sum = 0;
    CHECK(profile_check(&p, &e) == ST_OK);
    CHECK(slabs_make(&s, &p, 1, &e) == ST_OK && s.n <= 2 * 300);
    for (size_t j = 0; j < s.n; j++) sum += 0.5 * s.thickness_nm[j] * (s.share[2 * j] + s.share[2 * j + 1]);
    CHECK_NEAR(sum, area, 1e-9 * area);
    slabs_free(&s);
}

int main(void) {
    noisy();
    /* A cap of 30 %, a step at 37.1 nm, a kink at 80, a step into the floor (double node at the end). */
    double z[NODES] = { 0, 37.1, 37.1, 80, 123.4, 123.4 }, f[NODES] = { 0.3, 0.3, 0.5, 0.6, 0.95, 1 };
    profile p = { .n = NODES, .depth_nm = z, .solid = f };
    double area = 0.3 * 37.1 + 0.55 * 42.9 + 0.775 * 43.4;
    for (int level = 0; level < 5; level++) check_cut(&p, level, area);
    slabs s = { 0 };
    error e = { 0 };
    CHECK(slabs_make(&s, &p, 0, &e) == ST_OK);
    double top = 0;
    int at_step = 0, at_kink = 0;
    for (size_t j = 0; j < s.n; j++) {
        at_step += fabs(top - 37.1) < 1e-9;
        at_kink += fabs(top - 80) < 1e-9;
        if (top < 37) { /* even shares stay even */
            CHECK_NEAR(s.share[2 * j], 0.3, 1e-13);
            CHECK_NEAR(s.share[2 * j + 1], 0.3, 1e-13);
        } else if (top < 79.9) { /* linear shares: the values at the Gauss points */
            double mid = top + 0.5 * s.thickness_nm[j], off = s.thickness_nm[j] / (2 * sqrt(3.0));
            CHECK_NEAR(s.share[2 * j], 0.5 + (mid - off - 37.1) * 0.1 / 42.9, 1e-12);
            CHECK_NEAR(s.share[2 * j + 1], 0.5 + (mid + off - 37.1) * 0.1 / 42.9, 1e-12);
        }
        top += s.thickness_nm[j];
    }
    CHECK(at_step == 1 && at_kink == 1);
    slabs_free(&s);
    refusals();
    return check_done();
}

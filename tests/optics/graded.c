/* The slab step: even media against the exact film, order of convergence, thick absorbers, evanescent slabs.
 * Figures: tests/external/graded.c. */
#include "optics/graded.h"

#include "base/quantity.h"
#include "check.h"
#include "optics/multilayer.h"
#include "optics_data.h"

static mixer mix;
static channel chan[2];

/* One wavelength, two media, both polarizations; R by the walk. */
static void walk(const profile *p, int level, mixing rule, double complex solid, double nm, double s2,
                 double complex ambient, double R[2]) {
    slabs s = { 0 };
    error e = { 0 };
    double k0[LANES] = { 2 * PI / nm };
    film a = { ambient, ambient, 0 }, b = { solid, solid, 0 };
    lane_set(&mix.eps[0], 0, ambient);
    lane_set(&mix.eps[1], 0, solid);
    mixing_prepare(&mix, rule, 0, 2, 1);
    for (int pol = 0; pol < 2; pol++) {
        chan[pol].p_polarized = pol;
        chan[pol].s2[0] = s2;
        lane_set(&chan[pol].ambient, 0, film_half_space(&a, s2, pol));
        lane_set(&chan[pol].start, 0, film_half_space(&b, s2, pol));
    }
    CHECK(slabs_make(&s, p, level, &e) == ST_OK);
    graded_walk(&s, &mix, k0, chan, 2);
    slabs_free(&s);
    for (int pol = 0; pol < 2; pol++) R[pol] = chan[pol].R[0][0];
}

static void even_film(void) { /* half air, half silicon over 160 nm: one film */
    double z[] = { 0, 160 }, f[] = { 0.5, 0.5 }, R[2];
    profile p = { .n = 2, .depth_nm = z, .solid = f };
    double complex solid = complex_of(15, 0.4), plane = csqrt(solid), axis = 0.5 * (1 + solid);
    film air = { 1, 1, 0 }, body = { plane, axis, 160 }, sub = { solid, solid, 0 };
    for (double s2 = 0; s2 < 1; s2 += 0.23) {
        walk(&p, 3, MIX_BRUGGEMAN_2D, solid, 633, s2, 1, R);
        for (int pol = 0; pol < 2; pol++)
            CHECK_NEAR(R[pol], multilayer(633, s2, pol, &air, &body, 1, &sub, NULL).R, 1e-9);
    }
}

static void order(void) { /* smooth profile, known limit: the error falls 16-fold per doubling */
    double power = 2, R[6][2];
    profile p = data_profile(300, 4001, data_power, &power);
    for (int level = 0; level < 6; level++)
        walk(&p, level + 1, MIX_BRUGGEMAN_2D, complex_of(15, 0.125), 633, 0.6, 1, R[level]);
    for (int pol = 0; pol < 2; pol++)
        for (int level = 0; level < 3; level++) {
            double ratio = (R[level][pol] - R[level + 1][pol]) / (R[level + 1][pol] - R[level + 2][pol]);
            CHECK(ratio > 11 && ratio < 24);
        }
    profile_free(&p);
}

static void hard_cases(void) {
    double z[] = { 0, 5e4 }, deep[] = { 0.9, 0.9 }, R[2];
    profile p = { .n = 2, .depth_nm = z, .solid = deep };
    double complex metal = complex_of(5, 3.6) * complex_of(5, 3.6);
    /* 50 um of an absorber: coarse slabs are far too thick for the step, yet nothing overflows and |r| stays
     * below 1. */
    film air = { 1, 1, 0 };
    for (int level = 0; level < 12; level += 3) {
        walk(&p, level, MIX_VOLUME, metal, 300, 0.5, 1, R);
        CHECK(R[0] >= 0 && R[0] <= 1 && R[1] >= 0 && R[1] <= 1);
    }
    walk(&p, 12, MIX_VOLUME, metal, 300, 0.5, 1, R);
    film body = { 0.9 * metal + 0.1, 0.9 * metal + 0.1, 5e4 }, sub = { metal, metal, 0 };
    CHECK_NEAR(R[0], multilayer(300, 0.5, 0, &air, &body, 1, &sub, NULL).R, 1e-9);
    CHECK_NEAR(R[1], multilayer(300, 0.5, 1, &air, &body, 1, &sub, NULL).R, 1e-9);
    /* Beyond total reflection from a dense ambient onto a graded layer of a thinner medium: R = 1 without
     * loss. */
    double ramp[] = { 0, 1 }, depth[] = { 0, 400 };
    profile q = { .n = 2, .depth_nm = depth, .solid = ramp };
    walk(&q, 5, MIX_BRUGGEMAN_2D, 1.0, 600, 1.7, 2.25, R);
    CHECK_NEAR(R[0], 1, 1e-12);
    CHECK_NEAR(R[1], 1, 1e-12);
}

int main(void) {
    even_film();
    order();
    hard_cases();
    return check_done();
}

/* Profiles: closed forms between the nodes, pores as complement, spread, films, every error. */
#include <stdlib.h>

#include "base/mem.h"
#include "check.h"
#include "link/surface.h"

static double at(const profile *p, const double *y, double depth) {
    size_t i = 0;
    while (i + 2 < p->n && p->depth_nm[i + 1] < depth) i++;
    double w = p->depth_nm[i + 1] - p->depth_nm[i];
    if (!(w > 0.0)) return y[i + 1];
    double t = (depth - p->depth_nm[i]) / w;
    return (1.0 - t) * y[i] + t * y[i + 1];
}
static double area_under(const profile *p, const double *y) {
    double sum = 0.0;
    for (size_t i = 0; i + 1 < p->n; i++) sum += 0.5 * (y[i] + y[i + 1]) * (p->depth_nm[i + 1] - p->depth_nm[i]);
    return sum;
}
static int sound(const profile *p) {
    int ok = p->n >= 2 && fabs(p->depth_nm[0]) < 1e-12;
    for (size_t i = 0; i < p->n; i++) {
        double sum = p->solid[i];
        ok = ok && p->solid[i] >= 0.0 && p->solid[i] <= 1.0 && (i == 0 || p->depth_nm[i] >= p->depth_nm[i - 1]);
        for (size_t j = 0; j < p->n_coatings; j++) {
            ok = ok && p->coating[j][i] >= 0.0;
            sum += p->coating[j][i];
        }
        ok = ok && sum <= 1.0 + 1e-12;
    }
    return ok;
}
static profile make(double h, const link_options *o, int pores, const layer *c, size_t n) {
    profile p;
    error e = { 0 };
    CHECK(link_profile(h, 300.0, NULL, 0, pores, o, c, n, &p, &e) == ST_OK);
    return p;
}

static void closed_forms(void) {
    static const double exponents[] = { 0.5, 0.77, 1.0, 1.5, 2.0, 3.3, 8.0 };
    for (size_t k = 0; k < sizeof exponents / sizeof exponents[0]; k++) {
        link_options o = link_defaults();
        o.exponent = exponents[k];
        o.coverage = 0.83;
        profile p = make(313.0, &o, 0, NULL, 0), q = make(313.0, &o, 1, NULL, 0);
        double worst = 0.0, worst_pore = 0.0;
        for (double d = 0.137; d < 313.0; d += 0.731) {
            double share = 0.83 * pow(d / 313.0, 2.0 / o.exponent);
            worst = fmax(worst, fabs(at(&p, p.solid, d) - share));
            worst_pore = fmax(worst_pore, fabs(at(&q, q.solid, 313.0 - d) - (1.0 - share)));
        }
        double tol = o.exponent < 3.0 ? 1e-7 : 2e-5; /* the first nm of blunt tips */
        CHECK_NEAR(worst, 0.0, tol);
        CHECK_NEAR(worst_pore, 0.0, tol);
        CHECK(sound(&p) && sound(&q) && !p.pores && q.pores);
        CHECK_NEAR(p.depth_nm[p.n - 1], 313.0, 0.0);
        CHECK_NEAR(p.solid[p.n - 1], 0.83, 1e-12); /* the step at the floor */
        CHECK_NEAR(q.solid[0], 0.17, 1e-12);       /* the rim at the surface */
        profile_free(&p);
        profile_free(&q);
    }
}

static void spreads(void) {
    link_options o = link_defaults();
    o.height_spread = 0.2;
    profile base = make(300.0, &o, 0, NULL, 0);
    o.level_at_tips = 1;
    profile top = make(300.0, &o, 0, NULL, 0);
    CHECK(sound(&base) && sound(&top));
    /* the tallest class lies just below 4 sd */
    CHECK(base.depth_nm[base.n - 1] > 300.0 * 1.75 && base.depth_nm[base.n - 1] < 300.0 * 1.8);
    /* mean volume of cones: a third of the mean height, on one floor */
    CHECK_NEAR(area_under(&base, base.solid), 100.0, 0.02);
    /* hanging from one plane, the air above the cones is two thirds of the mean height */
    CHECK_NEAR(top.depth_nm[top.n - 1] - area_under(&top, top.solid), 200.0, 0.04);
    CHECK_NEAR(base.solid[base.n - 1], 1.0, 1e-8);
    CHECK_NEAR(top.solid[top.n - 1], 1.0, 1e-8);
    /* the same pits upside down */
    profile pore = make(300.0, &o, 1, NULL, 0);
    double deep = pore.depth_nm[pore.n - 1];
    for (double d = 20.3; d < deep; d += 33.7)
        CHECK_NEAR(at(&pore, pore.solid, d), 1.0 - at(&top, top.solid, deep - d), 2e-5);
    profile_free(&base);
    profile_free(&top);
    profile_free(&pore);
}

static void cells(void) {
    error e = { 0 };
    double area[400];
    link_options o = link_defaults();
    for (int i = 0; i < 400; i++) area[i] = i % 2 ? 40000.0 : 90000.0; /* diameters 2 : 3 */
    profile p, q;
    CHECK(link_profile(300.0, 300.0, area, 400, 0, &o, NULL, 0, &p, &e) == ST_OK); /* g = 0: cells do not matter */
    q = make(300.0, &o, 0, NULL, 0);
    CHECK(p.n == q.n && memcmp(p.solid, q.solid, p.n * sizeof *p.solid) == 0);
    profile_free(&p);
    profile_free(&q);
    o.height_by_size = 1.0; /* heights 240 and 360 */
    CHECK(link_profile(300.0, 300.0, area, 400, 0, &o, NULL, 0, &p, &e) == ST_OK && sound(&p));
    CHECK_NEAR(p.depth_nm[p.n - 1], 360.0, 1e-9);
    for (double d = 3.7; d < 360.0; d += 41.3) {
        double small = d < 120.0 ? 0.0 : (d - 120.0) / 240.0, big = d / 360.0;
        CHECK_NEAR(at(&p, p.solid, d), (4.0 * small * small + 9.0 * big * big) / 13.0, 2e-6);
    }
    profile_free(&p);
    o.height_spread = 0.15; /* both at once: the mean volume stays */
    CHECK(link_profile(300.0, 300.0, area, 400, 0, &o, NULL, 0, &p, &e) == ST_OK && sound(&p));
    CHECK_NEAR(area_under(&p, p.solid), (4.0 * 240.0 + 9.0 * 360.0) / 13.0 / 3.0, 0.05);
    profile_free(&p);
    area[17] = 0.0;
    CHECK_FAILS(link_profile(300.0, 300.0, area, 400, 0, &o, NULL, 0, &p, &e), ST_BAD_INPUT, e, "cell 17");
}

static void films(void) {
    link_options o = link_defaults();
    layer thick = { NULL, 30.0 }, both[2] = { { NULL, 12.0 }, { NULL, 18.0 } };
    profile bare = make(300.0, &o, 0, NULL, 0), one = make(300.0, &o, 0, &thick, 1), two = make(300.0, &o, 0, both, 2);
    CHECK(sound(&one) && sound(&two) && one.n_coatings == 1 && two.n_coatings == 2);
    CHECK_NEAR(one.depth_nm[one.n - 1], 330.0, 0.0);
    for (double d = 7.1; d < 330.0; d += 19.3) {
        CHECK_NEAR(at(&one, one.solid, d), d < 30.0 ? 0.0 : at(&bare, bare.solid, d - 30.0), 2e-6);
        CHECK_NEAR(at(&two, two.coating[0], d) + at(&two, two.coating[1], d), at(&one, one.coating[0], d), 2e-5);
    }
    /* the flank of a cone far from tip and foot: shifted by t sqrt(1 + (R/h)^2) */
    double R = sqrt(sqrt(3.0) / 2.0 * 9e4 / PI), shift = 30.0 * sqrt(1.0 + R * R / 9e4);
    double r = R * (1.0 - 180.0 / 300.0) + shift, inner = R * (1.0 - 180.0 / 300.0);
    CHECK_NEAR(at(&one, one.coating[0], 330.0 - 180.0), (r * r - inner * inner) / (R * R), 1e-5);
    /* above the tip: the cap of a ball */
    CHECK_NEAR(at(&one, one.coating[0], 4.0), (30.0 * 30.0 - 26.0 * 26.0) / (R * R), 1e-5);
    /* the floor under the film is full */
    CHECK_NEAR(at(&one, one.coating[0], 320.0) + at(&one, one.solid, 320.0), 1.0, 1e-9);
    profile_free(&bare);
    profile_free(&one);
    profile_free(&two);

    o.coverage = 0.3; /* free floor: the film on it starts with a step */
    o.exponent = 8.0;
    one = make(300.0, &o, 0, &thick, 1);
    CHECK(sound(&one));
    CHECK(at(&one, one.coating[0], 299.0) < 0.7);
    CHECK_NEAR(at(&one, one.coating[0], 301.0) + at(&one, one.solid, 301.0), 1.0, 1e-9);
    profile_free(&one);
    /* pores: the film stands on the rim, narrows the mouth and closes the bottom */
    one = make(300.0, &o, 1, &thick, 1);
    CHECK(sound(&one) && one.pores);
    CHECK_NEAR(one.depth_nm[one.n - 1], 330.0, 0.0);
    CHECK(at(&one, one.coating[0], 15.0) > 0.7 && at(&one, one.solid, 15.0) < 1e-9);
    double mouth = R * sqrt(0.3) * pow(0.5, 1.0 / 8.0) - 30.0; /* nearly a cylinder */
    CHECK_NEAR(1.0 - at(&one, one.coating[0], 180.0) - at(&one, one.solid, 180.0), mouth * mouth / (R * R), 0.004);
    CHECK_NEAR(at(&one, one.coating[0], 320.0) + at(&one, one.solid, 320.0), 1.0, 1e-9);
    profile_free(&one);
    thick.thickness_nm = 500.0; /* everything drowned */
    one = make(300.0, &o, 1, &thick, 1);
    CHECK(sound(&one));
    profile_free(&one);
    o.height_spread = 0.2;
    thick.thickness_nm = 20.0;
    one = make(300.0, &o, 0, &thick, 1);
    CHECK(sound(&one));
    profile_free(&one);
}

static status ask(double h, double spacing, const link_options *o, const layer *c, size_t n, error *e) {
    profile p = { 0 };
    status st = link_profile(h, spacing, NULL, 0, 0, o, c, n, &p, e);
    CHECK(st == ST_OK || (p.n == 0 && !p.solid)); /* nothing to free after a failure */
    profile_free(&p);
    return st;
}

static void refusals(void) {
    error e = { 0 };
    link_options o = link_defaults();
    layer c[9] = { { NULL, 10.0 } };
    profile p;
    CHECK(link_profile(0.0, 300.0, NULL, 0, 0, &o, c, 1, &p, &e) == ST_OK && p.n == 0); /* planar */
    CHECK_FAILS(ask(-1.0, 300.0, &o, NULL, 0, &e), ST_BAD_INPUT, e, "height_nm");
    CHECK_FAILS(ask(MISSING, 300.0, &o, NULL, 0, &e), ST_BAD_INPUT, e, "height_nm");
    CHECK_FAILS(ask(300.0, 300.0, &o, c, 9, &e), ST_BAD_INPUT, e, "at most 8");
    CHECK_FAILS(ask(300.0, MISSING, &o, c, 1, &e), ST_BAD_INPUT, e, "give a spacing");
    c[0].thickness_nm = -2.0;
    CHECK_FAILS(ask(300.0, 300.0, &o, c, 1, &e), ST_BAD_INPUT, e, "coating 1");
    link_options bad = o;
    bad.exponent = 0.0;
    CHECK_FAILS(ask(300.0, 300.0, &bad, NULL, 0, &e), ST_BAD_INPUT, e, "shape");
    bad = o;
    bad.coverage = 1.01;
    CHECK_FAILS(ask(300.0, 300.0, &bad, NULL, 0, &e), ST_BAD_INPUT, e, "coverage");
    bad = o;
    bad.height_spread = -0.1;
    CHECK_FAILS(ask(300.0, 300.0, &bad, NULL, 0, &e), ST_BAD_INPUT, e, "height_spread");
    bad = o;
    bad.height_by_size = 6.0;
    CHECK_FAILS(ask(300.0, 300.0, &bad, NULL, 0, &e), ST_BAD_INPUT, e, "height_by_size");
    c[0].thickness_nm = 10.0;
    for (size_t n = 1; n <= 3; n++) {
        mem_fail_after(n);
        CHECK_FAILS(ask(300.0, 300.0, &o, c, 1, &e), ST_NO_MEMORY, e, "profile");
        mem_fail_after(0);
    }
}

int main(void) {
    closed_forms();
    spreads();
    cells();
    films();
    refusals();
    return check_done();
}

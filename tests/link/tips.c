/* Flat and round tips: shares against depth, true areas, films and pores, against solids of elementary geometry. */
#include "base/mem.h"
#include "check.h"
#include "link/surface.h"

static const double SPACING = 307.0;
static double cell(void) { return sqrt(sqrt(3.0) / 2.0 * SPACING * SPACING / PI); }

static profile make(double height, const link_options *o, int pores, const layer *film, size_t n) {
    profile p = { 0 };
    error e = { 0 };
    CHECK(link_profile(height, SPACING, NULL, 0, pores, o, film, n, &p, &e) == ST_OK);
    if (e.text[0]) printf("%s\n", e.text);
    for (size_t i = 1; i < p.n; i++) CHECK(p.depth_nm[i] >= p.depth_nm[i - 1]);
    return p;
}
/* Share of solid (film < 0) or of a film, by straight lines; at a step the lower side. */
static double at(const profile *p, int film, double depth) {
    const double *v = film < 0 ? p->solid : p->coating[film];
    size_t i = 0;
    while (i + 2 < p->n && p->depth_nm[i + 1] <= depth) i++;
    double d = p->depth_nm[i + 1] - p->depth_nm[i], t = d > 0.0 ? (depth - p->depth_nm[i]) / d : 1.0;
    return (1.0 - t) * v[i] + t * v[i + 1];
}

/* A cut cone: linear radius, slanted side and top. */
static void flat(void) {
    link_options o = link_defaults();
    double h = 283.0, t = 0.16, F = 0.9, a = cell() * sqrt(F), top = a * sqrt(t);
    o.flat_top = t;
    o.coverage = F;
    profile p = make(h, &o, 0, NULL, 0);
    for (double d = 0.0; d <= h; d += 7.3) {
        double r = (top + (a - top) * d / h) / cell();
        CHECK_NEAR(at(&p, -1, d), r * r, 1e-6);
    }
    CHECK_NEAR(p.depth_nm[p.n - 1], h, 0.0);
    double side = (a + top) * sqrt(h * h + (a - top) * (a - top)) / (a * a);
    CHECK_NEAR(link_area_ratio(h, SPACING, &o), 1.0 - F + F * (side + t), 1e-9);
    CHECK_NEAR(link_height_cut(&o), 0.4, 1e-12); /* a cone: the square root of the share */
    profile pore = make(h, &o, 1, NULL, 0);
    for (double d = 0.0; d < h; d += 11.7) CHECK_NEAR(at(&pore, -1, d), 1.0 - at(&p, -1, h - d), 2e-6);
    profile_free(&p);
    profile_free(&pore);
    /* one exponent by numbers: a paraboloid cut at t, r^2 = a^2 (c + (1 - c) u) with c = t */
    o.exponent = 2.0;
    p = make(h, &o, 0, NULL, 0);
    CHECK_NEAR(at(&p, -1, 0.5 * h), F * (t + 0.5 * (1.0 - t)), 1e-6);
    double full = h / (1.0 - t), k = a * a / full, low = t * full; /* side: 2 pi int sqrt(k w + k^2/4) dw */
    double area = 4.0 * PI / 3.0 * (pow(k * full + k * k / 4.0, 1.5) - pow(k * low + k * k / 4.0, 1.5)) / k;
    CHECK_NEAR(link_area_ratio(h, SPACING, &o), 1.0 - F + F * (area / (PI * a * a) + t), 1e-7);
    profile_free(&p);
    o.flat_top = 0.0;
    profile sharp = make(h, &o, 0, NULL, 0);
    o.flat_top = 1e-9; /* none is the limit of little */
    p = make(h, &o, 0, NULL, 0);
    for (double d = 1.0; d < h; d += 17.0) CHECK_NEAR(at(&p, -1, d), at(&sharp, -1, d), 1e-6);
    profile_free(&p);
    profile_free(&sharp);
}

/* A cone with a ball in its tip: cap and cut cone. */
static void ball(void) {
    link_options o = link_defaults();
    double full = 431.0, rho = 23.0, a = cell(), slant = hypot(a, full), sine = a / slant;
    double h = full - rho * (1.0 / sine - 1.0), cap = rho * (1.0 - sine), rim = rho * sqrt(1.0 - sine * sine);
    o.tip_radius_nm = rho;
    profile p = make(h, &o, 0, NULL, 0);
    for (double d = 0.0; d <= h; d += 1.9) {
        double r2 = d < cap ? d * (2.0 * rho - d) : pow(a * (d + full - h) / full, 2.0);
        CHECK_NEAR(at(&p, -1, d), r2 / (a * a), 2e-6);
    }
    double flank = PI * (a + rim) * hypot(a - rim, h - cap), top = 2.0 * PI * rho * cap;
    CHECK_NEAR(link_area_ratio(h, SPACING, &o), (flank + top) / (PI * a * a), 1e-6);
    CHECK(link_area_ratio(h, SPACING, &o) > sqrt(1.0 + h * h / (a * a))); /* blunt and as tall: more wall than the cone */
    profile_free(&p);
    /* Other exponents: the ball lies inside and touches, the flank is the family's. */
    static const double exponents[] = { 0.6, 0.8, 1.25 };
    for (size_t k = 0; k < 3; k++) {
        double q = o.exponent = exponents[k];
        p = make(300.0, &o, 0, NULL, 0);
        for (double d = 0.25; d < 2.0 * rho; d += 0.25) {
            double gap = at(&p, -1, d) - d * (2.0 * rho - d) / (a * a);
            CHECK(gap > -1e-5 && (d > 0.5 || gap < 1e-6)); /* the top is the ball's */
            /* no kink where they touch */
            CHECK_NEAR(at(&p, -1, d + 0.25) - 2.0 * at(&p, -1, d) + at(&p, -1, d - 0.25), 0.0, 2e-5);
        }
        /* share^(q/2) is linear in the depth along the flank */
        double s1 = pow(at(&p, -1, 120.0), q / 2.0), s2 = pow(at(&p, -1, 200.0), q / 2.0), s3 = pow(at(&p, -1, 280.0), q / 2.0);
        CHECK_NEAR(s1 - 2.0 * s2 + s3, 0.0, 1e-6);
        CHECK_NEAR(s2 + (s3 - s1) / 160.0 * 100.0, 1.0, 1e-6);
        profile_free(&p);
    }
    /* A paraboloid that is rounder already, and a blunter shape, stay as they are. */
    for (double q = 2.0; q < 4.0; q += 1.5) {
        link_options sharp = link_defaults();
        sharp.exponent = o.exponent = q;
        CHECK_NEAR(link_area_ratio(300.0, SPACING, &o), link_area_ratio(300.0, SPACING, &sharp), 1e-12);
    }
    o.exponent = 2.0;
    o.tip_radius_nm = 60.0; /* its own is a^2/2h = 43 nm */
    p = make(300.0, &o, 0, NULL, 0);
    CHECK_NEAR(at(&p, -1, 1.0), 119.0 / (a * a), 1e-6);
    profile_free(&p);
}

/* The film on a flat top: level over the top, round at its rim, parallel to the side. */
static void films(void) {
    link_options o = link_defaults();
    double h = 260.0, t = 31.0, a = cell(), top = 0.3 * a, run = a - top, side = hypot(run, h);
    layer film = { NULL, t };
    o.flat_top = 0.09;
    profile p = make(h, &o, 0, &film, 1);
    CHECK_NEAR(p.depth_nm[p.n - 1], h + t, 1e-9);
    for (double d = 0.5; d < h + t; d += 3.7) {
        double y = h + t - d, r, foot = y - t * run / side; /* level of the wall point whose film reaches here */
        if (foot >= h) r = top + sqrt(t * t - (y - h) * (y - h));
        else r = a - run * (foot < 0.0 ? 0.0 : foot) / h + t * h / side;
        double both = y < t ? 1.0 : fmin(1.0, r * r / (a * a)), inner = y >= h ? 0.0 : pow(a - run * y / h, 2.0) / (a * a);
        if (foot < 0.0 && y >= t) continue; /* near the floor the ball rests on it too */
        CHECK_NEAR(at(&p, 0, d) + at(&p, -1, d), both, 2e-4);
        CHECK_NEAR(at(&p, -1, d), inner, 2e-4);
    }
    profile_free(&p);
    /* A pore with a flat bottom under the same film: nothing is open within t of the bottom. */
    p = make(h, &o, 1, &film, 1);
    for (double d = 1.0; d < h + t; d += 3.1) {
        double x = d - t, solid = x < 0.0 ? 0.0 : 1.0 - pow(a - run * x / h, 2.0) / (a * a);
        CHECK_NEAR(at(&p, -1, d), solid, 2e-4);
        if (x > h - t + 0.5) CHECK_NEAR(at(&p, 0, d) + solid, 1.0, 1e-6); /* straight lines between nodes */
    }
    profile_free(&p);
    /* Unequal heights with each tip and a film: shares stay shares. */
    for (int k = 0; k < 4; k++) {
        o = link_defaults();
        *(k % 2 ? &o.flat_top : &o.tip_radius_nm) = k % 2 ? 0.2 : 30.0;
        o.height_spread = 0.3;
        o.lognormal = o.level_at_tips = k / 2;
        p = make(h, &o, k % 2, &film, 1);
        for (size_t i = 0; i < p.n; i++)
            CHECK(p.solid[i] >= 0.0 && p.coating[0][i] >= 0.0 && p.solid[i] + p.coating[0][i] <= 1.0 + 1e-12);
        profile_free(&p);
        CHECK(link_area_ratio(h, SPACING, &o) > 1.5);
    }
}

static void refusals(void) {
    link_options o = link_defaults();
    profile p = { 0 };
    error e = { 0 };
    o.flat_top = 0.99;
    CHECK_FAILS(link_profile(300.0, 300.0, NULL, 0, 0, &o, NULL, 0, &p, &e), ST_BAD_INPUT, e, "flat_top");
    o.flat_top = 0.1;
    o.tip_radius_nm = 5.0;
    CHECK_FAILS(link_profile(300.0, 300.0, NULL, 0, 0, &o, NULL, 0, &p, &e), ST_BAD_INPUT, e, "flat or round");
    o.flat_top = 0.0;
    o.tip_radius_nm = -1.0;
    CHECK_FAILS(link_profile(300.0, 300.0, NULL, 0, 0, &o, NULL, 0, &p, &e), ST_BAD_INPUT, e, "tip_radius_nm");
    o.tip_radius_nm = 5.0;
    CHECK_FAILS(link_profile(300.0, MISSING, NULL, 0, 0, &o, NULL, 0, &p, &e), ST_BAD_INPUT, e, "needs the spacing");
    o.tip_radius_nm = 300.0;
    CHECK_FAILS(link_profile(300.0, 300.0, NULL, 0, 0, &o, NULL, 0, &p, &e), ST_BAD_INPUT, e, "leaves no flank");
    CHECK(isnan(link_area_ratio(300.0, 300.0, &o)));
}

int main(void) {
    flat();
    ball();
    films();
    refusals();
    return check_done();
}

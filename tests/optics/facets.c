/* Bounces between facets: path, shares, products of s and p, coatings, and the published two-bounce figure. */
#include <stdlib.h>

#include "base/quantity.h"
#include "check.h"
#include "optical_tables.h"
#include "optics/facets.h"
#include "optics/reflectance.h"

static const char pyramids[] =
    "F-09: Campbell, Green (1987) J. Appl. Phys. 62, 243 for the geometry; silicon Green (2008)";
static material silicon, nitride, air;
static sun am15g;

static void path(void) {
    facet_path p, two;
    facets_path(54.7356103172, &p);
    facets_path_common(&p, &two);
    CHECK(p.n == 3 && two.n == 2);
    CHECK_SOURCE(p.incidence_deg[0], 54.7356, 1e-4, pyramids);
    CHECK_SOURCE(p.incidence_deg[1], 15.7932, 1e-4, pyramids);
    CHECK_NEAR(p.incidence_deg[2], 86.3220, 1e-3);
    CHECK_NEAR(p.share[1], 1.0, 1e-12);
    CHECK_NEAR(p.share[2], 1.0 / 9.0, 1e-6); /* cos 86.32 / cos 54.7356 */
    facets_path(25.0, &p);
    CHECK(p.n == 1);
    facets_path(40.0,
                &p); /* the reflected light still rises: a part meets the other side, under 60 degrees */
    CHECK(p.n == 2);
    CHECK_NEAR(p.incidence_deg[1], 60.0, 1e-9);
    CHECK_NEAR(p.share[1], cos(60.0 * PI / 180.0) / cos(40.0 * PI / 180.0), 1e-12);
    facets_path(45.0, &p); /* a corner reflector: twice under 45 degrees, straight back */
    CHECK(p.n == 2);
    CHECK_NEAR(p.share[1], 1.0, 1e-12);
    facets_path(89.999, &p);
    CHECK(p.n == FACET_BOUNCES);
    facets_path(-3.0, &p);
    CHECK(p.n == 1);
    for (double a = 1.0; a < 89.0; a += 0.7) {
        facets_path(a, &p);
        for (size_t k = 1; k < p.n; k++) CHECK(p.share[k] <= p.share[k - 1] && p.incidence_deg[k] < 90.0);
    }
    CHECK_NEAR(facets_angle_deg(0.5 * 4.0 * sqrt(2.0), 4.0), 54.7356103172, 1e-9);
}

static double weighted(const layer *film, int common) {
    double wl[181], R[181], mean = 0.0;
    facet_path p, two;
    error e = { 0 };
    for (int i = 0; i <= 180; i++) wl[i] = 300.0 + 5.0 * i;
    stack s = { .ambient = &air, .substrate = &silicon, .coatings = film, .n_coatings = film ? 1 : 0 };
    facets_path(54.7356103172, &p);
    facets_path_common(&p, &two);
    CHECK(facets_reflectance(&s, common ? &two : &p, wl, 181, R, &e) == ST_OK);
    for (int i = 0; i <= 180; i++) CHECK(R[i] >= 0.0 && R[i] <= 1.0);
    CHECK(sun_weighted(&am15g, wl, R, 181, 300.0, 1200.0, &mean, &e) == ST_OK);
    return mean;
}

static void published(void) {
    material fixed = { 0 };
    error e = { 0 };
    facet_path p, two;
    double R = 0.0, wl = 633.0;
    CHECK(material_constant(&fixed, 3.882, 0.019, &e) == ST_OK);
    stack s = { .ambient = &air, .substrate = &fixed };
    facets_path(54.7356103172, &p);
    facets_path_common(&p, &two);
    CHECK(facets_reflectance(&s, &two, &wl, 1, &R, &e) == ST_OK);
    CHECK_SOURCE(R, 0.1239068, 1e-6, pyramids);
    layer film = { &nitride, 75.0 };
    CHECK_SOURCE(weighted(NULL, 1), 0.12703, 5e-5, pyramids);
    CHECK_SOURCE(weighted(&film, 1), 0.02262, 5e-5, pyramids);
    double with_third = weighted(NULL, 0);
    CHECK(with_third < 0.12703 &&
          with_third > 0.12); /* the third facet is met at grazing: it mirrors nearly all */
    material_free(&fixed);
}

/* Faces that reflect a tenth leave a hundredth after two bounces. */
static void squares(void) {
    material glassy = { 0 };
    error e = { 0 };
    double n = (1.0 + sqrt(0.1)) / (1.0 - sqrt(0.1)), R = 0.0, one[2], wl = 500.0;
    facet_path twice = { .n = 2, .incidence_deg = { 0.0, 0.0 }, .share = { 1.0, 1.0 } },
               once = { .n = 1, .share = { 1.0 } };
    CHECK(material_constant(&glassy, n, 0.0, &e) == ST_OK);
    stack s = { .ambient = &air, .substrate = &glassy };
    CHECK(facets_reflectance(&s, &twice, &wl, 1, &R, &e) == ST_OK);
    CHECK_NEAR(R, 0.01, 1e-12);
    facet_path half = twice;
    half.share[1] = 0.5;
    CHECK(facets_reflectance(&s, &half, &wl, 1, &R, &e) == ST_OK);
    CHECK_NEAR(R, 0.5 * 0.1 + 0.5 * 0.01, 1e-12);
    twice.incidence_deg[0] = once.incidence_deg[0] = 50.0;
    reflect_options o = reflect_defaults();
    o.angle_deg = 50.0;
    for (int pol = 0; pol < 2; pol++) {
        o.polarization = pol ? POL_P : POL_S;
        CHECK(reflectance(&s, &o, &wl, 1, &one[pol], NULL, &e) == ST_OK);
    }
    twice.incidence_deg[1] = 50.0;
    CHECK(facets_reflectance(&s, &twice, &wl, 1, &R, &e) == ST_OK);
    CHECK_NEAR(R, 0.5 * (one[0] * one[0] + one[1] * one[1]), 1e-12); /* not the square of the mean */
    CHECK(facets_reflectance(&s, &once, &wl, 1, &R, &e) == ST_OK);
    CHECK_NEAR(R, 0.5 * (one[0] + one[1]), 1e-12);
    s.substrate = &silicon;
    wl = 100.0;
    CHECK_FAILS(facets_reflectance(&s, &once, &wl, 1, &R, &e), ST_BAD_INPUT, e, "silicon");
    material_free(&glassy);
}

int main(void) {
    error e = { 0 };
    CHECK(table_material("silicon", &silicon) && table_material("nitride", &nitride) && table_sun(&am15g) &&
          material_constant(&air, 1.0, 0.0, &e) == ST_OK);
    path();
    published();
    squares();
    material_free(&silicon);
    material_free(&nitride);
    material_free(&air);
    sun_free(&am15g);
    return check_done();
}

/* Rays between pyramids: shares of vertical light, energy, the limit of flat facets, symmetry, laminates. */
#include "optics/rays.h"

#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "optical_tables.h"
#include "optics/facets.h"

static material silicon, nitride, air, glass, cover;

static double field(const stack *s, double facet, double angle, polarization pol) {
    facet_field f = { .angle_deg = facet, .bounces_most = 8 };
    reflect_options o = reflect_defaults();
    double wl = 633.0, R = -1.0;
    error e = { 0 };
    o.angle_deg = angle;
    o.polarization = pol;
    CHECK(facets_field_reflectance(s, &f, &o, &wl, 1, &R, &e) == ST_OK);
    return R;
}

static void shares(void) {
    ray_beam b = { 0 };
    error e = { 0 };
    CHECK(rays_trace(54.7356103172, 0.0, 20.0, 120, &b, &e) == ST_OK);
    double two = 0.0, three = 0.0;
    for (size_t c = 0; c < b.n; c++) {
        two += b.classes[c].n == 2 ? b.classes[c].share : 0.0;
        three += b.classes[c].n == 3 ? b.classes[c].share : 0.0;
    }
    CHECK_SOURCE(two, 8.0 / 9.0, 2e-3, "Campbell, Green (1987): two paths of vertical light, one ninth meets a third facet (from memory)");
    CHECK_SOURCE(three, 1.0 / 9.0, 2e-3, "Campbell, Green (1987), from memory");
    ray_beam_free(&b);
    ray_beam_free(&b);
    for (double theta = 0.0; theta < 89.9; theta += 12.7)
        for (double phi = 0.0; phi <= 90.0; phi += 22.5) { /* along edges and diagonals too */
            double sum = 0.0;
            CHECK(rays_trace(54.7356, theta, phi, 17, &b, &e) == ST_OK && b.n > 0);
            for (size_t c = 0; c < b.n; c++) {
                CHECK(b.classes[c].n >= 1 && b.classes[c].n <= RAY_BOUNCES);
                sum += b.classes[c].share;
            }
            CHECK_NEAR(sum, 1.0, 1e-12);
            ray_beam_free(&b);
        }
    mem_fail_after(1);
    CHECK_FAILS(rays_trace(54.7, 0.0, 0.0, 9, &b, &e), ST_NO_MEMORY, e, "rays");
    mem_fail_after(0);
}

/* Facets that mirror everything give everything back, whatever the turns of the polarization. */
static void energy(void) {
    material mirror = { 0 };
    error e = { 0 };
    CHECK(material_constant(&mirror, 1e-9, 1e3, &e) == ST_OK);
    stack s = { .ambient = &air, .substrate = &mirror };
    for (double angle = 0.0; angle < 89.0; angle += 11.3)
        for (int pol = 0; pol < 3; pol++) CHECK_NEAR(field(&s, 54.7356, angle, (polarization)pol), 1.0, 1e-6);
    material_free(&mirror);
}

/* Nearly level facets are a flat surface: Fresnel, film, laminate, each polarization. */
static void flat(void) {
    layer film = { &nitride, 75.0 };
    stack stacks[3] = { { .ambient = &air, .substrate = &silicon },
                        { .ambient = &air, .substrate = &silicon, .coatings = &film, .n_coatings = 1 },
                        { .ambient = &air, .substrate = &silicon, .coatings = &film, .n_coatings = 1,
                          .front = { &glass, 3.2, &cover, 0.45 } } };
    for (size_t k = 0; k < 3; k++)
        for (double angle = 0.0; angle < 86.0; angle += 17.0)
            for (int pol = 0; pol < 3; pol++) {
                reflect_options o = reflect_defaults();
                double wl = 633.0, R = 0.0;
                error e = { 0 };
                o.angle_deg = angle;
                o.polarization = (polarization)pol;
                CHECK(reflectance(&stacks[k], &o, &wl, 1, &R, NULL, &e) == ST_OK);
                double got = field(&stacks[k], 1e-4, angle, (polarization)pol);
                /* the front sends unpolarised light out again, so behind glass s and p mix in the second order */
                CHECK_NEAR(got, R, k < 2 ? 2e-5 : pol == POL_MEAN && angle < 40.0 ? 2e-4 : 0.05);
            }
}

static void pyramids(void) {
    stack s = { .ambient = &air, .substrate = &silicon };
    facet_path p;
    double wl = 633.0, R = 0.0;
    error e = { 0 };
    facets_path(54.7356103172, &p);
    CHECK(facets_reflectance(&s, &p, &wl, 1, &R, &e) == ST_OK);
    CHECK_NEAR(field(&s, 54.7356103172, 0.0, POL_MEAN), R, 1e-3); /* two ways to count the same bounces */
    CHECK_NEAR(field(&s, 54.7356103172, 0.0, POL_S), field(&s, 54.7356103172, 0.0, POL_P), 1e-3);
    reflect_options o = reflect_defaults();
    facet_field all = { 54.7356, 8, 0.0 }, two = { 54.7356, 2, 0.0 }, more = { 54.7356, 8, 0.5 };
    double a = 0.0, b = 0.0, c = 0.0, sum = 0.0, weights = 0.0;
    o.angle_deg = 20.0;
    CHECK(facets_field_reflectance(&s, &all, &o, &wl, 1, &a, &e) == ST_OK && facets_field_reflectance(&s, &two, &o, &wl, 1, &b, &e) == ST_OK &&
          facets_field_reflectance(&s, &more, &o, &wl, 1, &c, &e) == ST_OK);
    CHECK(c < a && a < b);
    for (double angle = 0.5; angle < 90.0; angle += 1.0) { /* diffuse light by plain steps */
        double w = sin(2.0 * angle * PI / 180.0);
        sum += w * field(&s, 54.7356, angle, POL_MEAN);
        weights += w;
    }
    o.hemispherical = 1;
    CHECK(facets_field_reflectance(&s, &all, &o, &wl, 1, &a, &e) == ST_OK);
    CHECK_NEAR(a, sum / weights, 3e-3);
    wl = 100.0;
    CHECK_FAILS(facets_field_reflectance(&s, &all, &o, &wl, 1, &a, &e), ST_BAD_INPUT, e, "silicon");
    wl = 633.0;
    for (size_t n = 1; n <= 3; n++) {
        mem_fail_after(n);
        status st = facets_field_reflectance(&s, &all, &o, &wl, 1, &a, &e);
        mem_fail_after(0);
        CHECK(st == ST_NO_MEMORY);
    }
}

int main(void) {
    error e = { 0 };
    CHECK(table_material("silicon", &silicon) && table_material("nitride", &nitride) && table_material("glass", &glass) &&
          material_constant(&air, 1.0, 0.0, &e) == ST_OK && material_constant(&cover, 1.49, 0.0, &e) == ST_OK);
    shares();
    energy();
    flat();
    pyramids();
    material *all[] = { &silicon, &nitride, &air, &glass, &cover };
    for (size_t i = 0; i < sizeof all / sizeof all[0]; i++) material_free(all[i]);
    return check_done();
}

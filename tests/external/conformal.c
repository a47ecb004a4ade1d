/* Conformal films on cones: end-to-end cases of an independent slab recursion (128 to 1024 midpoint slabs, R on a 5 nm
 * grid 300-1200 nm, silicon of Green 2008, AM1.5G photon flux; good to about 1e-4). The feature of the equivalent
 * circular cell is dilated by a ball of the coating's thickness; films of neighbours merge. */
#include "check.h"
#include "link/surface.h"
#include "optical_tables.h"
#include "optics/reflectance.h"

static const char source[] =
    "independent slab recursion, cone 300 nm, spacing 300 nm hexagonal, conformal film n = 2.0";

int main(void) {
    static const struct { double film_nm; mixing rule; double weighted, current, at400, at600, at1000; } cases[] = {
        { 75.0, MIX_VOLUME, 0.012016, 0.5582, 0.004048, 0.001985, 0.026583 },
        { 75.0, MIX_BRUGGEMAN_2D, 0.016554, 0.7690, 0.003905, 0.000398, 0.043822 },
        { 20.0, MIX_BRUGGEMAN_2D, 0.012525, 0.5819, 0.000554, 0.001538, 0.027265 } };
    material silicon = { 0 }, air = { 0 }, film = { 0 };
    sun am15g = { 0 };
    error e = { 0 };
    CHECK(table_material("silicon", &silicon) && table_sun(&am15g) && material_constant(&air, 1.0, 0.0, &e) == ST_OK &&
          material_constant(&film, 2.0, 0.0, &e) == ST_OK);
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        link_options o = link_defaults();
        layer coat = { &film, cases[i].film_nm };
        profile p = { 0 };
        CHECK(link_profile(300.0, 300.0, NULL, 0, 0, &o, &coat, 1, &p, &e) == ST_OK);
        stack s = { .ambient = &air, .coatings = &coat, .n_coatings = 1, .profile = &p, .substrate = &silicon,
                    .mixing = cases[i].rule };
        reflect_options r = reflect_defaults();
        double wavelength[181], R[181], mean = 0.0, current = 0.0;
        for (int k = 0; k < 181; k++) wavelength[k] = 300.0 + 5.0 * k;
        CHECK(reflectance(&s, &r, wavelength, 181, R, NULL, &e) == ST_OK);
        CHECK(sun_weighted(&am15g, wavelength, R, 181, 300.0, 1200.0, &mean, &e) == ST_OK);
        CHECK(sun_current(&am15g, 300.0, 1200.0, &current, &e) == ST_OK);
        CHECK_SOURCE(mean, cases[i].weighted, 1e-4, source);
        CHECK_SOURCE(mean * current, cases[i].current, 0.005, source);
        CHECK_SOURCE(R[20], cases[i].at400, 2e-4, source);
        CHECK_SOURCE(R[60], cases[i].at600, 2e-4, source);
        CHECK_SOURCE(R[140], cases[i].at1000, 2e-4, source);
        profile_free(&p);
    }
    material_free(&silicon);
    material_free(&air);
    material_free(&film);
    sun_free(&am15g);
    return check_done();
}

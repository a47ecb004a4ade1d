/* Heights that differ: weighted reflectance of an independent slab recursion (Bruggeman 2-D, silicon of Green 2008, AM1.5G
 * photon flux 300-1200 nm), f(z) the mean over the features, relative sd as given; log-normal heights have the same mean
 * and sd. The reference works on its own grid of heights: 0.02 points. A normal law of 40 % reaches below no height at all,
 * and where the reference cuts it is not known: 20 % for the normal, both for the log-normal law. */
#include "check.h"
#include "link/surface.h"
#include "optical_tables.h"
#include "optics/reflectance.h"

static const char source[] = "independent slab recursion with a distribution of heights";

int main(void) {
    /* clang-format off */
    static const struct { double exponent, height, base20, log20, log40, top20; } rows[] = { /* R, % */
        { 1, 100, 22.973, 23.011, 22.831, 19.348 },
        { 1, 200, 7.922, 7.991, 8.291, 6.575 },
        { 1, 300, 1.857, 1.899, 2.255, 2.050 },
        { 1, 500, 0.089, 0.096, 0.110, 0.157 },
        { 2, 100, 16.206, 16.313, 15.698, 15.980 },
        { 2, 200, 3.384, 3.540, 2.926, 4.917 },
        { 2, 300, 0.820, 0.928, 0.480, 1.757 },
        { 2, 700, 0.015, 0.019, 0.012, 0.157 },
    };
    /* clang-format on */
    material silicon = { 0 }, air = { 0 };
    sun am15g = { 0 };
    error e = { 0 };
    CHECK(table_material("silicon", &silicon) && table_sun(&am15g) && material_constant(&air, 1.0, 0.0, &e) == ST_OK);
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        const double want[4] = { rows[i].base20, rows[i].log20, rows[i].log40, rows[i].top20 };
        for (int k = 0; k < 4; k++) {
            link_options o = link_defaults();
            profile p = { 0 };
            o.exponent = rows[i].exponent;
            o.height_spread = k == 2 ? 0.4 : 0.2;
            o.lognormal = k == 1 || k == 2;
            o.level_at_tips = k == 3;
            CHECK(link_profile(rows[i].height, 300.0, NULL, 0, 0, &o, NULL, 0, &p, &e) == ST_OK);
            stack s = { .ambient = &air, .profile = &p, .substrate = &silicon };
            reflect_options r = reflect_defaults();
            double wavelength[181], R[181], mean = 0.0;
            for (int n = 0; n < 181; n++) wavelength[n] = 300.0 + 5.0 * n;
            CHECK(reflectance(&s, &r, wavelength, 181, R, NULL, &e) == ST_OK);
            CHECK(sun_weighted(&am15g, wavelength, R, 181, 300.0, 1200.0, &mean, &e) == ST_OK);
            CHECK_SOURCE(100.0 * mean, want[k], 0.02, source);
            profile_free(&p);
        }
    }
    material_free(&silicon);
    material_free(&air);
    sun_free(&am15g);
    return check_done();
}

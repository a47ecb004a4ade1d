/* Weighted means and currents: exact cases, bands between nodes, each refusal. Figures: tests/external/sun.c.
 */
#include "optics/sun.h"

#include "base/mem.h"
#include "check.h"

int main(void) {
    /* Irradiance 1/wavelength at the nodes makes the photon flux even there, and bulge by 3e-4 between far ones. */
    static const double w[] = { 300, 310, 325, 360, 400 };
    double irradiance[5], y[] = { 1, 3 }, ends[] = { 300, 400 }, flat[] = { 0.25, 0.25 }, mean = 0, part = 0,
                          whole = 0;
    for (int i = 0; i < 5; i++) irradiance[i] = 1 / w[i];
    sun s = { 0 };
    error e = { 0 };
    CHECK(sun_make(&s, "made up", 5, w, irradiance, &e) == ST_OK);
    CHECK(sun_weighted(&s, ends, y, 2, 300, 400, &mean, &e) == ST_OK);
    CHECK_NEAR(mean, 2, 5e-4);
    /* By energy: the exact trapezoids of 1/wavelength at five nodes. Photons stay photons for a current. */
    double energy = 0, moment = 0, photons = 0;
    for (int i = 1; i < 5; i++) {
        double step = w[i] - w[i - 1], a = irradiance[i - 1], b = irradiance[i];
        double p = 1 + 2 * (w[i - 1] - 300) / 100, q = 1 + 2 * (w[i] - 300) / 100;
        energy += step * (a + b) / 2;
        moment += step * (2 * a * p + a * q + b * p + 2 * b * q) / 6;
    }
    s.weight = WEIGHT_ENERGY;
    CHECK(sun_weighted(&s, ends, y, 2, 300, 400, &mean, &e) == ST_OK);
    CHECK_NEAR(mean, moment / energy, 2e-5); /* trapezoids of 1 nm */
    CHECK(sun_photon_mean(&s, ends, y, 2, 300, 400, &photons, &e) == ST_OK);
    CHECK_NEAR(photons, 2, 5e-4);
    CHECK(photons > mean);
    s.weight = WEIGHT_PHOTONS;
    /* A sun with two nodes 100 nm apart does not hide a spectrum between them. */
    static const double fine[] = { 300, 345, 350, 355, 400 }, peak[] = { 0, 0, 1, 0, 0 }, two[] = { 1, 1 };
    sun coarse = { 0 };
    CHECK(sun_make(&coarse, "", 2, ends, two, &e) == ST_OK);
    CHECK(sun_weighted(&coarse, fine, peak, 5, 300, 400, &mean, &e) == ST_OK);
    CHECK_NEAR(mean, 0.05, 1e-6);
    sun_free(&coarse);
    CHECK(sun_weighted(&s, ends, flat, 2, 307.3, 391.1, &mean, &e) == ST_OK);
    CHECK_NEAR(mean, 0.25, 1e-15);
    CHECK(sun_current(&s, 300, 400, &whole, &e) == ST_OK);
    /* The union of nodes: cutting a band at a node changes nothing. */
    CHECK(sun_current(&s, 300, 325, &mean, &e) == ST_OK);
    CHECK(sun_current(&s, 325, 400, &part, &e) == ST_OK);
    CHECK_NEAR(mean + part, whole, 1e-12 * whole);
    /* A band inside one interval, ends read off linearly. */
    CHECK(sun_current(&s, 301, 302, &part, &e) == ST_OK);
    CHECK_NEAR(part / whole, 1.0 / 100, 1e-4);
    CHECK_FAILS(sun_weighted(&s, ends, y, 2, 299, 400, &mean, &e), ST_BAD_INPUT, e,
                "the band 299:400 nm reaches beyond the solar spectrum (300 to 400 nm)");
    CHECK_FAILS(sun_weighted(&s, ends, y, 2, 400, 300, &mean, &e), ST_BAD_INPUT, e,
                "the band 400:300 nm is empty");
    static const double narrow[] = { 320, 400 }, back[] = { 300, 420, 410 }, three[] = { 1, 1, 1 };
    CHECK_FAILS(sun_weighted(&s, narrow, y, 2, 310, 400, &mean, &e), ST_BAD_INPUT, e,
                "the spectrum to be weighted (320 to 400 nm)");
    CHECK_FAILS(sun_weighted(&s, back, three, 3, 300, 400, &mean, &e), ST_BAD_INPUT, e,
                "do not ascend at number 3");
    CHECK_FAILS(sun_current(&s, 300, 401, &mean, &e), ST_BAD_INPUT, e, "choose a band inside");
    sun_free(&s);
    CHECK_FAILS(sun_make(&s, "", 1, w, irradiance, &e), ST_BAD_INPUT, e, "at least two");
    CHECK_FAILS(sun_make(&s, "", 3, back, three, &e), ST_BAD_INPUT, e, "wavelength 3");
    double dark[] = { 1, -1 };
    CHECK_FAILS(sun_make(&s, "", 2, ends, dark, &e), ST_BAD_INPUT, e, "irradiance");
    dark[0] = dark[1] = 0;
    e = (error){ 0 };
    CHECK(sun_make(&s, "", 2, ends, dark, &e) == ST_OK);
    CHECK_FAILS(sun_weighted(&s, ends, y, 2, 300, 400, &mean, &e), ST_BAD_INPUT, e, "holds no light");
    sun_free(&s);
    for (size_t i = 1; i <= 3; i++) {
        mem_fail_after(i);
        CHECK_FAILS(sun_make(&s, "", 2, ends, y, &e), ST_NO_MEMORY, e, "memory");
    }
    mem_fail_after(0);
    sun_free(&s);
    return check_done();
}

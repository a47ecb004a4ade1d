/* Light from the rear: exponential integral, limits, energy, the published statistical limit. */
#include "optics/escape.h"
#include "base/quantity.h"
#include "check.h"
#include "optical_tables.h"

static double escape(double n, double k, double wl, rear_side r, double front, double diffuse) {
    material m = { 0 };
    error e = { 0 };
    double out = -1.0;
    CHECK(material_constant(&m, n, k, &e) == ST_OK);
    CHECK(escape_share(&m, &r, 1.0, &wl, 1, &front, &diffuse, &out, &e) == ST_OK);
    material_free(&m);
    return out;
}

static void integral(void) {
    static const char table[] = "Abramowitz, Stegun (1964), table 5.4, E3(x)";
    CHECK_SOURCE(escape_diffuse_pass(0.5) / 2.0, 0.2216044, 1e-7, table);
    CHECK_SOURCE(escape_diffuse_pass(1.0) / 2.0, 0.1096920, 1e-7, table);
    CHECK_SOURCE(escape_diffuse_pass(2.0) / 2.0, 0.0301334, 1e-7, table);
    CHECK_NEAR(escape_diffuse_pass(0.0), 1.0, 0.0);
    CHECK_NEAR(escape_diffuse_pass(1.0 - 1e-9), escape_diffuse_pass(1.0 + 1e-9),
               1e-8); /* where the two ways meet */
    CHECK(escape_diffuse_pass(1e6) <= 0.0);
    for (double x = 0.01; x < 40.0; x *= 1.3) { /* Simpson over the cosine */
        double sum = 0.0;
        for (int i = 1; i <= 4000; i++) {
            double mu = i / 4000.0;
            sum += (i == 4000 ? 1.0 : i % 2 ? 4.0 : 2.0) * 2.0 * mu * exp(-x / mu) / 12000.0;
        }
        CHECK_NEAR(escape_diffuse_pass(x), sum, 1e-6);
    }
}

static void closed_forms(void) {
    rear_side mirror = { 180.0, 1.0, 1 }, straight = { 180.0, 1.0, 0 }, bare = { 180.0, MISSING, 0 };
    /* no absorption, perfect rear: all that enters comes back, scattered or not */
    CHECK_NEAR(escape(3.5, 0.0, 1150.0, mirror, 0.1, 0.15), 0.9, 1e-12);
    CHECK_NEAR(escape(3.5, 0.0, 1150.0, straight, 0.1, 0.15), 0.9 * 0.9 / (1.0 - 0.1), 1e-12);
    /* a bare lossless slab reflects 2r/(1 + r) in all */
    double r = 2.5 * 2.5 / (4.5 * 4.5);
    CHECK_NEAR(r + escape(3.5, 0.0, 1150.0, bare, r, r), 2.0 * r / (1.0 + r), 1e-12);
    CHECK_NEAR(escape(3.5, 0.0, 1150.0, (rear_side){ 180.0, 0.0, 1 }, 0.1, 0.1), 0.0, 0.0);
    CHECK_NEAR(escape(3.5, 0.0, 1150.0, (rear_side){ 0.0, 1.0, 1 }, 0.1, 0.1), 0.0, 0.0);
    CHECK(escape(3.5, 1.0, 1150.0, mirror, 0.1, 0.1) < 1e-100);
    /* weak absorption without front reflection: absorbed 4 n^2 a W / (1 + 4 n^2 a W), the rest escapes */
    double W = 180e3, n = 3.5, aW = 1e-3, k = aW * 1150.0 / (4.0 * PI * W);
    CHECK_SOURCE(1.0 - escape(n, k, 1150.0, mirror, 0.0, 0.0), 4.0 * n * n * aW / (1.0 + 4.0 * n * n * aW),
                 5e-4, "Yablonovitch (1982); Tiedje et al. (1984): statistical limit, from memory");
    CHECK(escape(n, k, 1150.0, mirror, 0.0, 0.0) < escape(n, k, 1150.0, straight, 0.0, 0.0));
}

static void energy(void) {
    for (double k = 1e-8; k < 1e-2; k *= 4.0)
        for (double R = 0.0; R <= 1.0; R += 0.25)
            for (int lambertian = 0; lambertian < 2; lambertian++) {
                rear_side thin = { 100.0, 0.8, lambertian }, thick = { 200.0, 0.8, lambertian },
                          dark = { 100.0, 0.4, lambertian };
                double a = escape(3.55, k, 1100.0, thin, R, R);
                CHECK(a >= 0.0 && R + a <= 1.0 + 1e-15);
                CHECK(escape(3.55, k, 1100.0, thick, R, R) <= a && escape(3.55, k, 1100.0, dark, R, R) <= a);
            }
}

static void silicon_wafer(void) {
    material silicon = { 0 };
    error e = { 0 };
    double wl[4] = { 900.0, 1000.0, 1100.0, 1200.0 }, R[4] = { 0.02, 0.02, 0.02, 0.02 }, out[4];
    rear_side r = { 170.0, MISSING, 1 };
    CHECK(table_material("silicon", &silicon));
    CHECK(escape_share(&silicon, &r, 1.0, wl, 4, R, R, out, &e) == ST_OK);
    CHECK(out[0] < 1e-3 && out[1] < 0.02 && out[1] > out[0] && out[2] > 0.1 && out[3] > out[2]);
    /* straight double pass through 170 um without losses elsewhere: about 11 % at 1000 nm, 89 % at 1100 nm (absorption 64
     * and 3.5 per cm; from memory) */
    r = (rear_side){ 170.0, 1.0, 0 };
    double none[4] = { 0.0, 0.0, 0.0, 0.0 };
    CHECK(escape_share(&silicon, &r, 1.0, wl, 4, none, none, out, &e) == ST_OK);
    CHECK_SOURCE(out[1], 0.11, 0.015, "double pass of 170 um, common figure");
    CHECK_SOURCE(out[2], 0.89, 0.01, "double pass of 170 um, common figure");
    r.rear_reflectance = 1.2;
    CHECK_FAILS(escape_share(&silicon, &r, 1.0, wl, 4, R, R, out, &e), ST_BAD_INPUT, e,
                "the rear reflects 1.2");
    r.rear_reflectance = 0.9;
    wl[0] = 100.0;
    CHECK_FAILS(escape_share(&silicon, &r, 1.0, wl, 4, R, R, out, &e), ST_BAD_INPUT, e, "silicon");
    material_free(&silicon);
}

int main(void) {
    integral();
    closed_forms();
    energy();
    silicon_wafer();
    return check_done();
}

/* Where the height comes from, its uncertainty, and the area of the surface. */
#include "link/surface.h"

#include "check.h"

static const quantity none = { (double)NAN, (double)NAN, 0 };

static void heights(void) {
    error e = { 0 };
    link_options o = link_defaults();
    quantity sheet = { 341.3, 12.5, 3 }, spacing = { 322.7, 6.1, 400 }, h = { 0 };
    height_source src = HEIGHT_DEFAULT;
    o.height_nm = 290.0;
    o.aspect = 1.7;
    CHECK(link_height(sheet, &o, spacing, &h, &src, &e) == ST_OK && src == HEIGHT_SHEET && h.n == 3);
    CHECK_NEAR(h.value, 341.3, 0.0);
    CHECK_NEAR(h.u, 12.5, 0.0);
    CHECK(link_height(none, &o, spacing, &h, &src, &e) == ST_OK && src == HEIGHT_PROTOCOL);
    CHECK_NEAR(h.value, 290.0, 0.0);
    CHECK(isnan(h.u)); /* not said: not known */
    o.height_nm = MISSING;
    o.aspect_u = 0.2;
    CHECK(link_height(none, &o, spacing, &h, &src, &e) == ST_OK && src == HEIGHT_ASPECT);
    CHECK_NEAR(h.value, 1.7 * 322.7, 1e-9);
    CHECK_NEAR(h.u, sqrt(0.2 * 322.7 * 0.2 * 322.7 + 1.7 * 6.1 * 1.7 * 6.1), 1e-9);
    o.aspect = MISSING;
    CHECK(link_height(none, &o, spacing, &h, &src, &e) == ST_OK && src == HEIGHT_DEFAULT);
    CHECK_NEAR(h.value, 322.7, 1e-12);
    CHECK_NEAR(h.u, sqrt(0.3 * 322.7 * 0.3 * 322.7 + 6.1 * 6.1), 1e-9);
    CHECK_FAILS(link_height(none, &o, none, &h, &src, &e), ST_NO_RESULT, e, "give height_nm");
    o.aspect = -0.5;
    CHECK_FAILS(link_height(none, &o, spacing, &h, &src, &e), ST_BAD_INPUT, e, "aspect");
    o.height_nm = -3.0;
    CHECK_FAILS(link_height(none, &o, spacing, &h, &src, &e), ST_BAD_INPUT, e, "height_nm");
    sheet.value = -1.0;
    CHECK_FAILS(link_height(sheet, &o, spacing, &h, &src, &e), ST_BAD_INPUT, e, "sample sheet");
    CHECK(!height_is_assumed(HEIGHT_SHEET) && !height_is_assumed(HEIGHT_CALIBRATED));
    CHECK(height_is_assumed(HEIGHT_PROTOCOL) && height_is_assumed(HEIGHT_ASPECT) && height_is_assumed(HEIGHT_DEFAULT));
    CHECK(!strcmp(height_source_name(HEIGHT_CALIBRATED), "calibrated"));
    CHECK(!strcmp(height_source_name(HEIGHT_DEFAULT), "default"));
}

/* Lateral area of a paraboloid of revolution, r = b at the foot, over its base area. */
static double paraboloid(double h, double b) {
    return (pow(b * b + 4.0 * h * h, 1.5) - b * b * b) / (6.0 * h * h * b);
}

static void area(void) {
    link_options o = link_defaults();
    double R = sqrt(sqrt(3.0) / 2.0 * 300.0 * 300.0 / PI), h = 347.0;
    CHECK_NEAR(link_area_ratio(h, 300.0, &o), sqrt(1.0 + h * h / (R * R)), 1e-12);
    o.coverage = 0.6;
    double b = R * sqrt(0.6);
    CHECK_NEAR(link_area_ratio(h, 300.0, &o), 0.4 + 0.6 * sqrt(1.0 + h * h / (b * b)), 1e-12);
    o.coverage = 1.0;
    o.exponent = 2.0;
    CHECK_NEAR(link_area_ratio(h, 300.0, &o), paraboloid(h, R), 1e-8);
    o.exponent = 0.5; /* needles: between flat + wall of a cylinder and the cone */
    double needle = link_area_ratio(h, 300.0, &o);
    o.exponent = 1.0 + 1e-6;
    CHECK_NEAR(link_area_ratio(h, 300.0, &o), sqrt(1.0 + h * h / (R * R)), 1e-5); /* number meets closed form */
    o.exponent = 1.0;
    CHECK(needle < link_area_ratio(h, 300.0, &o) && needle > 1.0);
    CHECK_NEAR(link_area_ratio(0.0, 300.0, &o), 1.0, 0.0);
    o.coverage = 0.0;
    CHECK_NEAR(link_area_ratio(h, 300.0, &o), 1.0, 0.0);
    CHECK(isnan(link_area_ratio(h, MISSING, &o)) && isnan(link_area_ratio(-1.0, 300.0, &o)));
    o.coverage = 1.0;
    o.height_spread = 0.2; /* the mean of a convex function of height */
    CHECK(link_area_ratio(h, 300.0, &o) > sqrt(1.0 + h * h / (R * R)));
    CHECK_NEAR(link_area_ratio(h, 300.0, &o), sqrt(1.0 + h * h / (R * R)), 0.05);
}

int main(void) {
    heights();
    area();
    return check_done();
}

/* The second look: a texture under strong large-scale brightness has its scale, noise of any width has none. */
#include "metrics/scale.h"

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "metrics/filter.h"
#include "planes.h"

enum { NX = 400, NY = 360 };

static void put_cone(float *f, size_t nx, size_t ny, double x, double y, double size, double h) {
    raise_cone(f, nx, ny, x, y, size, h);
}

static void check_islands(void) {
    float *f = plane_new(NX, NY);
    dice d = { 9 };
    error e = { 0 };
    first_scale s;
    hexagonal(f, NX, NY, 20.0, 0.1, 1.0, 15.0, put_cone, &d);
    for (int k = 0; k < 12; k++) add_bump(f, NX, NY, NX * dice_uniform(&d), NY * dice_uniform(&d), 45.0, 1.5);
    acf2d a = { 0 };
    curve c = { 0 };
    CHECK(acf2d_make(f, NX, NY, NY / 2, &a, &e) == ST_OK && acf_radial(&a, &c, &e) == ST_OK);
    spacing_first_scale(&c, NX, NY, &s);
    CHECK(!(s.z >= 6.0) || s.scale_px > 40.0); /* the plain curve does not show it */
    CHECK(scale_without_background(f, NX, NY, 6.0, &s, &e) == ST_OK);
    CHECK_NEAR(s.scale_px, 20.0, 4.0);
    CHECK(s.z >= 6.0);
    mem_fail_after(1);
    CHECK_FAILS(scale_without_background(f, NX, NY, 6.0, &s, &e), ST_NO_MEMORY, e, "memory");
    mem_fail_after(0);
    free(c.points);
    acf2d_free(&a);
    free(f);
}

static void check_noise(double blur) {
    float *f = plane_new(NX, NY);
    dice d = { 77 };
    error e = { 0 };
    first_scale s;
    add_noise(f, NX * NY, 1.0, &d);
    CHECK(filter_gauss(f, NX, NY, blur, f, &e) == ST_OK);
    CHECK(scale_without_background(f, NX, NY, 6.0, &s, &e) == ST_OK);
    CHECK(isnan(s.scale_px) && isnan(s.first_minimum_px) && !(s.z > 0.0));
    free(f);
}

int main(void) {
    check_islands();
    check_noise(0.0);
    check_noise(1.5);
    check_noise(4.0);
    check_noise(9.0);
    return check_done();
}

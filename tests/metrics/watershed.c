/* Cells: a row of cones, a hexagonal field (C-15), what is said of cells, and the errors of the header. */
#include "metrics/watershed.h"

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "metrics/sizes.h"
#include "planes.h"

static void check_description(void) {
    enum { W = 12, H = 10 };
    uint32_t cells[W * H];
    feature f[4];
    error e = { 0 };
    for (size_t i = 0; i < W * H; i++) {
        size_t x = i % W, y = i / W;
        cells[i] = x < 3 ? 1 : y < 2 ? 2 : x >= 5 && x < 9 && y >= 4 && y < 7 ? 4 : 3;
    }
    memset(f, 0, sizeof f);
    CHECK(cells_describe(cells, W, H, f, 4, &e) == ST_OK);
    CHECK_NEAR(f[0].cell_area_px2, 30.0, 0.0);
    CHECK_NEAR(f[3].cell_area_px2, 12.0, 0.0);
    CHECK_NEAR(f[3].cell_ecd_px, 2.0 * sqrt(12.0 / PI), 1e-12);
    CHECK(f[3].box_x0 == 5 && f[3].box_x1 == 8 && f[3].box_y0 == 4 && f[3].box_y1 == 6);
    CHECK_NEAR(f[3].feret_max_px, 5.0, 1e-12); /* corners of 4 x 3 pixels */
    CHECK_NEAR(f[3].feret_min_px, 3.0, 1e-12);
    CHECK_NEAR(f[3].weight, 12.0 * 10.0 / (9.0 * 8.0), 1e-12);
    CHECK(!(f[0].weight > 0.0) && !(f[1].weight > 0.0) && !(f[2].weight > 0.0)); /* touch the frame */
    CHECK(f[0].n_neighbours == 2 && f[1].n_neighbours == 2 && f[2].n_neighbours == 3 &&
          f[3].n_neighbours == 1);
}

static void put_cone(float *f, size_t nx, size_t ny, double x, double y, double size, double h) {
    raise_cone(f, nx, ny, x, y, size, h);
}

/* C-15: the cells of a hexagonal field are alike; they have six neighbours, and fill the field. */
static void check_hexagonal(int sign) {
    enum { NX = 400, NY = 360 };
    float *f = plane_new(NX, NY);
    uint32_t *cells = calloc(NX * NY, sizeof *cells);
    detection d = { 0 };
    error e = { 0 };
    hexagonal(f, NX, NY, 24.0, 0.0, 1.0, 18.0, put_cone, NULL);
    for (size_t i = 0; i < NX * NY; i++) f[i] *= (float)sign;
    CHECK(detect(f, NX, NY, 24.0, sign, 0.0, &d, &e) == ST_OK);
    CHECK(watershed(f, NX, NY, sign, &d, cells, &e) == ST_OK);
    double sum = 0.0, area = 0.0, area2 = 0.0, n = 0.0;
    size_t six = 0;
    for (size_t i = 0; i < d.n; i++) {
        const feature *c = &d.features[i];
        sum += c->cell_area_px2;
        if (!(c->weight > 0.0)) continue;
        area += c->cell_area_px2;
        area2 += c->cell_area_px2 * c->cell_area_px2;
        n += 1.0;
        six += c->n_neighbours == 6;
        CHECK_NEAR(c->feret_min_px, 24.0, 2.5);
        CHECK_NEAR(c->feret_max_px, 24.0 * 1.1547, 2.5);
        CHECK(c->top_ecd_px > 5.0 && c->top_ecd_px < c->cell_ecd_px);
    }
    area /= n;
    CHECK_NEAR(sum, NX * NY, 0.0);
    CHECK_SOURCE(area, sqrt(0.75) * 24.0 * 24.0, 0.01 * 499.0, "C-15 geometry");
    CHECK_SOURCE(sqrt(fmax(0.0, area2 / n - area * area)) / area, 0.0, 0.03, "C-15 equal cells");
    CHECK((double)six > 0.97 * n);
    detection_free(&d);
    free(cells);
    free(f);
}

static void check_errors(void) {
    enum { S = 40 };
    float f[S * S];
    uint32_t cells[S * S], marker[2] = { 10 * S + 10, 10 * S + 30 };
    feature two[2];
    detection none = { 0 }, d = { .features = two, .marker = marker, .n = 2, .scale_px = 20.0 };
    error e = { 0 };
    memset(two, 0, sizeof two);
    memset(f, 0, sizeof f);
    CHECK_FAILS(watershed(f, S, S, 1, &none, cells, &e), ST_BAD_INPUT, e, "single feature");
    CHECK(watershed(f, S, S, 1, &d, cells, &e) == ST_OK); /* a flat picture is shared by distance */
    CHECK_NEAR(two[0].cell_area_px2 + two[1].cell_area_px2, S * S, 0.0);
    CHECK_NEAR(two[0].cell_area_px2, S * S / 2.0, 0.1 * S * S);
    for (size_t k = 1; k < 12; k++) {
        mem_fail_after(k);
        CHECK_FAILS(watershed(f, S, S, 1, &d, cells, &e), ST_NO_MEMORY, e, "memory");
        mem_fail_after(0);
    }
}

int main(void) {
    check_description();
    check_hexagonal(1);
    check_hexagonal(-1);
    check_errors();
    return check_done();
}

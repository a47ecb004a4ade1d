/* The rear side in a prediction: only where the wafer is clear, in the interval, in the current, never beyond 1. */
#include "base/quantity.h"
#include "bare_silicon.h"
#include "check.h"
#include "link/predict.h"

static prediction ask(double thickness, double back, int lambertian, double height, double spacing,
                      double height_u) {
    optics_setup o = setup();
    o.rear = (rear_side){ thickness, back, lambertian };
    surface_input in = { .spacing_nm = { spacing, 0.0, 1 },
                         .height_nm = { height, height_u, 1 },
                         .link = link_defaults() };
    error e = { 0 };
    prediction p = { 0 };
    CHECK(predict(&in, &o, &p, &e) == ST_OK);
    for (size_t i = 0; i < p.n; i++) CHECK(p.R_lo[i] <= p.R[i] && p.R[i] <= p.R_hi[i] && p.R_hi[i] <= 1.0);
    double mean = 0.0, all = 0.0;
    CHECK(sun_weighted(&am15g, p.wavelength_nm, p.R, p.n, 300.0, 1200.0, &mean, &e) == ST_OK);
    CHECK(sun_current(&am15g, 300.0, 1200.0, &all, &e) == ST_OK);
    CHECK_NEAR(p.weighted, mean, 1e-12);
    CHECK_NEAR(p.current_loss_mA_cm2, mean * all, 1e-10);
    return p;
}

static void compare(double height, double spacing) {
    prediction off = ask(0.0, MISSING, 1, height, spacing, 20.0),
               on = ask(170.0, MISSING, 1, height, spacing, 20.0);
    prediction straight = ask(170.0, MISSING, 0, height, spacing, 20.0),
               mirror = ask(170.0, 1.0, 0, height, spacing, 20.0);
    CHECK(isnan(off.rear_escape) && strstr(off.note, "Front surface only"));
    CHECK(strstr(on.note, "Lambertian") && strstr(on.note, "bare rear") &&
          !strstr(on.note, "Front surface only"));
    CHECK(strstr(straight.note, "straight double pass") && strstr(mirror.note, "the rear reflects 100 %"));
    CHECK_NEAR(on.weighted - off.weighted, on.rear_escape, 1e-12);
    CHECK(on.rear_escape > 0.005 && on.rear_escape < 0.08);
    /* like with like: the flat references have the same rear, and a polished sample is its own reference */
    CHECK(on.polished > off.polished + 0.005 && on.coated > off.coated + 0.005);
    CHECK(straight.polished > off.polished && straight.polished < mirror.polished);
    if (!(height > 0.0)) {
        CHECK_NEAR(on.polished, on.weighted, 1e-12);
        CHECK_NEAR(mirror.polished, mirror.weighted, 1e-12);
    }
    CHECK(straight.rear_escape < mirror.rear_escape);
    CHECK(on.weighted_lo <= on.weighted && on.weighted <= on.weighted_hi &&
          on.weighted_lo >= off.weighted_lo);
    for (size_t i = 0; i < on.n; i++) {
        if (on.wavelength_nm[i] <= 880.0) CHECK_NEAR(on.R[i], off.R[i], 1e-4);
        if (on.wavelength_nm[i] >= 1150.0) CHECK(on.R[i] > off.R[i] + 0.1);
    }
    prediction_free(&off);
    prediction_free(&on);
    prediction_free(&straight);
    prediction_free(&mirror);
}

int main(void) {
    error e = { 0 };
    CHECK(table_material("silicon", &silicon) && table_material("nitride", &nitride) && table_sun(&am15g) &&
          material_constant(&air, 1.0, 0.0, &e) == ST_OK);
    compare(350.0, 330.0);
    compare(3535.5, 5000.0); /* facets */
    compare(0.0, 330.0);     /* planar */
    material_free(&silicon);
    material_free(&nitride);
    material_free(&air);
    sun_free(&am15g);
    return check_done();
}

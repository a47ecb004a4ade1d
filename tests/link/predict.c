/* One prediction: grid, references, budget, planar and refused cases, words, errors. */
#include <stdlib.h>

#include "base/mem.h"
#include "check.h"
#include "link/predict.h"
#include "optical_tables.h"

static material silicon, air, nitride, glass, encapsulant;
static sun am15g;

static optics_setup setup(void) {
    return (optics_setup){ .ambient = &air, .substrate = &silicon, .air = &air, .nitride = &nitride,
                           .mixing = MIX_BRUGGEMAN_2D, .reflect = reflect_defaults(), .sun = &am15g,
                           .band_lo_nm = 300.0, .band_hi_nm = 1200.0, .step_nm = 10.0 };
}
static surface_input cones(double height, double spacing) {
    return (surface_input){ .spacing_nm = { spacing, 0.0, 1 }, .height_nm = { height, 0.0, 1 },
                            .link = link_defaults() };
}
static prediction ask(const surface_input *in, const optics_setup *o) {
    error e = { 0 };
    prediction p = { 0 };
    CHECK(predict(in, o, &p, &e) == ST_OK);
    if (e.text[0]) printf("%s\n", e.text);
    return p;
}
static int holds(const prediction *p) {
    int ok = p->weighted_lo <= p->weighted && p->weighted <= p->weighted_hi && p->weighted_lo >= 0.0;
    for (size_t i = 0; i < p->n; i++)
        ok = ok && p->R_lo[i] <= p->R[i] && p->R[i] <= p->R_hi[i] && p->R_lo[i] >= 0.0 && p->R_hi[i] <= 1.0;
    return ok;
}

static void usual(void) {
    optics_setup o = setup();
    surface_input in = cones(313.0, 287.0);
    o.band_lo_nm = 305.0;
    o.step_nm = 7.0; /* 127 whole steps and one shorter */
    prediction p = ask(&in, &o);
    CHECK(p.n == 129 && holds(&p) && !p.refused && !strcmp(p.model, "graded") && p.slabs > 0);
    CHECK_NEAR(p.wavelength_nm[0], 305.0, 0.0);
    CHECK_NEAR(p.wavelength_nm[1], 312.0, 1e-12);
    CHECK_NEAR(p.wavelength_nm[127], 1194.0, 1e-9);
    CHECK_NEAR(p.wavelength_nm[128], 1200.0, 0.0);
    CHECK_NEAR(p.aspect, 313.0 / 287.0, 1e-12);
    CHECK_NEAR(p.area_ratio, link_area_ratio(313.0, 287.0, &in.link), 1e-12);
    CHECK_NEAR(p.shares.none + p.shares.in_substrate + p.shares.in_ambient, 1.0, 1e-12);
    double current = 0.0, mean = 0.0;
    error e = { 0 };
    CHECK(sun_current(&am15g, 305.0, 1200.0, &current, &e) == ST_OK);
    CHECK(sun_weighted(&am15g, p.wavelength_nm, p.R, p.n, 305.0, 1200.0, &mean, &e) == ST_OK);
    CHECK_NEAR(p.current_loss_mA_cm2, p.weighted * current, 1e-12);
    CHECK_NEAR(p.weighted, mean, 1e-15);
    CHECK(fabs(p.u_height) + fabs(p.u_shape) + fabs(p.u_spread) <= 0.0 && p.u_model > 0.0 && p.u_mixing > 0.0);
    CHECK(p.model_bias < 0.0); /* the graded index is too low here, so the truth lies higher */
    CHECK(p.weighted_hi - p.weighted > p.weighted - p.weighted_lo);
    CHECK(strstr(p.note, "rear") && strstr(p.note, "model's own error"));
    prediction_free(&p);
    prediction_free(&p);
}

static void budget(void) {
    optics_setup o = setup();
    surface_input in = cones(300.0, 290.0);
    prediction plain = ask(&in, &o), p;
    in.height_nm.u = 30.0;
    p = ask(&in, &o);
    surface_input low = cones(270.0, 290.0), high = cones(330.0, 290.0);
    prediction a = ask(&low, &o), b = ask(&high, &o);
    CHECK_NEAR(p.u_height, 0.5 * (a.weighted - b.weighted), 1e-6);
    CHECK(p.weighted_hi > plain.weighted_hi && strstr(p.note, "the height (+- 30 nm)"));
    /* falling about exponentially: a lower height costs more than a greater one gains */
    CHECK(a.weighted - p.weighted > p.weighted - b.weighted);
    prediction_free(&a);
    prediction_free(&b);
    prediction_free(&p);
    in.height_nm.u = MISSING;
    p = ask(&in, &o);
    CHECK(strstr(p.note, "uncertainty is unknown") && fabs(p.u_height) <= 0.0);
    prediction_free(&p);
    in.height_nm.u = 0.0;
    in.link.exponent_u = 0.5;
    p = ask(&in, &o);
    CHECK(p.u_shape > 0.001 && p.weighted_hi > plain.weighted_hi && strstr(p.note, "the shape") && holds(&p));
    prediction_free(&p);
    in.link.exponent_u = 0.0;
    in.link.height_spread = 0.2;
    p = ask(&in, &o);
    in.link.level_at_tips = 1;
    b = ask(&in, &o);
    CHECK_NEAR(p.u_spread, 0.5 * fabs(p.weighted - b.weighted), 2e-6);
    CHECK_NEAR(b.u_spread, p.u_spread, 2e-6);
    CHECK(p.weighted_lo <= b.weighted && b.weighted <= p.weighted_hi && strstr(p.note, "level tips"));
    prediction_free(&p);
    prediction_free(&b);
    in = cones(300.0, 290.0);
    in.spacing_nm.u = 60.0; /* the bias depends on the spacing */
    p = ask(&in, &o);
    CHECK(p.weighted_hi > plain.weighted_hi);
    prediction_free(&p);
    prediction_free(&plain);
}

/* The sharp interval is made for AM1.5G from 300 to 1200 nm: another sun or band gets the general, wider one. */
static void sharp(void) {
    optics_setup o = setup();
    surface_input in = cones(350.0, 290.0);
    prediction own = ask(&in, &o), p;
    double ends[2] = { 250.0, 1300.0 }, even[2] = { 1.0, 1.0 };
    sun lamp = { 0 };
    error e = { 0 };
    CHECK(sun_make(&lamp, "a lamp", 2, ends, even, &e) == ST_OK);
    o.sun = &lamp;
    p = ask(&in, &o);
    CHECK(p.weighted_hi - p.weighted_lo > 1.3 * (own.weighted_hi - own.weighted_lo));
    prediction_free(&p);
    sun_free(&lamp);
    o = setup();
    o.band_hi_nm = 1190.0;
    p = ask(&in, &o);
    CHECK(p.weighted_hi - p.weighted_lo > 1.3 * (own.weighted_hi - own.weighted_lo));
    prediction_free(&p);
    prediction_free(&own);
}

static void mixings(void) {
    optics_setup o = setup();
    surface_input in = cones(300.0, 290.0);
    prediction b2d = ask(&in, &o);
    o.mixing = MIX_MAXWELL_GARNETT_2D;
    prediction mg = ask(&in, &o);
    CHECK_NEAR(b2d.u_mixing, mg.weighted - b2d.weighted, 1e-5);
    CHECK_NEAR(mg.u_mixing, b2d.u_mixing, 1e-9);
    o.mixing = MIX_VOLUME; /* a poor rule moves the plain value, not where the truth is looked for */
    prediction v = ask(&in, &o);
    CHECK(holds(&v) && fabs(v.weighted_hi - b2d.weighted_hi) < 0.02);
    prediction_free(&b2d);
    prediction_free(&mg);
    prediction_free(&v);
}

static void planar(void) {
    optics_setup o = setup();
    layer film = { &nitride, 75.0 };
    surface_input in = cones(0.0, MISSING);
    o.step_nm = 5.0;
    prediction p = ask(&in, &o);
    CHECK_NEAR(p.weighted, p.polished, 1e-12);
    CHECK_NEAR(p.weighted_lo, p.weighted, 0.0);
    CHECK_NEAR(p.weighted_hi, p.weighted, 0.0);
    CHECK(memcmp(p.R, p.R_lo, p.n * sizeof *p.R) == 0 && memcmp(p.R, p.R_hi, p.n * sizeof *p.R) == 0);
    CHECK_NEAR(p.area_ratio, 1.0, 0.0);
    CHECK(strstr(p.note, "Planar") && !p.refused);
    prediction_free(&p);
    o.coatings = &film;
    o.n_coatings = 1;
    in.spacing_nm.value = 6000.0; /* no texture, so nothing to refuse */
    p = ask(&in, &o);
    CHECK_NEAR(p.weighted, p.coated, 1e-12);
    CHECK(!p.refused);
    prediction_free(&p);
}

static void refused(void) {
    optics_setup o = setup();
    surface_input in = cones(3500.0, 5000.0);
    prediction p = ask(&in, &o);
    CHECK(p.refused && !strcmp(p.model, "none") && isnan(p.weighted) && isnan(p.weighted_hi) && isnan(p.R[3]));
    CHECK(isnan(p.current_loss_mA_cm2) && p.polished > 0.3 && p.coated > 0.05 && p.shares.in_ambient > 0.99);
    CHECK(strstr(p.note, "No reflectance: with a spacing of 5000 nm 100 %") && strstr(p.note, "geometric optics"));
    prediction_free(&p);
    in = cones(1000.0, 1000.0); /* most of the photons diffracted: predicted, wide, and said */
    p = ask(&in, &o);
    CHECK(!p.refused && strstr(p.note, "diffracted out") && holds(&p));
    prediction_free(&p);
}

static void others(void) {
    optics_setup o = setup();
    surface_input in = cones(300.0, 290.0);
    prediction bare = ask(&in, &o), p;
    in.pores = 1;
    p = ask(&in, &o);
    CHECK(holds(&p) && fabs(p.weighted - bare.weighted) > 1e-3 && strstr(p.note, "carried over"));
    prediction_free(&p);
    in.pores = 0;
    in.spacing_nm.value = MISSING;
    p = ask(&in, &o);
    CHECK(isnan(p.weighted_lo) && isnan(p.R_hi[0]) && isnan(p.shares.none) && isnan(p.aspect) && isnan(p.area_ratio));
    CHECK_NEAR(p.weighted, bare.weighted, 1e-12);
    CHECK(strstr(p.note, "spacing is unknown"));
    prediction_free(&p);

    profile measured = { 0 }; /* a measured profile replaces height and shape */
    error e = { 0 };
    CHECK(link_profile(300.0, 290.0, NULL, 0, 0, &in.link, NULL, 0, &measured, &e) == ST_OK);
    in.measured = &measured;
    in.height_nm = (quantity){ MISSING, MISSING, 0 };
    p = ask(&in, &o);
    CHECK_NEAR(p.weighted, bare.weighted, 1e-12);
    prediction_free(&p);
    in.spacing_nm.value = 290.0;
    p = ask(&in, &o);
    CHECK(p.weighted_hi > bare.weighted_hi); /* no shape that was calculated case by case */
    CHECK(strstr(p.note, "not that of the profile"));
    double general = p.weighted_hi - p.weighted_lo;
    prediction_free(&p);
    profile_free(&measured);

    o.front = (laminate){ &glass, 3.2, &encapsulant, 0.45 };
    in = cones(300.0, 290.0);
    p = ask(&in, &o); /* glass face above 0.04, less contrast below */
    CHECK(holds(&p) && p.weighted > 0.03 && p.polished < bare.polished && p.polished > p.coated);
    CHECK(p.weighted_hi - p.weighted_lo < general);
    prediction_free(&p);
    o = setup();
    o.reflect.angle_deg = 60.0;
    p = ask(&in, &o);
    CHECK(holds(&p) && p.weighted_hi - p.weighted_lo > bare.weighted_hi - bare.weighted_lo);
    prediction_free(&p);
    layer film = { &nitride, 40.0 };
    o = setup();
    o.coatings = &film;
    o.n_coatings = 1;
    in.spacing_nm.u = 20.0;
    p = ask(&in, &o);
    CHECK(holds(&p));
    prediction_free(&p);
    prediction_free(&bare);
}

static void errors(void) {
    error e = { 0 };
    prediction p;
    optics_setup o = setup();
    surface_input in = cones(300.0, 290.0);
    o.band_hi_nm = 250.0;
    CHECK_FAILS(predict(&in, &o, &p, &e), ST_BAD_INPUT, e, "band");
    CHECK(p.n == 0 && !p.R);
    o = setup();
    o.step_nm = 0.0;
    CHECK_FAILS(predict(&in, &o, &p, &e), ST_BAD_INPUT, e, "step");
    o.step_nm = 1e-4;
    CHECK_FAILS(predict(&in, &o, &p, &e), ST_BAD_INPUT, e, "step");
    o = setup();
    in.spacing_nm.value = -5.0;
    CHECK_FAILS(predict(&in, &o, &p, &e), ST_BAD_INPUT, e, "spacing");
    in = cones(-1.0, 290.0);
    CHECK_FAILS(predict(&in, &o, &p, &e), ST_BAD_INPUT, e, "height_nm");
    in = cones(300.0, 290.0);
    o.band_lo_nm = 200.0; /* the table of silicon starts at 250 */
    CHECK_FAILS(predict(&in, &o, &p, &e), ST_BAD_INPUT, e, "");
    o = setup();
    o.reflect.angle_deg = 95.0;
    CHECK_FAILS(predict(&in, &o, &p, &e), ST_BAD_INPUT, e, "angle");
    o = setup();
    o.band_lo_nm = 600.0;
    o.band_hi_nm = 604.0; /* narrower than the coarse grid */
    o.step_nm = 1.0;
    p = ask(&in, &o);
    CHECK(p.n == 5 && holds(&p));
    prediction_free(&p);
    o = setup();
    o.step_nm = 100.0; /* the coarse grid follows: quick */
    size_t n = 1;
    for (status st = ST_NO_MEMORY; st != ST_OK && n < 1000; n++) { /* every allocation fails once */
        e = (error){ 0 };
        mem_fail_after(n);
        st = predict(&in, &o, &p, &e);
        mem_fail_after(0);
        if (st == ST_OK) prediction_free(&p);
        else if (st != ST_NO_MEMORY || !e.text[0] || p.n) CHECK(st == ST_NO_MEMORY && e.text[0] && !p.n);
    }
    CHECK(n > 20 && n < 1000);
}

int main(void) {
    error e = { 0 };
    CHECK(table_material("silicon", &silicon) && table_material("nitride", &nitride) &&
          table_material("glass", &glass) && table_material("encapsulant", &encapsulant) && table_sun(&am15g) &&
          material_constant(&air, 1.0, 0.0, &e) == ST_OK);
    usual();
    budget();
    sharp();
    mixings();
    planar();
    refused();
    others();
    errors();
    material_free(&silicon);
    material_free(&nitride);
    material_free(&glass);
    material_free(&encapsulant);
    material_free(&air);
    sun_free(&am15g);
    return check_done();
}

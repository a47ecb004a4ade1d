/* Monte Carlo of a prediction: determinism, agreement with the first-order interval where that is right, the surface
 * against the solver, the budget, refusals. */
#include "link/trials.h"

#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "bare_silicon.h"
#include "check.h"

static surface_input cones(double height, double height_u, double spacing) {
    return (surface_input){ .spacing_nm = { spacing, 0.0, 1 },
                            .height_nm = { height, height_u, 1 },
                            .link = link_defaults() };
}
static distribution ask(const surface_input *in, const optics_setup *o, uint64_t seed) {
    trial_options t = trial_defaults();
    error e = { 0 };
    distribution d = { 0 };
    t.seed = seed;
    CHECK(predict_trials(in, o, &t, &d, &e) == ST_OK);
    if (e.text[0]) printf("%s\n", e.text);
    CHECK(d.settled && d.trials >= 20000 && d.lo >= 0.0 && d.lo <= d.median && d.median <= d.hi &&
          d.hi < 1.0);
    for (size_t i = 0; i < d.n; i++) CHECK(d.R_lo[i] >= 0.0 && d.R_lo[i] <= d.R_hi[i] && d.R_hi[i] <= 1.0);
    return d;
}

static void repeats(void) {
    optics_setup o = setup();
    surface_input in = cones(350.0, 30.0, 320.0);
    distribution a = ask(&in, &o, 7), b = ask(&in, &o, 7), c = ask(&in, &o, 8);
    CHECK(!memcmp(&a.mean, &b.mean, sizeof a.mean) && !memcmp(&a.lo, &b.lo, sizeof a.lo) &&
          !memcmp(&a.hi, &b.hi, sizeof a.hi));
    CHECK(!memcmp(a.R_hi, b.R_hi, a.n * sizeof *a.R_hi) && !memcmp(a.sd_of, b.sd_of, sizeof a.sd_of));
    CHECK(fabs(a.mean - c.mean) > 0.0 && fabs(a.lo - c.lo) < 1.5e-3 &&
          fabs(a.hi - c.hi) < 1.5e-3); /* three times the tolerance */
    CHECK(a.n == 91);
    CHECK_NEAR(a.wavelength_nm[90], 1200.0, 0.0);
    distribution_free(&a);
    distribution_free(&b);
    distribution_free(&c);
    distribution_free(&c);
}

/* Only the model's error: a normal distribution about the truth, cut at 3 sd (whose sd is 0.9867). */
static void model_only(void) {
    optics_setup o = setup();
    surface_input in = cones(300.0, 0.0, 290.0);
    distribution d = ask(&in, &o, 1);
    prediction p = { 0 };
    error e = { 0 };
    CHECK(predict(&in, &o, &p, &e) == ST_OK);
    CHECK_NEAR(d.mean, p.weighted - p.model_bias, 1e-4);
    CHECK_NEAR(d.sd, 0.9867 * p.u_model, 0.02 * p.u_model);
    CHECK_NEAR(d.hi, p.weighted - p.model_bias + 1.95 * p.u_model, 0.05 * p.u_model);
    CHECK(d.hi <= p.weighted_hi && d.lo >= p.weighted_lo);
    CHECK_NEAR(d.sd_of[INPUT_MODEL], d.sd, 0.03 * d.sd);
    CHECK(d.sd_of[INPUT_HEIGHT] + d.sd_of[INPUT_SHAPE] + d.sd_of[INPUT_LEVEL] + d.sd_of[INPUT_SPACING] <
          1e-12);
    prediction_free(&p);
    distribution_free(&d);
}

/* A small height error is linear: the sd is the slope, which two predictions give. */
static void linear(void) {
    optics_setup o = setup();
    surface_input in = cones(250.0, 4.0, 250.0), low = cones(246.0, 0.0, 250.0),
                  high = cones(254.0, 0.0, 250.0);
    distribution d = ask(&in, &o, 1);
    prediction a = { 0 }, b = { 0 };
    error e = { 0 };
    CHECK(predict(&low, &o, &a, &e) == ST_OK && predict(&high, &o, &b, &e) == ST_OK);
    double slope = 0.5 * ((a.weighted - a.model_bias) - (b.weighted - b.model_bias));
    CHECK_NEAR(d.sd_of[INPUT_HEIGHT], 0.9867 * slope, 0.05 * slope);
    prediction_free(&a);
    prediction_free(&b);
    distribution_free(&d);
}

/* Every input at work; the ranks make sense; the interval grows with each. */
static void budget(void) {
    optics_setup o = setup();
    surface_input in = cones(350.0, 35.0, 330.0);
    distribution height = ask(&in, &o, 1);
    in.link.exponent_u = 0.5;
    distribution shape = ask(&in, &o, 1);
    in.link.height_spread = 0.2;
    in.spacing_nm.u = 40.0;
    distribution all = ask(&in, &o, 1);
    CHECK(height.sd_of[INPUT_HEIGHT] > 0.003 && shape.sd_of[INPUT_SHAPE] > 1e-4 &&
          all.sd_of[INPUT_LEVEL] > 1e-5 && all.sd_of[INPUT_SPACING] > 1e-4);
    CHECK(height.sd_of[INPUT_HEIGHT] > height.sd_of[INPUT_SPACING]);
    CHECK(all.hi > height.hi - 1e-3 && all.sd > 0.9 * height.sd);
    for (int k = 0; k < INPUTS; k++) printf("%s %.5f\n", input_name((input_kind)k), all.sd_of[k]);
    distribution_free(&height);
    distribution_free(&shape);
    distribution_free(&all);
}

/* Alternatives: two or three values with equal chances, so that sd and interval are known from predictions alone. */
static void alternatives(void) {
    optics_setup o = setup();
    surface_input in = cones(200.0, 0.0, 250.0);
    error e = { 0 };
    double at[3], mean = 0.0, square = 0.0;
    for (int i = 0; i < SHAPE_ALTERNATIVES; i++) {
        prediction p = { 0 };
        in.link.exponent = shape_alternatives[i];
        CHECK(predict(&in, &o, &p, &e) == ST_OK);
        at[i] = p.weighted - p.model_bias;
        mean += at[i] / 3.0;
        prediction_free(&p);
    }
    for (int i = 0; i < 3; i++) square += (at[i] - mean) * (at[i] - mean) / 3.0;
    in.link.exponent = 1.0;
    in.link.shape_open = 1;
    distribution d = ask(&in, &o, 3);
    CHECK_NEAR(d.sd_of[INPUT_SHAPE], sqrt(square), 0.03 * sqrt(square));
    CHECK_NEAR(d.mean, mean, 1e-3);
    CHECK(d.varied[INPUT_SHAPE] && !d.varied[INPUT_MIXING] && !d.varied[INPUT_HEIGHT]);
    prediction p = { 0 };
    CHECK(predict(&in, &o, &p, &e) == ST_OK);
    double low = fmin(at[0], fmin(at[1], at[2])), high = fmax(at[0], fmax(at[1], at[2]));
    CHECK(p.weighted_lo <= low && p.weighted_hi >= high && strstr(p.note, "nobody stated"));
    CHECK_NEAR(p.u_shape, (high - low) / sqrt(12.0), 0.3 * p.u_shape); /* of the plain values: about the same */
    prediction_free(&p);
    distribution_free(&d);
    /* Under a film nothing was calculated case by case: the rule of mixing is a coin. */
    layer film = { &nitride, 20.0 };
    o.coatings = &film;
    o.n_coatings = 1;
    in = cones(300.0, 0.0, 300.0);
    d = ask(&in, &o, 5);
    CHECK(predict(&in, &o, &p, &e) == ST_OK);
    CHECK(d.varied[INPUT_MIXING] && p.u_mixing > 1e-4);
    CHECK_NEAR(d.sd_of[INPUT_MIXING], 0.5 * p.u_mixing, 0.03 * p.u_mixing); /* two values, half their difference */
    prediction_free(&p);
    distribution_free(&d);
}

/* Coverage, tips, spread and a spacing that matters: each is drawn, held in its range, and by the slope where it is small. */
static void numbers(void) {
    optics_setup o = setup();
    surface_input in = cones(300.0, 0.0, 300.0), low, high;
    error e = { 0 };
    prediction a = { 0 }, b = { 0 };
    in.link.coverage = 0.8;
    in.link.coverage_u = 0.01;
    distribution d = ask(&in, &o, 2);
    low = high = in;
    low.link.coverage = 0.79;
    high.link.coverage = 0.81;
    CHECK(predict(&low, &o, &a, &e) == ST_OK && predict(&high, &o, &b, &e) == ST_OK);
    CHECK_NEAR(d.sd_of[INPUT_COVERAGE], 0.5 * 0.9867 * fabs(a.weighted - b.weighted), 0.05 * d.sd_of[INPUT_COVERAGE]);
    prediction_free(&a);
    CHECK(predict(&in, &o, &a, &e) == ST_OK);
    CHECK_NEAR(a.u_coverage, 0.5 * fabs(a.weighted - b.weighted) * 2.0, 0.1 * a.u_coverage);
    prediction_free(&a);
    prediction_free(&b);
    distribution_free(&d);
    in = cones(250.0, 0.0, 300.0);
    in.link.flat_top_u = in.link.coverage_u = 0.05;
    d = ask(&in, &o, 2);
    CHECK(d.sd_of[INPUT_TIP] > 1e-4 && d.sd_of[INPUT_COVERAGE] > 1e-5 && d.varied[INPUT_TIP] && !d.varied[INPUT_LEVEL]);
    distribution_free(&d);
    in = cones(250.0, 0.0, 300.0);
    in.link.height_spread = 0.1;
    in.link.height_spread_u = 0.05;
    d = ask(&in, &o, 2);
    CHECK(d.sd_of[INPUT_SPREAD] > 1e-6 && d.varied[INPUT_LEVEL] && d.varied[INPUT_SPREAD]);
    distribution_free(&d);
    in = cones(250.0, 0.0, 300.0);
    in.link.tip_radius_nm = 15.0;
    in.link.tip_radius_nm_u = 5.0;
    in.spacing_nm.u = 20.0;
    d = ask(&in, &o, 2);
    CHECK(d.sd_of[INPUT_TIP] > 1e-4 && d.sd_of[INPUT_SPACING] > 1e-5);
    distribution_free(&d);
}

static void refusals(void) {
    optics_setup o = setup();
    trial_options t = trial_defaults();
    distribution d = { 0 };
    error e = { 0 };
    surface_input planar = cones(0.0, 0.0, 300.0), coarse = cones(3000.0, 0.0, 5000.0),
                  lost = cones(300.0, 10.0, MISSING);
    CHECK_FAILS(predict_trials(&planar, &o, &t, &d, &e), ST_NO_RESULT, e, "planar");
    CHECK_FAILS(predict_trials(&coarse, &o, &t, &d, &e), ST_NO_RESULT, e, "facets");
    CHECK_FAILS(predict_trials(&lost, &o, &t, &d, &e), ST_NO_RESULT, e, "spacing");
    surface_input in = cones(300.0, 20.0, 300.0);
    t.tolerance = 0.0;
    CHECK_FAILS(predict_trials(&in, &o, &t, &d, &e), ST_BAD_INPUT, e, "tolerance");
    t = trial_defaults();
    o.reflect.angle_deg = 95.0;
    CHECK_FAILS(predict_trials(&in, &o, &t, &d, &e), ST_BAD_INPUT, e, "angle");
    o = setup();
    t.tolerance = 1e-2;
    CHECK(predict_trials(&in, &o, &t, &d, &e) == ST_OK && d.settled && d.trials == 20000 &&
          d.tolerance >= 1e-2);
    distribution_free(&d);
    for (size_t n = 1; n < 2000; n += 37) {
        t.tolerance = 1e-2;
        mem_fail_after(n);
        e = (error){ 0 };
        status st = predict_trials(&in, &o, &t, &d, &e);
        mem_fail_after(0);
        if (st == ST_OK) break;
        CHECK(st == ST_NO_MEMORY && e.text[0] && !d.R_lo);
    }
    distribution_free(&d);
}

int main(void) {
    error e = { 0 };
    CHECK(table_material("silicon", &silicon) && table_material("nitride", &nitride) && table_sun(&am15g) &&
          material_constant(&air, 1.0, 0.0, &e) == ST_OK);
    repeats();
    model_only();
    linear();
    budget();
    alternatives();
    numbers();
    refusals();
    material_free(&silicon);
    material_free(&nitride);
    material_free(&air);
    sun_free(&am15g);
    return check_done();
}

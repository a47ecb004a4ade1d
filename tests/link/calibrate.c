/* The fit of spectra: heights recovered from noisy synthetic ones, what they cannot tell, samples left out, errors. */
#include <stdlib.h>

#include "base/mem.h"
#include "check.h"
#include "link/calibrate.h"
#include "optical_tables.h"

enum { POINTS = 71, MOST = 4 };
static material silicon, air;
static sun am15g;
static unsigned long long state;

static double uniform(void) { /* Knuth's 64-bit congruential generator, upper bits */
    state = state * 6364136223846793005ULL + 1442695040888963407ULL;
    return ((double)(state >> 11) + 0.5) / 9007199254740992.0;
}
static double normal(void) {
    double r = sqrt(-2.0 * log(uniform())), t = 2.0 * PI * uniform();
    return r * cos(t);
}

static optics_setup setup(void) {
    return (optics_setup){ .ambient = &air, .substrate = &silicon, .air = &air, .nitride = &air,
                           .mixing = MIX_BRUGGEMAN_2D, .reflect = reflect_defaults(), .sun = &am15g,
                           .band_lo_nm = 300.0, .band_hi_nm = 1000.0, .step_nm = 10.0 };
}

typedef struct {
    double height, spacing, wavelength_nm[POINTS], R[POINTS];
} texture;

/* 300 to 1000 nm by 10, straight from link_profile and reflectance, with an offset and noise. */
static fit_sample measure(texture *t, const char *name, const link_options *l, double offset, double noise) {
    profile p = { 0 };
    error e = { 0 };
    reflect_options r = reflect_defaults();
    for (int i = 0; i < POINTS; i++) t->wavelength_nm[i] = 300.0 + 10.0 * i;
    CHECK(link_profile(t->height, t->spacing, NULL, 0, 0, l, NULL, 0, &p, &e) == ST_OK);
    stack s = { .ambient = &air, .substrate = &silicon, .profile = &p };
    CHECK(reflectance(&s, &r, t->wavelength_nm, POINTS, t->R, NULL, &e) == ST_OK);
    profile_free(&p);
    for (int i = 0; i < POINTS; i++) t->R[i] += offset + noise * normal();
    return (fit_sample){ .name = name, .wavelength_nm = t->wavelength_nm, .R = t->R, .n = POINTS,
                         .spacing_nm = { t->spacing, 3.0, 1 }, .height_nm = quantity_missing() };
}

/* Noise 0.1 % absolute, default parameters free: the height within 3 %, and within what the fit claims. */
static void recovered(void) {
    for (unsigned seed = 90001; seed < 90003; seed++) {
        optics_setup o = setup();
        fit_options f = fit_defaults();
        fit_result r = { 0 };
        texture t;
        error e = { 0 };
        link_options l = link_defaults();
        state = seed;
        uniform();
        t.height = 180.0 + 200.0 * uniform();
        t.spacing = 200.0 + 100.0 * uniform();
        l.exponent = 0.9 + 1.2 * uniform();
        double offset = 0.003 * normal();
        fit_sample s = measure(&t, "W1", &l, offset, 0.001);
        CHECK(fit_spectra(&s, 1, &f, &o, &r, &e) == ST_OK);
        if (e.code != ST_OK) {
            printf("%s\n", e.text);
            continue;
        }
        CHECK(r.n_numbers == 3 && r.numbers[0].kind == FIT_HEIGHT && r.numbers[1].kind == FIT_EXPONENT);
        CHECK_NEAR(r.numbers[0].value, t.height, 0.03 * t.height);
        CHECK_NEAR(r.numbers[0].value, t.height, 4.0 * r.numbers[0].u);
        CHECK_NEAR(r.numbers[1].value, l.exponent, 4.0 * r.numbers[1].u);
        CHECK_NEAR(r.offset, offset, 4.0 * r.numbers[2].u);
        CHECK(r.reduced > 0.5 && r.reduced < 2.5 && r.noise > 0.0006 && r.noise < 0.0016);
        CHECK(r.freedom == POINTS - 3 && r.n_arrived >= 1 && r.curves[0].n == POINTS);
        CHECK_NEAR(r.curves[0].aspect, r.numbers[0].value / t.spacing, 1e-12);
        CHECK(r.link_made.n_samples == 1 && isnan(r.link_made.aspect_scatter) && isnan(r.link_made.left_out));
        CHECK_NEAR(r.correlation[1], r.covariance[1] / (r.numbers[0].u * r.numbers[1].u), 1e-9);
        fit_free(&r);
        fit_free(&r);
    }
}

/* Four samples of one recipe, aspect 1.1 with a scatter: left out, joint shape, no drift with the order of files. */
static void joint(void) {
    static const char *const names[MOST] = { "A", "B", "C", "D" };
    static const double aspects[MOST] = { 1.12, 1.07, 1.13, 1.08 }, spacings[MOST] = { 210.0, 240.0, 270.0, 300.0 };
    optics_setup o = setup();
    fit_options f = fit_defaults();
    fit_result r = { 0 };
    static texture t[MOST];
    fit_sample s[MOST];
    error e = { 0 };
    link_options l = link_defaults();
    l.exponent = 1.43;
    state = 777;
    for (size_t i = 0; i < MOST; i++) {
        t[i].spacing = spacings[i];
        t[i].height = aspects[i] * spacings[i];
        s[i] = measure(&t[i], names[i], &l, 0.002, 0.0005);
    }
    f.free = 1u << FIT_HEIGHT | 1u << FIT_OFFSET; /* the shape is given: quick */
    f.link.exponent = 1.43;
    f.link.exponent_u = 0.1;
    CHECK(fit_spectra(s, MOST, &f, &o, &r, &e) == ST_OK && r.n_numbers == MOST + 1 && r.determined);
    const calibration *c = &r.link_made;
    CHECK(c->n_samples == MOST);
    CHECK_NEAR(c->spacing_lo_nm, 210.0, 0.0);
    CHECK_NEAR(c->spacing_hi_nm, 300.0, 0.0);
    CHECK_NEAR(c->spacing_u_nm, 3.0, 0.0);
    CHECK_NEAR(c->aspect, 1.1, 0.003);
    CHECK_NEAR(c->aspect_scatter, 0.02944, 0.004);
    CHECK_NEAR(c->exponent, 1.43, 0.0);
    CHECK_NEAR(c->exponent_u, 0.1, 0.0);
    CHECK_NEAR(c->offset, 0.002, 0.0002);
    double sum = 0.0;
    for (size_t i = 0; i < MOST; i++) {
        CHECK_NEAR(r.numbers[i].value, t[i].height, 0.01 * t[i].height);
        CHECK(isfinite(r.curves[i].left_out));
        /* taller than the others' mean aspect says: they predict too much light, and the other way round */
        CHECK(aspects[i] > 1.1 ? r.curves[i].left_out > 0.0 : r.curves[i].left_out < 0.0);
        sum += r.curves[i].left_out * r.curves[i].left_out;
    }
    CHECK_NEAR(c->left_out, sqrt(sum / MOST), 1e-12);
    CHECK(c->left_out > 1e-4 && c->left_out_spectral > c->left_out && c->left_out_spectral < 0.01);
    fit_free(&r);
    CHECK(fit_spectra(s, 2, &f, &o, &r, &e) == ST_OK && r.link_made.n_samples == 2 && isnan(r.link_made.left_out));
    fit_free(&r);
}

/* A dull stretch of spectrum cannot hold height and exponent apart; without a spacing there is no link. */
static void undetermined(void) {
    optics_setup o = setup();
    fit_options f = fit_defaults();
    fit_result r = { 0 };
    texture t = { .height = 250.0, .spacing = 250.0 };
    error e = { 0 };
    link_options l = link_defaults();
    state = 4242;
    fit_sample s = measure(&t, "W7", &l, 0.0, 0.001);
    s.spacing_nm = quantity_missing();
    f.band_lo_nm = 700.0;
    CHECK(fit_spectra(&s, 1, &f, &o, &r, &e) == ST_OK);
    CHECK(!r.determined && strstr(r.remarks.s, "cannot be told apart") && strstr(r.remarks.s, "height") &&
          strstr(r.remarks.s, "give one of them"));
    CHECK(r.link_made.n_samples == 0 && isnan(r.curves[0].aspect));
    fit_free(&r);
    /* Level ground: no height lowers a reflectance that is already the polished one; the exponent says nothing. */
    f.free = 1u << FIT_EXPONENT | 1u << FIT_FLOOR;
    f.band_lo_nm = 300.0;
    s.height_nm = (quantity){ 0.0, 0.0, 1 };
    t.height = 0.0;
    link_options flat = link_defaults();
    fit_sample level = measure(&t, "flat", &flat, 0.0, 0.0);
    level.height_nm = (quantity){ 0.0, 0.0, 1 };
    CHECK(fit_spectra(&level, 1, &f, &o, &r, &e) == ST_OK && !r.determined);
    CHECK(strstr(r.remarks.s, "say nothing of exponent") && isinf(r.numbers[0].u));
    fit_free(&r);
}

static void words(void) {
    unsigned bits = 0;
    error e = { 0 };
    CHECK(fit_kinds_parse("height,floor", &bits, &e) == ST_OK && bits == (1u << FIT_HEIGHT | 1u << FIT_FLOOR));
    CHECK_FAILS(fit_kinds_parse("height,hight", &bits, &e), ST_BAD_INPUT, e, "'hight'");
    CHECK_FAILS(fit_kinds_parse("height,height", &bits, &e), ST_BAD_INPUT, e, "each once");
    CHECK_FAILS(fit_kinds_parse("", &bits, &e), ST_BAD_INPUT, e, "nothing");
    CHECK_FAILS(fit_kinds_parse("height,,offset", &bits, &e), ST_BAD_INPUT, e, "expected words");
    CHECK(!strcmp(fit_kind_name(FIT_SPREAD), "spread"));
}

static void failures(void) {
    optics_setup o = setup();
    fit_options f = fit_defaults();
    fit_result r = { 0 };
    texture t = { .height = 250.0, .spacing = 250.0 };
    error e;
    link_options l = link_defaults();
    state = 5;
    fit_sample s = measure(&t, "W7", &l, 0.0, 0.001);
    CHECK_FAILS(fit_spectra(&s, 0, &f, &o, &r, &e), ST_BAD_INPUT, e, "no spectrum");
    f.free = 0;
    CHECK_FAILS(fit_spectra(&s, 1, &f, &o, &r, &e), ST_BAD_INPUT, e, "no parameter");
    f.free = 1u << FIT_OFFSET;
    CHECK_FAILS(fit_spectra(&s, 1, &f, &o, &r, &e), ST_BAD_INPUT, e, "W7: the height is neither");
    f = fit_defaults();
    f.band_hi_nm = 360.0;
    CHECK_FAILS(fit_spectra(&s, 1, &f, &o, &r, &e), ST_BAD_INPUT, e, "W7: 7 values");
    f.band_hi_nm = 200.0;
    CHECK_FAILS(fit_spectra(&s, 1, &f, &o, &r, &e), ST_BAD_INPUT, e, "empty");
    f = fit_defaults();
    f.free = 1u << FIT_OFFSET; /* one cheap fit for each allocation */
    s.height_nm = (quantity){ 250.0, 0.0, 1 };
    status st = ST_NO_MEMORY;
    for (size_t n = 1; n < 400 && st != ST_OK; n++) {
        e = (error){ 0 };
        mem_fail_after(n);
        st = fit_spectra(&s, 1, &f, &o, &r, &e);
        mem_fail_after(0);
        CHECK(st == ST_OK || (st == ST_NO_MEMORY && e.text[0] && !r.curves));
    }
    CHECK(st == ST_OK);
    CHECK_NEAR(r.offset, 0.0, 5.0 * r.numbers[0].u);
    fit_free(&r);
}

int main(void) {
    error e = { 0 };
    CHECK(table_material("silicon", &silicon) && table_sun(&am15g) && material_constant(&air, 1.0, 0.0, &e) == ST_OK);
    recovered();
    joint();
    undetermined();
    words();
    failures();
    material_free(&silicon);
    material_free(&air);
    sun_free(&am15g);
    return check_done();
}

/* A calibrated link in use: heights, what lies outside, intervals, words. */
#include <stdlib.h>

#include "check.h"
#include "link/calibration.h"

static calibration made(void) {
    return (calibration){ .n_samples = 5, .spacing_lo_nm = 280.0, .spacing_hi_nm = 390.0, .spacing_u_nm = 6.0,
                          .height_lo_nm = 300.0, .height_hi_nm = 430.0, .aspect = 1.13, .aspect_u = 0.01,
                          .aspect_scatter = 0.04, .exponent = 1.37, .exponent_u = 0.03, .height_spread = 0.08,
                          .coverage = 0.93, .left_out = 0.0012, .left_out_spectral = 0.002, .band_lo_nm = 300.0,
                          .band_hi_nm = 1000.0 };
}

/* Fractiles of Student's t, 0.975: tables of statistics (Fisher, Yates 1963). */
static void student(void) {
    static const struct { size_t freedom; double t; } table[] = {
        { 1, 12.706 }, { 2, 4.303 },  { 5, 2.571 },  { 10, 2.228 },  { 11, 2.201 },
        { 15, 2.131 }, { 20, 2.086 }, { 30, 2.042 }, { 60, 2.000 }, { 120, 1.980 },
    };
    for (size_t i = 0; i < sizeof table / sizeof table[0]; i++)
        CHECK_SOURCE(student_95(table[i].freedom), table[i].t, 6e-4, "Student's t, 0.975 fractile, Fisher and Yates (1963)");
    CHECK_NEAR(student_95(1000000), 1.959963984540054, 1e-5);
}

static void heights(void) {
    calibration c = made();
    link_options o = link_defaults(), before = o;
    quantity h, spacing = { 337.0, 5.0, 1 }, none = quantity_missing(), sheet = { 402.0, 11.0, 1 };
    height_source src;
    error e = { 0 };
    CHECK(calibrated_height(&c, none, &o, spacing, &h, &src, &e) == ST_OK && src == HEIGHT_CALIBRATED);
    double scatter = 0.04 / 1.13 * sqrt(1.2) * 2.7764 / 1.95996;
    CHECK_NEAR(calibration_scatter_rel(&c), scatter, 1e-5);
    CHECK_NEAR(h.value, 1.13 * 337.0, 1e-9);
    CHECK_NEAR(h.u, sqrt(pow(337.0 * 1.13 * scatter, 2) + pow(337.0 * 0.01, 2) + pow(1.13 * 5.0, 2)), 1e-3);
    CHECK(h.n == 5 && !height_is_assumed(src));
    CHECK_NEAR(o.exponent, 1.37, 0.0);
    CHECK_NEAR(o.exponent_u, 0.03, 0.0);
    CHECK_NEAR(o.height_spread, 0.08, 0.0);
    CHECK_NEAR(o.coverage, 0.93, 0.0);
    o = before; /* the sheet's height comes first, the shape stays calibrated */
    CHECK(calibrated_height(&c, sheet, &o, spacing, &h, &src, &e) == ST_OK && src == HEIGHT_SHEET);
    CHECK_NEAR(h.value, 402.0, 0.0);
    CHECK_NEAR(o.exponent, 1.37, 0.0);
    o = before; /* none: as link_height */
    o.height_nm = 350.0;
    CHECK(calibrated_height(NULL, none, &o, spacing, &h, &src, &e) == ST_OK && src == HEIGHT_PROTOCOL);
    CHECK_NEAR(o.exponent, 1.0, 0.0);
    c.n_samples = 0;
    CHECK(calibrated_height(&c, none, &o, spacing, &h, &src, &e) == ST_OK && src == HEIGHT_PROTOCOL);
    c = made();
    o = before;
    CHECK_FAILS(calibrated_height(&c, none, &o, none, &h, &src, &e), ST_NO_RESULT, e, "no spacing");
}

/* Few samples know little of their scatter; one knows nothing. */
static void scatter(void) {
    calibration c = made();
    c.n_samples = 1;
    c.aspect_scatter = MISSING;
    CHECK_NEAR(calibration_scatter_rel(&c), 0.3, 0.0);
    c.n_samples = 2;
    c.aspect_scatter = 0.01;
    CHECK_NEAR(calibration_scatter_rel(&c), 0.01 / 1.13 * sqrt(1.5) * 12.7062 / 1.95996, 1e-5);
    c.aspect_scatter = 0.1; /* Student would say 70 %: no more than an aspect nobody measured */
    CHECK_NEAR(calibration_scatter_rel(&c), 0.3, 0.0);
    c.aspect_scatter = 0.5; /* but never less than what was seen */
    CHECK_NEAR(calibration_scatter_rel(&c), 0.5 / 1.13 * sqrt(1.5), 1e-12);
}

static void outside(void) {
    calibration c = made();
    double reach = 2.0 * hypot(6.0, 4.0);
    CHECK(!calibration_outside(&c, (quantity){ 300.0, 4.0, 1 }, 0));
    CHECK(!calibration_outside(&c, (quantity){ 280.0 - reach + 0.01, 4.0, 1 }, 0));
    CHECK(calibration_outside(&c, (quantity){ 280.0 - reach - 0.01, 4.0, 1 }, 0));
    CHECK(!calibration_outside(&c, (quantity){ 390.0 + reach - 0.01, 4.0, 1 }, 0));
    CHECK(calibration_outside(&c, (quantity){ 390.0 + reach + 0.01, 4.0, 1 }, 0));
    CHECK(calibration_outside(&c, (quantity){ 300.0, 4.0, 1 }, 1));
    CHECK(calibration_outside(&c, quantity_missing(), 0));
    CHECK(!calibration_outside(&c, (quantity){ 300.0, MISSING, 1 }, 0));
}

static void apply(void) {
    calibration c = made();
    quantity spacing = { 300.0, 4.0, 1 };
    double R[2] = { 0.01, 0.05 }, lo[2] = { 0.009, 0.01 }, hi[2] = { 0.011, 0.09 };
    prediction p = { .n = 2, .R = R, .R_lo = lo, .R_hi = hi, .weighted = 0.02, .weighted_lo = 0.0195, .weighted_hi = 0.024,
                     .note = "As before." };
    calibration_apply(&c, 1, spacing, 0, 12.4, &p);
    CHECK_NEAR(p.weighted_lo, 0.02 - 2.7764 * 0.0012, 1e-7); /* opened */
    CHECK_NEAR(p.weighted_hi, 0.024, 0.0);                   /* wide enough already */
    CHECK_NEAR(lo[0], 0.01 - 2.7764 * 0.002, 1e-7);
    CHECK_NEAR(hi[0], 0.01 + 2.7764 * 0.002, 1e-7);
    CHECK(lo[1] <= 0.01 && hi[1] >= 0.09);
    CHECK(!strcmp(p.note, "Height and shape calibrated on 5 samples of 280 to 390 nm spacing, made 12 days before this etch. "
                          "As before."));
    p.weighted_lo = 0.0195; /* the height is the sheet's: its interval stays */
    p.note[0] = '\0';
    calibration_apply(&c, 0, (quantity){ 500.0, 4.0, 1 }, 0, -1.2, &p);
    CHECK_NEAR(p.weighted_lo, 0.0195, 0.0);
    CHECK(!strcmp(p.note, "Shape calibrated on 5 samples of 280 to 390 nm spacing, made 1 day after this etch; this sample "
                          "lies outside. "));
    c.n_samples = 1;
    c.spacing_hi_nm = c.spacing_lo_nm;
    memset(p.note, 'x', sizeof p.note - 1); /* a full note is cut at its end */
    p.note[sizeof p.note - 1] = '\0';
    calibration_apply(&c, 1, (quantity){ 280.0, 4.0, 1 }, 0, MISSING, &p);
    CHECK(strlen(p.note) == sizeof p.note - 1);
    CHECK(!strncmp(p.note, "Height and shape calibrated on 1 sample of 280 nm spacing. xxx", 60));
    prediction refused = { .refused = 1, .weighted = MISSING, .weighted_lo = MISSING, .weighted_hi = MISSING };
    c = made();
    calibration_apply(&c, 1, spacing, 0, MISSING, &refused);
    CHECK(isnan(refused.weighted_lo) && strstr(refused.note, "5 samples"));
}

int main(void) {
    student();
    heights();
    scatter();
    outside();
    apply();
    return check_done();
}

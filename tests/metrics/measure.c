/* The whole measurement: renders of known truth within the limits a user is promised, determinism, pictures
 * that show nothing, and every allocation failing in turn. */
#include "metrics/measure.h"

#include <stdlib.h>

#include "app/render.h"
#include "base/limits.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "metrics/sizes.h"
#include "planes.h"

static float *render_plane(const render_options *o, rendering *r) {
    error e = { 0 };
    CHECK(render_make(o, r, &e) == ST_OK);
    size_t n = r->nx * r->ny;
    float *f = plane_new(r->nx, r->ny);
    const uint8_t *s8 = r->samples;
    const uint16_t *s16 = r->samples;
    for (size_t i = 0; i < n; i++)
        f[i] = r->bit_depth == 8 ? (float)s8[i] / 255.0f : (float)s16[i] / 65535.0f;
    return f;
}

static texture measured_of(const float *f, size_t nx, size_t ny, relief given) {
    plane p = { f, nx, ny, 8, 0.0, 0.0, NULL };
    measure_options o = measure_defaults();
    texture t = { 0 };
    error e = { 0 };
    o.relief = given;
    CHECK(measure_plane(&p, &o, &t, &e) == ST_OK);
    CHECK(e.code == ST_OK && e.text[0] == '\0');
    return t;
}

/* ---- truth ---- */

static double true_density(const rendering *r) {
    double guard = 0.5 * r->spacing_px;
    size_t n = 0;
    for (size_t i = 0; i < r->n; i++)
        n += r->x[i] >= guard - 0.5 && r->y[i] >= guard - 0.5 && r->x[i] < (double)r->nx - 0.5 - guard &&
             r->y[i] < (double)r->ny - 0.5 - guard;
    return (double)n / (((double)r->nx - 2.0 * guard) * ((double)r->ny - 2.0 * guard));
}

/* Every number known with its uncertainty, and the method and sampling parts are numbers. */
static void check_known(const measured *m, const char *name) {
    int known = isfinite(m->value) && m->u_sampling > 0.0 && isfinite(m->u_sampling) && m->u_method >= 0.0 &&
                m->n > 0;
    if (!known)
        printf("%s: value %g, u %g and %g, n %zu\n", name, m->value, m->u_sampling, m->u_method, m->n);
    CHECK(known);
}

static void check_all_known(const texture *t) {
    check_known(&t->spacing_acf, "spacing_acf");
    check_known(&t->spacing_psd, "spacing_psd");
    check_known(&t->nn_mean, "nn_mean");
    check_known(&t->spacing_hex, "spacing_hex");
    check_known(&t->density, "density");
    check_known(&t->bright_share, "bright_share");
    check_known(&t->size_d10, "size_d10");
    check_known(&t->size_d50, "size_d50");
    check_known(&t->size_d90, "size_d90");
    check_known(&t->size_mean, "size_mean");
    check_known(&t->size_gsd, "size_gsd");
    check_known(&t->top_d50, "top_d50");
    check_known(&t->clark_evans, "clark_evans");
    check_known(&t->noise_rel, "noise_rel");
    CHECK(isfinite(t->relief_skew) && isfinite(t->ring_z) && isfinite(t->lognormal_ad));
    CHECK(t->n_curves == 6);
    for (size_t k = 0; k < t->n_curves; k++)
        CHECK(t->curves[k].n > 10 && t->curves[k].name && t->curves[k].x_unit);
}

/* Limits of the table for 1024 x 768, widened for the smaller number of features: 2.5 k / sqrt(N). */
static void check_truth(pattern pat, double disorder, double exponent, relief side, int bits, uint64_t seed) {
    render_options o = render_defaults();
    o.spacing_nm = 22.0;
    o.px_nm = 1.0;
    o.nx = 480;
    o.ny = 360;
    o.strip = 0;
    o.pattern = pat;
    o.disorder = disorder;
    o.exponent = exponent;
    o.relief = side;
    o.bit_depth = bits;
    o.seed = seed;
    rendering r = { 0 };
    float *f = render_plane(&o, &r);
    texture t = measured_of(f, r.nx, r.ny, RELIEF_AUTO);
    double density = true_density(&r), hex = sqrt(2.0 / (sqrt(3.0) * density)), q[3];
    static const double p[] = { 0.1, 0.5, 0.9 };
    error e = { 0 };
    for (size_t i = 0; i < r.n; i++)
        if (!(r.basin_ecd_px[i] > 0.0)) r.basin_ecd_px[i] = r.basin_weight[i] = 0.0;
    CHECK(quantiles(r.basin_ecd_px, r.basin_weight, r.n, p, 3, q, &e) == ST_OK);
    CHECK(t.relief == side && !t.reasons);
    CHECK_NEAR(t.density.value / density, 1.0, 0.030);
    CHECK_NEAR(t.spacing_hex.value / hex, 1.0, 0.015);
    CHECK_NEAR(t.spacing_acf.value / r.spacing_px, 1.0, 0.12);
    CHECK_NEAR(t.size_d10.value / q[0], 1.0, 0.04);
    CHECK_NEAR(t.size_d50.value / q[1], 1.0, 0.02);
    CHECK_NEAR(t.size_d90.value / q[2], 1.0, 0.04);
    CHECK(!!(t.flags & FLAG(LOW_ORDER)) == (t.clark_evans.value < 1.5));
    check_all_known(&t);
    texture_free(&t);
    rendering_free(&r);
    free(f);
}

/* ---- the same bits ---- */

enum { IX = 300, IY = 240 };

static void put_cone(float *f, size_t nx, size_t ny, double x, double y, double size, double h) {
    raise_cone(f, nx, ny, x, y, size, h);
}

static float *small_texture(void) {
    float *f = plane_new(IX, IY);
    dice d = { 41 };
    hexagonal(f, IX, IY, 19.0, 0.12, 1.0, 15.0, put_cone, &d);
    for (size_t i = 0; i < IX * IY; i++) f[i] = 0.2f + 0.5f * f[i];
    return f;
}

static void check_same_bits(void) {
    float *f = small_texture();
    texture a = measured_of(f, IX, IY, RELIEF_AUTO);
    CHECK(a.relief == RELIEF_HILLOCK && a.n_features > 100);
    texture b = measured_of(f, IX, IY, RELIEF_AUTO); /* the same bits */
    CHECK(memcmp(a.features, b.features, a.n_found * sizeof *a.features) == 0 && a.n_found == b.n_found);
    CHECK(memcmp(a.cells, b.cells, IX * IY * sizeof *a.cells) == 0);
    CHECK(memcmp(&a.density, &b.density, sizeof a.density) == 0);
    for (size_t k = 0; k < a.n_curves; k++)
        CHECK(memcmp(a.curves[k].points, b.curves[k].points, a.curves[k].n * sizeof *a.curves[k].points) ==
              0);
    texture_free(&b);
    texture_free(&a);
    free(f);
}

/* ---- pictures without an answer ---- */

static void check_nothing(float *f, size_t nx, size_t ny, flags reason) {
    texture t = measured_of(f, nx, ny, RELIEF_AUTO);
    CHECK((t.reasons & reason) != 0);
    CHECK(isnan(t.density.value) && isnan(t.spacing_acf.value) && isnan(t.size_d50.value) &&
          t.n_features == 0);
    texture_free(&t);
}

static void check_degenerate(void) {
    enum { S = 128 };
    float *f = plane_new(S, S);
    dice d = { 2 };
    check_nothing(f, S, S, FLAG(FEATURELESS));
    for (size_t i = 0; i < S * S; i++) f[i] = 1.0f;
    check_nothing(f, S, S, FLAG(FEATURELESS));
    f[50 * S + 60] = 0.0f;
    texture t = measured_of(f, S, S, RELIEF_AUTO);
    CHECK(t.reasons != 0);
    texture_free(&t);
    for (size_t i = 0; i < S * S; i++) f[i] = (float)dice_uniform(&d);
    check_nothing(f, S, S, FLAG(NO_RING));
    for (size_t i = 0; i < S * S; i++) f[i] = (float)(i % S) / S; /* a ramp is brightness, not texture */
    check_nothing(f, S, S, FLAG(NO_RING) | FLAG(FEATURELESS));
    for (size_t i = 0; i < S * S; i++) f[i] = (i / 8 + i / S / 8) % 2 ? 1.0f : 0.0f; /* all pixels clipped */
    t = measured_of(f, S, S, RELIEF_HILLOCK);
    texture_free(&t);
    for (size_t i = 0; i < 32 * 32; i++) f[i] = (float)dice_uniform(&d);
    t = measured_of(f, 32, 32, RELIEF_AUTO);
    CHECK(t.reasons != 0);
    texture_free(&t);
    t = measured_of(f, S, 32, RELIEF_PORE);
    texture_free(&t);
    free(f);
}

static void check_errors(void) {
    float *f = small_texture();
    plane small = { f, LIMIT_MIN_SIDE - 1, 200, 8, 0.0, 0.0, NULL }, none = { NULL, IX, IY, 8, 0.0, 0.0, NULL };
    plane p = { f, 160, 120, 8, 0.0, 0.0, NULL };
    measure_options o = measure_defaults();
    texture t = { 0 };
    error e = { 0 };
    CHECK_FAILS(measure_plane(&small, &o, &t, &e), ST_BAD_INPUT, e, "too small");
    CHECK_FAILS(measure_plane(&none, &o, &t, &e), ST_BAD_INPUT, e, "expected");
    size_t failures = 0;
    for (size_t k = 1; k < 400; k++) { /* every allocation in turn: no crash, no leak, the sentence */
        mem_fail_after(k);
        e = (error){ ST_OK, "" };
        status st = measure_plane(&p, &o, &t, &e);
        mem_fail_after(0);
        if (st == ST_OK) {
            texture_free(&t);
            break;
        }
        failures++;
        CHECK(st == ST_NO_MEMORY && strstr(e.text, "memory") && !t.features && !t.n_curves);
    }
    CHECK(failures > 20 && failures < 399);
    free(f);
}

int main(void) {
    check_truth(PATTERN_HEX, 0.16, 1.0, RELIEF_HILLOCK, 8, 1);
    check_truth(PATTERN_LLOYD, 4.0, 2.0, RELIEF_PORE, 16, 2);
    check_truth(PATTERN_RSA, 0.70, 2.0, RELIEF_HILLOCK, 16, 3);
    check_truth(PATTERN_MATERN, 0.48, 1.0, RELIEF_PORE, 8, 4);
    check_same_bits();
    check_degenerate();
    check_errors();
    return check_done();
}

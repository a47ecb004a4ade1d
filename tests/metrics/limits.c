/* Every limit of fitness on a render just inside and one just outside, with the default of the protocol; and the same picture
 * judged otherwise when the protocol moves the limit. (min_order: tests/metrics/fitness.c.) */
#include <stdlib.h>

#include "app/protocol_keys.h"
#include "app/render.h"
#include "base/flags.h"
#include "base/quantity.h"
#include "check.h"
#include "metrics/measure.h"
#include "planes.h"

typedef enum { BLUR, SPACING, SIDE, CONTRAST, ELECTRONS, STREAKING, STRETCH, ANGLE, JITTER, NOISE, SMEAR, FILL, BUMPS, SECOND, PATTERN, FLAT } knob;

static const double d_px = 20.0;
enum { SIDE_PX = 340 };

static void turn(render_options *o, knob k, double v) {
    switch (k) {
    case BLUR: o->blur_px = v * d_px; break;
    case SPACING: o->spacing_nm = v; break;
    case SIDE: o->nx = o->ny = (size_t)v; break;
    case CONTRAST: o->contrast = v; break;
    case ELECTRONS: o->electrons = v; break;
    case STREAKING: o->streaks = v; break;
    case STRETCH: o->stretch = v; o->stretch_angle_deg = 40.0; break;
    case ANGLE: o->stretch = 1.2; o->stretch_angle_deg = v; break;
    case JITTER: o->jitter_px = v * d_px; break;
    case NOISE: break; /* added to the picture, so that none of it clips */
    case BUMPS: break; /* a picture of its own */
    case SMEAR: o->smear_px = v * d_px; o->smear_angle_deg = 30.0; break;
    case FILL: o->pattern = PATTERN_RSA; o->fill = v; break;
    case SECOND:
        o->pattern = PATTERN_RSA;
        o->spacing_nm = 24.0;
        o->nx = 480;
        o->ny = 360;
        o->electrons = 40.0;
        o->blur_px = 1.2;
        o->seed = 102;
        o->second_share = v;
        break;
    case FLAT:
        o->electrons = 0.0;
        o->contrast = v;
        break;
    case PATTERN: o->pattern = (pattern)(int)v; break;
    }
}

typedef struct {
    flags reasons, remarks;
} finding;

/* Bumps at random places, or on a shaken lattice when v is 0. */
static void draw_bumps(float *f, double v) {
    enum { ACROSS = 14 };
    const double step = (double)SIDE_PX / ACROSS;
    dice d = { 5 };
    for (int k = 0; k < ACROSS * ACROSS; k++) {
        double x = step * (k % ACROSS + 0.5 + 0.15 * dice_normal(&d)), y = step * (k / ACROSS + 0.5 + 0.15 * dice_normal(&d));
        if (v > 0.0) {
            x = SIDE_PX * dice_uniform(&d);
            y = SIDE_PX * dice_uniform(&d);
        }
        add_bump(f, SIDE_PX, SIDE_PX, x, y, 0.2 * step, 0.3);
    }
}

/* One picture, judged with several sets of limits. */
static void look(knob k, double v, const measure_options *m, size_t n_m, finding *out) {
    render_options o = render_defaults();
    rendering r = { 0 };
    error e = { 0 };
    o.spacing_nm = d_px;
    o.px_nm = 1.0;
    o.nx = 380;
    o.ny = 300;
    o.pattern = PATTERN_HEX;
    o.electrons = 150.0;
    o.blur_px = 0.8;
    o.strip = 0;
    o.seed = 12;
    if (k == BUMPS) o.nx = o.ny = SIDE_PX;
    else turn(&o, k, v);
    if (k != BUMPS) CHECK(render_make(&o, &r, &e) == ST_OK);
    size_t n = o.nx * o.ny, low = 0, high = 0;
    float *f = plane_new(o.nx, o.ny);
    const uint8_t *s = r.samples;
    for (size_t i = 0; s && i < n; i++) {
        f[i] = (float)s[i] / 255.0f;
        low += s[i] == 0;
        high += s[i] == 255;
    }
    dice d = { 77 };
    if (k == NOISE) add_noise(f, n, v, &d);
    if (k == BUMPS) draw_bumps(f, v);
    plane p = { f, o.nx, o.ny, 8, (double)low / (double)n, (double)high / (double)n, NULL };
    for (size_t i = 0; i < n_m; i++) {
        texture t = { 0 };
        CHECK(measure_plane(&p, &m[i], &t, &e) == ST_OK);
        out[i] = (finding){ t.reasons, t.flags };
        texture_free(&t);
    }
    rendering_free(&r);
    free(f);
}

typedef struct {
    const char *key; /* of the protocol, group fitness */
    knob knob;
    double inside, outside;
    flags reason, remark; /* set outside, not set inside */
    double moved;         /* value of the key that turns the finding over */
    int loosened;         /* 1: of the picture outside, 0: of the one inside */
} limit_case;

static const limit_case cases[] = {
    { "min_px_per_spacing", SPACING, 9.0, 6.8, FLAG(FEW_PIXELS), 0, 10.0, 0 },
    { "warn_px_per_spacing", SPACING, 13.0, 10.5, 0, FLAG(LOW_RESOLUTION), 15.0, 0 },
    { "min_features", SIDE, 165.0, 110.0, FLAG(FEW_FEATURES), 0, 120.0, 0 },
    { "warn_features", SIDE, 300.0, 240.0, 0, FLAG(SMALL_COUNT), 400.0, 0 },
    { "max_blur", BLUR, 0.20, 0.30, FLAG(BLURRED), 0, 0.10, 0 },
    { "warn_blur", BLUR, 0.07, 0.18, 0, FLAG(UNSHARP), 0.25, 1 },
    { "max_clipped", CONTRAST, 1.5, 4.0, FLAG(CLIPPED), 0, 0.05, 0 },
    { "warn_clipped", CONTRAST, 0.8, 1.5, 0, FLAG(CLIPPED), 0.40, 1 },
    { "max_noise", NOISE, 0.25, 0.5, FLAG(NOISY), 0, 1.0, 0 },
    { "warn_noise", NOISE, 0.10, 0.25, 0, FLAG(NOISY), 0.3, 0 },
    { "max_streaks", STREAKING, 0.08, 0.6, FLAG(STREAKS), 0, 0.03, 0 },
    { "warn_streaks", STREAKING, 0.0, 0.08, 0, FLAG(STREAKS), 0.3, 1 },
    { "max_stretch", STRETCH, 1.4, 1.95, FLAG(TILTED), 0, 1.2, 0 },
    { "warn_stretch", STRETCH, 1.0, 1.2, 0, FLAG(STRETCHED), 1.35, 1 },
    { "max_jitter", JITTER, 0.07, 0.22, FLAG(DRIFT), 0, 0.05, 0 },
    { "warn_jitter", JITTER, 0.01, 0.07, 0, FLAG(DRIFT), 0.18, 1 },
    { "warn_astigmatism", SMEAR, 0.0, 0.12, 0, FLAG(ASTIGMATIC), 0.2, 1 },
    { "scan_axis_deg", ANGLE, 15.0, 1.0, 0, FLAG(DRIFT), 30.0, 0 },
    { "warn_order", PATTERN, PATTERN_RSA, PATTERN_MATERN, 0, FLAG(LOW_ORDER), 1.8, 0 },
    { "warn_contradiction", FILL, 1.15, 0.45, 0, FLAG(CONTRADICTION), 0.5, 1 },
    { "warn_size_gsd", SECOND, 0.0, 0.4, 0, FLAG(WIDE_SIZES), 1.05, 0 },
    { "warn_second", SECOND, 0.0, 0.4, 0, FLAG(TWO_SPACINGS), 3.5, 1 },
    { "min_ring_z", ELECTRONS, 150.0, 0.004, FLAG(NO_RING), 0, 1000.0, 0 },
    { "min_ring_z", BUMPS, 0.0, 1.0, FLAG(NO_RING), 0, 1000.0, 0 },
};

static int is_set(const limit_case *c, finding v) { return (v.reasons & c->reason) || (v.remarks & c->remark); }

int main(void) {
    protocol p = { 0 };
    error e = { 0 };
    char words[2][1024];
    CHECK(protocol_defaults(&p, &e) == ST_OK);
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        const limit_case *c = &cases[i];
        const protocol_key *k = protocol_key_find("fitness", c->key);
        CHECK(k && k->why && k->measuring);
        if (!k) continue;
        measure_options m[2] = { p.measure, p.measure };
        finding in[2], out[2];
        memcpy((char *)&m[1] + (k->offset - offsetof(protocol, measure)), &c->moved, sizeof c->moved);
        look(c->knob, c->inside, m, c->loosened ? 1 : 2, in);
        look(c->knob, c->outside, m, c->loosened ? 2 : 1, out);
        finding turned = c->loosened ? out[1] : in[1];
        int good = !is_set(c, in[0]) && is_set(c, out[0]) && is_set(c, turned) != c->loosened && (!c->reason || !in[0].reasons);
        if (!good) {
            printf("%s: inside [%s] %s; ", c->key, flags_text(in[0].remarks, words[0], 1024), flags_text(in[0].reasons, words[1], 1024));
            printf("outside [%s] %s; ", flags_text(out[0].remarks, words[0], 1024), flags_text(out[0].reasons, words[1], 1024));
            printf("moved [%s] %s\n", flags_text(turned.remarks, words[0], 1024), flags_text(turned.reasons, words[1], 1024));
        }
        CHECK(good);
    }
    finding none;
    look(FLAT, 0.001, &p.measure, 1, &none);
    CHECK(none.reasons & FLAG(FEATURELESS));
    protocol_free(&p);
    return check_done();
}

/* What may not matter: turning by 90 degrees, mirroring, inverting with the relief swapped, adding a constant, contrast; and
 * what may matter only within the stated uncertainty: twice the resolution, twice the field. All quantities of the program, on a
 * stretched render, so that stretch and angle have something to say. */
#include <stdlib.h>

#include "app/quantities.h"
#include "app/render.h"
#include "check.h"
#include "metrics/measure.h"
#include "planes.h"

enum { NX = 420, NY = 320 };

static texture measured_of(const float *f, size_t nx, size_t ny, relief given) {
    plane p = { f, nx, ny, 16, 0.0, 0.0, NULL };
    measure_options o = measure_defaults();
    texture t = { 0 };
    error e = { 0 };
    o.relief = given;
    CHECK(measure_plane(&p, &o, &t, &e) == ST_OK && !t.reasons);
    return t;
}

static float *render_plane(render_options *o, rendering *r) {
    error e = { 0 };
    o->bit_depth = 16;
    o->strip = 0;
    CHECK(render_make(o, r, &e) == ST_OK);
    float *f = plane_new(o->nx, o->ny);
    const uint16_t *s = r->samples;
    for (size_t i = 0; s && i < o->nx * o->ny; i++) f[i] = 0.1f + 0.8f * (float)s[i] / 65535.0f;
    return f;
}

typedef size_t (*from)(size_t x, size_t y); /* where the pixel of the changed picture comes from */
static size_t same(size_t x, size_t y) { return y * NX + x; }
static size_t mirrored(size_t x, size_t y) { return y * NX + (NX - 1 - x); }
static size_t flipped(size_t x, size_t y) { return (NY - 1 - y) * NX + x; }
static size_t turned(size_t x, size_t y) { return x * NX + (NX - 1 - y); } /* NY x NX, by 90 deg counter-clockwise */
static size_t opposite(size_t x, size_t y) { return (NY - 1 - y) * NX + (NX - 1 - x); }

static double axis_apart(double a, double b) { return fabs(fmod(fabs(a - b) + 90.0, 180.0) - 90.0); }

static void check_same(const texture *a, const texture *b, double angle_deg, const char *what) {
    for (int q = 0; q < QUANTITIES; q++) {
        const measured *m = texture_figure(a, q), *n = texture_figure(b, q);
        double off = m == &a->stretch_angle_deg ? axis_apart(n->value, angle_deg) / 180.0 : fabs(n->value / m->value - 1.0);
        /* The end of the spectrum that tells blur is thin, and its periodic window lies half a pixel off the middle. */
        double most = m == &a->sharpness ? 0.005 : 0.001;
        if (!(off <= most)) printf("%s: %s is %.8g, was %.8g\n", what, quantity_table[q].name, n->value, m->value);
        CHECK(off <= most);
        if (m != &a->stretch_angle_deg && m->u_sampling > 0.0) CHECK_NEAR(n->u_sampling / m->u_sampling, 1.0, 0.05);
    }
    CHECK(a->n_features == b->n_features && a->flags == b->flags);
}

static void check_changes(relief side) {
    static const struct {
        const char *what;
        from where;
        float gain, offset;
        int turn, mirror;
    } change[] = { { "constant", same, 1.0f, 0.07f, 0, 0 },    { "contrast", same, 0.6f, 0.2f, 0, 0 },
                   { "inverted", same, -1.0f, 1.0f, 0, 0 },    { "mirrored", mirrored, 1.0f, 0.0f, 0, 1 },
                   { "flipped", flipped, 1.0f, 0.0f, 0, 1 },   { "turned", turned, 1.0f, 0.0f, 1, 0 },
                   { "half turn", opposite, 1.0f, 0.0f, 0, 0 } };
    render_options o = render_defaults();
    rendering r = { 0 };
    o.spacing_nm = 18.0;
    o.px_nm = 1.0;
    o.nx = NX;
    o.ny = NY;
    o.relief = side;
    o.stretch = 1.15;
    o.stretch_angle_deg = 25.0;
    o.electrons = 300.0;
    float *f = render_plane(&o, &r), *g = plane_new(NX, NY);
    texture a = measured_of(f, NX, NY, RELIEF_AUTO);
    CHECK(a.relief == side);
    CHECK_NEAR(a.stretch.value, 1.15, 0.04);
    CHECK(axis_apart(a.stretch_angle_deg.value, 25.0) < 6.0);
    for (size_t k = 0; k < sizeof change / sizeof change[0]; k++) {
        size_t nx = change[k].turn ? NY : NX, ny = change[k].turn ? NX : NY;
        for (size_t y = 0; y < ny; y++)
            for (size_t x = 0; x < nx; x++)
                g[y * nx + x] = change[k].offset + change[k].gain * f[change[k].where(x, y)];
        int swap = change[k].gain < 0.0f;
        texture b = measured_of(g, nx, ny, RELIEF_AUTO);
        CHECK(b.relief == (swap ? (side == RELIEF_PORE ? RELIEF_HILLOCK : RELIEF_PORE) : side));
        double angle = a.stretch_angle_deg.value;
        if (swap) b.bright_share.value = 1.0 - b.bright_share.value; /* what was bright is dark */
        check_same(&a, &b, change[k].mirror ? 180.0 - angle : change[k].turn ? angle + 90.0 : angle, change[k].what);
        texture_free(&b);
    }
    texture_free(&a);
    rendering_free(&r);
    free(f);
    free(g);
}

/* Two measurements of one quantity agree within what both state, pixel size apart: 2.5 standard deviations. */
static void check_agree(const texture *a, const texture *b, double px_ratio, const char *what) {
    for (int q = 0; q < QUANTITIES; q++) {
        const measured *m = texture_figure(a, q), *n = texture_figure(b, q);
        if (m == &a->noise_rel || m == &a->sharpness || m == &a->stretch_angle_deg) continue; /* of the picture, not the texture */
        double scale = pow(px_ratio, -quantity_table[q].power);
        double v = n->value * scale, u = n->u_sampling * scale, w = n->u_method * scale;
        double all = sqrt(m->u_sampling * m->u_sampling + u * u + m->u_method * m->u_method + w * w);
        if (!(fabs(v - m->value) <= 2.5 * all))
            printf("%s: %s is %.6g, was %.6g +- %.3g\n", what, quantity_table[q].name, v, m->value, all);
        CHECK(fabs(v - m->value) <= 2.5 * all);
    }
}

static void check_finer_and_wider(pattern kind, double exponent, uint64_t seed) {
    render_options o = render_defaults(), fine, wide;
    rendering r = { 0 };
    o.pattern = kind;
    o.exponent = exponent;
    o.seed = seed;
    o.spacing_nm = 300.0;
    o.px_nm = 16.0;
    o.nx = 340;
    o.ny = 260;
    o.electrons = 400.0;
    fine = wide = o;
    fine.px_nm = 8.0;
    fine.nx *= 2;
    fine.ny *= 2;
    fine.blur_px *= 2.0;
    wide.nx *= 2;
    wide.ny *= 2;
    float *f = render_plane(&o, &r);
    rendering_free(&r);
    texture a = measured_of(f, o.nx, o.ny, RELIEF_HILLOCK);
    free(f);
    const render_options *other[] = { &fine, &wide };
    for (int k = 0; k < 2; k++) {
        render_options now = *other[k];
        f = render_plane(&now, &r);
        rendering_free(&r);
        texture b = measured_of(f, now.nx, now.ny, RELIEF_HILLOCK);
        check_agree(&a, &b, k ? 1.0 : 2.0, k ? "twice the field" : "twice the resolution");
        texture_free(&b);
        free(f);
    }
    texture_free(&a);
}

int main(void) {
    check_changes(RELIEF_HILLOCK);
    check_changes(RELIEF_PORE);
    check_finer_and_wider(PATTERN_HEX, 1.0, 3);
    check_finer_and_wider(PATTERN_LLOYD, 2.0, 5);
    return check_done();
}

/* A picture whose features have merged by blur must not pass for a coarser texture, nor a weakly ordered or very regular one for
 * blurred: rendered blurs on both sides of the limit of 0.25 spacings, six orders, with noise. */
#include <stdlib.h>

#include "app/render.h"
#include "base/flags.h"
#include "base/mem.h"
#include "check.h"
#include "metrics/measure.h"

static flags reasons_of(const render_options *o, double *hex) {
    rendering r = { 0 };
    texture t = { 0 };
    error e = { 0 };
    measure_options m = measure_defaults();
    flags reasons = 0;
    *hex = (double)NAN;
    CHECK(render_make(o, &r, &e) == ST_OK);
    float *px = mem_array(o->nx * o->ny, sizeof *px);
    if (px && r.samples) {
        for (size_t i = 0; i < o->nx * o->ny; i++) px[i] = (float)((const uint8_t *)r.samples)[i] / 255.0f;
        plane p = { px, o->nx, o->ny, 8, 0.0, 0.0, NULL };
        CHECK(measure_plane(&p, &m, &t, &e) == ST_OK);
        reasons = t.reasons;
        *hex = t.spacing_hex.value / r.spacing_px;
    }
    free(px);
    texture_free(&t);
    rendering_free(&r);
    return reasons;
}

int main(void) {
    static const struct {
        pattern kind;
        double disorder, exponent, electrons;
    } p[] = { { PATTERN_HEX, 0.16, 1.0, 200.0 },   { PATTERN_LLOYD, 4.0, 2.0, 200.0 }, { PATTERN_RSA, 0.70, 1.0, 200.0 },
              { PATTERN_MATERN, 0.48, 2.0, 40.0 }, { PATTERN_LLOYD, 1.0, 1.0, 40.0 },  { PATTERN_HEX, 0.08, 2.0, 40.0 } };
    for (size_t i = 0; i < sizeof p / sizeof p[0]; i++) {
        int ordered = i < 3;
        render_options o = render_defaults();
        double hex;
        o.spacing_nm = 240.0;
        o.px_nm = 10.0;
        o.nx = 560;
        o.ny = 420;
        o.pattern = p[i].kind;
        o.exponent = p[i].exponent;
        o.disorder = p[i].disorder;
        o.electrons = p[i].electrons;
        o.strip = 0;
        o.seed = 31 + i;
        o.blur_px = 0.05 * 24.0;
        CHECK(reasons_of(&o, &hex) == 0);
        CHECK_NEAR(hex, 1.0, ordered ? 0.015 : 0.05);
        o.blur_px = 0.12 * 24.0;
        CHECK(reasons_of(&o, &hex) == 0);
        if (ordered) CHECK_NEAR(hex, 1.0, 0.03);
        o.blur_px = 0.32 * 24.0;
        CHECK(reasons_of(&o, &hex) & (FLAG(BLURRED) | FLAG(NO_RING)));
    }
    return check_done();
}

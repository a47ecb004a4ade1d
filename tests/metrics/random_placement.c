/* Features at random places have no spacing; those of a hard core have one, flagged for its low order. Both have a density. */
#include "base/flags.h"
#include "check.h"
#include "rendered.h"

static texture measured_render(pattern kind, double shape, uint64_t seed) {
    render_options o = render_defaults();
    o.pattern = kind;
    o.exponent = shape;
    o.seed = seed;
    o.spacing_nm = 24.0;
    o.px_nm = 1.0;
    o.nx = 640;
    o.ny = 480;
    o.electrons = 200.0;
    o.strip = 0;
    return rendered_texture(&o);
}

int main(void) {
    for (uint64_t seed = 1; seed <= 2; seed++)
        for (int shape = 1; shape <= 2; shape++) {
            texture t = measured_render(PATTERN_RANDOM, shape, seed);
            CHECK(!isfinite(t.spacing_acf.value));
            CHECK((t.flags | t.reasons) & FLAG(NO_RING));
            texture_free(&t);
            t = measured_render(PATTERN_MATERN, shape, seed);
            CHECK(isfinite(t.spacing_acf.value) && !t.reasons);
            CHECK(t.flags & FLAG(LOW_ORDER));
            CHECK_NEAR(t.spacing_hex.value, 24.0, 0.04 * 24.0);
            texture_free(&t);
        }
    return check_done();
}

/* Astigmatism and stretch told apart on renders: a smear comes back with its direction and no stretch is taken for one. */
#include "metrics/smear.h"

#include "base/flags.h"
#include "check.h"
#include "rendered.h"

static double apart(double a, double b) { return fabs(fmod(fabs(a - b) + 90.0, 180.0) - 90.0); }

static void check_render(pattern kind, double width, double angle, double stretch, flags want) {
    render_options o = render_defaults();
    o.pattern = kind;
    o.spacing_nm = 24.0;
    o.px_nm = 1.0;
    o.nx = 480;
    o.ny = 360;
    o.electrons = 150.0;
    o.strip = 0;
    o.seed = 9;
    o.smear_px = width * 24.0;
    o.smear_angle_deg = angle;
    o.stretch = stretch;
    o.stretch_angle_deg = 70.0;
    texture t = rendered_texture(&o);
    CHECK(!t.reasons);
    CHECK((t.flags & (FLAG(ASTIGMATIC) | FLAG(STRETCHED) | FLAG(DRIFT) | FLAG(TILTED))) == want);
    if (width > 0.0) {
        CHECK_NEAR(t.smear_px / 24.0, width, 0.03);
        CHECK(apart(t.smear_angle_deg, angle) < 12.0);
    }
    texture_free(&t);
}

int main(void) {
    check_render(PATTERN_HEX, 0.0, 0.0, 1.0, 0);
    check_render(PATTERN_HEX, 0.12, 30.0, 1.0, FLAG(ASTIGMATIC));
    check_render(PATTERN_HEX, 0.12, 135.0, 1.0, FLAG(ASTIGMATIC));
    check_render(PATTERN_HEX, 0.0, 0.0, 1.15, FLAG(STRETCHED));
    check_render(PATTERN_RSA, 0.0, 0.0, 1.0, 0);
    check_render(PATTERN_RSA, 0.13, 30.0, 1.0, FLAG(ASTIGMATIC));
    check_render(PATTERN_RSA, 0.0, 0.0, 1.15, FLAG(STRETCHED));
    float none[8 * 5] = { 0.0f };
    fine_anisotropy f = smear_look(none, 8, 8, 0.0, 4.0, 0.3);
    smear s = smear_beyond(&f, 1.0, 0.01, 0.0);
    CHECK(isnan(f.u) && isnan(s.smear_px) && s.z < 1.0); /* too small a field to tell */
    return check_done();
}

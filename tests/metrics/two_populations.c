/* Two populations in patches: flagged, with the ring of one of them, never of a mean of both; and with the spacing of the other
 * where the spectrum shows it. */
#include "base/flags.h"
#include "check.h"
#include "rendered.h"

static void look(pattern kind, double share, double ratio, uint64_t seed, int shows_both) {
    render_options o = render_defaults();
    o.pattern = kind;
    o.second_share = share;
    o.second_spacing = ratio;
    o.seed = seed;
    o.spacing_nm = 22.0;
    o.px_nm = 1.0;
    o.nx = 720;
    o.ny = 540;
    o.strip = 0;
    texture t = rendered_texture(&o);
    /* Share a of the field at ratio q: density = first density (1 - a + a / q^2). */
    double first = 22.0 * sqrt(1.0 - share + share / (ratio * ratio)), second = ratio * first;
    CHECK(!t.reasons);
    CHECK(t.flags & (shows_both ? FLAG(TWO_SPACINGS) : FLAG(CONTRADICTION)));
    int ring_of_first = fabs(log(t.spacing_acf.value / first)) < fabs(log(t.spacing_acf.value / second));
    double ring = ring_of_first ? first : second, other = ring_of_first ? second : first;
    CHECK_NEAR(t.spacing_acf.value, ring, 0.10 * ring);
    if (shows_both) CHECK_NEAR(t.second_spacing_px, other, 0.15 * other);
    texture_free(&t);
}

int main(void) {
    look(PATTERN_HEX, 0.3, 2.0, 5, 1);
    look(PATTERN_HEX, 0.5, 2.0, 6, 1);
    look(PATTERN_LLOYD, 0.4, 2.0, 7, 0);
    return check_done();
}

/* The block form of the mixing rules: lanes are independent, axis and plane, pores, coatings absent in a
 * slab. Figures: tests/external/mixing.c. */
#include "optics/mixing.h"

#include <string.h>

#include "check.h"

static mixer block, single;

int main(void) {
    lanes plane, axis, one, one_axis;
    static const double share[] = { 0.37, 0.21 };
    for (int rule = 0; rule < MIXINGS; rule++)
        for (size_t phases = 2; phases <= 3; phases++)
            for (int pores = 0; pores < 2; pores++) {
                for (size_t i = 0; i < LANES; i++) {
                    lane_set(&block.eps[0], i, 1.0 + 0.01 * (double)i);
                    lane_set(&block.eps[1], i, complex_of(20.0 - 0.3 * (double)i, 0.7 * (double)i));
                    lane_set(&block.eps[2], i, complex_of(4.0, 0.01 * (double)i));
                }
                /* Newton with three phases takes as many turns as the slowest lane needs: rounding apart. */
                double same =
                    phases > 2 && (rule == MIX_BRUGGEMAN_2D || rule == MIX_BRUGGEMAN_3D) ? 1e-12 : 0.0;
                mixing_prepare(&block, (mixing)rule, pores, phases, LANES);
                mixing_at(&block, share, NULL, &plane, &axis);
                for (size_t i = 0; i < LANES; i += 7) {
                    for (size_t p = 0; p < phases; p++)
                        lane_set(&single.eps[p], 0, lane_get(&block.eps[p], i));
                    mixing_prepare(&single, (mixing)rule, pores, phases, 1);
                    mixing_at(&single, share, NULL, &one, &one_axis);
                    CHECK_NEAR(one.re[0], plane.re[i],
                               same); /* a lane does not know its neighbours: same bits */
                    CHECK_NEAR(one.im[0], plane.im[i], same);
                    CHECK_NEAR(one_axis.re[0], axis.re[i], 0);
                    double mean =
                        0.37 * block.eps[1].re[i] +
                        (phases > 2 ? 0.21 * 4.0 + 0.42 * block.eps[0].re[i] : 0.63 * block.eps[0].re[i]);
                    CHECK_NEAR(axis.re[i],
                               mixing_uniaxial((mixing)rule) || rule == MIX_VOLUME ? mean : plane.re[i],
                               1e-12);
                }
                if (phases == 3) { /* no coating in this slab: the two-phase answer */
                    static const double bare[] = { 0.37, 0.0 };
                    mixing_at(&block, bare, NULL, &plane, &axis);
                    mixing_prepare(&block, (mixing)rule, pores, 2, LANES);
                    mixing_at(&block, bare, NULL, &one, &one_axis);
                    CHECK(!memcmp(&plane, &one, sizeof one));
                }
            }
    CHECK(mixing_uniaxial(MIX_BRUGGEMAN_2D) && mixing_uniaxial(MIX_MAXWELL_GARNETT_2D));
    CHECK(!mixing_uniaxial(MIX_BRUGGEMAN_3D) && !mixing_uniaxial(MIX_LOOYENGA) &&
          !mixing_uniaxial(MIX_VOLUME));
    return check_done();
}

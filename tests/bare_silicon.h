/* Bare silicon in air on a coarse grid: the optical set-up that tests of predictions start from. The test fills the tables
 * (optical_tables.h) and frees them. */
#ifndef SWARD_TESTS_BARE_SILICON_H
#define SWARD_TESTS_BARE_SILICON_H
#include "link/predict.h"
#include "optical_tables.h"

static material silicon, air, nitride;
static sun am15g;

static inline optics_setup setup(void) {
    return (optics_setup){ .ambient = &air,
                           .substrate = &silicon,
                           .air = &air,
                           .nitride = &nitride,
                           .mixing = MIX_BRUGGEMAN_2D,
                           .reflect = reflect_defaults(),
                           .sun = &am15g,
                           .band_lo_nm = 300.0,
                           .band_hi_nm = 1200.0,
                           .step_nm = 10.0,
                           .model = OPTICS_AUTO };
}
#endif

#include "metrics/texture.h"

#include <math.h>
#include <stdlib.h>

#include "base/quantity.h"

texture texture_empty(void) {
    const measured m = { MISSING, MISSING, 0.0, 0 };
    texture t = { .relief_skew = MISSING,
                  .spacing_acf = m,
                  .spacing_psd = m,
                  .nn_mean = m,
                  .spacing_hex = m,
                  .density = m,
                  .bright_share = m,
                  .size_d10 = m,
                  .size_d50 = m,
                  .size_d90 = m,
                  .size_mean = m,
                  .size_gsd = m,
                  .top_d50 = m,
                  .clark_evans = m,
                  .sal = m,
                  .str = m,
                  .stretch = m,
                  .stretch_angle_deg = m,
                  .sharpness = m,
                  .noise_rel = m,
                  .clipped_share = MISSING,
                  .lognormal_ad = MISSING,
                  .ring_z = MISSING,
                  .pair_ring_px = MISSING,
                  .smear_px = MISSING,
                  .smear_angle_deg = MISSING,
                  .smear_z = MISSING,
                  .pair_ring_height = MISSING,
                  .pair_ring_z = MISSING,
                  .second_spacing_px = MISSING };
    return t;
}

void texture_drop_cells(texture *t) {
    free(t->cells);
    t->cells = NULL;
}

void texture_free(texture *t) {
    texture_drop_cells(t);
    free(t->features);
    for (size_t i = 0; i < t->n_curves; i++) free(t->curves[i].points);
    *t = (texture){ 0 };
}

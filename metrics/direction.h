/* Sal and Str by the definitions of ISO 25178-2, applied to the brightness map (not to heights: say so). */
#ifndef SWARD_METRICS_DIRECTION_H
#define SWARD_METRICS_DIRECTION_H
#include "metrics/spectrum.h"

/*   in  acf plain 2-D autocorrelation, s the level (0.2)
 *   out sal px (shortest decay), str = shortest / longest decay (0 when a direction never decays: a grating),
 *       angle of the longest, deg 0..180, y up */
void texture_decay(const acf2d *acf, double s, measured *sal, measured *str, double *angle_deg);

#endif

/* Autocorrelation length and texture aspect ratio by the definitions of ISO 25178-2 (Sal, Str; level 0.2),
 * applied to the brightness map: they describe the picture, not a height map.
 * Along every degree of the half plane, the first distance at which the autocorrelation falls to the level,
 * on the bicubic surface through the lags. Over a direction in which it never falls within the known lags
 * Str is 0 (a grating), never a number made from the field size. A perfectly isotropic field shows Str 0.95
 * to 0.97, because the extremes of many noisy directions are taken: no verdict should be based on Str alone.
 * u_sampling: 1.5 / sqrt(n) of Sal and 2.5 / sqrt(n) of Str with n = field area / correlation area (2 pi
 * integral C^2 r dr); repetitions on random fields gave 1.2 to 1.8 and 2.3. */
#include "metrics/direction.h"

#include <math.h>

#include "base/quantity.h"

enum { DIRECTIONS = 180 };
static const double step_px = 0.5;

/* First crossing of the level along (ux, uy); NAN when there is none within the map. */
static double decay_along(const acf2d *a, double ux, double uy, double level) {
    double last = 0.0, before = 1.0;
    for (double r = step_px;; r += step_px) {
        double c = acf2d_at(a, r * ux, r * uy);
        if (!isfinite(c)) return MISSING;
        if (c <= level) {
            double low = last, high = r, c_low = before, c_high = c;
            for (int i = 0; i < 60 && high - low > 1e-9 * high; i++) {
                /* False position, halved now and then: the bracket stays. */
                double t = i % 3 == 2 ? 0.5 : (c_low - level) / (c_low - c_high), m = low + t * (high - low);
                double cm = acf2d_at(a, m * ux, m * uy);
                if (cm <= level) {
                    high = m;
                    c_high = cm;
                } else {
                    low = m;
                    c_low = cm;
                }
            }
            return high;
        }
        last = r;
        before = c;
    }
}

/* Field area / correlation area, lags within r. */
static double independent_areas(const acf2d *a, double r) {
    long lag = (long)a->max_lag, reach = r < (double)lag ? (long)r : lag;
    double sum = 0.0;
    for (long y = 0; y <= reach; y++)
        for (long x = y ? -reach : 1; x <= reach; x++) {
            if (x * x + y * y > reach * reach) continue;
            double c = (double)a->values[(size_t)y * (2 * a->max_lag + 1) + (size_t)(x + lag)];
            sum += 2.0 * c * c;
        }
    return (double)a->nx * (double)a->ny / (1.0 + sum);
}

void texture_decay(const acf2d *acf, double s, measured *sal, measured *str, double *angle_deg) {
    double shortest = HUGE_VAL, longest = 0.0, angle = MISSING, endless_c = 0.0, endless_s = 0.0;
    size_t endless = 0;
    for (int i = 0; i < DIRECTIONS; i++) {
        double phi = PI * i / DIRECTIONS,
               r = decay_along(acf, cos(phi), -sin(phi), s); /* y of the lags is down */
        if (!isfinite(r)) {
            endless++;
            endless_c += cos(2.0 * phi);
            endless_s += sin(2.0 * phi);
            continue;
        }
        if (r < shortest) shortest = r;
        if (r > longest) {
            longest = r;
            angle = (double)i * 180.0 / DIRECTIONS;
        }
    }
    *sal = *str = (measured){ MISSING, MISSING, 0.0, 0 };
    *angle_deg = MISSING;
    if (endless == DIRECTIONS) return;
    double n = independent_areas(acf, 3.0 * shortest), u = 1.0 / sqrt(n);
    *sal = (measured){ shortest, 1.5 * u * shortest, 0.0, (size_t)n };
    *str = (measured){ shortest / longest, 2.5 * u * shortest / longest, 0.0, (size_t)n };
    if (endless) {
        str->value = str->u_sampling = 0.0;
        angle = 0.5 * atan2(endless_s, endless_c) * 180.0 / PI;
        if (angle < 0.0) angle += 180.0;
    }
    *angle_deg = angle;
}

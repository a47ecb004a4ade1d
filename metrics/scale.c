/* A first scale for pictures whose large-scale brightness hides it from the plain autocorrelation.
 *
 * f minus its Gaussian of sd s has no brightness wider than a few s. Removing it makes a trough of its own,
 * even in noise, where it lies near 1.7 s or at the noise's own width and gets shallow as s grows; so a
 * trough only counts when s is comparable to its lag, when it is deep and significant, and when it does not
 * move while s grows by half. */
#include "metrics/scale.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "metrics/filter.h"

static const double first_sd_px = 4.0, sd_growth = 1.5;
static const double settled = 0.06;       /* largest move of the trough between two lengths */
static const double least_depth = 0.04;   /* of the trough, / variance */
static const double least_length = 0.6;   /* s / lag of the trough */
static const double widest_share = 0.125; /* of the shorter side */

static status trough_without(const float *f, size_t nx, size_t ny, double sd, float *work, first_scale *out,
                             double *depth, error *e) {
    size_t half = (nx < ny ? nx : ny) / 2, lags = (size_t)(6.0 * sd) + 8;
    acf2d a = { 0 };
    curve c = { 0 };
    status st = filter_gauss(f, nx, ny, sd, work, e);
    for (size_t i = 0; st == ST_OK && i < nx * ny; i++) work[i] = f[i] - work[i];
    if (st == ST_OK) st = acf2d_make(work, nx, ny, lags < half ? lags : half, &a, e);
    if (st == ST_OK) st = acf_radial(&a, &c, e);
    *out = (first_scale){ MISSING, MISSING, 0.0 };
    if (st == ST_OK) spacing_first_scale(&c, nx, ny, out);
    *depth = isfinite(out->first_minimum_px) ? out->z * acf_standard_error(&c, out->first_minimum_px, nx, ny)
                                             : 0.0;
    free(c.points);
    acf2d_free(&a);
    return st;
}

status scale_without_background(const float *f, size_t nx, size_t ny, double min_z, first_scale *out,
                                error *e) {
    const first_scale none = { MISSING, MISSING, 0.0 };
    first_scale last = none, found = none;
    double widest = widest_share * (double)(nx < ny ? nx : ny);
    float *work = mem_array(nx * ny, sizeof *work);
    status st = work ? ST_OK : NO_MEMORY(e, "the search for a scale");
    for (double sd = first_sd_px; st == ST_OK && sd <= widest && isnan(found.scale_px); sd *= sd_growth) {
        first_scale now = none;
        double depth = 0.0;
        st = trough_without(f, nx, ny, sd, work, &now, &depth, e);
        double move = fabs(now.first_minimum_px / last.first_minimum_px - 1.0);
        int wide = sd >= least_length * now.first_minimum_px;
        if (wide && move < settled && depth > least_depth && now.z >= min_z) found = now;
        last = now;
    }
    free(work);
    if (st == ST_OK) *out = found;
    return st;
}

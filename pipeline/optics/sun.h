/* The solar spectrum as photon flux and the weighted means over it. */
#ifndef SWARD_OPTICS_SUN_H
#define SWARD_OPTICS_SUN_H
#include <stddef.h>

#include "base/status.h"

typedef enum { WEIGHT_PHOTONS, WEIGHT_ENERGY } sun_weight;

typedef struct {
    char *source;
    size_t n;
    double *wavelength_nm;  /* [n] ascending */
    double *irradiance;     /* [n] W m-2 nm-1 */
    sun_weight weight;      /* of sun_weighted: photon flux (default) or irradiance */
} sun;                      /* owned */

status sun_make(sun *s, const char *source, size_t n, const double *wavelength_nm, const double *irradiance,
                error *e);
void sun_free(sun *s);

/* Weighted mean (photon flux, or energy where the sun says so) of y (piecewise linear on the ascending grid) over lo..hi, trapezoid on the union of the
 * sun's nodes and the band's ends. err ST_BAD_INPUT band outside the sun's table or the grid. */
status sun_weighted(const sun *s, const double *wavelength_nm, const double *y, size_t n, double lo_nm, double hi_nm,
                    double *mean, error *e);
/* The mean by photon flux, whatever the sun's weight: what a current needs. */
status sun_photon_mean(const sun *s, const double *wavelength_nm, const double *y, size_t n, double lo_nm, double hi_nm,
                       double *mean, error *e);
/* Current of all photons in the band, mA/cm2 (q = 1.602176634e-19 C, h, c of SI 2019). */
status sun_current(const sun *s, double lo_nm, double hi_nm, double *mA_cm2, error *e);

#endif

/* Light that enters the wafer, returns from its rear and leaves through the front: what a spectrometer adds to the
 * reflectance of the front surface beyond about 1000 nm. */
#ifndef SWARD_OPTICS_ESCAPE_H
#define SWARD_OPTICS_ESCAPE_H
#include "base/status.h"
#include "optics/material.h"

typedef struct {
    double thickness_um;     /* of the wafer; not above 0: no rear, nothing returns */
    double rear_reflectance; /* from inside, 0..1; NAN: bare rear in air, from the index */
    int lambertian;          /* 1: light is scattered in all directions inside; 0: straight double pass */
} rear_side;

/* Share of the incident light that leaves again.
 *   in   wavelength_nm[n]; front[n] R of the front surface for the incident light; diffuse[n] the same for diffuse
 *        light (may be front); ambient_n of the medium outside
 *   out  escape[n] 0..1 - front
 *   err  ST_BAD_INPUT a wavelength outside the table, a rear reflectance outside 0..1
 *   src  Lambertian: Yablonovitch (1982) J. Opt. Soc. Am. 72, 899 and Green (2002) Prog. Photovolt. 10, 235;
 *        straight: the incoherent double pass (Airy's sum of intensities); from memory */
status escape_share(const material *wafer, const rear_side *rear, double ambient_n,
                    const double *wavelength_nm, size_t n, const double *front, const double *diffuse,
                    double *escape, error *e);

/* Transmittance of a layer of optical thickness x for Lambertian light, 2 E3(x) (Abramowitz, Stegun 5.1). */
double escape_diffuse_pass(double x);

#endif

/* Reflectance of a stack. */
#ifndef SWARD_OPTICS_REFLECTANCE_H
#define SWARD_OPTICS_REFLECTANCE_H
#include "base/status.h"
#include "optics/stack.h"
#include "optics/sun.h"

typedef struct {
    double angle_deg;        /* in air (or in the ambient when it is no laminate), 0 <= angle < 90 */
    polarization polarization;
    int hemispherical;       /* 1: diffuse light, integral of R sin 2theta over 0..90 (Gauss-Legendre in theta, 16 nodes);
                                angle_deg is then ignored */
    double tolerance;        /* slabs are doubled (with one Richardson step) until R changes less than this at every wavelength */
} reflect_options;

reflect_options reflect_defaults(void); /* normal, mean, 1e-6 */

/* R at each wavelength.
 *   in   wavelength_nm[n], any order
 *   out  R[n] 0..1; slabs_used (may be NULL): the finest slab count
 *   err  ST_BAD_INPUT a wavelength outside a material's table, an angle outside 0..90, shares that sum above 1;
 *        ST_NO_RESULT not converged within LIMIT_SLABS (R holds the best values); ST_NO_MEMORY */
status reflectance(const stack *s, const reflect_options *o, const double *wavelength_nm, size_t n, double *R,
                   size_t *slabs_used, error *e);

/* s and p at several angles at once: they share the mixing, so that it costs a third of single calls.
 *   in   angle_deg[n_angles] as above
 *   out  Rs, Rp [n_angles * n], one angle after the other
 *   err  as reflectance() */
status reflectance_angles(const stack *s, const double *angle_deg, size_t n_angles, double tolerance,
                          const double *wavelength_nm, size_t n, double *Rs, double *Rp, error *e);

#endif

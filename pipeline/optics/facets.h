/* Geometric optics of textures far larger than the wavelength: steep facets that throw light at one another. */
#ifndef SWARD_OPTICS_FACETS_H
#define SWARD_OPTICS_FACETS_H
#include "base/status.h"
#include "optics/reflectance.h"

enum { FACET_BOUNCES = 16 };

/* The facets that vertical light meets one after the other. share[k]: of the light, how much meets facet k + 1 at
 * all; share[0] = 1, never rising. */
typedef struct {
    size_t n;
    double incidence_deg[FACET_BOUNCES], share[FACET_BOUNCES];
} facet_path;

/* Facing facets of equal size that meet at the bottom, each inclined by angle_deg.
 *   in   angle_deg 0..90, held inside; below 30 there is one bounce only, from 45 on everything meets two
 *   out  for 54.7356 degrees: 54.7356, 15.7932 (all), 86.32 (one ninth) */
void facets_path(double angle_deg, facet_path *out);

/* The same path without the bounces that only a part of the light meets. */
void facets_path_common(const facet_path *p, facet_path *out);

/* Facet angle of square pyramids of this height on a base as wide as the spacing: atan(2 height / spacing). */
double facets_angle_deg(double height_nm, double spacing_nm);

/* R for unpolarised vertical light: along the path the product of the facets' R, s and p apart, coatings of uniform
 * thickness included. Interference within the coatings, none between facets.
 *   in   s ambient, planar coatings, substrate; its profile and laminate are not used
 *   out  R[n] 0..1
 *   err  as reflectance()
 *   src  Campbell, Green (1987) J. Appl. Phys. 62, 243 (the geometry); shares: facets.c */
status facets_reflectance(const stack *s, const facet_path *p, const double *wavelength_nm, size_t n,
                          double *R, error *e);

/* A field of square pyramids for light from any direction. */
typedef struct {
    double angle_deg;    /* of the facets */
    size_t bounces_most; /* light is let go after so many; 8: all that are followed */
    double goes_on;      /* of each ray, a share that meets one facet more than followed, as the last one; 0 */
} facet_field;

/* R of the field, azimuths averaged, diffuse light and laminates included: rays followed facet by facet with their
 * polarization (facets_field.c). Vertical light in air comes close to facets_reflectance().
 *   in   s as there, its laminate too; light->angle_deg outside
 *   err  ST_BAD_INPUT a wavelength outside a table; ST_NO_MEMORY
 *   src  method: Campbell, Green (1987) J. Appl. Phys. 62, 243; Baker-Finch, McIntosh (2011) Prog. Photovolt. 19, 406
 *        for classes of ray paths (both from memory) */
status facets_field_reflectance(const stack *s, const facet_field *f, const reflect_options *light, const double *wavelength_nm,
                                size_t n, double *R, error *e);

#endif

/* Light between steep facets. Two facing facets of inclination a meet at the bottom with the opening b = 180 - 2a.
 * Unfolded (each bounce mirrors the groove instead of the ray) the ray stays a vertical line at the distance x from
 * the bottom, and the facets are lines through the bottom at the angles f_k = a - k b. The line meets facet k at
 * x / cos f_k from the bottom, under the incidence |f_k|, as long as that lies on the facet: a share
 * min over j <= k of cos f_j / cos a of all x. For regular pyramids of 54.7356 degrees: two bounces for all, a third
 * for one ninth, as published for their two ray paths (Campbell, Green 1987; Baker-Finch, McIntosh 2011,
 * Prog. Photovolt. 19, 406; both from memory). A facet's plane of incidence is that of the next one, so s and p keep
 * apart all the way. Not in it: skew paths between pyramids of unequal height, rounded tips, diffraction. */
#include "optics/facets.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "optics/reflectance.h"

static const double FLATTEST = 0.01, STEEPEST = 89.99; /* degrees */

void facets_path(double angle_deg, facet_path *out) {
    double a = fmin(fmax(angle_deg, FLATTEST), STEEPEST), opening = 180.0 - 2.0 * a, share = 1.0;
    *out = (facet_path){ 0 };
    for (double f = a; f > -90.0 && out->n < FACET_BOUNCES; f -= opening) {
        share = fmin(share, cos(f * PI / 180.0) / cos(a * PI / 180.0));
        if (share < 1e-9) break;
        out->incidence_deg[out->n] = fmin(fabs(f), STEEPEST);
        out->share[out->n++] = share;
    }
}

void facets_path_common(const facet_path *p, facet_path *out) {
    *out = *p;
    while (out->n > 1 && out->share[out->n - 1] < 1.0 - 1e-9) out->n--;
}

double facets_angle_deg(double height_nm, double spacing_nm) {
    return atan2(2.0 * height_nm, spacing_nm) * 180.0 / PI;
}

status facets_reflectance(const stack *s, const facet_path *p, const double *wavelength_nm, size_t n,
                          double *R, error *e) {
    stack flat = *s;
    flat.profile = NULL;
    flat.front = (laminate){ 0 };
    double *one = mem_array(n, sizeof *one), *product = mem_array(n, sizeof *product);
    status st = one && product ? ST_OK : NO_MEMORY(e, "the reflectance of facets");
    for (size_t i = 0; i < n && !st; i++) R[i] = 0.0;
    for (int pol = POL_S; pol <= POL_P && !st; pol++) {
        for (size_t i = 0; i < n; i++) product[i] = 0.5;
        for (size_t k = 0; k < p->n && !st; k++) {
            reflect_options o = reflect_defaults();
            o.angle_deg = p->incidence_deg[k];
            o.polarization = (polarization)pol;
            double leaves = p->share[k] - (k + 1 < p->n ? p->share[k + 1] : 0.0);
            st = reflectance(&flat, &o, wavelength_nm, n, one, NULL, e);
            for (size_t i = 0; i < n && !st; i++) {
                product[i] *= one[i];
                R[i] += leaves * product[i];
            }
        }
    }
    free(product);
    free(one);
    return st;
}

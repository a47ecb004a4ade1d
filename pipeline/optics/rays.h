/* Which facets a beam of light meets one after the other in a field of square pyramids: geometry only. Internal to the
 * room. */
#ifndef SWARD_OPTICS_RAYS_H
#define SWARD_OPTICS_RAYS_H
#include <stddef.h>

#include "base/status.h"

enum { RAY_BOUNCES = 8 };

typedef struct {
    double v[3]; /* x, y in the plane of the wafer, z up */
} direction;

/* All rays of the beam that meet the same facets in the same order: they stay parallel. */
typedef struct {
    size_t n;                    /* bounces, at least 1 */
    unsigned char facet[RAY_BOUNCES]; /* 0..3: facing +x -x +y -y */
    double share;                /* of the beam */
} ray_class;

typedef struct {
    direction in; /* of the light */
    size_t n;
    ray_class *classes; /* [n] owned; shares sum to 1 */
} ray_beam;

direction facet_normal(int facet, double angle_deg); /* of a facet inclined by angle_deg */
direction reflected(const direction *d, const direction *normal);
double dot(const direction *a, const direction *b);

/* A beam from the polar angle theta (0 vertical) and azimuth phi (0 along x), over one cell of upright pyramids that touch
 * at their feet; rays that have met RAY_BOUNCES facets are let go.
 *   in   angle_deg of the facets 0..90, theta_deg 0 to below 90; across: rays a cell side
 *   err  ST_NO_MEMORY
 *   src  method: Campbell, Green (1987) J. Appl. Phys. 62, 243 follow rays between such facets (from memory) */
status rays_trace(double angle_deg, double theta_deg, double phi_deg, size_t across, ray_beam *out, error *e);
void ray_beam_free(ray_beam *b);

#endif

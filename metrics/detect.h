/* Features: markers at the scale of the texture, one per hillock or pore. */
#ifndef SWARD_METRICS_DETECT_H
#define SWARD_METRICS_DETECT_H
#include <stdint.h>

#include "base/status.h"
#include "metrics/texture.h"

typedef struct {
    feature *features; /* [n], row-major order of the unrefined marker; owned */
    uint32_t *marker;  /* [n] pixel index of the unrefined marker, owned */
    size_t n;
    double scale_px;     /* d the detection ended with */
    double body_radius_px; /* of bodies found by their outlines (outline.h); 0: found by brightness */
    double merged_share; /* how far the count depends on the criterion: (features at half the dynamic -
                          * features at twice the dynamic) / features */
} detection;

/* Iterates the scale from d0 (two rounds, stop at 2 %), then detects with the dynamic criterion (height above
 * the saddle to a higher maximum >= 0.10 of the median response), above 4 noise sd, and refines each centre
 * on Gaussian 0.10 d.
 *   in   f flattened, sign +1 hillock, -1 pore, noise sd of f, grey
 *   out  x, y, response and in_guard (guard d/2 with the final d) of the features; nn_px NAN, the rest 0. Untouched on failure
 *   err  ST_NO_RESULT fewer than 5 features; ST_BAD_INPUT d0 not above 0; ST_NO_MEMORY */
status detect(const float *f, size_t nx, size_t ny, double d0_px, int sign, double noise, detection *out,
              error *e);
void detection_free(detection *d);
/* Room for n features and markers. *out is zeroed or holds only a scale; free it after failure, too.
 * err ST_NO_MEMORY, also beyond LIMIT_FEATURES */
status detection_make(size_t n, detection *out, error *e);

/* Vertex of the least-squares quadratic through the 3 x 3 values around pixel (x, y), at most half a pixel away; the
 * pixel itself at the frame and where there is no maximum. */
void map_vertex(const float *g, size_t nx, size_t ny, size_t x, size_t y, double *vx, double *vy);

/* Features per px2: those whose centre lies at least guard inside the field, over the area inside the guard.
 * The frame itself makes maxima, so the outermost features never count. *n_inside may be NULL. NAN: no area
 * left. */
double guarded_density(const feature *features, size_t n, size_t nx, size_t ny, double guard_px,
                       size_t *n_inside);

#endif

/* Where one population of features gives way to another: a sum of plane waves of random direction and about the same
 * length, cut at the level that leaves the wanted share above it. Value over gradient is the distance to the cut to
 * first order, enough to keep two patterns from standing on each other at the seam. */
#include <math.h>
#include <stdlib.h>

#include "app/render_priv.h"
#include "base/mem.h"
#include "base/quantity.h"

enum { LEVEL_SAMPLES = 48 }; /* in each direction, to find the level */

static double waves(const patches *p, double x, double y, double *gx, double *gy) {
    double v = 0.0;
    *gx = *gy = 0.0;
    for (size_t k = 0; k < PATCH_WAVES; k++) {
        double a = p->kx[k] * x + p->ky[k] * y + p->phase[k];
        v += cos(a);
        *gx -= p->kx[k] * sin(a);
        *gy -= p->ky[k] * sin(a);
    }
    return v;
}

static int by_value(const void *a, const void *b) {
    double u = *(const double *)a, v = *(const double *)b;
    return (u > v) - (u < v);
}

status patches_make(uint64_t seed, double share, double w, double h, double length, patches *out, error *e) {
    rng r = rng_make(seed, STREAM_PATCHES);
    patches p = { .level = 0.0 };
    for (size_t k = 0; k < PATCH_WAVES; k++) {
        double a = 2.0 * PI * rng_uniform(&r), wave = 2.0 * PI / length * (0.6 + 0.8 * rng_uniform(&r));
        p.kx[k] = wave * cos(a);
        p.ky[k] = wave * sin(a);
        p.phase[k] = 2.0 * PI * rng_uniform(&r);
    }
    size_t n = (size_t)LEVEL_SAMPLES * LEVEL_SAMPLES;
    double *v = mem_array(n, sizeof *v), gx, gy;
    if (!v) return NO_MEMORY(e, "the patches of two populations");
    for (size_t k = 0; k < n; k++)
        v[k] = waves(&p, ((double)(k % LEVEL_SAMPLES) + 0.5) / LEVEL_SAMPLES * w,
                     ((double)(k / LEVEL_SAMPLES) + 0.5) / LEVEL_SAMPLES * h, &gx, &gy);
    qsort(v, n, sizeof *v, by_value);
    p.level = v[(size_t)fmin((double)n - 1.0, (1.0 - share) * (double)n)];
    free(v);
    *out = p;
    return ST_OK;
}

double patches_distance(const patches *p, double x, double y) {
    double gx, gy, v = waves(p, x, y, &gx, &gy) - p->level;
    return v / fmax(hypot(gx, gy), 1e-300);
}

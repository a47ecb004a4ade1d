/* Hillock or pore, from the extrema of the smoothed picture and their dynamics (maxima.h).
 *
 * A hillock stands high above the passes to its neighbours; the low points of the ground between touching
 * hillocks lie little below those same passes. So the dynamics of the features' own kind sum up to more. On
 * strongly ordered textures that is all there is to see (there are two low points for each top, Euler); on
 * disordered ones the low points also run together, so that the features' kind is the more numerous, and this
 * still holds where rounded, overlapping bodies or bright rims flatten the tops. The weight between the two
 * was chosen on rendered textures of known truth (cones, paraboloids, bells; four patterns; noise, blur,
 * roughness, edge brightness 0.2: all right; skewness of the curvature map, which asks only whether tops are
 * sharper than grooves, was wrong on every fourth). Strong edge brightness on rounded bodies (signal by
 * slope: tops turn dark) defeats it, as it does the eye. */
#include "metrics/relief.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "metrics/filter.h"
#include "metrics/maxima.h"

static const double min_sigma_px = 0.8;     /* a LoG below this is not sampled */
static const double count_scale = 0.12;     /* sigma of the Gaussian before counting / d */
static const double count_dynamic = 0.15;   /* what stands out, / sd of the smoothed picture */
static const double thinned_sigma_px = 1.5; /* of that Gaussian on the grid the extrema are looked for */
static const double count_weight = 0.75;
static const double least_score = 0.15; /* below: unsure */
static const double loud_skew = 0.3;    /* a skewness that contradicts the score and is above this: unsure */

/* Skewness over the plane but for a margin, where the mirrored edge shows. */
static double skewness(const float *v, size_t nx, size_t ny, size_t margin) {
    double s1 = 0.0, s2 = 0.0, s3 = 0.0;
    size_t n = 0;
    if (nx <= 2 * margin || ny <= 2 * margin) margin = 0;
    for (size_t y = margin; y < ny - margin; y++)
        for (size_t x = margin; x < nx - margin; x++) {
            double k =
                (double)v[y * nx + x]; /* the mean of a curvature map is nearly 0: no loss in one pass */
            s1 += k;
            s2 += k * k;
            s3 += k * k * k;
            n++;
        }
    double mean = s1 / (double)n, var = s2 / (double)n - mean * mean;
    double third = s3 / (double)n - 3.0 * mean * s2 / (double)n + 2.0 * mean * mean * mean;
    return var > 0.0 ? third / (var * sqrt(var)) : 0.0;
}

/* Keeps every step-th pixel of every step-th row, in place: the smoothed picture has nothing finer to lose. */
static void thin_out(float *map, size_t *nx, size_t *ny, size_t step) {
    size_t w = (*nx + step - 1) / step, h = (*ny + step - 1) / step;
    for (size_t y = 0; y < h; y++)
        for (size_t x = 0; x < w; x++) map[y * w + x] = map[y * step * *nx + x * step];
    *nx = w;
    *ny = h;
}

static double standard_deviation(const float *g, size_t n) {
    double s1 = 0.0, s2 = 0.0;
    for (size_t i = 0; i < n; i++) {
        s1 += (double)g[i];
        s2 += (double)g[i] * (double)g[i];
    }
    double mean = s1 / (double)n;
    return sqrt(fmax(0.0, s2 / (double)n - mean * mean));
}

typedef struct {
    double standing, dynamics;
} extrema;

/* The highest maximum has no dynamic and is left out. Half a count and half a step keep an empty side finite.
 */
static status extrema_sum(const float *g, size_t nx, size_t ny, double least, extrema *out, error *e) {
    maximum *m = NULL;
    size_t n = 0;
    status st = maxima_find(g, nx, ny, 1, &m, &n, e);
    *out = (extrema){ 0.5, 0.5 * least };
    for (size_t i = 0; st == ST_OK && i < n; i++) {
        double dynamic = (double)m[i].dynamic;
        if (!isfinite(dynamic)) continue;
        out->standing += dynamic >= least ? 1.0 : 0.0;
        out->dynamics += dynamic;
    }
    free(m);
    return st;
}

status relief_look(const float *f, size_t nx, size_t ny, double d_px, relief_evidence *out, error *e) {
    size_t n = nx * ny;
    relief_evidence r = { 0.0, 0.0, 0.0, 0.0, RELIEF_HILLOCK, 0 };
    extrema up = { 1.0, 1.0 }, down = { 1.0, 1.0 };
    float *map = mem_array(n, sizeof *map);
    if (!map) return NO_MEMORY(e, "the relief");
    double sigma = fmax(min_sigma_px, 0.17 * d_px);
    status st = filter_curvature(f, nx, ny, sigma, 1, map, e);
    if (st == ST_OK) r.skew = skewness(map, nx, ny, (size_t)(2.0 * sigma));
    if (st == ST_OK) st = filter_gauss(f, nx, ny, count_scale * d_px, map, e);
    double fine = count_scale * d_px / thinned_sigma_px;
    if (st == ST_OK && fine >= 2.0) thin_out(map, &nx, &ny, (size_t)fine);
    n = nx * ny;
    double least = st == ST_OK ? count_dynamic * standard_deviation(map, n) : 0.0;
    if (st == ST_OK) st = extrema_sum(map, nx, ny, least, &up, e);
    for (size_t i = 0; st == ST_OK && i < n; i++) map[i] = -map[i];
    if (st == ST_OK) st = extrema_sum(map, nx, ny, least, &down, e);
    free(map);
    if (st != ST_OK) return st;
    r.dynamics_ratio = least > 0.0 ? log(up.dynamics / down.dynamics) : 0.0;
    r.count_ratio = log(up.standing / down.standing);
    r.score = r.dynamics_ratio + count_weight * r.count_ratio;
    r.relief = r.score < 0.0 ? RELIEF_PORE : RELIEF_HILLOCK;
    r.unsure = fabs(r.score) < least_score || (fabs(r.skew) > loud_skew && (r.skew < 0.0) != (r.score < 0.0));
    *out = r;
    return ST_OK;
}

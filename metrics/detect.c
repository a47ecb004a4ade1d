/* Detection of features: maxima of the curvature map (sigma^2 LoG; Lindeberg T. 1998, Int. J. Comput. Vis.
 * 30:79, for blobs as maxima of the normalised Laplacian) at 0.17 of the spacing.
 *
 * Nothing is set by hand: the scale starts from the autocorrelation and follows the detected density; a
 * maximum counts when it stands out of the noise and when its dynamic is at least a tenth of the median
 * response, so that roughness on a hillock or a bright rim does not split it (without this the iteration runs
 * away: more maxima, smaller scale, more maxima). The factors were found on rendered micrographs of known
 * truth. Centres are refined on a less smoothed picture, because the LoG of one feature leans towards its
 * neighbours. Not done here: sizes, statistics. */
#include "metrics/detect.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "metrics/filter.h"
#include "metrics/maxima.h"
#include "metrics/spacing.h"

static const double marker_scale = 0.17;   /* sigma of the LoG / d */
static const double marker_reach = 0.15;   /* half width of the neighbourhood / d */
static const double rough_reach = 0.25;    /* the same while the scale is still searched */
static const double min_dynamic = 0.10;    /* / median response */
static const double gap_width = 1.4;       /* half width of the gap that is looked for, a factor */
static const double gap_stiffness = 0.002; /* what a factor 2 away from min_dynamic must save, / maxima */
static const double centre_scale = 0.10;   /* sigma of the Gaussian for the centres / d */
static const double max_shift = 0.02;      /* of a centre by noise, / d */
static const double max_walk = 0.30;       /* from the marker to the centre, / d */
static const double min_sigma_px = 0.8;    /* a LoG below this is not sampled */
static const double noise_sds = 4.0;
enum { MIN_FEATURES = 5, SCALE_ROUNDS = 2 };
static const double scale_settled = 0.02;

void detection_free(detection *d) {
    free(d->features);
    free(d->marker);
    *d = (detection){ 0 };
}

double guarded_density(const feature *features, size_t n, size_t nx, size_t ny, double guard_px,
                       size_t *n_inside) {
    double x1 = (double)nx - 0.5 - guard_px, y1 = (double)ny - 0.5 - guard_px, low = guard_px - 0.5;
    size_t k = 0;
    for (size_t i = 0; i < n; i++)
        k += features[i].x >= low && features[i].x < x1 && features[i].y >= low && features[i].y < y1;
    if (n_inside) *n_inside = k;
    if (!(x1 > low) || !(y1 > low)) return MISSING;
    return (double)k / ((x1 - low) * (y1 - low));
}

static double scale_sigma(double d) { return fmax(min_sigma_px, marker_scale * d); }

static size_t reach_px(double d, double share) {
    double r = floor(share * d + 0.5);
    return r < 1.0 ? 1 : (size_t)r;
}

static status no_features(size_t n, error *e) {
    return fail(e, ST_NO_RESULT,
                "%zu features found, expected at least %d; the picture may show no texture or too "
                "small a part of it",
                n, MIN_FEATURES);
}

/* Hexagonal spacing of the maxima that rule their wide neighbourhood; NAN when there are too few. */
static double scale_from_count(const float *map, size_t nx, size_t ny, double d, double floor_height,
                               const maximum *m, size_t n) {
    size_t k = 0, reach = reach_px(d, rough_reach);
    double guard = 0.5 * d;
    for (size_t i = 0; i < n; i++) {
        double x = (double)(m[i].pixel % nx), y = (double)(m[i].pixel / nx);
        if ((double)m[i].height <= floor_height || x < guard - 0.5 || y < guard - 0.5) continue;
        if (x >= (double)nx - 0.5 - guard || y >= (double)ny - 0.5 - guard) continue;
        k += (size_t)maximum_rules(map, nx, ny, m[i].pixel, reach);
    }
    double area = ((double)nx - 2.0 * guard) * ((double)ny - 2.0 * guard);
    if (k < MIN_FEATURES || (double)nx <= 2.0 * guard || (double)ny <= 2.0 * guard) return MISSING;
    return spacing_hex((double)k / area);
}

/* Follows the detected density from d0; map is working memory. */
static status scale_iterate(const float *f, size_t nx, size_t ny, int sign, double noise, float *map,
                            double *d, error *e) {
    for (int round = 0; round < SCALE_ROUNDS; round++) {
        double sigma = scale_sigma(*d);
        maximum *m = NULL;
        size_t n = 0;
        status st = filter_curvature(f, nx, ny, sigma, sign, map, e);
        if (st == ST_OK) st = maxima_find(map, nx, ny, 0, &m, &n, e);
        if (st != ST_OK) return st;
        double next = scale_from_count(map, nx, ny, *d, noise_sds * noise_after_log(noise, sigma), m, n);
        free(m);
        if (!isfinite(next)) return no_features(n, e);
        double step = fabs(next / *d - 1.0);
        *d = next;
        if (step < scale_settled) break;
    }
    return ST_OK;
}

static int by_float(const void *a, const void *b) {
    float p = *(const float *)a, q = *(const float *)b;
    return (p > q) - (p < q);
}

/* Median response; where maxima of bare ground outnumber the features, half the response that half of the sum of all
 * responses exceeds, because these many add up to little. */
static double typical_height(const maximum *m, size_t n, float *work) {
    double sum = 0.0, above = 0.0;
    for (size_t i = 0; i < n; i++) {
        work[i] = m[i].height;
        sum += (double)m[i].height;
    }
    if (!n) return 0.0;
    qsort(work, n, sizeof *work, by_float);
    double median = 0.5 * ((double)work[(n - 1) / 2] + (double)work[n / 2]);
    size_t k = n;
    while (k > 0 && above < 0.5 * sum) above += (double)work[--k];
    return fmax(median, 0.5 * (double)work[k]);
}

static size_t count_between(const maximum *m, size_t n, double low, double high) {
    size_t k = 0;
    for (size_t i = 0; i < n; i++) k += (double)m[i].dynamic >= low && (double)m[i].dynamic < high;
    return k;
}

/* The criterion, / median response: where the dynamics leave the widest gap between bumps on a feature and
 * features, looked for around 0.10. Below 0.10 only when there is nothing further down either: close pairs of
 * features reach down there, but so does roughness. */
static double dynamic_gap(const maximum *m, size_t n, double median) {
    double best = min_dynamic, fewest = HUGE_VAL;
    for (int k = -4; k <= 8; k++) {
        double t = min_dynamic * pow(2.0, k / 6.0), depth = k < 0 ? 2.0 * gap_width : gap_width;
        double c = (double)count_between(m, n, t * median / depth, t * median * gap_width);
        c += gap_stiffness * (double)n * fabs((double)k / 6.0);
        if (c < fewest) {
            fewest = c;
            best = t;
        }
    }
    return best;
}

/* Keeps the maxima above the noise that rule their neighbourhood and have the dynamic; in place. */
static status maxima_select(const float *map, size_t nx, size_t ny, double d, double floor_height, maximum *m,
                            size_t *n, double *merged_share, error *e) {
    size_t k = 0, reach = reach_px(d, marker_reach);
    for (size_t i = 0; i < *n; i++)
        if ((double)m[i].height > floor_height && maximum_rules(map, nx, ny, m[i].pixel, reach))
            m[k++] = m[i];
    float *work = mem_array(k, sizeof *work);
    if (!work) return NO_MEMORY(e, "the detection of features");
    double median = typical_height(m, k, work), least = median * dynamic_gap(m, k, median);
    free(work);
    *n = k;
    *merged_share = (double)count_between(m, k, 0.5 * least, 2.0 * least);
    k = 0;
    for (size_t i = 0; i < *n; i++)
        if ((double)m[i].dynamic >= least) m[k++] = m[i];
    *n = k;
    if (k < MIN_FEATURES) return no_features(k, e);
    *merged_share /= (double)k;
    return ST_OK;
}

void map_vertex(const float *g, size_t nx, size_t ny, size_t x, size_t y, double *vx, double *vy) {
    *vx = (double)x;
    *vy = (double)y;
    if (!x || !y || x + 1 >= nx || y + 1 >= ny) return;
    const float *p = g + y * nx + x;
    double v[3][3];
    for (ptrdiff_t j = -1; j <= 1; j++)
        for (ptrdiff_t i = -1; i <= 1; i++) v[j + 1][i + 1] = (double)p[j * (ptrdiff_t)nx + i];
    double gx = 0.0, gy = 0.0, cx = 0.0, cy = 0.0;
    for (int k = 0; k < 3;
         k++) { /* least squares over the nine values: steadier than the five of the cross */
        gx += (v[k][2] - v[k][0]) / 6.0;
        gy += (v[2][k] - v[0][k]) / 6.0;
        cx += (v[k][2] - 2.0 * v[k][1] + v[k][0]) / 3.0;
        cy += (v[2][k] - 2.0 * v[1][k] + v[0][k]) / 3.0;
    }
    double cxy = (v[2][2] - v[2][0] - v[0][2] + v[0][0]) / 4.0, det = cx * cy - cxy * cxy;
    if (!(det > 0.0) || !(cx < 0.0)) return;
    double dx = -(cy * gx - cxy * gy) / det, dy = -(cx * gy - cxy * gx) / det;
    if (fabs(dx) <= 1.0 && fabs(dy) <= 1.0) {
        *vx += fmax(-0.5, fmin(0.5, dx));
        *vy += fmax(-0.5, fmin(0.5, dy));
    }
}

/* Sigma of the Gaussian for the centres: wide enough that the noise moves a top of the mean curvature by less
 * than 0.02 d. Gradient noise of smoothed white noise of sd s: s / (sigma^2 sqrt(8 pi)); curvature c along an
 * axis of the response R = 2 sigma_m^2 c; displacement = gradient noise / c. */
static double centre_sigma(const maximum *m, size_t n, double d, double noise) {
    double mean = 0.0, marker = scale_sigma(d);
    for (size_t i = 0; i < n; i++) mean += (double)m[i].height / (double)n;
    double c = mean / (2.0 * marker * marker), least = sqrt(noise / (sqrt(8.0 * PI) * c * max_shift * d));
    return fmax(centre_scale * d, fmin(least, marker));
}

/* Refines the centres on g, the smoothed picture; a centre whose walk leaves its own top (a rim brighter than
 * the middle, a shoulder of a neighbour) stays where the detector saw it. */
static void centres_refine(const float *g, const float *map, size_t nx, size_t ny, double d, detection *det) {
    for (size_t i = 0; i < det->n; i++) {
        uint32_t top = det->marker[i];
        const float *on = maximum_uphill(g, nx, ny, max_walk * d, &top) ? g : map;
        map_vertex(on, nx, ny, top % nx, top / nx, &det->features[i].x, &det->features[i].y);
    }
}

status detection_make(size_t n, detection *out, error *e) {
    if (n > LIMIT_FEATURES)
        return fail(e, ST_NO_MEMORY, "%zu features in one micrograph, more than the limit of %zu", n,
                    LIMIT_FEATURES);
    out->features = mem_array(n, sizeof *out->features);
    out->marker = mem_array(n, sizeof *out->marker);
    if (!out->features || !out->marker) return NO_MEMORY(e, "the features");
    out->n = n;
    for (size_t i = 0; i < n; i++) out->features[i].nn_px = MISSING;
    return ST_OK;
}

static status features_make(const maximum *m, size_t n, detection *out, error *e) {
    status st = detection_make(n, out, e);
    for (size_t i = 0; st == ST_OK && i < n; i++) {
        out->marker[i] = m[i].pixel;
        out->features[i].response = (double)m[i].height;
    }
    return st;
}

status detect(const float *f, size_t nx, size_t ny, double d0_px, int sign, double noise, detection *out,
              error *e) {
    if (!(d0_px > 0.0) || !isfinite(d0_px))
        return fail(e, ST_BAD_INPUT, "detection at a scale of %g px; expected a number above 0", d0_px);
    detection det = { .scale_px = d0_px };
    maximum *m = NULL;
    size_t n = 0;
    float *map = mem_array(nx * ny, sizeof *map), *g = mem_array(nx * ny, sizeof *g);
    status st = map && g ? ST_OK : NO_MEMORY(e, "the detection of features");
    if (st == ST_OK) st = scale_iterate(f, nx, ny, sign, noise, map, &det.scale_px, e);
    double sigma = scale_sigma(det.scale_px), floor_height = noise_sds * noise_after_log(noise, sigma);
    if (st == ST_OK) st = filter_curvature(f, nx, ny, sigma, sign, map, e);
    if (st == ST_OK) st = maxima_find(map, nx, ny, 1, &m, &n, e);
    if (st == ST_OK) st = maxima_select(map, nx, ny, det.scale_px, floor_height, m, &n, &det.merged_share, e);
    if (st == ST_OK) st = features_make(m, n, &det, e);
    if (st == ST_OK) st = filter_gauss(f, nx, ny, centre_sigma(m, n, det.scale_px, noise), g, e);
    if (st == ST_OK) {
        if (sign < 0)
            for (size_t i = 0; i < nx * ny; i++) g[i] = -g[i];
        centres_refine(g, map, nx, ny, det.scale_px, &det);
        double guard = 0.5 * spacing_hex(guarded_density(det.features, n, nx, ny, 0.5 * det.scale_px, NULL));
        for (size_t i = 0; i < n; i++)
            det.features[i].in_guard = guarded_density(&det.features[i], 1, nx, ny, guard, NULL) > 0.0;
        *out = det;
        det = (detection){ 0 };
    }
    detection_free(&det);
    free(m);
    free(map);
    free(g);
    return st;
}

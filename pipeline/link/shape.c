/* The feature itself: shape family, heights of a texture, the film grown on it.
 *
 * Shape: solid share of the cell u^(2/q), u = depth below the tip / height; q = 1 cone, q = 2 paraboloid. As a solid
 * of revolution on the circular cell of radius R its radius is R sqrt(F) u^(1/q).
 * Heights: h_i = h (d_i/d_mean)^g by cell, then a normal spread of relative sd s, cut at 4 sd and at h/20 (what is
 * cut goes to the others in proportion), in 121 steps, gathered in classes that keep each bin's mean height (129; 33
 * under a film, which is smooth itself).
 * Film: every point within t of the solid (dilation by a ball), found by searching the point of the wall that
 * reaches farthest at the level asked for: a scan, then a golden section.
 * What this file does not do: shadowing, corners rounded by the film's own growth, cells that are not circles. */
#include <math.h>

#include "link/surface_priv.h"

enum { SPREAD_STEPS = 121, CELL_BINS = 64 };

double shape_share(double u, double exponent) {
    if (u <= 0.0) return 0.0;
    if (u >= 1.0) return 1.0;
    if (fabs(exponent - 1.0) < 1e-12) return u * u;
    if (fabs(exponent - 2.0) < 1e-12) return u;
    return pow(u, 2.0 / exponent);
}

/* ---- heights ---- */

typedef struct {
    size_t n;
    double at[HEIGHT_CLASSES], weight[HEIGHT_CLASSES]; /* relative heights */
} spectrum_of_heights;

/* Relative heights of the cells, area-weighted, in bins that keep their mean. */
static status cell_heights(const double *area, size_t n, double power, spectrum_of_heights *s, error *e) {
    double sum = 0.0, low = (double)INFINITY, high = 0.0, moment[CELL_BINS] = { 0 };
    for (size_t i = 0; i < n; i++) {
        if (!(area[i] > 0.0) || !isfinite(area[i]))
            return fail(e, ST_BAD_INPUT, "cell %zu has the area %g nm2, expected an area above 0", i, area[i]);
        sum += sqrt(area[i]);
    }
    double mean = sum / (double)n;
    for (size_t i = 0; i < n; i++) {
        double r = pow(sqrt(area[i]) / mean, power);
        low = fmin(low, r);
        high = fmax(high, r);
    }
    double step = high > low ? (high - low) / CELL_BINS : 1.0;
    double weight[CELL_BINS] = { 0 };
    for (size_t i = 0; i < n; i++) {
        double r = pow(sqrt(area[i]) / mean, power);
        size_t b = (size_t)((r - low) / step);
        if (b >= CELL_BINS) b = CELL_BINS - 1;
        weight[b] += area[i];
        moment[b] += area[i] * r;
    }
    s->n = 0;
    for (size_t b = 0; b < CELL_BINS; b++) {
        if (!(weight[b] > 0.0)) continue;
        s->at[s->n] = moment[b] / weight[b];
        s->weight[s->n++] = weight[b];
    }
    return ST_OK;
}

static void normal_heights(double sd, spectrum_of_heights *s) {
    *s = (spectrum_of_heights){ .n = 1, .at = { 1.0 }, .weight = { 1.0 } };
    if (!(sd > 0.0)) return;
    s->n = 0;
    for (int i = 0; i < SPREAD_STEPS; i++) {
        double z = 8.0 * (i + 0.5) / SPREAD_STEPS - 4.0, at = 1.0 + sd * z;
        if (at < 0.05) continue;
        s->at[s->n] = at;
        s->weight[s->n++] = exp(-0.5 * z * z);
    }
}

/* All pairs, gathered in equal bins that keep their mean. */
static void combine(const spectrum_of_heights *a, const spectrum_of_heights *b, size_t bins, height_classes *out) {
    double low = (double)INFINITY, high = 0.0, moment[HEIGHT_CLASSES] = { 0 }, weight[HEIGHT_CLASSES] = { 0 };
    for (size_t i = 0; i < a->n; i++)
        for (size_t j = 0; j < b->n; j++) {
            low = fmin(low, a->at[i] * b->at[j]);
            high = fmax(high, a->at[i] * b->at[j]);
        }
    double step = high > low ? (high - low) / (double)bins : 1.0;
    for (size_t i = 0; i < a->n; i++)
        for (size_t j = 0; j < b->n; j++) {
            double at = a->at[i] * b->at[j], w = a->weight[i] * b->weight[j];
            size_t k = (size_t)((at - low) / step);
            if (k >= bins) k = bins - 1;
            weight[k] += w;
            moment[k] += w * at;
        }
    out->n = 0;
    for (size_t k = 0; k < bins; k++) {
        if (!(weight[k] > 0.0)) continue;
        out->height_nm[out->n] = moment[k] / weight[k];
        out->weight[out->n++] = weight[k];
    }
}

status heights_make(double height_nm, const double *cell_area_nm2, size_t n_cells, const link_options *o, size_t bins,
                    height_classes *out, error *e) {
    spectrum_of_heights spread, cells = { .n = 1, .at = { 1.0 }, .weight = { 1.0 } };
    normal_heights(o->height_spread, &spread);
    if (cell_area_nm2 && n_cells && fabs(o->height_by_size) > 0.0) {
        status st = cell_heights(cell_area_nm2, n_cells, o->height_by_size, &cells, e);
        if (st != ST_OK) return st;
    }
    *out = (height_classes){ 0 };
    combine(&cells, &spread, bins, out);
    double sum = 0.0;
    for (size_t i = 0; i < out->n; i++) sum += out->weight[i];
    for (size_t i = 0; i < out->n; i++) {
        out->weight[i] /= sum;
        out->height_nm[i] *= height_nm;
        out->tallest_nm = fmax(out->tallest_nm, out->height_nm[i]);
    }
    return ST_OK;
}

/* ---- film ---- */

/* Radius of the wall at depth v below the surface or height above the floor, whichever way the tip lies. */
static double wall_radius(const solid *f, double v) {
    double u = 1.0 - v / f->height_nm;
    if (u <= 0.0) return 0.0;
    if (u > 1.0) u = 1.0;
    double r = fabs(f->exponent - 1.0) < 1e-12 ? u : pow(u, 1.0 / f->exponent);
    return f->cell_radius_nm * sqrt(f->coverage) * r;
}

/* What the wall point at v + t x, -1 <= x <= 1, reaches at level v: outwards (sign +1) or, for a pore, inwards (-1). */
static double reach(const solid *f, double t, double v, double sign, double x) {
    return sign * wall_radius(f, v + t * x) + t * sqrt(fmax(0.0, 1.0 - x * x));
}

/* The largest reach over from..to. A cone's is known: where the wall runs along the ball. Otherwise a golden section,
 * after a scan where the reach may have two summits (a wall that bends towards the film). */
static double farthest(const solid *f, double t, double v, double sign, double from, double to) {
    enum { SCAN = 24, GOLDEN_STEPS = 22 };
    const double golden = 0.6180339887498949;
    double base = f->cell_radius_nm * sqrt(f->coverage);
    double best = fmax(reach(f, t, v, sign, from), reach(f, t, v, sign, to));
    if (fabs(f->exponent - 1.0) < 1e-12) {
        double tangent = -sign * base / hypot(base, f->height_nm);
        return tangent > from && tangent < to ? fmax(best, reach(f, t, v, sign, tangent)) : best;
    }
    double a = from, b = to;
    if (sign < 0.0 || f->exponent < 1.0) {
        double step = (to - from) / SCAN, at = from, high = reach(f, t, v, sign, from);
        for (int i = 1; i <= SCAN; i++) {
            double g = reach(f, t, v, sign, from + i * step);
            if (g > high) {
                high = g;
                at = from + i * step;
            }
        }
        a = fmax(from, at - step);
        b = fmin(to, at + step);
    }
    double c = b - golden * (b - a), d = a + golden * (b - a);
    double gc = reach(f, t, v, sign, c), gd = reach(f, t, v, sign, d);
    for (int i = 0; i < GOLDEN_STEPS; i++) {
        if (gc > gd) {
            b = d;
            d = c;
            gd = gc;
            c = b - golden * (b - a);
            gc = reach(f, t, v, sign, c);
        } else {
            a = c;
            c = d;
            gc = gd;
            d = a + golden * (b - a);
            gd = reach(f, t, v, sign, d);
        }
    }
    return fmax(best, fmax(gc, gd));
}

double coated_share(const solid *f, double t_nm, double y_nm) {
    if (y_nm < t_nm || y_nm < 0.0) return 1.0; /* the film on the floor, or the floor itself */
    if (y_nm >= f->height_nm + t_nm) return 0.0;
    if (!(t_nm > 0.0)) return f->coverage * shape_share(1.0 - y_nm / f->height_nm, f->exponent);
    /* the wall narrows upwards, so the farthest reach comes from below, and from the feature itself */
    double to = y_nm > f->height_nm ? fmax(-1.0, (f->height_nm - y_nm) / t_nm) : 0.0;
    double r = farthest(f, t_nm, y_nm, 1.0, -1.0, to) / f->cell_radius_nm;
    return r < 1.0 ? r * r : 1.0;
}

double coated_pore_share(const solid *f, double t_nm, double x_nm) {
    if (x_nm < -t_nm) return 0.0;
    if (!(t_nm > 0.0))
        return x_nm < 0.0 ? 0.0 : 1.0 - f->coverage * shape_share(1.0 - x_nm / f->height_nm, f->exponent);
    double from = x_nm < 0.0 ? fmin(1.0, -x_nm / t_nm) : 0.0;
    double r = -farthest(f, t_nm, x_nm, -1.0, from, 1.0) / f->cell_radius_nm;
    return r > 0.0 ? 1.0 - r * r : 1.0;
}

/* The feature itself: shape family, heights of a texture, the film grown on it.
 *
 * Shape: solid share of the cell u^(2/q), u = depth below the tip / height; q = 1 cone, q = 2 paraboloid. As a solid
 * of revolution on the circular cell of radius R its radius is r(w) = a (w/H)^(1/q) at the depth w below its tip, a =
 * R sqrt(F). Real tops end lower: a flat top of the share t of the foot lies at w/H = t^(q/2); a round tip is the ball
 * of radius rho in the flank, which it touches at w where r sqrt(1 + r'^2) = rho, its centre at w + r r'. H follows from
 * the height that is left (bisection). Only flanks with q < 2 have a tip that a ball rounds everywhere, q = 2 one of
 * radius a^2/2H.
 * Heights: h_i = h (d_i/d_mean)^g by cell, then a spread of relative sd s: normal, or log-normal with the same mean and
 * sd; cut at 4 sd and at h/20 (what is cut goes to the others in proportion), in 121 steps, gathered in classes that keep
 * each bin's mean height (129; 33 under a film, which is smooth itself).
 * Film: every point within t of the solid (dilation by a ball), found by searching the point of the wall that
 * reaches farthest at the level asked for: a scan, then a golden section.
 * What this file does not do: shadowing, corners rounded by the film's own growth, cells that are not circles. */
#include <math.h>

#include "base/number.h"
#include "link/surface_priv.h"

enum { SPREAD_STEPS = 121, CELL_BINS = 64 };

double shape_share(double u, double exponent) {
    if (u <= 0.0) return 0.0;
    if (u >= 1.0) return 1.0;
    if (fabs(exponent - 1.0) < 1e-12) return u * u;
    if (fabs(exponent - 2.0) < 1e-12) return u;
    return pow(u, 2.0 / exponent);
}

int share_table_make(double exponent, share_table *t) {
    if (!(exponent >= 0.4 && exponent <= 2.0)) return 0;
    for (int i = 0; i <= SHARE_NODES; i++) t->share[i] = pow((double)i / SHARE_NODES, 4.0 / exponent);
    return 1;
}

/* As shape_share, from the solid's table where it has one. */
static double family_share(const solid *f, double u) {
    if (!f->table || u <= 0.0 || u >= 1.0) return shape_share(u, f->exponent);
    double at = sqrt(u) * SHARE_NODES;
    size_t i = (size_t)at;
    return f->table->share[i] + (at - (double)i) * (f->table->share[i + 1] - f->table->share[i]);
}

/* ---- one feature ---- */

static double flank_radius(const solid *f, double full_nm, double w) {
    double u = fmin(fmax(w / full_nm, 0.0), 1.0), r = u;
    if (f->table) r = sqrt(family_share(f, u));
    else if (fabs(f->exponent - 1.0) >= 1e-12) r = pow(u, 1.0 / f->exponent);
    return f->cell_radius_nm * sqrt(f->coverage) * r;
}

/* Where the ball touches a flank of the full height H: *w below its tip, *slope = r r' there. 0: below the foot. */
static int touch(const solid *f, double full_nm, double rho, double *w, double *slope) {
    double low = 0.0, high = full_nm;
    for (int i = 0; i <= 60; i++) {
        *w = i ? 0.5 * (low + high) : full_nm;
        double r = flank_radius(f, full_nm, *w);
        *slope = r * r / (f->exponent * *w);
        int beyond = r * r + *slope * *slope >= rho * rho;
        if (!i && !beyond) return 0;
        *(beyond ? &high : &low) = *w;
    }
    return 1;
}

/* Rounds the tip of a flank of the full height H; what is left of it, NAN where the ball touches below the foot. */
static double rounded(solid *f, double full_nm, double rho) {
    double w, slope;
    if (!touch(f, full_nm, rho, &w, &slope)) return MISSING;
    f->apex_nm = w + slope - rho;
    f->cap_radius_nm = rho;
    f->cap_depth_nm = w - f->apex_nm;
    return full_nm - f->apex_nm;
}

/* Finds the full height whose rounded feature is height_nm tall. 0: none, the ball is too large. */
static int round_tip(solid *f, double rho) {
    enum { DOUBLINGS = 12, HALVINGS = 60 };
    double foot2 = f->cell_radius_nm * f->cell_radius_nm * f->coverage, h = f->height_nm, low = h, high = h;
    if (f->exponent > 2.0 || (f->exponent > 2.0 - 1e-9 && 2.0 * h * rho <= foot2)) return 1; /* rounder as it is */
    double left = rounded(f, high, rho);
    for (int i = 0; i < DOUBLINGS && left < h; i++) {
        low = high;
        high *= 2.0;
        left = rounded(f, high, rho);
    }
    for (int i = 0; i < HALVINGS && left >= h; i++) {
        double full = 0.5 * (low + high);
        *(rounded(f, full, rho) >= h ? &high : &low) = full;
    }
    left = rounded(f, high, rho);
    return left >= h * (1.0 - 1e-9) && f->cap_depth_nm > 0.0 && f->cap_depth_nm < h;
}

double link_height_cut(const link_options *o) {
    return o->flat_top > 0.0 ? pow(o->flat_top, 0.5 * o->exponent) : 0.0;
}

solid solid_make(double height_nm, double cell_radius_nm, const link_options *o, int *fits) {
    solid f = { .height_nm = height_nm, .cell_radius_nm = cell_radius_nm, .exponent = o->exponent,
                .coverage = o->coverage };
    solid plain = f;
    int round = 1;
    double cut = link_height_cut(o);
    if (cut > 0.0) f.apex_nm = height_nm * cut / (1.0 - cut);
    else if (o->tip_radius_nm > 0.0 && height_nm > 0.0 && o->coverage > 0.0) round = round_tip(&f, o->tip_radius_nm);
    if (fits) *fits = round;
    plain.exponent = 2.0;
    return round ? f : plain;
}

double cell_radius(double spacing_nm, const double *cell_area_nm2, size_t n_cells) {
    double sum = 0.0;
    if (!cell_area_nm2 || !n_cells) return spacing_nm * sqrt(sqrt(3.0) / 2.0 / PI);
    for (size_t i = 0; i < n_cells; i++) sum += cell_area_nm2[i];
    return sqrt(sum / (double)n_cells / PI);
}

status tip_check(double height_nm, double cell_radius_nm, const link_options *o, error *e) {
    int fits = 1;
    char rho[NUMBER_TEXT], h[NUMBER_TEXT], wide[NUMBER_TEXT];
    if (!(o->tip_radius_nm > 0.0) || !(height_nm > 0.0)) return ST_OK;
    if (!(cell_radius_nm > 0.0))
        return fail(e, ST_BAD_INPUT, "a tip radius needs the spacing of the features, and none is known; give a spacing");
    solid_make(height_nm, cell_radius_nm, o, &fits);
    if (fits) return ST_OK;
    return fail(e, ST_BAD_INPUT,
                "tip_radius_nm: a tip of %s nm radius leaves no flank on features %s nm tall and %s nm wide; give a smaller one",
                number_text(o->tip_radius_nm, 4, rho), number_text(height_nm, 4, h),
                number_text(2.0 * cell_radius_nm, 4, wide));
}

double tip_radius_held(double height_nm, double cell_radius_nm, const link_options *o) {
    enum { HALVINGS = 30 };
    link_options l = *o;
    int fits = 1;
    double low = 0.0, high = o->tip_radius_nm;
    if (!(high > 0.0) || !(height_nm > 0.0) || !(cell_radius_nm > 0.0)) return o->tip_radius_nm;
    solid_make(height_nm, cell_radius_nm, o, &fits);
    if (fits) return high;
    for (int i = 0; i < HALVINGS; i++) {
        l.tip_radius_nm = 0.5 * (low + high);
        solid_make(height_nm, cell_radius_nm, &l, &fits);
        *(fits ? &low : &high) = l.tip_radius_nm;
    }
    return low;
}

/* Radius of the wall at a depth below the top. */
static double wall_at(const solid *f, double depth_nm) {
    if (depth_nm < f->cap_depth_nm) return sqrt(fmax(0.0, depth_nm * (2.0 * f->cap_radius_nm - depth_nm)));
    return flank_radius(f, f->height_nm + f->apex_nm, depth_nm + f->apex_nm);
}

double solid_share(const solid *f, double depth_nm) {
    if (depth_nm < 0.0) return 0.0;
    if (depth_nm < f->cap_depth_nm) {
        double r = wall_at(f, depth_nm) / f->cell_radius_nm;
        return r * r;
    }
    return f->coverage * family_share(f, (depth_nm + f->apex_nm) / (f->height_nm + f->apex_nm));
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

static void spread_heights(double sd, int lognormal, spectrum_of_heights *s) {
    *s = (spectrum_of_heights){ .n = 1, .at = { 1.0 }, .weight = { 1.0 } };
    if (!(sd > 0.0)) return;
    s->n = 0;
    double sigma = sqrt(log1p(sd * sd));
    for (int i = 0; i < SPREAD_STEPS; i++) {
        double z = 8.0 * (i + 0.5) / SPREAD_STEPS - 4.0;
        double at = lognormal ? exp(sigma * (z - 0.5 * sigma)) : 1.0 + sd * z;
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
    out->width_nm = high > low ? step : 0.0;
    for (size_t k = 0; k < bins; k++) {
        if (!(weight[k] > 0.0)) continue;
        out->height_nm[out->n] = moment[k] / weight[k];
        out->weight[out->n++] = weight[k];
    }
}

status heights_make(double height_nm, const double *cell_area_nm2, size_t n_cells, const link_options *o, size_t bins,
                    height_classes *out, error *e) {
    spectrum_of_heights spread, cells = { .n = 1, .at = { 1.0 }, .weight = { 1.0 } };
    spread_heights(o->height_spread, o->lognormal, &spread);
    if (cell_area_nm2 && n_cells && fabs(o->height_by_size) > 0.0) {
        status st = cell_heights(cell_area_nm2, n_cells, o->height_by_size, &cells, e);
        if (st != ST_OK) return st;
    }
    *out = (height_classes){ 0 };
    combine(&cells, &spread, bins, out);
    double sum = 0.0;
    for (size_t i = 0; i < out->n; i++) sum += out->weight[i];
    out->width_nm *= height_nm;
    for (size_t i = 0; i < out->n; i++) {
        out->weight[i] /= sum;
        out->height_nm[i] *= height_nm;
        out->tallest_nm = fmax(out->tallest_nm, out->height_nm[i]);
    }
    return ST_OK;
}

/* ---- film ---- */

/* Radius of the wall at the height v above the floor (of a pore: depth below the surface). */
static double wall_radius(const solid *f, double v) {
    double depth = f->height_nm - v;
    if (depth < -1e-12 * f->height_nm) return 0.0; /* the rim of a flat top still counts */
    return wall_at(f, fmin(fmax(depth, 0.0), f->height_nm));
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
    if (fabs(f->exponent - 1.0) < 1e-12 && !(f->cap_depth_nm > 0.0)) {
        double tangent = -sign * base / hypot(base, f->height_nm + f->apex_nm);
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
    if (!(t_nm > 0.0)) return solid_share(f, f->height_nm - y_nm);
    /* the wall narrows upwards, so the farthest reach comes from below, and from the feature itself */
    double to = y_nm > f->height_nm ? fmax(-1.0, (f->height_nm - y_nm) / t_nm) : 0.0;
    double r = farthest(f, t_nm, y_nm, 1.0, -1.0, to) / f->cell_radius_nm;
    return r < 1.0 ? r * r : 1.0;
}

double coated_pore_share(const solid *f, double t_nm, double x_nm) {
    if (x_nm < -t_nm) return 0.0;
    if (!(t_nm > 0.0))
        return x_nm < 0.0 ? 0.0 : 1.0 - solid_share(f, f->height_nm - x_nm);
    double from = x_nm < 0.0 ? fmin(1.0, -x_nm / t_nm) : 0.0;
    double r = -farthest(f, t_nm, x_nm, -1.0, from, 1.0) / f->cell_radius_nm;
    return r > 0.0 ? 1.0 - r * r : 1.0;
}

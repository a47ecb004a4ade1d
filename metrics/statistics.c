/* From features to the numbers of a field, each with the part of its uncertainty that another field would
 * change.
 *
 * Only whole cells count for sizes, weighted for the border (sizes.h); the density counts centres inside a
 * guard frame of half a spacing; neighbour distances follow Hanisch. Method parts: see the table at the end.
 */
#include "metrics/statistics.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "metrics/neighbours.h"
#include "metrics/sizes.h"
#include "metrics/spacing.h"
#include "metrics/uncertainty.h"

/* Columns over all features of a field. */
typedef struct {
    double *x, *y, *ecd, *top, *nn, *weight, *mark;
    size_t n;
    window field;
    double unit; /* spacing, px */
    const hole *holes;
} columns;

static status columns_make(const texture *t, size_t nx, size_t ny, double unit, columns *c, error *e) {
    size_t n = t->n_found;
    double *v = mem_array(7 * n, sizeof *v);
    if (!v) return NO_MEMORY(e, "the statistics of the features");
    *c = (columns){ v,         v + n,     v + 2 * n,
                    v + 3 * n, v + 4 * n, v + 5 * n,
                    v + 6 * n, n,         { -0.5, -0.5, (double)nx - 0.5, (double)ny - 0.5 },
                    unit, NULL };
    for (size_t i = 0; i < n; i++) {
        const feature *f = &t->features[i];
        c->x[i] = f->x;
        c->y[i] = f->y;
        c->ecd[i] = f->cell_ecd_px;
        c->top[i] = f->top_ecd_px;
        c->weight[i] = f->weight;
    }
    return ST_OK;
}

/* The same kept away from holes, too: what is cut by them may be found or not. Sets in_guard. */
static double holed_density(texture *t, const hole *h, window w, double guard) {
    double area = (w.x1 - w.x0) * (w.y1 - w.y0) - hole_area(h, w.x0, w.y0, w.x1, w.y1, guard);
    size_t n = 0;
    for (size_t i = 0; i < t->n_found; i++) {
        feature *f = &t->features[i];
        f->in_guard = f->in_guard && hole_distance(h, f->x, f->y) >= guard;
        n += f->in_guard != 0;
    }
    t->n_features = n;
    return area > 0.0 ? (double)n / area : MISSING;
}

/* Density inside the guard of half a spacing, and the spacing of a hexagonal lattice as dense. */
static status density_fill(texture *t, size_t nx, size_t ny, columns *c, error *e) {
    double guard = 0.5 * c->unit, sd = MISSING;
    double density = guarded_density(t->features, t->n_found, nx, ny, guard, &t->n_features);
    if (!(density > 0.0)) return ST_OK;
    window w = { guard - 0.5, guard - 0.5, (double)nx - 0.5 - guard, (double)ny - 0.5 - guard };
    for (size_t i = 0; i < c->n; i++) {
        const feature *f = &t->features[i];
        int in = f->x >= w.x0 && f->x < w.x1 && f->y >= w.y0 && f->y < w.y1;
        t->features[i].in_guard = in;
    }
    if (c->holes->distance) density = holed_density(t, c->holes, w, guard);
    if (!(density > 0.0)) return ST_OK;
    for (size_t i = 0; i < c->n; i++) c->mark[i] = t->features[i].in_guard ? 1.0 : 0.0;
    size_t inside = 0; /* only these may enter the tiles */
    double *x = mem_array(3 * c->n, sizeof *x), *y = x ? x + c->n : NULL, *one = x ? y + c->n : NULL;
    if (!x) return NO_MEMORY(e, "the density");
    for (size_t i = 0; i < c->n; i++)
        if (c->mark[i] > 0.0) {
            x[inside] = c->x[i];
            y[inside] = c->y[i];
            one[inside++] = 1.0;
        }
    status st = field_sum_sd(x, y, one, inside, w, c->unit, &sd, e);
    free(x);
    /* Too small for tiles: 0.28 features of variance per spacing of perimeter, as on rendered ordered textures. */
    if (!isfinite(sd)) sd = sqrt(0.28 * 2.0 * (w.x1 - w.x0 + w.y1 - w.y0) / c->unit);
    double rel = sd / (double)t->n_features;
    t->density = (measured){ density, density * rel, 0.0, t->n_features };
    t->spacing_hex = (measured){ spacing_hex(density), 0.5 * rel * spacing_hex(density), 0.0, t->n_features };
    return st;
}

/* A nearer neighbour may lie in a hole. */
static int hides_neighbour(const columns *c, size_t i) { return c->nn[i] > hole_distance(c->holes, c->x[i], c->y[i]); }

static status nn_mean_fill(texture *t, const columns *c, error *e) {
    if (!c->holes->distance) {
        t->nn_mean = nn_mean_hanisch(c->x, c->y, c->nn, c->n, c->field);
        return ST_OK;
    }
    double *v = mem_array(3 * c->n, sizeof *v);
    size_t n = 0;
    if (!v) return NO_MEMORY(e, "the neighbours");
    double *x = v, *y = v + c->n, *nn = y + c->n;
    for (size_t i = 0; i < c->n; i++)
        if (!hides_neighbour(c, i)) x[n] = c->x[i], y[n] = c->y[i], nn[n++] = c->nn[i];
    t->nn_mean = nn_mean_hanisch(x, y, nn, n, c->field);
    free(v);
    return ST_OK;
}

/* The field without its holes, as a rectangle as wide: what counts is its area. */
static window solid_field(const columns *c) {
    window w = c->field;
    double lost = hole_area(c->holes, w.x0, w.y0, w.x1, w.y1, 0.0);
    w.y1 -= lost / (w.x1 - w.x0);
    return w;
}

static status neighbour_fill(texture *t, columns *c, error *e) {
    status st = nearest_neighbours(c->x, c->y, c->n, c->field, c->nn, e);
    if (st != ST_OK) return st;
    for (size_t i = 0; i < c->n; i++) {
        t->features[i].nn_px = c->nn[i];
        c->mark[i] = hides_neighbour(c, i) ? 0.0 : hanisch_weight(c->x[i], c->y[i], c->nn[i], c->field);
    }
    st = nn_mean_fill(t, c, e);
    if (st != ST_OK) return st;
    sample_of_features s = { c->x, c->y, c->nn, c->mark, c->n, c->field, c->unit };
    st = u_of_mean(&s, t->nn_mean.value, &t->nn_mean.u_sampling, e);
    if (st != ST_OK) return st;
    double r = clark_evans_donnelly(c->nn, c->n, solid_field(c)), mean = series_mean(c->nn, c->n), u = MISSING;
    /* R = 2 mean(nn) sqrt(n / A): its influence joins the distances and half of the count. */
    for (size_t i = 0; i < c->n; i++) c->mark[i] = r / (double)c->n * (c->nn[i] / mean - 0.5);
    st = field_sum_sd(c->x, c->y, c->mark, c->n, c->field, c->unit, &u, e);
    if (!isfinite(u)) u = r * 0.26 / sqrt((double)c->n); /* random placement: an upper bound */
    t->clark_evans = (measured){ r, u, 0.0, c->n };
    return st;
}

enum { D10, D50, D90, ASKED };

/* Quantiles at p and at p -+ step for the slope behind their uncertainty. */
static status quantile_fill(const sample_of_features *s, double p, size_t n, measured *out, error *e) {
    double step = fmin(0.1, 0.5 * fmin(p, 1.0 - p)), at[3] = { p - step, p, p + step }, q[3];
    status st = quantiles(s->v, s->w, s->n, at, 3, q, e);
    double u = MISSING;
    if (st == ST_OK) st = u_of_quantile(s, p, q[1], step, q[0], q[2], &u, e);
    if (st == ST_OK) *out = (measured){ q[1], u, 0.0, n };
    return st;
}

static status size_fill(texture *t, columns *c, error *e) {
    sample_of_features s = { c->x, c->y, c->ecd, c->weight, c->n, c->field, c->unit };
    size_t whole = 0;
    for (size_t i = 0; i < c->n; i++)
        if (c->weight[i] > 0.0) c->mark[whole++] = c->ecd[i];
    if (whole < 3) return ST_OK;
    status st = quantile_fill(&s, 0.1, whole, &t->size_d10, e);
    if (st == ST_OK) st = quantile_fill(&s, 0.5, whole, &t->size_d50, e);
    if (st == ST_OK) st = quantile_fill(&s, 0.9, whole, &t->size_d90, e);
    if (st != ST_OK) return st;
    t->size_mean = (measured){ weighted_mean(c->ecd, c->weight, c->n), MISSING, 0.0, whole };
    t->size_gsd = (measured){ geometric_sd(c->ecd, c->weight, c->n), MISSING, 0.0, whole };
    st = u_of_mean(&s, t->size_mean.value, &t->size_mean.u_sampling, e);
    if (st == ST_OK) st = u_of_gsd(&s, t->size_gsd.value, &t->size_gsd.u_sampling, e);
    if (st != ST_OK) return st;
    lognormal_fit fit;
    error ignored = { ST_OK, "" }; /* cells of one size have no fit: lognormal_ad stays NAN */
    st = lognormal(c->mark, whole, &fit, &ignored);
    if (st == ST_OK) t->lognormal_ad = fit.a2_star;
    if (st == ST_NO_MEMORY) return NO_MEMORY(e, "the log-normal fit");
    s.v = c->top;
    return quantile_fill(&s, 0.5, whole, &t->top_d50, e);
}

status statistics_fill(texture *t, size_t nx, size_t ny, const detection *d, const hole *h, error *e) {
    columns c = { 0 };
    status st = columns_make(t, nx, ny, d->scale_px, &c, e);
    c.holes = h;
    if (st == ST_OK) st = density_fill(t, nx, ny, &c, e);
    if (st == ST_OK) st = neighbour_fill(t, &c, e);
    if (st == ST_OK) st = size_fill(t, &c, e);
    free(c.x);
    return st;
}

static void method(measured *m, double relative) {
    if (isfinite(m->value)) m->u_method = relative * fabs(m->value);
}

void statistics_uncertainty(texture *t, const detection *d) {
    int ordered = t->clark_evans.value >= 1.5;
    double count = fmax(0.005, 0.5 * d->merged_share);
    t->count_u_rel = count;
    method(&t->density, count);
    method(&t->spacing_hex, 0.5 * count);
    /* Noise moves centres, which shortens the mean of nearest distances. */
    double shifted = t->noise_rel.value > 0.0 ? 0.015 * fmin(t->noise_rel.value, 2.0) : 0.0;
    method(&t->nn_mean, 0.005 + 0.5 * count + shifted);
    method(&t->clark_evans, 0.005 + 0.5 * count + shifted);
    method(&t->spacing_acf, ordered ? 0.04 : 0.08);
    if (isfinite(t->spacing_acf
                     .value)) { /* the ring of weakly ordered textures is broad and wanders: 4 % at N = 550 */
        double own = ordered ? 0.17 : 0.85, hex = t->spacing_hex.u_sampling / t->spacing_hex.value;
        t->spacing_acf.u_sampling = t->spacing_acf.value * fmax(own / sqrt((double)t->n_features), hex);
    }
    method(&t->spacing_psd, 0.02);
    method(&t->size_d10, 0.007 + count);
    method(&t->size_d50, 0.003 + 0.5 * count);
    method(&t->size_d90, 0.006 + count);
    method(&t->size_mean, 0.003 + 0.5 * count);
    method(&t->size_gsd, 0.005);
    method(&t->top_d50, 0.10);
}

/* Value below which a share p of the pixels lies, from a histogram of 65536 steps. */
static double grey_quantile(const size_t *count, size_t bins, size_t n, double p, double low, double step) {
    double before = 0.0, want = p * (double)n;
    for (size_t i = 0; i < bins; i++) {
        if (count[i] && before + (double)count[i] >= want)
            return low + step * ((double)i + (want - before) / (double)count[i]);
        before += (double)count[i];
    }
    return low + step * (double)bins;
}

static status bright_level(const float *f, const unsigned char *mask, size_t n, double share, double *level, error *e) {
    enum { BINS = 65536 };
    size_t *count = mem_array(BINS, sizeof *count);
    if (!count) return NO_MEMORY(e, "the grey levels");
    double low = (double)f[0], high = low;
    for (size_t i = 1; i < n; i++) {
        low = fmin(low, (double)f[i]);
        high = fmax(high, (double)f[i]);
    }
    double step = (high - low) / BINS;
    size_t seen = 0;
    for (size_t i = 0; i < n && step > 0.0; i++) {
        if (mask && mask[i]) continue; /* filled smoothly: within the range of the others */
        seen++;
        double k = ((double)f[i] - low) / step;
        count[k < BINS - 1 ? (size_t)k : BINS - 1]++;
    }
    double dark = grey_quantile(count, BINS, seen, 0.01, low, step),
           light = grey_quantile(count, BINS, seen, 0.99, low, step);
    *level = dark + share * (light - dark);
    free(count);
    return ST_OK;
}

status bright_share(const float *f, const unsigned char *mask, size_t nx, size_t ny, double level, double unit_px, measured *out,
                    error *e) {
    double limit = 0.0, narrow = (double)(nx < ny ? nx : ny);
    size_t seen = 0;
    status st = bright_level(f, mask, nx * ny, level, &limit, e);
    if (st != ST_OK) return st;
    double unit = isfinite(unit_px) ? fmin(unit_px, narrow / 8.0) : narrow / 16.0;
    size_t side = unit > 4.0 ? (size_t)(0.5 * unit) : 2, bx = nx / side, by = ny / side, above = 0;
    double *v = mem_array(3 * bx * by, sizeof *v), sd = MISSING;
    if (!v) return NO_MEMORY(e, "the bright share");
    double *x = v, *y = v + bx * by, *mark = y + bx * by;
    for (size_t k = 0; k < bx * by; k++) {
        x[k] = ((double)(k % bx) + 0.5) * (double)side;
        y[k] = ((double)(k / bx) + 0.5) * (double)side;
    }
    for (size_t j = 0; j < ny; j++)
        for (size_t i = 0; i < nx; i++) {
            if (mask && mask[j * nx + i]) continue;
            seen++;
            if ((double)f[j * nx + i] <= limit) continue;
            above++;
            if (i / side < bx && j / side < by) mark[j / side * bx + i / side] += 1.0;
        }
    window w = { 0.0, 0.0, (double)(bx * side), (double)(by * side) };
    st = field_sum_sd(x, y, mark, bx * by, w, (double)(2 * side), &sd, e);
    free(v);
    double n = (double)(seen ? seen : 1), share = (double)above / n;
    if (!isfinite(sd)) sd = n * sqrt(share * (1.0 - share) * unit * unit / n);
    if (st == ST_OK) *out = (measured){ share, sd / n, 0.0, seen };
    return st;
}

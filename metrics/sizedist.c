/* Moment means, area weighting, kernel density, hexagonal order.
 *
 * All statistics run over whole cells with their border weights, like the quantiles of statistics.c; area weighting multiplies
 * by the square of the diameter. Neighbours for the order parameter are those within 1.37 spacings, midway between the first and
 * the second shell of a hexagonal lattice. Not in here: uncertainties; these figures describe, no verdict rests on them. */
#include "metrics/sizedist.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "metrics/sizes.h"

double moment_mean(const double *x, const double *w, size_t n, int p, int q) {
    double up = 0.0, down = 0.0;
    for (size_t i = 0; i < n; i++)
        if (w[i] > 0.0) {
            up += w[i] * pow(x[i], p);
            down += w[i] * pow(x[i], q);
        }
    return p != q && down > 0.0 ? pow(up / down, 1.0 / (double)(p - q)) : MISSING;
}

/* Whole cells as columns. */
typedef struct {
    double *x, *w, *area; /* diameter, border weight, weight times area */
    size_t n;
} cells;

static status cells_take(const texture *t, cells *c, error *e) {
    double *v = mem_array(3 * t->n_found, sizeof *v);
    if (!v) return NO_MEMORY(e, "the sizes");
    *c = (cells){ v, v + t->n_found, v + 2 * t->n_found, 0 };
    for (size_t i = 0; i < t->n_found; i++) {
        const feature *f = &t->features[i];
        if (!(f->weight > 0.0)) continue;
        c->x[c->n] = f->cell_ecd_px;
        c->w[c->n] = f->weight;
        c->area[c->n++] = f->weight * f->cell_ecd_px * f->cell_ecd_px;
    }
    return ST_OK;
}

static status distribution(const cells *c, size_summary *s, error *e) {
    static const double ten_fifty_ninety[] = { 0.1, 0.5, 0.9 }, quarters[] = { 0.25, 0.75 };
    double q[3], half[2], mean = weighted_mean(c->x, c->w, c->n), ss = 0.0, sw = 0.0;
    lognormal_fit fit;
    error ignored = { ST_OK, "" };
    s->d10 = moment_mean(c->x, c->w, c->n, 1, 0);
    s->d20 = moment_mean(c->x, c->w, c->n, 2, 0);
    s->d30 = moment_mean(c->x, c->w, c->n, 3, 0);
    s->d21 = moment_mean(c->x, c->w, c->n, 2, 1);
    s->d32 = moment_mean(c->x, c->w, c->n, 3, 2);
    s->d43 = moment_mean(c->x, c->w, c->n, 4, 3);
    status st = quantiles(c->x, c->area, c->n, ten_fifty_ninety, 3, q, e);
    if (st != ST_OK) return st;
    s->area_d10 = q[0];
    s->area_d50 = q[1];
    s->area_d90 = q[2];
    st = quantiles(c->x, c->w, c->n, ten_fifty_ninety, 3, q, e);
    if (st == ST_OK) st = quantiles(c->x, c->w, c->n, quarters, 2, half, e);
    if (st != ST_OK) return st;
    s->span = (q[2] - q[0]) / q[1];
    for (size_t i = 0; i < c->n; i++) {
        ss += c->w[i] * (c->x[i] - mean) * (c->x[i] - mean);
        sw += c->w[i];
    }
    s->bandwidth = 0.9 * fmin(sqrt(ss / sw), (half[1] - half[0]) / 1.34) * pow((double)c->n, -0.2);
    s->bin = 2.0 * (half[1] - half[0]) * pow((double)c->n, -1.0 / 3.0);
    st = lognormal(c->x, c->n, &fit, &ignored); /* cells of one size have no fit */
    if (st == ST_NO_MEMORY) return NO_MEMORY(e, "the log-normal fit");
    if (st == ST_OK) {
        s->lognormal_median = exp(fit.mu);
        s->lognormal_gsd = exp(fit.sigma);
        s->a2 = fit.a2_star;
    }
    return ST_OK;
}

static void shapes(const texture *t, size_summary *s) {
    double sw = 0.0;
    s->circularity = s->aspect_ratio = s->feret_min = s->feret_max = 0.0;
    for (size_t i = 0; i < t->n_found; i++) {
        const feature *f = &t->features[i];
        if (!(f->weight > 0.0)) continue;
        int bin = f->n_neighbours < 3 ? 0 : f->n_neighbours > 12 ? NEIGHBOUR_BINS - 1 : f->n_neighbours - 3;
        sw += f->weight;
        s->circularity += f->weight * sqrt(4.0 * PI * f->cell_area_px2) / f->perimeter_px;
        s->aspect_ratio += f->weight * f->feret_min_px / f->feret_max_px;
        s->feret_min += f->weight * f->feret_min_px;
        s->feret_max += f->weight * f->feret_max_px;
        s->neighbours[bin] += f->weight;
    }
    s->circularity /= sw;
    s->aspect_ratio /= sw;
    s->feret_min /= sw;
    s->feret_max /= sw;
    for (int k = 0; k < NEIGHBOUR_BINS; k++) s->neighbours[k] /= sw;
}

typedef struct {
    double y;
    size_t i;
} row;

static int by_y(const void *a, const void *b) {
    const row *p = a, *q = b;
    if (p->y < q->y || p->y > q->y) return p->y < q->y ? -1 : 1;
    return (p->i > q->i) - (p->i < q->i);
}

status hexagonal_order(const double *x, const double *y, const int *keep, size_t n, double reach, double *psi6, error *e) {
    row *r = mem_array(n, sizeof *r);
    double sum = 0.0;
    size_t kept = 0;
    if (!r) return NO_MEMORY(e, "the order of the features");
    for (size_t i = 0; i < n; i++) r[i] = (row){ y[i], i };
    qsort(r, n, sizeof *r, by_y);
    for (size_t a = 0, first = 0; a < n; a++) {
        size_t i = r[a].i, found = 0;
        double c = 0.0, s = 0.0;
        while (r[first].y < r[a].y - reach) first++;
        if (!keep[i]) continue;
        for (size_t b = first; b < n && r[b].y <= r[a].y + reach; b++) {
            size_t j = r[b].i;
            double dx = x[j] - x[i], dy = y[j] - y[i];
            if (j == i || dx * dx + dy * dy >= reach * reach) continue;
            double angle = 6.0 * atan2(dy, dx);
            c += cos(angle);
            s += sin(angle);
            found++;
        }
        kept++;
        if (found) sum += hypot(c, s) / (double)found;
    }
    free(r);
    *psi6 = kept ? sum / (double)kept : MISSING;
    return ST_OK;
}

static status order(const texture *t, size_summary *s, error *e) {
    const double between_shells = 1.37;
    double reach = between_shells * t->spacing_hex.value;
    size_t n = t->n_found;
    if (!(reach > 0.0)) return ST_OK;
    double *xy = mem_array(2 * n, sizeof *xy);
    int *keep = mem_array(n, sizeof *keep);
    status st = xy && keep ? ST_OK : NO_MEMORY(e, "the order of the features");
    for (size_t i = 0; st == ST_OK && i < n; i++) {
        const feature *f = &t->features[i];
        xy[i] = f->x;
        xy[n + i] = f->y; /* all neighbours in sight: away from the frame by the reach */
        keep[i] = f->x > reach && f->y > reach && f->x < (double)t->nx - reach && f->y < (double)t->ny - reach;
    }
    if (st == ST_OK) st = hexagonal_order(xy, xy + n, keep, n, reach, &s->psi6, e);
    free(keep);
    free(xy);
    return st;
}

status size_summarise(const texture *t, size_summary *out, error *e) {
    const double m = MISSING;
    size_summary s = { 0, m, m, m, m, m, m, m, m, m, m, m, m, m, m, m, m, m, m, m, m, { 0.0 } };
    cells c = { 0 };
    status st = t->n_found ? cells_take(t, &c, e) : ST_OK;
    s.n = c.n;
    if (st == ST_OK && c.n >= 3) {
        st = distribution(&c, &s, e);
        shapes(t, &s);
    }
    if (st == ST_OK && t->n_found) st = order(t, &s, e);
    free(c.x);
    if (st == ST_OK) *out = s;
    return st;
}

status size_density(const texture *t, const size_summary *s, double *x, double *y, size_t n, error *e) {
    cells c = { 0 };
    for (size_t k = 0; k < n; k++) x[k] = y[k] = 0.0;
    if (!(s->bandwidth > 0.0)) return ST_OK;
    status st = cells_take(t, &c, e);
    if (st != ST_OK) return st;
    double low = c.x[0], high = c.x[0], sw = 0.0, h = s->bandwidth;
    for (size_t i = 0; i < c.n; i++) {
        low = fmin(low, c.x[i]);
        high = fmax(high, c.x[i]);
        sw += c.w[i];
    }
    for (size_t k = 0; k < n; k++) {
        x[k] = low - 3.0 * h + (high - low + 6.0 * h) * (double)k / (double)(n - 1);
        for (size_t i = 0; i < c.n; i++) {
            double z = (x[k] - c.x[i]) / h;
            if (fabs(z) < 8.0) y[k] += c.w[i] / sw * exp(-0.5 * z * z) / (h * sqrt(2.0 * PI));
        }
    }
    free(c.x);
    return ST_OK;
}

status size_histogram(const texture *t, const size_summary *s, double *x, double *y, size_t most, size_t *n, error *e) {
    cells c = { 0 };
    *n = 0;
    if (!(s->bin > 0.0) || !most) return ST_OK;
    status st = cells_take(t, &c, e);
    if (st != ST_OK) return st;
    double low = c.x[0], sw = 0.0;
    for (size_t i = 0; i < c.n; i++) {
        low = fmin(low, c.x[i]);
        sw += c.w[i];
    }
    double first = s->bin * floor(low / s->bin);
    for (size_t k = 0; k < most; k++) {
        x[k] = first + s->bin * ((double)k + 0.5);
        y[k] = 0.0;
    }
    for (size_t i = 0; i < c.n; i++) {
        size_t k = (size_t)fmin((c.x[i] - first) / s->bin, (double)(most - 1));
        y[k] += c.w[i] / (sw * s->bin);
        if (k + 1 > *n) *n = k + 1;
    }
    free(c.x);
    return ST_OK;
}

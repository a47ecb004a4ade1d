/* Statistics of point patterns in a rectangular window.
 *
 * Neighbours are found on a grid of square cells about one mean point distance wide, searched in growing
 * rings of cells, so the cost grows with n and not with its square. Clark P.J., Evans F.C. (1954) Ecology
 * 35:445 compare the mean nearest-neighbour distance with that of a random pattern; Donnelly K. (1978), in
 * Hodder (ed.) Simulation Studies in Archaeology, 91, corrects the expectation for the edge of the window;
 * Hanisch K.-H. (1984) Math. Operationsforsch. Statist. Ser. Statist. 15:409 (from memory) counts only points
 * whose neighbour is certain to be the true one. The pair correlation follows Stoyan D., Stoyan H. (1994)
 * Fractals, Random Shapes and Point Fields, with translation correction. Nothing here knows of pixels or of
 * features. */
#include "metrics/neighbours.h"

#include <assert.h>
#include <math.h>
#include <stdint.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"

#define NO_POINT UINT32_MAX

/* Points sorted into square cells: first[cell], then next[point] until NO_POINT. */
typedef struct {
    double x0, y0, side;
    size_t nx, ny;
    uint32_t *first, *next;
} grid;

static void grid_free(grid *g) {
    free(g->first);
    free(g->next);
    *g = (grid){ 0 };
}

/* Points outside the window count to the nearest cell; distances between cells stay lower bounds for them,
 * because clamping to a rectangle lengthens no distance. */
static size_t grid_index(double v, double v0, double side, size_t n) {
    double i = floor((v - v0) / side);
    if (!(i > 0.0)) return 0;
    return i >= (double)n ? n - 1 : (size_t)i;
}

static status grid_make(const double *x, const double *y, size_t n, window w, double side, grid *out,
                        error *e) {
    grid g = { .x0 = w.x0, .y0 = w.y0, .side = side };
    double width = w.x1 - w.x0, height = w.y1 - w.y0;
    while (width / g.side * (height / g.side) > 4.0 * (double)n + 64.0) g.side *= 2.0;
    g.nx = (size_t)(width / g.side) + 1;
    g.ny = (size_t)(height / g.side) + 1;
    g.first = mem_array(g.nx * g.ny, sizeof *g.first);
    g.next = mem_array(n, sizeof *g.next);
    if (!g.first || !g.next) {
        grid_free(&g);
        return NO_MEMORY(e, "the neighbour search");
    }
    for (size_t i = 0; i < g.nx * g.ny; i++) g.first[i] = NO_POINT;
    for (size_t i = n; i-- > 0;) {
        size_t c = grid_index(y[i], g.y0, g.side, g.ny) * g.nx + grid_index(x[i], g.x0, g.side, g.nx);
        g.next[i] = g.first[c];
        g.first[c] = (uint32_t)i;
    }
    *out = g;
    return ST_OK;
}

static double cell_nearest2(const grid *g, size_t cx, size_t cy, const double *x, const double *y,
                            size_t self, double best) {
    for (uint32_t j = g->first[cy * g->nx + cx]; j != NO_POINT; j = g->next[j]) {
        double dx = x[j] - x[self], dy = y[j] - y[self], d2 = dx * dx + dy * dy;
        if (j != self && d2 < best) best = d2;
    }
    return best;
}

/* Squared distance to the nearest other point: rings of cells k = 0, 1, ... until no nearer point can follow.
 */
static double point_nearest2(const grid *g, const double *x, const double *y, size_t i) {
    long cx = (long)grid_index(x[i], g->x0, g->side, g->nx),
         cy = (long)grid_index(y[i], g->y0, g->side, g->ny);
    long nx = (long)g->nx, ny = (long)g->ny, last = nx > ny ? nx : ny;
    double best = HUGE_VAL;
    for (long k = 0; k <= last; k++) {
        for (long yy = cy - k < 0 ? 0 : cy - k; yy <= cy + k && yy < ny; yy++) {
            int rim = yy == cy - k || yy == cy + k;
            long step = rim || k == 0 ? 1 : 2 * k;
            for (long xx = cx - k; xx <= cx + k; xx += step)
                if (xx >= 0 && xx < nx) best = cell_nearest2(g, (size_t)xx, (size_t)yy, x, y, i, best);
        }
        double reach = (double)k * g->side;
        if (best <= reach * reach) break;
    }
    return best;
}

status nearest_neighbours(const double *x, const double *y, size_t n, window w, double *nn, error *e) {
    if (n < 2 || n >= NO_POINT || !(w.x1 > w.x0) || !(w.y1 > w.y0))
        return fail(e, ST_BAD_INPUT,
                    "nearest neighbours: %zu points in a window of %g x %g, expected at least two "
                    "points and a window with an area",
                    n, w.x1 - w.x0, w.y1 - w.y0);
    grid g = { 0 };
    status st = grid_make(x, y, n, w, sqrt((w.x1 - w.x0) * (w.y1 - w.y0) / (double)n), &g, e);
    if (st != ST_OK) return st;
    for (size_t i = 0; i < n; i++) nn[i] = sqrt(point_nearest2(&g, x, y, i));
    grid_free(&g);
    return ST_OK;
}

static double frame_distance(double x, double y, window w) {
    return fmin(fmin(x - w.x0, w.x1 - x), fmin(y - w.y0, w.y1 - y));
}

double hanisch_weight(double x, double y, double nn, window w) {
    double a = w.x1 - w.x0 - 2.0 * nn, b = w.y1 - w.y0 - 2.0 * nn;
    return nn <= frame_distance(x, y, w) && a > 0.0 && b > 0.0 ? 1.0 / (a * b) : 0.0;
}

measured nn_mean_hanisch(const double *x, const double *y, const double *nn, size_t n, window w) {
    double sw = 0.0, swd = 0.0, var = 0.0;
    size_t used = 0;
    for (size_t i = 0; i < n; i++) {
        double weight = hanisch_weight(x[i], y[i], nn[i], w);
        if (!(weight > 0.0)) continue;
        used++;
        sw += weight;
        swd += weight * nn[i];
    }
    if (!used) return (measured){ MISSING, MISSING, 0.0, 0 };
    double mean = swd / sw;
    for (size_t i = 0; i < n; i++) {
        double r = hanisch_weight(x[i], y[i], nn[i], w) * (nn[i] - mean);
        var += r * r;
    }
    return (measured){ mean, sqrt(var) / sw, 0.0, used };
}

static double plain_mean(const double *v, size_t n) {
    double s = 0.0;
    for (size_t i = 0; i < n; i++) s += v[i];
    return s / (double)n;
}

double clark_evans_naive(const double *nn, size_t n, window w) {
    if (!n) return MISSING;
    return plain_mean(nn, n) * 2.0 * sqrt((double)n / ((w.x1 - w.x0) * (w.y1 - w.y0)));
}

double clark_evans_donnelly(const double *nn, size_t n, window w) {
    if (!n) return MISSING;
    double a = w.x1 - w.x0, b = w.y1 - w.y0, m = (double)n;
    double expected = 0.5 * sqrt(a * b / m) + (0.0514 + 0.0412 / sqrt(m)) * 2.0 * (a + b) / m;
    return plain_mean(nn, n) / expected;
}

double clark_evans_guard(const double *x, const double *y, const double *nn, size_t n, window w, double guard,
                         size_t *n_guard) {
    double s = 0.0;
    size_t m = 0;
    for (size_t i = 0; i < n; i++)
        if (frame_distance(x[i], y[i], w) >= guard) {
            s += nn[i];
            m++;
        }
    if (n_guard) *n_guard = m;
    if (!m) return MISSING;
    return s / (double)m * 2.0 * sqrt((double)n / ((w.x1 - w.x0) * (w.y1 - w.y0)));
}

double clark_evans_z(const double *nn, size_t n, window w) {
    if (n < 2) return MISSING;
    double rho = (double)n / ((w.x1 - w.x0) * (w.y1 - w.y0));
    return (plain_mean(nn, n) - 0.5 / sqrt(rho)) / sqrt((4.0 - PI) / (4.0 * PI) / ((double)n * rho));
}

/* What is summed over pairs: for each pair nearer than reach its distance and twice its translation weight
 * a b / ((a - dx)(b - dy)), twice because a pair counts from both ends. */
typedef struct {
    const double *r;
    size_t n_r;
    double h; /* kernel of the pair correlation */
    double *sum;
} pair_sum;
typedef void (*pair_visit)(pair_sum *s, double d, double weight);

static status pairs_each(const double *x, const double *y, size_t n, window w, double reach, pair_visit visit,
                         pair_sum *s, error *e) {
    double a = w.x1 - w.x0, b = w.y1 - w.y0;
    grid q = { 0 };
    status st = grid_make(x, y, n, w, fmax(reach / 2.0, sqrt(a * b / (double)n)), &q, e);
    if (st != ST_OK) return st;
    size_t span = (size_t)(reach / q.side) + 1;
    for (size_t i = 0; i < n; i++) {
        size_t cx = grid_index(x[i], q.x0, q.side, q.nx), cy = grid_index(y[i], q.y0, q.side, q.ny);
        size_t x1 = cx + span < q.nx ? cx + span : q.nx - 1, y1 = cy + span < q.ny ? cy + span : q.ny - 1;
        for (size_t yy = cy > span ? cy - span : 0; yy <= y1; yy++)
            for (size_t xx = cx > span ? cx - span : 0; xx <= x1; xx++)
                for (uint32_t j = q.first[yy * q.nx + xx]; j != NO_POINT; j = q.next[j]) {
                    if (j <= i) continue;
                    double dx = fabs(x[j] - x[i]), dy = fabs(y[j] - y[i]);
                    if (dx < reach && dy < reach && dx < a && dy < b)
                        visit(s, sqrt(dx * dx + dy * dy), 2.0 * a * b / ((a - dx) * (b - dy)));
                }
    }
    grid_free(&q);
    return ST_OK;
}

static status pairs_check(size_t n, window w, size_t n_r, const char *what, error *e) {
    if (n >= 2 && n < NO_POINT && n_r && w.x1 > w.x0 && w.y1 > w.y0) return ST_OK;
    return fail(e, ST_BAD_INPUT,
                "%s: %zu points, %zu distances, a window of %g x %g; expected at least two points, one distance and a "
                "window with an area",
                what, n, n_r, w.x1 - w.x0, w.y1 - w.y0);
}

/* First r not below d. */
static size_t first_from(const double *r, size_t n_r, double d) {
    size_t lo = 0, hi = n_r;
    while (lo < hi) {
        size_t mid = lo + (hi - lo) / 2;
        if (r[mid] < d)
            lo = mid + 1;
        else
            hi = mid;
    }
    return lo;
}

/* Adds one pair's kernel to every r within h of its distance; r ascends. */
static void add_kernel(pair_sum *s, double d, double weight) {
    for (size_t k = first_from(s->r, s->n_r, d - s->h); k < s->n_r && s->r[k] < d + s->h; k++) {
        double u = (s->r[k] - d) / s->h;
        s->sum[k] += weight * 0.75 * (1.0 - u * u) / s->h;
    }
}

/* The pair counts from the first r on that is not below its distance; added up afterwards. */
static void add_step(pair_sum *s, double d, double weight) {
    size_t k = first_from(s->r, s->n_r, d);
    if (k < s->n_r) s->sum[k] += weight;
}

status pair_correlation(const double *x, const double *y, size_t n, window w, double h, const double *r,
                        size_t n_r, double *g, error *e) {
    double area = (w.x1 - w.x0) * (w.y1 - w.y0);
    status st = pairs_check(n, w, n_r, "pair correlation", e);
    if (st != ST_OK) return st;
    if (!(h > 0.0)) return fail(e, ST_BAD_INPUT, "pair correlation: a kernel of half-width %g, expected one above 0", h);
    pair_sum s = { r, n_r, h, g };
    for (size_t k = 0; k < n_r; k++) g[k] = 0.0;
    st = pairs_each(x, y, n, w, r[n_r - 1] + h, add_kernel, &s, e);
    for (size_t k = 0; k < n_r; k++)
        g[k] = r[k] > 0.0 ? g[k] * area / ((double)n * (double)(n - 1)) / (2.0 * PI * r[k]) : MISSING;
    return st;
}

status ripley_k(const double *x, const double *y, size_t n, window w, const double *r, size_t n_r, double *k, error *e) {
    double area = (w.x1 - w.x0) * (w.y1 - w.y0), sum = 0.0;
    status st = pairs_check(n, w, n_r, "Ripley's K", e);
    if (st != ST_OK) return st;
    pair_sum s = { r, n_r, 0.0, k };
    for (size_t i = 0; i < n_r; i++) k[i] = 0.0;
    st = pairs_each(x, y, n, w, nextafter(r[n_r - 1], HUGE_VAL), add_step, &s, e);
    for (size_t i = 0; i < n_r; i++) {
        sum += k[i];
        k[i] = sum * area / ((double)n * (double)(n - 1));
    }
    return st;
}

pair_ring pair_first_ring(const double *r, const double *g, size_t n_r, size_t n, window w, double h) {
    const double near = 0.5, far = 1.6, least_z = 2.5; /* in units of 1/sqrt(density) */
    double unit = sqrt((w.x1 - w.x0) * (w.y1 - w.y0) / (double)n), trough = HUGE_VAL;
    pair_ring p = { MISSING, MISSING, MISSING };
    size_t best = 0;
    for (size_t k = 1; k + 1 < n_r; k++) {
        if (r[k] < 0.15 * unit || r[k] > far * unit) continue;
        int highest = r[k] >= near * unit && g[k] >= g[k - 1] && g[k] > g[k + 1];
        if (highest && (!best || g[k] > g[best])) best = k;
    }
    for (size_t k = 0; k < best; k++)
        if (r[k] > h) trough = fmin(trough, g[k]);
    if (!best || !isfinite(trough)) return p;
    /* Random placement: pi r n^2 / A pairs per unit of r, Poisson; the integral of the squared kernel is 0.6 / h. */
    double se = unit * sqrt(0.6 / (PI * (double)n * r[best] * h));
    double z = fmin((g[best] - 1.0) / se, (g[best] - trough) / (sqrt(2.0) * se));
    if (z >= least_z) p = (pair_ring){ r[best], g[best], z };
    return p;
}

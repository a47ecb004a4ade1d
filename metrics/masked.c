#include "metrics/masked.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"

/* ---- filling ---- */

/* One level of a pyramid: sums of what is known below each cell. */
typedef struct {
    float *value, *weight; /* weight 0: nothing known yet */
    size_t nx, ny;
} level;

static void halve(const level *a, level *b) {
    for (size_t y = 0; y < b->ny; y++)
        for (size_t x = 0; x < b->nx; x++) {
            float s = 0.0f, w = 0.0f;
            for (size_t j = 2 * y; j < 2 * y + 2 && j < a->ny; j++)
                for (size_t i = 2 * x; i < 2 * x + 2 && i < a->nx; i++) {
                    float k = a->weight[j * a->nx + i];
                    s += k * a->value[j * a->nx + i];
                    w += k;
                }
            b->value[y * b->nx + x] = w > 0.0f ? s / w : 0.0f;
            b->weight[y * b->nx + x] = w > 1.0f ? 1.0f : w;
        }
}

/* Unknown cells of a take the value of the cell above them, then relax towards the mean of their neighbours. */
static void settle(level *a, const level *above) {
    enum { SWEEPS = 24 };
    for (size_t y = 0; y < a->ny; y++)
        for (size_t x = 0; x < a->nx; x++)
            if (!(a->weight[y * a->nx + x] > 0.0f)) a->value[y * a->nx + x] = above->value[y / 2 * above->nx + x / 2];
    for (int sweep = 0; sweep < SWEEPS; sweep++)
        for (size_t y = 0; y < a->ny; y++)
            for (size_t x = 0; x < a->nx; x++) {
                size_t i = y * a->nx + x;
                if (a->weight[i] > 0.0f) continue;
                float s = a->value[x ? i - 1 : i] + a->value[x + 1 < a->nx ? i + 1 : i] + a->value[y ? i - a->nx : i] +
                          a->value[y + 1 < a->ny ? i + a->nx : i];
                a->value[i] = 0.25f * s;
            }
}

static int has_holes(const level *a) {
    for (size_t i = 0; i < a->nx * a->ny; i++)
        if (!(a->weight[i] > 0.0f)) return 1;
    return 0;
}

static status fill_level(level *a, error *e) {
    if (!has_holes(a)) return ST_OK;
    if (a->nx < 2 && a->ny < 2) return fail(e, ST_BAD_INPUT, "nothing of the field is specimen: all of it is masked");
    level b = { .nx = (a->nx + 1) / 2, .ny = (a->ny + 1) / 2 };
    b.value = mem_array(b.nx * b.ny, sizeof *b.value);
    b.weight = mem_array(b.nx * b.ny, sizeof *b.weight);
    status st = b.value && b.weight ? ST_OK : NO_MEMORY(e, "the masked pixels");
    if (st == ST_OK) {
        halve(a, &b);
        st = fill_level(&b, e); /* at most 17 levels: a side has at most 65535 pixels */
    }
    if (st == ST_OK) settle(a, &b);
    free(b.value);
    free(b.weight);
    return st;
}

status masked_fill(const plane *p, float *out, error *e) {
    level a = { .value = out, .nx = p->nx, .ny = p->ny };
    a.weight = mem_array(p->nx * p->ny, sizeof *a.weight);
    if (!a.weight) return NO_MEMORY(e, "the masked pixels");
    for (size_t i = 0; i < p->nx * p->ny; i++) {
        a.weight[i] = p->mask[i] ? 0.0f : 1.0f;
        out[i] = p->mask[i] ? 0.0f : p->px[i];
    }
    status st = fill_level(&a, e);
    free(a.weight);
    return st;
}

void masked_level(const unsigned char *mask, size_t n, float *f) {
    double sum = 0.0;
    size_t k = 0;
    for (size_t i = 0; i < n; i++)
        if (!mask[i]) sum += (double)f[i], k++;
    float mean = k ? (float)(sum / (double)k) : 0.0f;
    for (size_t i = 0; i < n; i++)
        if (mask[i]) f[i] = mean;
}

/* ---- weights ---- */

/* Sums of the mask over rectangles from the corner. */
static double *corner_sums(const unsigned char *mask, size_t nx, size_t ny) {
    double *s = mem_array((nx + 1) * (ny + 1), sizeof *s);
    for (size_t y = 0; s && y < ny; y++) {
        double row = 0.0;
        for (size_t x = 0; x < nx; x++) {
            row += mask[y * nx + x] ? 1.0 : 0.0;
            s[(y + 1) * (nx + 1) + x + 1] = s[y * (nx + 1) + x + 1] + row;
        }
    }
    return s;
}

static double sum_in(const double *s, size_t nx, size_t x0, size_t y0, size_t x1, size_t y1) {
    size_t k = nx + 1;
    return s[y1 * k + x1] - s[y0 * k + x1] - s[y1 * k + x0] + s[y0 * k + x0];
}

/* Pairs at a lag of which neither is masked = all - masked first - masked second + both masked; the last from the mask's
 * own mean-removed autocorrelation. */
status masked_weigh(const unsigned char *mask, acf2d *a, error *e) {
    size_t nx = a->nx, ny = a->ny, n = nx * ny;
    long lag = (long)a->max_lag;
    acf2d both = { 0 };
    float *u = mem_array(n, sizeof *u);
    double *s = corner_sums(mask, nx, ny), total = 0.0;
    status st = u && s ? ST_OK : NO_MEMORY(e, "the weights of the field");
    for (size_t i = 0; st == ST_OK && i < n; i++) u[i] = mask[i] ? 1.0f : 0.0f;
    if (st == ST_OK) total = sum_in(s, nx, 0, 0, nx, ny);
    if (st == ST_OK && total > 0.0) st = acf2d_make(u, nx, ny, a->max_lag, &both, e);
    double mean = total / (double)n, at_zero = 1.0 - mean;
    for (long dy = 0; st == ST_OK && total > 0.0 && dy <= lag; dy++)
        for (long dx = -lag; dx <= lag; dx++) {
            size_t w = nx - (size_t)labs(dx), h = ny - (size_t)dy, k = (size_t)(dy * (2 * lag + 1) + dx + lag);
            size_t first = dx < 0 ? (size_t)-dx : 0, second = dx > 0 ? (size_t)dx : 0;
            double pairs = (double)w * (double)h;
            double one = sum_in(s, nx, first, 0, first + w, h), other = sum_in(s, nx, second, ny - h, second + w, ny);
            double joint = pairs * both.variance * (double)both.values[k] + mean * (one + other) - pairs * mean * mean;
            double share = (pairs - one - other + joint) / pairs;
            a->values[k] = share > 0.05 ? (float)((double)a->values[k] * at_zero / share) : 0.0f;
        }
    if (st == ST_OK && at_zero > 0.0) a->variance /= at_zero;
    acf2d_free(&both);
    free(u);
    free(s);
    return st;
}

/* ---- distance ---- */

static const double nowhere = 1e12; /* squared px: farther than any field is wide */

/* Squared distance along one line of n values v, in place; room holds n hubs and n + 1 bounds. */
static void distance_line(double *v, size_t n, size_t step, double *copy, size_t *hub, double *bound) {
    size_t k = 0;
    for (size_t i = 0; i < n; i++) copy[i] = v[i * step];
    hub[0] = 0;
    bound[0] = -HUGE_VAL;
    bound[1] = HUGE_VAL;
    for (size_t q = 1; q < n; q++) {
        double x = 0.0;
        for (;;) {
            double a = (double)q, b = (double)hub[k];
            x = ((copy[q] + a * a) - (copy[hub[k]] + b * b)) / (2.0 * (a - b));
            if (x > bound[k] || !k) break;
            k--;
        }
        hub[++k] = q;
        bound[k] = x;
        bound[k + 1] = HUGE_VAL;
    }
    k = 0;
    for (size_t i = 0; i < n; i++) {
        while (bound[k + 1] < (double)i) k++;
        double d = (double)i - (double)hub[k];
        v[i * step] = d * d + copy[hub[k]];
    }
}

status masked_distance(const unsigned char *mask, size_t nx, size_t ny, float **out, error *e) {
    size_t longest = nx > ny ? nx : ny;
    double *v = mem_array(nx * ny, sizeof *v), *copy = mem_array(2 * longest + 2, sizeof *copy);
    size_t *hub = mem_array(longest + 1, sizeof *hub);
    float *to = mem_array(nx * ny, sizeof *to);
    status st = v && copy && hub && to ? ST_OK : NO_MEMORY(e, "the distance to the marks");
    if (st == ST_OK) {
        double *bound = copy + longest;
        for (size_t i = 0; i < nx * ny; i++) v[i] = mask[i] ? 0.0 : nowhere;
        for (size_t x = 0; x < nx; x++) distance_line(v + x, ny, nx, copy, hub, bound);
        for (size_t y = 0; y < ny; y++) distance_line(v + y * nx, nx, 1, copy, hub, bound);
        for (size_t i = 0; i < nx * ny; i++) to[i] = (float)sqrt(v[i]);
        *out = to;
        to = NULL;
    }
    free(v);
    free(copy);
    free(hub);
    free(to);
    return st;
}

/* ---- holes ---- */

status hole_make(const plane *p, hole *out, error *e) {
    hole h = { .mask = p->mask, .nx = p->nx, .ny = p->ny };
    status st = masked_distance(p->mask, p->nx, p->ny, &h.distance, e);
    if (st == ST_OK) *out = h;
    return st;
}

void hole_free(hole *h) {
    free(h->distance);
    *h = (hole){ 0 };
}

static size_t nearest_pixel(double v, size_t n) { return v <= 0.0 ? 0 : v + 0.5 >= (double)n ? n - 1 : (size_t)(v + 0.5); }

double hole_distance(const hole *h, double x, double y) {
    if (!h->distance) return HUGE_VAL;
    return (double)h->distance[nearest_pixel(y, h->ny) * h->nx + nearest_pixel(x, h->nx)];
}

double hole_area(const hole *h, double x0, double y0, double x1, double y1, double guard) {
    double n = 0.0;
    for (size_t y = 0; h->distance && y < h->ny; y++)
        for (size_t x = 0; x < h->nx; x++)
            if ((double)x >= x0 && (double)x < x1 && (double)y >= y0 && (double)y < y1 &&
                ((double)h->distance[y * h->nx + x] < guard || h->mask[y * h->nx + x]))
                n += 1.0;
    return n;
}

status hole_drop(const hole *h, detection *d, error *e) {
    size_t n = 0;
    if (!h->distance) return ST_OK;
    for (size_t i = 0; i < d->n; i++) n += !h->mask[d->marker[i]];
    if (!n) return fail(e, ST_NO_RESULT, "every feature lies under a mark drawn over the specimen");
    n = 0;
    for (size_t i = 0; i < d->n; i++) {
        if (h->mask[d->marker[i]]) continue;
        d->features[n] = d->features[i];
        d->marker[n++] = d->marker[i];
    }
    d->n = n;
    return ST_OK;
}

void hole_touch(const hole *h, const uint32_t *cells, feature *features) {
    for (size_t i = 0; h->distance && i < h->nx * h->ny; i++)
        if (h->mask[i] && cells[i]) features[cells[i] - 1].weight = 0.0;
}

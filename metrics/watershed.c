/* Watershed by flooding from markers (Meyer F. 1991; Vincent L., Soille P. 1991, IEEE Trans. Pattern Anal.
 * 13:583).
 *
 * The flood starts at the markers and takes the highest open pixel first; pixels of one level in the order in
 * which they were reached, so the result does not depend on memory or machine. Levels are the 65536 steps
 * between the lowest and the highest value of the smoothed picture (finer than any micrograph's own steps),
 * each a first-in first-out list threaded through one array: no heap, cost proportional to the number of
 * pixels. There is no mask: the cells partition the field, because touching hillocks leave no floor to see.
 * Description of the cells: see cells.c. */
#include "metrics/watershed.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "metrics/filter.h"
#include "metrics/maxima.h"

static const double cell_scale = 0.06; /* sigma of the smoothing / d */
static const double max_climb = 0.30;  /* from a marker to the top its flood starts at / d */
enum { LEVELS = 65536 };
#define NO_PIXEL UINT32_MAX
#define WAITING ((uint32_t)1 << 31) /* mark of a pixel in a list, beside the label of what reached it */

typedef struct {
    uint32_t *next;         /* [pixels] */
    uint32_t *first, *last; /* [LEVELS] */
    uint16_t *level;        /* [pixels] */
    size_t top;             /* no list above this level holds a pixel */
} queue;

static void queue_free(queue *q) {
    free(q->next);
    free(q->first);
    free(q->last);
    free(q->level);
}

static status queue_make(const float *g, size_t n, queue *q, error *e) {
    *q = (queue){ mem_array(n, sizeof *q->next), mem_array(LEVELS, sizeof *q->first),
                  mem_array(LEVELS, sizeof *q->last), mem_array(n, sizeof *q->level), 0 };
    if (!q->next || !q->first || !q->last || !q->level) return NO_MEMORY(e, "the watershed");
    float low = g[0], high = g[0];
    for (size_t i = 1; i < n; i++) {
        low = g[i] < low ? g[i] : low;
        high = g[i] > high ? g[i] : high;
    }
    double step = high > low ? (LEVELS - 1) / ((double)high - (double)low) : 0.0;
    for (size_t i = 0; i < n; i++) q->level[i] = (uint16_t)(((double)g[i] - (double)low) * step + 0.5);
    for (size_t i = 0; i < LEVELS; i++) q->first[i] = NO_PIXEL;
    return ST_OK;
}

static void queue_push(queue *q, uint32_t pixel, size_t level) {
    q->next[pixel] = NO_PIXEL;
    if (q->first[level] == NO_PIXEL)
        q->first[level] = pixel;
    else
        q->next[q->last[level]] = pixel;
    q->last[level] = pixel;
    if (level > q->top) q->top = level;
}

/* Highest pixel first; NO_PIXEL when empty. */
static uint32_t queue_pop(queue *q) {
    while (q->first[q->top] == NO_PIXEL) {
        if (q->top == 0) return NO_PIXEL;
        q->top--;
    }
    uint32_t pixel = q->first[q->top];
    q->first[q->top] = q->next[pixel];
    return pixel;
}

static void reach(queue *q, uint32_t *cells, uint32_t label, uint32_t to) {
    if (cells[to]) return;
    cells[to] = WAITING | label;
    queue_push(q, to, q->level[to]);
}

/* Label of the steepest way up from a waiting pixel to one that has a label; of equals (plateaus) what
 * reached it first. The first to arrive alone would be the usual choice; but along a crease it leaks to the
 * other side, a little further with every pixel. */
static uint32_t label_uphill(const float *g, const uint32_t *cells, size_t nx, size_t ny, uint32_t pixel) {
    const float diagonal = 0.70710678f;
    size_t x = pixel % nx, y = pixel / nx;
    uint32_t first = cells[pixel] & ~WAITING, best = first;
    float steepest = -HUGE_VALF;
    for (size_t yy = y ? y - 1 : 0; yy <= y + 1 && yy < ny; yy++)
        for (size_t xx = x ? x - 1 : 0; xx <= x + 1 && xx < nx; xx++) {
            size_t i = yy * nx + xx;
            if (!cells[i] || (cells[i] & WAITING)) continue;
            float slope = (g[i] - g[pixel]) * (xx != x && yy != y ? diagonal : 1.0f);
            if (slope > steepest || (cells[i] == first && !(slope < steepest))) {
                steepest = slope;
                best = cells[i];
            }
        }
    return best;
}

/* Where the flood of a feature starts: the top that is reached uphill from its marker, unless another feature
 * has it. From a marker on a slope a neighbour's flood would be there first and leave a cell of a few pixels.
 */
static uint32_t seed_of(const float *g, size_t nx, size_t ny, uint32_t marker, double reach_px,
                        const uint32_t *cells) {
    uint32_t top = marker;
    return maximum_uphill(g, nx, ny, reach_px, &top) && !cells[top] ? top : marker;
}

static void flood(queue *q, const float *g, size_t nx, size_t ny, const detection *d, uint32_t *cells) {
    for (size_t i = 0; i < nx * ny; i++) cells[i] = 0;
    for (size_t k = 0; k < d->n; k++) {
        uint32_t seed = seed_of(g, nx, ny, d->marker[k], max_climb * d->scale_px, cells);
        if (cells[seed]) continue;
        cells[seed] = (uint32_t)(k + 1);
        queue_push(q, seed, q->level[seed]);
    }
    for (uint32_t p = queue_pop(q); p != NO_PIXEL; p = queue_pop(q)) {
        size_t x = p % nx, y = p / nx;
        if (cells[p] & WAITING) cells[p] = label_uphill(g, cells, nx, ny, p);
        if (y) reach(q, cells, cells[p], (uint32_t)(p - nx));
        if (x) reach(q, cells, cells[p], p - 1);
        if (x + 1 < nx) reach(q, cells, cells[p], p + 1);
        if (y + 1 < ny) reach(q, cells, cells[p], (uint32_t)(p + nx));
    }
}

/* Tops: the part of a cell above the middle between its lowest and its highest value. */
static status tops_measure(const float *g, const uint32_t *cells, size_t n_px, feature *features, size_t n,
                           error *e) {
    float *low = mem_array(2 * n, sizeof *low), *high = low ? low + n : NULL;
    size_t *area = mem_array(n, sizeof *area);
    status st = low && area ? ST_OK : NO_MEMORY(e, "the tops of the features");
    if (st == ST_OK) {
        for (size_t k = 0; k < n; k++) {
            low[k] = INFINITY;
            high[k] = -INFINITY;
        }
        for (size_t i = 0; i < n_px; i++) {
            size_t k = cells[i] - 1;
            low[k] = g[i] < low[k] ? g[i] : low[k];
            high[k] = g[i] > high[k] ? g[i] : high[k];
        }
        for (size_t k = 0; k < n; k++) low[k] = 0.5f * (low[k] + high[k]);
        for (size_t i = 0; i < n_px; i++) area[cells[i] - 1] += g[i] > low[cells[i] - 1];
        for (size_t k = 0; k < n; k++)
            features[k].top_ecd_px = 2.0 * sqrt((double)area[k] / 3.14159265358979323846);
    }
    free(low);
    free(area);
    return st;
}

status watershed(const float *f, size_t nx, size_t ny, int sign, detection *d, uint32_t *cells, error *e) {
    if (!d->n) return fail(e, ST_BAD_INPUT, "watershed without a single feature; detect features first");
    float *g = mem_array(nx * ny, sizeof *g);
    queue q = { 0 };
    status st = g ? filter_gauss(f, nx, ny, cell_scale * d->scale_px, g, e) : NO_MEMORY(e, "the watershed");
    if (st == ST_OK && sign < 0)
        for (size_t i = 0; i < nx * ny; i++) g[i] = -g[i];
    if (st == ST_OK) st = queue_make(g, nx * ny, &q, e);
    if (st == ST_OK) {
        flood(&q, g, nx, ny, d, cells);
        st = tops_measure(g, cells, nx * ny, d->features, d->n, e);
    }
    if (st == ST_OK) st = cells_describe(cells, nx, ny, d->features, d->n, e);
    queue_free(&q);
    free(g);
    return st;
}

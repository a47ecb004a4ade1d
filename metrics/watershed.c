/* Watershed from markers (Meyer F. 1991; Vincent L., Soille P. 1991, IEEE Trans. Pattern Anal. 13:583) by steepest ascent.
 *
 * Every pixel points to its steepest higher neighbour; on a plateau to the neighbour through which a flood from the
 * higher rim would reach it first, so that bare ground is shared by distance. Following the pointers gives one basin per
 * top. A feature owns the basin its marker leads to; a marker on the slope of another feature owns what drains to it. Basins
 * without a feature join, highest pass first, the side that has one. The result is that of a flood that takes the highest
 * open pixel first, except that a pixel takes the label of its steepest way up and not of the first arrival (along a
 * crease the latter leaks to the other side, a little further with every pixel); and the picture is read row by row
 * and not in the order of its levels, which is ten times faster on large ones. There is no mask: the cells partition the
 * field, because touching hillocks leave no floor to see. Description of the cells: cells.c. */
#include "metrics/watershed.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "metrics/basins.h"
#include "metrics/filter.h"

static const double cell_scale = 0.06; /* sigma of the smoothing / d */
static const double max_climb = 0.30;  /* from a marker to the top of its basin / d */
static const double body_scale = 0.06;   /* the same of bodies known by their outlines, / radius: grooves are narrow */
static const double middle_share = 0.6;  /* of such a body, / radius */
#define NO_OWNER UINT32_MAX

/* The steepest strictly higher neighbour, or the pixel itself; of equals the first in row-major order. */
static uint32_t steepest_up(const float *g, size_t nx, size_t ny, size_t x, size_t y) {
    const float diagonal = 0.70710678f;
    size_t here = y * nx + x, best = here;
    size_t x0 = x ? x - 1 : 0, x1 = x + 1 < nx ? x + 1 : x, y0 = y ? y - 1 : 0, y1 = y + 1 < ny ? y + 1 : y;
    float steepest = 0.0f;
    for (size_t yy = y0; yy <= y1; yy++)
        for (size_t xx = x0; xx <= x1; xx++) {
            float slope = (g[yy * nx + xx] - g[here]) * (xx != x && yy != y ? diagonal : 1.0f);
            if (slope > steepest) {
                steepest = slope;
                best = yy * nx + xx;
            }
        }
    return (uint32_t)best;
}

/* The same inside the frame, without bounds: the eight neighbours in row-major order. */
static uint32_t steepest_inside(const float *g, size_t nx, size_t i) {
    const float diagonal = 0.70710678f, *p = g + i, here = p[0];
    const ptrdiff_t w = (ptrdiff_t)nx, step[8] = { -w - 1, -w, -w + 1, -1, 1, w - 1, w, w + 1 };
    const float slope[8] = { (p[step[0]] - here) * diagonal, p[step[1]] - here, (p[step[2]] - here) * diagonal, p[step[3]] - here,
                             p[step[4]] - here, (p[step[5]] - here) * diagonal, p[step[6]] - here, (p[step[7]] - here) * diagonal };
    float steepest = 0.0f;
    ptrdiff_t best = 0;
    for (int k = 0; k < 8; k++) {
        best = slope[k] > steepest ? step[k] : best;
        steepest = slope[k] > steepest ? slope[k] : steepest;
    }
    return (uint32_t)((ptrdiff_t)i + best);
}

/* Visits the neighbours of pixel i (sharing an edge: steps of one length, a fair distance) that are as high and have
 * no way up yet: they get `to` and enter the list. */
static size_t spread(const float *g, size_t nx, size_t ny, size_t i, uint32_t to, char *open, uint32_t *up,
                     uint32_t *list, size_t n) {
    size_t x = i % nx, y = i / nx, near[4], m = 0;
    if (y) near[m++] = i - nx;
    if (x) near[m++] = i - 1;
    if (x + 1 < nx) near[m++] = i + 1;
    if (y + 1 < ny) near[m++] = i + nx;
    for (size_t k = 0; k < m; k++) {
        size_t j = near[k];
        if (!open[j] || g[j] < g[i] || g[j] > g[i]) continue;
        open[j] = 0;
        up[j] = to;
        list[n++] = (uint32_t)j;
    }
    return n;
}

/* Ways up on plateaus, breadth first from their higher rim. A plateau without one is a top: the markers on it share it by
 * distance; without a marker its first pixel is the root. open[i]: 1 where no neighbour is higher. */
static status plateaus_resolve(const float *g, size_t nx, size_t ny, const detection *d, char *open,
                               uint32_t *up, error *e) {
    size_t n_px = nx * ny, n = 0;
    uint32_t *list = mem_array(n_px, sizeof *list);
    if (!list) return NO_MEMORY(e, "the watershed");
    for (size_t i = 0; i < n_px; i++) /* rim pixels are not in the list: they know their way */
        if (!open[i]) n = spread(g, nx, ny, i, (uint32_t)i, open, up, list, n);
    size_t done = 0;
    for (; done < n; done++) n = spread(g, nx, ny, list[done], list[done], open, up, list, n);
    for (size_t k = 0; k < d->n; k++)
        if (open[d->marker[k]]) {
            open[d->marker[k]] = 0;
            list[n++] = d->marker[k];
        }
    for (; done < n; done++) n = spread(g, nx, ny, list[done], list[done], open, up, list, n);
    for (size_t i = 0; i < n_px; i++) {
        if (!open[i]) continue;
        open[i] = 0;
        size_t k = n;
        n = spread(g, nx, ny, i, (uint32_t)i, open, up, list, n);
        for (; k < n; k++) n = spread(g, nx, ny, list[k], (uint32_t)i, open, up, list, n);
    }
    free(list);
    return ST_OK;
}

static status ways_up(const float *g, size_t nx, size_t ny, const detection *d, uint32_t *up, error *e) {
    char *open = mem_array(nx * ny, sizeof *open);
    if (!open) return NO_MEMORY(e, "the watershed");
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx; x++) {
            size_t i = y * nx + x;
            int inside = x && y && x + 1 < nx && y + 1 < ny;
            up[i] = inside ? steepest_inside(g, nx, i) : steepest_up(g, nx, ny, x, y);
            open[i] = up[i] == i;
        }
    status st = plateaus_resolve(g, nx, ny, d, open, up, e);
    free(open);
    return st;
}

/* The pixel at which the basin of a marker has its root: the top it leads to, unless that is far or taken; then the marker
 * becomes a root itself. */
static uint32_t root_of(uint32_t *up, size_t nx, uint32_t marker, double reach_px, const char *taken) {
    uint32_t top = marker;
    while (up[top] != top) top = up[top];
    double dx = (double)(top % nx) - (double)(marker % nx), dy = (double)(top / nx) - (double)(marker / nx);
    if (!taken[top] && dx * dx + dy * dy <= reach_px * reach_px) return top;
    if (!taken[marker]) up[marker] = marker;
    return marker;
}

static status roots_choose(uint32_t *up, size_t nx, size_t ny, const detection *d, uint32_t *root, error *e) {
    char *taken = mem_array(nx * ny, sizeof *taken);
    if (!taken) return NO_MEMORY(e, "the watershed");
    for (size_t k = 0; k < d->n; k++) {
        root[k] = root_of(up, nx, d->marker[k], max_climb * d->scale_px, taken);
        taken[root[k]] = 1;
    }
    free(taken);
    return ST_OK;
}

/* Owner of every basin: of its feature, or of the side over the highest pass that has one. */
static status owners_find(const float *g, const uint32_t *basin, size_t nx, size_t ny, size_t n_basins,
                          const uint32_t *root, size_t n, uint32_t *owner, error *e) {
    pass *p = NULL;
    size_t n_pass = 0;
    uint32_t *parent = mem_array(n_basins, sizeof *parent);
    status st =
        parent ? passes_find(g, basin, nx, ny, n_basins, &p, &n_pass, e) : NO_MEMORY(e, "the watershed");
    if (st == ST_OK) {
        for (size_t i = 0; i < n_basins; i++) {
            parent[i] = (uint32_t)i;
            owner[i] = NO_OWNER;
        }
        for (size_t k = n; k-- > 0;)
            owner[basin[root[k]]] = (uint32_t)k; /* of two on one root the first has it */
        for (size_t i = 0; i < n_pass; i++) {
            uint32_t a = set_find(parent, p[i].a), b = set_find(parent, p[i].b);
            if (a == b || (owner[a] != NO_OWNER && owner[b] != NO_OWNER)) continue;
            uint32_t into = owner[a] != NO_OWNER ? a : b;
            parent[into == a ? b : a] = into;
        }
        for (size_t i = 0; i < n_basins; i++) owner[i] = owner[set_find(parent, (uint32_t)i)];
    }
    free(p);
    free(parent);
    return st;
}

static status cells_make(const float *g, size_t nx, size_t ny, const detection *d, uint32_t *cells,
                         error *e) {
    uint32_t *root = mem_array(d->n, sizeof *root), *owner = NULL;
    status st = root ? ways_up(g, nx, ny, d, cells, e) : NO_MEMORY(e, "the watershed");
    if (st == ST_OK) st = roots_choose(cells, nx, ny, d, root, e);
    if (st == ST_OK) {
        size_t n_basins = basins_number(cells, nx * ny);
        owner = mem_array(n_basins, sizeof *owner);
        st = owner ? owners_find(g, cells, nx, ny, n_basins, root, d->n, owner, e)
                   : NO_MEMORY(e, "the watershed");
    }
    for (size_t i = 0; st == ST_OK && i < nx * ny; i++) cells[i] = owner[cells[i]] + 1;
    free(root);
    free(owner);
    return st;
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
        for (size_t k = 0; k < n; k++) features[k].top_ecd_px = 2.0 * sqrt((double)area[k] / PI);
    }
    free(low);
    free(area);
    return st;
}

/* Bodies known by their outlines: the middle of such a body may be lower than its rim, so it is raised above all else,
 * highest at the marker; the rims then fall to the body they enclose and the cells meet in the grooves. */
static void middles_raise(float *g, size_t nx, size_t ny, const detection *d) {
    double r = middle_share * d->body_radius_px;
    float top = g[0], low = g[0];
    for (size_t i = 1; i < nx * ny; i++) {
        top = g[i] > top ? g[i] : top;
        low = g[i] < low ? g[i] : low;
    }
    for (size_t k = 0; k < d->n; k++) {
        double cx = (double)(d->marker[k] % nx), cy = (double)(d->marker[k] / nx);
        size_t x1 = (size_t)fmin(cx + r, (double)nx - 1.0), y1 = (size_t)fmin(cy + r, (double)ny - 1.0);
        for (size_t y = (size_t)fmax(0.0, ceil(cy - r)); y <= y1; y++)
            for (size_t x = (size_t)fmax(0.0, ceil(cx - r)); x <= x1; x++) {
                double q = (((double)x - cx) * ((double)x - cx) + ((double)y - cy) * ((double)y - cy)) / (r * r);
                float raised = top + (float)(1.0 - q) * (top - low);
                if (q < 1.0 && raised > g[y * nx + x]) g[y * nx + x] = raised;
            }
    }
}

static status smooth_relief(const float *f, size_t nx, size_t ny, int sign, const detection *d, float *g, error *e) {
    double sigma = d->body_radius_px > 0.0 ? body_scale * d->body_radius_px : cell_scale * d->scale_px;
    status st = filter_gauss(f, nx, ny, sigma, g, e);
    if (st == ST_OK && sign < 0)
        for (size_t i = 0; i < nx * ny; i++) g[i] = -g[i];
    return st;
}

status watershed(const float *f, size_t nx, size_t ny, int sign, detection *d, uint32_t *cells, error *e) {
    if (!d->n) return fail(e, ST_BAD_INPUT, "watershed without a single feature; detect features first");
    float *g = mem_array(nx * ny, sizeof *g);
    int bodies = d->body_radius_px > 0.0;
    status st = g ? smooth_relief(f, nx, ny, sign, d, g, e) : NO_MEMORY(e, "the watershed");
    if (st == ST_OK && bodies) middles_raise(g, nx, ny, d);
    if (st == ST_OK) st = cells_make(g, nx, ny, d, cells, e);
    if (st == ST_OK && bodies) st = smooth_relief(f, nx, ny, sign, d, g, e);
    if (st == ST_OK) st = tops_measure(g, cells, nx * ny, d->features, d->n, e);
    if (st == ST_OK) st = cells_describe(cells, nx, ny, d->features, d->n, e);
    free(g);
    return st;
}

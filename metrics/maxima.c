/* Maxima of a map and their dynamics (Grimaud M. 1992, Proc. SPIE 1769:292; from memory).
 *
 * Every pixel points to its highest neighbour; following the pointers labels the basin of each maximum. The
 * highest pass between two maxima then lies on a border between two basins, because a path may always be
 * replaced by the ascent inside a basin without going lower. The passes, highest first, join the basins
 * (union-find); when two sets meet, the lower of their two maxima has found its saddle. One look at the
 * pixels and a sort of the passes, no flooding level by level. Equal values are ordered by their position, so
 * every run gives the same answer. */
#include "metrics/maxima.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "metrics/basins.h"

/* a before b: higher, or equal and earlier. */
static int above(const float *map, size_t a, size_t b) {
    return map[a] > map[b] || (!(map[a] < map[b]) && a < b);
}

static size_t highest_around(const float *map, size_t nx, size_t ny, size_t x, size_t y) {
    size_t best = y * nx + x;
    size_t x0 = x ? x - 1 : 0, x1 = x + 1 < nx ? x + 1 : x, y0 = y ? y - 1 : 0, y1 = y + 1 < ny ? y + 1 : y;
    for (size_t yy = y0; yy <= y1; yy++)
        for (size_t xx = x0; xx <= x1; xx++)
            if (above(map, yy * nx + xx, best)) best = yy * nx + xx;
    return best;
}

/* The same inside the frame, without bounds: earlier neighbours win ties, later ones must be higher. */
static size_t highest_inside(const float *map, size_t nx, size_t i) {
    const float *p = map + i;
    size_t best = i;
    float top = p[0];
    ptrdiff_t w = (ptrdiff_t)nx;
    const ptrdiff_t before[4] = { -1, -w + 1, -w, -w - 1 }, after[4] = { 1, w - 1, w, w + 1 };
    for (int k = 0; k < 4; k++)
        if (p[before[k]] >= top) {
            top = p[before[k]];
            best = (size_t)((ptrdiff_t)i + before[k]);
        }
    for (int k = 0; k < 4; k++)
        if (p[after[k]] > top) {
            top = p[after[k]];
            best = (size_t)((ptrdiff_t)i + after[k]);
        }
    return best;
}

int maximum_uphill(const float *map, size_t nx, size_t ny, double reach_px, uint32_t *pixel) {
    size_t at = *pixel, x0 = at % nx, y0 = at / nx;
    for (;;) {
        size_t x = at % nx, y = at / nx, best = highest_around(map, nx, ny, x, y);
        if (best == at) {
            *pixel = (uint32_t)at;
            return 1;
        }
        at = best;
        if (hypot((double)(at % nx) - (double)x0, (double)(at / nx) - (double)y0) > reach_px) return 0;
    }
}

int maximum_rules(const float *map, size_t nx, size_t ny, uint32_t pixel, size_t reach) {
    size_t x = pixel % nx, y = pixel / nx;
    size_t x0 = x > reach ? x - reach : 0, x1 = x + reach < nx ? x + reach : nx - 1;
    size_t y0 = y > reach ? y - reach : 0, y1 = y + reach < ny ? y + reach : ny - 1;
    for (size_t yy = y0; yy <= y1; yy++)
        for (size_t xx = x0; xx <= x1; xx++)
            if (above(map, yy * nx + xx, pixel) && yy * nx + xx != pixel) return 0;
    return 1;
}

/* Joins the basins pass by pass; the root of a set is its highest maximum. */
static status passes_join(const pass *p, size_t n_pass, maximum *m, size_t n, error *e) {
    uint32_t *parent = mem_array(n, sizeof *parent);
    if (!parent) return NO_MEMORY(e, "the dynamics of the features");
    for (size_t i = 0; i < n; i++) {
        parent[i] = (uint32_t)i;
        m[i].dynamic = INFINITY;
    }
    for (size_t i = 0; i < n_pass; i++) {
        uint32_t a = set_find(parent, p[i].a), b = set_find(parent, p[i].b);
        if (a == b) continue;
        int a_wins = m[a].height > m[b].height || (!(m[a].height < m[b].height) && a < b);
        uint32_t low = a_wins ? b : a, high = a_wins ? a : b;
        m[low].dynamic = m[low].height - p[i].height;
        parent[low] = high;
    }
    free(parent);
    return ST_OK;
}

/* up[i]: where the steepest ascent from pixel i goes; returns how many pixels are maxima. */
static size_t ascend(const float *map, size_t nx, size_t ny, uint32_t *up) {
    size_t n = 0;
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx; x++) {
            size_t i = y * nx + x;
            int inside = x && y && x + 1 < nx && y + 1 < ny;
            size_t best = inside ? highest_inside(map, nx, i) : highest_around(map, nx, ny, x, y);
            up[i] = (uint32_t)best;
            n += best == i;
        }
    return n;
}

static status dynamics_find(const float *map, size_t nx, size_t ny, uint32_t *up, maximum *m, size_t n,
                            error *e) {
    pass *p = NULL;
    size_t n_pass = 0;
    basins_number(up, nx * ny);
    status st = passes_find(map, up, nx, ny, n, &p, &n_pass, e);
    if (st == ST_OK) st = passes_join(p, n_pass, m, n, e);
    free(p);
    return st;
}

status maxima_find(const float *map, size_t nx, size_t ny, int with_dynamics, maximum **out, size_t *n,
                   error *e) {
    size_t n_px = nx * ny, k = 0;
    uint32_t *up = mem_array(n_px, sizeof *up);
    if (!up) return NO_MEMORY(e, "the maxima");
    size_t count = ascend(map, nx, ny, up);
    maximum *m = mem_array(count, sizeof *m);
    status st = m ? ST_OK : NO_MEMORY(e, "the maxima");
    for (size_t i = 0; st == ST_OK && i < n_px; i++)
        if (up[i] == i) m[k++] = (maximum){ (uint32_t)i, map[i], 0.0f };
    if (st == ST_OK && with_dynamics) st = dynamics_find(map, nx, ny, up, m, count, e);
    free(up);
    if (st == ST_OK) {
        *out = m;
        *n = count;
    } else
        free(m);
    return st;
}

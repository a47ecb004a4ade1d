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

typedef struct {
    float height;
    uint32_t a, b; /* basins it joins */
} pass;

static int by_height(const void *p, const void *q) {
    const pass *a = p, *b = q;
    if (a->height < b->height || a->height > b->height) return a->height > b->height ? -1 : 1;
    if (a->a != b->a) return a->a < b->a ? -1 : 1;
    return (a->b > b->b) - (a->b < b->b);
}

/* Passes between basins: only the highest of each pair matters, kept in an open hash table that grows. */
typedef struct {
    pass *slot; /* a == b: empty */
    size_t room, used;
} pass_table;

static pass *table_find(const pass_table *t, uint32_t a, uint32_t b) {
    uint64_t key = ((uint64_t)a << 32 | b) * 0x9E3779B97F4A7C15u;
    size_t i = (size_t)(key >> 20) & (t->room - 1);
    while (t->slot[i].a != t->slot[i].b && !(t->slot[i].a == a && t->slot[i].b == b))
        i = (i + 1) & (t->room - 1);
    return &t->slot[i];
}

static status table_grow(pass_table *t, error *e) {
    pass_table wide = { mem_array(t->room * 2, sizeof *wide.slot), t->room * 2, t->used };
    if (!wide.slot) return NO_MEMORY(e, "the saddles between features");
    for (size_t i = 0; i < t->room; i++)
        if (t->slot[i].a != t->slot[i].b) *table_find(&wide, t->slot[i].a, t->slot[i].b) = t->slot[i];
    free(t->slot);
    *t = wide;
    return ST_OK;
}

static status table_add(pass_table *t, uint32_t a, uint32_t b, float height, error *e) {
    if (a > b) {
        uint32_t swap = a;
        a = b;
        b = swap;
    }
    pass *p = table_find(t, a, b);
    if (p->a != p->b) {
        if (height > p->height) p->height = height;
        return ST_OK;
    }
    *p = (pass){ height, a, b };
    t->used++;
    return t->used * 2 > t->room ? table_grow(t, e) : ST_OK;
}

/* Basin borders to the right, below left, below and below right of every pixel. */
static status passes_collect(const float *map, const uint32_t *basin, size_t nx, size_t ny, pass_table *t,
                             error *e) {
    status st = ST_OK;
    for (size_t y = 0; y < ny && st == ST_OK; y++)
        for (size_t x = 0; x < nx && st == ST_OK; x++) {
            size_t i = y * nx + x, n = 0, near[4];
            if (x + 1 < nx) near[n++] = i + 1;
            if (y + 1 < ny) {
                near[n++] = i + nx;
                if (x) near[n++] = i + nx - 1;
                if (x + 1 < nx) near[n++] = i + nx + 1;
            }
            for (size_t k = 0; k < n && st == ST_OK; k++) {
                size_t j = near[k];
                if (basin[i] != basin[j])
                    st = table_add(t, basin[i], basin[j], map[i] < map[j] ? map[i] : map[j], e);
            }
        }
    return st;
}

static uint32_t set_find(uint32_t *parent, uint32_t i) {
    while (parent[i] != i) {
        parent[i] = parent[parent[i]];
        i = parent[i];
    }
    return i;
}

/* Joins the sets pass by pass; the root of a set is its highest maximum. */
static status passes_join(pass_table *t, maximum *m, size_t n, error *e) {
    uint32_t *parent = mem_array(n, sizeof *parent);
    if (!parent) return NO_MEMORY(e, "the dynamics of the features");
    size_t n_pass = 0;
    for (size_t i = 0; i < t->room; i++)
        if (t->slot[i].a != t->slot[i].b) t->slot[n_pass++] = t->slot[i];
    qsort(t->slot, n_pass, sizeof *t->slot, by_height);
    for (size_t i = 0; i < n; i++) {
        parent[i] = (uint32_t)i;
        m[i].dynamic = INFINITY;
    }
    for (size_t i = 0; i < n_pass; i++) {
        uint32_t a = set_find(parent, t->slot[i].a), b = set_find(parent, t->slot[i].b);
        if (a == b) continue;
        int a_wins = m[a].height > m[b].height || (!(m[a].height < m[b].height) && a < b);
        uint32_t low = a_wins ? b : a, high = a_wins ? a : b;
        m[low].dynamic = m[low].height - t->slot[i].height;
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

/* Replaces every pointer by the number of the maximum it leads to. Maxima are numbered first; then each pixel
 * walks up to the first pixel that knows its number, and the walk is written back. */
static void number_basins(const maximum *m, size_t n, size_t n_px, uint32_t *up) {
    const uint32_t known = (uint32_t)1 << 31;
    for (size_t k = 0; k < n; k++) up[m[k].pixel] = known | (uint32_t)k;
    for (size_t i = 0; i < n_px; i++) {
        size_t j = i;
        while (!(up[j] & known)) j = up[j];
        uint32_t basin = up[j];
        for (j = i; !(up[j] & known);) {
            size_t next = up[j];
            up[j] = basin;
            j = next;
        }
    }
    for (size_t i = 0; i < n_px; i++) up[i] &= ~known;
}

status maxima_find(const float *map, size_t nx, size_t ny, int with_dynamics, maximum **out, size_t *n,
                   error *e) {
    size_t n_px = nx * ny, k = 0;
    uint32_t *up = mem_array(n_px, sizeof *up);
    maximum *m = NULL;
    pass_table t = { NULL, 256, 0 };
    status st = ST_OK;
    if (!up) return NO_MEMORY(e, "the maxima");
    size_t count = ascend(map, nx, ny, up);
    m = mem_array(count, sizeof *m);
    if (!m) {
        free(up);
        return NO_MEMORY(e, "the maxima");
    }
    for (size_t i = 0; i < n_px; i++)
        if (up[i] == i) m[k++] = (maximum){ (uint32_t)i, map[i], 0.0f };
    if (with_dynamics) {
        while (t.room < 8 * count) t.room *= 2;
        t.slot = mem_array(t.room, sizeof *t.slot);
        number_basins(m, count, n_px, up);
        st = t.slot ? passes_collect(map, up, nx, ny, &t, e) : NO_MEMORY(e, "the saddles between features");
        if (st == ST_OK) st = passes_join(&t, m, count, e);
    }
    free(t.slot);
    free(up);
    if (st == ST_OK) {
        *out = m;
        *n = count;
    } else
        free(m);
    return st;
}

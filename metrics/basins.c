/* Basins and passes: what the dynamics of maxima and the watershed have in common.
 *
 * A path between two maxima may always be replaced by the ascents inside the basins it crosses without going lower, so the
 * highest pass between two basins lies on their common border, and looking at every border pixel once finds all. */
#include "metrics/basins.h"

#include <stdlib.h>

#include "base/mem.h"

size_t basins_number(uint32_t *up, size_t n_px) {
    const uint32_t known = (uint32_t)1 << 31;
    uint32_t n = 0;
    for (size_t i = 0; i < n_px; i++)
        if (up[i] == i) up[i] = known | n++;
    for (size_t i = 0; i < n_px; i++) {
        size_t j = i;
        while (!(up[j] & known)) j = up[j];
        uint32_t basin = up[j];
        for (j = i; !(up[j] & known);) { /* the whole way learns the number: each pixel is walked over once */
            size_t next = up[j];
            up[j] = basin;
            j = next;
        }
    }
    for (size_t i = 0; i < n_px; i++) up[i] &= ~known;
    return n;
}

uint32_t set_find(uint32_t *parent, uint32_t i) {
    while (parent[i] != i) {
        parent[i] = parent[parent[i]];
        i = parent[i];
    }
    return i;
}

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
            const uint32_t *b = basin + i; /* most pixels lie inside a basin */
            if (x && x + 1 < nx && y + 1 < ny && b[0] == b[1] && b[0] == b[nx - 1] && b[0] == b[nx] &&
                b[0] == b[nx + 1])
                continue;
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

status passes_find(const float *map, const uint32_t *basin, size_t nx, size_t ny, size_t n_basins, pass **out,
                   size_t *n, error *e) {
    pass_table t = { NULL, 256, 0 };
    while (t.room < 8 * n_basins) t.room *= 2;
    t.slot = mem_array(t.room, sizeof *t.slot);
    status st =
        t.slot ? passes_collect(map, basin, nx, ny, &t, e) : NO_MEMORY(e, "the saddles between features");
    if (st != ST_OK) {
        free(t.slot);
        return st;
    }
    size_t k = 0;
    for (size_t i = 0; i < t.room; i++)
        if (t.slot[i].a != t.slot[i].b) t.slot[k++] = t.slot[i];
    qsort(t.slot, k, sizeof *t.slot, by_height);
    *out = t.slot;
    *n = k;
    return ST_OK;
}

/* Finds the info strip by what instruments paint: from its first row down, rows own few exact grey levels in long
 * runs, with crisp writing of a few levels in them, while rows of specimen carry noise or shading.
 *
 * Every row of the lower part is described by the share of its commonest level, the share of equal neighbours, and its
 * small and large steps. A candidate is a row of (nearly) one level that the row above does not share; it is the
 * strip's first row when everything below is strip-like and holds writing. The topmost candidate that passes is taken,
 * so a line above the writing, or a frame around it, belongs to the strip. A frame may leave a few rows of specimen
 * below it. Where the exact search finds nothing it is repeated with a tolerance for strips that went through noise or
 * lossy compression.
 *
 * The figures below are rules of this project, tried on the styles in tests/io/strip.c. Does not: read the writing, or
 * crop a block without any (a saturated band of specimen looks the same). */
#include "io/strip_priv.h"

#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"

enum { MIN_ROWS = 8, LEVELS = 65536 };

typedef struct {
    int mode;            /* commonest level */
    float share, second; /* of the row's pixels: at the commonest level; at the next one */
    float equal;         /* of neighbours: the same level */
    int small, large;    /* steps between neighbours: shading or noise; writing */
    int exact;           /* one level, no exception */
} row_facts;

typedef struct {
    size_t nx, ny, first; /* rows first .. ny - 1 are described */
    row_facts *rows;      /* [ny - first] */
    int window;           /* levels that count as one, each way; 0: exact */
    int small, large;     /* steps, in levels */
    int exempt;           /* rows of specimen below a frame, at most */
} view;

/* Room for one row's work. */
typedef struct {
    uint16_t *level;
    uint32_t *count; /* [LEVELS], all 0 between rows */
} scratch;

static uint32_t around(const uint32_t *count, int v, int window) {
    uint32_t n = 0;
    for (int k = v - window < 0 ? 0 : v - window; k <= v + window && k < LEVELS; k++) n += count[k];
    return n;
}

/* Commonest level but those within `window` of `except` (negative: none). */
static int commonest(const scratch *w, size_t nx, int window, int except, uint32_t *n) {
    int best = -1, last = -1;
    *n = 0;
    for (size_t x = 0; x < nx; x++) {
        int v = w->level[x];
        if (v == last || (except >= 0 && abs(v - except) <= window)) continue;
        last = v;
        uint32_t k = window ? around(w->count, v, window) : w->count[v];
        if (k > *n || (k == *n && v < best)) {
            *n = k;
            best = v;
        }
    }
    return best;
}

static row_facts describe_row(const float *px, const view *v, const scratch *w) {
    row_facts f = { 0 };
    size_t nx = v->nx, equal = 0;
    float top = v->window ? 255.0f : 65535.0f;
    int low = LEVELS, high = 0;
    for (size_t x = 0; x < nx; x++) {
        int level = (int)(px[x] * top + 0.5f);
        w->level[x] = (uint16_t)level;
        w->count[level]++;
        if (level < low) low = level;
        if (level > high) high = level;
    }
    for (size_t x = 1; x < nx; x++) {
        int step = abs(w->level[x] - w->level[x - 1]);
        equal += step <= v->window;
        f.small += step > v->window && step < v->small;
        f.large += step >= v->large;
    }
    uint32_t n, next;
    f.mode = commonest(w, nx, v->window, -1, &n);
    (void)commonest(w, nx, v->window, f.mode, &next);
    f.share = (float)n / (float)nx;
    f.second = (float)next / (float)nx;
    f.equal = (float)equal / (float)(nx - 1);
    f.exact = low == high;
    for (size_t x = 0; x < nx; x++) w->count[w->level[x]] = 0;
    return f;
}

static int one_level(const row_facts *f) { return f->share >= 0.95f; }

/* Sums over the rows t .. end - 1 of a block that may be the strip. */
typedef struct {
    double share, equal, other, second; /* means of the shares; of pixels off the row's level, sum and next level */
    long small, large;
    size_t written, n, odd; /* rows with writing; rows; rows with steps but none of writing */
    int blocked;            /* a row that no strip has */
} block_facts;

static block_facts describe_block(const view *v, size_t t, size_t end) {
    block_facts b = { .n = end - t };
    for (size_t y = t; y < end; y++) {
        const row_facts *f = &v->rows[y - v->first];
        b.share += (double)f->share;
        b.equal += (double)f->equal;
        if (f->equal < 0.25f || f->share < 0.3f) b.blocked = 1;
        if (one_level(f) && !f->large) continue;
        b.other += 1.0 - (double)f->share;
        b.second += (double)f->second;
        b.small += f->small;
        b.large += f->large;
        b.written += f->large >= 2;
        b.odd += f->small >= 8 && f->large == 0;
    }
    b.share /= (double)b.n;
    b.equal /= (double)b.n;
    return b;
}

static int strip_like(const view *v, const block_facts *b) {
    if (b->blocked || b->share < 0.65 || b->equal < 0.7) return 0;
    if (b->written < 3 || b->large < 20) return 0;                  /* no writing */
    if (b->second < 0.12 * b->other) return 0;                      /* writing has a level of its own */
    return !v->window ? (double)b->small <= 0.8 * (double)b->large  /* shading steps softly, letters do not */
                      : (double)b->small <= 1.5 * (double)b->large;
}

/* Share of level `mode` in the rows above t, and how many of them are of one level without exception. */
static void look_above(const view *v, size_t t, int mode, double *share, double *exact) {
    size_t n = t - v->first < 16 ? t - v->first : 16;
    *share = *exact = 0.0;
    for (size_t y = t - n; y < t; y++) {
        const row_facts *f = &v->rows[y - v->first];
        if (abs(f->mode - mode) <= v->window) *share += (double)f->share;
        *exact += f->exact;
    }
    *share /= (double)n;
    *exact /= (double)n;
}

/* Row t begins something: it is of one level and the row above is not, or is of another. */
static int begins(const view *v, size_t t) {
    const row_facts *f = &v->rows[t - v->first], *above = f - 1;
    if (!one_level(f)) return 0;
    if (one_level(above) && abs(above->mode - f->mode) <= 2 * v->window) {
        /* Nearly black specimen over a black strip: only the strip is black without exception. */
        return !v->window && f->exact && !above->exact;
    }
    double share, exact;
    look_above(v, t, f->mode, &share, &exact);
    return share < 0.7 || (!v->window && f->exact && !above->exact && exact < 0.3);
}

static size_t search(const view *v) {
    size_t highest = v->ny - v->ny / 3 > v->first ? v->ny - v->ny / 3 : v->first + 1;
    for (size_t t = highest; t + MIN_ROWS <= v->ny; t++) {
        if (!begins(v, t)) continue;
        size_t rows = v->ny - t, exempt = rows / 8 < (size_t)v->exempt ? rows / 8 : (size_t)v->exempt;
        for (size_t k = 0; k <= exempt; k++) {
            block_facts b = describe_block(v, t, v->ny - k);
            if (strip_like(v, &b)) return rows;
        }
    }
    return 0;
}

size_t strip_find(const float *px, size_t nx, size_t ny) {
    if (nx < 32 || ny < 32) return 0;
    size_t first = ny - ny / 3 > 17 ? ny - ny / 3 - 17 : 0, found = 0;
    view v = { .nx = nx, .ny = ny, .first = first, .exempt = 4 };
    scratch w = { mem_array(nx, sizeof *w.level), mem_array(LEVELS, sizeof *w.count) };
    v.rows = mem_array(ny - first, sizeof *v.rows);
    for (int pass = 0; pass < 2 && !found && w.level && w.count && v.rows; pass++) {
        v.window = pass ? 4 : 0;
        v.small = pass ? 16 : 13 * 257;
        v.large = pass ? 31 : 31 * 257;
        for (size_t y = first; y < ny; y++) v.rows[y - first] = describe_row(px + y * nx, &v, &w);
        found = search(&v);
    }
    free(w.level);
    free(w.count);
    free(v.rows);
    return found;
}

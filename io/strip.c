/* Finds the info strip by what instruments paint: from its first row down, rows own few exact grey levels in
 * long runs, with crisp writing of a few levels in them, while rows of specimen carry noise or shading.
 *
 * Every row of the lower part is described by the share of its commonest level, the share of equal
 * neighbours, and its small and large steps. A candidate is a row of (nearly) one level that the row above
 * does not share; it is the strip's first row when everything below is strip-like and holds writing. The
 * topmost candidate that passes is taken, so a line above the writing, or a frame around it, belongs to the
 * strip. A frame may leave a few rows of specimen below it. Where the exact search finds nothing it is
 * repeated with a tolerance for noise, then with one for lossy compression. A strip at the top is the same
 * upside down; a box narrower than the picture is searched in its own columns and must have side edges.
 *
 * The figures below are rules of this project, tried on the styles in tests/io/strip.c. Paper with
 * a scale bar alone will do. Does not: read the writing, or crop a block without any (a saturated band of
 * specimen looks the same). */
#include "io/strip_priv.h"

#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"

enum { MIN_ROWS = 8, LEVELS = 65536, PARTS = 8, REACH = 16 };

typedef struct {
    int mode;            /* commonest level */
    float share, second; /* of the row's pixels: at the commonest level; at the next one */
    float equal;         /* of neighbours: the same level */
    int large;           /* steps between neighbours as writing makes them */
    uint16_t small_in[PARTS], large_in[PARTS]; /* shading or noise, and writing, in eight parts of the row */
    uint32_t from, to;                         /* columns of the first and the last step, 0 without any */
    int exact;                                 /* one level, no exception */
} row_facts;

typedef struct {
    size_t nx, ny, first; /* rows first .. ny - 1 have room for their facts */
    size_t lowest;        /* no strip begins above this row */
    row_facts *rows;      /* [ny - first], described from 17 rows above `lowest` on */
    const float *px;      /* rows of `stride` pixels, nx of them looked at */
    size_t stride;
    int from_top;     /* the picture is looked at upside down */
    int window;       /* levels that count as one, each way; 0: exact */
    int small, large; /* steps, in levels */
    int exempt;       /* rows of specimen below a frame, at most */
} view;

/* Room for one row's work. */
typedef struct {
    uint16_t *level;
    uint32_t *count;     /* [LEVELS], all 0 between rows */
    uint32_t below[257]; /* of a windowed row: pixels below each level */
} scratch;

/* Pixels within the window of level v. Windowed levels are at most 255. */
static uint32_t around(const scratch *w, int v, int window) {
    int low = v - window < 0 ? 0 : v - window, high = v + window > 255 ? 255 : v + window;
    return w->below[high + 1] - w->below[low];
}

static void sum_up(scratch *w) {
    for (int v = 0; v < 256; v++) w->below[v + 1] = w->below[v] + w->count[v];
}

/* Commonest level but those within `window` of `except` (negative: none). */
static int commonest(const scratch *w, size_t nx, int window, int except, uint32_t *n) {
    int best = -1, last = -1;
    *n = 0;
    for (size_t x = 0; x < nx; x++) {
        int v = w->level[x];
        if (v == last || (except >= 0 && abs(v - except) <= window)) continue;
        last = v;
        uint32_t k = window ? around(w, v, window) : w->count[v];
        if (k > *n || (k == *n && v < best)) {
            *n = k;
            best = v;
        }
    }
    return best;
}

static row_facts describe_row(const float *px, const view *v, scratch *w) {
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
    for (size_t part = 0, x = 1; part < PARTS; part++) {
        int small = 0, large = 0;
        for (size_t end = nx * (part + 1) / PARTS; x < end; x++) {
            int step = abs(w->level[x] - w->level[x - 1]);
            equal += step <= v->window;
            if (step > v->window) {
                f.to = (uint32_t)x;
                if (!f.from) f.from = f.to;
            }
            small += step > v->window && step < v->small;
            large += step >= v->large;
        }
        f.small_in[part] = (uint16_t)small;
        f.large_in[part] = (uint16_t)large;
        f.large += large;
    }
    uint32_t n, next;
    if (v->window) sum_up(w);
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

/* No strip has such a row: specimen. */
static int blocks(const row_facts *f) { return f->equal < 0.25f || f->share < 0.3f; }

/* Sums over the rows t .. end - 1 of a block that may be the strip. */
typedef struct {
    double share, equal, other,
        second; /* means of the shares; of pixels off the row's level, sum and next level */
    long small[PARTS], large[PARTS];
    size_t written; /* rows with writing */
    int blocked;    /* a row that no strip has */
} block_facts;

static block_facts describe_block(const view *v, size_t t, size_t end) {
    block_facts b = { 0 };
    for (size_t y = t; y < end; y++) {
        const row_facts *f = &v->rows[y - v->first];
        if (blocks(f)) {
            b.blocked = 1;
            return b;
        }
        b.share += (double)f->share;
        b.equal += (double)f->equal;
        if (one_level(f) && !f->large) continue;
        b.other += 1.0 - (double)f->share;
        b.second += (double)f->second;
        b.written += f->large >= 2;
        for (int k = 0; k < PARTS; k++) {
            b.small[k] += f->small_in[k];
            b.large[k] += f->large_in[k];
        }
    }
    b.share /= (double)(end - t);
    b.equal /= (double)(end - t);
    return b;
}

/* Letters step hard, shading steps softly. Judged in parts of the width, since a logo may be shaded. */
static int is_crisp(const view *v, const block_facts *b) {
    int active = 0, crisp = 0;
    for (int k = 0; k < PARTS; k++) {
        active += b->small[k] + b->large[k] >= 20;
        crisp += b->large[k] >= 10 && (double)b->small[k] <= (v->window ? 1.5 : 0.8) * (double)b->large[k];
    }
    return crisp && 2 * crisp >= active;
}

static int strip_like(const view *v, const block_facts *b) {
    return !b->blocked && b->share >= 0.65 && b->equal >= 0.7 && b->written >= 3 &&
           b->second >= 0.12 * b->other /* writing has a level of its own */ && is_crisp(v, b);
}

static int has_small_steps(const row_facts *f) {
    int n = 0;
    for (int k = 0; k < PARTS; k++) n += f->small_in[k];
    return n > 0;
}

/* Paper with nothing on it but a scale bar, with or without ticks: too little for writing. Its rows all begin and
 * end in the same columns, as no feature of a specimen does. Lossy compression hides that. */
static int is_bar_alone(const view *v, size_t t) {
    const row_facts *bar = NULL, *first = &v->rows[t - v->first];
    size_t rows = 0;
    for (size_t y = t; y < v->ny; y++) {
        const row_facts *f = &v->rows[y - v->first];
        if (abs(f->mode - first->mode) > v->window) return 0;
        if (!f->to) continue;
        if (!bar) bar = f;
        if (has_small_steps(f) || f->large > 6 || f->from != bar->from || f->to != bar->to) return 0;
        rows++;
    }
    return rows >= 2 && bar->to - bar->from >= 3 * rows && 2 * rows <= v->ny - t;
}

/* Share of level `mode` in the rows above t, and how many of them are of one level without exception. */
static void look_above(const view *v, size_t t, int mode, double *share, double *exact) {
    size_t n = t - v->first < REACH ? t - v->first : REACH;
    *share = *exact = 0.0;
    for (size_t y = t - n; y < t; y++) {
        const row_facts *f = &v->rows[y - v->first];
        if (abs(f->mode - mode) <= v->window) *share += (double)f->share;
        *exact += f->exact;
    }
    *share /= (double)n;
    *exact /= (double)n;
}

typedef enum { BEGINS_NOT, BEGINS_UNSURE, BEGINS } beginning;

/* Row t begins something: it is of one level and the row above is not, or is of another. Unsure when the rows
 * above hold much of that level: black pores over a black strip, but also a flat ground between hillocks. */
static beginning begins(const view *v, size_t t) {
    const row_facts *f = &v->rows[t - v->first], *above = f - 1;
    if (!one_level(f)) return BEGINS_NOT;
    /* Nearly black specimen over a black strip: only the strip is black without exception. */
    if (one_level(above) && abs(above->mode - f->mode) <= 2 * v->window)
        return !v->window && f->exact && !above->exact ? BEGINS_UNSURE : BEGINS_NOT;
    double share, exact;
    look_above(v, t, f->mode, &share, &exact);
    if (share < 0.3) return BEGINS;
    return share < 0.7 || (!v->window && f->exact && !above->exact && exact < 0.3) ? BEGINS_UNSURE
                                                                                   : BEGINS_NOT;
}

/* The level of most rows from t on: the paper of the strip. */
static int paper(const view *v, size_t t) {
    int level = -1;
    size_t most = 0;
    for (size_t y = t; y < v->ny; y++) {
        size_t n = 0;
        int mode = v->rows[y - v->first].mode;
        for (size_t k = t; k < v->ny; k++) n += abs(v->rows[k - v->first].mode - mode) <= v->window;
        if (n > most) most = n, level = mode;
    }
    return level;
}

/* Are the rows from an unsure beginning to a sure one specimen? They are when they are shaded, or when they
 * are no mere line and have another level than the paper below; a line within a strip has the same paper
 * around it. */
static int is_specimen(const view *v, size_t unsure, size_t sure) {
    long small = 0, large = 0;
    for (size_t y = unsure; y < sure; y++) {
        const row_facts *f = &v->rows[y - v->first];
        for (int k = 0; k < PARTS; k++) small += f->small_in[k];
        large += f->large;
    }
    if (small >= 8 && small > large) return 1;
    return sure - unsure > 4 && abs(paper(v, sure) - v->rows[unsure - v->first].mode) > v->window;
}

/* Clipped to two levels a specimen looks like writing on paper; so do then the rows above. */
static int specimen_is_alike(const view *v, size_t t) {
    size_t n = t - v->first < REACH ? t - v->first : REACH;
    block_facts b = describe_block(v, t - n, t);
    return strip_like(v, &b);
}

static size_t search(const view *v) {
    size_t unsure = 0;
    for (size_t t = v->lowest; t + MIN_ROWS <= v->ny; t++) {
        beginning kind = begins(v, t);
        if (kind == BEGINS_NOT || (unsure && kind != BEGINS)) continue;
        size_t rows = v->ny - t, exempt = rows / 8 < (size_t)v->exempt ? rows / 8 : (size_t)v->exempt;
        int like = is_bar_alone(v, t);
        for (size_t k = 0; k <= exempt && !like; k++) {
            block_facts b = describe_block(v, t, v->ny - k);
            like = strip_like(v, &b);
        }
        if (!like || specimen_is_alike(v, t)) continue;
        if (kind == BEGINS_UNSURE)
            unsure = t;
        else if (!unsure)
            return rows;
        else
            return is_specimen(v, unsure, t) ? rows : v->ny - unsure;
    }
    return unsure ? v->ny - unsure : 0;
}

/* Describes rows from the bottom up, as far as a strip can reach and its surroundings are looked at: mostly a
 * few rows, since the first row of noisy specimen ends the search. */
static void describe(view *v, scratch *w) {
    size_t y = v->ny, top = v->first;
    v->lowest = v->ny - v->ny / 3;
    while (y > top) {
        y--;
        v->rows[y - v->first] = describe_row(v->px + (v->from_top ? v->ny - 1 - y : y) * v->stride, v, w);
        if (y < v->lowest || y + (size_t)v->exempt >= v->ny || !blocks(&v->rows[y - v->first])) continue;
        v->lowest = y + 1;
        top = y > v->first + REACH ? y - REACH : v->first;
    }
}

/* Lossy compression spreads specimen over the strip's first block of 8 rows: those that still hold much of the
 * paper belong to the strip. */
static size_t grow(const view *v, size_t rows) {
    size_t t = v->ny - rows, more = 0;
    int level = paper(v, t);
    while (more < 7 && t > v->first + more) {
        const row_facts *f = &v->rows[t - 1 - more - v->first];
        if (abs(f->mode - level) > v->window || f->share < 0.4f) break;
        more++;
    }
    return rows + more;
}

/* Three passes: exact levels, a tolerance for noise, a tolerance for lossy compression. */
static const struct {
    int window, small, large;
} passes[] = { { 0, 13 * 257, 31 * 257 }, { 4, 16, 31 }, { 16, 40, 64 } };

static size_t find_in(const float *px, size_t stride, size_t nx, size_t ny, int from_top, int n_passes) {
    size_t first = ny - ny / 3 - REACH - 1, found = 0; /* ny >= 32: at least 4 */
    view v = {
        .px = px, .stride = stride, .nx = nx, .ny = ny, .first = first, .from_top = from_top, .exempt = 4
    };
    scratch w = { mem_array(nx, sizeof *w.level), mem_array(LEVELS, sizeof *w.count), { 0 } };
    v.rows = mem_array(ny - first, sizeof *v.rows);
    for (int pass = 0; pass < n_passes && !found && w.level && w.count && v.rows; pass++) {
        v.window = passes[pass].window;
        v.small = passes[pass].small;
        v.large = passes[pass].large;
        describe(&v, &w);
        found = search(&v);
        if (found && pass == 2) found = grow(&v, found);
    }
    free(w.level);
    free(w.count);
    free(v.rows);
    return found;
}

/* ---- a strip narrower than the picture ---- */

typedef struct {
    size_t x0, x1;
} span;

static int same_level(float a, float b) { return fabsf(a - b) < 0.5f / 65535.0f; }

static span longest_run(const float *row, size_t nx) {
    span best = { 0, 0 };
    for (size_t x = 0; x < nx;) {
        size_t end = x + 1;
        while (end < nx && same_level(row[end], row[x])) end++;
        if (end - x > best.x1 - best.x0) best = (span){ x, end };
        x = end;
    }
    return best;
}

/* The box has an edge: beside its first and last column, over nearly all of its height, the picture is not of
 * the paper's level. A flat ground with writing on it has none. */
static int has_edges(const float *px, size_t nx, size_t ny, size_t rows, span b, float level) {
    size_t left = 0, right = 0;
    for (size_t y = ny - rows; y < ny; y++) {
        const float *row = px + y * nx;
        left += !b.x0 || !same_level(row[b.x0 - 1], level);
        right += b.x1 == nx || !same_level(row[b.x1], level);
    }
    return 10 * left >= 9 * rows && 10 * right >= 9 * rows;
}

static size_t find_narrow(const float *px, size_t nx, size_t ny) {
    static const size_t offsets[] = { 1, 3, 6, 12 };
    for (size_t k = 0; k < sizeof offsets / sizeof offsets[0]; k++) {
        const float *row = px + (ny - offsets[k]) * nx;
        span b = longest_run(row, nx);
        size_t width = b.x1 - b.x0;
        if (width < nx * 3 / 10 || width < 32 || width == nx) continue;
        size_t rows = find_in(px + b.x0, nx, width, ny - offsets[k] + 1, 0, 1);
        if (rows && has_edges(px, nx, ny - offsets[k] + 1, rows, b, row[b.x0])) return rows + offsets[k] - 1;
    }
    return 0;
}

size_t strip_find(const float *px, size_t nx, size_t ny) {
    if (nx < 32 || ny < 32) return 0;
    size_t rows = find_in(px, nx, nx, ny, 0, 3);
    return rows ? rows : find_narrow(px, nx, ny);
}

size_t strip_find_top(const float *px, size_t nx, size_t ny) {
    if (nx < 32 || ny < 32) return 0;
    return find_in(px, nx, nx, ny, 1, 3);
}

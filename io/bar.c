/* Measures the scale bar: the longest horizontal stroke of ink in the strip that is no rule (touching a side or
 * nearly as wide as the picture) and no block (thicker than a quarter of its length), or eleven dots that divide it by ten. A bar that its own words
 * interrupt counts from the outer end of its first half to that of its second when both halves are alike. On
 * the picture itself only a saturated rectangle counts. Whole pixels: the caller carries +-1. Does not: read
 * the words. */
#include "io/bar_priv.h"

#include <math.h>
#include <stdint.h>
#include <string.h>

enum { SHORTEST = 12, LEVELS = 256, DOTS = 11, MAX_RUNS = 512 };

typedef struct {
    const float *px;
    size_t nx, y0, y1;       /* rows looked at */
    float ink_low, ink_high; /* levels that are ink */
} area;

typedef struct {
    size_t x0, x1;
} stroke;

static int is_ink(const area *a, size_t y, size_t x) {
    float v = a->px[y * a->nx + x];
    return v >= a->ink_low && v <= a->ink_high;
}

/* The next run of ink in row y from x on; x0 == nx: none. */
static stroke next_run(const area *a, size_t y, size_t x) {
    while (x < a->nx && !is_ink(a, y, x)) x++;
    stroke s = { x, x };
    while (s.x1 < a->nx && is_ink(a, y, s.x1)) s.x1++;
    return s;
}

static int ink_share_is(const area *a, size_t y, stroke s, int most) {
    size_t n = 0;
    for (size_t x = s.x0; x < s.x1; x++) n += (size_t)is_ink(a, y, x);
    return most ? 10 * n >= 9 * (s.x1 - s.x0) : 10 * n <= 4 * (s.x1 - s.x0);
}

/* Rows from y on that hold the run, and a free row above: this is its first one. */
static size_t thickness(const area *a, size_t y, stroke s) {
    if (y > a->y0 && ink_share_is(a, y - 1, s, 1)) return 0;
    size_t k = 1;
    while (y + k < a->y1 && ink_share_is(a, y + k, s, 1)) k++;
    if (y > a->y0 && !ink_share_is(a, y - 1, s, 0)) return 0; /* letters stand on it: underlined, not a bar */
    return k;
}

static int is_stroke(const area *a, size_t y, stroke s) {
    size_t n = s.x1 - s.x0, least = a->nx / 60 > SHORTEST ? a->nx / 60 : SHORTEST;
    if (n < least || 10 * n > 9 * a->nx || !s.x0 || s.x1 == a->nx) return 0;
    size_t thick = thickness(a, y, s);
    return thick && 4 * thick <= n;
}

/* Ink at the outer end of a half reaches above or below the stroke, as an end mark does. */
static int has_end_mark(const area *a, size_t y, size_t x) {
    size_t above = 0, below = 0;
    while (above < 8 && y > a->y0 + above && is_ink(a, y - 1 - above, x)) above++;
    while (below < 8 && y + 1 + below < a->y1 && is_ink(a, y + 1 + below, x)) below++;
    return above >= 2 && below >= 2;
}

/* The bar in row y: its longest stroke, or two like halves with end marks outside. */
static size_t bar_in_row(const area *a, size_t y) {
    stroke best = { 0, 0 }, second = { 0, 0 };
    for (size_t x = 0; x < a->nx;) {
        stroke s = next_run(a, y, x);
        if (s.x0 >= a->nx) break;
        x = s.x1;
        if (!is_stroke(a, y, s)) continue;
        if (s.x1 - s.x0 > best.x1 - best.x0)
            second = best, best = s;
        else if (s.x1 - s.x0 > second.x1 - second.x0)
            second = s;
    }
    size_t one = best.x1 - best.x0, other = second.x1 - second.x0;
    if (!other || 5 * other < 4 * one) return one;
    stroke left = best.x0 < second.x0 ? best : second, right = best.x0 < second.x0 ? second : best;
    int halves = has_end_mark(a, y, left.x0) && has_end_mark(a, y, right.x1 - 1) &&
                 !has_end_mark(a, y, left.x1 - 1) && !has_end_mark(a, y, right.x0);
    return halves ? right.x1 - left.x0 : one;
}

/* Run k stands one pitch from run j and is as wide. */
static int goes_on(const stroke *run, size_t j, size_t k, double pitch) {
    double wide = (double)(run[j].x1 - run[j].x0), other = (double)(run[k].x1 - run[k].x0);
    double apart = fabs((double)run[k].x0 - (double)run[j].x0);
    return fabs(wide - other) <= 1.0 && fabs(apart - pitch) <= 1.5;
}

/* From the first to the last of DOTS alike dots or ticks at like distances; a longer row of them is a rule. That there
 * are eleven, for ten parts: common practice, no source. */
static size_t dots_from(const area *a, const stroke *run, size_t n, size_t i) {
    size_t last = i + DOTS - 1, length = run[last].x0 - run[i].x0;
    double pitch = (double)length / (DOTS - 1), wide = (double)(run[i].x1 - run[i].x0);
    if (pitch < 4.0 || wide > 0.6 * pitch || 10 * length > 9 * a->nx) return 0;
    for (size_t k = i; k < last; k++)
        if (!goes_on(run, k, k + 1, pitch) ||
            fabs((double)(run[k].x0 - run[i].x0) - pitch * (double)(k - i)) > 1.0)
            return 0;
    if ((i && goes_on(run, i, i - 1, pitch)) || (last + 1 < n && goes_on(run, last, last + 1, pitch))) return 0;
    return length;
}

static size_t dots_in(const area *a) {
    size_t best = 0;
    for (size_t y = a->y0; y < a->y1; y++) {
        stroke run[MAX_RUNS];
        size_t n = 0;
        for (size_t x = 0; n < MAX_RUNS && (run[n] = next_run(a, y, x)).x0 < a->nx; n++) x = run[n].x1;
        for (size_t i = 0; i + DOTS <= n; i++) {
            size_t length = dots_from(a, run, n, i);
            if (length > best) best = length;
        }
    }
    return best;
}

static size_t bar_in(const area *a) {
    size_t best = 0;
    for (size_t y = a->y0; y < a->y1; y++) {
        size_t n = bar_in_row(a, y);
        if (n > best) best = n;
    }
    return best;
}

/* In a strip ink is what differs from the paper, its commonest level, by a third of the range or more. */
static size_t bar_in_strip(const float *px, size_t nx, size_t y0, size_t y1) {
    uint32_t count[LEVELS] = { 0 };
    unsigned paper = 0;
    for (size_t i = y0 * nx; i < y1 * nx; i++) count[(unsigned)(px[i] * 255.0f + 0.5f)]++;
    for (unsigned v = 1; v < LEVELS; v++)
        if (count[v] > count[paper]) paper = v;
    float level = (float)paper / 255.0f;
    area bright = { px, nx, y0, y1, level + 0.33f, 1.0f }, dark = { px, nx, y0, y1, 0.0f, level - 0.33f };
    const area *inks[2] = { level < 0.67f ? &bright : NULL, level > 0.33f ? &dark : NULL };
    size_t best = 0;
    for (int k = 0; k < 2; k++) {
        size_t line = inks[k] ? bar_in(inks[k]) : 0, dots = inks[k] ? dots_in(inks[k]) : 0;
        if (line > best) best = line;
        if (dots > best) best = dots;
    }
    return best;
}

size_t bar_find(const float *px, size_t nx, size_t ny, size_t top, size_t bottom) {
    size_t best = 0, n;
    if (top && (n = bar_in_strip(px, nx, 0, top)) > best) best = n;
    if (bottom && (n = bar_in_strip(px, nx, ny - bottom, ny)) > best) best = n;
    if (top || bottom) return best;
    area white = { px, nx, 0, ny, 1.0f, 1.0f }, black = { px, nx, 0, ny, 0.0f, 0.0f };
    size_t a = bar_in(&white), b = bar_in(&black);
    return a > b ? a : b;
}

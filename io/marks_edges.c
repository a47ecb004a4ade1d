/* Drawn things with straight edges along rows or columns: bars and lines (a run of ink, as thick over its whole
 * length, with ground on both sides), and boxes (ink all around, whatever is written inside). A saturated part of
 * the specimen has no edge that is straight to the pixel over a dozen pixels on all sides.
 *
 * Where such shapes come by the dozen they are the texture (a grating, pyramids), and none is taken. */
#include <math.h>
#include <string.h>

#include "io/marks_priv.h"

enum { SHORTEST = 16, SHORTEST_THIN = 40, THICK = 3, LONG = 36, BOX_WIDTH = 20, BOX_HEIGHT = 8, MOST_LINES = 12, MOST_THIN = 4, MOST_BOXES = 8, MOST_SHAPES = 64 };
static const double inside = 0.9, outside = 0.4, perfect = 0.96, least_contrast = 0.1, least_crisp = 0.8;

/* Rows and columns may change places, so that one search serves both. */
typedef struct {
    const ink_view *v;
    size_t nx, ny, step_x, step_y; /* as searched */
    int thin_too;                  /* lines of a row or two are no charging: any number, also where the ink is one of the texture */
} grid;

typedef struct {
    size_t x0, x1, y0, y1; /* half open, as searched */
} shape;

static size_t at(const grid *g, size_t x, size_t y) { return y * g->step_y + x * g->step_x; }
static int is_ink(const grid *g, size_t x, size_t y) {
    return g->v->ink[at(g, x, y)] == INK_CORE;
}

/* Share of ink in row y from x0 to x1, or in column x from y0 to y1; beside the picture there is none. */
static double row_share(const grid *g, size_t y, size_t x0, size_t x1) {
    size_t n = 0;
    if (y >= g->ny) return 0.0; /* row -1 wraps here too */
    for (size_t x = x0; x < x1; x++) n += (size_t)is_ink(g, x, y);
    return (double)n / (double)(x1 - x0);
}

static double column_share(const grid *g, size_t x, size_t y0, size_t y1) {
    size_t n = 0;
    if (x >= g->nx) return 0.0;
    for (size_t y = y0; y < y1; y++) n += (size_t)is_ink(g, x, y);
    return (double)n / (double)(y1 - y0);
}

static double row_distance(const grid *g, size_t y, size_t x0, size_t x1) {
    double s = 0.0;
    for (size_t x = x0; x < x1; x++) s += fabs((double)g->v->px[at(g, x, y)] - (double)g->v->level);
    return s / (double)(x1 - x0);
}

/* Two rows away the ground is already what it is four rows away; resampling and lossy compression take twice that. */
static int is_crisp(const grid *g, const shape *s) {
    size_t near = g->v->lossy ? 4 : 2, far = g->v->lossy ? 7 : 4;
    double close = 0.0, away = 0.0;
    int n = 0;
    if (s->y0 >= far) {
        close += row_distance(g, s->y0 - near, s->x0, s->x1);
        away += row_distance(g, s->y0 - far, s->x0, s->x1);
        n++;
    }
    if (s->y1 + far - 1 < g->ny) {
        close += row_distance(g, s->y1 + near - 1, s->x0, s->x1);
        away += row_distance(g, s->y1 + far - 1, s->x0, s->x1);
        n++;
    }
    return n && away / n >= least_contrast && close >= least_crisp * away;
}

/* How far outside an edge the ground is looked at: the last row of ink is ragged after lossy compression. */
static size_t ragged(const grid *g) { return g->v->lossy ? 1 : 0; }

static int left_is_free(const grid *g, const shape *s) {
    return column_share(g, s->x0 - 1 - ragged(g), s->y0, s->y1) <= outside;
}

static int right_is_free(const grid *g, const shape *s) {
    return column_share(g, s->x1 + ragged(g), s->y0, s->y1) <= outside;
}

static int sides_are_free(const grid *g, const shape *s) { return left_is_free(g, s) && right_is_free(g, s); }

static int above_is_free(const grid *g, const shape *s) {
    return row_share(g, s->y0 - 1 - ragged(g), s->x0, s->x1) <= outside;
}

static int below_is_free(const grid *g, const shape *s) {
    return row_share(g, s->y1 + ragged(g), s->x0, s->x1) <= outside;
}

/* Ink at the end x of row y, or up to `ragged` pixels further in (dir +1: to the right). */
static int is_end(const grid *g, size_t x, size_t y, int dir) {
    for (size_t k = 0; k <= 2 * ragged(g); k++)
        if (is_ink(g, dir > 0 ? x + k : x - k, y)) return 1;
    return 0;
}

/* Rows from y on that are full of ink between x0 and x1. */
static size_t full_rows(const grid *g, size_t y, size_t x0, size_t x1) {
    size_t k = 0;
    while (y + k < g->ny && row_share(g, y + k, x0, x1) >= inside) k++;
    return k;
}

/* Where the ink is also one of the texture a bar must be perfect. */
static int is_perfect(const grid *g, const shape *s) {
    size_t length = s->x1 - s->x0, thick = s->y1 - s->y0;
    if (thick < THICK) return g->thin_too && 10 * length >= 3 * g->nx;
    for (size_t y = s->y0; y < s->y1; y++)
        if (row_share(g, y, s->x0, s->x1) < perfect) return 0;
    return length >= LONG && 16 * length >= g->nx && length >= 6 * thick &&
           (left_is_free(g, s) || right_is_free(g, s));
}

/* Specimen of the same level may lengthen the first row: the bar is as long as all of its rows. */
static void trim(const grid *g, shape *s) {
    while (s->x0 + 1 < s->x1 && column_share(g, s->x0, s->y0, s->y1) < perfect) s->x0++;
    while (s->x0 + 1 < s->x1 && column_share(g, s->x1 - 1, s->y0, s->y1) < perfect) s->x1--;
}

static int is_bar(const grid *g, shape *s) {
    size_t thick = full_rows(g, s->y0, s->x0, s->x1), length = s->x1 - s->x0;
    s->y1 = s->y0 + thick;
    if (thick >= THICK) trim(g, s);
    length = s->x1 - s->x0;
    if (thick < THICK && (!g->v->at_end || g->v->cautious)) return 0;
    if (!thick || length < (thick == 1 ? SHORTEST_THIN : SHORTEST) || 3 * thick > length) return 0;
    if (!below_is_free(g, s) || ((g->v->in_texture || g->v->cautious) && !is_perfect(g, s))) return 0;
    return (thick < THICK || g->v->in_texture || sides_are_free(g, s)) && is_crisp(g, s);
}

/* Ink at both ends of each row down to a full one with ground below. */
static int is_box(const grid *g, shape *s) {
    if (s->x1 - s->x0 < BOX_WIDTH) return 0;
    size_t y = s->y0;
    for (; y < g->ny; y++) {
        if (!is_end(g, s->x0, y, 1) || !is_end(g, s->x1 - 1, y, -1)) break;
        if (y + 1 - s->y0 < BOX_HEIGHT || row_share(g, y, s->x0, s->x1) < inside) continue;
        s->y1 = y + 1;
        if (!below_is_free(g, s)) continue;
        return sides_are_free(g, s) && is_crisp(g, s);
    }
    return 0;
}

static void keep(shape *list, size_t *n, shape s) {
    if (*n < MOST_SHAPES) list[*n] = s;
    ++*n;
}

static void paint(const grid *g, const shape *list, size_t n) {
    for (size_t k = 0; k < n; k++)
        for (size_t y = list[k].y0; y < list[k].y1; y++)
            for (size_t x = list[k].x0; x < list[k].x1; x++) g->v->mask[at(g, x, y)] = 1;
}

static size_t search(const grid *g, int boxes_too) {
    shape lines[MOST_SHAPES], boxes[MOST_SHAPES];
    size_t n_lines = 0, n_boxes = 0, n_thin = 0;
    for (size_t y = 0; y < g->ny; y++)
        for (size_t x = 0; x < g->nx;) {
            while (x < g->nx && !is_ink(g, x, y)) x++;
            shape s = { .x0 = x, .y0 = y };
            while (x < g->nx && is_ink(g, x, y)) x++;
            s.x1 = x;
            if (s.x1 - s.x0 < SHORTEST || !above_is_free(g, &s)) continue;
            if (is_bar(g, &s)) {
                keep(lines, &n_lines, s);
                n_thin += s.y1 - s.y0 < THICK;
            }
            else if (boxes_too && is_box(g, &s)) keep(boxes, &n_boxes, s);
        }
    if (n_lines > MOST_LINES || (n_thin > MOST_THIN && !g->thin_too)) n_lines = 0;
    if (n_boxes > MOST_BOXES) n_boxes = 0;
    paint(g, lines, n_lines);
    paint(g, boxes, n_boxes);
    return n_lines + n_boxes;
}

size_t marks_edges(const ink_view *v) {
    /* Charging makes thin saturated lines along rows, never down columns: those of a cross hair come with both. */
    grid down = { v, v->ny, v->nx, v->nx, 1, 1 };
    size_t upright = search(&down, 0);
    grid along = { v, v->nx, v->ny, 1, v->nx, upright > 0 };
    return upright + search(&along, 1);
}

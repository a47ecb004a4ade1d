/* Drawn things of a pen: letters, digits, arrows, circles, slanted lines. Ink is cut into connected pieces; a piece
 * counts as drawn when it is thin for its size, not too large, and crisp: two pixels outside of it the ground is
 * already as it is four pixels outside. A saturated hillock is a disc and fades. Dots and other small pieces
 * count beside drawn ones.
 *
 * Where the level is also one of the texture, pieces are of exact ink only, and one alone does not count: letters come
 * in company or stand beside a straight-edged mark. */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>

#include "base/mem.h"
#include "io/marks_priv.h"

enum { MOST_PIECES = 2000, SMALLEST = 6, SMALLEST_IN_TEXTURE = 7, DASH_ROWS = 3, COMPANY = 4, TILES = 4, MOST_TILES = 5, SMALLEST_AREA = 6, LEAST_SAMPLES = 6, REACH = 4 };
static const double thin = 0.35, crisp = 0.85, crisp_companion = 0.75, least_contrast = 0.12, least_core = 0.3, least_core_lossy = 0.15, clear_ring = 0.3, most_share = 0.15;

typedef struct {
    size_t x0, y0, x1, y1, area, core; /* box inclusive */
    double close, far, sx, sy, sxx, syy, sxy;
    size_t samples, ring, ring_free; /* neighbours outside; those that are not even nearly ink */
    int thick;   /* widest inscribed square */
    size_t covered; /* pixels that are already masked */
    int drawn;
} piece;

typedef struct {
    const ink_view *v;
    uint32_t *label; /* [ny][nx] piece + 1 */
    piece *list;     /* [n] */
    size_t n;
} pieces;

static size_t extent(const piece *p) {
    size_t w = p->x1 - p->x0 + 1, h = p->y1 - p->y0 + 1;
    return w > h ? w : h;
}

static void piece_add(const ink_view *v, piece *p, size_t i) {
    size_t x = i % v->nx, y = i / v->nx;
    if (!p->area || x < p->x0) p->x0 = x;
    if (!p->area || x > p->x1) p->x1 = x;
    if (!p->area || y < p->y0) p->y0 = y;
    if (!p->area || y > p->y1) p->y1 = y;
    p->area++;
    p->core += v->ink[i] == INK_CORE;
    p->covered |= v->mask[i];
    p->sx += (double)x, p->sy += (double)y;
    p->sxx += (double)x * (double)x, p->syy += (double)y * (double)y, p->sxy += (double)x * (double)y;
}

/* One piece, eight neighbours, by a stack of its own; `stack` holds every pixel at most once. */
static void fill(pieces *c, size_t seed, uint32_t *stack) {
    const ink_view *v = c->v;
    size_t top = 0;
    uint32_t name = (uint32_t)c->n + 1;
    piece *p = &c->list[c->n++];
    c->label[seed] = name;
    stack[top++] = (uint32_t)seed;
    while (top) {
        size_t i = stack[--top], x = i % v->nx, y = i / v->nx;
        piece_add(v, p, i);
        for (size_t b = y ? y - 1 : 0; b <= y + 1 && b < v->ny; b++)
            for (size_t a = x ? x - 1 : 0; a <= x + 1 && a < v->nx; a++) {
                size_t k = b * v->nx + a;
                if (c->label[k] || v->ink[k] < v->joins) continue;
                c->label[k] = name;
                stack[top++] = (uint32_t)k;
            }
    }
}

/* Only pieces with some exact ink are named. Beyond MOST_PIECES the level is one of the texture. */
static status cut(pieces *c, error *e) {
    const ink_view *v = c->v;
    size_t n = v->nx * v->ny;
    c->label = mem_array(n, sizeof *c->label);
    c->list = mem_array(MOST_PIECES + 1, sizeof *c->list);
    uint32_t *stack = mem_array(n, sizeof *stack);
    status st = c->label && c->list && stack ? ST_OK : NO_MEMORY(e, "the marks");
    for (size_t i = 0; st == ST_OK && i < n && c->n <= MOST_PIECES; i++)
        if (v->ink[i] == INK_CORE && !c->label[i]) fill(c, i, stack);
    free(stack);
    return st;
}

/* The widest square of ink that ends at each pixel, by the three before it. */
static status measure_thickness(pieces *c, error *e) {
    size_t nx = c->v->nx;
    uint16_t *above = mem_array(nx, sizeof *above), *here = mem_array(nx, sizeof *here);
    status st = above && here ? ST_OK : NO_MEMORY(e, "the marks");
    for (size_t y = 0; st == ST_OK && y < c->v->ny; y++) {
        for (size_t x = 0; x < nx; x++) {
            uint32_t name = c->label[y * nx + x];
            unsigned side = 0;
            if (name) {
                unsigned a = y ? above[x] : 0, b = x ? here[x - 1] : 0, d = x && y ? above[x - 1] : 0;
                side = 1 + (a < b ? (a < d ? a : d) : (b < d ? b : d));
                piece *p = &c->list[name - 1];
                if ((int)side > p->thick) p->thick = (int)side;
            }
            here[x] = (uint16_t)side;
        }
        uint16_t *swap = above;
        above = here, here = swap;
    }
    free(above);
    free(here);
    return st;
}

/* What lies outside the border of a piece, two and four pixels away, where four pixels are free of ink. */
static void look_outside(pieces *c) {
    static const int dx[] = { 1, -1, 0, 0 }, dy[] = { 0, 0, 1, -1 };
    const ink_view *v = c->v;
    for (size_t y = REACH; y + REACH < v->ny; y++)
        for (size_t x = REACH; x + REACH < v->nx; x++) {
            size_t i = y * v->nx + x;
            if (!c->label[i]) continue;
            piece *p = &c->list[c->label[i] - 1];
            for (int k = 0; k < 4; k++) {
                long step = (long)dy[k] * (long)v->nx + dx[k];
                int free_of_ink = 1;
                if (!c->label[(long)i + step]) {
                    p->ring++;
                    p->ring_free += v->ink[(long)i + step] == INK_NONE;
                }
                for (long r = 1; r <= REACH && free_of_ink; r++) free_of_ink = !c->label[(long)i + r * step];
                if (!free_of_ink) continue;
                p->close += fabs((double)v->px[(long)i + 2 * step] - (double)v->level);
                p->far += fabs((double)v->px[(long)i + REACH * step] - (double)v->level);
                p->samples++;
            }
        }
}

/* Spread along and across the main axis, sd in px, and the axis against the rows, rad. */
static void axes(const piece *p, double *along, double *across, double *slant) {
    double n = (double)p->area, mx = p->sx / n, my = p->sy / n;
    double a = p->sxx / n - mx * mx, b = p->syy / n - my * my, c = p->sxy / n - mx * my;
    double mean = 0.5 * (a + b), root = sqrt(0.25 * (a - b) * (a - b) + c * c);
    *along = sqrt(fmax(mean + root, 0.0));
    *across = sqrt(fmax(mean - root, 0.0));
    *slant = 0.5 * atan2(2.0 * c, a - b);
}

static int is_crisp(const piece *p, double least) {
    return p->samples >= LEAST_SAMPLES && p->far >= least_contrast * (double)p->samples && p->close >= least * p->far;
}

/* A slanted or upright line: those along rows are left to marks_edges, since charging draws along rows too. Rows of
 * clipped tops are straight as well, but not that long. */
static int is_straight(const ink_view *v, const piece *p) {
    double short_side = (double)(v->nx < v->ny ? v->nx : v->ny);
    double along, across, slant;
    axes(p, &along, &across, &slant);
    if (fabs(slant) < 0.05) return 0;
    if (v->in_texture && (along < 0.1 * short_side || across > 1.5)) return 0;
    return along >= 10.0 && across <= 2.5 && p->thick <= 8 && is_crisp(p, 0.9);
}

static int looks_drawn(const ink_view *v, const piece *p) {
    size_t size = extent(p), short_side = v->nx < v->ny ? v->nx : v->ny;
    if (p->area < SMALLEST_AREA || size < SMALLEST || size > short_side / 3) return 0;
    /* Noise at a clipped tip leaves scattered ink among what is nearly ink: 0.25 at most; smoothed letters keep half. */
    if ((double)p->core < (v->lossy ? least_core_lossy : least_core) * (double)p->area) return 0;
    size_t rows = p->y1 - p->y0 + 1;
    if (rows <= DASH_ROWS && size >= 4 * rows) return 0; /* charging leaves dashes along the rows */
    if (!is_crisp(p, v->in_texture ? crisp_companion : crisp)) return 0;
    if (v->in_texture && (rows < SMALLEST_IN_TEXTURE || (double)p->ring_free < clear_ring * (double)p->ring)) return 0;
    return p->thick <= 2 || (double)p->thick <= thin * (double)size;
}

/* Pixels between two boxes, the larger of both directions; 0: they overlap. */
static size_t gap(const piece *a, const piece *b) {
    size_t x = a->x0 > b->x1 ? a->x0 - b->x1 : b->x0 > a->x1 ? b->x0 - a->x1 : 0;
    size_t y = a->y0 > b->y1 ? a->y0 - b->y1 : b->y0 > a->y1 ? b->y0 - a->y1 : 0;
    return x > y ? x : y;
}

static int is_companion(const piece *p, const piece *drawn) {
    size_t size = extent(drawn), own = extent(p);
    size_t reach = drawn->covered ? 3 * own : size;
    return gap(p, drawn) <= reach && 2 * own <= 3 * size && is_crisp(p, crisp_companion);
}

/* Of one line of writing: as large, close, and on one base line or under one top line. */
static int is_alike(const piece *a, const piece *b) {
    size_t x = extent(a), y = extent(b), large = x > y ? x : y, small = x + y - large;
    size_t base = a->y1 > b->y1 ? a->y1 - b->y1 : b->y1 - a->y1, top = a->y0 > b->y0 ? a->y0 - b->y0 : b->y0 - a->y0;
    return 5 * small >= 3 * large && gap(a, b) <= large && 8 * (base < top ? base : top) <= large;
}

/* Where the level is one of the texture: what looks drawn and is in company of such, unless that is so all over the
 * field. */
static void take_company(pieces *c) {
    unsigned char seen[TILES * TILES] = { 0 };
    int tiles = 0;
    for (size_t k = 0; k < c->n; k++) {
        piece *p = &c->list[k];
        if (p->drawn || !looks_drawn(c->v, p)) continue;
        size_t alike = 0;
        for (size_t j = 0; j < c->n && alike < COMPANY; j++)
            alike += looks_drawn(c->v, &c->list[j]) && is_alike(p, &c->list[j]); /* itself too */
        if (alike < COMPANY) continue;
        unsigned char *tile = &seen[p->y0 * TILES / c->v->ny * TILES + p->x0 * TILES / c->v->nx];
        p->drawn = 2; /* by company only */
        tiles += !*tile;
        *tile = 1;
    }
    for (size_t k = 0; k < c->n && tiles > MOST_TILES; k++)
        if (c->list[k].drawn == 2) c->list[k].drawn = 0;
}

/* Dots, dashes and blots beside what is drawn, until nothing is added. */
static void take_companions(pieces *c) {
    for (int again = 1, rounds = 0; again && rounds < 16; rounds++) {
        again = 0;
        for (size_t k = 0; k < c->n; k++) {
            piece *p = &c->list[k];
            if (p->drawn || (c->v->in_texture && !looks_drawn(c->v, p))) continue;
            for (size_t j = 0; j < c->n && !p->drawn; j++) {
                const piece *d = &c->list[j];
                int counts = c->v->in_texture ? 2 * d->covered >= d->area : d->drawn;
                if (counts && is_companion(p, d)) p->drawn = again = 1;
            }
        }
    }
}

/* What only touches a mark, such as dark ground beside a dark box, is no mark by that. */
static int is_mark(const ink_view *v, const piece *p) {
    return !p->covered || 2 * p->covered >= p->area || is_straight(v, p) || (!v->in_texture && looks_drawn(v, p));
}

status marks_strokes(const ink_view *v, error *e) {
    pieces c = { .v = v };
    status st = v->nx * v->ny > UINT32_MAX ? ST_OK : cut(&c, e);
    if (st == ST_OK && c.n) st = measure_thickness(&c, e);
    if (st == ST_OK && c.n && c.n <= MOST_PIECES) {
        look_outside(&c);
        for (size_t k = 0; k < c.n; k++) {
            piece *p = &c.list[k];
            p->drawn = p->covered || (!v->cautious && (is_straight(v, p) || (!v->in_texture && looks_drawn(v, p))));
        }
        if (v->in_texture && !v->cautious && v->share <= most_share) take_company(&c);
        take_companions(&c);
        for (size_t i = 0; i < v->nx * v->ny; i++) {
            const piece *p = c.label[i] ? &c.list[c.label[i] - 1] : NULL;
            if (p && p->drawn && is_mark(v, p)) v->mask[i] = 1;
        }
    }
    free(c.label);
    free(c.list);
    return st;
}

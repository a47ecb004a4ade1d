/* Where the features of a rendered surface stand: jittered hexagonal lattice, relaxed points (Lloyd 1982), random
 * sequential adsorption (Feder 1980), Matern's second hard-core process (1960), random points. Patterns are made on a
 * torus larger than the frame, so that the frame cuts through features as a real one does. Own cells are found on a
 * grid of samples, which is all the accuracy a feature size needs.
 * Random numbers: xoshiro256** seeded by splitmix64 (Blackman and Vigna 2021, ACM Trans. Math. Softw. 47:36), normal
 * deviates by the polar method (Marsaglia and Bray 1964); all from memory. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/render_priv.h"
#include "base/mem.h"
#include "base/quantity.h"

/* hexagonal lattice: density = 2 / (sqrt(3) spacing^2) */
#define HEX_DENSITY 1.1547005383792517
/* Samples per spacing of the own-cell search: about 125 in a cell, a cell area good to 2 %. */
#define CELL_SAMPLES 12.0
#define CELL_REACH 1.5 /* spacings; the torus is more than twice as wide */
#define MOST_FEATURES 2e5
#define PATCH_LENGTH 14.0 /* of two populations, in spacings: several patches in a frame, many features in a patch */
/* A cell that is an outlier of a random pattern makes no giant and no needle of its feature. */
#define LEAST_SIZE 0.4
#define MOST_SIZE 1.8
/* The torus is this much larger than the frame and its margin; room for the final scaling to the number asked. */
#define TORUS_ROOM 1.15
#define TORUS_MARGIN 3.0

static uint64_t rotl(uint64_t v, int k) { return (v << k) | (v >> (64 - k)); }

rng rng_make(uint64_t seed, stream which) {
    rng r = { .spare = MISSING };
    uint64_t z = seed ^ ((uint64_t)which * 0xd1342543de82ef95u);
    for (int i = 0; i < 4; i++) {
        z += 0x9e3779b97f4a7c15u;
        uint64_t v = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
        v = (v ^ (v >> 27)) * 0x94d049bb133111ebu;
        r.s[i] = v ^ (v >> 31);
    }
    return r;
}

double rng_uniform(rng *r) {
    uint64_t *s = r->s, out = rotl(s[1] * 5, 7) * 9, t = s[1] << 17;
    s[2] ^= s[0];
    s[3] ^= s[1];
    s[1] ^= s[2];
    s[0] ^= s[3];
    s[2] ^= t;
    s[3] = rotl(s[3], 45);
    return (double)(out >> 11) * 0x1p-53;
}

double rng_normal(rng *r) {
    if (!isnan(r->spare)) {
        double v = r->spare;
        r->spare = MISSING;
        return v;
    }
    double u, v, q;
    do {
        u = 2.0 * rng_uniform(r) - 1.0;
        v = 2.0 * rng_uniform(r) - 1.0;
        q = u * u + v * v;
    } while (q >= 1.0 || q <= 0.0);
    double f = sqrt(-2.0 * log(q) / q);
    r->spare = v * f;
    return u * f;
}

/* Multiplication of uniforms below 20 electrons; above it the normal approximation, whose skewness is then < 0.23. */
double rng_poisson(rng *r, double mean) {
    if (!(mean > 0.0)) return 0.0;
    if (mean > 20.0) {
        double v = mean + sqrt(mean) * rng_normal(r);
        return v > 0.0 ? floor(v + 0.5) : 0.0;
    }
    double limit = exp(-mean), p = rng_uniform(r), k = 0.0;
    while (p > limit) {
        p *= rng_uniform(r);
        k += 1.0;
    }
    return k;
}

stretching stretching_make(double stretch, double angle_deg) {
    double a = -angle_deg * PI / 180.0, c = cos(a), s = sin(a), root = sqrt(stretch); /* rows run down */
    return (stretching){ .xx = c * c / stretch + s * s * stretch,
                         .xy = c * s * (1.0 / stretch - stretch),
                         .yy = s * s / stretch + c * c * stretch,
                         .mxx = c * c * root + s * s / root,
                         .mxy = c * s * (root - 1.0 / root),
                         .myy = s * s * root + c * c / root,
                         .reach = root };
}

/* ---- points on a torus ---- */

typedef struct {
    double w, h, d; /* torus, spacing */
    double *x, *y;  /* 0 <= x < w */
    size_t n, room;
} torus;

static status torus_add(torus *t, double x, double y, error *e) {
    if (t->n == t->room) {
        size_t room = t->room ? 2 * t->room : 256;
        double *gx = mem_grow(t->x, room, sizeof *gx);
        if (gx) t->x = gx;
        double *gy = mem_grow(t->y, room, sizeof *gy);
        if (gy) t->y = gy;
        if (!gx || !gy) return NO_MEMORY(e, "the centres of the features");
        t->room = room;
    }
    x -= t->w * floor(x / t->w);
    y -= t->h * floor(y / t->h);
    t->x[t->n] = x < t->w ? x : 0.0;
    t->y[t->n] = y < t->h ? y : 0.0;
    t->n++;
    return ST_OK;
}

/* Linked lists of points per bucket; a bucket is at least `side` wide. */
typedef struct {
    size_t gx, gy;
    double bx, by;
    size_t *first, *next; /* index + 1, 0 = end */
} buckets;

static void buckets_free(buckets *b) {
    free(b->first);
    free(b->next);
    *b = (buckets){ 0 };
}

static status buckets_make(buckets *b, double w, double h, double side, size_t max_points, error *e) {
    *b = (buckets){ .gx = (size_t)fmax(1.0, floor(w / side)), .gy = (size_t)fmax(1.0, floor(h / side)) };
    b->bx = w / (double)b->gx;
    b->by = h / (double)b->gy;
    b->first = mem_array(b->gx * b->gy, sizeof *b->first);
    b->next = mem_array(max_points, sizeof *b->next);
    if (b->first && b->next) return ST_OK;
    buckets_free(b);
    return NO_MEMORY(e, "the centres of the features");
}

static size_t bucket_of(const buckets *b, double x, double y) {
    size_t i = (size_t)(x / b->bx), j = (size_t)(y / b->by);
    return (j < b->gy ? j : b->gy - 1) * b->gx + (i < b->gx ? i : b->gx - 1);
}

static void buckets_put(buckets *b, const torus *t, size_t k) {
    size_t at = bucket_of(b, t->x[k], t->y[k]);
    b->next[k] = b->first[at];
    b->first[at] = k + 1;
}

static double wrap(double v, double period) { return v - period * floor(v / period + 0.5); }

static double torus_distance2(const torus *t, size_t k, double x, double y) {
    double dx = wrap(t->x[k] - x, t->w), dy = wrap(t->y[k] - y, t->h);
    return dx * dx + dy * dy;
}

/* ---- own cells ---- */

/* A grid of samples over the torus, each with its nearest point so far. */
typedef struct {
    size_t nx, ny;
    double dx, dy;
    double *best; /* squared distance */
    uint32_t *owner;
} sampling;

/* Offers point k to the samples within reach, row by row. */
static void sampling_offer(const sampling *g, const torus *t, size_t k, double reach) {
    long j0 = (long)ceil((t->y[k] - reach) / g->dy - 0.5), j1 = (long)floor((t->y[k] + reach) / g->dy - 0.5);
    for (long j = j0; j <= j1; j++) {
        double y = ((double)j + 0.5) * g->dy - t->y[k], half = sqrt(fmax(0.0, reach * reach - y * y));
        long i0 = (long)ceil((t->x[k] - half) / g->dx - 0.5), i1 = (long)floor((t->x[k] + half) / g->dx - 0.5);
        size_t row = (size_t)((j + (long)g->ny) % (long)g->ny) * g->nx;
        for (long i = i0; i <= i1; i++) {
            double x = ((double)i + 0.5) * g->dx - t->x[k], r2 = x * x + y * y;
            size_t at = row + (size_t)(i < 0 ? i + (long)g->nx : i >= (long)g->nx ? i - (long)g->nx : i);
            if (r2 >= g->best[at]) continue;
            g->best[at] = r2;
            g->owner[at] = (uint32_t)k;
        }
    }
}

static uint32_t nearest_of_all(const torus *t, double x, double y) {
    double best = HUGE_VAL;
    uint32_t found = 0;
    for (size_t k = 0; k < t->n; k++) {
        double r2 = torus_distance2(t, k, x, y);
        if (r2 >= best) continue;
        best = r2;
        found = (uint32_t)k;
    }
    return found;
}

/* Own cells by sampling: area[n] in samples and, where asked, the sum of the offsets of its samples. */
static status cells_sample(const torus *t, double *area, double *ox, double *oy, error *e) {
    sampling g = { .nx = (size_t)ceil(t->w / t->d * CELL_SAMPLES), .ny = (size_t)ceil(t->h / t->d * CELL_SAMPLES) };
    g.dx = t->w / (double)g.nx;
    g.dy = t->h / (double)g.ny;
    g.best = mem_array(g.nx * g.ny, sizeof *g.best);
    g.owner = mem_array(g.nx * g.ny, sizeof *g.owner);
    status st = g.best && g.owner ? ST_OK : NO_MEMORY(e, "the cells of the features");
    if (st == ST_OK) {
        memset(area, 0, t->n * sizeof *area);
        if (ox) memset(ox, 0, t->n * sizeof *ox);
        if (oy) memset(oy, 0, t->n * sizeof *oy);
        for (size_t at = 0; at < g.nx * g.ny; at++) g.best[at] = HUGE_VAL;
        for (size_t k = 0; k < t->n; k++) sampling_offer(&g, t, k, CELL_REACH * t->d);
        for (size_t at = 0; at < g.nx * g.ny; at++) {
            double x = ((double)(at % g.nx) + 0.5) * g.dx, y = ((double)(at / g.nx) + 0.5) * g.dy;
            size_t k = g.best[at] < HUGE_VAL ? g.owner[at] : nearest_of_all(t, x, y); /* the heart of a large gap */
            area[k] += 1.0;
            if (ox) ox[k] += wrap(x - t->x[k], t->w);
            if (oy) oy[k] += wrap(y - t->y[k], t->h);
        }
    }
    free(g.best);
    free(g.owner);
    return st;
}

/* ---- the patterns ---- */

static size_t points_wanted(const torus *t) { return (size_t)(HEX_DENSITY * t->w * t->h / (t->d * t->d) + 0.5); }

static status pattern_random(torus *t, rng *r, error *e) {
    status st = ST_OK;
    for (size_t k = points_wanted(t); k > 0 && st == ST_OK; k--) {
        double x = rng_uniform(r) * t->w, y = rng_uniform(r) * t->h;
        st = torus_add(t, x, y, e);
    }
    return st;
}

/* A lattice turned by a random angle. It does not close on the torus; the seam lies outside the frame. */
static status pattern_hex(torus *t, double jitter, rng *r, error *e) {
    double a = rng_uniform(r) * PI / 3.0, c = cos(a), s = sin(a), row = sqrt(0.75) * t->d;
    double px = rng_uniform(r), py = rng_uniform(r);
    long m = (long)(hypot(t->w, t->h) / (2.0 * row)) + 3;
    status st = ST_OK;
    for (long j = -m; j <= m && st == ST_OK; j++)
        for (long i = -m; i <= m && st == ST_OK; i++) {
            double u = ((double)i + 0.5 * (double)(j & 1) + px) * t->d, v = ((double)j + py) * row;
            double x = 0.5 * t->w + c * u - s * v, y = 0.5 * t->h + s * u + c * v;
            double jx = jitter * t->d * rng_normal(r), jy = jitter * t->d * rng_normal(r);
            if (x < 0.0 || y < 0.0 || x >= t->w || y >= t->h) continue;
            st = torus_add(t, x + jx, y + jy, e);
        }
    return st;
}

static status pattern_lloyd(torus *t, double steps, rng *r, error *e) {
    status st = pattern_random(t, r, e);
    if (st != ST_OK) return st;
    double *area = mem_array(t->n, sizeof *area), *ox = mem_array(t->n, sizeof *ox), *oy = mem_array(t->n, sizeof *oy);
    if (!area || !ox || !oy) st = NO_MEMORY(e, "the relaxation of the centres");
    for (int s = 0; st == ST_OK && s < (int)(steps + 0.5); s++) {
        st = cells_sample(t, area, ox, oy, e);
        if (st != ST_OK) break;
        size_t n = t->n;
        t->n = 0; /* put the moved points back through torus_add, which wraps them */
        for (size_t k = 0; k < n && st == ST_OK; k++) {
            double a = area[k] > 0.0 ? area[k] : 1.0;
            st = torus_add(t, t->x[k] + ox[k] / a, t->y[k] + oy[k] / a, e);
        }
    }
    free(area);
    free(ox);
    free(oy);
    return st;
}

static int too_near(const torus *t, const buckets *b, double x, double y, double core) {
    long ci = (long)(x / b->bx), cj = (long)(y / b->by), gx = (long)b->gx, gy = (long)b->gy;
    for (long j = -1; j <= 1; j++)
        for (long i = -1; i <= 1; i++) {
            size_t at = (size_t)(((cj + j) % gy + gy) % gy * gx + ((ci + i) % gx + gx) % gx);
            for (size_t p = b->first[at]; p; p = b->next[p - 1])
                if (torus_distance2(t, p - 1, x, y) < core * core) return 1;
        }
    return 0;
}

static status pattern_rsa(torus *t, double core, rng *r, error *e) {
    size_t n = points_wanted(t), tries = 0;
    buckets b;
    status st = buckets_make(&b, t->w, t->h, core * t->d, n, e);
    if (st != ST_OK) return st;
    while (t->n < n && st == ST_OK) {
        if (tries++ > 2000 * n)
            st = fail(e, ST_BAD_INPUT, "a hard core of %.3g spacings leaves no room for the density; use at most 0.74", core);
        double x = rng_uniform(r) * t->w, y = rng_uniform(r) * t->h;
        if (st != ST_OK || too_near(t, &b, x, y, core * t->d)) continue;
        st = torus_add(t, x, y, e);
        if (st == ST_OK) buckets_put(&b, t, t->n - 1);
    }
    buckets_free(&b);
    return st;
}

/* Parents in the order of their marks: each stays unless an EARLIER parent, kept or not, lies within the core. */
static status pattern_matern(torus *t, double core, rng *r, error *e) {
    double disc = PI * core * core, kept = HEX_DENSITY * disc; /* in spacings */
    double parents = -log(1.0 - kept) / disc;
    size_t n = (size_t)(parents * t->w * t->h / (t->d * t->d) + 0.5), keep = 0;
    char *stays = mem_array(n, 1);
    buckets b = { 0 };
    status st = stays ? buckets_make(&b, t->w, t->h, core * t->d, n, e) : NO_MEMORY(e, "the centres of the features");
    for (size_t k = 0; k < n && st == ST_OK; k++) {
        double x = rng_uniform(r) * t->w, y = rng_uniform(r) * t->h;
        stays[k] = !too_near(t, &b, x, y, core * t->d);
        st = torus_add(t, x, y, e);
        if (st == ST_OK) buckets_put(&b, t, k);
    }
    for (size_t k = 0; st == ST_OK && k < n; k++)
        if (stays[k]) {
            t->x[keep] = t->x[k];
            t->y[keep++] = t->y[k];
        }
    if (st == ST_OK) t->n = keep;
    buckets_free(&b);
    free(stays);
    return st;
}

static status pattern_make(torus *t, const render_options *o, stream which, error *e) {
    rng r = rng_make(o->seed, which);
    double own = isnan(o->disorder) ? -1.0 : o->disorder;
    switch (o->pattern) {
    case PATTERN_HEX: return pattern_hex(t, own < 0.0 ? 0.16 : own, &r, e);
    case PATTERN_LLOYD: return pattern_lloyd(t, own < 0.0 ? 4.0 : own, &r, e);
    case PATTERN_RSA: return pattern_rsa(t, own < 0.0 ? 0.70 : own, &r, e);
    case PATTERN_MATERN: return pattern_matern(t, own < 0.0 ? 0.48 : own, &r, e);
    case PATTERN_RANDOM: break;
    }
    return pattern_random(t, &r, e);
}

static int by_value(const void *a, const void *b) {
    double u = *(const double *)a, v = *(const double *)b;
    return (u > v) - (u < v);
}

/* Scales the stretched pattern about the middle of the field until the frame holds `wanted` centres: a centre leaves
 * the frame at the scale 1 / max(|x| / half width, |y| / half height). */
static status scale_to_count(centres *c, double half_w, double half_h, size_t wanted, error *e) {
    double *leave = mem_array(c->n, sizeof *leave);
    if (!leave) return NO_MEMORY(e, "the centres of the features");
    for (size_t k = 0; k < c->n; k++) leave[k] = fmax(fabs(c->x[k]) / half_w, fabs(c->y[k]) / half_h);
    qsort(leave, c->n, sizeof *leave, by_value);
    double scale = 2.0 / (leave[wanted - 1] + leave[wanted]);
    free(leave);
    for (size_t k = 0; k < c->n; k++) {
        c->x[k] = c->x[k] * scale + half_w - 0.5;
        c->y[k] = c->y[k] * scale + half_h - 0.5;
    }
    c->first *= scale;
    c->other *= scale;
    return ST_OK;
}

static status centres_room(centres *c, size_t n, error *e) {
    double *x = mem_grow(c->x, n, sizeof *x);
    if (x) c->x = x;
    double *y = mem_grow(c->y, n, sizeof *y);
    if (y) c->y = y;
    double *size = mem_grow(c->size, n, sizeof *size);
    if (size) c->size = size;
    unsigned char *second = mem_grow(c->second, n, sizeof *second);
    if (second) c->second = second;
    return x && y && size && second ? ST_OK : NO_MEMORY(e, "the centres of the features");
}

/* Makes one population and adds it, stretched, origin in the middle; with patches only what lies on its own side of
 * them, a quarter of its spacing off the seam. */
static status add_population(const render_options *o, torus *t, const stretching *s, const patches *p, int second,
                             centres *c, error *e) {
    status st = pattern_make(t, o, second ? STREAM_SECOND : STREAM_PATTERN, e);
    if (st == ST_OK) st = centres_room(c, c->n + t->n, e);
    double *area = st == ST_OK ? mem_array(t->n, sizeof *area) : NULL, samples = 0.0;
    if (st == ST_OK) st = area ? cells_sample(t, area, NULL, NULL, e) : NO_MEMORY(e, "the centres of the features");
    if (st == ST_OK) {
        for (size_t k = 0; k < t->n; k++) samples += area[k];
        for (size_t k = 0; k < t->n; k++) {
            double u = t->x[k] - 0.5 * t->w, v = t->y[k] - 0.5 * t->h;
            if (p && (second ? 1.0 : -1.0) * patches_distance(p, t->x[k], t->y[k]) < 0.25 * t->d) continue;
            c->x[c->n] = s->mxx * u + s->mxy * v;
            c->y[c->n] = s->mxy * u + s->myy * v;
            double size = sqrt(area[k] * (double)t->n / samples);
            c->size[c->n] = fmin(fmax(size, LEAST_SIZE), MOST_SIZE) * t->d / c->spacing;
            c->second[c->n++] = (unsigned char)second;
        }
    }
    free(area);
    return st;
}

status centres_make(const render_options *o, centres *out, error *e) {
    double d = o->spacing_nm / o->px_nm, half_w = 0.5 * (double)o->nx, half_h = 0.5 * (double)o->ny;
    double count = HEX_DENSITY * 4.0 * half_w * half_h / (d * d);
    if (!(count >= 3.5) || count > MOST_FEATURES)
        return fail(e, ST_BAD_INPUT, "a spacing of %.4g nm at %.4g nm per pixel puts %.3g features into %zu x %zu px; "
                    "4 to 200000 can be rendered", o->spacing_nm, o->px_nm, count, o->nx, o->ny);
    int two = o->second_share > 0.0;
    double f = two ? o->second_share : 0.0, ratio = two ? o->second_spacing : 1.0;
    double first = d * sqrt(1.0 - f + f / (ratio * ratio)), other = first * ratio, widest = fmax(first, other);
    stretching s = stretching_make(o->stretch, o->stretch_angle_deg);
    double mx = half_w + TORUS_MARGIN * widest, my = half_h + TORUS_MARGIN * widest;
    /* The unstretching map is the stretching one with the diagonal exchanged and the other sign of xy (determinant 1). */
    torus t = { .w = 2.0 * TORUS_ROOM * (s.myy * mx + fabs(s.mxy) * my),
                .h = 2.0 * TORUS_ROOM * (fabs(s.mxy) * mx + s.mxx * my), .d = first };
    torus t2 = { .w = t.w, .h = t.h, .d = other };
    centres c = { .spacing = d, .first = two ? first : MISSING, .other = two ? other : MISSING };
    patches p = { .level = 0.0 };
    status st = two ? patches_make(o->seed, f, t.w, t.h, PATCH_LENGTH * d, &p, e) : ST_OK;
    if (st == ST_OK) st = add_population(o, &t, &s, two ? &p : NULL, 0, &c, e);
    if (st == ST_OK && two) st = add_population(o, &t2, &s, &p, 1, &c, e);
    size_t wanted = (size_t)(count + 0.5);
    if (st == ST_OK && c.n <= wanted) st = fail(e, ST_BAD_INPUT, "the two populations leave too few features");
    if (st == ST_OK) st = scale_to_count(&c, half_w, half_h, wanted, e);
    if (st == ST_OK) {
        *out = c;
        c = (centres){ 0 };
    }
    free(t.x);
    free(t.y);
    free(t2.x);
    free(t2.y);
    centres_free(&c);
    return st;
}

void centres_free(centres *c) {
    free(c->x);
    free(c->y);
    free(c->size);
    free(c->second);
    *c = (centres){ 0 };
}

/* Centres of round bodies from the direction of the brightness gradient (Kimme, Ballard, Sklansky 1975, Commun. ACM
 * 18:120, circles by an array of accumulators; from memory).
 *
 * The Laplacian of a Gaussian sees a body as one bump of brightness. A sphere in secondary electrons is a flat disc
 * with a bright rim, and in a close-packed layer such discs have next to nothing at the spatial frequency of the layer
 * (the form factor of touching discs has its first zero there; a rim turns its sign), so that neither the scale, nor
 * the relief, nor the centres can be read from a smoothed picture. Outlines can be read: across each the brightness
 * rises towards the middle of its body (falls, for a pore), so a step of the radius along the gradient leads to the
 * centre. Every pixel casts a vote there, for a ladder of radii and both signs; where outlines are circles the votes
 * gather in few places at ONE radius and for ONE sign. The measure is the third moment of the votes over the cube of
 * their mean. Noise, smoothed or not, gathers equally for both signs; rims, gaps and the bare ground between islands
 * cast votes that scatter.
 *
 * The look goes over a pyramid of halved pictures, so that every radius is about 5 to 10 px of its level, and over nine tiles
 * where a level is large: its cost is bounded. Not done here: the decision between outlines and brightness
 * (measure.c); bodies whose radii differ by more than about a quarter are found in part only. */
#include "metrics/outline.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "metrics/filter.h"
#include "metrics/maxima.h"
#include "metrics/spacing.h"

static const double least_radius_px = 2.4; /* an octave below what halved pictures are used for */
static const double level_radius_px = 4.8;
static const double full_radius_px =
    6.0; /* centres are looked for on a picture where the radius is this to twice this */
static const double widest_share = 0.1; /* largest radius / shorter side */
static const double gradient_sigma_px = 1.0;
static const double cap = 3.0;        /* of one vote, / mean gradient: a scratch does not outvote the layer */
static const double least_vote = 0.3; /* below, / mean gradient: not cast */
static const double bins_per_radius = 4.0;
static const double vote_sigma = 0.15; /* smoothing of the votes for the centres, / radius */
static const double own_reach = 0.75;  /* no other centre within this, / radius */
static const double standing = 0.3;    /* a place counts above this, / typical height where votes gather */
static const double body_standing = 0.2; /* the same for a centre: bodies amid others have faint outlines */
static const double outline_from = 0.4, outline_to = 1.4; /* what belongs to a body's outline, / radius */
static const double towards = 0.8;                        /* cosine: its gradient points to the middle */
/* Of the directions, determinant / trace^2: less is a straight edge. */
static const double least_spread = 0.02;
static const double least_concentration = 5.0,
                    least_ratio = 1.7; /* of a candidate; ratio to the other sign */
enum { PER_OCTAVE = 5, BESIDE = 2, PER_LEVEL = PER_OCTAVE + 2 * BESIDE };
enum { LEVELS = 10, MIN_BODIES = 5, CENTRE_STEPS = 2, TILES = 3, AREA = 1 << 17 };

/* ---- votes ---- */

typedef struct {
    float x, y, ux, uy, weight;
} ballot;

/* One vote for each pixel of g[h][w] that has a gradient to speak of; *n of them. smooth is working memory. */
static status ballots_make(const float *g, size_t w, size_t h, float *smooth, ballot *b, size_t *n,
                           error *e) {
    status st = filter_gauss(g, w, h, gradient_sigma_px, smooth, e);
    if (st != ST_OK) return st;
    double sum = 0.0;
    size_t k = 0;
    for (size_t y = 1; y + 1 < h; y++)
        for (size_t x = 1; x + 1 < w; x++) {
            const float *p = smooth + y * w + x;
            float gx = p[1] - p[-1], gy = p[w] - p[-(ptrdiff_t)w], m = sqrtf(gx * gx + gy * gy);
            sum += (double)m;
            if (m > 0.0f) b[k++] = (ballot){ (float)x, (float)y, gx / m, gy / m, m };
        }
    float mean = k ? (float)(sum / (double)k) : 0.0f, least = (float)least_vote * mean,
          most = (float)cap * mean;
    *n = 0;
    for (size_t i = 0; i < k; i++) {
        if (b[i].weight < least) continue;
        b[*n] = b[i];
        b[(*n)++].weight = (b[i].weight < most ? b[i].weight : most) / (mean > 0.0f ? mean : 1.0f);
    }
    return ST_OK;
}

/* Votes at signed radius r into bins[nby][nbx] of `side` px. */
static void cast(const ballot *b, size_t n, float r, float side, float *bins, size_t nbx, size_t nby) {
    float per = 1.0f / side, to_x = (float)nbx, to_y = (float)nby;
    for (size_t i = 0; i < n; i++) {
        float x = (b[i].x + r * b[i].ux + 0.5f) * per, y = (b[i].y + r * b[i].uy + 0.5f) * per;
        if (x >= 0.0f && y >= 0.0f && x < to_x && y < to_y) bins[(size_t)y * nbx + (size_t)x] += b[i].weight;
    }
}

/* [1 2 1] / 4 both ways, in place; row has room for two rows. The frame's bins count as doubled. */
static void soften(float *v, size_t nx, size_t ny, float *row) {
    float *before = row, *here = row + nx;
    for (size_t y = 0; y < ny; y++) {
        float *p = v + y * nx, last = p[0];
        for (size_t x = 0; x < nx; x++) {
            float next = x + 1 < nx ? p[x + 1] : p[x], now = p[x];
            p[x] = 0.25f * (last + now + now + next);
            last = now;
        }
    }
    memcpy(before, v, nx * sizeof *v);
    for (size_t y = 0; y < ny; y++) {
        float *p = v + y * nx, *next = y + 1 < ny ? p + nx : p;
        memcpy(here, p, nx * sizeof *v);
        for (size_t x = 0; x < nx; x++) p[x] = 0.25f * (before[x] + here[x] + here[x] + next[x]);
        float *swap = before;
        before = here;
        here = swap;
    }
}

/* ---- the look ---- */

typedef struct {
    double sum, squares, cubes, bins, peaks, area; /* area of the bins, px2 of the picture */
} tally;

static double concentration(const tally *t) {
    double mean = t->bins > 0.0 ? t->sum / t->bins : 0.0;
    return mean > 0.0 ? t->cubes / t->bins / (mean * mean * mean) : 0.0;
}

static int rules(const float *v, size_t nx, size_t at, size_t reach) {
    const float *p = v + at;
    ptrdiff_t w = (ptrdiff_t)nx, r = (ptrdiff_t)reach;
    for (ptrdiff_t j = -r; j <= r; j++)
        for (ptrdiff_t i = -r; i <= r; i++) {
            float other = p[j * w + i];
            if (other > p[0] || (other >= p[0] && (j < 0 || (j == 0 && i < 0)))) return 0;
        }
    return 1;
}

/* Adds what the bins at least a radius inside the tile hold; px: of the picture, for one of the level. */
static void tally_add(const float *v, size_t nx, size_t ny, double side, double px, tally *t) {
    size_t margin = (size_t)bins_per_radius + 1, reach = (size_t)bins_per_radius - 1;
    double s1 = 0.0, s2 = 0.0, s3 = 0.0;
    if (nx <= 2 * margin || ny <= 2 * margin) return;
    for (size_t y = margin; y < ny - margin; y++)
        for (size_t x = margin; x < nx - margin; x++) {
            double c = (double)v[y * nx + x];
            s1 += c;
            s2 += c * c;
            s3 += c * c * c;
        }
    double n = (double)(nx - 2 * margin) * (double)(ny - 2 * margin);
    t->sum += s1;
    t->squares += s2;
    t->cubes += s3;
    t->bins += n;
    t->area += n * side * side * px * px;
    float least = s2 > 0.0 ? (float)(standing * s3 / s2) : HUGE_VALF;
    for (size_t y = margin; y < ny - margin; y++)
        for (size_t x = margin; x < nx - margin; x++)
            if (v[y * nx + x] > least && rules(v, nx, y * nx + x, reach)) t->peaks += 1.0;
}

/* The radii of one level: an octave and two more at each end. Levels differ a little in what they see, so a maximum
 * needs both its neighbours on its own level, and one at the seam must not fall between two levels. */
typedef struct {
    double px; /* of the picture, for one of the level */
    double radius[PER_LEVEL];
    tally of[2][PER_LEVEL]; /* darker inside, brighter inside */
} level;

typedef struct {
    float *tile, *smooth, *bins, *row;
    ballot *ballots;
} desk;

static void desk_free(desk *d) {
    free(d->tile);
    free(d->smooth);
    free(d->bins);
    free(d->row);
    free(d->ballots);
}

static status desk_make(size_t area, desk *d, error *e) {
    size_t bins = area * 4 + 64; /* of at least 0.52 px */
    d->tile = mem_array(area, sizeof *d->tile);
    d->smooth = mem_array(area, sizeof *d->smooth);
    d->bins = mem_array(bins, sizeof *d->bins);
    d->row = mem_array(area + 64, sizeof *d->row); /* two rows of bins: tiles are at least 4 px high */
    d->ballots = mem_array(area, sizeof *d->ballots);
    if (d->tile && d->smooth && d->bins && d->row && d->ballots) return ST_OK;
    return NO_MEMORY(e, "the outlines");
}

static status tile_look(desk *d, size_t w, size_t h, level *l, error *e) {
    size_t n = 0;
    status st = ballots_make(d->tile, w, h, d->smooth, d->ballots, &n, e);
    for (size_t i = 0; st == ST_OK && i < PER_LEVEL; i++)
        for (int s = 0; s < 2; s++) {
            double r = l->radius[i] / l->px, side = r / bins_per_radius;
            size_t nbx = (size_t)((double)w / side), nby = (size_t)((double)h / side);
            memset(d->bins, 0, nbx * nby * sizeof *d->bins);
            cast(d->ballots, n, (float)(s ? r : -r), (float)side, d->bins, nbx, nby);
            soften(d->bins, nbx, nby, d->row);
            tally_add(d->bins, nbx, nby, side, l->px, &l->of[s][i]);
        }
    return st;
}

static status level_look(desk *d, const float *g, size_t w, size_t h, level *l, error *e) {
    size_t tiles = w * h > AREA ? TILES : 1, room = (size_t)sqrt((double)AREA) / TILES;
    size_t tw = tiles > 1 && room < w / tiles ? room : w / tiles;
    size_t th = tiles > 1 && room < h / tiles ? room : h / tiles;
    status st = ST_OK;
    for (size_t k = 0; st == ST_OK && k < tiles * tiles; k++) {
        size_t x0 = (w / tiles) * (k % tiles) + (w / tiles - tw) / 2,
               y0 = (h / tiles) * (k / tiles) + (h / tiles - th) / 2;
        for (size_t y = 0; y < th; y++) memcpy(d->tile + y * tw, g + (y0 + y) * w + x0, tw * sizeof *g);
        st = tile_look(d, tw, th, l, e);
    }
    return st;
}

/* Halves a picture: means of 2 x 2, into out (may be in). */
static void halve(const float *in, size_t *nx, size_t *ny, float *out) {
    size_t from = *nx, w = *nx / 2, h = *ny / 2;
    for (size_t y = 0; y < h; y++)
        for (size_t x = 0; x < w; x++) {
            const float *p = in + 2 * y * from + 2 * x;
            out[y * w + x] = 0.25f * (p[0] + p[1] + p[from] + p[from + 1]);
        }
    *nx = w;
    *ny = h;
}

/* Bodies, gaps between them, vacancies and bare ground between islands all gather votes; the bodies gather the largest
 * share of all votes. A share p gathered on a share q of the field has the concentration p^3 / q^2, and q goes with the
 * number of places and the square of the radius. */
static double gathered(const outline *o) {
    double q = o->density * o->radius_px * o->radius_px;
    return (o->concentration - o->opposite) * q * q;
}

/* The best candidate of one sign, with sign 0 when there is none. */
static outline best_of(const level *l, size_t n, int bright, double most_px) {
    outline best = { MISSING, 0, 0.0, 0.0, 0.0, 0.0 };
    for (size_t k = 0; k < n; k++)
        for (size_t i = 1; i + 1 < PER_LEVEL; i++) {
            const tally *t = &l[k].of[bright][i];
            double c = concentration(t), other = concentration(&l[k].of[!bright][i]);
            if (l[k].radius[i] > most_px || c < concentration(t - 1) || c < concentration(t + 1)) continue;
            if (c < least_concentration || c < least_ratio * other || !(t->area > 0.0)) continue;
            double beside =
                fmax(i >= 2 ? concentration(t - 2) : 0.0, i + 2 < PER_LEVEL ? concentration(t + 2) : 0.0);
            outline o = { l[k].radius[i], bright ? 1 : -1, c, other, beside / c, t->peaks / t->area };
            if (!best.sign || gathered(&o) > gathered(&best)) best = o;
        }
    return best;
}

static outline judge(const level *l, size_t n, int sign, double most_px) {
    outline dark = best_of(l, n, 0, most_px), bright = best_of(l, n, 1, most_px);
    if (sign) return sign < 0 ? dark : bright;
    if (!dark.sign || !bright.sign) return dark.sign ? dark : bright;
    return gathered(&dark) > gathered(&bright) ? dark : bright;
}

status outline_look(const float *f, size_t nx, size_t ny, int sign, outline *out, error *e) {
    size_t w = nx, h = ny, n = 0, shorter = nx < ny ? nx : ny;
    double most_px = widest_share * (double)shorter;
    level *l = mem_array(LEVELS, sizeof *l);
    float *half = mem_array((nx / 2) * (ny / 2), sizeof *half);
    desk d = { 0 };
    status st = l && half ? desk_make(nx * ny > AREA ? AREA : nx * ny, &d, e) : NO_MEMORY(e, "the outlines");
    const float *g = f;
    for (double r = least_radius_px; st == ST_OK && n < LEVELS && r < most_px; r *= 2.0) {
        if (r > 1.5 * level_radius_px * (n ? l[n - 1].px : 1.0)) {
            halve(g, &w, &h, half);
            g = half;
        }
        l[n].px = fmax(1.0, r / level_radius_px);
        for (int i = 0; i < PER_LEVEL; i++) l[n].radius[i] = r * pow(2.0, (double)(i - 1) / PER_OCTAVE);
        st = level_look(&d, g, w, h, &l[n++], e);
    }
    if (st == ST_OK) *out = judge(l, n, sign, most_px);
    desk_free(&d);
    free(half);
    free(l);
    return st;
}

/* ---- the centres ---- */

/* The votes of all radii about one, on the halved picture; owned. */
typedef struct {
    float *votes;
    ballot *ballots; /* row by row */
    size_t *row;     /* [ny + 1] where each begins */
    size_t nx, ny;
    double px, typical; /* px of the picture for one; typical height where votes gather */
} assembly;

static void assembly_free(assembly *a) {
    free(a->votes);
    free(a->ballots);
    free(a->row);
}

static status assemble(const float *f, size_t nx, size_t ny, const outline *o, assembly *a, error *e) {
    static const double factor[] = { 0.80, 0.90, 1.0, 1.10, 1.20 };
    size_t n = 0;
    float *g = mem_array(nx * ny, sizeof *g);
    a->votes = mem_array(nx * ny, sizeof *a->votes);
    ballot *b = a->ballots = mem_array(nx * ny, sizeof *b);
    a->row = mem_array(ny + 1, sizeof *a->row);
    status st = g && a->votes && b && a->row ? ST_OK : NO_MEMORY(e, "the outlines");
    a->nx = nx;
    a->ny = ny;
    a->px = 1.0;
    if (st == ST_OK) memcpy(g, f, nx * ny * sizeof *g);
    for (; st == ST_OK && o->radius_px > 2.0 * full_radius_px * a->px; a->px *= 2.0)
        halve(g, &a->nx, &a->ny, g);
    if (st == ST_OK) st = ballots_make(g, a->nx, a->ny, a->votes, b, &n, e);
    double r = o->radius_px / a->px, s2 = 0.0, s3 = 0.0;
    if (st == ST_OK) {
        for (size_t y = 0, i = 0; y <= a->ny; y++) {
            while (i < n && (double)b[i].y < (double)y) i++;
            a->row[y] = i;
        }
        memset(a->votes, 0, a->nx * a->ny * sizeof *a->votes);
        for (size_t i = 0; i < sizeof factor / sizeof *factor; i++)
            cast(b, n, (float)(o->sign * factor[i] * r), 1.0f, a->votes, a->nx, a->ny);
        st = filter_gauss(a->votes, a->nx, a->ny, vote_sigma * r, a->votes, e);
    }
    for (size_t i = 0; st == ST_OK && i < a->nx * a->ny; i++) {
        double v = (double)a->votes[i];
        s2 += v * v;
        s3 += v * v * v;
    }
    a->typical = s2 > 0.0 ? s3 / s2 : 0.0;
    free(g);
    return st;
}

/* Keeps the maxima of at least `least` that rule their body; in place. */
static size_t bodies_select(const assembly *a, double r, double least, maximum *m, size_t n) {
    size_t k = 0, reach = (size_t)(own_reach * r + 0.5);
    for (size_t i = 0; i < n; i++)
        if ((double)m[i].height >= least && maximum_rules(a->votes, a->nx, a->ny, m[i].pixel, reach))
            m[k++] = m[i];
    return k;
}

/* Least squares over the gradient lines of the outline about (x, y): the point nearest to all of them. */
static void centre_step(const assembly *a, double r, int sign, double *x, double *y) {
    double xx = 0.0, xy = 0.0, yy = 0.0, bx = 0.0, by = 0.0, reach = outline_to * r;
    size_t y0 = *y > reach ? (size_t)(*y - reach) : 0,
           y1 = (size_t)fmin(fmax(0.0, *y + reach), (double)a->ny - 1.0) + 1;
    for (size_t i = a->row[y0]; i < a->row[y1]; i++) {
        const ballot *b = &a->ballots[i];
        double dx = (double)b->x - *x, dy = (double)b->y - *y, rho = sqrt(dx * dx + dy * dy);
        if (rho < outline_from * r || rho > reach) continue;
        double ux = (double)b->ux, uy = (double)b->uy, w = (double)b->weight;
        if (-(dx * ux + dy * uy) * sign < towards * rho) continue;
        double off = -uy * (double)b->x + ux * (double)b->y; /* of the line, along its normal (-uy, ux) */
        xx += w * uy * uy;
        xy -= w * ux * uy;
        yy += w * ux * ux;
        bx -= w * uy * off;
        by += w * ux * off;
    }
    double det = xx * yy - xy * xy, trace = xx + yy;
    if (!(det > least_spread * trace * trace)) return;
    double nx = (yy * bx - xy * by) / det, ny = (xx * by - xy * bx) / det;
    if (hypot(nx - *x, ny - *y) > outline_from * r) return;
    *x = nx;
    *y = ny;
}

static status bodies_make(const assembly *a, size_t nx, size_t ny, const outline *o, const maximum *m,
                          size_t n, detection *out, error *e) {
    if (n < MIN_BODIES)
        return fail(e, ST_NO_RESULT, "%zu bodies found by their outlines, expected at least %d", n,
                    MIN_BODIES);
    status st = detection_make(n, out, e);
    size_t weak = 0;
    for (size_t i = 0; st == ST_OK && i < n; i++) {
        double x, y;
        size_t px = m[i].pixel % a->nx, py = m[i].pixel / a->nx;
        map_vertex(a->votes, a->nx, a->ny, px, py, &x, &y);
        for (int k = 0; k < CENTRE_STEPS; k++) centre_step(a, o->radius_px / a->px, o->sign, &x, &y);
        out->features[i].x = (x + 0.5) * a->px - 0.5;
        out->features[i].y = (y + 0.5) * a->px - 0.5;
        out->features[i].response = (double)m[i].height;
        double cx = fmin(((double)px + 0.5) * a->px, (double)nx - 1.0),
               cy = fmin(((double)py + 0.5) * a->px, (double)ny - 1.0);
        out->marker[i] = (uint32_t)((size_t)cy * nx + (size_t)cx);
        weak += (double)m[i].height < 2.0 * body_standing * a->typical;
    }
    if (st == ST_OK) out->merged_share = 0.5 * (double)weak / (double)n;
    return st;
}

status outline_detect(const float *f, size_t nx, size_t ny, const outline *o, detection *out, error *e) {
    assembly a = { 0 };
    maximum *m = NULL;
    size_t n = 0;
    detection det = { .body_radius_px = o->radius_px };
    status st = assemble(f, nx, ny, o, &a, e);
    if (st == ST_OK) st = maxima_find(a.votes, a.nx, a.ny, 0, &m, &n, e);
    if (st == ST_OK) n = bodies_select(&a, o->radius_px / a.px, body_standing * a.typical, m, n);
    if (st == ST_OK) st = bodies_make(&a, nx, ny, o, m, n, &det, e);
    if (st == ST_OK) {
        det.scale_px = spacing_hex(guarded_density(det.features, n, nx, ny, o->radius_px, NULL));
        *out = det;
        det = (detection){ 0 };
    }
    detection_free(&det);
    free(m);
    assembly_free(&a);
    return st;
}

/* Position among features sorted by the row of their markers: a centre lies within `slack` of that row. */
static size_t first_near(const detection *d, size_t from, double y, double slack) {
    while (from < d->n && d->features[from].y < y - slack) from++;
    return from;
}

static int by_value(const void *a, const void *b) {
    double p = *(const double *)a, q = *(const double *)b;
    return (p > q) - (p < q);
}

status outline_compare(const detection *bodies, const detection *other, size_t nx, size_t ny,
                       outline_match *out, error *e) {
    const double r1 = bodies->body_radius_px, middle = 0.5 * r1, inside = 1.25 * r1, slack = 4.0 * r1,
                 weak = 0.5;
    size_t first = 0, alike = 0, n_inside = 0, faint = 0, apart = 0;
    char *held = mem_array(other->n, sizeof *held);
    double *response = mem_array(other->n, sizeof *response);
    status st = held && response ? ST_OK : NO_MEMORY(e, "the comparison of features");
    for (size_t i = 0; st == ST_OK && i < bodies->n; i++) {
        const feature *b = &bodies->features[i];
        size_t near = 0, central = 0;
        first = first_near(other, first, b->y, slack);
        for (size_t k = first; k < other->n && other->features[k].y < b->y + slack; k++) {
            double r = hypot(other->features[k].x - b->x, other->features[k].y - b->y);
            near += r < inside;
            central += r < middle;
            held[k] |= r < inside;
        }
        alike += near == 1 && central == 1;
    }
    for (size_t k = 0; st == ST_OK && k < other->n; k++)
        if (held[k]) response[n_inside++] = other->features[k].response;
    if (n_inside) qsort(response, n_inside, sizeof *response, by_value);
    for (size_t k = 0; st == ST_OK && k < other->n && n_inside; k++) {
        int weaker = other->features[k].response < weak * response[n_inside / 2];
        faint += !held[k] && weaker;
        apart += !held[k] && !weaker && guarded_density(&other->features[k], 1, nx, ny, inside, NULL) > 0.0;
    }
    if (st == ST_OK) {
        out->alike = bodies->n ? (double)alike / (double)bodies->n : 0.0;
        out->faint = other->n ? (double)faint / (double)other->n : 0.0;
        out->apart = other->n ? (double)apart / (double)other->n : 0.0;
    }
    free(held);
    free(response);
    return st;
}

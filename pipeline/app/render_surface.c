/* The surface of a rendered micrograph and what is true of it. Each centre carries a body of revolution, height
 * times 1 - (r/R)^q (or a bell); the surface is the upper envelope, drawn body by body in half-pixel steps. The body
 * that is highest at a place owns it: the owners' areas are the ideal basins of the continuous surface, which is what
 * a watershed of a perfect picture would find. Below the floor the terms go on falling, so that bare ground belongs to
 * the body it slopes up to. Parts of one basin that a steeper neighbour cuts off count with it. */
#include <math.h>
#include <stdlib.h>

#include "app/render_priv.h"
#include "base/mem.h"
#include "base/quantity.h"

/* Bodies are drawn down to one common level, that of a mean body this many spacings off. Where nothing reaches that
 * level, in large gaps, all bodies are compared. */
#define REACH 1.3
#define LOWEST_HEIGHT 0.3 /* the normal spread of heights ends here */
#define PROFILE_STEPS 1024.0 /* table steps per base radius: linear interpolation errs by less than 1e-6 */

typedef struct {
    double height, radius, reach;
} body;

typedef struct {
    double q;
    int bell;
    double level; /* down to which bodies are drawn */
    size_t n;
    double *table; /* profile at r/R = k / PROFILE_STEPS */
} profile_table;

static double profile_exact(const profile_table *p, double u) {
    return p->bell ? exp(-2.0 * u * u) : 1.0 - pow(u, p->q);
}

/* r/R at which a body of this height is down at the level. */
static double profile_end(const profile_table *p, double height) {
    if (p->bell) return sqrt(0.5 * fmax(0.0, log(height / p->level)));
    return pow(1.0 - p->level / height, 1.0 / p->q);
}

static double profile_at(const profile_table *p, double u) {
    double at = u * PROFILE_STEPS;
    size_t k = (size_t)at;
    if (k + 1 >= p->n) return profile_exact(p, u);
    return p->table[k] + (at - (double)k) * (p->table[k + 1] - p->table[k]);
}

static status bodies_make(const render_options *o, const centres *c, body **bodies, profile_table *p, error *e) {
    rng r = rng_make(o->seed, STREAM_HEIGHTS);
    *p = (profile_table){ .q = o->exponent, .bell = o->bell };
    p->level = profile_exact(p, REACH * 2.0 / o->fill);
    body *b = mem_array(c->n, sizeof *b);
    if (!b) return NO_MEMORY(e, "the features");
    double end = 0.0;
    for (size_t k = 0; k < c->n; k++) {
        double size = c->size[k];
        b[k].height = pow(size, o->height_by_size) * fmax(LOWEST_HEIGHT, 1.0 + o->height_spread * rng_normal(&r));
        b[k].radius = 0.5 * c->spacing * o->fill * size;
        b[k].reach = b[k].radius * profile_end(p, b[k].height);
        end = fmax(end, b[k].reach / b[k].radius);
    }
    p->n = (size_t)ceil(end * PROFILE_STEPS) + 2;
    p->table = mem_array(p->n, sizeof *p->table);
    if (!p->table) {
        free(b);
        return NO_MEMORY(e, "the features");
    }
    for (size_t k = 0; k < p->n; k++) p->table[k] = profile_exact(p, (double)k / PROFILE_STEPS);
    *bodies = b;
    return ST_OK;
}

typedef struct {
    const centres *c;
    const body *b;
    const profile_table *p;
    stretching s;
    size_t nx, ny, margin; /* half-pixel steps; margin in px */
    float *height;
    uint32_t *owner;
} canvas;

/* Position of half-pixel step i in px. */
static double position(const canvas *v, size_t i) { return 0.5 * ((double)i + 0.5) - 0.5 - (double)v->margin; }

static double distance2(const canvas *v, size_t k, double x, double y) {
    double dx = x - v->c->x[k], dy = y - v->c->y[k];
    return v->s.xx * dx * dx + 2.0 * v->s.xy * dx * dy + v->s.yy * dy * dy;
}

static size_t step_clamped(const canvas *v, double px, size_t n) {
    double i = 2.0 * (px + 0.5 + (double)v->margin);
    return i <= 0.0 ? 0 : i >= (double)n ? n : (size_t)i;
}

static void draw_body(const canvas *v, size_t k) {
    double reach = v->b[k].reach, box = reach * v->s.reach, height = v->b[k].height, per = 1.0 / v->b[k].radius;
    size_t i0 = step_clamped(v, v->c->x[k] - box, v->nx), i1 = step_clamped(v, v->c->x[k] + box + 1.0, v->nx);
    size_t j0 = step_clamped(v, v->c->y[k] - box, v->ny), j1 = step_clamped(v, v->c->y[k] + box + 1.0, v->ny);
    for (size_t j = j0; j < j1; j++) {
        double y = position(v, j);
        for (size_t i = i0; i < i1; i++) {
            double r2 = distance2(v, k, position(v, i), y);
            if (r2 > reach * reach) continue;
            float t = (float)(height * profile_at(v->p, sqrt(r2) * per));
            size_t at = j * v->nx + i;
            if (v->owner[at] && t <= v->height[at]) continue;
            v->height[at] = t;
            v->owner[at] = (uint32_t)k + 1;
        }
    }
}

/* Where no body reaches the level. */
static void fill_gaps(const canvas *v) {
    for (size_t at = 0; at < v->nx * v->ny; at++) {
        if (v->owner[at]) continue;
        double x = position(v, at % v->nx), y = position(v, at / v->nx), best = -HUGE_VAL;
        for (size_t k = 0; k < v->c->n; k++) {
            double t = v->b[k].height * profile_at(v->p, sqrt(distance2(v, k, x, y)) / v->b[k].radius);
            if (t <= best) continue;
            best = t;
            v->owner[at] = (uint32_t)k + 1;
        }
        v->height[at] = (float)best;
    }
}

static void pixels_average(const float *half, size_t nx, size_t ny, float *out) {
    for (size_t j = 0; j < ny; j++)
        for (size_t i = 0; i < nx; i++) {
            const float *p = half + 4 * nx * j + 2 * i;
            double s = fmax(0.0, (double)p[0]) + fmax(0.0, (double)p[1]) + fmax(0.0, (double)p[2 * nx]) +
                       fmax(0.0, (double)p[2 * nx + 1]);
            out[j * nx + i] = (float)(0.25 * s);
        }
}

status surface_make(const render_options *o, const centres *c, size_t margin, surface *out, error *e) {
    surface s = { .nx = o->nx + 2 * margin, .ny = o->ny + 2 * margin, .margin = margin };
    profile_table p = { 0 };
    body *b = NULL;
    float *half = mem_array(4 * s.nx * s.ny, sizeof *half);
    s.owner = mem_array(4 * s.nx * s.ny, sizeof *s.owner);
    s.height = mem_array(s.nx * s.ny, sizeof *s.height);
    status st = half && s.owner && s.height ? bodies_make(o, c, &b, &p, e) : NO_MEMORY(e, "the surface");
    if (st == ST_OK) {
        canvas v = { .c = c, .b = b, .p = &p, .s = stretching_make(o->stretch, o->stretch_angle_deg),
                     .nx = 2 * s.nx, .ny = 2 * s.ny, .margin = margin, .height = half, .owner = s.owner };
        for (size_t k = 0; k < c->n; k++) draw_body(&v, k);
        fill_gaps(&v);
        pixels_average(half, s.nx, s.ny, s.height);
        *out = s;
        s = (surface){ 0 };
    }
    free(half);
    free(b);
    free(p.table);
    surface_free(&s);
    return st;
}

void surface_free(surface *s) {
    free(s->height);
    free(s->owner);
    *s = (surface){ 0 };
}

/* ---- truth ---- */

typedef struct {
    size_t steps, i0, i1, j0, j1; /* half-pixel steps owned inside the frame, their bounding box */
} basin;

static void basins_count(const surface *s, size_t nx, size_t ny, basin *basins) {
    size_t off = 2 * s->margin;
    for (size_t j = 0; j < 2 * ny; j++)
        for (size_t i = 0; i < 2 * nx; i++) {
            basin *b = basins + s->owner[(j + off) * 2 * s->nx + i + off] - 1;
            if (!b->steps++) *b = (basin){ 1, i, i, j, j };
            if (i < b->i0) b->i0 = i;
            if (i > b->i1) b->i1 = i;
            b->j1 = j;
        }
}

static int inside(const render_options *o, double x, double y) {
    return x >= -0.5 && y >= -0.5 && x < (double)o->nx - 0.5 && y < (double)o->ny - 0.5;
}

/* 1 when the place of the centre itself belongs to another body. */
static int hidden(const surface *s, double x, double y, size_t k) {
    size_t i = (size_t)(2.0 * (x + 0.5)) + 2 * s->margin, j = (size_t)(2.0 * (y + 0.5)) + 2 * s->margin;
    return s->owner[j * 2 * s->nx + i] != k + 1;
}

status surface_truth(const render_options *o, const centres *c, const surface *s, rendering *out, error *e) {
    basin *basins = mem_array(c->n, sizeof *basins);
    size_t n = 0;
    for (size_t k = 0; k < c->n; k++) n += (size_t)inside(o, c->x[k], c->y[k]);
    out->x = mem_array(n, sizeof *out->x);
    out->y = mem_array(n, sizeof *out->y);
    out->basin_ecd_px = mem_array(n, sizeof *out->basin_ecd_px);
    out->basin_weight = mem_array(n, sizeof *out->basin_weight);
    if (!basins || !out->x || !out->y || !out->basin_ecd_px || !out->basin_weight) {
        free(basins);
        return NO_MEMORY(e, "the truth of the surface");
    }
    basins_count(s, o->nx, o->ny, basins);
    double w = 2.0 * (double)o->nx, h = 2.0 * (double)o->ny;
    size_t m = 0;
    for (size_t k = 0; k < c->n; k++) {
        if (!inside(o, c->x[k], c->y[k])) continue;
        const basin *b = basins + k;
        int whole = b->steps && b->i0 && b->j0 && b->i1 + 1 < 2 * o->nx && b->j1 + 1 < 2 * o->ny;
        double fx = (double)(b->i1 - b->i0) + 1.0, fy = (double)(b->j1 - b->j0) + 1.0;
        out->x[m] = c->x[k];
        out->y[m] = c->y[k];
        out->n_hidden += (size_t)hidden(s, c->x[k], c->y[k], k);
        out->n_second += c->second[k];
        out->basin_ecd_px[m] = whole ? sqrt((double)b->steps / PI) : MISSING; /* 2 sqrt(A / pi), A = steps / 4 */
        out->basin_weight[m] = whole ? w * h / ((w - fx + 1.0) * (h - fy + 1.0)) : 0.0;
        m++;
    }
    free(basins);
    out->n = n;
    out->first_px = c->first;
    out->second_px = c->other;
    out->density_per_px2 = (double)n / ((double)o->nx * (double)o->ny);
    out->spacing_px = sqrt(2.0 / (sqrt(3.0) * out->density_per_px2));
    return ST_OK;
}

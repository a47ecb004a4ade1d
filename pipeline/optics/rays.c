/* Rays through a regular field of upright square pyramids (side 1, feet touching), by exact intersections cell by cell.
 * Facets are flat, so a ray's direction depends only on which facets it has met: rays gather in classes.
 * What this file does not do: pyramids of unequal size or offset, inverted ones, edges, diffraction. */
#include "optics/rays.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"

enum { CELLS_MOST = 400 }; /* a ray that leaves nearly level passes that many cells at most */

typedef struct {
    double x, y, z;
} point;

static const int normal_of[4][2] = { { 1, 0 }, { -1, 0 }, { 0, 1 }, { 0, -1 } };

direction facet_normal(int facet, double angle_deg) {
    double s = sin(angle_deg * PI / 180.0);
    return (direction){ { normal_of[facet][0] * s, normal_of[facet][1] * s, cos(angle_deg * PI / 180.0) } };
}

double dot(const direction *a, const direction *b) { return a->v[0] * b->v[0] + a->v[1] * b->v[1] + a->v[2] * b->v[2]; }

direction reflected(const direction *d, const direction *normal) {
    double twice = 2.0 * dot(d, normal);
    direction r;
    for (int i = 0; i < 3; i++) r.v[i] = d->v[i] - twice * normal->v[i];
    return r;
}

/* Nearest facet of the pyramid on cell (i, j) in front of p, or -1; *at: distance along d. `from`: the facet of this very
 * pyramid that the ray comes from, or -1. */
static int hit_in_cell(const point *p, const direction *d, double slope, double i, double j, int from, double *at) {
    double height = 0.5 * slope, cx = i + 0.5, cy = j + 0.5;
    int best = -1;
    for (int k = 0; k < 4; k++) {
        if (k == from) continue;
        double nx = normal_of[k][0], ny = normal_of[k][1];
        /* on the facet z = height - slope w, w = distance from the axis along its normal */
        double w0 = (p->x - cx) * nx + (p->y - cy) * ny, dw = d->v[0] * nx + d->v[1] * ny;
        double fall = d->v[2] + slope * dw;
        if (!(fall < 0.0)) continue; /* it comes from behind */
        double t = (height - slope * w0 - p->z) / fall;
        if (!(t > -1e-12) || (best >= 0 && t >= *at)) continue;
        double w = w0 + t * dw, side = (p->x - cx + t * d->v[0]) * ny + (p->y - cy + t * d->v[1]) * nx;
        if (w < -1e-12 || w > 0.5 + 1e-12 || fabs(side) > w + 1e-12) continue;
        best = k;
        *at = t;
    }
    return best;
}

/* Moves p to where it leaves cell (i, j) and names the next one. */
static void next_cell(point *p, const direction *d, double *i, double *j) {
    double tx = d->v[0] > 0.0 ? (*i + 1.0 - p->x) / d->v[0] : d->v[0] < 0.0 ? (*i - p->x) / d->v[0] : HUGE_VAL;
    double ty = d->v[1] > 0.0 ? (*j + 1.0 - p->y) / d->v[1] : d->v[1] < 0.0 ? (*j - p->y) / d->v[1] : HUGE_VAL;
    double t = fmax(0.0, fmin(tx, ty));
    p->x += t * d->v[0];
    p->y += t * d->v[1];
    p->z += t * d->v[2];
    if (tx <= ty) *i += d->v[0] > 0.0 ? 1.0 : -1.0;
    else *j += d->v[1] > 0.0 ? 1.0 : -1.0;
}

/* Follows one ray from the height of the peaks; the facets it meets. */
static size_t follow(point p, direction d, double angle_deg, unsigned char *facet) {
    double slope = tan(angle_deg * PI / 180.0), i = floor(p.x), j = floor(p.y), t = 0.0;
    size_t n = 0;
    int from = -1;
    for (int cells = 0; cells < CELLS_MOST && n < RAY_BOUNCES; cells++) {
        int k = hit_in_cell(&p, &d, slope, i, j, from, &t);
        if (k >= 0) {
            direction normal = facet_normal(k, angle_deg);
            p.x += t * d.v[0];
            p.y += t * d.v[1];
            p.z += t * d.v[2];
            d = reflected(&d, &normal);
            facet[n++] = (unsigned char)k;
            from = k;
            continue;
        }
        int level = !(fabs(d.v[0]) > 0.0) && !(fabs(d.v[1]) > 0.0);
        if (d.v[2] >= 0.0 && (level || p.z > 0.5 * slope)) break; /* out above the peaks */
        next_cell(&p, &d, &i, &j);
        from = -1;
    }
    return n;
}

static void keep(ray_beam *b, const unsigned char *facet, size_t n, double share) {
    for (size_t c = 0; c < b->n; c++)
        if (b->classes[c].n == n && !memcmp(b->classes[c].facet, facet, n)) {
            b->classes[c].share += share;
            return;
        }
    ray_class *c = &b->classes[b->n++];
    *c = (ray_class){ .n = n, .share = share };
    memcpy(c->facet, facet, n);
}

status rays_trace(double angle_deg, double theta_deg, double phi_deg, size_t across, ray_beam *out, error *e) {
    double sine = sin(theta_deg * PI / 180.0), height = 0.5 * tan(angle_deg * PI / 180.0), share = 0.0;
    ray_beam b = { .in = { { sine * cos(phi_deg * PI / 180.0), sine * sin(phi_deg * PI / 180.0), -cos(theta_deg * PI / 180.0) } } };
    b.classes = mem_array(across * across, sizeof *b.classes);
    if (!b.classes) return NO_MEMORY(e, "the rays between facets");
    for (size_t i = 0; i < across; i++)
        for (size_t j = 0; j < across; j++) {
            /* a little off the middle of its field, so that no ray runs along an edge */
            point p = { ((double)i + 0.481) / (double)across, ((double)j + 0.513) / (double)across, height };
            unsigned char facet[RAY_BOUNCES];
            size_t n = follow(p, b.in, angle_deg, facet);
            if (n) keep(&b, facet, n, 1.0);
        }
    for (size_t c = 0; c < b.n; c++) share += b.classes[c].share;
    for (size_t c = 0; c < b.n; c++) b.classes[c].share /= share; /* a ray lost on an edge counts nowhere */
    *out = b;
    return ST_OK;
}

void ray_beam_free(ray_beam *b) {
    free(b->classes);
    *b = (ray_beam){ 0 };
}

/* Layers of spheres as an electron microscope shows them, for the tests of metrics: flat bodies with bright rims that
 * darken towards their neighbours, in grains of a hexagonal lattice, with vacancies, islands on bare ground, a spread
 * of sizes and noise. A model of its own; nothing of the measuring code is used. */
#ifndef SWARD_TESTS_LAYERS_H
#define SWARD_TESTS_LAYERS_H
#include "metrics/planes.h"

typedef struct {
    double a;                         /* distance of neighbours, px */
    double rim;                       /* 0: none; 1: as bright again as the middle, nearly */
    double contact;                   /* darkening towards a neighbour */
    double ground;                    /* brightness of the bare ground; the bodies' middles are 0.62 */
    double vacancies, jitter, spread; /* shares of sites, of a, of the radius */
    double island; /* 0: covers the field; level above which waves of brightness carry the layer */
    double noise;
    int grains, pores, round; /* pores: negative of the picture; round: bodies darken from the middle */
    uint64_t seed;
} layer_look;

enum { LAYER_ROOM = 4000 };
typedef struct {
    double x[LAYER_ROOM], y[LAYER_ROOM], r[LAYER_ROOM];
    size_t n;
} layer_bodies;

static inline int layer_has(const layer_bodies *b, double x, double y, double least) {
    for (size_t i = 0; i < b->n; i++)
        if (hypot(b->x[i] - x, b->y[i] - y) < least) return 1;
    return 0;
}

static inline double layer_waves(double x, double y, double a) {
    return sin(x / (2.9 * a) + 1.0) + sin(y / (2.3 * a) + 0.4) + sin((x + 1.7 * y) / (5.1 * a));
}

/* Sites of every grain that are nearest to that grain's middle; the first comer holds a place. */
static inline void layer_place(const layer_look *l, size_t nx, size_t ny, layer_bodies *b, dice *d) {
    double gx[16], gy[16], turn[16];
    long reach = (long)((double)(nx + ny) / l->a) + 2;
    b->n = 0;
    for (int g = 0; g < l->grains; g++) {
        gx[g] = dice_uniform(d) * (double)nx;
        gy[g] = dice_uniform(d) * (double)ny;
        turn[g] = dice_uniform(d) * TAU / 6.0;
    }
    for (int g = 0; g < l->grains; g++)
        for (long j = -reach; j <= reach; j++)
            for (long i = -reach; i <= reach; i++) {
                double u = l->a * ((double)i + 0.5 * (double)j), v = l->a * sqrt(0.75) * (double)j;
                double x = gx[g] + u * cos(turn[g]) - v * sin(turn[g]),
                       y = gy[g] + u * sin(turn[g]) + v * cos(turn[g]);
                if (x < -l->a || y < -l->a || x > (double)nx + l->a || y > (double)ny + l->a) continue;
                int own = 1;
                for (int h = 0; h < l->grains; h++)
                    own = own && hypot(x - gx[g], y - gy[g]) <= hypot(x - gx[h], y - gy[h]);
                x += l->jitter * l->a * dice_normal(d);
                y += l->jitter * l->a * dice_normal(d);
                int bare = l->island > 0.0 && layer_waves(x, y, l->a) < l->island - 1.0;
                if (!own || bare || dice_uniform(d) < l->vacancies || layer_has(b, x, y, 0.93 * l->a))
                    continue;
                if (b->n == LAYER_ROOM) abort();
                b->x[b->n] = x;
                b->y[b->n] = y;
                b->r[b->n++] = 0.5 * l->a * (1.0 + l->spread * dice_normal(d));
            }
}

/* Brightness of body k at (x, y), rho radii from its middle. */
static inline double layer_shade(const layer_look *l, const layer_bodies *b, size_t k, double x, double y,
                                 double rho) {
    double c = sqrt(fmax(1e-3, 1.0 - rho * rho)), v = l->round ? 0.25 + 0.45 * c : 0.62, shadow = 0.0;
    v += l->rim * 0.4 * (fmin(1.0 / c, 3.5) - 1.0) / 2.5;
    for (size_t i = 0; i < b->n; i++) {
        if (i == k || fabs(b->x[i] - x) > l->a || fabs(b->y[i] - y) > l->a) continue;
        double gap = hypot(b->x[i] - x, b->y[i] - y) - b->r[i];
        shadow = fmax(shadow, exp(-fmax(gap, 0.0) / (0.14 * b->r[k])));
    }
    return v * (1.0 - l->contact * shadow);
}

/* [1 2 1] / 4 both ways: the probe. */
static inline void layer_blur(float *f, size_t nx, size_t ny) {
    float *g = plane_new(nx, ny);
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx; x++) {
            const float *p = f + y * nx;
            g[y * nx + x] = 0.25f * (p[x ? x - 1 : x] + 2.0f * p[x] + p[x + 1 < nx ? x + 1 : x]);
        }
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx; x++)
            f[y * nx + x] = 0.25f * (g[(y ? y - 1 : y) * nx + x] + 2.0f * g[y * nx + x] +
                                     g[(y + 1 < ny ? y + 1 : y) * nx + x]);
    free(g);
}

static inline void layer_draw(const layer_look *l, const layer_bodies *b, float *f, size_t nx, size_t ny,
                              dice *d) {
    for (size_t i = 0; i < nx * ny; i++) f[i] = (float)l->ground;
    for (size_t k = 0; k < b->n; k++) {
        long reach = (long)ceil(b->r[k]), cx = (long)floor(b->x[k]), cy = (long)floor(b->y[k]);
        for (long y = cy - reach; y <= cy + reach + 1; y++)
            for (long x = cx - reach; x <= cx + reach + 1; x++) {
                double rho = hypot((double)x - b->x[k], (double)y - b->y[k]) / b->r[k];
                if (x < 0 || y < 0 || x >= (long)nx || y >= (long)ny || rho >= 1.0) continue;
                f[(size_t)y * nx + (size_t)x] = (float)layer_shade(l, b, k, (double)x, (double)y, rho);
            }
    }
    layer_blur(f, nx, ny);
    for (size_t i = 0; l->pores && i < nx * ny; i++) f[i] = 1.0f - f[i];
    add_noise(f, nx * ny, l->noise, d);
}

/* Mean distance of pairs nearer than 1.3 a among the bodies whose middle is in the field. */
static inline double layer_first_shell(const layer_bodies *b, double a, size_t nx, size_t ny) {
    double sum = 0.0;
    size_t pairs = 0;
    for (size_t i = 0; i < b->n; i++)
        for (size_t k = i + 1; k < b->n; k++) {
            double r = hypot(b->x[i] - b->x[k], b->y[i] - b->y[k]);
            int in = b->x[i] >= 0.0 && b->y[i] >= 0.0 && b->x[i] < (double)nx && b->y[i] < (double)ny &&
                     b->x[k] >= 0.0 && b->y[k] >= 0.0 && b->x[k] < (double)nx && b->y[k] < (double)ny;
            if (!in || r > 1.3 * a) continue;
            sum += r;
            pairs++;
        }
    return sum / (double)pairs;
}
#endif

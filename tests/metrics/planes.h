/* Small planes of known make for the tests of metrics: a fixed generator, bumps, lattices, gratings. */
#ifndef SWARD_TESTS_PLANES_H
#define SWARD_TESTS_PLANES_H
#include <math.h>
#include <stdint.h>
#include <stdlib.h>

#define TAU 6.28318530717958647692

typedef struct {
    uint64_t s;
} dice;
static inline double dice_uniform(dice *d) { /* xorshift64, Marsaglia 2003, J. Stat. Softw. 8(14) */
    d->s ^= d->s << 13;
    d->s ^= d->s >> 7;
    d->s ^= d->s << 17;
    return ((double)(d->s >> 11) + 0.5) / 9007199254740992.0;
}
static inline double dice_normal(dice *d) {
    double a = sqrt(-2.0 * log(dice_uniform(d)));
    return a * cos(TAU * dice_uniform(d));
}
static inline float *plane_new(size_t nx, size_t ny) {
    float *f = calloc(nx * ny, sizeof *f);
    if (!f) abort();
    return f;
}
static inline void add_noise(float *f, size_t n, double sd, dice *d) {
    for (size_t i = 0; i < n; i++) f[i] = (float)((double)f[i] + sd * dice_normal(d));
}
static inline void add_grating(float *f, size_t nx, size_t ny, double period, double angle, double a) {
    double kx = TAU / period * cos(angle), ky = TAU / period * sin(angle);
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx; x++)
            f[y * nx + x] = (float)((double)f[y * nx + x] + a * cos(kx * (double)x + ky * (double)y));
}
static inline void add_bump(float *f, size_t nx, size_t ny, double x, double y, double sd, double h) {
    long reach = (long)ceil(5.0 * sd), cx = (long)floor(x), cy = (long)floor(y);
    for (long j = cy - reach; j <= cy + reach; j++)
        for (long i = cx - reach; i <= cx + reach; i++) {
            if (i < 0 || j < 0 || i >= (long)nx || j >= (long)ny) continue;
            double dx = (double)i - x, dy = (double)j - y;
            size_t at = (size_t)j * nx + (size_t)i;
            f[at] = (float)((double)f[at] + h * exp(-(dx * dx + dy * dy) / (2.0 * sd * sd)));
        }
}
/* Cone of base radius r on top of what is there: surfaces that touch meet in a crease. */
static inline void raise_cone(float *f, size_t nx, size_t ny, double x, double y, double r, double h) {
    long reach = (long)ceil(r), cx = (long)floor(x), cy = (long)floor(y);
    for (long j = cy - reach; j <= cy + reach; j++)
        for (long i = cx - reach; i <= cx + reach; i++) {
            if (i < 0 || j < 0 || i >= (long)nx || j >= (long)ny) continue;
            double dx = (double)i - x, dy = (double)j - y, v = h * (1.0 - sqrt(dx * dx + dy * dy) / r);
            size_t at = (size_t)j * nx + (size_t)i;
            if (v > (double)f[at]) f[at] = (float)v;
        }
}
/* Hexagonal lattice, rows along x: constant a, normal jitter (share of a), stretched along x by `stretch` at
 * constant density about the middle. Calls put for every point. */
typedef void (*put_point)(float *f, size_t nx, size_t ny, double x, double y, double size, double h);
static inline void hexagonal(float *f, size_t nx, size_t ny, double a, double jitter, double stretch,
                             double size, put_point put, dice *d) {
    double q = sqrt(stretch), mx = 0.5 * (double)nx, my = 0.5 * (double)ny, row = 0.5 * sqrt(3.0) * a;
    long rows = (long)(my * 1.5 / row) + 4, cols = (long)(mx * 1.5 / a) + 4;
    for (long j = -rows; j <= rows; j++)
        for (long i = -cols; i <= cols; i++) {
            double x = a * ((double)i + (j % 2 ? 0.5 : 0.0)), y = row * (double)j;
            if (jitter > 0.0) {
                x += jitter * a * dice_normal(d);
                y += jitter * a * dice_normal(d);
            }
            put(f, nx, ny, mx + x * q, my + y / q, size, 1.0);
        }
}
#endif

/* The Bruggeman equation (1935, Ann. Phys. 416, 636) for three and more phases in two or three dimensions:
 * Newton on all wavelengths of a block at once. Of the roots, as many as phases, the physical one lies in the
 * cone that the phases span in the complex plane (a mean cannot have more loss, or less, than every part);
 * tests/external/mixing.c finds by computing all roots that it is the only one there. Each answer is looked
 * at; where Newton went astray, the root is followed from the pure ambient, along which it moves
 * continuously. */
#include "optics/bruggeman.h"

enum { MAX_TURNS = 30, PATH_STEPS = 256, PATH_PHASES = 16 };
static const double SETTLED =
    1e-18; /* square of the last relative move: the next would be its square again */

double complex bruggeman_residual(const double complex *eps, const double *f, size_t phases, int dimensions,
                                  double complex e) {
    double complex sum = 0.0;
    for (size_t p = 0; p < phases; p++) sum += f[p] * ((eps[p] - e) / (eps[p] + (dimensions - 1) * e));
    return sum;
}

/* Adds the term of one phase to the left side and to minus its slope. */
HOT static void add_phase(const lanes *restrict eps, double f, double dimensions, size_t n,
                          const lanes *restrict e, lanes *restrict sum, lanes *restrict slope) {
    const double others = dimensions - 1.0, weight = f * dimensions;
    for (size_t i = 0; i < n; i++) {
        double pr = eps->re[i], pi = eps->im[i], er = e->re[i], ei = e->im[i];
        double dr = pr + others * er, di = pi + others * ei, q = 1.0 / (dr * dr + di * di);
        double vr = dr * q, vi = -di * q; /* 1/(e_p + (d - 1) e) */
        double nr = pr - er, ni = pi - ei;
        sum->re[i] += f * (nr * vr - ni * vi);
        sum->im[i] += f * (nr * vi + ni * vr);
        double sr = vr * vr - vi * vi, si = 2.0 * vr * vi;
        slope->re[i] += weight * (pr * sr - pi * si);
        slope->im[i] += weight * (pr * si + pi * sr);
    }
}

/* One step; moved: square of the relative move. */
HOT static void take_step(const lanes *restrict sum, const lanes *restrict slope, size_t n, lanes *restrict e,
                          double *restrict moved) {
    for (size_t i = 0; i < n; i++) {
        double q = 1.0 / (slope->re[i] * slope->re[i] + slope->im[i] * slope->im[i]);
        double sr = (sum->re[i] * slope->re[i] + sum->im[i] * slope->im[i]) * q;
        double si = (sum->im[i] * slope->re[i] - sum->re[i] * slope->im[i]) * q;
        e->re[i] += sr;
        e->im[i] += si;
        moved[i] = (sr * sr + si * si) / (e->re[i] * e->re[i] + e->im[i] * e->im[i]);
    }
}

static void newton(const lanes *eps, const double *f, size_t phases, int dimensions, size_t n, lanes *e,
                   double *moved) {
    for (int turn = 0; turn < MAX_TURNS; turn++) {
        lanes sum = { .re = { 0.0 } }, slope = { .re = { 0.0 } };
        int settled = 1;
        for (size_t p = 0; p < phases; p++)
            if (f[p] > 0.0) add_phase(&eps[p], f[p], dimensions, n, e, &sum, &slope);
        take_step(&sum, &slope, n, e, moved);
        for (size_t i = 0; i < n; i++) settled = settled && moved[i] <= SETTLED;
        if (settled) break;
    }
}

/* A present phase at or below the argument of e and one at or above; all lie in the upper half plane. The
 * margin covers rounding. */
static int in_cone(const lanes *eps, const double *f, size_t phases, size_t i, double er, double ei) {
    int low = 0, high = 0;
    double size = er * er + ei * ei;
    if (!(ei >= -1e-9 * sqrt(size))) return 0;
    for (size_t p = 0; p < phases; p++) {
        if (!(f[p] > 0.0)) continue;
        double pr = eps[p].re[i], pi = eps[p].im[i];
        double side = pi * er - pr * ei, margin = 1e-9 * sqrt(size * (pr * pr + pi * pi));
        if (pr * er + pi * ei < 0.0 && fabs(side) <= margin) return 0; /* the opposite ray */
        low = low || side <= margin;
        high = high || side >= -margin;
    }
    return low && high;
}

/* One wavelength, from the pure ambient to the mixture in small steps. */
static double complex follow(const lanes *eps, const double *f, size_t phases, int dimensions, size_t i) {
    lanes one[PATH_PHASES], e;
    double g[PATH_PHASES], moved[LANES] = { 0.0 };
    for (size_t p = 0; p < phases; p++) lane_set(&one[p], 0, lane_get(&eps[p], i));
    lane_set(&e, 0, lane_get(&eps[0], i));
    for (int step = 1; step <= PATH_STEPS; step++) {
        double part = (double)step / PATH_STEPS;
        for (size_t p = 0; p < phases; p++) g[p] = part * f[p] + (p ? 0.0 : 1.0 - part);
        newton(one, g, phases, dimensions, 1, &e, moved);
    }
    return lane_get(&e, 0);
}

void bruggeman_solve(const lanes *eps, const double *f, size_t phases, int dimensions, size_t n, lanes *e) {
    double moved[LANES] = { 0.0 };
    newton(eps, f, phases, dimensions, n, e, moved);
    for (size_t i = 0; i < n; i++)
        if (!(moved[i] <= SETTLED) || !in_cone(eps, f, phases, i, e->re[i], e->im[i]))
            lane_set(e, i, follow(eps, f, phases, dimensions, i));
}

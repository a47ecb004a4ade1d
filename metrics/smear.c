/* Two ways to be anisotropic, told apart by how they grow with spatial frequency.
 * Beyond the ring the spectrum of a surface with creases falls as k^-5 (fitness.c). A texture stretched by exp(2 e) along psi has
 * ln P(k, phi) = ln P0(k) - 5 e cos 2(phi - psi): the same at every k. A probe whose variance along theta exceeds that across it by
 * D multiplies the spectrum by exp(-2 pi^2 D k^2 cos 2(phi - theta)): it grows with k^2. The second angular harmonic of the spectrum
 * in rings of k, from 1.8 per spacing to the noise, is fitted by the second law, cosine and sine parts apart.
 * Weights: n modes of a ring know their harmonic to sqrt(2 / n); half of them count, because the window of the spectrum joins
 * neighbours; what is left over scales the errors when it is larger. One spectrum hardly parts the two, so the stretch is taken from
 * the spacing (ring.c), which a smear moves little, and the rest is smear. Streaks and the edges of the field lie on the axes: modes
 * within 3 of them are left out. Not seen: a smear that is the same in all directions (that is blur). */
#include "metrics/smear.h"

#include <math.h>

#include "base/quantity.h"

enum { RINGS = 24, AXIS = 3 };

typedef struct {
    double power, c, s, k, n; /* sums over the modes of a ring */
} ring_sum;

static void rings_fill(const float *psd, size_t nx, size_t ny, double floor, double k0, double k1, ring_sum *ring) {
    double step = log(k1 / k0) / RINGS;
    for (size_t j = 0; j < ny; j++) {
        double fy = (double)j < 0.5 * (double)ny ? (double)j : (double)j - (double)ny, ky = fy / (double)ny;
        if (fabs(fy) <= AXIS || fabs(ky) > k1) continue;
        for (size_t i = AXIS + 1; i <= nx / 2; i++) {
            double kx = (double)i / (double)nx, kk = kx * kx + ky * ky;
            if (kk < k0 * k0 || kk >= k1 * k1) continue;
            ring_sum *r = ring + (size_t)fmin(RINGS - 1, 0.5 * log(kk / (k0 * k0)) / step);
            double p = (double)psd[j * (nx / 2 + 1) + i] - floor;
            r->power += p;
            r->c += p * (kx * kx - ky * ky) / kk;
            r->s += p * -2.0 * kx * ky / kk; /* y of the picture is down, angles are y up */
            r->k += sqrt(kk);
            r->n += 1.0;
        }
    }
}

fine_anisotropy smear_look(const float *psd, size_t nx, size_t ny, double floor, double d_px, double last) {
    const double from = 1.8, to = 0.45, slope = 5.0, least_modes = 24.0, shared = 0.5;
    fine_anisotropy out = { MISSING, MISSING, MISSING, MISSING };
    ring_sum ring[RINGS] = { { 0.0, 0.0, 0.0, 0.0, 0.0 } };
    double k0 = from / d_px, k1 = fmin(to, last), xx = 0.0, xy = 0.0, xc = 0.0, xs = 0.0, vv = 0.0;
    int used = 0;
    if (!(k1 > 1.15 * k0)) return out;
    rings_fill(psd, nx, ny, floor, k0, k1, ring);
    for (int r = 0; r < RINGS; r++) {
        if (ring[r].n < least_modes || !(ring[r].power > 0.0)) continue;
        double noise = 1.0 + floor * ring[r].n / ring[r].power; /* relative scatter of a mode's power beyond the noise */
        double k = ring[r].k / ring[r].n, x = -2.0 * PI * PI * k * k, w = shared * ring[r].n / (2.0 * noise * noise);
        double c = 2.0 * ring[r].c / ring[r].power, s = 2.0 * ring[r].s / ring[r].power;
        xx += w * x * x;
        xy += w * x * -slope;
        xc += w * x * c;
        xs += w * x * s;
        vv += w * (c * c + s * s);
        used++;
    }
    if (used < 4) return out;
    double left = (vv - (xc * xc + xs * xs) / xx) / (2.0 * (double)used - 2.0);
    return (fine_anisotropy){ xc / xx, xs / xx, xy / xx, sqrt(fmax(1.0, left) / xx) };
}

smear smear_beyond(const fine_anisotropy *f, double stretch, double stretch_u, double angle_deg) {
    double strain = stretch > 1.0 ? 0.5 * log(stretch) : 0.0, u = f->u, twice = 2.0 * angle_deg * PI / 180.0;
    if (!isfinite(u)) return (smear){ MISSING, MISSING, 0.0 };
    if (isfinite(stretch_u)) u = hypot(u, f->per_strain * 0.5 * stretch_u);
    double c = f->c, s = f->s;
    if (strain > 0.0) {
        c -= f->per_strain * strain * cos(twice);
        s -= f->per_strain * strain * sin(twice);
    }
    double axis = 0.5 * atan2(s, c) * 180.0 / PI;
    return (smear){ sqrt(hypot(c, s)), axis < 0.0 ? axis + 180.0 : axis, hypot(c, s) / u };
}

/* Plane layers, exactly: any number, absorbing or not, uniaxial with the axis along the normal (Lekner 1991,
 * from memory), s and p, any angle. X = G/F is carried from the substrate up; per film E = exp(2 i delta),
 * |E| <= 1, is the only exponential, so a millimetre of absorber is as safe as a nanometre of air. For a
 * handful of films; the many thin slabs of a texture go through graded.c. */
#include "optics/multilayer.h"

#include <math.h>

#include "base/quantity.h"
#include "optics/lanes.h"

double complex film_a(const film *f, double s2, int p_polarized) {
    return p_polarized ? 1.0 - s2 / f->axis : f->in_plane - s2;
}
double complex film_b(const film *f, int p_polarized) { return p_polarized ? f->in_plane : 1.0; }

/* The wave that decays (or runs) downwards: Im >= 0 on the principal branch because Im a b >= 0. A zero
 * imaginary part may carry either sign, and the root of a negative real number must then still point to +i.
 */
static double complex down_root(double complex q) {
    double complex k = csqrt(q);
    return cimag(k) < 0.0 ? -k : k;
}

double complex film_half_space(const film *f, double s2, int p_polarized) {
    double complex a = film_a(f, s2, p_polarized), b = film_b(f, p_polarized);
    return down_root(a * b) / b;
}

/* cos and sin/kappa of a film times exp(i delta), both finite for any thickness. */
static void film_wave(double complex a, double complex b, double k0_d, double complex *cosine,
                      double complex *sine, double complex *down) {
    double complex kappa = down_root(a * b), i_delta = complex_of(0.0, 1.0) * kappa * k0_d;
    *down = cexp(i_delta);
    double complex twice = *down * *down;
    *cosine = 0.5 * (1.0 + twice);
    if (cabs(i_delta) < 1e-3) { /* sin(x)/x by its series: also right at grazing, kappa = 0 */
        double complex d2 = -i_delta * i_delta;
        *sine = *down * k0_d * (1.0 - d2 / 6.0 * (1.0 - d2 / 20.0));
    } else
        *sine = complex_of(0.0, 0.5) * (1.0 - twice) / kappa;
}

powers multilayer(double wavelength_nm, double s2, int p, const film *ambient, const film *films, size_t n,
                  const film *substrate, double complex *field) {
    const double complex im = complex_of(0.0, 1.0);
    double k0 = 2.0 * PI / wavelength_nm;
    double complex top = film_half_space(ambient, s2, p), X = film_half_space(substrate, s2, p), end = X;
    double complex passed = 1.0; /* F at the substrate over F at the current interface */
    if (field) field[2 * n + 1] = X;
    for (size_t j = n; j-- > 0;) {
        double complex a = film_a(&films[j], s2, p), b = film_b(&films[j], p), c, s, down;
        film_wave(a, b, k0 * films[j].thickness_nm, &c, &s, &down);
        double complex share = c - im * b * s * X; /* F(top) exp(i delta) / F(bottom) */
        X = (c * X - im * a * s) / share;
        passed *= down / share;
        if (field) {
            field[2 * j] = down / share; /* F(bottom)/F(top) for now */
            field[2 * j + 1] = X;
        }
    }
    double complex r = (top - X) / (top + X), entered = 1.0 + r;
    if (field) {
        double complex F = entered;
        for (size_t j = 0; j <= n; j++) {
            double complex next = j < n ? F * field[2 * j] : 0.0;
            field[2 * j] = F;
            field[2 * j + 1] *= F;
            F = next;
        }
    }
    double through = cabs(entered * passed);
    return (powers){ .R = creal(r) * creal(r) + cimag(r) * cimag(r),
                     .T = creal(top) > 0.0 ? creal(end) * through * through / creal(top) : 0.0 };
}

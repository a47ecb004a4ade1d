/* Reflectance of a graded, possibly uniaxial and absorbing layer, slab by slab from the substrate up.
 * Method: the fourth-order Magnus step with two Gauss points (Iserles, Norsett 1999; from memory) for
 *   (F, G)' = i k0 [[0, b], [a, 0]] (F, G),
 * written as a fractional linear map of X = G/F, so nothing grows in absorbing or evanescent slabs. tan of
 * the phase enters by its diagonal rational approximation x (1 - x^2/15)/(1 - 2 x^2/5), exact to x^7, which
 * keeps |r| <= 1 and needs neither a root nor an exponential per slab. The error falls as the fourth power of
 * the slab thickness in even powers, so one Richardson step by the caller gives the sixth. Thick homogeneous
 * films: multilayer.c. */
#include "optics/graded.h"

static const double COMMUTATOR = 0.14433756729740643; /* sqrt(3)/12 */

/* The map of one slab for one wavelength. a, b: means over the Gauss points; w = b1 a2 - b2 a1 (1 above 2);
 * k = k0 x thickness. Written out in real numbers for the vectoriser. */
static inline void slab_map(double k, double ar, double ai, double br, double bi, double wr, double wi,
                            double *xr, double *xi) {
    double cr = COMMUTATOR * k * k * wr, ci = COMMUTATOR * k * k * wi;
    double dr = k * k * (ar * br - ai * bi) - (cr * cr - ci * ci); /* phase squared */
    double di = k * k * (ar * bi + ai * br) - 2.0 * cr * ci;
    double nr = 1.0 - dr / 15.0, ni = -di / 15.0;
    double qr = 1.0 - 0.4 * dr, qi = -0.4 * di;
    double tr = nr * cr - ni * ci, ti = nr * ci + ni * cr;
    double ur = k * (nr * ar - ni * ai), ui = k * (nr * ai + ni * ar); /* k n a, k n b */
    double vr = k * (nr * br - ni * bi), vi = k * (nr * bi + ni * br);
    /* X = ((q + t) X - i u)/((q - t) - i v X) */
    double x = *xr, y = *xi;
    double topr = (qr + tr) * x - (qi + ti) * y + ui, topi = (qr + tr) * y + (qi + ti) * x - ur;
    double botr = qr - tr + (vr * y + vi * x), boti = qi - ti - (vr * x - vi * y);
    double size = 1.0 / (botr * botr + boti * boti);
    *xr = (topr * botr + topi * boti) * size;
    *xi = (topi * botr - topr * boti) * size;
}

HOT static void walk_s(const lanes *restrict e1, const lanes *restrict e2, const double *restrict s2,
                       const double *restrict k0, double d, size_t n, lanes *restrict x) {
    for (size_t i = 0; i < n; i++)
        slab_map(k0[i] * d, 0.5 * (e1->re[i] + e2->re[i]) - s2[i], 0.5 * (e1->im[i] + e2->im[i]), 1.0, 0.0,
                 e2->re[i] - e1->re[i], e2->im[i] - e1->im[i], &x->re[i], &x->im[i]);
}

/* 1 - s2/eps */
static inline void axis_term(double s2, double er, double ei, double *ar, double *ai) {
    double q = s2 / (er * er + ei * ei);
    *ar = 1.0 - er * q;
    *ai = ei * q;
}

HOT static void walk_p(const lanes *restrict e1, const lanes *restrict e2, const lanes *restrict z1,
                       const lanes *restrict z2, const double *restrict s2, const double *restrict k0,
                       double d, size_t n, lanes *restrict x) {
    for (size_t i = 0; i < n; i++) {
        double a1r, a1i, a2r, a2i;
        axis_term(s2[i], z1->re[i], z1->im[i], &a1r, &a1i);
        axis_term(s2[i], z2->re[i], z2->im[i], &a2r, &a2i);
        double wr = e1->re[i] * a2r - e1->im[i] * a2i - (e2->re[i] * a1r - e2->im[i] * a1i);
        double wi = e1->re[i] * a2i + e1->im[i] * a2r - (e2->re[i] * a1i + e2->im[i] * a1r);
        slab_map(k0[i] * d, 0.5 * (a1r + a2r), 0.5 * (a1i + a2i), 0.5 * (e1->re[i] + e2->re[i]),
                 0.5 * (e1->im[i] + e2->im[i]), wr, wi, &x->re[i], &x->im[i]);
    }
}

HOT static void reflect(const lanes *restrict a, const lanes *restrict x, size_t n, double *restrict R) {
    for (size_t i = 0; i < n; i++) {
        double nr = a->re[i] - x->re[i], ni = a->im[i] - x->im[i];
        double dr = a->re[i] + x->re[i], di = a->im[i] + x->im[i];
        R[i] = (nr * nr + ni * ni) / (dr * dr + di * di);
    }
}

void graded_walk(const slabs *s, const mixer *m, const double *k0, channel *c, size_t n_channels) {
    lanes plane[2], axis[2];
    for (size_t j = 0; j < n_channels; j++) c[j].x = c[j].start;
    for (size_t k = s->n; k-- > 0;) {
        const double *share = s->share + k * 2 * s->kinds;
        mixing_at(m, share + s->kinds, k + 1 < s->n ? &plane[0] : NULL, &plane[1], &axis[1]); /* upwards */
        mixing_at(m, share, &plane[1], &plane[0], &axis[0]);
        for (size_t j = 0; j < n_channels; j++)
            if (c[j].p_polarized)
                walk_p(&plane[0], &plane[1], &axis[0], &axis[1], c[j].s2, k0, s->thickness_nm[k], m->n,
                       &c[j].x);
            else
                walk_s(&plane[0], &plane[1], c[j].s2, k0, s->thickness_nm[k], m->n, &c[j].x);
    }
    for (size_t j = 0; j < n_channels; j++) reflect(&c[j].ambient, &c[j].x, m->n, c[j].R[0]);
}

/* Mixing rules for the permittivity.
 *   Bruggeman (1935) Ann. Phys. 416, 636, in 2 and 3 dimensions: all phases alike. Two phases: a quadratic;
 * with g = sqrt(e1) sqrt(e2) and x = e/g its roots multiply to -1 (2-D) or -1/2 (3-D), so exactly one has Re
 * x > 0, the physical one, also without absorption. More phases: bruggeman.c. Maxwell Garnett (1904) Phil.
 * Trans. A 203, 385: inclusions in a host (the solid in the ambient, or for pores everything else in the
 * solid). Looyenga (1965) Physica 31, 401: mean of the cube roots. Volume: plain mean (upper Wiener bound).
 * Columns along the normal are mixed by a two-dimensional rule in the plane and by the plain mean along the
 * axis, which is exact there. No size effects: features are taken as small against the wavelength. */
#include "optics/mixing.h"

#include <assert.h>

#include "optics/bruggeman.h"

int mixing_uniaxial(mixing rule) { return rule == MIX_BRUGGEMAN_2D || rule == MIX_MAXWELL_GARNETT_2D; }

static int mixing_dimensions(mixing rule) {
    return rule == MIX_BRUGGEMAN_2D || rule == MIX_MAXWELL_GARNETT_2D ? 2 : 3;
}

static double complex cube_root(double complex z) {
    return complex_of(cbrt(cabs(z)), 0.0) * cexp(complex_of(0.0, carg(z) / 3.0));
}

/* Two phases: the wavelength-dependent numbers of each formula. */
static void prepare_pair(mixer *m, size_t i) {
    double complex air = lane_get(&m->eps[0], i), solid = lane_get(&m->eps[1], i);
    double complex root_air = csqrt(air), root_solid = csqrt(solid);
    double complex host = m->pores ? solid : air, inside = m->pores ? air : solid;
    switch (m->rule) {
    case MIX_BRUGGEMAN_2D: /* x = beta + sqrt(beta^2 + 1), beta = (2 f - 1) c */
        lane_set(&m->a, i, root_air * root_solid);
        lane_set(&m->c, i, 0.5 * (root_solid / root_air - root_air / root_solid));
        break;
    case MIX_BRUGGEMAN_3D: /* x = (h + sqrt(h^2 + 8))/4, h = (3 f - 1) b + (2 - 3 f) c */
        lane_set(&m->a, i, root_air * root_solid);
        lane_set(&m->b, i, root_solid / root_air);
        lane_set(&m->c, i, root_air / root_solid);
        break;
    case MIX_MAXWELL_GARNETT_2D:
    case MIX_MAXWELL_GARNETT_3D: /* e = a (c + (d - 1) f b)/(c - f b) */
        lane_set(&m->a, i, host);
        lane_set(&m->b, i, inside - host);
        lane_set(&m->c, i, inside + (mixing_dimensions(m->rule) - 1) * host);
        break;
    case MIX_LOOYENGA:
        lane_set(&m->a, i, cube_root(air));
        lane_set(&m->b, i, cube_root(solid));
        break;
    case MIX_VOLUME:
        break;
    }
}

/* Many phases: what a phase adds in proportion to its share. */
static double complex phase_part(const mixer *m, size_t p, size_t i) {
    double complex e = lane_get(&m->eps[p], i), host = lane_get(&m->eps[m->pores ? 1 : 0], i);
    switch (m->rule) {
    case MIX_LOOYENGA:
        return cube_root(e);
    case MIX_MAXWELL_GARNETT_2D:
    case MIX_MAXWELL_GARNETT_3D:
        return (e - host) / (e + (mixing_dimensions(m->rule) - 1) * host);
    default:
        return clog(e);
    }
}

void mixing_prepare(mixer *m, mixing rule, int pores, size_t phases, size_t n) {
    assert(phases >= 2 && phases <= MIX_PHASES && n <= LANES);
    m->rule = rule;
    m->pores = pores;
    m->phases = phases;
    m->n = n;
    for (size_t i = 0; i < n; i++) {
        prepare_pair(m, i);
        for (size_t p = 0; p < phases && phases > 2; p++) lane_set(&m->part[p], i, phase_part(m, p, i));
    }
}

/* Square root with Re >= 0, without branches, so that a loop of it is vectorised: the choice is a product
 * with an exact 0 or 1. Neither part suffers cancellation. */
static inline void root_of(double zr, double zi, double *sr, double *si) {
    double size = sqrt(zr * zr + zi * zi);
    double big = sqrt(0.5 * (size + fabs(zr)));
    double small = 0.5 * fabs(zi) / (big + 1e-300); /* z = 0 gives 0, not 0/0 */
    double right = zr >= 0.0 ? 1.0 : 0.0, left = 1.0 - right;
    *sr = right * big + left * small;
    *si = copysign(right * small + left * big, zi);
}

/* e = g x with x = (beta + root)/over, or the same number without cancellation where Re beta < 0,
 * x = product/((root - beta) over). One choice for all lanes: for a solid denser than the ambient the sign of
 * Re beta follows from the share, and else the contrast is small. */
static inline void sum_upper(double gr, double gi, double br, double bi, double sr, double si, double over,
                             double *er, double *ei) {
    double xr = (br + sr) * over, xi = (bi + si) * over;
    *er = gr * xr - gi * xi;
    *ei = gr * xi + gi * xr;
}

static inline void sum_lower(double gr, double gi, double br, double bi, double sr, double si, double over,
                             double *er, double *ei) {
    double yr = sr - br, yi = si - bi, q = over / (yr * yr + yi * yi);
    *er = (gr * yr + gi * yi) * q;
    *ei = (gi * yr - gr * yi) * q;
}

HOT static void pair_bruggeman_2d(const mixer *m, double f, lanes *restrict out) {
    const double t = 2.0 * f - 1.0;
    lanes root;
    for (size_t i = 0; i < m->n; i++) {
        double br = t * m->c.re[i], bi = t * m->c.im[i];
        root_of(br * br - bi * bi + 1.0, 2.0 * br * bi, &root.re[i], &root.im[i]);
    }
    if (t < 0.0)
        for (size_t i = 0; i < m->n; i++)
            sum_lower(m->a.re[i], m->a.im[i], t * m->c.re[i], t * m->c.im[i], root.re[i], root.im[i], 1.0,
                      &out->re[i], &out->im[i]);
    else
        for (size_t i = 0; i < m->n; i++)
            sum_upper(m->a.re[i], m->a.im[i], t * m->c.re[i], t * m->c.im[i], root.re[i], root.im[i], 1.0,
                      &out->re[i], &out->im[i]);
}

HOT static void pair_bruggeman_3d(const mixer *m, double f, lanes *restrict out) {
    const double t = 3.0 * f - 1.0, u = 2.0 - 3.0 * f;
    lanes h, root;
    for (size_t i = 0; i < m->n; i++) {
        h.re[i] = t * m->b.re[i] + u * m->c.re[i];
        h.im[i] = t * m->b.im[i] + u * m->c.im[i];
        root_of(h.re[i] * h.re[i] - h.im[i] * h.im[i] + 8.0, 2.0 * h.re[i] * h.im[i], &root.re[i],
                &root.im[i]);
    }
    if (t < 0.0)
        for (size_t i = 0; i < m->n; i++)
            sum_lower(m->a.re[i], m->a.im[i], h.re[i], h.im[i], root.re[i], root.im[i], 2.0, &out->re[i],
                      &out->im[i]);
    else
        for (size_t i = 0; i < m->n; i++)
            sum_upper(m->a.re[i], m->a.im[i], h.re[i], h.im[i], root.re[i], root.im[i], 0.25, &out->re[i],
                      &out->im[i]);
}

HOT static void pair_maxwell_garnett(const mixer *m, double f, double more, lanes *out) {
    for (size_t i = 0; i < m->n; i++) {
        double nr = m->c.re[i] + more * f * m->b.re[i], ni = m->c.im[i] + more * f * m->b.im[i];
        double dr = m->c.re[i] - f * m->b.re[i], di = m->c.im[i] - f * m->b.im[i];
        double q = 1.0 / (dr * dr + di * di);
        double xr = (nr * dr + ni * di) * q, xi = (ni * dr - nr * di) * q;
        out->re[i] = m->a.re[i] * xr - m->a.im[i] * xi;
        out->im[i] = m->a.re[i] * xi + m->a.im[i] * xr;
    }
}

HOT static void pair_looyenga(const mixer *m, double f, lanes *out) {
    for (size_t i = 0; i < m->n; i++) {
        double cr = (1.0 - f) * m->a.re[i] + f * m->b.re[i], ci = (1.0 - f) * m->a.im[i] + f * m->b.im[i];
        double qr = cr * cr - ci * ci, qi = 2.0 * cr * ci;
        out->re[i] = qr * cr - qi * ci;
        out->im[i] = qr * ci + qi * cr;
    }
}

HOT static void plain_mean(const mixer *m, double ambient, const double *share, lanes *out) {
    for (size_t i = 0; i < m->n; i++) {
        out->re[i] = ambient * m->eps[0].re[i];
        out->im[i] = ambient * m->eps[0].im[i];
    }
    for (size_t p = 1; p < m->phases; p++)
        for (size_t i = 0; i < m->n; i++) {
            out->re[i] += share[p - 1] * m->eps[p].re[i];
            out->im[i] += share[p - 1] * m->eps[p].im[i];
        }
}

/* Sum of share times part over the phases. */
HOT static void sum_parts(const mixer *m, const double *f, lanes *restrict out) {
    for (size_t i = 0; i < m->n; i++) out->re[i] = out->im[i] = 0.0;
    for (size_t p = 0; p < m->phases; p++)
        for (size_t i = 0; i < m->n; i++) {
            out->re[i] += f[p] * m->part[p].re[i];
            out->im[i] += f[p] * m->part[p].im[i];
        }
}

/* Host e_h and summed polarisability s: e = e_h (1 + (d - 1) s)/(1 - s). */
HOT static void many_maxwell_garnett(const mixer *m, double more, lanes *restrict out) {
    const lanes *host = &m->eps[m->pores ? 1 : 0];
    for (size_t i = 0; i < m->n; i++) {
        double nr = 1.0 + more * out->re[i], ni = more * out->im[i], dr = 1.0 - out->re[i], di = -out->im[i];
        double q = 1.0 / (dr * dr + di * di), xr = (nr * dr + ni * di) * q, xi = (ni * dr - nr * di) * q;
        out->re[i] = host->re[i] * xr - host->im[i] * xi;
        out->im[i] = host->re[i] * xi + host->im[i] * xr;
    }
}

/* f[phases] shares of all phases. */
static void mix_many(const mixer *m, const double *f, const lanes *near, lanes *out) {
    int dimensions = mixing_dimensions(m->rule);
    if (m->rule == MIX_MAXWELL_GARNETT_2D || m->rule == MIX_MAXWELL_GARNETT_3D) {
        sum_parts(m, f, out);
        many_maxwell_garnett(m, dimensions - 1, out);
    } else if (m->rule == MIX_LOOYENGA) {
        sum_parts(m, f, out);
        for (size_t i = 0; i < m->n; i++) {
            double complex c = lane_get(out, i);
            lane_set(out, i, c * c * c);
        }
    } else {
        if (near)
            *out = *near;
        else { /* the geometric mean lies in the cone of the phases */
            sum_parts(m, f, out);
            for (size_t i = 0; i < m->n; i++) lane_set(out, i, cexp(lane_get(out, i)));
        }
        bruggeman_solve(m->eps, f, m->phases, dimensions, m->n, out);
    }
}

void mixing_at(const mixer *m, const double *share, const lanes *near, lanes *in_plane, lanes *axis) {
    double f[MIX_PHASES], covered = 0.0;
    int coated = 0;
    for (size_t p = 1; p < m->phases; p++) {
        f[p] = share[p - 1];
        covered += share[p - 1];
        coated = coated || (p > 1 && f[p] > 0.0);
    }
    f[0] = fmax(0.0, 1.0 - covered);
    int pure = !coated && (share[0] <= 0.0 || share[0] >= 1.0); /* exactly the phase, no rounding of a root */
    if (m->rule == MIX_VOLUME || pure)
        plain_mean(m, f[0], share, in_plane);
    else if (coated)
        mix_many(m, f, near, in_plane);
    else if (m->rule == MIX_BRUGGEMAN_2D)
        pair_bruggeman_2d(m, share[0], in_plane);
    else if (m->rule == MIX_BRUGGEMAN_3D)
        pair_bruggeman_3d(m, share[0], in_plane);
    else if (m->rule == MIX_LOOYENGA)
        pair_looyenga(m, share[0], in_plane);
    else
        pair_maxwell_garnett(m, m->pores ? f[0] : share[0], mixing_dimensions(m->rule) - 1, in_plane);
    if (mixing_uniaxial(m->rule))
        plain_mean(m, f[0], share, axis);
    else
        *axis = *in_plane;
}

/* spacing_acf: the first ring of the autocorrelation of the curvature map K (sigma 0.12 d).
 * 1. The first ring of the radial mean, searched from 0.35 d; vertex of a cubic on the mean over circles of
 *    the 2-D map, unsmoothed.
 * 2. Stretch: an area-preserving stretch by exp(2 e) along theta turns C0(r) into C0(r (1 - e cos 2(phi -
 *    theta))) to first order, so e follows from the second angular harmonic of C projected on -r C0'(r),
 *    iterated with C sampled in the straightened frame (Gauss-Newton). The steep part of the self term takes
 *    part: it halves the scatter, and what stretches a picture stretches its features too. A stretched
 *    texture's ring is then read off circles of the straightened frame.
 * 3. Where the first shell shows six distinct peaks (ordered layers), their mean distance counts instead:
 *    bright rims raise the ground between the peaks and push the radial mean out by 1 to 5 %, and a radial
 *    mean of a lattice is 1 to 3 % short. The ellipse through the peaks is the stretch.
 * Renders of 19 to 110 px spacing, three shapes, 75 to 2500 features: within 2.5 % of the hexagonal spacing
 * on jittered lattices, -3 to +4 % on relaxed and -7 to +6 % on hard-core patterns, +4 to +16 % on weakly
 * ordered ones; stretch of 1.15 within 0.02 (300 features: 0.06) and 4 degrees.
 * Method uncertainty: measure.c. */
#include <math.h>

#include "base/quantity.h"
#include "metrics/linear.h"
#include "metrics/logcurve.h"
#include "metrics/spacing.h"

/* ---- the radial ring ---- */

static int is_maximum(const log_curve *s, size_t i) {
    return i > 0 && i + 1 < s->n && s->y[i] > s->y[i - 1] && s->y[i] >= s->y[i + 1];
}

/* Place of the ring to within the width of its smoothing; 0 none. The first maximum behind the trough that
 * is at least half as high as the highest: spheres with bright rims have a smaller one at rim to rim, inside
 * the true ring. */
static double find_ring(const curve *c, double d) {
    const double near = 0.35, far = 1.8, trough_before = 0.95, least = 0.5;
    log_curve s;
    log_curve_make(c, near * d, far * d, 0.04, &s);
    size_t low = 0;
    for (size_t i = 0; i < s.n && s.x[i] < trough_before * d; i++)
        if (s.y[i] < s.y[low]) low = i;
    double top = -HUGE_VAL;
    for (size_t i = low; i < s.n; i++)
        if (is_maximum(&s, i)) top = fmax(top, s.y[i]);
    for (size_t i = low; i < s.n; i++)
        if (is_maximum(&s, i) && s.y[i] >= least * top) return s.x[i];
    return 0.0;
}

/* ---- stretch ---- */

enum { ANGLES = 90 };

/* Symmetric stretch matrix exp(E), E = [e1 e2; e2 -e1]: area-preserving. */
typedef struct {
    double xx, xy, yy;
} shear;

static shear shear_make(double e1, double e2) {
    double e = sqrt(e1 * e1 + e2 * e2), q = e > 0.0 ? sinh(e) / e : 1.0, c = cosh(e);
    return (shear){ c + q * e1, q * e2, c - q * e1 };
}

static double straight_at(const acf2d *a, shear m, double r, double phi) {
    double x = r * cos(phi), y = r * sin(phi);
    return acf2d_at(a, m.xx * x + m.xy * y, m.xy * x + m.yy * y);
}

/* Mean and second harmonic of C on the circle of radius r in the straightened frame. NAN off the map. */
static void circle(const acf2d *a, shear m, double r, double *mean, double *cos2, double *sin2) {
    double s0 = 0.0, sc = 0.0, ss = 0.0;
    for (int i = 0; i < ANGLES; i++) {
        double phi = PI * (i + 0.5) / ANGLES, c = straight_at(a, m, r, phi);
        s0 += c;
        sc += c * cos(2.0 * phi);
        ss += c * sin(2.0 * phi);
    }
    *mean = s0 / ANGLES;
    *cos2 = 2.0 * sc / ANGLES;
    *sin2 = 2.0 * ss / ANGLES;
}

enum { RADII = 64 };

static int stretch_step(const acf2d *a, double r0, double r1, double *e1, double *e2) {
    double mean[RADII], c2[RADII], s2[RADII], step = (r1 - r0) / (RADII - 1), n1 = 0.0, n2 = 0.0, norm = 0.0;
    shear m = shear_make(*e1, *e2);
    for (int i = 0; i < RADII; i++) circle(a, m, r0 + i * step, &mean[i], &c2[i], &s2[i]);
    for (int i = 1; i + 1 < RADII; i++) {
        double r = r0 + i * step, g = -r * (mean[i + 1] - mean[i - 1]) / (2.0 * step);
        n1 += r * g * c2[i];
        n2 += r * g * s2[i];
        norm += r * g * g;
    }
    if (!(norm > 0.0)) return 0;
    *e1 += n1 / norm;
    *e2 += n2 / norm;
    return isfinite(*e1) && isfinite(*e2) && fabs(*e1) < 1.0 && fabs(*e2) < 1.0;
}

static int stretch_fit(const acf2d *a, double ring_px, double *e1, double *e2) {
    *e1 = *e2 = 0.0;
    for (int i = 0; i < 8; i++)
        if (!stretch_step(a, 0.25 * ring_px, 1.35 * ring_px, e1, e2)) return 0;
    return 1;
}

static void stretch_report(double e1, double e2, size_t n, ring *out) {
    double e = sqrt(e1 * e1 + e2 * e2),
           u = n ? 0.45 / sqrt((double)n) : MISSING;  /* rms on unstretched textures */
    double angle = -0.5 * atan2(e2, e1) * 180.0 / PI; /* y up */
    if (angle < 0.0) angle += 180.0;
    out->stretch = (measured){ exp(2.0 * e), u * exp(2.0 * e), 0.0, n };
    /* Half the angle of a vector of length 2e with components of sd u. */
    out->stretch_angle_deg = (measured){ angle, fmin(52.0, 0.5 * u / (2.0 * e) * 180.0 / PI), 0.0, n };
}

/* Maximum of the mean over circles near r0 in the straightened frame. Circles on the interpolated map,
 * because rings of whole pixels jump from one lattice point to the next where the shells of an ordered layer
 * are sharp. */
static double ring_vertex(const acf2d *a, shear m, double r0, double *height) {
    enum { STEPS = 32 };
    const double width = 0.13;
    curve_point p[STEPS + 1] = { { 0.0, 0.0 } };
    curve c = { .points = p, .n = STEPS + 1 };
    double r = r0, c2, s2;
    for (int round = 0; round < 3; round++) {
        for (int i = 0; i < STEPS; i++) {
            double at = r * (1.0 + width * (2.0 * i / (STEPS - 1) - 1.0)), mean;
            circle(a, m, at, &mean, &c2, &s2);
            if (!isfinite(mean)) return r;
            p[i + 1] = (curve_point){ at, mean };
        }
        r = curve_vertex(&c, NULL, r, width * 1.001, +1, height);
    }
    return r;
}

/* ---- the six peaks ---- */

typedef struct {
    double x, y, height;
} peak;
enum { MAX_PEAKS = 12 };

/* Least-squares paraboloid over the disc of radius w about (x, y): its vertex, kept within the disc. */
static void peak_refine(const acf2d *a, double w, peak *p) {
    enum { SIDE = 4 };
    double s0 = 0.0, s2 = 0.0, s4 = 0.0, s22 = 0.0, f0 = 0.0, fx = 0.0, fy = 0.0, fxx = 0.0, fyy = 0.0,
           fxy = 0.0;
    for (int j = -SIDE; j <= SIDE; j++)
        for (int i = -SIDE; i <= SIDE; i++) {
            if (i * i + j * j > SIDE * SIDE) continue;
            double x = (double)i / SIDE, y = (double)j / SIDE, f = acf2d_at(a, p->x + w * x, p->y + w * y);
            s0 += 1.0;
            s2 += x * x;
            s4 += x * x * x * x;
            s22 += x * x * y * y;
            f0 += f;
            fx += x * f;
            fy += y * f;
            fxx += x * x * f;
            fyy += y * y * f;
            fxy += x * y * f;
        }
    /* f = a + b x + c y + d x^2 + g y^2 + h x y; the disc is symmetric, so the odd terms separate. */
    double b = fx / s2, c = fy / s2, h = fxy / s22, sum = fxx + fyy, diff = (fxx - fyy) / (s4 - s22);
    double both = (sum - 2.0 * s2 / s0 * f0) / (s4 + s22 - 2.0 * s2 * s2 / s0); /* d + g */
    double d = 0.5 * (both + diff), g = 0.5 * (both - diff), det = 4.0 * d * g - h * h;
    if (!(det > 0.0 && both < 0.0)) return;
    double x = (h * c - 2.0 * g * b) / det, y = (h * b - 2.0 * d * c) / det;
    if (!(x * x + y * y <= 1.0)) return;
    p->height = (f0 - s2 * both) / s0 + 0.5 * (b * x + c * y);
    p->x += w * x;
    p->y += w * y;
}

/* Local maxima of the upper half plane in the ring, strongest first. */
static size_t find_peaks(const acf2d *a, double r0, double r1, double reach, peak *out) {
    size_t n = 0;
    long far = (long)ceil(r1), near = (long)fmax(1.0, floor(reach));
    for (long y = 0; y <= far; y++)
        for (long x = -far; x <= far; x++) {
            double r = sqrt((double)(x * x + y * y));
            if (r < r0 || r > r1 || (y == 0 && x < 0)) continue;
            double c = acf2d_at(a, (double)x, (double)y);
            int highest = isfinite(c);
            for (long j = -near; j <= near && highest; j++)
                for (long i = -near; i <= near && highest; i++)
                    highest = (!i && !j) || !(acf2d_at(a, (double)(x + i), (double)(y + j)) > c);
            if (!highest) continue;
            peak p = { (double)x, (double)y, c };
            size_t at = n < MAX_PEAKS ? n++ : MAX_PEAKS - 1;
            for (; at > 0 && out[at - 1].height < c; at--) out[at] = out[at - 1];
            out[at] = p;
        }
    return n;
}

static double angle_of(const peak *p) {
    double t = atan2(p->y, p->x);
    return t < 0.0 ? t + PI : t;
}

/* Three peaks about 60 degrees apart, alike in height, clear of the next one and of the ground between them.
 * */
static int distinct(const acf2d *a, const peak *p, size_t n, double se) {
    /* Ordered layers: peaks of 0.3 to 0.8 over a ground of -0.3 to -0.08. The three highest bumps on the
     * ring of a disordered layer of 75 features reach 0.3, but the ground between them stays above 0. */
    const double least = 0.5, ground = 0.0, gap_deg = 20.0;
    if (n < 3 || p[2].height < least * p[0].height || p[2].height < 6.0 * se) return 0;
    if (n > 3 && p[3].height > 0.6 * p[2].height) return 0;
    double t[3] = { angle_of(&p[0]), angle_of(&p[1]), angle_of(&p[2]) };
    for (int i = 0; i < 3; i++)
        for (int j = i + 1; j < 3; j++)
            if (t[j] < t[i]) {
                double swap = t[i];
                t[i] = t[j];
                t[j] = swap;
            }
    double r = 0.0, height = 0.0, valley = 0.0;
    for (int i = 0; i < 3; i++) {
        r += hypot(p[i].x, p[i].y) / 3.0;
        height += p[i].height / 3.0;
    }
    for (int i = 0; i < 3; i++) {
        double next = i < 2 ? t[i + 1] : t[0] + PI, mid = 0.5 * (t[i] + next);
        if (fabs(next - t[i] - PI / 3.0) > gap_deg * PI / 180.0) return 0;
        valley += acf2d_at(a, r * cos(mid), r * sin(mid)) / 3.0;
    }
    return valley < ground * height - 2.0 * se;
}

/* q1 x^2 + q2 x y + q3 y^2 = 1 through three points; 0 when that is no ellipse. */
static int ellipse_through(const peak *p, double *q) {
    double m[3][4];
    for (int i = 0; i < 3; i++) {
        m[i][0] = p[i].x * p[i].x;
        m[i][1] = p[i].x * p[i].y;
        m[i][2] = p[i].y * p[i].y;
        m[i][3] = 1.0;
    }
    if (!linear_solve(&m[0][0], 3, 0.0, q)) return 0;
    return q[0] > 0.0 && 4.0 * q[0] * q[2] - q[1] * q[1] > 0.0;
}

/* Fills spacing and stretch from the peaks; 0 when they are not distinct. */
static int from_peaks(const acf2d *a, double ring_px, double se, size_t n_features, ring *out) {
    peak p[MAX_PEAKS];
    double q[3], reach = 0.22 * ring_px;
    size_t n = find_peaks(a, 0.70 * ring_px, 1.40 * ring_px, reach, p);
    for (size_t i = 0; i < n && i < 3; i++) peak_refine(a, fmax(1.5, 0.10 * ring_px), &p[i]);
    if (!distinct(a, p, n, se) || !ellipse_through(p, q)) return 0;
    double mean = 0.0;
    for (int i = 0; i < 3; i++) mean += hypot(p[i].x, p[i].y) / 3.0;
    /* Axes: eigenvalues of [q1 q2/2; q2/2 q3] are 1 / axis^2. */
    double half = 0.5 * (q[0] + q[2]), off = hypot(0.5 * (q[0] - q[2]), 0.5 * q[1]);
    double e = 0.25 * log((half + off) / (half - off)); /* stretch = exp(2 e) */
    double twice = atan2(-q[1], -(q[0] - q[2]));        /* the small eigenvalue is the long axis */
    stretch_report(e * cos(twice), e * sin(twice), n_features, out);
    out->spacing.value = mean;
    out->from_peaks = 1;
    return 1;
}

status spacing_ring(const acf2d *k_acf, const curve *k_radial, double d_px, size_t n_features, ring *out,
                    error *e) {
    const double least_z = 3.0;
    ring r = { 0 };
    measured none = { MISSING, MISSING, 0.0, n_features };
    r.spacing = r.stretch = r.stretch_angle_deg = none;
    double rough = d_px > 0.0 ? find_ring(k_radial, d_px) : 0.0;
    if (!(rough > 0.0))
        return fail(e, ST_NO_RESULT, "the autocorrelation has no ring between %.3g and %.3g px", 0.35 * d_px,
                    1.8 * d_px);
    double se = acf_standard_error(k_radial, rough, k_acf->nx, k_acf->ny);
    r.ring_height = curve_at(k_radial, rough);
    r.radial_ring_px = ring_vertex(k_acf, shear_make(0.0, 0.0), rough, &r.ring_height);
    r.ring_z = r.ring_height / se;
    if (r.ring_z < least_z)
        return fail(
            e, ST_NO_RESULT,
            "the ring of the autocorrelation at %.3g px is %.1f standard errors high, %.0f are asked for",
            rough, r.ring_z, least_z);
    r.spacing.value = r.radial_ring_px;
    double e1, e2, height;
    if (stretch_fit(k_acf, r.radial_ring_px, &e1, &e2)) {
        stretch_report(e1, e2, n_features, &r);
        if (r.stretch.value > 1.03 && r.stretch.value - 1.0 > 3.0 * r.stretch.u_sampling)
            r.spacing.value = ring_vertex(k_acf, shear_make(e1, e2), r.radial_ring_px, &height);
    }
    from_peaks(k_acf, r.spacing.value, se, n_features, &r);
    if (n_features) r.spacing.u_sampling = 0.17 / sqrt((double)n_features) * r.spacing.value;
    *out = r;
    return ST_OK;
}

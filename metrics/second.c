/* A second population of another spacing.
 * The first ring of the curvature map stands at its own scale: with sigma 0.12 D it lies at D when features
 * of the spacing D are there, and follows neither D nor a harmonic when they are not. So D runs over a
 * ladder, and every D whose map has its FIRST significant ring within 9 % of D is a spacing of the picture.
 * A single population has one such D: at the second shell of an ordered layer (1.8 to 2 spacings) the first
 * shell is still the higher ring, and on finer maps the ring stays where it was. Two populations 24 and 45
 * to 90 px apart, added, merged or side by side, give both. The maps need not be made: the autocorrelation
 * of K at sigma is the Hankel transform of the radial PSD times (2 pi k sigma)^4 exp(-(2 pi k sigma)^2). Not
 * seen: spacings nearer than a factor 1.4. */
#include <math.h>

#include "base/quantity.h"
#include "metrics/spacing.h"

enum { RADII = 54, RADII_PER_D = 36 };

/* Autocorrelation of the curvature map of sigma at RADII radii in steps of d / RADII_PER_D, into c (point 0:
 * lag 0). */
static void curvature_acf(const curve *psd, double sigma, double d, curve *c) {
    double norm = 0.0;
    for (int j = 0; j < RADII; j++) c->points[j] = (curve_point){ j * d / RADII_PER_D, 0.0 };
    for (size_t i = 1; i < psd->n; i++) {
        double k = psd->points[i].x, q = 2.0 * PI * k * sigma;
        if (q > 3.7) break; /* weight below 2e-4 of the largest */
        double w = psd->points[i].y * q * q * q * q * exp(-q * q) * k;
        norm += w;
        for (int j = 0; j < RADII; j++) c->points[j].y += w * j0(2.0 * PI * k * c->points[j].x);
    }
    for (int j = 0; j < RADII && norm > 0.0; j++) c->points[j].y /= norm;
    c->n = norm > 0.0 ? RADII : 0;
}

/* First significant ring of the map of d; 0 none. */
static double ring_at(const curve *psd, double d, size_t nx, size_t ny) {
    const double least_height = 0.045, least_z = 5.0, least_trough = 0.08, near = 0.3, far = 1.45,
                 share = 0.5;
    curve_point points[RADII];
    curve c = { .points = points };
    curvature_acf(psd, 0.12 * d, d, &c);
    double top = 0.0, trough = 1.0;
    for (size_t j = 1; j + 1 < c.n; j++) {
        double x = points[j].x / d;
        if (x > near && x < far && points[j].y > points[j - 1].y && points[j].y >= points[j + 1].y)
            top = fmax(top, points[j].y);
    }
    for (size_t j = 1; j + 1 < c.n; j++) {
        double y = points[j].y, x = points[j].x / d, a = points[j - 1].y, b = points[j + 1].y;
        trough = fmin(trough, y);
        if (!(x > near && x < far && y > a && y >= b && y >= share * top)) continue;
        if (y < least_height || -trough < least_trough ||
            y < least_z * acf_standard_error(&c, points[j].x, nx, ny))
            return 0.0;
        return points[j].x + 0.5 * (b - a) / (2.0 * y - a - b) * d / RADII_PER_D;
    }
    return 0.0;
}

/* Spacings at which the ring stands at its own scale, ascending, each the best of its neighbours on the
 * ladder. */
static size_t own_scales(const curve *psd, double from, double to, size_t nx, size_t ny, double *found,
                         size_t room) {
    const double step = 0.08, agree = 0.09, same = 1.25;
    double off_of_last = 0.0;
    size_t n = 0;
    for (double d = from; d < to; d *= exp(step)) {
        double r = ring_at(psd, d, nx, ny), off = fabs(r / d - 1.0);
        if (off > agree) continue;
        int new_one = !n || r > same * found[n - 1];
        if (new_one && n == room) break;
        if (!new_one && off >= off_of_last) continue;
        n += (size_t)new_one;
        found[n - 1] = r;
        off_of_last = off;
    }
    return n;
}

double spacing_second(const curve *psd, double d_px, size_t nx, size_t ny) {
    enum { ROOM = 8 };
    const double apart = 1.4, least_px = 8.0, span = 5.0;
    double scale[ROOM], most = (double)(nx < ny ? nx : ny) / 6.0, second = MISSING;
    if (!(d_px > 0.0)) return MISSING;
    size_t n = own_scales(psd, fmax(least_px, d_px / span), fmin(most, d_px * span), nx, ny, scale, ROOM);
    /* The one farther from d; with two of them d may lie between, when features of both were counted. */
    for (size_t i = 0; i < n; i++) {
        double far = fabs(log(scale[i] / d_px));
        if (far > log(apart) && !(isfinite(second) && far <= fabs(log(second / d_px)))) second = scale[i];
    }
    return second;
}

/* Size distributions of features.
 *
 * Weights undo the border bias: a large feature is cut by the frame more often than a small one, so each one
 * that lies wholly inside counts inversely to its chance of doing so (Miles R.E. 1974, Lantuejoul C. 1980;
 * ISO 13322-1). Quantiles by the midpoint rule (Hazen; type 5 of Hyndman R.J., Fan Y. 1996, Am. Stat.
 * 50:361), generalised to weights. Goodness of the log-normal fit: Anderson T.W., Darling D.A. (1954) J. Am.
 * Stat. Assoc. 49:765. Feret diameters by the convex hull (monotone chain, Andrew A.M. 1979) and all its
 * edges; all numbers are in the caller's unit. */
#include "metrics/sizes.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"

double border_weight(double z1, double z2, double fx, double fy) {
    if (!(fx < z1) || !(fy < z2)) return MISSING;
    return z1 * z2 / ((z1 - fx) * (z2 - fy));
}

typedef struct {
    double x, w;
} weighted;

static int by_x(const void *a, const void *b) {
    double p = ((const weighted *)a)->x, q = ((const weighted *)b)->x;
    return (p > q) - (p < q);
}

/* Linear between the midpoints of the steps; s sorted, all weights above 0. */
static double midpoint_quantile(const weighted *s, size_t n, double total, double p) {
    double before = 0.0, last_c = 0.0;
    for (size_t i = 0; i < n; i++) {
        double c = (before + 0.5 * s[i].w) / total;
        if (c >= p) {
            if (i == 0) return s[0].x;
            return s[i - 1].x + (s[i].x - s[i - 1].x) * (p - last_c) / (c - last_c);
        }
        last_c = c;
        before += s[i].w;
    }
    return s[n - 1].x;
}

status quantiles(const double *x, const double *w, size_t n, const double *p, size_t n_p, double *q,
                 error *e) {
    weighted *s = mem_array(n, sizeof *s);
    if (!s) return NO_MEMORY(e, "the quantiles of sizes");
    size_t m = 0;
    double total = 0.0;
    for (size_t i = 0; i < n; i++)
        if (w[i] > 0.0) {
            s[m++] = (weighted){ x[i], w[i] };
            total += w[i];
        }
    status st = ST_OK;
    if (m) {
        qsort(s, m, sizeof *s, by_x);
        for (size_t i = 0; i < n_p; i++) q[i] = midpoint_quantile(s, m, total, p[i]);
    } else
        st = fail(e, ST_BAD_INPUT,
                  "quantiles of %zu sizes with no weight; expected at least one whole feature", n);
    free(s);
    return st;
}

double weighted_mean(const double *x, const double *w, size_t n) {
    double sw = 0.0, s = 0.0;
    for (size_t i = 0; i < n; i++)
        if (w[i] > 0.0) {
            sw += w[i];
            s += w[i] * x[i];
        }
    return sw > 0.0 ? s / sw : MISSING;
}

double geometric_sd(const double *x, const double *w, size_t n) {
    double sw = 0.0, sw2 = 0.0, s = 0.0, v = 0.0;
    for (size_t i = 0; i < n; i++)
        if (w[i] > 0.0) {
            sw += w[i];
            sw2 += w[i] * w[i];
            s += w[i] * log(x[i]);
        }
    double mean = s / sw, freedom = sw - sw2 / sw; /* n - 1 for equal weights of 1 */
    if (!(freedom > 1e-12 * sw)) return MISSING;
    for (size_t i = 0; i < n; i++)
        if (w[i] > 0.0) v += w[i] * (log(x[i]) - mean) * (log(x[i]) - mean);
    return exp(sqrt(v / freedom));
}

static int by_value(const void *a, const void *b) {
    double p = *(const double *)a, q = *(const double *)b;
    return (p > q) - (p < q);
}

/* ln of the normal distribution function, without loss in the lower tail. */
static double log_normal_cdf(double z) { return log(0.5 * erfc(-z / sqrt(2.0))); }

status lognormal(const double *x, size_t n, lognormal_fit *out, error *e) {
    if (n < 3) return fail(e, ST_BAD_INPUT, "log-normal fit of %zu sizes; expected at least 3", n);
    double *l = mem_array(n, sizeof *l);
    if (!l) return NO_MEMORY(e, "the log-normal fit");
    status st = ST_OK;
    double mu = 0.0, ss = 0.0, a = 0.0, m = (double)n;
    for (size_t i = 0; i < n; i++) {
        if (!(x[i] > 0.0))
            st = fail(e, ST_BAD_INPUT, "log-normal fit: size %g is not above 0", x[i]);
        else
            l[i] = log(x[i]);
        mu += l[i] / m;
    }
    for (size_t i = 0; i < n; i++) ss += (l[i] - mu) * (l[i] - mu);
    double s1 = sqrt(ss / (m - 1.0));
    if (st == ST_OK && !(s1 > 1e-12 * fmax(1.0, fabs(mu))))
        st = fail(e, ST_NO_RESULT, "log-normal fit: all %zu sizes are equal", n);
    if (st == ST_OK) {
        qsort(l, n, sizeof *l, by_value);
        for (size_t i = 0; i < n; i++) {
            double up = (l[i] - mu) / s1, down = (l[n - 1 - i] - mu) / s1;
            a += (2.0 * (double)i + 1.0) / m * (log_normal_cdf(up) + log_normal_cdf(-down));
        }
        double a2 = -m - a;
        *out = (lognormal_fit){ mu, sqrt(ss / m), a2, a2 * (1.0 + 0.75 / m + 2.25 / (m * m)) };
    }
    free(l);
    return st;
}

static int by_x_then_y(const void *a, const void *b) {
    const double *p = a, *q = b;
    if (p[0] < q[0] || p[0] > q[0]) return p[0] < q[0] ? -1 : 1;
    return (p[1] > q[1]) - (p[1] < q[1]);
}

static double turn(const double *o, const double *a, const double *b) {
    return (a[0] - o[0]) * (b[1] - o[1]) - (a[1] - o[1]) * (b[0] - o[0]);
}

static size_t hull_push(double *hull, size_t m, size_t base, const double *p) {
    while (m >= base + 2 && turn(hull + 2 * (m - 2), hull + 2 * (m - 1), p) <= 0.0) m--;
    hull[2 * m] = p[0];
    hull[2 * m + 1] = p[1];
    return m + 1;
}

/* Corners in counter-clockwise order, the first not repeated; returns their number. */
static size_t convex_hull(double *xy, size_t n, double *hull) {
    qsort(xy, n, 2 * sizeof *xy, by_x_then_y);
    size_t m = 0;
    for (size_t i = 0; i < n; i++) m = hull_push(hull, m, 0, xy + 2 * i);
    size_t lower = m - 1;
    for (size_t i = n - 1; i-- > 0;) m = hull_push(hull, m, lower, xy + 2 * i);
    return m - 1;
}

void feret_diameters(double *xy, size_t n, double *hull, double *max, double *min) {
    *max = *min = 0.0;
    if (n < 2) return;
    size_t m = convex_hull(xy, n, hull);
    double far2 = 0.0, narrow = HUGE_VAL;
    for (size_t i = 0; i < m; i++) {
        const double *a = hull + 2 * i, *b = hull + 2 * ((i + 1) % m);
        double edge = hypot(b[0] - a[0], b[1] - a[1]), width = 0.0;
        for (size_t j = 0; j < m; j++) {
            const double *c = hull + 2 * j;
            double dx = c[0] - a[0], dy = c[1] - a[1];
            far2 = fmax(far2, dx * dx + dy * dy);
            if (edge > 0.0) width = fmax(width, turn(a, b, c) / edge);
        }
        if (edge > 0.0) narrow = fmin(narrow, width);
    }
    *max = sqrt(far2);
    *min = m > 1 && isfinite(narrow) ? narrow : 0.0;
}

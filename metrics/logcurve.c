/* Radial curves are noisy at their far end and coarse at their near end. On ln x with a fixed number of
 * points per factor e, one smoothing width is a fixed share of x and serves every scale. The place of an
 * extremum is then refined on the unsmoothed points by the vertex of a least-squares cubic (a parabola is
 * biased on a skew ring). */
#include "metrics/logcurve.h"

#include <math.h>

#include "base/quantity.h"
#include "metrics/linear.h"

double curve_at(const curve *c, double x) {
    if (c->n < 3 || !(x >= c->points[1].x && x <= c->points[c->n - 1].x)) return MISSING;
    size_t low = 1, high = c->n - 1;
    while (high - low > 1) {
        size_t mid = (low + high) / 2;
        if (c->points[mid].x <= x)
            low = mid;
        else
            high = mid;
    }
    double t = (x - c->points[low].x) / (c->points[high].x - c->points[low].x);
    return c->points[low].y + t * (c->points[high].y - c->points[low].y);
}

void log_curve_make(const curve *c, double x_first, double x_last, double share, log_curve *out) {
    double raw[LOG_POINTS];
    out->n = 0;
    if (c->n < 3) return;
    if (!(x_first > c->points[1].x)) x_first = c->points[1].x;
    if (!(x_last < c->points[c->n - 1].x)) x_last = c->points[c->n - 1].x;
    for (; out->n < LOG_POINTS; out->n++) {
        double x = x_first * exp((double)out->n / LOG_PER_E);
        if (!(x <= x_last)) break;
        out->x[out->n] = x;
        raw[out->n] = curve_at(c, x);
    }
    double sd = share * LOG_PER_E;
    long reach = (long)ceil(3.0 * sd);
    for (long i = 0; i < (long)out->n; i++) {
        double sum = 0.0, weight = 0.0;
        for (long j = i - reach; j <= i + reach; j++) {
            if (j < 0 || j >= (long)out->n) continue;
            double t = (double)(j - i) / sd, w = exp(-0.5 * t * t);
            sum += w * raw[j];
            weight += w;
        }
        out->y[i] = sum / weight;
    }
}

double curve_vertex(const curve *c, const double *weight, double x0, double width, int sign, double *y) {
    if (y) *y = curve_at(c, x0);
    if (c->n < 3) return x0;
    double step = (c->points[c->n - 1].x - c->points[1].x) / (double)(c->n - 2);
    double half = fmax(width * x0, 2.2 * step), m[4][5] = { { 0.0 } }, k[4];
    size_t used = 0;
    for (size_t i = 1; i < c->n; i++) {
        double u = (c->points[i].x - x0) / half, p[4] = { 1.0, u, u * u, u * u * u };
        if (fabs(u) > 1.0) continue;
        double w = weight ? weight[i] : 1.0;
        used++;
        for (int a = 0; a < 4; a++) {
            for (int b = 0; b < 4; b++) m[a][b] += w * p[a] * p[b];
            m[a][4] += w * p[a] * c->points[i].y;
        }
    }
    if (used < 4 || !linear_solve(&m[0][0], 4, 1e-12, k)) return x0;
    /* k1 + 2 k2 u + 3 k3 u^2 = 0; the root whose second derivative has the wanted sign, written without
     * cancellation. */
    double root = k[2] * k[2] - 3.0 * k[1] * k[3];
    if (!(root >= 0.0) || (sign > 0) != (k[2] < 0.0)) return x0;
    double u = -k[1] / (k[2] + (k[2] > 0.0 ? 1.0 : -1.0) * sqrt(root));
    if (!(fabs(u) <= 1.0)) return x0;
    if (y) *y = k[0] + u * (k[1] + u * (k[2] + u * k[3]));
    return x0 + u * half;
}

/* How much a figure would differ in another field of the same texture, judged from the one field.
 *
 * Features of an etched texture are not independent: where one cell is large its neighbours are small, and
 * the count in a field varies far less than a random one. Treating features as independent would overstate u;
 * a bootstrap over tiles of one size overstates it too, because a tile has more border for its area than the
 * field. So the variance is measured at several tile sizes and extrapolated. Ratios, quantiles and spreads go
 * through their influence function (Hampel F.R. 1974, J. Am. Stat. Assoc. 69:383): to first order each is a
 * sum over features. Not in here: the method part of u (measure.c) and the pixel size (outside this room). */
#include "metrics/uncertainty.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"

double series_mean(const double *v, size_t n) {
    if (!n) return MISSING;
    double s = 0.0, r = 0.0;
    for (size_t i = 0; i < n; i++) s += v[i];
    double mean = s / (double)n;
    for (size_t i = 0; i < n; i++) r += v[i] - mean; /* second pass: what the rounding of the first lost */
    return mean + r / (double)n;
}

double series_sd(const double *v, size_t n) {
    if (n < 2) return MISSING;
    double mean = series_mean(v, n), ss = 0.0;
    for (size_t i = 0; i < n; i++) ss += (v[i] - mean) * (v[i] - mean);
    return sqrt(ss / (double)(n - 1));
}

double series_lag1(const double *v, size_t n) {
    if (n < 2) return MISSING;
    double mean = series_mean(v, n), ss = 0.0, s1 = 0.0;
    for (size_t i = 0; i < n; i++) {
        ss += (v[i] - mean) * (v[i] - mean);
        if (i + 1 < n) s1 += (v[i] - mean) * (v[i + 1] - mean);
    }
    return ss > 0.0 ? s1 / ss : MISSING;
}

/* P(N <= k) for a Poisson mean m. */
static double poisson_cdf(size_t k, double m) {
    double s = 0.0;
    for (size_t i = 0; i <= k; i++) s += exp((double)i * log(m) - m - lgamma((double)i + 1.0));
    return s;
}

/* The mean at which P(N <= k) = p, by bisection: the function falls from 1 to 0. */
static double poisson_mean_at(size_t k, double p) {
    double low = 0.0, high = (double)k + 20.0 * sqrt((double)k + 1.0) + 50.0;
    for (int i = 0; i < 200; i++) {
        double mid = 0.5 * (low + high);
        if (poisson_cdf(k, mid) > p)
            low = mid;
        else
            high = mid;
    }
    return 0.5 * (low + high);
}

void poisson_limits(size_t n, double coverage, double *low, double *high) {
    double tail = 0.5 * (1.0 - coverage);
    *low = n ? poisson_mean_at(n - 1, 1.0 - tail) : 0.0;
    *high = poisson_mean_at(n, tail);
}

/* Summed-area table of marks on a grid of small squares. */
typedef struct {
    double *sum; /* [(nx + 1) * (ny + 1)] */
    size_t nx, ny;
    double side_x, side_y;
} tally;

static size_t bin_index(double v, double v0, double side, size_t n) {
    double i = floor((v - v0) / side);
    if (!(i > 0.0)) return 0;
    return i >= (double)n ? n - 1 : (size_t)i;
}

static status tally_make(const double *x, const double *y, const double *mark, size_t n, window w,
                         double unit, tally *t, error *e) {
    t->nx = (size_t)fmax(1.0, floor((w.x1 - w.x0) / (0.5 * unit)));
    t->ny = (size_t)fmax(1.0, floor((w.y1 - w.y0) / (0.5 * unit)));
    t->side_x = (w.x1 - w.x0) / (double)t->nx;
    t->side_y = (w.y1 - w.y0) / (double)t->ny;
    size_t row = t->nx + 1;
    t->sum = mem_array(row * (t->ny + 1), sizeof *t->sum);
    if (!t->sum) return NO_MEMORY(e, "the uncertainties");
    for (size_t i = 0; i < n; i++)
        t->sum[(bin_index(y[i], w.y0, t->side_y, t->ny) + 1) * row + bin_index(x[i], w.x0, t->side_x, t->nx) +
               1] += mark[i];
    for (size_t j = 1; j <= t->ny; j++)
        for (size_t i = 1; i <= t->nx; i++)
            t->sum[j * row + i] +=
                t->sum[(j - 1) * row + i] + t->sum[j * row + i - 1] - t->sum[(j - 1) * row + i - 1];
    return ST_OK;
}

/* Variance of the sum over squares of m x m bins at every offset. The mean is that of the field, which the
 * tiles share: 1 - share of the field in a tile makes up for it. */
static double tile_variance(const tally *t, size_t m) {
    size_t row = t->nx + 1, n = 0;
    double share = (double)(m * m) / (double)(t->nx * t->ny);
    double mean = t->sum[t->ny * row + t->nx] * share, ss = 0.0;
    for (size_t j = 0; j + m <= t->ny; j++)
        for (size_t i = 0; i + m <= t->nx; i++) {
            const double *a = t->sum + j * row + i, *b = a + m * row;
            double s = b[m] - b[0] - a[m] + a[0] - mean;
            ss += s * s;
            n++;
        }
    return ss / (double)n / (1.0 - share);
}

/* Weighted least squares of v = a p + b q. */
typedef struct {
    double pp, pq, qq, pv, qv;
} normal_sums;

static void sums_add(normal_sums *s, double weight, double p, double q, double v) {
    s->pp += weight * p * p;
    s->pq += weight * p * q;
    s->qq += weight * q * q;
    s->pv += weight * p * v;
    s->qv += weight * q * v;
}

/* 0 when p and q cannot be told apart. */
static int sums_solve(const normal_sums *s, double *a, double *b) {
    double det = s->pp * s->qq - s->pq * s->pq;
    if (!(det > 1e-12 * s->pp * s->qq)) return 0;
    *a = (s->pv * s->qq - s->qv * s->pq) / det;
    *b = (s->qv * s->pp - s->pv * s->pq) / det;
    return 1;
}

/* The law of the variance of a sum over an area A with perimeter P, from that over tiles; every tile size is weighted by how
 * well its variance is known, about sqrt(2 / tiles). */
typedef struct {
    normal_sums rim;  /* against A and P: randomness and order */
    normal_sums wave; /* against A and A ln(side / 2 units): density that wanders */
} law_sums;

static double wave_term(double area, double unit) { return area * log(sqrt(area) / (2.0 * unit)); }

static double law_variance(const law_sums *s, double area, double rim, double unit) {
    double a, b;
    if (sums_solve(&s->rim, &a, &b) && b >= 0.0) {
        if (a >= 0.0) return a * area + b * rim;
        return s->rim.qq > 0.0 ? s->rim.qv / s->rim.qq * rim : 0.0;
    }
    double level = s->rim.pp > 0.0 ? s->rim.pv / s->rim.pp : 0.0; /* the same in every tile */
    if (!sums_solve(&s->wave, &a, &b) || !(a > 0.0 && b > 0.0)) return level * area;
    return a * area + b * wave_term(area, unit);
}

status field_sum_sd(const double *x, const double *y, const double *mark, size_t n, window w, double unit,
                    double *sd, error *e) {
    double width = w.x1 - w.x0, height = w.y1 - w.y0, narrow = fmin(width, height);
    *sd = MISSING;
    if (n < 4 || !(unit > 0.0) || narrow < 4.0 * unit) return ST_OK;
    tally t = { 0 };
    status st = tally_make(x, y, mark, n, w, unit, &t, e);
    if (st != ST_OK) return st;
    static const size_t bins[] = { 4, 5, 6, 8, 10, 12, 16, 20, 24, 32, 40, 48, 64 };
    size_t most = (t.nx < t.ny ? t.nx : t.ny) / 2;
    law_sums s = { 0 };
    for (size_t k = 0; k < sizeof bins / sizeof bins[0] && (k == 0 || bins[k] <= most); k++) {
        double m = (double)bins[k], v = tile_variance(&t, bins[k]);
        double area = m * m * t.side_x * t.side_y, rim = 2.0 * m * (t.side_x + t.side_y);
        if (!(v > 0.0)) continue;
        double weight = width * height / area / (v * v);
        sums_add(&s.rim, weight, area, rim, v);
        sums_add(&s.wave, weight, area, wave_term(area, unit), v);
    }
    *sd = sqrt(law_variance(&s, width * height, 2.0 * (width + height), unit));
    free(t.sum);
    return ST_OK;
}

double field_dof(double n_features) { return fmax(1.0, n_features / 16.0); }

/* From the influences to u. Without tiles: as if independent. */
static status u_from_marks(const sample_of_features *s, const double *mark, double *u, error *e) {
    status st = field_sum_sd(s->x, s->y, mark, s->n, s->field, s->unit, u, e);
    if (st != ST_OK || isfinite(*u)) return st;
    double ss = 0.0;
    for (size_t i = 0; i < s->n; i++) ss += mark[i] * mark[i];
    *u = sqrt(ss);
    return ST_OK;
}

static double weight_sum(const sample_of_features *s) {
    double sw = 0.0;
    for (size_t i = 0; i < s->n; i++) sw += s->w[i] > 0.0 ? s->w[i] : 0.0;
    return sw;
}

typedef enum { OF_MEAN, OF_GSD, OF_QUANTILE } statistic;

/* Influence of one value, before its weight / sum of weights. */
static double influence(statistic what, double v, double at, double p, double slope) {
    if (what == OF_MEAN) return v - at;
    if (what == OF_QUANTILE) return (p - (v < at ? 1.0 : v > at ? 0.0 : 0.5)) * slope;
    double s = log(at), r = log(v) - p; /* gsd: p carries the mean of ln v */
    return s > 0.0 ? at * (r * r - s * s) / (2.0 * s) : 0.0;
}

static status u_of(statistic what, const sample_of_features *s, double at, double p, double slope, double *u,
                   error *e) {
    double sw = weight_sum(s);
    *u = MISSING;
    if (!(sw > 0.0) || !isfinite(at)) return ST_OK;
    double *mark = mem_array(s->n, sizeof *mark);
    if (!mark) return NO_MEMORY(e, "the uncertainties");
    for (size_t i = 0; i < s->n; i++)
        mark[i] = s->w[i] > 0.0 ? s->w[i] / sw * influence(what, s->v[i], at, p, slope) : 0.0;
    status st = u_from_marks(s, mark, u, e);
    free(mark);
    return st;
}

status u_of_mean(const sample_of_features *s, double mean, double *u, error *e) {
    return u_of(OF_MEAN, s, mean, 0.0, 0.0, u, e);
}

status u_of_gsd(const sample_of_features *s, double gsd, double *u, error *e) {
    double sw = weight_sum(s), m = 0.0;
    for (size_t i = 0; i < s->n; i++)
        if (s->w[i] > 0.0) m += s->w[i] * log(s->v[i]) / sw;
    return u_of(OF_GSD, s, gsd, m, 0.0, u, e);
}

status u_of_quantile(const sample_of_features *s, double p, double q, double step, double low, double high,
                     double *u, error *e) {
    return u_of(OF_QUANTILE, s, q, p, (high - low) / (2.0 * step), u, e);
}

/* Constants of control charts by integration, and quantiles by inversion.
 *
 * d2 = E(W) and d3 = sqrt(E(W^2) - d2^2) of the range W of n normal values, with
 *   P(W <= w) = n * integral of f(x) (F(x + w) - F(x))^(n-1) dx   (Tippett L.H.C. (1925) Biometrika 17, 364)
 * and E(W) = integral of 1 - P, E(W^2) = integral of 2 w (1 - P). The inner integral runs to where f vanishes, where the
 * trapezium rule is exact to rounding; the outer one begins at 0 and takes Simpson's rule.
 * Incomplete beta and gamma functions: series and continued fractions after Abramowitz and Stegun (1964) 6.5.29, 6.5.31,
 * 26.5.8, summed by Lentz's method. Quantiles by bisection on them: slow, sure, exact to rounding.
 * What this file does not do: laws with known shape other than these. */
#include "judge/factors.h"

#include <math.h>

#include "base/quantity.h"

enum { GRID_PER_UNIT = 20, GRID_REACH = 9, RANGE_REACH = 14 };
enum { GRID = 2 * GRID_REACH * GRID_PER_UNIT + 1, STEPS = RANGE_REACH * GRID_PER_UNIT };

double normal_below(double z) { return 0.5 * erfc(-z / sqrt(2.0)); }

static double power(double x, size_t n) {
    double y = 1.0;
    for (; n; n >>= 1, x *= x)
        if (n & 1) y *= x;
    return y;
}

/* P(W > w) at w = step / GRID_PER_UNIT. */
static double range_above(size_t n, size_t step, const double *density, const double *below) {
    double sum = 0.0;
    for (size_t i = 0; i < GRID; i++) {
        double upper = i + step < GRID ? below[i + step] : 1.0;
        sum += density[i] * power(upper - below[i], n - 1);
    }
    return 1.0 - (double)n * sum / GRID_PER_UNIT;
}

double factor_c4(size_t n) {
    if (n < 2) return MISSING;
    double half = 0.5 * (double)n;
    return sqrt(2.0 / ((double)n - 1.0)) * exp(lgamma(half) - lgamma(half - 0.5));
}

chart_factors factors_of(size_t n) {
    const double no = MISSING;
    if (n < FACTORS_MIN_N || n > FACTORS_MAX_N) return (chart_factors){ no, no, no, no, no, no, no, no, no, no };
    double density[GRID], below[GRID], first = 0.0, second = 0.0;
    for (size_t i = 0; i < GRID; i++) {
        double x = (double)i / GRID_PER_UNIT - GRID_REACH;
        density[i] = exp(-0.5 * x * x) / sqrt(2.0 * PI);
        below[i] = normal_below(x);
    }
    for (size_t step = 0; step <= STEPS; step++) {
        double weight = (step == 0 || step == STEPS ? 1.0 : step % 2 ? 4.0 : 2.0) / (3.0 * GRID_PER_UNIT);
        double w = (double)step / GRID_PER_UNIT, above = range_above(n, step, density, below);
        first += weight * above;
        second += weight * 2.0 * w * above;
    }
    chart_factors f = { .d2 = first, .d3 = sqrt(second - first * first), .c4 = factor_c4(n) };
    double root = sqrt((double)n), spread = 3.0 * sqrt(1.0 - f.c4 * f.c4) / f.c4;
    f.A2 = 3.0 / (f.d2 * root);
    f.A3 = 3.0 / (f.c4 * root);
    f.B3 = fmax(0.0, 1.0 - spread);
    f.B4 = 1.0 + spread;
    f.D3 = fmax(0.0, 1.0 - 3.0 * f.d3 / f.d2);
    f.D4 = 1.0 + 3.0 * f.d3 / f.d2;
    f.E2 = 3.0 / f.d2;
    return f;
}

/* ---- laws ---- */

enum { MOST_TERMS = 10000 };
#define TINY 1e-300

/* Regularized incomplete beta function I_x(a, b), x below (a + 1)/(a + b + 2): Abramowitz and Stegun 26.5.8. */
static double beta_fraction(double x, double a, double b) {
    double c = 1.0, d = 1.0 / fmax(TINY, 1.0 - (a + b) * x / (a + 1.0)), h = d;
    for (int m = 1; m < MOST_TERMS; m++) {
        double even = m * (b - m) * x / ((a + 2 * m - 1) * (a + 2 * m));
        d = 1.0 / (1.0 + even * d);
        c = 1.0 + even / c;
        h *= c * d;
        double odd = -(a + m) * (a + b + m) * x / ((a + 2 * m) * (a + 2 * m + 1));
        d = 1.0 / (1.0 + odd * d);
        c = 1.0 + odd / c;
        h *= c * d;
        if (fabs(c * d - 1.0) < 1e-15) break;
    }
    return exp(a * log(x) + b * log1p(-x) + lgamma(a + b) - lgamma(a) - lgamma(b)) * h / a;
}

static double beta_share(double x, double a, double b) {
    if (x <= 0.0) return 0.0;
    if (x >= 1.0) return 1.0;
    return x < (a + 1.0) / (a + b + 2.0) ? beta_fraction(x, a, b) : 1.0 - beta_fraction(1.0 - x, b, a);
}

double student_below(double t, double df) {
    if (!(df > 0.0) || isnan(t)) return MISSING;
    double tail = t * t < df ? 0.5 - 0.5 * beta_share(t * t / (df + t * t), 0.5, 0.5 * df) /* keeps digits near 0 */
                             : 0.5 * beta_share(df / (df + t * t), 0.5 * df, 0.5);
    return t > 0.0 ? 1.0 - tail : tail;
}

double chi2_below(double chi2, double df) {
    if (!(df > 0.0) || isnan(chi2)) return MISSING;
    double a = 0.5 * df, x = 0.5 * chi2;
    if (x <= 0.0) return 0.0;
    double front = exp(a * log(x) - x - lgamma(a));
    if (x < a + 1.0) { /* Abramowitz and Stegun 6.5.29 */
        double term = 1.0 / a, sum = term;
        for (int k = 1; k < MOST_TERMS && term > 1e-17 * sum; k++) sum += term *= x / (a + k);
        return front * sum;
    }
    double b = x + 1.0 - a, c = 1.0 / TINY, d = 1.0 / b, h = d; /* 6.5.31 */
    for (int k = 1; k < MOST_TERMS; k++) {
        double an = -k * (k - a);
        b += 2.0;
        d = 1.0 / (an * d + b);
        c = b + an / c;
        h *= c * d;
        if (fabs(c * d - 1.0) < 1e-15) break;
    }
    return 1.0 - front * h;
}

typedef double (*law)(double x, double df);
static double normal_law(double x, double df) {
    (void)df;
    return normal_below(x);
}

/* Where an increasing law reaches p, between lo and hi, which are widened until they hold it. */
static double invert(law below, double p, double df, double lo, double hi) {
    while (below(hi, df) < p && hi < 1e300) hi *= 4.0;
    while (lo < 0.0 && below(lo, df) > p && lo > -1e300) lo *= 4.0;
    for (int i = 0; i < 2000; i++) {
        double middle = 0.5 * (lo + hi);
        if (middle <= lo || middle >= hi || hi - lo < 1e-22) break;
        if (below(middle, df) < p) lo = middle;
        else hi = middle;
    }
    return 0.5 * (lo + hi);
}

/* The upper half mirrors the lower one, where the tail keeps its digits. */
double normal_quantile(double p) {
    if (!(p > 0.0 && p < 1.0)) return MISSING;
    return p > 0.5 ? -invert(normal_law, 1.0 - p, 0.0, -8.0, 0.0) : invert(normal_law, p, 0.0, -8.0, 0.0);
}

double student_quantile(double p, double df) {
    if (!(p > 0.0 && p < 1.0) || !(df > 0.0)) return MISSING;
    return p > 0.5 ? -invert(student_below, 1.0 - p, df, -8.0, 0.0) : invert(student_below, p, df, -8.0, 0.0);
}

double chi2_quantile(double p, double df) {
    if (!(p > 0.0 && p < 1.0) || !(df > 0.0)) return MISSING;
    return invert(chi2_below, p, df, 0.0, df + 8.0);
}

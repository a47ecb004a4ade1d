/* Capability and performance indices.
 *
 * Cp and Cpk take the sd between neighbours, Pp and Ppk that of all values: the second pair is what a customer saw, the
 * gap between the two is drift. Where the Anderson-Darling test refutes normality at 5 %, the logarithms are tried and
 * the indices are formed from the quantiles of the log-normal law; where that is refuted too, the figures by mean and sd
 * are given and said to mean little.
 * What this file does not do: distributions other than these two; the uncertainty of the measurement, which belongs to
 * the verdict of each etch and is inside the scatter here. */
#include "judge/capability.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "judge/factors.h"

#define REFUTED 0.05
enum { LEAST = 5, LEAST_FOR_NORMALITY = 8 };

double capability_by_quantiles(double lo, double hi, double q_lo, double q50, double q_hi) {
    double upper = isfinite(hi) ? (hi - q50) / (q_hi - q50) : (double)INFINITY;
    double lower = isfinite(lo) ? (q50 - lo) / (q50 - q_lo) : (double)INFINITY;
    double worst = fmin(upper, lower);
    return isfinite(worst) ? worst : MISSING;
}

static int ascending(const void *a, const void *b) {
    const double *x = a, *y = b;
    return (*x > *y) - (*x < *y);
}

static void moments(const double *v, size_t n, double *mean, double *sd) {
    double sum = 0.0, square = 0.0;
    for (size_t i = 0; i < n; i++) sum += v[i];
    *mean = n ? sum / (double)n : MISSING;
    for (size_t i = 0; i < n; i++) square += (v[i] - *mean) * (v[i] - *mean);
    *sd = n > 1 ? sqrt(square / ((double)n - 1.0)) : MISSING;
}

/* More than the rounding that summing equal values leaves. */
static int has_scatter(double mean, double sd) { return sd > 1e-12 * fabs(mean); }

static double stephens_p(double a) {
    if (a < 0.2) return 1.0 - exp(-13.436 + 101.14 * a - 223.73 * a * a);
    if (a < 0.34) return 1.0 - exp(-8.318 + 42.796 * a - 59.938 * a * a);
    if (a < 0.6) return exp(0.9177 - 4.279 * a - 1.38 * a * a);
    if (a < 13.0) return exp(1.2937 - 5.709 * a + 0.0186 * a * a);
    return 0.0;
}

double normality_statistic(const double *v, size_t n, double *p) {
    double mean = 0.0, sd = 0.0, sum = 0.0;
    *p = MISSING;
    moments(v, n, &mean, &sd);
    if (n < LEAST_FOR_NORMALITY || !has_scatter(mean, sd)) return MISSING;
    double *sorted = mem_array(n, sizeof *sorted);
    if (!sorted) return MISSING;
    memcpy(sorted, v, n * sizeof *sorted);
    qsort(sorted, n, sizeof *sorted, ascending);
    for (size_t i = 0; i < n; i++) { /* the tails keep their digits: 1 - F(z) is F(-z) */
        double below = normal_below((sorted[i] - mean) / sd), above = normal_below(-(sorted[n - 1 - i] - mean) / sd);
        sum += (2.0 * (double)i + 1.0) * (log(fmax(below, 1e-300)) + log(fmax(above, 1e-300)));
    }
    free(sorted);
    double size = (double)n, a = (-size - sum / size) * (1.0 + 0.75 / size + 2.25 / (size * size));
    *p = stephens_p(a);
    return a;
}

static double worst_side(double lo, double hi, double mean, double sd) {
    return capability_by_quantiles(lo, hi, mean - 3.0 * sd, mean, mean + 3.0 * sd);
}

static capability_index two_sided(double lo, double hi, double sd, double df) {
    if (!isfinite(lo) || !isfinite(hi)) return (capability_index){ MISSING, MISSING, MISSING };
    double c = (hi - lo) / (6.0 * sd);
    return (capability_index){ c, c * sqrt(chi2_quantile(0.025, df) / df), c * sqrt(chi2_quantile(0.975, df) / df) };
}

static capability_index bissell(double c, double n, double df) {
    double half = normal_quantile(0.975) * sqrt(1.0 / (9.0 * n) + c * c / (2.0 * df));
    return (capability_index){ c, c - half, c + half };
}

static double within(const double *v, size_t n) {
    double sum = 0.0;
    for (size_t i = 1; i < n; i++) sum += fabs(v[i] - v[i - 1]);
    return sum / ((double)n - 1.0) / FACTOR_D2_OF_2;
}

static double outside(double lo, double hi, double mean, double sd) {
    double share = isfinite(lo) ? normal_below((lo - mean) / sd) : 0.0;
    return isfinite(hi) ? share + normal_below((mean - hi) / sd) : share;
}

/* Moves to the log-normal form when normality is refuted and that of the logarithms is not. */
static status try_logarithms(const double *v, size_t n, double lo, double hi, capability *c, error *e) {
    double mean = 0.0, sd = 0.0, p = MISSING;
    int positive = 1;
    for (size_t i = 0; i < n; i++) positive &= v[i] > 0.0;
    c->form = CAPABLE_NEITHER;
    c->expected_outside = MISSING;
    if (!positive) return ST_OK;
    double *logs = mem_array(n, sizeof *logs);
    if (!logs) return NO_MEMORY(e, "the capability");
    for (size_t i = 0; i < n; i++) logs[i] = log(v[i]);
    moments(logs, n, &mean, &sd);
    (void)normality_statistic(logs, n, &p);
    free(logs);
    if (!(p >= REFUTED)) return ST_OK;
    double q_lo = exp(mean - 3.0 * sd), q50 = exp(mean), q_hi = exp(mean + 3.0 * sd);
    double log_lo = isnan(lo) ? MISSING : lo > 0.0 ? log(lo) : -1e3, log_hi = isnan(hi) ? MISSING : hi > 0.0 ? log(hi) : -1e3;
    c->form = CAPABLE_LOG_NORMAL;
    c->Ppk = (capability_index){ capability_by_quantiles(lo, hi, q_lo, q50, q_hi), MISSING, MISSING };
    c->Pp = (capability_index){ isfinite(lo) && isfinite(hi) ? (hi - lo) / (q_hi - q_lo) : MISSING, MISSING, MISSING };
    c->expected_outside = outside(log_lo, log_hi, mean, sd);
    return ST_OK;
}

status capability_of(const double *v, size_t n, double lo, double hi, capability *out, error *e) {
    if (!isfinite(lo) && !isfinite(hi))
        return fail(e, ST_BAD_INPUT, "capability needs a target range: a least value, a largest value, or both");
    if (isfinite(lo) && isfinite(hi) && !(lo < hi))
        return fail(e, ST_BAD_INPUT, "capability: the target's least value %g does not lie below its largest %g", lo, hi);
    if (n < LEAST) return fail(e, ST_NO_RESULT, "capability needs at least 5 etches, there are %zu", n);
    capability c = { .n = n };
    moments(v, n, &c.mean, &c.sd);
    if (!has_scatter(c.mean, c.sd)) return fail(e, ST_NO_RESULT, "capability cannot be said: all etches gave the same value");
    double df = (double)n - 1.0, df_within = 0.605 * df;
    c.sd_within = within(v, n);
    c.Cp = two_sided(lo, hi, c.sd_within, df_within);
    c.Cpk = bissell(worst_side(lo, hi, c.mean, c.sd_within), (double)n, df_within);
    c.Pp = two_sided(lo, hi, c.sd, df);
    c.Ppk = bissell(worst_side(lo, hi, c.mean, c.sd), (double)n, df);
    c.expected_outside = outside(lo, hi, c.mean, c.sd);
    c.normality = normality_statistic(v, n, &c.normality_p);
    if (n >= LEAST_FOR_NORMALITY && isnan(c.normality_p)) return NO_MEMORY(e, "the capability");
    status st = c.normality_p < REFUTED ? try_logarithms(v, n, lo, hi, &c, e) : ST_OK;
    if (st == ST_OK) *out = c;
    return st;
}

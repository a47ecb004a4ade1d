/* Student's t and Fisher's F by the incomplete beta function.
 *
 * The continued fraction converges fast on one side of the mean of the beta law; the other side is had by the
 * symmetry I_x(a, b) = 1 - I_{1-x}(b, a). Quantiles by bisection: they are asked for a few hundred times a run, and
 * bisection cannot go astray. Not in here: chi-squared; the count limits of uncertainty.c need only Poisson sums. */
#include "metrics/student.h"

#include <math.h>

#include "base/quantity.h"

static double away_from_zero(double v) { return fabs(v) < 1e-300 ? 1e-300 : v; }

/* Even and odd coefficients of DLMF 8.17.22, multiplied up from the front (modified Lentz). */
static double beta_fraction(double a, double b, double x) {
    double c = 1.0, d = 1.0 / away_from_zero(1.0 - (a + b) * x / (a + 1.0)), h = d;
    for (int m = 1; m <= 100000; m++) {
        double k = (double)m;
        double even = k * (b - k) * x / ((a + 2.0 * k - 1.0) * (a + 2.0 * k));
        d = 1.0 / away_from_zero(1.0 + even * d);
        c = away_from_zero(1.0 + even / c);
        h *= d * c;
        double odd = -(a + k) * (a + b + k) * x / ((a + 2.0 * k) * (a + 2.0 * k + 1.0));
        d = 1.0 / away_from_zero(1.0 + odd * d);
        c = away_from_zero(1.0 + odd / c);
        h *= d * c;
        if (fabs(d * c - 1.0) < 1e-15) break;
    }
    return h;
}

double beta_share(double a, double b, double x) {
    if (!(a > 0.0) || !(b > 0.0) || !(x >= 0.0) || !(x <= 1.0)) return MISSING;
    if (x <= 0.0 || x >= 1.0) return x;
    double front = exp(lgamma(a + b) - lgamma(a) - lgamma(b) + a * log(x) + b * log1p(-x));
    return x < (a + 1.0) / (a + b + 2.0) ? front * beta_fraction(a, b, x) / a
                                         : 1.0 - front * beta_fraction(b, a, 1.0 - x) / b;
}

static const double as_good_as_normal = 1e7; /* t and normal quantiles then agree to 1e-7 */

double student_t_below(double t, double dof) {
    if (!(dof > 0.0) || isnan(t)) return MISSING;
    if (dof > as_good_as_normal) return 0.5 * erfc(-t / sqrt(2.0));
    double tail = 0.5 * beta_share(0.5 * dof, 0.5, dof / (dof + t * t));
    return t > 0.0 ? 1.0 - tail : tail;
}

double student_t_at(double p, double dof) {
    if (!(dof > 0.0) || !(p > 0.0) || !(p < 1.0)) return MISSING;
    double q = fmin(p, 1.0 - p), low = 0.0, high = 1.0; /* |t| in the lower tail, which keeps its digits */
    while (student_t_below(-high, dof) > q && high < 1e150) high *= 2.0;
    for (int i = 0; i < 200 && high - low > 1e-15 * high; i++) {
        double mid = 0.5 * (low + high);
        if (student_t_below(-mid, dof) > q)
            low = mid;
        else
            high = mid;
    }
    double t = 0.5 * (low + high);
    return p < 0.5 ? -t : p > 0.5 ? t : 0.0;
}

double fisher_above(double f, double dof1, double dof2) {
    if (!(dof1 > 0.0) || !(dof2 > 0.0) || isnan(f)) return MISSING;
    if (!(f > 0.0)) return 1.0;
    double a = fmin(dof1, 1e9), b = fmin(dof2, 1e9);
    return beta_share(0.5 * b, 0.5 * a, b / (b + a * f));
}

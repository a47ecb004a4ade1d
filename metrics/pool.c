/* Joining the micrographs of a sample: weighted mean, and an uncertainty that knows which part averages out.
 *
 * The scatter between micrographs contains the scatter within (JCGM 100, 4.2), so the two are compared, not
 * added. With two or three micrographs the scatter is itself poorly known; taking the larger of both keeps
 * chance agreement from making a small u. The standard error of a weighted mean is the ratio form (Cochran
 * W.G. 1977, Sampling Techniques, 3rd ed., ch. 6; from memory): n/(n-1) sum w^2 (v - mean)^2 / (sum w)^2. */
#include "metrics/pool.h"

#include <math.h>

#include "base/quantity.h"
#include "metrics/student.h"
#include "metrics/uncertainty.h"

static int takes_part(const measured *m, double weight) { return isfinite(m->value) && weight > 0.0; }

typedef struct {
    double mean, within, between, method, dof_within;
    size_t n, micrographs;
} joined;

/* The value, or the same axis within 90 deg of `axis`. */
static double unwrapped(double value, double axis) {
    return isfinite(axis) ? value - 180.0 * floor((value - axis) / 180.0 + 0.5) : value;
}

static joined join(const measured *m, const double *weight, size_t n, double axis) {
    joined j = { MISSING, 0.0, 0.0, 0.0, MISSING, 0, 0 };
    double fourths = 0.0;
    double sw = 0.0, sv = 0.0;
    for (size_t i = 0; i < n; i++) {
        if (!takes_part(&m[i], weight[i])) continue;
        sw += weight[i];
        sv += weight[i] * unwrapped(m[i].value, axis);
        j.method += weight[i] * (isfinite(m[i].u_method) ? m[i].u_method : 0.0);
        j.n += m[i].n;
        j.micrographs++;
    }
    if (!j.micrographs) {
        j.within = j.between = j.method = MISSING;
        return j;
    }
    j.mean = sv / sw;
    j.method /= sw;
    for (size_t i = 0; i < n; i++) {
        if (!takes_part(&m[i], weight[i])) continue;
        double share = weight[i] / sw, u = share * m[i].u_sampling;
        double r = share * (unwrapped(m[i].value, axis) - j.mean);
        j.within += u * u; /* NAN when one micrograph does not know its own */
        j.between += r * r;
        fourths += u * u * u * u / field_dof(weight[i]);
    }
    j.dof_within = fourths > 0.0 ? j.within * j.within / fourths : HUGE_VAL; /* Welch-Satterthwaite */
    double k = (double)j.micrographs;
    j.within = sqrt(j.within);
    j.between = k > 1.0 ? sqrt(j.between * k / (k - 1.0)) : MISSING;
    return j;
}

static measured from_joined(const joined *j) {
    return (measured){ j->mean, fmax(j->within, j->between), j->method, j->n }; /* fmax passes over a NAN */
}

/* How well the larger of the two is known. */
static double sampling_dof(const joined *j) {
    double others = (double)j->micrographs - 1.0;
    if (!(others > 0.0) || isnan(j->between)) return j->dof_within;
    if (isnan(j->within)) return others;
    double f = j->between / j->within;
    return fisher_above(f * f, others, j->dof_within) < 0.05 ? others : others + j->dof_within;
}

status pool_parts(const measured *m, const double *weight, size_t n, pooled *out) {
    joined j = join(m, weight, n, MISSING);
    *out = (pooled){ from_joined(&j), j.within, j.between, j.micrographs ? sampling_dof(&j) : MISSING, j.micrographs };
    return j.micrographs ? ST_OK : ST_NO_RESULT;
}

status pool_axis(const measured *m, const double *weight, size_t n, measured *out) {
    double c = 0.0, s = 0.0;
    for (size_t i = 0; i < n; i++)
        if (takes_part(&m[i], weight[i])) {
            c += weight[i] * cos(m[i].value * PI / 90.0);
            s += weight[i] * sin(m[i].value * PI / 90.0);
        }
    joined j = join(m, weight, n, atan2(s, c) * 90.0 / PI);
    *out = from_joined(&j);
    out->value -= 180.0 * floor(out->value / 180.0);
    return j.micrographs ? ST_OK : ST_NO_RESULT;
}

status pool_stretch(const measured *stretch, const measured *angle_deg, size_t n, pooled_stretch *out) {
    double sw = 0.0, sc = 0.0, ss = 0.0, square = 0.0;
    size_t used = 0;
    *out = (pooled_stretch){ MISSING, MISSING, MISSING, MISSING, 0 };
    for (size_t i = 0; i < n; i++) {
        double strain = 0.5 * log(stretch[i].value), u = 0.5 * stretch[i].u_sampling / stretch[i].value;
        if (!isfinite(strain) || !isfinite(angle_deg[i].value) || !(u > 0.0)) continue;
        double w = 1.0 / (u * u), twice = angle_deg[i].value * PI / 90.0;
        sw += w;
        sc += w * strain * cos(twice);
        ss += w * strain * sin(twice);
        square += w * strain * strain;
        used++;
    }
    if (!used) return ST_NO_RESULT;
    double c = sc / sw, s = ss / sw, strain = hypot(c, s), axis = atan2(s, c) * 90.0 / PI;
    double apart = fmax(0.0, square - sw * strain * strain), dof = 2.0 * (double)used - 2.0;
    *out = (pooled_stretch){ exp(2.0 * strain), axis < 0.0 ? axis + 180.0 : axis, strain * sqrt(sw),
                             used > 1 ? fisher_above(apart / dof, dof, HUGE_VAL) : MISSING, used };
    return ST_OK;
}

/* A piecewise linear profile cut into slabs for the graded recursion. The profile is split into pieces at its
 * steps and strong kinks, each piece into equal slabs, so that refinement converges at the full order of the
 * recursion. Within a slab the shares enter by mean and first moment (integrated exactly), not by point
 * values: a profile that samples a smooth shape then shows its own small kinks only at second order. */
#include "optics/slabs.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/number.h"

enum {
    SLABS_FIRST = 8,  /* slabs of a whole profile at level 0 */
    SLABS_LEVELS = 2, /* refinements that must fit: convergence needs three walks */
    MANY_PIECES = 256 /* a rough profile: only its strongest kinks then bound slabs */
};
static const double KINK = 0.25;  /* change of slope, in shares per total depth, that makes a slab boundary */
static const double SLACK = 1e-9; /* rounding allowed in shares that should lie in 0..1 */

static double total_depth(const profile *p) { return p->depth_nm[p->n - 1] - p->depth_nm[0]; }
static const double *share_of(const profile *p, size_t kind) {
    return kind ? p->coating[kind - 1] : p->solid;
}

static double slope_at(const profile *p, size_t kind, size_t i) {
    const double *f = share_of(p, kind), *z = p->depth_nm;
    return (f[i + 1] - f[i]) / (z[i + 1] - z[i]) * total_depth(p);
}

/* The last node of the piece that starts at node `first`: before a step, at a kink above `kink`, or at the
 * floor. */
static size_t piece_end(const profile *p, double kink, size_t first) {
    for (size_t i = first + 1; i + 1 < p->n; i++) {
        if (!(p->depth_nm[i + 1] > p->depth_nm[i])) return i;
        for (size_t kind = 0; kind <= p->n_coatings; kind++)
            if (fabs(slope_at(p, kind, i) - slope_at(p, kind, i - 1)) >= kink) return i;
    }
    return p->n - 1;
}

/* The first node of a piece: skips nodes that share their depth with the next one. */
static size_t piece_start(const profile *p, size_t i) {
    while (i + 1 < p->n && !(p->depth_nm[i + 1] > p->depth_nm[i])) i++;
    return i;
}

static size_t piece_slabs(const profile *p, size_t first, size_t last, int level) {
    double part = (p->depth_nm[last] - p->depth_nm[first]) / total_depth(p);
    double n = fmax(1.0, round(SLABS_FIRST * part));
    return (size_t)n << level;
}

static size_t count(const profile *p, double kink, int level, size_t *pieces) {
    size_t n = 0;
    *pieces = 0;
    for (size_t a = piece_start(p, 0); a + 1 < p->n; ++*pieces) {
        size_t b = piece_end(p, kink, a);
        n += piece_slabs(p, a, b, level);
        a = piece_start(p, b);
    }
    return n;
}

/* The strength from which a kink bounds slabs: raised for a rough (measured, noisy) profile, where noise
 * would otherwise ask for as many slabs as there are rows. Steps always count. */
static double kink_of(const profile *p) {
    double kink = KINK;
    size_t pieces = 0;
    for (int turn = 0; turn < 40; turn++, kink *= 2.0) {
        count(p, kink, 0, &pieces);
        if (pieces <= MANY_PIECES) break;
    }
    return kink;
}

static status check_steps(const profile *p, error *e) {
    size_t pieces;
    if (count(p, kink_of(p), SLABS_LEVELS, &pieces) <= LIMIT_SLABS) return ST_OK;
    return fail(e, ST_BAD_INPUT, "the profile has %zu steps, more than slabs can follow; smooth it", pieces);
}

status profile_check(const profile *p, error *e) {
    if (p->n < 2 || !(total_depth(p) > 0.0))
        return fail(e, ST_BAD_INPUT,
                    "the profile needs at least two depths and a floor below its top; found %zu", p->n);
    if (p->n_coatings > LIMIT_COATINGS)
        return fail(e, ST_BAD_INPUT, "%zu coatings; at most %d are possible", p->n_coatings, LIMIT_COATINGS);
    for (size_t i = 0; i < p->n; i++) {
        char text[NUMBER_TEXT];
        double sum = 0.0;
        if (!isfinite(p->depth_nm[i]) || (i && p->depth_nm[i] < p->depth_nm[i - 1]))
            return fail(e, ST_BAD_INPUT,
                        "the profile's depth %zu turns back; depths have to ascend from the top", i + 1);
        for (size_t kind = 0; kind <= p->n_coatings; kind++) {
            double f = share_of(p, kind)[i];
            if (!(f >= -SLACK && f <= 1.0 + SLACK))
                return fail(e, ST_BAD_INPUT, "the profile at depth %s nm has a share outside 0..1",
                            number_text(p->depth_nm[i], 6, text));
            sum += f;
        }
        if (sum > 1.0 + SLACK)
            return fail(e, ST_BAD_INPUT, "solid and coatings at depth %s nm sum to more than 1",
                        number_text(p->depth_nm[i], 6, text));
    }
    return check_steps(p, e);
}

/* Integral of f and of (z - centre) f over lo..hi, f linear between nodes; *at is the segment lo lies in. */
static void moments(const profile *p, const double *f, double lo, double hi, size_t at, double *mean,
                    double *first) {
    const double *z = p->depth_nm;
    double centre = 0.5 * (lo + hi), sum = 0.0, turn = 0.0;
    for (size_t i = at; i + 1 < p->n && z[i] < hi; i++) {
        double u = fmax(lo, z[i]), v = fmin(hi, z[i + 1]);
        if (!(v > u)) continue;
        double slope = (f[i + 1] - f[i]) / (z[i + 1] - z[i]);
        double middle = f[i] + slope * (0.5 * (u + v) - z[i]), w = v - u;
        sum += middle * w;
        turn += middle * w * (0.5 * (u + v) - centre) + slope * w * w * w / 12.0;
    }
    *mean = sum / (hi - lo);
    *first = turn / ((hi - lo) * (hi - lo));
}

/* Shares at the Gauss points of one slab, held inside 0..1. */
static void slab_shares(const profile *p, double lo, double hi, size_t at, double *upper, double *lower) {
    double sum_upper = 0.0, sum_lower = 0.0;
    for (size_t kind = 0; kind <= p->n_coatings; kind++) {
        double mean, first;
        moments(p, share_of(p, kind), lo, hi, at, &mean, &first);
        double off = 2.0 * sqrt(3.0) * first;
        upper[kind] = fmin(1.0, fmax(0.0, mean - off));
        lower[kind] = fmin(1.0, fmax(0.0, mean + off));
        sum_upper += upper[kind];
        sum_lower += lower[kind];
    }
    for (size_t kind = 0; kind <= p->n_coatings; kind++) {
        upper[kind] /= fmax(1.0, sum_upper);
        lower[kind] /= fmax(1.0, sum_lower);
    }
}

void slabs_free(slabs *s) {
    free(s->thickness_nm);
    free(s->share);
    *s = (slabs){ 0 };
}

status slabs_make(slabs *s, const profile *p, int level, error *e) {
    size_t pieces;
    double kink = kink_of(p);
    slabs out = { .n = count(p, kink, level, &pieces), .kinds = 1 + p->n_coatings };
    out.thickness_nm = mem_array(out.n, sizeof(double));
    out.share = mem_array(out.n, 2 * out.kinds * sizeof(double));
    if (!out.thickness_nm || !out.share) {
        slabs_free(&out);
        return NO_MEMORY(e, "the slabs of a profile");
    }
    size_t j = 0;
    for (size_t a = piece_start(p, 0); a + 1 < p->n;) {
        size_t b = piece_end(p, kink, a), n = piece_slabs(p, a, b, level), at = a;
        double top = p->depth_nm[a], thick = (p->depth_nm[b] - top) / (double)n;
        for (size_t k = 0; k < n; k++, j++) {
            double lo = top + (double)k * thick,
                   hi = k + 1 < n ? top + (double)(k + 1) * thick : p->depth_nm[b];
            while (at + 1 < b && p->depth_nm[at + 1] <= lo) at++;
            double *share = out.share + j * 2 * out.kinds;
            slab_shares(p, lo, hi, at, share, share + out.kinds);
            out.thickness_nm[j] = hi - lo;
        }
        a = piece_start(p, b);
    }
    *s = out;
    return ST_OK;
}

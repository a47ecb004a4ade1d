/* Control charts.
 *
 * A phase is the etches of one recipe between two changes of the process; nothing is carried from one phase to the next. The first points of a
 * phase (the baseline) set its centre and sigma. sigma comes from differences between neighbours (or from inside groups),
 * not from all values, so that a drift in the baseline does not hide itself. Points that are left out have no range and no
 * z, and the points around them are neighbours.
 * EWMA: e_i = lambda z_i + (1 - lambda) e_(i-1), e_0 = 0, with the exact limits k sqrt(lambda / (2 - lambda)
 * (1 - (1 - lambda)^(2 i))) (ISO 7870-6).
 * What this file does not do: it does not choose what is left out, and it says nothing in words. */
#include "judge/chart.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "judge/factors.h"

chart_options chart_defaults(void) {
    return (chart_options){ .baseline = 20, .centre = MISSING, .sigma = MISSING, .rules = RULES_ZONE,
                            .lambda = 0.2, .ewma_k = 2.962 };
}

void chart_free(chart *c) {
    free(c->points);
    free(c->phases);
    *c = (chart){ 0 };
}

double chart_lag1(const double *v, size_t n) {
    double mean = 0.0, cross = 0.0, square = 0.0;
    if (n < 3) return MISSING;
    for (size_t i = 0; i < n; i++) mean += v[i];
    mean /= (double)n;
    for (size_t i = 0; i < n; i++) {
        square += (v[i] - mean) * (v[i] - mean);
        if (i) cross += (v[i] - mean) * (v[i - 1] - mean);
    }
    return square > 0.0 ? cross / square : MISSING;
}

/* One phase at work: the points that are not left out, by index. */
typedef struct {
    chart_point *points;
    const size_t *used;
    size_t n;
    int groups; /* of several values each, not individuals */
} stretch;

static int in_period(const stretch *s, const chart_options *o, size_t i) { return o->stated && o->stated[s->used[i]]; }

static void set_baseline(const stretch *s, const chart_options *o, chart_phase *p) {
    size_t n = o->baseline && o->baseline < s->n ? o->baseline : s->n, n_spread = 0, in = 0;
    double sum = 0.0, weight = 0.0, spread = 0.0, sigma = 0.0;
    if (n < CHART_LEAST_BASELINE) n = s->n < CHART_LEAST_BASELINE ? 0 : CHART_LEAST_BASELINE;
    for (size_t i = 0; i < s->n; i++) in += (size_t)in_period(s, o, i);
    p->stated = in >= CHART_LEAST_BASELINE;
    if (p->stated) n = in;
    for (size_t i = 0, taken = 0; taken < n; i++) {
        const chart_point *q = &s->points[s->used[i]];
        if (p->stated && !in_period(s, o, i)) continue;
        taken++;
        sum += q->value * (double)q->n;
        weight += (double)q->n;
        if (!isfinite(q->spread)) continue;
        spread += q->spread;
        sigma += s->groups ? q->spread / factor_c4(q->n) : q->spread / FACTOR_D2_OF_2;
        n_spread++;
    }
    p->n_baseline = n;
    p->centre = n ? sum / weight : MISSING;
    p->spread_mean = n_spread ? spread / (double)n_spread : MISSING;
    p->sigma = n_spread && sigma > 0.0 ? sigma / (double)n_spread : MISSING;
    if (isfinite(o->centre)) p->centre = o->centre;
    if (isfinite(o->sigma)) p->sigma = o->sigma;
    if (isfinite(o->centre) && isfinite(o->sigma)) p->n_baseline = 0;
}

static void spread_limits(const stretch *s, const chart_phase *p, double range_upper, chart_point *q) {
    if (!isfinite(q->spread)) return;
    if (s->groups) { /* B3 and B4 of the group's own size */
        double c4 = factor_c4(q->n), wide = 3.0 * sqrt(1.0 - c4 * c4);
        q->spread_lo = fmax(0.0, c4 - wide) * p->sigma;
        q->spread_hi = (c4 + wide) * p->sigma;
    } else {
        q->spread_lo = 0.0;
        q->spread_hi = range_upper * p->sigma;
    }
}

/* `fresh` is where the tests look back to: the start of the phase, or the point after the last alarm. The range that leads
 * back from an alarmed point is that point's, not its neighbour's. */
static void set_limits(const stretch *s, const chart_phase *p, const chart_options *o, double *z) {
    double e = 0.0, left = 1.0; /* left: (1 - lambda)^(2 i) */
    size_t fresh = 0;
    int outside = 0; /* the average already is: it was said when it left */
    double d3 = sqrt(2.0 - 4.0 / PI), range_upper = FACTOR_D2_OF_2 + 3.0 * d3; /* D4 d2, of two */
    for (size_t i = 0; i < s->n; i++) {
        chart_point *q = &s->points[s->used[i]];
        double unit = p->sigma / sqrt((double)q->n);
        z[i] = q->z = (q->value - p->centre) / unit;
        q->lo = p->centre - 3.0 * unit;
        q->hi = p->centre + 3.0 * unit;
        e = o->lambda * q->z + (1.0 - o->lambda) * e;
        left *= (1.0 - o->lambda) * (1.0 - o->lambda);
        double reach = o->ewma_k * sqrt(o->lambda / (2.0 - o->lambda) * (1.0 - left));
        q->ewma = p->centre + e * unit;
        q->ewma_lo = p->centre - reach * unit;
        q->ewma_hi = p->centre + reach * unit;
        spread_limits(s, p, range_upper, q);
        q->alarms = chart_rules_at(z + fresh, i - fresh, o->rules);
        if ((o->rules & RULE(EWMA)) && fabs(e) > reach && !outside) q->alarms |= RULE(EWMA);
        outside = fabs(e) > reach;
        if ((o->rules & RULE(SPREAD)) && (s->groups || i > fresh) && isfinite(q->spread) &&
            (q->spread > q->spread_hi || q->spread < q->spread_lo))
            q->alarms |= RULE(SPREAD);
        if (q->alarms) fresh = i + 1;
    }
}

/* scratch: [n] of z and indices */
static void draw_phase(chart *c, size_t k, int groups, double *z, size_t *used) {
    chart_phase *p = &c->phases[k];
    stretch s = { c->points, used, 0, groups };
    for (size_t i = p->first, seen = 0; seen < p->n; i++) {
        chart_point *q = &c->points[i];
        if (q->phase != k) continue;
        seen++;
        if (!isfinite(q->value)) continue;
        if (!groups && s.n) q->spread = fabs(q->value - c->points[used[s.n - 1]].value);
        used[s.n++] = i;
    }
    p->n_used = s.n;
    set_baseline(&s, &c->options, p);
    for (size_t i = 0; i < s.n; i++) z[i] = c->points[used[i]].value;
    p->lag1 = chart_lag1(z, s.n);
    if (isfinite(p->centre) && isfinite(p->sigma)) set_limits(&s, p, &c->options, z);
}

static status check_options(const chart_options *o, size_t n, error *e) {
    if (n == 0) return fail(e, ST_BAD_INPUT, "a control chart needs at least one etch");
    if (!(o->lambda > 0.0 && o->lambda <= 1.0))
        return fail(e, ST_BAD_INPUT, "the weight lambda of the EWMA is a number above 0 and up to 1, not %g", o->lambda);
    if (!(o->ewma_k > 0.0)) return fail(e, ST_BAD_INPUT, "the limits of the EWMA lie at more than 0 sigma, not %g", o->ewma_k);
    if (!isnan(o->sigma) && !(o->sigma > 0.0))
        return fail(e, ST_BAD_INPUT, "the sigma of a control chart is a number above 0, not %g", o->sigma);
    return ST_OK;
}

static status draw(const double *values, const double *sd, const size_t *count, const size_t *phase_of, size_t n,
                   const chart_options *o, chart *out, error *e) {
    const double no = MISSING;
    chart c = { .n = n, .options = *o };
    status st = check_options(o, n, e);
    if (st != ST_OK) return st;
    double *z = mem_array(n, sizeof *z);
    size_t *used = mem_array(n, sizeof *used);
    c.points = mem_array(n, sizeof *c.points);
    c.phases = mem_array(n, sizeof *c.phases);
    if (!z || !used || !c.points || !c.phases) st = NO_MEMORY(e, "a control chart");
    for (size_t i = 0; st == ST_OK && i < n; i++) {
        size_t k = phase_of ? phase_of[i] : 0;
        if (k > c.n_phases) {
            st = fail(e, ST_BAD_INPUT, "a control chart numbers its phases in the order of their first etches");
            break;
        }
        if (k == c.n_phases) c.phases[c.n_phases++].first = i;
        c.phases[k].n++;
        c.points[i] = (chart_point){ values[i], count ? count[i] : 1, k, sd ? sd[i] : no, no, no, no, no, no, no, no, no, 0 };
        if (c.points[i].n == 0) c.points[i].value = no;
        if (sd && c.points[i].n < 2) c.points[i].spread = no;
    }
    for (size_t k = 0; st == ST_OK && k < c.n_phases; k++) draw_phase(&c, k, sd != NULL, z, used);
    c.options.stated = NULL; /* the caller's */
    free(z);
    free(used);
    if (st == ST_OK) *out = c;
    else chart_free(&c);
    return st;
}

status chart_individuals(const double *values, const size_t *phase_of, size_t n, const chart_options *o, chart *out, error *e) {
    return draw(values, NULL, NULL, phase_of, n, o, out, e);
}

status chart_means(const double *mean, const double *sd, const size_t *count, const size_t *phase_of, size_t n,
                   const chart_options *o, chart *out, error *e) {
    return draw(mean, sd, count, phase_of, n, o, out, e);
}

/* Monte Carlo by JCGM 101. A trial draws height, spacing, flat top or tip radius, coverage and spread (normal, held in
 * their ranges), the exponent (log-normal: its u works as a factor), alternatives by a fair die (shapes nobody stated,
 * level floor or tips, the rule of mixing) and the model's error (normal about its known bias; where the rule is drawn,
 * less the share of that error which the draw carries already). The graded index is not solved in each trial but read from
 * a table: spectra at up to 9 values of every uncertain input over +-3 u, three-point Lagrange in ln(R + 0.001), within
 * 1e-4 of the solver where it matters. Draws are cut at 3 u. Batches of 10000 are added until twice the standard
 * deviation of the mean of the ends is below the tolerance (7.9.4). Random numbers: splitmix64 (Steele, Lea, Flood 2014,
 * from memory), Box-Muller; one thread, one sequence. */
#include "link/trials.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "link/predict_priv.h"
#include "link/surface_priv.h"

enum { BATCH = 10000, MAX_BATCHES = 40, ALONE = 4000, SPECTRA = 2000 };
enum { MANY = 1500 }; /* nodes of the table, from where on its long axes get fewer */
static const double REACH = 3.0, SMALL = 1e-3; /* standard uncertainties; absolute R */

/* One uncertain input: its nodes in the table. Alternatives are drawn, numbers lie between lo and hi. */
typedef struct {
    size_t n; /* nodes; 1: not uncertain, or the table does not depend on it */
    int drawn;
    double u, lo, hi;
    double central; /* coordinate (0..n - 1) of the best estimate */
} axis;

typedef struct {
    const surface_input *in;
    const optics_setup *o;
    variant central;
    grid g;
    model_parts model;
    axis axis[INPUT_MODEL];
    int uncertain[INPUTS];
    double *spectra;  /* [nodes][n], ln(R + SMALL); the axes in their order, the last one fastest */
    double *weighted; /* [nodes], the same of the weighted R */
    double *block;    /* what the pointers of model and scratch stand in */
    double *one;      /* [n] */
} field;

const char *input_name(input_kind k) {
    static const char names[][16] = { "height", "shape", "tip", "coverage", "height_spread", "level", "mixing",
                                      "spacing", "model" };
    return names[k];
}

trial_options trial_defaults(void) { return (trial_options){ .tolerance = 5e-4, .seed = 1 }; }

void distribution_free(distribution *d) {
    free(d->wavelength_nm);
    free(d->R_lo);
    free(d->R_hi);
    *d = (distribution){ 0 };
}

/* ---- random numbers ---- */

static double uniform(uint64_t *state) { /* above 0, at most 1 */
    uint64_t z = *state += 0x9E3779B97F4A7C15u;
    z = (z ^ (z >> 30)) * 0xBF58476D1CE4E5B9u;
    z = (z ^ (z >> 27)) * 0x94D049BB133111EBu;
    return ((double)((z ^ (z >> 31)) >> 11) + 1.0) * 0x1p-53;
}

static double normal(uint64_t *state) { /* cut at REACH */
    double v;
    do v = sqrt(-2.0 * log(uniform(state))) * cos(2.0 * PI * uniform(state));
    while (fabs(v) > REACH);
    return v;
}

/* ---- the inputs ---- */

/* Where a number stands in a variant. The tip is flat or round. */
static double *place_of(variant *v, int k) {
    int round = v->link.tip_radius_nm > 0.0 || v->link.tip_radius_nm_u > 0.0;
    switch (k) {
    case INPUT_SHAPE: return &v->link.exponent;
    case INPUT_TIP: return round ? &v->link.tip_radius_nm : &v->link.flat_top;
    case INPUT_COVERAGE: return &v->link.coverage;
    case INPUT_SPREAD: return &v->link.height_spread;
    case INPUT_SPACING: return &v->spacing_nm;
    default: return &v->height_nm;
    }
}

/* A number at a coordinate: even steps between lo and hi, of the exponent even ratios. */
static double number_at(const axis *a, int k, double at) {
    double t = at / (double)(a->n - 1);
    return k == INPUT_SHAPE ? a->lo * pow(a->hi / a->lo, t) : a->lo + t * (a->hi - a->lo);
}

/* Moves one input of a variant to a coordinate of its axis. */
static void move_to(const field *f, int k, double at, variant *v) {
    const axis *a = &f->axis[k];
    if (a->n < 2) return;
    if (k == INPUT_SHAPE && a->drawn) v->link.exponent = shape_alternatives[(size_t)at];
    else if (k == INPUT_LEVEL) v->link.level_at_tips = (int)at;
    else if (k == INPUT_MIXING) v->mixing = at > 0.5 ? MIX_MAXWELL_GARNETT_2D : MIX_BRUGGEMAN_2D;
    else *place_of(v, k) = number_at(a, k, at);
}

static void make_axis(field *f, int k, double u, size_t nodes, double lo, double hi) {
    variant v = f->central;
    double at = *place_of(&v, k), reach = REACH * u;
    axis *a = &f->axis[k];
    *a = (axis){ .n = 1 };
    if (!(u > 0.0)) return;
    *a = (axis){ .n = nodes, .u = u, .lo = fmax(lo, at - reach), .hi = fmin(hi, at + reach) };
    if (k == INPUT_SHAPE) {
        double factor = pow(1.0 + u / at, REACH);
        a->u = log1p(u / at);
        a->lo = fmax(lo, at / factor);
        a->hi = fmin(hi, at * factor);
        a->central = (double)(nodes - 1) * log(at / a->lo) / log(a->hi / a->lo);
        return;
    }
    a->central = (double)(nodes - 1) * (at - a->lo) / (a->hi - a->lo);
}

static void make_die(field *f, int k, int wanted, size_t sides, double central) {
    f->axis[k] = wanted ? (axis){ .n = sides, .drawn = 1, .central = central } : (axis){ .n = 1 };
}

static size_t nodes_of(const field *f) {
    size_t n = 1;
    for (int k = 0; k < INPUT_MODEL; k++) n *= f->axis[k].n;
    return n;
}

/* The axes, in few nodes when there are many of them. rules: the rule of mixing is drawn. */
static void make_axes(field *f, int rules) {
    const surface_input *in = f->in;
    const link_options *l = &in->link;
    double h = in->height_nm.value, tip = l->tip_radius_nm_u > 0.0 ? l->tip_radius_nm_u : l->flat_top_u;
    int by_spacing = (f->o->n_coatings || l->tip_radius_nm > 0.0) && !in->n_cells;
    for (int fewer = 0; fewer < 2; fewer++) {
        size_t dense = fewer ? 5 : 9, shapes = fewer ? 5 : 7, few = fewer ? 3 : 5;
        make_axis(f, INPUT_HEIGHT, in->height_nm.u, dense, 0.02 * h, HUGE_VAL);
        if (l->shape_open) make_die(f, INPUT_SHAPE, 1, SHAPE_ALTERNATIVES, 0.0);
        else make_axis(f, INPUT_SHAPE, l->exponent_u, shapes, EXPONENT_MIN, EXPONENT_MAX);
        make_axis(f, INPUT_TIP, tip, few, 0.0, l->tip_radius_nm_u > 0.0 ? HUGE_VAL : FLAT_TOP_MAX);
        make_axis(f, INPUT_COVERAGE, l->coverage_u, few, 0.0, 1.0);
        make_axis(f, INPUT_SPREAD, l->height_spread_u, few, 0.0, 1.0);
        make_die(f, INPUT_LEVEL, l->height_spread > 0.0, 2, l->level_at_tips);
        make_die(f, INPUT_MIXING, rules, 2, 0.0);
        make_axis(f, INPUT_SPACING, by_spacing ? in->spacing_nm.u : 0.0, few, 0.2 * in->spacing_nm.value, HUGE_VAL);
        if (nodes_of(f) <= MANY) break;
    }
    for (int k = 0; k < INPUT_MODEL; k++) f->uncertain[k] = f->axis[k].n > 1;
    f->uncertain[INPUT_SPACING] = in->spacing_nm.u > 0.0;
    f->uncertain[INPUT_MODEL] = 1;
}

/* ---- the table ---- */

/* Three-point Lagrange: first node and weights. */
static size_t lagrange(const axis *a, double at, size_t *points, double w[3]) {
    w[0] = 1.0;
    *points = 1;
    if (a->n == 1 || a->drawn) return a->n == 1 ? 0 : (size_t)at;
    double first = fmin(fmax(floor(at + 0.5) - 1.0, 0.0), (double)(a->n - 3)), t = at - first;
    *points = 3;
    w[0] = 0.5 * (t - 1.0) * (t - 2.0);
    w[1] = -t * (t - 2.0);
    w[2] = 0.5 * t * (t - 1.0);
    return (size_t)first;
}

typedef struct {
    double at[INPUT_MODEL]; /* coordinates on the axes */
    double spacing, model;  /* in standard uncertainties */
} draw;

/* `width` values at a time: the weighted one, or the spectrum. */
static void read_table(const field *f, const double *table, size_t width, const draw *d, double *out) {
    size_t first[INPUT_MODEL], points[INPUT_MODEL], turn[INPUT_MODEL] = { 0 };
    double w[INPUT_MODEL][3];
    for (int k = 0; k < INPUT_MODEL; k++) first[k] = lagrange(&f->axis[k], d->at[k], &points[k], w[k]);
    for (size_t i = 0; i < width; i++) out[i] = 0.0;
    for (int k = 0; k >= 0;) {
        size_t node = 0;
        double weight = 1.0;
        for (int a = 0; a < INPUT_MODEL; a++) {
            node = node * f->axis[a].n + first[a] + turn[a];
            weight *= w[a][turn[a]];
        }
        for (size_t i = 0; i < width; i++) out[i] += weight * table[node * width + i];
        for (k = INPUT_MODEL - 1; k >= 0 && ++turn[k] == points[k]; k--) turn[k] = 0; /* the next combination */
    }
    for (size_t i = 0; i < width; i++) out[i] = fmax(0.0, exp(out[i]) - SMALL);
}

static status fill_table(field *f, error *e) {
    size_t n = f->g.n, nodes = nodes_of(f);
    for (size_t node = 0; node < nodes; node++) {
        variant v = f->central;
        error own = { 0 };
        double *R = f->spectra + node * n;
        v.mixing = MIX_BRUGGEMAN_2D;
        size_t rest = node;
        for (int k = INPUT_MODEL - 1; k >= 0; k--) {
            move_to(f, k, (double)(rest % f->axis[k].n), &v);
            rest /= f->axis[k].n;
        }
        status st = variant_spectrum(f->in, f->o, &v, &f->g, R, NULL, &own);
        if (st == ST_NO_RESULT) st = ST_OK; /* the best values do */
        if (st != ST_OK) return fail(e, st, "%s", own.text);
        st = photon_mean(f->o, &f->g, R, &f->weighted[node], e);
        if (st != ST_OK) return st;
        f->weighted[node] = log(fmax(0.0, f->weighted[node]) + SMALL);
        for (size_t i = 0; i < n; i++) R[i] = log(R[i] + SMALL);
    }
    return ST_OK;
}

/* ---- trials ---- */

static double trial(const field *f, const draw *d) {
    double rule, b2d, u, spacing_u = f->in->spacing_nm.u > 0.0 ? f->in->spacing_nm.u : 0.0;
    variant v = f->central;
    draw bruggeman = *d;
    move_to(f, INPUT_HEIGHT, d->at[INPUT_HEIGHT], &v);
    move_to(f, INPUT_SHAPE, d->at[INPUT_SHAPE], &v);
    v.spacing_nm = fmax(f->central.spacing_nm + d->spacing * spacing_u, 0.2 * f->central.spacing_nm);
    read_table(f, f->weighted, 1, d, &rule);
    bruggeman.at[INPUT_MIXING] = 0.0;
    b2d = rule;
    if (d->at[INPUT_MIXING] > 0.5) read_table(f, f->weighted, 1, &bruggeman, &b2d);
    double truth = interval_truth(&f->model, &v, b2d, rule, f->axis[INPUT_MIXING].n > 1, &u);
    return fmin(f->model.cap, fmax(0.0, truth + u * d->model));
}

/* The coordinate of a number z standard uncertainties off. */
static double coordinate(const axis *a, int k, double z) {
    double last = (double)(a->n - 1);
    if (a->n == 1) return 0.0;
    double range = k == INPUT_SHAPE ? log(a->hi / a->lo) : a->hi - a->lo;
    return fmin(last, fmax(0.0, a->central + z * last * a->u / range));
}

static draw draw_all(const field *f, uint64_t *state) {
    draw d;
    for (int k = 0; k < INPUT_MODEL; k++) {
        const axis *a = &f->axis[k];
        if (a->drawn) {
            d.at[k] = fmin(floor(uniform(state) * (double)a->n), (double)(a->n - 1));
        } else {
            double z = normal(state);
            d.at[k] = coordinate(a, k, z);
            if (k == INPUT_SPACING) d.spacing = z;
        }
    }
    d.model = normal(state);
    return d;
}

static int ascending(const void *a, const void *b) {
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}
/* JCGM 101, 7.7.2: the ordered values that leave 2.5 % on either side. */
static void ends(double *v, size_t n, double *lo, double *hi) {
    qsort(v, n, sizeof *v, ascending);
    *lo = v[(size_t)(0.025 * (double)n)];
    *hi = v[n - 1 - (size_t)(0.025 * (double)n)];
}

static int settled(double (*batch)[2], size_t h, double tolerance) {
    for (int side = 0; side < 2 && h > 1; side++) {
        double mean = 0.0, square = 0.0;
        for (size_t i = 0; i < h; i++) mean += batch[i][side] / (double)h;
        for (size_t i = 0; i < h; i++) square += (batch[i][side] - mean) * (batch[i][side] - mean);
        if (2.0 * sqrt(square / (double)(h * (h - 1))) > tolerance) return 0;
    }
    return h > 1;
}

/* Mean and sd of all values so far. */
static void moments(const double *v, size_t n, double *mean, double *sd) {
    double sum = 0.0, square = 0.0;
    for (size_t i = 0; i < n; i++) sum += v[i];
    *mean = sum / (double)n;
    for (size_t i = 0; i < n; i++) square += (v[i] - *mean) * (v[i] - *mean);
    *sd = sqrt(square / (double)(n - 1));
}

static status run_weighted(const field *f, const trial_options *t, distribution *out, error *e) {
    double batch[MAX_BATCHES][2];
    size_t h = 0;
    uint64_t state = t->seed;
    double *v = mem_array((MAX_BATCHES + 1) * BATCH, sizeof *v), *copy = v ? v + MAX_BATCHES * BATCH : NULL;
    if (!v) return NO_MEMORY(e, "the trials");
    out->tolerance = t->tolerance;
    while (h < MAX_BATCHES && !settled(batch, h, out->tolerance)) {
        for (size_t i = 0; i < BATCH; i++) {
            draw d = draw_all(f, &state);
            v[h * BATCH + i] = trial(f, &d);
        }
        memcpy(copy, v + h * BATCH, BATCH * sizeof *copy);
        ends(copy, BATCH, &batch[h][0], &batch[h][1]);
        h++;
        moments(v, h * BATCH, &out->mean, &out->sd);
        out->tolerance = fmax(t->tolerance, 0.05 * out->sd);
    }
    size_t n = out->trials = h * BATCH;
    out->settled = settled(batch, h, out->tolerance);
    ends(v, n, &out->lo, &out->hi);
    out->median = 0.5 * (v[n / 2 - 1] + v[n / 2]);
    free(v);
    return ST_OK;
}

/* One input free, the others at their best estimates (JCGM 101, annex B: what a sensitivity coefficient was). */
static void run_alone(const field *f, uint64_t seed, double sd_of[INPUTS]) {
    for (int k = 0; k < INPUTS; k++) {
        double mean = 0.0, square = 0.0;
        uint64_t state = seed;
        sd_of[k] = 0.0;
        for (size_t i = 0; i < ALONE && f->uncertain[k]; i++) {
            draw all = draw_all(f, &state), d = { .spacing = 0.0 };
            for (int a = 0; a < INPUT_MODEL; a++) d.at[a] = a == k ? all.at[a] : f->axis[a].central;
            if (k == INPUT_SPACING) d.spacing = all.spacing;
            if (k == INPUT_MODEL) d.model = all.model;
            double v = trial(f, &d), off = v - mean;
            mean += off / (double)(i + 1); /* Welford */
            square += off * (v - mean);
            sd_of[k] = sqrt(square / (double)(ALONE - 1));
        }
    }
}

static status run_spectrum(const field *f, uint64_t seed, distribution *out, error *e) {
    size_t n = f->g.n;
    uint64_t state = seed;
    double *v = mem_array(n * SPECTRA, sizeof *v);
    out->wavelength_nm = mem_array(n, sizeof *v);
    out->R_lo = mem_array(n, sizeof *v);
    out->R_hi = mem_array(n, sizeof *v);
    if (!v || !out->wavelength_nm || !out->R_lo || !out->R_hi) {
        free(v);
        return NO_MEMORY(e, "the trials");
    }
    for (size_t k = 0; k < SPECTRA; k++) {
        draw d = draw_all(f, &state);
        read_table(f, f->spectra, n, &d, f->one);
        for (size_t i = 0; i < n; i++) {
            const model_parts *m = &f->model;
            double truth = fmin(m->cap_at[i], fmax(0.0, f->one[i] - m->bias_at[i]));
            double res = f->axis[INPUT_MIXING].n > 1 ? m->res_rule_at[i] : m->res_at[i];
            v[i * SPECTRA + k] = fmin(m->cap_at[i], fmax(0.0, truth + res * d.model));
        }
    }
    out->n = n;
    for (size_t i = 0; i < n; i++) {
        out->wavelength_nm[i] = f->g.wavelength_nm[i];
        ends(v + i * SPECTRA, SPECTRA, &out->R_lo[i], &out->R_hi[i]);
    }
    free(v);
    return ST_OK;
}

/* ---- all of it ---- */

static status make_room(field *f, error *e) {
    size_t n = f->g.n, nodes = nodes_of(f);
    double *old = f->block;
    f->block = mem_array(nodes * (n + 1) + 5 * n, sizeof *f->block);
    if (f->block) {
        f->spectra = f->block;
        f->weighted = f->spectra + nodes * n;
        f->one = f->weighted + nodes;
        f->model.bias_at = f->one + n;
        f->model.res_at = f->one + 2 * n;
        f->model.cap_at = f->one + 3 * n;
        f->model.res_rule_at = f->one + 4 * n;
    }
    free(old);
    return f->block ? ST_OK : NO_MEMORY(e, "the trials");
}

/* The model's error at the best estimates, from a prediction without uncertain inputs; then the axes. */
static status prepare(field *f, error *e) {
    surface_input exact = *f->in;
    link_options *l = &exact.link;
    prediction p = { 0 };
    exact.height_nm.u = exact.spacing_nm.u = 0.0;
    l->exponent_u = l->flat_top_u = l->tip_radius_nm_u = l->coverage_u = l->height_spread_u = 0.0;
    l->shape_open = 0;
    status st = predict(&exact, f->o, &p, e);
    if (st != ST_OK) return st;
    if (strcmp(p.model, "graded") != 0 || !isfinite(p.weighted_hi) || !(f->central.height_nm > 0.0) ||
        f->in->measured) {
        prediction_free(&p);
        return fail(
            e, ST_NO_RESULT,
            "no trials: the surface is planar, goes by facets, is refused, or lacks a spacing or a shape");
    }
    st = grid_coarse(f->o, &f->g, e);
    make_axes(f, 1);
    if (st == ST_OK) st = make_room(f, e);
    if (st == ST_OK) st = interval_fill(&exact, f->o, &f->central, &f->g, &p, &f->model, e);
    if (st == ST_OK) make_axes(f, interval_rules_matter(&f->model, &f->central)); /* fits into the room for more */
    prediction_free(&p);
    return st;
}

status predict_trials(const surface_input *in, const optics_setup *o, const trial_options *t,
                      distribution *out, error *e) {
    distribution d = { 0 };
    field f = { .in = in, .o = o, .central = variant_central(in, o) };
    *out = (distribution){ 0 };
    status st =
        t->tolerance > 0.0 ? ST_OK : fail(e, ST_BAD_INPUT, "the tolerance of the trials has to be above 0");
    if (st == ST_OK) st = prepare(&f, e);
    if (st == ST_OK) st = fill_table(&f, e);
    if (st == ST_OK) st = run_weighted(&f, t, &d, e);
    if (st == ST_OK) run_alone(&f, t->seed, d.sd_of);
    if (st == ST_OK) st = run_spectrum(&f, t->seed, &d, e);
    if (st == ST_OK) {
        memcpy(d.varied, f.uncertain, sizeof d.varied);
        *out = d;
        d = (distribution){ 0 };
    }
    distribution_free(&d);
    free(f.block);
    free(f.g.wavelength_nm);
    return st;
}

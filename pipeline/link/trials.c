/* Monte Carlo by JCGM 101. A trial draws height and spacing (normal), exponent (log-normal: its u works as a factor),
 * level (uniform between floor and tips) and the model's error (normal about its known bias). The graded index (2-D
 * Bruggeman, as the tables of the model's error want it) is not solved in each trial but read from a surface: spectra at 9
 * heights, 7 exponents and 2 levels over +-3 u, three-point Lagrange in ln(R + 0.001), within 1e-4 of the solver where it
 * matters. Draws are cut at 3 u. Batches of 10000 are added until twice the standard deviation of the mean of the ends is
 * below the tolerance (7.9.4). Random numbers: splitmix64 (Steele, Lea, Flood 2014, from memory), Box-Muller. */
#include "link/trials.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "link/predict_priv.h"
#include "link/surface_priv.h"

enum { HEIGHTS = 9, SHAPES = 7, LEVELS = 2, BATCH = 10000, MAX_BATCHES = 40, ALONE = 4000, SPECTRA = 2000 };
static const double REACH = 3.0, SMALL = 1e-3; /* standard uncertainties; absolute R */

typedef struct {
    const surface_input *in;
    const optics_setup *o;
    variant central;
    grid g;
    model_parts model;
    size_t n_heights, n_shapes, n_levels;
    double factor;    /* of the exponent, one u */
    double *spectra;  /* [levels][shapes][heights][n], ln(R + SMALL) */
    double *weighted; /* [levels][shapes][heights], the same of the weighted R */
    double *block;    /* what the pointers of model and scratch stand in */
    double *one;      /* [n] */
} field;

const char *input_name(input_kind k) {
    static const char names[][8] = { "height", "shape", "level", "spacing", "model" };
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

/* ---- the surface ---- */

static double node(size_t i, size_t n) {
    return n > 1 ? REACH * (2.0 * (double)i / (double)(n - 1) - 1.0) : 0.0;
}

static double height_at(const field *f, double z) {
    double u = f->in->height_nm.u > 0.0 ? f->in->height_nm.u : 0.0;
    return fmax(f->central.height_nm + z * u, 0.02 * f->central.height_nm);
}
static double exponent_at(const field *f, double z) {
    return fmin(EXPONENT_MAX, fmax(EXPONENT_MIN, f->central.exponent * pow(f->factor, z)));
}
static double spacing_at(const field *f, double z) {
    double u = f->in->spacing_nm.u > 0.0 ? f->in->spacing_nm.u : 0.0;
    return fmax(f->central.spacing_nm + z * u, 0.2 * f->central.spacing_nm);
}

/* Three-point Lagrange: first node and weights. */
static size_t lagrange(double z, size_t n, double w[3]) {
    if (n == 1) {
        w[0] = 1.0;
        w[1] = w[2] = 0.0;
        return 0;
    }
    double x = (z / REACH + 1.0) * 0.5 * (double)(n - 1);
    double first = fmin(fmax(floor(x + 0.5) - 1.0, 0.0), (double)(n - 3)), t = x - first;
    w[0] = 0.5 * (t - 1.0) * (t - 2.0);
    w[1] = -t * (t - 2.0);
    w[2] = 0.5 * t * (t - 1.0);
    return (size_t)first;
}

typedef struct {
    double height, shape, level, spacing, model;
} draw; /* in standard uncertainties; level 0..1 */

/* `width` values at a time: the weighted one, or the spectrum. */
static void read_surface(const field *f, const double *table, size_t width, const draw *d, double *out) {
    double wh[3], ws[3];
    size_t h = lagrange(d->height, f->n_heights, wh), s = lagrange(d->shape, f->n_shapes, ws);
    size_t nh = f->n_heights > 1 ? 3 : 1, ns = f->n_shapes > 1 ? 3 : 1;
    for (size_t i = 0; i < width; i++) {
        double level[LEVELS] = { 0.0, 0.0 };
        for (size_t l = 0; l < f->n_levels; l++) {
            double sum = 0.0;
            for (size_t b = 0; b < ns; b++)
                for (size_t a = 0; a < nh; a++)
                    sum += ws[b] * wh[a] *
                           table[(((l * f->n_shapes) + s + b) * f->n_heights + h + a) * width + i];
            level[l] = fmax(0.0, exp(sum) - SMALL);
        }
        out[i] = f->n_levels > 1 ? (1.0 - d->level) * level[0] + d->level * level[1] : level[0];
    }
}

static status fill_surface(field *f, error *e) {
    size_t n = f->g.n, k = 0;
    status st = ST_OK;
    for (size_t l = 0; l < f->n_levels; l++)
        for (size_t s = 0; s < f->n_shapes; s++)
            for (size_t h = 0; h < f->n_heights && st == ST_OK; h++, k++) {
                variant v = f->central;
                error own = { 0 };
                double *R = f->spectra + k * n;
                v.mixing = MIX_BRUGGEMAN_2D;
                v.height_nm = height_at(f, node(h, f->n_heights));
                v.exponent = exponent_at(f, node(s, f->n_shapes));
                if (f->n_levels > 1) v.level_at_tips = (int)l;
                st = variant_spectrum(f->in, f->o, &v, &f->g, R, NULL, &own);
                if (st == ST_NO_RESULT) st = ST_OK; /* the best values do */
                if (st != ST_OK) return fail(e, st, "%s", own.text);
                st = photon_mean(f->o, &f->g, R, &f->weighted[k], e);
                f->weighted[k] = log(fmax(0.0, f->weighted[k]) + SMALL);
                for (size_t i = 0; i < n; i++) R[i] = log(R[i] + SMALL);
            }
    return st;
}

/* ---- trials ---- */

static double trial(const field *f, const draw *d) {
    double b2d, u;
    variant v = f->central;
    v.height_nm = height_at(f, d->height);
    v.exponent = exponent_at(f, d->shape);
    v.spacing_nm = spacing_at(f, d->spacing);
    read_surface(f, f->weighted, 1, d, &b2d);
    double truth = interval_truth(&f->model, &v, b2d, &u);
    return fmin(f->model.cap, fmax(0.0, truth + u * d->model));
}

static draw draw_all(const field *f, uint64_t *state) {
    draw d;
    d.height = normal(state);
    d.shape = normal(state);
    d.level = f->n_levels > 1 ? uniform(state) : 0.0;
    d.spacing = normal(state);
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
        for (size_t i = 0; i < ALONE; i++) {
            draw all = draw_all(f, &state), d = { .level = f->n_levels > 1 ? 0.5 : 0.0 };
            if (k == INPUT_HEIGHT)
                d.height = all.height;
            else if (k == INPUT_SHAPE)
                d.shape = all.shape;
            else if (k == INPUT_LEVEL)
                d.level = all.level;
            else if (k == INPUT_SPACING)
                d.spacing = all.spacing;
            else
                d.model = all.model;
            double v = trial(f, &d), off = v - mean;
            mean += off / (double)(i + 1); /* Welford */
            square += off * (v - mean);
        }
        sd_of[k] = sqrt(square / (double)(ALONE - 1));
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
        read_surface(f, f->spectra, n, &d, f->one);
        for (size_t i = 0; i < n; i++) {
            const model_parts *m = &f->model;
            double truth = fmin(m->cap_at[i], fmax(0.0, f->one[i] - m->bias_at[i]));
            v[i * SPECTRA + k] = fmin(m->cap_at[i], fmax(0.0, truth + m->res_at[i] * d.model));
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

/* The model's error at the best estimates, from a prediction without uncertain inputs. */
static status prepare(field *f, error *e) {
    surface_input exact = *f->in;
    prediction p = { 0 };
    exact.height_nm.u = exact.spacing_nm.u = 0.0;
    exact.link.exponent_u = 0.0;
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
    if (st == ST_OK) {
        size_t n = f->g.n, nodes = f->n_heights * f->n_shapes * f->n_levels;
        f->block = mem_array(nodes * (n + 1) + 4 * n, sizeof *f->block);
        if (!f->block)
            st = NO_MEMORY(e, "the trials");
        else {
            f->spectra = f->block;
            f->weighted = f->spectra + nodes * n;
            f->one = f->weighted + nodes;
            f->model.bias_at = f->one + n;
            f->model.res_at = f->one + 2 * n;
            f->model.cap_at = f->one + 3 * n;
        }
    }
    if (st == ST_OK) st = interval_fill(&exact, f->o, &f->central, &f->g, &p, &f->model, e);
    prediction_free(&p);
    return st;
}

status predict_trials(const surface_input *in, const optics_setup *o, const trial_options *t,
                      distribution *out, error *e) {
    const link_options *l = &in->link;
    distribution d = { 0 };
    field f = { .in = in,
                .o = o,
                .central = { .height_nm = in->height_nm.value,
                             .spacing_nm = in->spacing_nm.value,
                             .exponent = l->exponent,
                             .level_at_tips = l->level_at_tips,
                             .mixing = o->mixing },
                .n_heights = in->height_nm.u > 0.0 ? HEIGHTS : 1,
                .n_shapes = l->exponent_u > 0.0 ? SHAPES : 1,
                .n_levels = l->height_spread > 0.0 ? LEVELS : 1,
                .factor = 1.0 + l->exponent_u / l->exponent };
    *out = (distribution){ 0 };
    status st =
        t->tolerance > 0.0 ? ST_OK : fail(e, ST_BAD_INPUT, "the tolerance of the trials has to be above 0");
    if (st == ST_OK) st = prepare(&f, e);
    if (st == ST_OK) st = fill_surface(&f, e);
    if (st == ST_OK) st = run_weighted(&f, t, &d, e);
    if (st == ST_OK) run_alone(&f, t->seed, d.sd_of);
    if (st == ST_OK) st = run_spectrum(&f, t->seed, &d, e);
    if (st == ST_OK) {
        *out = d;
        d = (distribution){ 0 };
    }
    distribution_free(&d);
    free(f.block);
    free(f.g.wavelength_nm);
    return st;
}

/* The 95 % interval of a prediction and its budget.
 *
 * Model. Rigorous coupled-wave calculations of ordered cones and paraboloids give, against the graded index with the
 * 2-D Bruggeman rule, a mean error b(p/wl, h/wl) and a standard uncertainty u (which contains b): optics/trust.h.
 * The best estimate of the truth is therefore R(Bruggeman 2-D) - b with the residual standard uncertainty
 * sqrt(u^2 - b^2), kept at half of u at least (a square lattice, which took no part in the tables, needs that
 * much). The two ends of the bracket of mixing rules, Bruggeman 2-D and Maxwell Garnett 2-D, give u_mix =
 * |difference| (over a spectrum: its rms over +-20 % in wavelength, because R oscillates); the table holds that error
 * already, so the larger of both counts, not their sum. Errors of the model hang together over the spectrum: they are
 * summed linearly for the weighted value and taken times 0.75 (rms of error over that sum: 0.73).
 *   The weighted value of what the calculations were made for (bare features in air, normal incidence, photons of
 * 300-1200 nm, one height, solid floor) has a sharper table, case by case: trust_weighted(). A square lattice, which
 * took no part in it, reflects more than the hexagonal one, by 0.13 of its value in the mean of 20 cases, sd 0.2 (0.07
 * above a R of 3 %); not knowing which lattice it is, the truth is looked for 0.06 above the hexagonal value, with the
 * standard uncertainty 0.14 of it and 0.25 points. Features that merge into ridges come close to the plain graded index,
 * which the interval holds too. Valid up to a spacing of 450 nm; up to 600 nm it gives way to the general recipe.
 *   Elsewhere than in air the table is entered with p n and scaled by the polished reflectance at normal incidence in
 * that ambient. R passes the polished value only in p-polarized light, near whose Brewster angle that vanishes: the
 * cap is the larger of the polished values at the angle and at 0. Oblique light: 48 rigorous spectral points (pitch 100
 * and 200 nm, heights 200 and 500 nm) deviate by 3.1 points rms at 45 degrees and 6.1 at 70: 0.065 sin^2 is added in
 * quadrature.
 * Inputs. Height, flat top or tip radius, coverage and spread by evaluation at +- 2 u (R falls about exponentially with
 * height: the ends are lopsided), shape at the exponent times and over (1 + u/q)^2, spacing (where a film, a round tip or
 * the model needs it) at +- u, doubled; a spread of heights reaches to the other alignment (all on one floor, all tips
 * level), on that side only. A shape nobody stated reaches from the cone to the paraboloid: published profiles of such
 * textures and the tables of the model's error range that far, and nothing tells which of them is likelier.
 * What is not in it: a wrong kind of shape, correlated disorder, the optical constants, the rear side. */
#include <math.h>
#include <stddef.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "link/predict_priv.h"
#include "link/surface_priv.h"

static const double OBLIQUE = 0.065;   /* per sin^2 of the angle, absolute R */
static const double RESIDUAL = 0.5;    /* least share of u that is not bias */
static const double TOGETHER = 0.75;   /* weighted error over the linear sum of u */
static const double LATTICE = 0.06, LATTICE_U = 0.14, LATTICE_FLOOR = 0.0025; /* of the weighted R; absolute */
static const double STUDIED_NM = 450.0, GENERAL_NM = 600.0;                  /* spacings */
static const double MIX_WINDOW = 0.2;  /* relative wavelength */

typedef struct {
    const surface_input *in;
    const optics_setup *o;
    const variant *central;
    const grid *g;
    double *plain, *b2d, *mg2d, *cap, *normal, *air; /* [n] spectra; the last two polished, at 0 */
    double *u, *bias, *truth;                    /* [n] model */
    double *up2, *down2;                         /* [n] squared reaches of the inputs, 95 % */
    double *one, *two;                           /* [n] work */
    double weighted, weighted_b2d, weighted_up2, weighted_down2;
} workspace;

static double sq(double x) { return x * x; }

/* An end of an input may be an odd texture that does not quite settle: the best values do for a width. */
static status spectrum(workspace *w, const variant *v, double *R, error *e) {
    error own = { 0 };
    status st = variant_spectrum(w->in, w->o, v, w->g, R, NULL, &own);
    return st == ST_OK || st == ST_NO_RESULT ? ST_OK : fail(e, st, "%s", own.text);
}

/* ---- what was calculated case by case ---- */

/* 1: by its currents this is AM1.5G (46.456 and 38.061 mA/cm2 up to 1200 and 1000 nm, ASTM G173-03), not an own lamp. */
static int is_am15g(const sun *s) {
    double red = 0.0, all = 0.0;
    error ignored = { 0 };
    return sun_current(s, 300.0, 1200.0, &all, &ignored) == ST_OK && sun_current(s, 300.0, 1000.0, &red, &ignored) == ST_OK &&
           fabs(all - 46.456) < 0.1 && fabs(red - 38.061) < 0.1;
}

/* 1: the weighted table was made for this. */
static int studied(const workspace *w) {
    const optics_setup *o = w->o;
    const link_options *l = &w->in->link;
    int light = !(o->reflect.angle_deg > 0.0) && !o->reflect.hemispherical && !o->front.glass &&
                o->sun->weight == WEIGHT_PHOTONS && fabs(o->band_lo_nm - 300.0) < 0.5 && fabs(o->band_hi_nm - 1200.0) < 0.5;
    int surface = !w->in->measured && !w->in->pores && !o->n_coatings && !(l->coverage < 1.0) &&
                  !(fabs(l->height_by_size) > 0.0) && w->central->link.exponent >= 0.8 && w->central->link.exponent <= 2.5 &&
                  !(l->flat_top > 0.0) && !(l->tip_radius_nm > 0.0) &&
                  !strncmp(o->substrate->name ? o->substrate->name : "", "silicon", 7) && fabs(ambient_index(o) - 1.0) < 0.01;
    return light && surface && w->in->spacing_nm.value > 0.0 && w->in->spacing_nm.value < GENERAL_NM && is_am15g(o->sun);
}

/* Weighted truth of a graded index value, and its standard uncertainty (u may be NULL). */
static double studied_truth(double b2d, const variant *v, double *u) {
    double shift, read;
    trust_weighted(v->spacing_nm, v->height_nm, v->link.exponent, &shift, &read);
    double hexagonal = fmax(0.0, b2d + shift);
    if (u) *u = hypot(hypot(LATTICE_U * hexagonal, LATTICE_FLOOR), read);
    return (1.0 + LATTICE) * hexagonal;
}

/* Share of the general recipe: 0 up to STUDIED_NM, 1 from GENERAL_NM. */
static double general_share(double spacing_nm) {
    return fmin(1.0, fmax(0.0, (spacing_nm - STUDIED_NM) / (GENERAL_NM - STUDIED_NM)));
}

int interval_rules_matter(const model_parts *m, const variant *v) {
    return !m->studied || general_share(v->spacing_nm) > 0.0;
}

double interval_truth(const model_parts *m, const variant *v, double b2d, double rule, int drawn, double *u) {
    double general = m->studied ? general_share(v->spacing_nm) : 1.0, sharp_u = 0.0;
    double sharp = m->studied ? studied_truth(b2d, v, &sharp_u) : 0.0;
    *u = general * (drawn ? m->res_rule : m->res) + (1.0 - general) * sharp_u;
    return fmin(m->cap, fmax(0.0, general * fmax(0.0, rule - m->bias) + (1.0 - general) * sharp));
}

/* ---- inputs ---- */

static void reach_of(double plain, double a, double b, double k, double *up2, double *down2) {
    double up = fmax(fmax(a, b) - plain, 0.0), down = fmax(plain - fmin(a, b), 0.0);
    *up2 += sq(k * up);
    *down2 += sq(k * down);
}

/* Adds one input by its two ends; k: how many times their distance from the plain value is 95 %. */
static status add_input(workspace *w, const variant *a, const variant *b, double k, double *half_difference, error *e) {
    status st = spectrum(w, a, w->one, e);
    if (st == ST_OK) st = spectrum(w, b, w->two, e);
    double wa = 0.0, wb = 0.0;
    if (st == ST_OK) st = photon_mean(w->o, w->g, w->one, &wa, e);
    if (st == ST_OK) st = photon_mean(w->o, w->g, w->two, &wb, e);
    if (st != ST_OK) return st;
    *half_difference = 0.5 * fabs(wa - wb); /* of the plain value */
    if (studied(w)) { /* the model's error moves with the input */
        double here = studied_truth(w->weighted, w->central, NULL) - w->weighted;
        wa = studied_truth(wa, a, NULL) - here;
        wb = studied_truth(wb, b, NULL) - here;
    }
    for (size_t i = 0; i < w->g->n; i++)
        reach_of(w->plain[i], w->one[i], w->two[i], k, &w->up2[i], &w->down2[i]);
    reach_of(w->weighted, wa, wb, k, &w->weighted_up2, &w->weighted_down2);
    return ST_OK;
}

static status add_height(workspace *w, double u, double *budget, error *e) {
    variant a = *w->central, b = *w->central;
    a.height_nm = fmax(a.height_nm - 2.0 * u, 0.0);
    b.height_nm += 2.0 * u;
    double ignored;
    status st = add_input(w, &a, &b, 1.0, &ignored, e);
    a.height_nm = fmax(w->central->height_nm - u, 0.0);
    b.height_nm = w->central->height_nm + u;
    return st == ST_OK ? add_input(w, &a, &b, 0.0, budget, e) : st;
}

/* An exponent is positive: its u works as a factor 1 + u/q either way, squared for the ends of 95 %. */
static status add_shape(workspace *w, double u, double *budget, error *e) {
    double q = w->central->link.exponent, factor = 1.0 + u / q, ignored;
    variant a = *w->central, b = *w->central;
    a.link.exponent = fmax(q / (factor * factor), EXPONENT_MIN);
    b.link.exponent = fmin(q * factor * factor, EXPONENT_MAX);
    status st = add_input(w, &a, &b, 1.0, &ignored, e);
    a.link.exponent = fmax(q / factor, EXPONENT_MIN);
    b.link.exponent = fmin(q * factor, EXPONENT_MAX);
    return st == ST_OK ? add_input(w, &a, &b, 0.0, budget, e) : st;
}

/* Nobody stated the shape: the interval reaches to the lowest and the highest of the alternatives. */
static status add_alternatives(workspace *w, double *budget, error *e) {
    variant ends[2];
    double least = (double)INFINITY, most = -(double)INFINITY;
    for (int i = 0; i < SHAPE_ALTERNATIVES; i++) {
        variant v = *w->central;
        double mean = 0.0;
        v.link.exponent = shape_alternatives[i];
        status st = spectrum(w, &v, w->one, e);
        if (st == ST_OK) st = photon_mean(w->o, w->g, w->one, &mean, e);
        if (st != ST_OK) return st;
        if (studied(w)) mean = studied_truth(mean, &v, NULL);
        if (mean < least) ends[0] = v;
        if (mean > most) ends[1] = v;
        least = fmin(least, mean);
        most = fmax(most, mean);
    }
    status st = add_input(w, &ends[0], &ends[1], 1.0, budget, e);
    *budget /= sqrt(3.0); /* of equally likely values over the half-width */
    return st;
}

/* A number of the shape, held within its range: ends at 2 u, budget at u. */
static status add_number(workspace *w, size_t member, double u, double hi, double *budget, error *e) {
    double half[2] = { 0.0, 0.0 };
    if (!(u > 0.0)) return ST_OK;
    for (int k = 1; k >= 0; k--) {
        variant a = *w->central, b = a;
        double *low = (double *)(void *)((char *)&a.link + member), *high = (double *)(void *)((char *)&b.link + member);
        *low = fmax(0.0, *low - (double)(k + 1) * u);
        *high = fmin(hi, *high + (double)(k + 1) * u);
        status st = add_input(w, &a, &b, (double)k, &half[k], e);
        if (st != ST_OK) return st;
    }
    *budget = hypot(*budget, half[0]);
    return ST_OK;
}

static status add_shape_numbers(workspace *w, const link_options *l, prediction *out, error *e) {
    status st = add_number(w, offsetof(link_options, flat_top), l->flat_top_u, FLAT_TOP_MAX, &out->u_tip, e);
    if (st == ST_OK)
        st = add_number(w, offsetof(link_options, tip_radius_nm), l->tip_radius_nm_u, HUGE_VAL, &out->u_tip, e);
    if (st == ST_OK) st = add_number(w, offsetof(link_options, coverage), l->coverage_u, 1.0, &out->u_coverage, e);
    if (st == ST_OK)
        st = add_number(w, offsetof(link_options, height_spread), l->height_spread_u, 1.0, &out->u_spread, e);
    return st;
}

static status add_inputs(workspace *w, prediction *out, error *e) {
    const surface_input *in = w->in;
    const link_options *l = &in->link;
    status st = ST_OK;
    if (in->measured) return st; /* the profile is given, with all it holds */
    if (in->height_nm.u > 0.0) st = add_height(w, in->height_nm.u, &out->u_height, e);
    if (st == ST_OK && l->shape_open) st = add_alternatives(w, &out->u_shape, e);
    else if (st == ST_OK && l->exponent_u > 0.0) st = add_shape(w, l->exponent_u, &out->u_shape, e);
    if (st == ST_OK && l->height_spread > 0.0) {
        variant other = *w->central;
        other.link.level_at_tips = !other.link.level_at_tips;
        st = add_input(w, w->central, &other, 1.0, &out->u_spread, e); /* the central one reaches nowhere */
    }
    if (st == ST_OK) st = add_shape_numbers(w, l, out, e);
    int by_spacing = w->o->n_coatings || l->tip_radius_nm > 0.0;
    if (st == ST_OK && by_spacing && in->spacing_nm.u > 0.0 && !in->n_cells) {
        variant a = *w->central, b = *w->central;
        a.spacing_nm = fmax(a.spacing_nm - in->spacing_nm.u, 0.5 * a.spacing_nm);
        b.spacing_nm += in->spacing_nm.u;
        st = add_input(w, &a, &b, 2.0, &out->u_spacing, e);
    }
    return st;
}

/* ---- model ---- */

static void model_at(const workspace *w, double spacing_nm, size_t i, double *u, double *bias) {
    double scale = w->air[i] > 0.0 ? fmin(1.0, w->normal[i] / w->air[i]) : 1.0, cap = w->cap[i];
    double sine = w->o->reflect.hemispherical ? sqrt(0.5) : sin(w->o->reflect.angle_deg * PI / 180.0);
    trust_model(spacing_nm * ambient_index(w->o), w->central->height_nm, w->g->wavelength_nm[i], u, bias);
    *u = fmin(hypot(*u, OBLIQUE * sq(sine)) * scale, cap);
    *bias = fmax(-cap, fmin(cap, *bias * scale));
}

/* rms of the difference of the two rules over +-20 % in wavelength. */
static double mix_around(const workspace *w, size_t i) {
    const double *wl = w->g->wavelength_nm;
    double sum = 0.0, n = 0.0;
    for (size_t j = 0; j < w->g->n; j++) {
        if (fabs(wl[j] / wl[i] - 1.0) > MIX_WINDOW) continue;
        sum += sq(w->b2d[j] - w->mg2d[j]);
        n += 1.0;
    }
    return sqrt(sum / n);
}

static status rules(workspace *w, double *u_mixing, error *e) {
    variant v = *w->central;
    v.mixing = MIX_BRUGGEMAN_2D;
    status st = spectrum(w, &v, w->b2d, e);
    v.mixing = MIX_MAXWELL_GARNETT_2D;
    if (st == ST_OK) st = spectrum(w, &v, w->mg2d, e);
    if (st == ST_OK) st = spectrum(w, w->central, w->plain, e);
    optics_setup upright = *w->o;
    upright.reflect.angle_deg = 0.0;
    upright.reflect.hemispherical = 0;
    if (st == ST_OK) st = polished_spectrum(&upright, 0, w->g, w->normal, e);
    if (st == ST_OK) st = polished_spectrum(&upright, 1, w->g, w->air, e);
    if (st == ST_OK) st = polished_spectrum(w->o, 0, w->g, w->cap, e);
    for (size_t i = 0; i < w->g->n && st == ST_OK; i++) /* no texture reflects more than these */
        w->cap[i] = fmax(fmax(w->cap[i], w->normal[i]), fmax(w->plain[i], w->b2d[i]));
    if (st == ST_OK) st = photon_mean(w->o, w->g, w->plain, &w->weighted, e);
    double mg2d = 0.0;
    if (st == ST_OK) st = photon_mean(w->o, w->g, w->b2d, &w->weighted_b2d, e);
    if (st == ST_OK) st = photon_mean(w->o, w->g, w->mg2d, &mg2d, e);
    if (st == ST_OK) *u_mixing = fabs(mg2d - w->weighted_b2d);
    return st;
}

/* The bias moves with the spacing: half its change over +- u. */
static status spacing_part(workspace *w, double *u, error *e) {
    double u_spacing = w->in->spacing_nm.u, p = w->in->spacing_nm.value, low = 0.0, high = 0.0, ignored;
    *u = 0.0;
    if (!(u_spacing > 0.0)) return ST_OK;
    for (size_t i = 0; i < w->g->n; i++) {
        model_at(w, fmax(p - u_spacing, 0.5 * p), i, &ignored, &w->one[i]);
        model_at(w, p + u_spacing, i, &ignored, &w->two[i]);
    }
    status st = photon_mean(w->o, w->g, w->one, &low, e);
    if (st == ST_OK) st = photon_mean(w->o, w->g, w->two, &high, e);
    *u = 0.5 * fabs(high - low);
    return st;
}

static status model(workspace *w, prediction *out, error *e) {
    for (size_t i = 0; i < w->g->n; i++) {
        model_at(w, w->in->spacing_nm.value, i, &w->u[i], &w->bias[i]);
        w->truth[i] = fmax(0.0, fmin(w->cap[i], w->b2d[i] - w->bias[i]));
    }
    status st = photon_mean(w->o, w->g, w->u, &out->u_model, e);
    out->u_model *= TOGETHER;
    return st == ST_OK ? photon_mean(w->o, w->g, w->bias, &out->model_bias, e) : st;
}

static double residual(double u, double bias) { return sqrt(fmax(sq(u) - sq(bias), sq(RESIDUAL * u))); }

/* A coin between two rules has half their difference as sd: what is left of res then. */
static double without_rule(double res, double difference, double u) {
    return sqrt(fmax(sq(res) - sq(0.5 * difference), sq(RESIDUAL * u)));
}

/* ---- the interval ---- */

typedef struct { double lo, hi; } range;

/* truth -+ everything, inside 0..cap, holding the plain value. */
static range join(double plain, double truth, double res, double up2, double down2, double cap) {
    range r = { truth - sqrt(sq(2.0 * res) + down2), truth + sqrt(sq(2.0 * res) + up2) };
    r.lo = fmax(0.0, fmin(r.lo, plain));
    r.hi = fmax(plain, fmin(r.hi, cap));
    return r;
}

/* Half the change of the sharp truth over the spacing's +- u. */
static double studied_spacing(const workspace *w) {
    variant a = *w->central, b = *w->central;
    double u = w->in->spacing_nm.u;
    if (!(u > 0.0)) return 0.0;
    a.spacing_nm = fmax(a.spacing_nm - u, 0.5 * a.spacing_nm);
    b.spacing_nm += u;
    return 0.5 * fabs(studied_truth(w->weighted_b2d, &a, NULL) - studied_truth(w->weighted_b2d, &b, NULL));
}

static status weighted_range(workspace *w, prediction *out, model_parts *parts, error *e) {
    double truth = 0.0, u_spacing = 0.0, cap = 0.0;
    status st = photon_mean(w->o, w->g, w->truth, &truth, e);
    if (st == ST_OK) st = photon_mean(w->o, w->g, w->cap, &cap, e);
    if (st == ST_OK) st = spacing_part(w, &u_spacing, e);
    if (st != ST_OK) return st;
    out->u_spacing = hypot(out->u_spacing, studied(w) ? studied_spacing(w) : u_spacing);
    double own = residual(fmax(out->u_model, out->u_mixing), out->model_bias), res = hypot(own, u_spacing);
    if (parts) {
        parts->bias = out->model_bias;
        parts->res = own;
        parts->res_rule = without_rule(own, out->u_mixing, out->u_model);
        parts->cap = cap;
        parts->studied = studied(w);
    }
    double to_fine = out->weighted - w->weighted;
    range r = join(out->weighted, truth + to_fine, res, w->weighted_up2, w->weighted_down2, cap);
    if (studied(w)) {
        double u = 0.0, spacing_nm = w->in->spacing_nm.value;
        double sharp = studied_truth(w->weighted_b2d, w->central, &u);
        double general = general_share(spacing_nm);
        range s = join(out->weighted, sharp + to_fine, hypot(u, studied_spacing(w)), w->weighted_up2, w->weighted_down2, cap);
        r.lo = general * r.lo + (1.0 - general) * s.lo;
        r.hi = general * r.hi + (1.0 - general) * s.hi;
        out->u_model = general * out->u_model + (1.0 - general) * u;
        out->model_bias = general * out->model_bias + (1.0 - general) * (w->weighted_b2d - sharp);
    }
    out->weighted_lo = r.lo;
    out->weighted_hi = r.hi;
    return ST_OK;
}

/* Ends on the coarse grid relative to the plain value, carried to the fine one. */
static void spectral_range(workspace *w, prediction *out, model_parts *parts) {
    size_t n = w->g->n;
    for (size_t i = 0; i < n; i++) {
        double res = residual(fmax(w->u[i], mix_around(w, i)), w->bias[i]);
        if (parts) {
            parts->bias_at[i] = w->bias[i];
            parts->res_at[i] = res;
            parts->res_rule_at[i] = without_rule(res, mix_around(w, i), w->u[i]);
            parts->cap_at[i] = w->cap[i];
        }
        range r = join(w->plain[i], w->truth[i], res, w->up2[i], w->down2[i], w->cap[i]);
        w->one[i] = r.lo - w->plain[i];
        w->two[i] = r.hi - w->plain[i];
    }
    size_t at = 0;
    for (size_t j = 0; j < out->n; j++) {
        double x = out->wavelength_nm[j];
        while (at + 2 < n && w->g->wavelength_nm[at + 1] < x) at++;
        double t = (x - w->g->wavelength_nm[at]) / (w->g->wavelength_nm[at + 1] - w->g->wavelength_nm[at]);
        double down = (1.0 - t) * w->one[at] + t * w->one[at + 1], up = (1.0 - t) * w->two[at] + t * w->two[at + 1];
        out->R_lo[j] = fmax(0.0, out->R[j] + fmin(down, 0.0));
        out->R_hi[j] = fmin(1.0, out->R[j] + fmax(up, 0.0));
    }
}

status interval_fill(const surface_input *in, const optics_setup *o, const variant *central, const grid *coarse,
                     prediction *out, model_parts *parts_out, error *e) {
    workspace w = { .in = in, .o = o, .central = central, .g = coarse };
    double **const parts[] = { &w.plain, &w.b2d, &w.mg2d, &w.cap, &w.normal, &w.air, &w.u, &w.bias, &w.truth,
                               &w.up2, &w.down2, &w.one, &w.two };
    size_t n_parts = sizeof parts / sizeof parts[0];
    double *block = mem_array(n_parts * coarse->n, sizeof *block);
    if (!block) return NO_MEMORY(e, "the interval of a prediction");
    for (size_t k = 0; k < n_parts; k++) *parts[k] = block + k * coarse->n;
    status st = rules(&w, &out->u_mixing, e);
    if (st == ST_OK) st = add_inputs(&w, out, e);
    if (st == ST_OK && in->spacing_nm.value > 0.0) {
        st = model(&w, out, e);
        if (st == ST_OK) st = weighted_range(&w, out, parts_out, e);
        if (st == ST_OK) spectral_range(&w, out, parts_out);
    }
    free(block);
    return st;
}

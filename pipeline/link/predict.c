/* One prediction: spectrum, weighted value, current, references, shares of photons, interval, and what to say of it.
 *
 * The plain value is the graded index on the grid asked for; everything that moves an input runs on a 10 nm grid
 * (weighted R within 2e-5 of the fine one). Which model serves, if any: route.c.
 * Light that returns from the rear of the wafer: rear.c. */
#include "link/predict.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/text.h"
#include "link/predict_priv.h"
#include "link/surface_priv.h"

static const double COARSE_NM = 10.0, COARSE_TOLERANCE = 1e-5;
static const double NITRIDE_NM = 75.0, GRID_MAX = 1e5;

/* ---- grids ---- */

status grid_make(double lo, double hi, double step, double tolerance, grid *g, error *e) {
    double steps = floor((hi - lo) / step + 1e-9);
    size_t n = (size_t)steps + 1;
    int more = lo + steps * step < hi - 1e-9 * hi; /* the last step is shorter */
    g->n = n + (size_t)more;
    g->tolerance = tolerance;
    g->wavelength_nm = mem_array(g->n, sizeof *g->wavelength_nm);
    if (!g->wavelength_nm) return NO_MEMORY(e, "a prediction");
    for (size_t i = 0; i < n; i++) g->wavelength_nm[i] = lo + step * (double)i;
    g->wavelength_nm[g->n - 1] = hi;
    return ST_OK;
}

status grid_coarse(const optics_setup *o, grid *g, error *e) {
    return grid_make(o->band_lo_nm, o->band_hi_nm, fmin(fmax(COARSE_NM, o->step_nm), o->band_hi_nm - o->band_lo_nm),
                     fmax(o->reflect.tolerance, COARSE_TOLERANCE), g, e);
}

status photon_mean(const optics_setup *o, const grid *g, const double *y, double *mean, error *e) {
    return sun_weighted(o->sun, g->wavelength_nm, y, g->n, o->band_lo_nm, o->band_hi_nm, mean, e);
}

status current_of(const optics_setup *o, const grid *g, const double *R, double *mA_cm2, error *e) {
    double all = 0.0, mean = 0.0;
    status st = sun_photon_mean(o->sun, g->wavelength_nm, R, g->n, o->band_lo_nm, o->band_hi_nm, &mean, e);
    if (st == ST_OK) st = sun_current(o->sun, o->band_lo_nm, o->band_hi_nm, &all, e);
    if (st == ST_OK) *mA_cm2 = mean * all;
    return st;
}

/* ---- stacks ---- */

static stack bare(const optics_setup *o) {
    return (stack){ .ambient = o->ambient, .front = o->front, .substrate = o->substrate, .mixing = o->mixing };
}

static status solve(const stack *s, const optics_setup *o, const grid *g, double *R, size_t *slabs, error *e) {
    reflect_options r = o->reflect;
    r.tolerance = g->tolerance;
    return reflectance(s, &r, g->wavelength_nm, g->n, R, slabs, e);
}

status variant_spectrum(const surface_input *in, const optics_setup *o, const variant *v, const grid *g, double *R,
                        size_t *slabs, error *e) {
    profile made = { 0 };
    stack s = bare(o);
    link_options l = v->link;
    s.mixing = v->mixing;
    s.coatings = o->coatings;
    s.n_coatings = o->n_coatings;
    s.profile = in->measured;
    if (!in->measured) {
        l.tip_radius_nm = tip_radius_held(v->height_nm, cell_radius(v->spacing_nm, in->cell_area_nm2, in->n_cells), &l);
        status st = link_profile(v->height_nm, v->spacing_nm, in->cell_area_nm2, in->n_cells, in->pores, &l,
                                 o->coatings, o->n_coatings, &made, e);
        if (st != ST_OK) return st;
        s.profile = &made;
    }
    status st = solve(&s, o, g, R, slabs, e);
    profile_free(&made);
    return st;
}

status polished_spectrum(const optics_setup *o, int in_air, const grid *g, double *R, error *e) {
    stack s = bare(o);
    if (in_air) {
        s.ambient = o->air;
        s.front = (laminate){ 0 };
    }
    return solve(&s, o, g, R, NULL, e);
}

static status references(const optics_setup *o, const grid *g, double *work, prediction *out, error *e) {
    layer film = { o->nitride, NITRIDE_NM };
    stack s = bare(o);
    status st = polished_spectrum(o, 0, g, work, e);
    if (st == ST_OK) st = rear_add_flat(o, NULL, 0, g, work, e);
    if (st == ST_OK) st = photon_mean(o, g, work, &out->polished, e);
    s.coatings = &film;
    s.n_coatings = 1;
    if (st == ST_OK) st = solve(&s, o, g, work, NULL, e);
    if (st == ST_OK) st = rear_add_flat(o, &film, 1, g, work, e);
    return st == ST_OK ? photon_mean(o, g, work, &out->coated, e) : st;
}

/* ---- validity ---- */

double ambient_index(const optics_setup *o) {
    const material *m = o->front.glass ? o->front.encapsulant : o->ambient;
    double n = 1.0, k = 0.0, middle = 0.5 * (o->band_lo_nm + o->band_hi_nm);
    error ignored = { 0 };
    if (!m || material_at(m, middle, &n, &k, &ignored) != ST_OK) return 1.0; /* reflectance() reports it */
    return n;
}

double texture_angle_deg(const optics_setup *o) {
    double angle = o->reflect.hemispherical ? 45.0 : o->reflect.angle_deg;
    if (!o->front.glass) return angle; /* given in the ambient of the texture */
    return asin(sin(angle * PI / 180.0) / fmax(1.0, ambient_index(o))) * 180.0 / PI;
}

/* ---- words ---- */

/* Two digits, but never fewer than stand before the point. */
const char *rough_text(double v, char *shown) {
    int digits = 2;
    for (double top = 99.5; v >= top && digits < 12; top *= 10.0) digits++;
    return number_text(v, digits, shown);
}

static void add_percent(textbuf *t, double share) {
    char shown[NUMBER_TEXT];
    text_addf(t, "%s %%", rough_text(100.0 * share, shown));
}

static void say_interval(textbuf *t, const surface_input *in, const optics_setup *o) {
    char shown[NUMBER_TEXT];
    if (in->measured) {
        text_add(t, "The interval holds the mixing rule and the model's own error, not that of the profile.");
    } else {
        text_add(t, "The interval holds the model's own error, the mixing rule");
        if (in->height_nm.u > 0.0) text_addf(t, ", the height (+- %s nm)", rough_text(in->height_nm.u, shown));
        if (in->link.shape_open) text_add(t, ", the shape nobody stated (from the cone to the paraboloid)");
        if (in->link.exponent_u > 0.0) text_add(t, ", the shape");
        if (in->link.flat_top_u > 0.0 || in->link.tip_radius_nm_u > 0.0) text_add(t, ", the tips");
        if (in->link.coverage_u > 0.0) text_add(t, ", the coverage");
        if (in->link.height_spread > 0.0) text_add(t, ", level floor or level tips");
        text_add(t, ".");
        if (isnan(in->height_nm.u)) text_add(t, " The height's uncertainty is unknown and not in it.");
    }
    int far = o->reflect.hemispherical || o->reflect.angle_deg > 0.0 || o->n_coatings || in->pores ||
              in->link.flat_top > 0.0 || in->link.tip_radius_nm > 0.0 || in->link.coverage < 1.0 ||
              strncmp(o->substrate->name ? o->substrate->name : "", "silicon", 7) != 0;
    if (far)
        text_add(t, " The model's error was studied on bare silicon hillocks of cone to paraboloid shape at normal incidence "
                    "and is carried over.");
}

static void say(prediction *out, const surface_input *in, const optics_setup *o, const route *r, int planar) {
    textbuf t = { 0 };
    if (r->refused || r->facets) {
        route_say(r, in, o, &t);
    } else if (planar) {
        text_add(&t, "Planar layers: exact, no model error.");
    } else if (!(in->spacing_nm.value > 0.0)) {
        text_add(&t, "The spacing is unknown: no interval, and no statement whether the texture is fine enough for the "
                     "graded-index model.");
    } else {
        if (out->shares.in_ambient >= 0.005) {
            add_percent(&t, out->shares.in_ambient);
            text_add(&t, " of the photons are diffracted out again, where the graded-index model is far too low. ");
        }
        say_interval(&t, in, o);
    }
    if (!out->refused) rear_say(o, out, &t);
    size_t n = t.n < sizeof out->note - 1 ? t.n : sizeof out->note - 1;
    if (!t.failed && t.s) memcpy(out->note, t.s, n);
    out->note[t.failed ? 0 : n] = '\0';
    text_free(&t);
}

/* ---- one prediction ---- */

static status check(const surface_input *in, const optics_setup *o, error *e) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    if (!(o->band_lo_nm > 0.0 && o->band_hi_nm > o->band_lo_nm) || !isfinite(o->band_hi_nm))
        return fail(e, ST_BAD_INPUT, "band: found %s to %s nm, expected an ascending band such as 300 to 1200",
                    number_text(o->band_lo_nm, 6, a), number_text(o->band_hi_nm, 6, b));
    if (!(o->step_nm > 0.0) || (o->band_hi_nm - o->band_lo_nm) / o->step_nm > GRID_MAX)
        return fail(e, ST_BAD_INPUT, "step: found %s nm, expected a step above 0 with at most 100000 wavelengths in "
                                     "the band",
                    number_text(o->step_nm, 6, a));
    if (isfinite(in->spacing_nm.value) && !(in->spacing_nm.value > 0.0))
        return fail(e, ST_BAD_INPUT, "spacing: found %s nm, expected a spacing above 0",
                    number_text(in->spacing_nm.value, 6, a));
    if (in->measured) return ST_OK;
    status st = link_check(in->height_nm.value, &in->link, e);
    double radius = cell_radius(in->spacing_nm.value, in->cell_area_nm2, in->n_cells);
    return st == ST_OK ? tip_check(in->height_nm.value, radius, &in->link, e) : st;
}

static status allocate(prediction *p, const grid *g, error *e) {
    p->n = g->n;
    p->wavelength_nm = mem_array(g->n, sizeof(double));
    p->R = mem_array(g->n, sizeof(double));
    p->R_lo = mem_array(g->n, sizeof(double));
    p->R_hi = mem_array(g->n, sizeof(double));
    if (!p->wavelength_nm || !p->R || !p->R_lo || !p->R_hi) return NO_MEMORY(e, "a prediction");
    memcpy(p->wavelength_nm, g->wavelength_nm, g->n * sizeof(double));
    for (size_t i = 0; i < g->n; i++) p->R[i] = p->R_lo[i] = p->R_hi[i] = MISSING;
    return ST_OK;
}

static status geometry(const surface_input *in, const optics_setup *o, const variant *v, int planar, prediction *p,
                       error *e) {
    double p_nm = in->spacing_nm.value;
    p->shares = (order_shares){ MISSING, MISSING, MISSING };
    p->aspect = p_nm > 0.0 ? v->height_nm / p_nm : MISSING;
    p->area_ratio = in->measured ? MISSING : link_area_ratio(v->height_nm, p_nm, &in->link);
    if (planar) {
        p->aspect = in->measured ? p->aspect : 0.0;
        p->area_ratio = 1.0;
        p->shares = (order_shares){ 1.0, 0.0, 0.0 };
        return ST_OK;
    }
    if (!(p_nm > 0.0)) return ST_OK;
    return trust_shares(p_nm, texture_angle_deg(o), ambient_index(o), o->substrate, o->sun, o->band_lo_nm,
                        o->band_hi_nm, &p->shares, e);
}

static status central(const surface_input *in, const optics_setup *o, const variant *v, const grid *fine, prediction *p,
                      error *e) {
    status st = variant_spectrum(in, o, v, fine, p->R, &p->slabs, e);
    if (st == ST_OK) st = photon_mean(o, fine, p->R, &p->weighted, e);
    return st == ST_OK ? current_of(o, fine, p->R, &p->current_loss_mA_cm2, e) : st;
}

static void exact(prediction *p) {
    memcpy(p->R_lo, p->R, p->n * sizeof(double));
    memcpy(p->R_hi, p->R, p->n * sizeof(double));
    p->weighted_lo = p->weighted_hi = p->weighted;
}

variant variant_central(const surface_input *in, const optics_setup *o) {
    const profile *m = in->measured;
    double height = !m ? in->height_nm.value : m->n ? m->depth_nm[m->n - 1] - m->depth_nm[0] : 0.0;
    return (variant){ .height_nm = height, .spacing_nm = in->spacing_nm.value, .link = in->link, .mixing = o->mixing };
}

status predict(const surface_input *in, const optics_setup *o, prediction *out, error *e) {
    *out = (prediction){ 0 };
    status st = check(in, o, e);
    if (st != ST_OK) return st;
    variant v = variant_central(in, o);
    prediction p = { .weighted = MISSING, .weighted_lo = MISSING, .weighted_hi = MISSING, .polished = MISSING,
                     .current_loss_mA_cm2 = MISSING, .coated = MISSING, .rear_escape = MISSING,
                     .model = "graded" };
    grid fine = { 0 }, coarse = { 0 };
    int planar = !(v.height_nm > 0.0);
    route r = { 0 };
    st = grid_make(o->band_lo_nm, o->band_hi_nm, o->step_nm, o->reflect.tolerance, &fine, e);
    if (st == ST_OK) st = grid_coarse(o, &coarse, e);
    if (st == ST_OK) st = allocate(&p, &fine, e);
    if (st == ST_OK) st = references(o, &fine, p.R, &p, e); /* R serves as work space first */
    if (st == ST_OK) st = geometry(in, o, &v, planar, &p, e);
    if (st == ST_OK && !planar) st = route_choose(in, o, &v, &r, e);
    if (st == ST_OK && (r.refused || r.facets)) {
        p.refused = r.refused;
        p.model = r.refused ? "none" : "facets";
        for (size_t i = 0; i < p.n; i++) p.R[i] = MISSING;
        if (r.facets) st = facets_fill(in, o, &r, &fine, &p, e);
    } else {
        if (st == ST_OK) st = central(in, o, &v, &fine, &p, e);
        if (st == ST_OK && planar) exact(&p);
        else if (st == ST_OK && !o->plain) st = interval_fill(in, o, &v, &coarse, &p, NULL, e);
    }
    if (st == ST_OK && !p.refused) st = rear_add(in, o, &v, &fine, r.facets, &p, e);
    if (st == ST_OK) {
        say(&p, in, o, &r, planar);
        *out = p;
        p = (prediction){ 0 };
    }
    prediction_free(&p);
    free(fine.wavelength_nm);
    free(coarse.wavelength_nm);
    return st;
}

void prediction_free(prediction *p) {
    free(p->wavelength_nm);
    free(p->R);
    free(p->R_lo);
    free(p->R_hi);
    *p = (prediction){ 0 };
}

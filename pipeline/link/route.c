/* Which model serves a texture, and the prediction by geometric optics.
 *
 * The graded index serves while at most half of the photons have spacing/wavelength above 2.5, where the tables of its
 * error end. Beyond that vertical light on facets steeper than 45 degrees, all of which meets a second facet, goes by
 * geometric optics (optics/facets.h); everything else is refused: there is no number to believe. The angle of the
 * facets is the stated one, else that of square pyramids of the height on bases as wide as the spacing.
 *   Interval of geometric optics. Angle: +- 2 u by evaluation, u from height and spacing and 1.5 degrees (alkaline
 * facets are seen 2 to 4 degrees flatter than the 54.74 of the crystal: from memory). Bounces: the plain value follows
 * equal facing facets; random pyramids send less or more light on to one facet more, so the upper end has only the
 * bounces that all light makes, the lower end half of the light going on. Upper end also: 4 % of the ground flat or
 * rounded, one bounce. These two shares are judgement. Oblique or diffuse light and laminates: rays followed through a
 * regular field of pyramids (facets_field_reflectance); there the upper end lets light go after two bounces.
 * What this file does not do: two scales at once. */
#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "link/predict_priv.h"
#include "optics/facets.h"

static const double TABLE_END = 2.5; /* spacing / wavelength */
static const double STEEP_DEG = 45.0,
                    ANGLE_U_DEG = 1.5;                /* least angle for two bounces; real against nominal */
static const double GOES_ON = 0.5, FLAT_SHARE = 0.04; /* ends of the interval */

static double sq(double x) { return x * x; }

/* Share of the photons with spacing / wavelength above the tables' end. */
static status share_beyond(double spacing_nm, const optics_setup *o, double *share, error *e) {
    double edge = spacing_nm / TABLE_END, all = 0.0, above = 0.0;
    *share = edge >= o->band_hi_nm ? 1.0 : 0.0;
    if (!(edge > o->band_lo_nm) || !(edge < o->band_hi_nm)) return ST_OK;
    status st = sun_current(o->sun, o->band_lo_nm, o->band_hi_nm, &all, e);
    if (st == ST_OK) st = sun_current(o->sun, o->band_lo_nm, edge, &above, e);
    if (st == ST_OK) *share = above / all;
    return st;
}

static const char *why_no_facets(const surface_input *in, double angle_deg) {
    if (in->measured) return "a measured profile has no facets";
    if (!(in->spacing_nm.value > 0.0)) return "the spacing is unknown";
    if (!(angle_deg >= STEEP_DEG))
        return "its facets are flatter than 45 degrees, so that part of the light meets one only";
    return "";
}

status route_choose(const surface_input *in, const optics_setup *o, const variant *v, route *out, error *e) {
    *out = (route){ .why = "" };
    status st = v->spacing_nm > 0.0 ? share_beyond(v->spacing_nm, o, &out->beyond, e) : ST_OK;
    if (st != ST_OK) return st;
    int coarse = out->beyond > 0.5, asked = o->model == OPTICS_FACETS;
    out->angle_deg =
        o->facet_angle_deg > 0.0 ? o->facet_angle_deg : facets_angle_deg(v->height_nm, v->spacing_nm);
    if (!asked && !coarse) return ST_OK;
    out->why = !asked && o->model == OPTICS_GRADED ? "the protocol asks for the graded index only"
                                                   : why_no_facets(in, out->angle_deg);
    out->facets = !out->why[0];
    out->refused = !out->facets;
    return ST_OK;
}

/* ---- geometric optics ---- */

typedef struct {
    const optics_setup *o;
    const grid *g;
    stack flat;
    int field;                 /* 1: oblique or diffuse light, or a laminate */
    double *end, *up2, *down2; /* [n] */
    double weighted_up2, weighted_down2;
} reach;

/* As followed; only the bounces that all light makes; half of the light one bounce more. */
typedef enum { BOUNCES_ALL, BOUNCES_COMMON, BOUNCES_MORE } bounces;

static void path_of(double angle_deg, bounces which, facet_path *path) {
    facet_path common;
    facets_path(angle_deg, path);
    facets_path_common(path, &common);
    if (which == BOUNCES_COMMON) {
        *path = common;
    } else if (which == BOUNCES_MORE && common.n < path->n) {
        path->share[common.n] = fmax(path->share[common.n], GOES_ON);
    } else if (which == BOUNCES_MORE && path->n < FACET_BOUNCES) { /* a facet more, met as the last one */
        path->incidence_deg[path->n] = path->incidence_deg[path->n - 1];
        path->share[path->n++] = GOES_ON;
    }
}

static status evaluate(const reach *w, double angle_deg, bounces which, double *R, double *weighted, error *e) {
    facet_path path;
    facet_field f = { .angle_deg = fmin(fmax(angle_deg, 1.0), 89.0),
                      .bounces_most = which == BOUNCES_COMMON ? 2 : FACET_BOUNCES,
                      .goes_on = which == BOUNCES_MORE ? GOES_ON : 0.0 };
    path_of(angle_deg, which, &path);
    status st = w->field ? facets_field_reflectance(&w->flat, &f, &w->o->reflect, w->g->wavelength_nm, w->g->n, R, e)
                         : facets_reflectance(&w->flat, &path, w->g->wavelength_nm, w->g->n, R, e);
    return st == ST_OK ? photon_mean(w->o, w->g, R, weighted, e) : st;
}

static void extend(double plain, double end, double *up2, double *down2) {
    *(end > plain ? up2 : down2) += sq(end - plain);
}

/* One end of an input; `once` of it replaced by flat ground. */
static status add_end(reach *w, const prediction *p, double angle_deg, bounces which, double once, double *moved, error *e) {
    double mean = 0.0, flat_mean = 0.0, ignored = 0.0;
    status st = evaluate(w, angle_deg, which, w->end, &mean, e);
    double *flat = st == ST_OK ? mem_array(w->g->n, sizeof *flat) : NULL;
    if (st == ST_OK && !flat) st = NO_MEMORY(e, "the interval of facets");
    if (st == ST_OK) st = reflectance(&w->flat, &w->o->reflect, w->g->wavelength_nm, w->g->n, flat, NULL, e);
    if (st == ST_OK) st = photon_mean(w->o, w->g, flat, &flat_mean, e);
    for (size_t i = 0; i < w->g->n && st == ST_OK; i++)
        extend(p->R[i], (1.0 - once) * w->end[i] + once * flat[i], &w->up2[i], &w->down2[i]);
    mean = (1.0 - once) * mean + once * flat_mean;
    if (st == ST_OK) extend(p->weighted, mean, &w->weighted_up2, &w->weighted_down2);
    *(moved ? moved : &ignored) = mean - p->weighted;
    free(flat);
    return st;
}

static double angle_u(const surface_input *in, const optics_setup *o) {
    double h = in->height_nm.value, p = in->spacing_nm.value;
    if (o->facet_angle_deg > 0.0) return ANGLE_U_DEG;
    double relative = hypot(in->height_nm.u > 0.0 ? in->height_nm.u / h : 0.0,
                            in->spacing_nm.u > 0.0 ? in->spacing_nm.u / p : 0.0);
    double t = 2.0 * h / p, slope = t / (1.0 + t * t); /* d atan t = t/(1 + t^2) dt/t */
    return hypot(ANGLE_U_DEG, slope * relative * 180.0 / PI);
}

static status add_ends(reach *w, const surface_input *in, const route *r, prediction *out, error *e) {
    double u = angle_u(in, w->o), low = 0.0, high = 0.0, on = 0.0;
    status st = add_end(w, out, r->angle_deg - 2.0 * u, BOUNCES_ALL, 0.0, &low, e);
    if (st == ST_OK) st = add_end(w, out, r->angle_deg + 2.0 * u, BOUNCES_ALL, 0.0, &high, e);
    if (st == ST_OK) st = add_end(w, out, r->angle_deg, BOUNCES_COMMON, FLAT_SHARE, NULL, e);
    if (st == ST_OK) st = add_end(w, out, r->angle_deg, BOUNCES_MORE, 0.0, &on, e);
    out->u_height = 0.25 * fabs(high - low); /* the ends lie at 2 u */
    out->u_model = 0.5 * fabs(on);
    return st;
}

status facets_fill(const surface_input *in, const optics_setup *o, const route *r, const grid *g,
                   prediction *out, error *e) {
    reach w = { .o = o,
                .g = g,
                .field = o->reflect.hemispherical || o->reflect.angle_deg > 0.0 || o->front.glass != NULL,
                .flat = { .ambient = o->ambient,
                          .front = o->front,
                          .coatings = o->coatings,
                          .n_coatings = o->n_coatings,
                          .substrate = o->substrate } };
    double *block = mem_array(3 * g->n, sizeof *block);
    if (!block) return NO_MEMORY(e, "the reflectance of facets");
    w.end = block;
    w.up2 = block + g->n;
    w.down2 = block + 2 * g->n;
    status st = evaluate(&w, r->angle_deg, BOUNCES_ALL, out->R, &out->weighted, e);
    if (st == ST_OK) st = current_of(o, g, out->R, &out->current_loss_mA_cm2, e);
    if (st == ST_OK && r->beyond > 0.5 && !o->plain) {
        st = add_ends(&w, in, r, out, e);
        for (size_t i = 0; i < g->n && st == ST_OK; i++) {
            out->R_lo[i] = fmax(0.0, out->R[i] - sqrt(w.down2[i]));
            out->R_hi[i] = fmin(1.0, out->R[i] + sqrt(w.up2[i]));
        }
        out->weighted_lo = fmax(0.0, out->weighted - sqrt(w.weighted_down2));
        out->weighted_hi = fmin(1.0, out->weighted + sqrt(w.weighted_up2));
    }
    free(block);
    return st;
}

/* ---- words ---- */

static void say_beyond(const route *r, const surface_input *in, textbuf *t) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    text_addf(t,
              "with a spacing of %s nm %s %% of the photons have a wavelength below spacing/2.5, where the "
              "graded-index model says nothing",
              rough_text(in->spacing_nm.value, a), rough_text(100.0 * r->beyond, b));
}

void route_say(const route *r, const surface_input *in, const optics_setup *o, textbuf *t) {
    char a[NUMBER_TEXT];
    if (r->refused && r->beyond > 0.5) {
        text_add(t, "No reflectance: ");
        say_beyond(r, in, t);
        text_addf(t, "; such a texture reflects by geometric optics, but %s.", r->why);
        return;
    }
    if (r->refused) {
        text_addf(t, "No reflectance by facets: %s.", r->why);
        return;
    }
    text_addf(t, "Geometric optics: facets of %s degrees %s, each bounce lowers what is left. ",
              number_text(r->angle_deg, 4, a),
              o->facet_angle_deg > 0.0 ? "(as stated)" : "(pyramids of this height and spacing)");
    if (o->reflect.hemispherical || o->reflect.angle_deg > 0.0 || o->front.glass)
        text_add(t, "Rays followed through a regular field of pyramids, all azimuths. ");
    if (r->beyond > 0.5) {
        text_add(t, "Chosen because ");
        say_beyond(r, in, t);
        text_add(t,
                 ", and because facets this steep send all light on to a second one. The interval holds the "
                 "angle, more or fewer bounces and 4 % of flat ground; a second, finer texture on the facets "
                 "would lower the value.");
    } else
        text_addf(t,
                  "Asked for, but only %s %% of the photons have a wavelength below spacing/2.5: the facets "
                  "are not "
                  "large against the waves, so no interval is given.",
                  rough_text(100.0 * r->beyond, a));
}

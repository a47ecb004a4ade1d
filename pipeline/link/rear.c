/* The rear side of the wafer in a prediction: optics/escape.h on the predicted front. Diffuse light inside meets the
 * front with its hemispherical reflectance, computed every 10 nm where the wafer is not opaque. The interval is
 * carried over: each of its ends with the escape that belongs to it. The flat references get the same rear. What this
 * file does not do: uncertainty of the rear itself; absorption in a laminate on the way out. */
#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "link/predict_priv.h"

static const double STEP_NM = 10.0, OPAQUE = 12.0; /* absorption lengths: 4e-11 of the light comes back */

/* First wavelength of the grid from where on light comes back; n: nowhere. Absorption falls towards the red, but a
 * table may wiggle: the first transparent one counts. */
static status first_open(const optics_setup *o, const grid *g, size_t *first, error *e) {
    for (*first = 0; *first < g->n; ++*first) {
        double n, k;
        status st = material_at(o->substrate, g->wavelength_nm[*first], &n, &k, e);
        if (st != ST_OK) return st;
        if (4.0 * PI * k * o->rear.thickness_um * 1e3 / g->wavelength_nm[*first] < OPAQUE) break;
    }
    return ST_OK;
}

/* Hemispherical R from grid node `first` on, every STEP_NM and at the end, straight lines between. */
static status diffuse_front(const surface_input *in, const optics_setup *o, const variant *v, const grid *g,
                            size_t first, double *diffuse, error *e) {
    double lo = g->wavelength_nm[first], hi = g->wavelength_nm[g->n - 1];
    size_t n = (size_t)ceil((hi - lo) / STEP_NM) + 1;
    double *nodes = mem_array(2 * n, sizeof *nodes), *R = nodes ? nodes + n : NULL;
    if (!nodes) return NO_MEMORY(e, "the rear side");
    optics_setup sky = *o;
    sky.reflect.hemispherical = 1;
    grid coarse = { .n = n, .wavelength_nm = nodes, .tolerance = fmax(1e-4, g->tolerance) };
    error own = { 0 };
    for (size_t i = 0; i < n; i++) nodes[i] = n > 1 ? lo + (hi - lo) * (double)i / (double)(n - 1) : lo;
    status st = variant_spectrum(in, &sky, v, &coarse, R, NULL, &own);
    if (st == ST_NO_RESULT) st = ST_OK; /* the best values do */
    if (st != ST_OK) fail(e, st, "%s", own.text);
    for (size_t i = first, at = 0; i < g->n && st == ST_OK; i++) {
        while (at + 2 < n && nodes[at + 1] < g->wavelength_nm[i]) at++;
        double t = n > 1 ? (g->wavelength_nm[i] - nodes[at]) / (nodes[at + 1] - nodes[at]) : 0.0;
        diffuse[i] = n > 1 ? (1.0 - t) * R[at] + t * R[at + 1] : R[0];
    }
    free(nodes);
    return st;
}

/* R plus its escape, in place; *mean of what was added. NAN stays. */
static status add_to(const optics_setup *o, double ambient_n, const grid *g, size_t first, double *R,
                     const double *diffuse, double *added, double *mean, error *e) {
    for (size_t i = 0; i < g->n; i++) added[i] = 0.0;
    status st = escape_share(o->substrate, &o->rear, ambient_n, g->wavelength_nm + first, g->n - first,
                             R + first, diffuse + first, added + first, e);
    for (size_t i = 0; i < g->n && st == ST_OK; i++) R[i] += added[i];
    return st == ST_OK ? photon_mean(o, g, added, mean, e) : st;
}

status rear_add(const surface_input *in, const optics_setup *o, const variant *v, const grid *fine,
                int facets, prediction *out, error *e) {
    if (!(o->rear.thickness_um > 0.0)) return ST_OK;
    size_t n = fine->n, first = 0;
    double *diffuse = mem_array(2 * n, sizeof *diffuse), *added = diffuse ? diffuse + n : NULL, low = 0.0,
           high = 0.0;
    if (!diffuse) return NO_MEMORY(e, "the rear side");
    double outside =
        o->front.glass ? 1.0 : ambient_index(o); /* behind flat glass the outer cone is that of air */
    for (size_t i = 0; i < n; i++) diffuse[i] = out->R[i];
    status st = first_open(o, fine, &first, e);
    if (st == ST_OK && first < n && o->rear.lambertian && !facets)
        st = diffuse_front(in, o, v, fine, first, diffuse, e);
    if (st == ST_OK) st = add_to(o, outside, fine, first, out->R, diffuse, added, &out->rear_escape, e);
    if (st == ST_OK) st = add_to(o, outside, fine, first, out->R_lo, diffuse, added, &low, e);
    if (st == ST_OK) st = add_to(o, outside, fine, first, out->R_hi, diffuse, added, &high, e);
    if (st == ST_OK) {
        out->weighted += out->rear_escape; /* no interval: NAN stays NAN */
        out->weighted_lo = fmin(out->weighted_lo + low, out->weighted);
        out->weighted_hi = fmax(out->weighted_hi + high, out->weighted);
        if (isnan(low)) out->weighted_lo = out->weighted_hi = MISSING;
        st = current_of(o, fine, out->R, &out->current_loss_mA_cm2, e);
    }
    free(diffuse);
    return st;
}

/* A flat surface under these coatings, on its own: the texture's path with no height. */
status rear_add_flat(const optics_setup *o, const layer *film, size_t n_films, const grid *g, double *R, error *e) {
    if (!(o->rear.thickness_um > 0.0)) return ST_OK;
    optics_setup flat = *o;
    surface_input in = { .link = link_defaults() };
    variant v = variant_central(&in, o);
    prediction p = { .R = R, .R_lo = mem_array(g->n, sizeof *R), .R_hi = mem_array(g->n, sizeof *R) };
    flat.coatings = film;
    flat.n_coatings = n_films;
    status st = p.R_lo && p.R_hi ? rear_add(&in, &flat, &v, g, 0, &p, e) : NO_MEMORY(e, "the rear side");
    free(p.R_lo);
    free(p.R_hi);
    return st;
}

void rear_say(const optics_setup *o, const prediction *p, textbuf *t) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    if (o->rear.thickness_um > 0.0) {
        text_addf(t, " Light returning from the rear of a wafer of %s um is included (%s; %s %% of all",
                  number_text(o->rear.thickness_um, 5, a),
                  o->rear.lambertian ? "scattered inside, Lambertian" : "straight double pass",
                  rough_text(100.0 * p->rear_escape, b));
        if (isfinite(o->rear.rear_reflectance))
            text_addf(t, "; the rear reflects %s %%).", rough_text(100.0 * o->rear.rear_reflectance, a));
        else
            text_add(t, "; bare rear).");
    } else if (o->band_hi_nm > 1000.0)
        text_add(t,
                 " Front surface only: light returning from the rear beyond about 1000 nm is not included.");
}

/* A first scale for pictures whose large-scale brightness hides it from the plain autocorrelation.
 *
 * f minus its Gaussian of sd s has the spectrum P (1 - exp(-2 pi^2 s^2 k^2))^2, so its radial autocorrelation follows from
 * the radial spectrum of f by a Hankel transform, for as many s as one likes. Removing the background makes a trough
 * in anything, also in noise. What tells a texture is where the trough is deepest: features that keep a distance have
 * little power at long periods, so removing it digs the trough deeper until s reaches about half its lag and only then
 * fills it up (s / lag 0.4 to 0.8 on rendered textures of all orders and on real layers); white noise has no trough,
 * smoothed noise its deepest at s / lag near 0.2 (its power reaches down to k = 0). Randomly placed features pass: only
 * the distances between the features found can tell them. */
#include "metrics/scale.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"

static const double first_sd_px = 0.7, sd_growth = 1.189207115; /* four steps per octave */
enum { MOST_LENGTHS = 64 };
static const double least_lag_px = 6.0; /* below, the grid of the pixels makes troughs of its own */
static const double least_depth = 0.04;                        /* of the trough, / variance */
static const double least_length = 0.33, most_length = 1.1;    /* s / lag where the trough is deepest */
static const double finer_share = 0.5;
static const double early_length = 0.15, deepening = 1.15; /* the trough grows by this from s = 0.15 lag on: noise does not */
static const double widest_share = 0.125;                      /* s / shorter side */
static const double floor_from = 0.46, floor_to = 0.5;         /* 1/px: noise alone is left there */

typedef struct {
    double *k, *power; /* [n] 1/px; noise taken off, times 2 pi k dk */
    size_t n;
} ring_powers;

static status powers_make(const curve *psd, ring_powers *out, error *e) {
    double floor = 0.0;
    size_t n_floor = 0;
    for (size_t i = 1; i < psd->n; i++)
        if (psd->points[i].x >= floor_from && psd->points[i].x <= floor_to) {
            floor += psd->points[i].y;
            n_floor++;
        }
    if (n_floor) floor /= (double)n_floor;
    out->k = mem_array(psd->n, sizeof *out->k);
    out->power = mem_array(psd->n, sizeof *out->power);
    if (!out->k || !out->power) return NO_MEMORY(e, "the search for a scale");
    for (size_t i = 1; i < psd->n && psd->points[i].x <= floor_to; i++) {
        double k = psd->points[i].x, dk = k - psd->points[i - 1].x;
        out->k[out->n] = k;
        out->power[out->n++] = 2.0 * PI * k * dk * fmax(0.0, psd->points[i].y - floor);
    }
    return ST_OK;
}

/* Radial autocorrelation without what is wider than sd; c has c->n points at lags 0, 1, 2 ... px. */
static void without_background(const ring_powers *p, double sd, double *weighted, curve *c) {
    double variance = 0.0;
    for (size_t i = 0; i < p->n; i++) {
        double keep = 1.0 - exp(-2.0 * PI * PI * sd * sd * p->k[i] * p->k[i]);
        weighted[i] = p->power[i] * keep * keep;
        variance += weighted[i];
    }
    for (size_t r = 0; r < c->n; r++) {
        double sum = 0.0;
        for (size_t i = 0; i < p->n; i++) sum += weighted[i] * j0(2.0 * PI * p->k[i] * (double)r);
        c->points[r] = (curve_point){ (double)r, variance > 0.0 ? sum / variance : 0.0 };
    }
}

typedef struct {
    first_scale scale;
    double depth, length; /* of the trough; s / lag */
} trough;

static trough look(const ring_powers *p, double sd, double *weighted, curve *c, size_t reach, size_t nx, size_t ny) {
    trough t = { { MISSING, MISSING, 0.0 }, 0.0, 0.0 };
    c->n = (size_t)(4.0 * sd / least_length) + 8;
    if (c->n > reach) c->n = reach;
    without_background(p, sd, weighted, c);
    spacing_first_scale(c, nx, ny, &t.scale);
    if (!isfinite(t.scale.first_minimum_px)) return t;
    t.depth = t.scale.z * acf_standard_error(c, t.scale.first_minimum_px, nx, ny);
    t.length = sd / t.scale.first_minimum_px;
    return t;
}

/* Depth that the trough at this lag had when s was a small part of it. */
static double early_depth(const trough *t, size_t n, double lag) {
    size_t i = 0;
    double sd = first_sd_px;
    for (; i + 1 < n && sd * sqrt(sd_growth) < early_length * lag; sd *= sd_growth) i++;
    return t[i].depth;
}

status scale_without_background(const float *f, size_t nx, size_t ny, double min_z, first_scale *out, error *e) {
    const trough none = { { MISSING, MISSING, 0.0 }, 0.0, 0.0 };
    size_t shorter = nx < ny ? nx : ny, reach = shorter / 2;
    curve psd = { 0 }, c = { 0 };
    ring_powers p = { 0 };
    double *weighted = NULL;
    trough t[MOST_LENGTHS], best = none;
    size_t n = 0;
    status st = psd_radial(f, nx, ny, &psd, e);
    if (st == ST_OK) st = powers_make(&psd, &p, e);
    if (st == ST_OK) {
        weighted = mem_array(p.n, sizeof *weighted);
        c.points = mem_array(reach, sizeof *c.points);
        if (!weighted || !c.points) st = NO_MEMORY(e, "the search for a scale");
    }
    for (double sd = first_sd_px; st == ST_OK && n < MOST_LENGTHS && sd <= widest_share * (double)shorter; sd *= sd_growth)
        t[n++] = look(&p, sd, weighted, &c, reach, nx, ny);
    for (size_t i = 1; i + 1 < n; i++) {
        const trough *h = &t[i];
        if (h->depth < t[i - 1].depth || h->depth <= t[i + 1].depth) continue; /* not the deepest */
        if (h->scale.first_minimum_px < least_lag_px || h->length < least_length || h->length > most_length) continue;
        if (h->depth < least_depth || h->scale.z < min_z) continue;
        if (h->depth < deepening * early_depth(t, n, h->scale.first_minimum_px)) continue;
        if (h->depth > finer_share * best.depth) best = *h; /* the coarser of two: rims and grain have lengths of their own */
    }
    if (st == ST_OK) *out = best.scale;
    free(c.points);
    free(weighted);
    free(p.power);
    free(p.k);
    free(psd.points);
    return st;
}

/* One plane from grey levels to texture numbers: flatten, noise, autocorrelation and its first scale, relief,
 * features, cells, the ring of the curvature map, statistics, uncertainties, fitness.
 *
 * A stage that finds no answer (no trough, too few features) leaves its numbers NAN and lets the others go
 * on; only bad input and lack of memory stop the measurement. Definitions and their faithfulness are
 * described in the files of the stages; how far each number can be off as an estimate of its definition
 * (u_method) is stated below in one table, found on rendered micrographs of known truth. */
#include "metrics/measure.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "metrics/direction.h"
#include "metrics/filter.h"
#include "metrics/fitness.h"
#include "metrics/masked.h"
#include "metrics/layer.h"
#include "metrics/neighbours.h"
#include "metrics/outline.h"
#include "metrics/relief.h"
#include "metrics/scale.h"
#include "metrics/spacing.h"
#include "metrics/statistics.h"
#include "metrics/watershed.h"

static const double ring_scale = 0.12; /* sigma of the curvature map behind spacing_acf / d */
static const double clear_score = 0.5; /* of relief_look: never wrong on rendered textures above this */
static const double ring_lags = 4.0;   /* its autocorrelation reaches this far, / d */

typedef struct {
    const plane *p;
    const measure_options *o;
    float *f;     /* flattened plane */
    float *work;  /* as large */
    hole holes;   /* what is no specimen */
    double noise; /* sd, grey */
    acf2d plain;
    first_scale first;
    int second_look; /* the first scale shows only without the large-scale brightness */
    outline body;    /* what the outlines say; sign 0: nothing */
    int by_outline;  /* the features are those of the outlines */
    first_shell shell;
    double d; /* scale of the features, or NAN */
    detection det;
    texture t;
} job;

static const measured not_measured = { (double)NAN, (double)NAN, 0.0, 0 };

/* A stage without an answer is no failure of the measurement; the error it recorded is dropped. */
static status forgive(status st, error *e, const error *before) {
    if (st != ST_NO_RESULT) return st;
    if (e) *e = *before;
    return ST_OK;
}

static curve *curve_new(texture *t, const char *name, const char *x_unit, const char *y_unit) {
    curve *c = &t->curves[t->n_curves++];
    *c = (curve){ .name = name, .x_unit = x_unit, .y_unit = y_unit };
    return c;
}

/* Makers fill a whole curve; its names are given here. */
static curve *curve_take(texture *t, const curve *made, const char *name, const char *x_unit,
                         const char *y_unit) {
    curve *c = curve_new(t, name, x_unit, y_unit);
    c->points = made->points;
    c->n = made->n;
    return c;
}

/* 1 when the picture has contrast: more than the steps of the file explain. */
static int has_contrast(const job *j) {
    size_t n = j->p->nx * j->p->ny;
    double ss = 0.0;
    for (size_t i = 0; i < n; i++) ss += (double)j->f[i] * (double)j->f[i];
    double step =
        1.0 / (double)((1u << (j->p->bit_depth > 0 && j->p->bit_depth < 16 ? j->p->bit_depth : 16)) - 1u);
    return sqrt(ss / (double)n) > 0.5 * step;
}

/* Autocorrelation of f where it is specimen; with a mask `work` is used, and may be f itself. */
static status correlate(job *j, const float *f, size_t lags, acf2d *out, error *e) {
    size_t nx = j->p->nx, ny = j->p->ny;
    if (!j->p->mask) return acf2d_make(f, nx, ny, lags, out, e);
    if (f != j->work) memcpy(j->work, f, nx * ny * sizeof *f);
    masked_level(j->p->mask, nx * ny, j->work);
    status st = acf2d_make(j->work, nx, ny, lags, out, e);
    return st == ST_OK ? masked_weigh(j->p->mask, out, e) : st;
}

/* What the outlines say, and the first scale from them when the autocorrelation has none. */
static status outline_stage(job *j, error *e) {
    const double sure = 8.0, sure_ratio = 1.8; /* noise is as strong for either sign */
    int sign = j->o->relief == RELIEF_AUTO ? 0 : j->o->relief == RELIEF_PORE ? -1 : 1;
    status st = outline_look(j->f, j->p->nx, j->p->ny, sign, &j->body, e);
    const outline *b = &j->body;
    if (st != ST_OK || (j->first.z >= j->o->min_ring_z && j->first.scale_px > 0.0)) return st;
    if (b->concentration < sure || b->concentration < sure_ratio * b->opposite || !(b->density > 0.0)) return st;
    j->first = (first_scale){ MISSING, spacing_hex(b->density), MISSING };
    j->t.ring_z = MISSING;
    j->second_look = j->by_outline = 1;
    return ST_OK;
}

static status plain_stage(job *j, error *e) {
    size_t nx = j->p->nx, ny = j->p->ny;
    curve made = { 0 };
    status st = correlate(j, j->f, (nx < ny ? nx : ny) / 2, &j->plain, e);
    if (st == ST_OK) st = acf_radial(&j->plain, &made, e);
    if (st != ST_OK) return st;
    curve *c = curve_take(&j->t, &made, "acf", "px", "1");
    spacing_first_scale(c, nx, ny, &j->first);
    if (!(j->first.z >= j->o->min_ring_z)) {
        first_scale second;
        st = scale_without_background(j->f, nx, ny, j->o->min_ring_z, &second, e);
        if (st != ST_OK) return st;
        j->second_look = second.scale_px > 0.0;
        if (j->second_look) j->first = second;
    }
    j->t.ring_z = j->first.z;
    st = outline_stage(j, e);
    if (st != ST_OK) return st;
    double angle = MISSING;
    texture_decay(&j->plain, 0.2, &j->t.sal, &j->t.str, &angle);
    return ST_OK;
}

static int sign_of(const job *j) { return j->t.relief == RELIEF_PORE ? -1 : 1; }

/* Hillock or pore by the evidence at scale d, or as given; *score gets what spoke for it. */
static status relief_stage(job *j, double d, double *score, error *e) {
    relief_evidence r;
    status st = relief_look(j->f, j->p->nx, j->p->ny, d, &r, e);
    if (st != ST_OK) return st;
    *score = r.score;
    j->t.relief_skew = r.skew;
    j->t.relief = j->o->relief == RELIEF_AUTO ? r.relief : j->o->relief;
    j->t.flags &= ~FLAG(RELIEF_UNSURE);
    if (j->o->relief == RELIEF_AUTO && r.unsure) j->t.flags |= FLAG(RELIEF_UNSURE);
    return ST_OK;
}

static status detect_again(job *j, error *e) {
    detection_free(&j->det);
    status st = detect(j->f, j->p->nx, j->p->ny, j->first.scale_px, sign_of(j), j->noise, &j->det, e);
    return st == ST_OK ? hole_drop(&j->holes, &j->det, e) : st;
}

/* Relief at the first scale, features, and relief again at their scale. When that changes its mind, features
 * of the other kind; when their scale speaks against them too, the stronger evidence wins and the answer is
 * unsure. */
static status features_by_brightness(job *j, error *e) {
    double at_first = 0.0, at_own = 0.0, at_other = 0.0;
    status st = relief_stage(j, j->first.scale_px, &at_first, e);
    relief first = j->t.relief;
    if (st == ST_OK) st = detect_again(j, e);
    int near = j->det.scale_px > 0.75 * j->first.scale_px && j->det.scale_px < 1.33 * j->first.scale_px;
    if (st != ST_OK || (fabs(at_first) > clear_score && near)) return st;
    if (st == ST_OK) st = relief_stage(j, j->det.scale_px, &at_own, e);
    relief second = j->t.relief;
    if (st != ST_OK || second == first) return st;
    st = detect_again(j, e);
    if (st == ST_OK) st = relief_stage(j, j->det.scale_px, &at_other, e);
    if (st != ST_OK || j->t.relief == second) return st;
    j->t.flags |= FLAG(RELIEF_UNSURE);
    if (fabs(at_other) > fabs(at_own)) return detect_again(j, e);
    j->t.relief = second;
    return ST_OK;
}

/* Relief by the outlines where they speak; smoothed brightness has it backwards under bright rims. */
static status features_by_sign(job *j, error *e) {
    const double loud = 2.0; /* ratio of the signs above which a contrary brightness raises no doubt */
    double score = 0.0;
    status st = relief_stage(j, j->first.scale_px, &score, e);
    if (st != ST_OK) return st;
    if (j->o->relief == RELIEF_AUTO) {
        j->t.relief = j->body.sign < 0 ? RELIEF_PORE : RELIEF_HILLOCK;
        j->t.flags &= ~FLAG(RELIEF_UNSURE);
        if (score * (double)j->body.sign < 0.0 && j->body.concentration < loud * j->body.opposite)
            j->t.flags |= FLAG(RELIEF_UNSURE);
    }
    return detect_again(j, e);
}

/* 1 for a layer that does not fill the field. */
static int leaves_ground(const first_shell *s, double hex_px) {
    const double bare = 1.06; /* spacing of the density / distance of neighbours */
    return layer_distinct(s) && hex_px > bare * s->mean_px;
}

/* 1 when the features of the outlines are to be taken: those of the brightness miss or split bodies, or are noise of the
 * bare ground; or the bodies are a layer with bare ground, where the centres of outlines are the better ones. */
static status outlines_win(const job *j, const detection *bodies, int *win, error *e) {
    const double agreed = 0.8, most_faint = 0.08, most_apart = 0.05;
    outline_match match = { 0.0, 0.0, 0.0 };
    first_shell shell;
    *win = 1;
    status st = outline_compare(bodies, &j->det, j->p->nx, j->p->ny, &match, e);
    if (st != ST_OK || match.alike < agreed || match.faint >= most_faint) return st;
    st = layer_shell(bodies->features, bodies->n, j->p->nx, j->p->ny, &shell, e);
    *win = st == ST_OK && leaves_ground(&shell, bodies->scale_px) && match.apart < most_apart;
    return st;
}

/* Features of the outlines instead of those of the brightness. */
static status outlines_decide(job *j, error *e) {
    const double alike = 0.05;
    size_t nx = j->p->nx, ny = j->p->ny;
    error before = { ST_OK, "" };
    if (e) before = *e;
    detection bodies = { 0 };
    first_shell shell = { 0 };
    int win = j->by_outline;
    double density = j->det.n ? guarded_density(j->det.features, j->det.n, nx, ny, 0.5 * j->det.scale_px, NULL) : 0.0;
    status st = j->det.n ? layer_shell(j->det.features, j->det.n, nx, ny, &shell, e) : ST_OK;
    if (st != ST_OK) return st;
    int doubt = j->second_look || j->t.relief_skew * (double)j->body.sign < 0.0 ||
                fabs(density / j->body.density - 1.0) > alike || leaves_ground(&shell, spacing_hex(density));
    if (!win && !doubt) return ST_OK;
    st = outline_detect(j->f, nx, ny, &j->body, &bodies, e);
    if (st != ST_OK) return forgive(st, e, &before);
    if (!win) st = outlines_win(j, &bodies, &win, e);
    if (st == ST_OK && win) {
        detection swap = j->det;
        j->det = bodies;
        bodies = swap;
        j->by_outline = 1;
    }
    detection_free(&bodies);
    return st;
}

static status feature_stage(job *j, error *e) {
    error before = { ST_OK, "" };
    if (e) before = *e;
    if (!j->body.sign) return features_by_brightness(j, e);
    status st = features_by_sign(j, e);
    if (st != ST_OK && st != ST_NO_RESULT) return st;
    status missed = st;
    st = outlines_decide(j, e);
    return st == ST_OK && missed != ST_OK && !j->det.n ? missed : (st == ST_OK ? forgive(missed, e, &before) : st);
}

static status cell_stage(job *j, error *e) {
    size_t nx = j->p->nx, ny = j->p->ny;
    j->t.cells = mem_array(nx * ny, sizeof *j->t.cells);
    if (!j->t.cells) return NO_MEMORY(e, "the cells");
    status st = watershed(j->f, nx, ny, sign_of(j), &j->det, j->t.cells, e);
    if (st == ST_OK) hole_touch(&j->holes, j->t.cells, j->det.features);
    j->t.features = j->det.features;
    j->t.n_found = j->det.n;
    j->det.features = NULL;
    return st;
}

/* A layer: bodies known by their outlines, or ones that leave bare ground, whose neighbours stand at one distance. */
static int is_layer(const job *j) {
    return j->by_outline ? layer_distinct(&j->shell) : leaves_ground(&j->shell, j->t.spacing_hex.value);
}

/* Spacing and stretch of a layer from its centres, unless the six peaks of the curvature map say the same. */
static void layer_take(job *j, int from_peaks) {
    const double same = 0.02;
    texture *t = &j->t;
    const first_shell *s = &j->shell;
    if (!is_layer(j)) return;
    t->flags |= FLAG(LAYER);
    if (from_peaks && fabs(t->spacing_acf.value / s->mean_px - 1.0) < same) return;
    double n = (double)s->n_pairs, e2 = s->e1 * s->e1 + s->e2 * s->e2, rel = s->sd_px / s->mean_px;
    t->spacing_acf = (measured){ s->mean_px, s->sd_px / sqrt(n / 3.0), 0.0, t->n_features };
    double angle = -0.5 * atan2(s->e2, s->e1) * 180.0 / PI, u = 2.0 * rel * sqrt(2.0 / n), ratio = (1.0 + sqrt(e2)) / (1.0 - sqrt(e2));
    t->stretch = (measured){ ratio, u * ratio, 0.0, t->n_features };
    t->stretch_angle_deg = (measured){ angle < 0.0 ? angle + 180.0 : angle, fmin(52.0, 0.5 * u / (ratio - 1.0) * 180.0 / PI), 0.0, t->n_features };
}

/* The ring of the curvature map at 0.12 d, and the peak of its power spectrum. */
static status ring_stage(job *j, error *e) {
    size_t nx = j->p->nx, ny = j->p->ny, half = (nx < ny ? nx : ny) / 2,
           lags = (size_t)(ring_lags * j->d) + 4;
    acf2d k = { 0 };
    curve made = { 0 };
    ring r = { 0 };
    error before = { ST_OK, "" };
    if (e) before = *e;
    status st = filter_curvature(j->f, nx, ny, fmax(0.8, ring_scale * j->d), sign_of(j), j->work, e);
    if (st == ST_OK) st = correlate(j, j->work, lags < half ? lags : half, &k, e);
    if (st == ST_OK) st = acf_radial(&k, &made, e);
    if (st == ST_OK) {
        curve *c = curve_take(&j->t, &made, "acf_curvature", "px", "1");
        st = spacing_ring(&k, c, j->d, j->t.n_features, &r, e);
        if (st == ST_OK) {
            j->t.spacing_acf = r.spacing;
            j->t.stretch = r.stretch;
            j->t.stretch_angle_deg = r.stretch_angle_deg;
        }
        st = forgive(st, e, &before);
        layer_take(j, r.from_peaks);
    }
    acf2d_free(&k);
    made = (curve){ 0 };
    if (st == ST_OK) st = psd_radial(j->work, nx, ny, &made, e);
    if (st == ST_OK) {
        curve *c = curve_take(&j->t, &made, "psd_curvature", "1/px", "px2");
        measured psd = not_measured;
        st = spacing_psd_peak(c, j->d, j->t.n_features, &psd, e);
        if (st == ST_OK) j->t.spacing_psd = psd;
        st = forgive(st, e, &before);
    }
    return st;
}

static status curve_add(texture *t, const char *name, const char *y_unit, const double *x_px, const double *y, size_t n, error *e) {
    curve_point *p = mem_array(n, sizeof *p);
    if (!p) return NO_MEMORY(e, "a curve");
    for (size_t k = 0; k < n; k++) p[k] = (curve_point){ x_px[k], y[k] };
    curve *c = curve_new(t, name, "px", y_unit);
    c->points = p;
    c->n = n;
    return ST_OK;
}

/* g(r), its first ring, and L(r) = sqrt(K / pi), which is r for random placement (Besag J. 1977, J. R. Stat. Soc. B 39:193, in the
 * discussion of Ripley's paper; from memory). */
static status pair_stage(job *j, error *e) {
    static const double reach = 4.0, step = 0.05,
                        kernel = 0.15; /* in units of 1/sqrt(density), kernel of A-13 */
    size_t n = j->t.n_found, n_r = (size_t)(reach / step);
    double unit = 1.0 / sqrt(j->t.density.value);
    window w = { -0.5, -0.5, (double)j->p->nx - 0.5, (double)j->p->ny - 0.5 };
    double *v = mem_array(2 * n + 3 * n_r, sizeof *v);
    if (!v) return NO_MEMORY(e, "the pair correlation");
    double *x = v, *y = v + n, *r = v + 2 * n, *g = r + n_r, *l = g + n_r;
    for (size_t i = 0; i < n; i++) {
        x[i] = j->t.features[i].x;
        y[i] = j->t.features[i].y;
    }
    for (size_t k = 0; k < n_r; k++) r[k] = (double)(k + 1) * step * unit;
    status st = pair_correlation(x, y, n, w, kernel * unit, r, n_r, g, e);
    if (st == ST_OK) st = curve_add(&j->t, "pair_correlation", "1", r, g, n_r, e);
    if (st == ST_OK) {
        pair_ring first = pair_first_ring(r, g, n_r, n, w, kernel * unit);
        j->t.pair_ring_px = first.r;
        j->t.pair_ring_height = first.g;
        j->t.pair_ring_z = first.z;
        st = ripley_k(x, y, n, w, r, n_r, l, e);
    }
    for (size_t k = 0; st == ST_OK && k < n_r; k++) l[k] = sqrt(l[k] / PI);
    if (st == ST_OK) st = curve_add(&j->t, "ripley_l", "px", r, l, n_r, e);
    free(v);
    return st;
}

/* Everything that needs a scale. */
static status scaled_stages(job *j, error *e) {
    error before = { ST_OK, "" };
    if (e) before = *e;
    status st = feature_stage(j, e);
    if (st == ST_NO_RESULT) {
        j->t.reasons |= FLAG(FEW_FEATURES);
        return forgive(st, e, &before);
    }
    if (st == ST_OK) {
        j->d = j->det.scale_px;
        st = cell_stage(j, e);
    }
    if (st == ST_OK) st = statistics_fill(&j->t, j->p->nx, j->p->ny, &j->det, &j->holes, e);
    if (st == ST_OK && j->t.spacing_hex.value > 0.0) {
        st = layer_shell(j->t.features, j->t.n_found, j->p->nx, j->p->ny, &j->shell, e);
        j->d = is_layer(j) ? j->shell.mean_px : j->t.spacing_hex.value;
        if (st == ST_OK) st = ring_stage(j, e);
        if (st == ST_OK) st = pair_stage(j, e);
    }
    return st;
}

/* Parts of u that other stages leave open: repeatability of the two figures of the spectrum, measured on
 * repeated renders. */
static void complete_uncertainties(texture *t) {
    double n = t->n_features > 1 ? (double)t->n_features : 1.0;
    if (isfinite(t->sharpness.value) && !isfinite(t->sharpness.u_sampling))
        t->sharpness.u_sampling = 0.1 * t->spacing_hex.value / sqrt(n);
    if (isfinite(t->noise_rel.value) && !isfinite(t->noise_rel.u_sampling))
        t->noise_rel.u_sampling = t->noise_rel.value / sqrt(2.0 * n);
}

static void withhold_ring(texture *t) {
    t->spacing_acf = not_measured;
    t->flags |= FLAG(NO_RING);
    t->flags &= ~FLAG(CONTRADICTION);
}

/* Detection keeps centres apart by itself: random placement comes back with a Clark-Evans index of 1.33 to 1.43, and a
 * ring that is the detector's. It shows in pairs as near as detection allows, 3 to 7 % of the features nearer than 0.44
 * spacings, where a hard core of the texture's own (Matern II at 0.48) leaves none to 1 %. Tried on renders. */
static int is_placed_at_random(const texture *t) {
    const double near = 0.44, share = 0.02, order = 1.45;
    size_t n = 0;
    if (!(t->clark_evans.value < order)) return 0;
    for (size_t i = 0; i < t->n_found; i++) n += t->features[i].nn_px < near * t->spacing_hex.value;
    return (double)n > share * (double)t->n_found;
}

/* A scale that only the second look showed must be that of the features found. Where these keep less distance than
 * detection itself imposes on random points (Clark-Evans 1.36 to 1.43), their ring tells the detector, not the texture:
 * no spacing by autocorrelation is given. */
static void judge_second_look(job *j) {
    const double nearest = 0.7, farthest = 1.45, random_order = 1.45;
    texture *t = &j->t;
    if (t->flags & (FLAG(LAYER) | FLAG(TWO_SPACINGS))) return; /* random bodies have no shell, and no second population */
    double ratio = t->spacing_hex.value / j->first.scale_px;
    int scattered = (t->flags & FLAG(WIDE_SIZES)) && t->clark_evans.value < 1.5; /* grain, rims, several things at once */
    if (!(ratio > nearest && ratio < farthest) || scattered) t->reasons |= FLAG(NO_RING);
    if (t->clark_evans.value < random_order) withhold_ring(t);
}

/* Bare ground lowers the Clark-Evans index, lengthens spacing_hex and widens the cells at its border; none of these
 * speaks against the distance of neighbours, which is as good as the centres. */
static void judge_layer(texture *t) {
    const double method = 0.01;
    t->spacing_acf.u_method = method * t->spacing_acf.value;
    t->flags &= ~(FLAG(LOW_ORDER) | FLAG(CONTRADICTION) | FLAG(WIDE_SIZES));
}

/* The ring of the curvature map is where the centres have theirs, and both stand out: no ring of rims, which lies nearer.
 * The first peak of g lies up to a quarter inside the ring by itself, where the order is that of a hard core. */
static int is_ring_of_centres(const texture *t) {
    const double least_height = 1.4, order = 1.5, nearest = 0.9, farthest = 1.4;
    double ratio = t->spacing_acf.value / t->pair_ring_px;
    return t->clark_evans.value >= order && t->pair_ring_height >= least_height && ratio > nearest && ratio < farthest;
}

/* Bodies without a shell: the ring of the curvature map is that of their own rims. Where the autocorrelation had no scale
 * either, no spacing stands out at all. */
static void judge_bodies(job *j) {
    const double many_radii = 0.75;
    texture *t = &j->t;
    if (j->body.breadth > many_radii) t->flags |= FLAG(WIDE_SIZES);
    int centres_ring = t->pair_ring_z >= j->o->min_ring_z; /* random bodies have none */
    if (centres_ring && (t->flags & FLAG(TWO_SPACINGS))) return; /* the ring is that of the stronger population */
    if (centres_ring && is_ring_of_centres(t)) return;
    withhold_ring(t);
    if (!isfinite(t->ring_z)) t->reasons |= FLAG(NO_RING);
}

static void judge(job *j, const sharpness *s) {
    texture *t = &j->t;
    fitness_judge(s, j->p, j->o, t);
    statistics_uncertainty(t, &j->det);
    complete_uncertainties(t);
    if (t->clark_evans.value < j->o->warn_order) t->flags |= FLAG(LOW_ORDER);
    if (fabs(t->spacing_acf.value / t->spacing_hex.value - 1.0) > j->o->warn_contradiction)
        t->flags |= FLAG(CONTRADICTION);
    if (t->size_gsd.value > j->o->warn_size_gsd) t->flags |= FLAG(WIDE_SIZES);
    if (t->flags & FLAG(LAYER))
        judge_layer(t);
    else if (j->by_outline)
        judge_bodies(j);
    else if (is_placed_at_random(t))
        withhold_ring(t);
    if (j->second_look) judge_second_look(j);
}

static status run(job *j, error *e) {
    const plane *p = j->p;
    size_t n = p->nx * p->ny;
    sharpness s = sharpness_unknown();
    j->f = mem_array(n, sizeof *j->f);
    j->work = mem_array(n, sizeof *j->work);
    status st = j->f && j->work ? flatten(p, j->f, e) : NO_MEMORY(e, "the micrograph");
    if (st != ST_OK) return st;
    j->t.nx = p->nx;
    j->t.ny = p->ny;
    j->t.clipped_share = p->clipped_low + p->clipped_high;
    if (!has_contrast(j)) {
        j->t.reasons |= FLAG(FEATURELESS);
        return ST_OK;
    }
    j->noise = noise_sd(j->f, p->nx, p->ny);
    st = plain_stage(j, e);
    if (st == ST_OK && (j->by_outline || (j->first.z >= j->o->min_ring_z && j->first.scale_px > 0.0)))
        st = scaled_stages(j, e);
    else if (st == ST_OK)
        j->t.reasons |= FLAG(NO_RING);
    if (st == ST_OK) st = bright_share(j->f, p->mask, p->nx, p->ny, j->o->bright_level, j->d, &j->t.bright_share, e);
    curve psd = { 0 };
    if (st == ST_OK) st = fitness_look(j->f, p, j->d > 0.0 ? j->d : 0.0, &s, &psd, e); /* 0: no scale */
    if (st == ST_OK) {
        curve_take(&j->t, &psd, "psd", "1/px", "px2");
        judge(j, &s);
    }
    return st;
}

/* The same plane with smooth ground under its marks. */
static status run_filled(job *j, const plane *p, error *e) {
    plane filled = *p;
    float *px = mem_array(p->nx * p->ny, sizeof *px);
    status st = px ? masked_fill(p, px, e) : NO_MEMORY(e, "the masked pixels");
    if (st == ST_OK) st = hole_make(p, &j->holes, e);
    filled.px = px;
    j->p = &filled;
    if (st == ST_OK) st = run(j, e);
    j->p = p;
    hole_free(&j->holes);
    free(px);
    return st;
}

status measure_plane(const plane *p, const measure_options *o, texture *out, error *e) {
    if (!p->px || p->nx < LIMIT_MIN_SIDE || p->ny < LIMIT_MIN_SIDE)
        return fail(e, ST_BAD_INPUT,
                    "the picture is %zu x %zu px, expected at least %zu x %zu; it is too small to "
                    "carry texture statistics",
                    p->nx, p->ny, LIMIT_MIN_SIDE, LIMIT_MIN_SIDE);
    job j = { .p = p, .o = o, .d = MISSING, .body = { .radius_px = MISSING }, .t = texture_empty() };
    status st = p->mask ? run_filled(&j, p, e) : run(&j, e);
    free(j.f);
    free(j.work);
    acf2d_free(&j.plain);
    detection_free(&j.det);
    if (st == ST_OK)
        *out = j.t;
    else
        texture_free(&j.t);
    return st;
}

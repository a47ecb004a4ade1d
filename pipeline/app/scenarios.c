/* A map of some hundred predictions and up to three sweeps on the 5 nm grid of window.c and angles.c: a quarter of a second, whatever
 * the number of samples. What this file does not do: it knows no sample's own calibration or measured profile; where a run has one
 * it says why there is no map. */
#include "app/scenarios.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/angles.h"
#include "app/window.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "io/json.h"

static int is_placed(const sample_row *r) { return r->spacing_nm > 0.0 && r->height_nm > 0.0 && isfinite(r->weighted_reflectance); }

static const char *why_missing(const sample_row *rows, size_t n, const setup *s) {
    size_t placed = 0;
    for (size_t i = 0; i < n; i++) placed += (size_t)is_placed(&rows[i]);
    if (!placed) return "no sample has a spacing, a height and a predicted reflectance";
    if (s->measured.n) return "the protocol names a measured profile, which has its own height";
    if (s->calibrated.link.n_samples) return "the reflectances of this run are calibrated on measured spectra, and a map of the bare model would not agree with them";
    return NULL;
}

static void say_missing(const char *why, textbuf *out) {
    text_add(out, "{\"missing\": ");
    json_string(out, why);
    text_add(out, "}");
}

/* About `steps` round steps from below lo to above hi. */
static void round_axis(double lo, double hi, double steps, axis *a) {
    static const double lead[] = { 1.0, 2.0, 2.5, 5.0, 10.0 };
    double raw = (hi - lo) / steps, decade = pow(10.0, floor(log10(raw)));
    size_t k = 0;
    while (lead[k] * decade < raw && k < 4) k++;
    double step = lead[k] * decade, first = fmax(step, floor(lo / step) * step);
    for (a->n = 0; a->n < WINDOW_VALUES; a->n++) {
        a->v[a->n] = first + step * (double)a->n;
        if (a->v[a->n] >= hi) break;
    }
    a->n++;
}

static double target_of(const protocol *p) {
    for (size_t i = 0; i < p->n_targets; i++)
        if (!strcmp(p->targets[i].quantity, "weighted_reflectance") && isfinite(p->targets[i].max)) return p->targets[i].max;
    return 0.02;
}

static void span(const sample_row *rows, size_t n, const protocol *p, window *w) {
    double lo = HUGE_VAL, hi = 0.0, low = HUGE_VAL, high = 0.0;
    for (size_t i = 0; i < n; i++) {
        if (!is_placed(&rows[i])) continue;
        lo = fmin(lo, rows[i].spacing_nm);
        hi = fmax(hi, rows[i].spacing_nm);
        low = fmin(low, rows[i].height_nm);
        high = fmax(high, rows[i].height_nm);
    }
    for (size_t i = 0; i < p->n_targets; i++) {
        const target *t = &p->targets[i];
        if (strcmp(t->quantity, "spacing_nm")) continue;
        if (isfinite(t->min)) lo = fmin(lo, t->min);
        if (isfinite(t->max)) hi = fmax(hi, t->max);
    }
    round_axis(0.85 * lo, 1.1 * hi, 8.0, &w->x);
    round_axis(0.3 * low, 1.5 * high, 12.0, &w->height);
}

static status add_samples(const sample_row *rows, size_t n, window *w, error *e) {
    w->samples = mem_array(n, sizeof *w->samples);
    if (!w->samples) return NO_MEMORY(e, "the process window");
    for (size_t i = 0; i < n; i++) {
        if (!is_placed(&rows[i])) continue;
        window_sample *s = &w->samples[w->n_samples++];
        *s = (window_sample){ mem_text(rows[i].sample), mem_text(rows[i].verdict), rows[i].spacing_nm, rows[i].height_nm,
                              rows[i].weighted_reflectance };
        if (!s->name || !s->verdict) return NO_MEMORY(e, "the process window");
    }
    return ST_OK;
}

status scenarios_window(const sample_row *rows, size_t n, int pores, const protocol *p, const setup *s, textbuf *out, error *e) {
    const char *missing = why_missing(rows, n, s);
    if (missing) {
        say_missing(missing, out);
        return text_check(out, "the process window", e);
    }
    window w = { .across = ACROSS_SPACING, .target = target_of(p) };
    surface_input base = { .pores = pores, .link = p->link };
    span(rows, n, p, &w);
    status st = add_samples(rows, n, &w, e);
    if (st == ST_OK) st = window_fill(&w, &base, &s->optics, e);
    if (st == ST_OK) window_json(&w, out);
    window_free(&w);
    return st == ST_OK ? text_check(out, "the process window", e) : st;
}

static int by_spacing(const void *a, const void *b) {
    const sample_row *p = *(const sample_row *const *)a, *q = *(const sample_row *const *)b;
    return p->spacing_nm < q->spacing_nm ? -1 : p->spacing_nm > q->spacing_nm ? 1 : strcmp(p->sample, q->sample);
}

static status one_sweep(const sample_row *r, int pores, const protocol *p, const setup *s, int first, textbuf *out, error *e) {
    angle_sweep sweep = { 0 };
    surface_input in = { .pores = pores, .link = p->link, .spacing_nm = { r->spacing_nm, r->spacing_nm_u, 1 },
                         .height_nm = { r->height_nm, r->height_nm_u, 1 } };
    status st = angles_sweep(&in, &s->optics, 0.0, 80.0, 10.0, &sweep, e);
    if (st != ST_OK) return st;
    text_add(out, first ? "{\"sample\": " : ", {\"sample\": ");
    json_string(out, r->sample);
    text_add(out, ", \"sweep\": ");
    angles_json(&sweep, target_of(p), out);
    text_add(out, "}");
    angle_sweep_free(&sweep);
    return ST_OK;
}

status scenarios_angles(const sample_row *rows, size_t n, int pores, const protocol *p, const setup *s, textbuf *out, error *e) {
    const char *missing = why_missing(rows, n, s);
    const sample_row **order = missing ? NULL : mem_array(n, sizeof *order);
    status st = missing || order ? ST_OK : NO_MEMORY(e, "the angles");
    size_t placed = 0;
    if (missing) say_missing(missing, out);
    for (size_t i = 0; order && i < n; i++)
        if (is_placed(&rows[i])) order[placed++] = &rows[i];
    if (placed) {
        qsort(order, placed, sizeof(sample_row *), by_spacing);
        const size_t want[3] = { 0, placed / 2, placed - 1 };
        text_add(out, "{\"samples\": [");
        for (size_t k = 0; k < 3 && st == ST_OK; k++)
            if (!k || want[k] != want[k - 1]) st = one_sweep(order[want[k]], pores, p, s, !k, out, e);
        text_add(out, "]}");
    }
    free(order);
    return st == ST_OK ? text_check(out, "the angles", e) : st;
}

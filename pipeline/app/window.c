/* The process window: one prediction per cell on a 10 nm grid to 1e-4, the contour by straight lines between cells. Heights are
 * taken as known; what a cell's interval holds is the model's error and, where the protocol says so, the shape's. */
#include "app/window.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/file.h"
#include "io/table.h"

static const double GRID_NM = 10.0, TOLERANCE = 1e-4;

void window_free(window *w) {
    for (size_t i = 0; i < w->n_samples; i++) {
        free(w->samples[i].name);
        free(w->samples[i].verdict);
    }
    free(w->samples);
    free(w->cells);
    free(w->edges);
    *w = (window){ 0 };
}

/* ---- axes ---- */

/* Up to three numbers between colons; how many, 0 for anything else. */
static int numbers(const char *text, double v[3]) {
    int n = 0;
    for (const char *at = text; at && n < 3; n++) {
        char one[40] = "";
        const char *end = strchr(at, ':');
        size_t length = end ? (size_t)(end - at) : strlen(at);
        if (length >= sizeof one) return 0;
        memcpy(one, at, length);
        if (!number_parse(one, &v[n])) return 0;
        at = end ? end + 1 : NULL;
        if (at && n == 2) return 0;
    }
    return n;
}

status axis_parse(const char *option, const char *text, double lo, double hi, axis *out, error *e) {
    double v[3];
    int n = numbers(text, v);
    axis a = { 0 };
    char from[NUMBER_TEXT], to[NUMBER_TEXT];
    int ok =
        n == 1 ? v[0] >= lo && v[0] <= hi : n == 3 && v[0] >= lo && v[1] <= hi && v[0] <= v[1] && v[2] > 0.0;
    if (ok && n == 3) ok = (v[1] - v[0]) / v[2] < WINDOW_VALUES - 1;
    if (!ok)
        return fail(e, ST_BAD_INPUT,
                    "%s: found %.60s, expected a number from %s to %s or FROM:TO:STEP with at most %d "
                    "values, such as 150:500:50",
                    option, text, number_text(lo, 6, from), number_text(hi, 6, to), WINDOW_VALUES);
    a.n = n == 1 ? 1 : (size_t)floor((v[1] - v[0]) / v[2] + 1e-9) + 1;
    for (size_t i = 0; i < a.n; i++) a.v[i] = n == 1 ? v[0] : v[0] + v[2] * (double)i;
    *out = a;
    return ST_OK;
}

const char *across_name(across a) {
    static const char *const names[] = { "spacing_nm", "exponent", "thickness_nm" };
    return names[a];
}

/* ---- cells ---- */

static status fill_cell(window *w, size_t row, size_t column, const surface_input *base,
                        const optics_setup *set, error *e) {
    surface_input in = *base;
    optics_setup o = *set;
    layer layers[LIMIT_COATINGS];
    double x = w->x.v[column];
    window_cell *c = &w->cells[row * w->x.n + column];
    prediction p = { 0 };
    for (size_t i = 0; i < o.n_coatings; i++) layers[i] = o.coatings[i];
    in.spacing_nm = (quantity){ w->across == ACROSS_SPACING ? x : w->spacing_nm, 0.0, 1 };
    in.height_nm = (quantity){ w->height.v[row], 0.0, 1 };
    if (w->across == ACROSS_EXPONENT) in.link.exponent = x;
    if (w->across == ACROSS_THICKNESS) layers[0].thickness_nm = x;
    o.coatings = layers;
    o.step_nm = fmax(o.step_nm, GRID_NM);
    o.reflect.tolerance = fmax(o.reflect.tolerance, TOLERANCE);
    status st = predict(&in, &o, &p, e);
    if (st != ST_OK) return st;
    *c = (window_cell){ p.weighted, p.weighted_lo, p.weighted_hi, p.area_ratio };
    if (row == w->height.n / 2 && column == w->x.n / 2) snprintf(w->note, sizeof w->note, "%s", p.note);
    prediction_free(&p);
    return ST_OK;
}

/* From the top down as long as the target is kept; upper 1: by the upper end. */
static void least_height(const window *w, size_t column, int upper, double *height, double *area) {
    *height = *area = MISSING;
    for (size_t row = w->height.n; row-- > 0;) {
        const window_cell *c = &w->cells[row * w->x.n + column], *above = c + w->x.n;
        double now = upper ? c->R_hi : c->R;
        if (now <= w->target) {
            *height = w->height.v[row];
            *area = c->area_ratio;
            continue;
        }
        if (row + 1 < w->height.n && isfinite(*height) && isfinite(now)) {
            double then = upper ? above->R_hi : above->R, t = (now - w->target) / (now - then);
            *height = (1.0 - t) * w->height.v[row] + t * w->height.v[row + 1];
            *area = (1.0 - t) * c->area_ratio + t * above->area_ratio;
        }
        return;
    }
}

window_edge window_edge_of(const window *w, size_t column) {
    window_edge g;
    least_height(w, column, 0, &g.height_nm, &g.area_ratio);
    least_height(w, column, 1, &g.sure_height_nm, &g.sure_area_ratio);
    return g;
}

status window_fill(window *w, const surface_input *base, const optics_setup *o, error *e) {
    if (w->x.n * w->height.n > WINDOW_CELLS)
        return fail(e, ST_BAD_INPUT, "the map would have %zu cells, at most %d; take larger steps",
                    w->x.n * w->height.n, WINDOW_CELLS);
    if (w->across == ACROSS_THICKNESS && !o->n_coatings)
        return fail(e, ST_BAD_INPUT, "a map over coating thickness needs a coating: --coating MATERIAL:NM");
    w->here = w->across == ACROSS_EXPONENT ? base->link.exponent : o->n_coatings ? o->coatings[0].thickness_nm : MISSING;
    w->cells = mem_array(w->x.n * w->height.n, sizeof *w->cells);
    w->edges = mem_array(w->x.n, sizeof *w->edges);
    status st = w->cells && w->edges ? ST_OK : NO_MEMORY(e, "the map");
    for (size_t row = 0; row < w->height.n; row++)
        for (size_t column = 0; column < w->x.n && st == ST_OK; column++)
            st = fill_cell(w, row, column, base, o, e);
    for (size_t column = 0; column < w->x.n && st == ST_OK; column++)
        w->edges[column] = window_edge_of(w, column);
    return st;
}

/* ---- samples ---- */

static double cell_number(const csv *c, size_t row, const char *name) {
    double v;
    return number_parse(csv_cell(c, row, csv_column(c, name)), &v) ? v : MISSING;
}

status window_samples(const char *folder, window *w, error *e) {
    csv c = { 0 };
    char *path = path_join(folder, "samples.csv");
    status st = path ? input_wanted(path, e) : NO_MEMORY(e, "a path");
    if (st == ST_OK) st = csv_read(path, &c, e);
    if (st == ST_OK && (csv_column(&c, "sample") < 0 || csv_column(&c, "spacing_nm") < 0))
        st = fail(e, ST_BAD_INPUT,
                  "%s: no columns sample and spacing_nm; name a folder that 'sward run --out' wrote", path);
    if (st == ST_OK) w->samples = mem_array(c.n_rows, sizeof *w->samples);
    if (st == ST_OK && !w->samples) st = NO_MEMORY(e, "the samples");
    for (size_t i = 0; i < c.n_rows && st == ST_OK; i++) {
        window_sample *s = &w->samples[w->n_samples++];
        s->name = mem_text(csv_cell(&c, i, csv_column(&c, "sample")));
        s->verdict = mem_text(csv_cell(&c, i, csv_column(&c, "verdict")));
        s->spacing_nm = cell_number(&c, i, "spacing_nm");
        s->height_nm = cell_number(&c, i, "height_nm");
        s->R = cell_number(&c, i, "weighted_reflectance");
        if (!s->name || !s->verdict) st = NO_MEMORY(e, "a sample");
    }
    csv_free(&c);
    free(path);
    return st;
}

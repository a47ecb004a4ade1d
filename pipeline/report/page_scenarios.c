/* Reflectance against the angle of incidence, and the process window with today's samples in it, out of the members "angles" and
 * "window" of results.json. What is missing there says why. */
#include <cjson/cJSON.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"
#include "report/html.h"
#include "report/page.h"
#include "report/plot.h"

enum { MOST_SWEEPS = 3, MOST_ANGLES = 32, MOST_SPACINGS = 64 };

static void add_missing(const cJSON *o, const char *what, textbuf *out) {
    text_addf(out, "<p>%s: ", what);
    html_text(out, *json_member_text(o, "missing") ? json_member_text(o, "missing") : "this run made none");
    text_add(out, ".</p>\n");
}

/* ---- angle ---- */

typedef struct {
    double x[MOST_ANGLES], y[MOST_ANGLES], lo[MOST_ANGLES], hi[MOST_ANGLES], polished[MOST_ANGLES], coated[MOST_ANGLES];
    size_t n;
} sweep;

static void read_sweep(const cJSON *o, sweep *s) {
    const cJSON *row;
    s->n = 0;
    cJSON_ArrayForEach(row, cJSON_GetObjectItemCaseSensitive(o, "angles")) {
        if (s->n == MOST_ANGLES) break;
        s->x[s->n] = json_member_number(row, "angle_deg");
        s->y[s->n] = 100.0 * json_member_number(row, "weighted_reflectance");
        s->lo[s->n] = 100.0 * json_member_number(row, "weighted_reflectance_lo");
        s->hi[s->n] = 100.0 * json_member_number(row, "weighted_reflectance_hi");
        s->polished[s->n] = 100.0 * json_member_number(row, "polished_reflectance");
        s->coated[s->n++] = 100.0 * json_member_number(row, "coated_reflectance");
    }
}

static void draw_angles(const cJSON *samples, sweep *of, textbuf *out) {
    plot_series lines[MOST_SWEEPS + 2];
    size_t n = 2;
    const cJSON *one;
    cJSON_ArrayForEach(one, samples) {
        if (n == MOST_SWEEPS + 2) break;
        sweep *s = &of[n - 2];
        read_sweep(cJSON_GetObjectItemCaseSensitive(one, "sweep"), s);
        int middle = cJSON_GetArraySize(samples) < 3 || n == 3; /* one band is enough to see how sure the curves are */
        lines[n] = (plot_series){ .x = s->x, .y = s->y, .lo = middle ? s->lo : NULL, .hi = middle ? s->hi : NULL, .n = s->n,
                                  .tone = n == 2 ? 3 : n == 3 ? 0 : 4, .label = json_member_text(one, "sample") };
        n++;
    }
    lines[0] = (plot_series){ .x = of->x, .y = of->polished, .n = of->n, .style = PLOT_DASHED, .tone = 2, .label = "polished" };
    lines[1] = (plot_series){ .x = of->x, .y = of->coated, .n = of->n, .style = PLOT_DOTTED, .tone = 1, .label = "75 nm nitride" };
    plot p = { .title = "Weighted reflectance against the angle of incidence",
               .description = "Weighted reflectance of the narrowest, the middle and the widest texture, of polished and of coated silicon, against the "
                              "angle of incidence",
               .x_label = "angle from the surface normal (deg)", .y_label = "weighted reflectance (%)", .log_y = 1, .y_lo = 0.1, .y_hi = 100.0,
               .target_lo = MISSING, .target_hi = MISSING, .series = lines, .n_series = n, .width = 1040, .height = 320 };
    text_add(out, "<figure class=\"wide\">");
    plot_chart(&p, 0, NULL, out);
    text_add(out, "<figcaption>The samples with the narrowest, the middle and the widest spacing, unpolarised light; the band is the 95 % "
                  "interval of one of them.</figcaption></figure>\n");
}

void page_angles(const results *r, textbuf *out) {
    if (!r->n_samples) return;
    cJSON *o = r->angles_json ? cJSON_Parse(r->angles_json) : NULL;
    const cJSON *samples = cJSON_GetObjectItemCaseSensitive(o, "samples");
    sweep *of = mem_array(MOST_SWEEPS, sizeof *of);
    text_add(out, "<h3>Angle of incidence</h3>\n");
    if (!of)
        out->failed = 1;
    else if (cJSON_GetArraySize(samples) > 0)
        draw_angles(samples, of, out);
    else
        add_missing(o, "No angles", out);
    free(of);
    cJSON_Delete(o);
}

/* ---- process window ---- */

typedef struct {
    double x[MOST_SPACINGS], least[MOST_SPACINGS], sure[MOST_SPACINGS], top[MOST_SPACINGS], lowest, highest;
    size_t n;
} contour;

static contour read_contour(const cJSON *o) {
    contour c = { .lowest = HUGE_VAL, .highest = 0.0 };
    const cJSON *row;
    cJSON_ArrayForEach(row, cJSON_GetObjectItemCaseSensitive(o, "cells")) {
        c.lowest = fmin(c.lowest, json_member_number(row, "height_nm"));
        c.highest = fmax(c.highest, json_member_number(row, "height_nm"));
    }
    cJSON_ArrayForEach(row, cJSON_GetObjectItemCaseSensitive(o, "contour")) {
        if (c.n == MOST_SPACINGS) break;
        c.x[c.n] = json_member_number(row, "spacing_nm");
        c.least[c.n] = json_member_number(row, "least_height_nm");
        c.sure[c.n] = json_member_number(row, "sure_height_nm");
        c.top[c.n++] = c.highest;
    }
    return c;
}

/* Today's samples: spacing against height with its U. */
typedef struct {
    double *x, *y, *lo, *hi;
    plot_mark *marks;
    const char **names;
    size_t n;
} placed;

static void placed_free(placed *p) {
    free(p->x);
    free(p->y);
    free(p->lo);
    free(p->hi);
    free(p->marks);
    free(p->names);
}

static int place_samples(const results *r, placed *p) {
    size_t n = r->n_samples;
    *p = (placed){ mem_array(n, sizeof(double)), mem_array(n, sizeof(double)), mem_array(n, sizeof(double)), mem_array(n, sizeof(double)),
                   mem_array(n, sizeof(plot_mark)), mem_array(n, sizeof(char *)), 0 };
    if (!p->x || !p->y || !p->lo || !p->hi || !p->marks || !p->names) return 0;
    for (size_t i = 0; i < n; i++) {
        const sample_row *s = &r->samples[i];
        if (!isfinite(s->spacing_nm) || !isfinite(s->height_nm)) continue;
        p->x[p->n] = s->spacing_nm;
        p->y[p->n] = s->height_nm;
        p->lo[p->n] = s->height_nm - 2.0 * s->height_nm_u;
        p->hi[p->n] = s->height_nm + 2.0 * s->height_nm_u;
        p->names[p->n] = s->sample;
        p->marks[p->n++] = page_mark(page_extra(r, s, "verdict_weighted_reflectance"));
    }
    return 1;
}

static void draw_window(const results *r, const cJSON *o, const placed *p, textbuf *out) {
    contour c = read_contour(o);
    char percent[NUMBER_TEXT];
    textbuf plain = { 0 }, sure = { 0 };
    plot_rule limits[2] = { { MISSING, "spacing target", 3 }, { MISSING, "spacing target", 3 } };
    for (size_t k = 0; k < r->n_targets; k++)
        if (!strcmp(r->target_quantity[k], "spacing_nm")) {
            limits[0].at = r->target_min ? r->target_min[k] : MISSING;
            limits[1].at = r->target_max ? r->target_max[k] : MISSING;
        }
    number_percent(json_member_number(o, "target"), 4, percent);
    text_addf(&plain, "least height for %s %%, plain value", percent);
    text_addf(&sure, "least height for %s %% with 95 %% confidence", percent);
    plot_series s[3] = { { .x = c.x, .y = c.least, .n = c.n, .style = PLOT_DASHED, .tone = 1, .label = plain.s },
                         { .x = c.x, .y = c.sure, .lo = c.sure, .hi = c.top, .n = c.n, .tone = 3, .label = sure.s },
                         { .x = p->x, .y = p->y, .lo = p->lo, .hi = p->hi, .n = p->n, .style = PLOT_POINTS, .marks = p->marks,
                           .point_names = p->names, .label = "samples of this run" } };
    plot w = { .title = "Process window and the samples of this run",
               .description = "Height of the features against their spacing: the least height that keeps the reflectance target, and where the "
                              "samples of this run lie",
               .x_label = "spacing (nm)", .y_label = "height (nm)", .y_lo = c.lowest, .y_hi = c.highest, .target_lo = MISSING,
               .target_hi = MISSING, .series = s, .n_series = 3, .rules = limits, .n_rules = 2, .width = 1040, .height = 380 };
    text_add(out, "<figure class=\"wide\">");
    plot_chart(&w, 0, NULL, out);
    text_addf(out, "<figcaption>In the shaded part the predicted weighted reflectance stays at or below %s %% with 95 %% confidence%s; between the two "
                   "lines the model alone cannot decide, below the dashed line it is missed. Bars: height \xc2\xb1 U (k = 2).</figcaption></figure>\n<p>",
              percent, isfinite(limits[0].at) || isfinite(limits[1].at) ? ", and between the upright dashes the spacing is on target" : "");
    html_text(out, json_member_text(o, "answer"));
    text_add(out, "</p>\n<p class=\"small\">");
    html_text(out, json_member_text(o, "note"));
    text_add(out, " ");
    html_text(out, json_member_text(o, "caution"));
    text_add(out, "</p>\n");
    if (plain.failed || sure.failed) out->failed = 1;
    text_free(&plain);
    text_free(&sure);
}

void page_window(const results *r, textbuf *out) {
    if (!r->n_samples) return;
    cJSON *o = r->window_json ? cJSON_Parse(r->window_json) : NULL;
    placed p;
    text_add(out, "<section id=\"window\"><h2>Process window</h2>\n");
    if (!place_samples(r, &p))
        out->failed = 1;
    else if (cJSON_GetArraySize(cJSON_GetObjectItemCaseSensitive(o, "contour")) > 0)
        draw_window(r, o, &p, out);
    else
        add_missing(o, "No process window", out);
    text_add(out, "</section>\n");
    placed_free(&p);
    cJSON_Delete(o);
}

/* Figures of curves: predicted spectra, size distribution, autocorrelation, power spectral density, angle sweep. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/figure_priv.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"
#include "report/curves.h"

/* The numbers of an array member; NULL entries become MISSING. */
static status array_member(const cJSON *row, const char *name, double factor, double **values, size_t *n, error *e) {
    const cJSON *list = cJSON_GetObjectItemCaseSensitive(row, name), *v;
    size_t k = 0, length = cJSON_IsArray(list) ? (size_t)cJSON_GetArraySize(list) : 0;
    *values = mem_array(length, sizeof **values);
    if (!*values) return NO_MEMORY(e, "a spectrum");
    cJSON_ArrayForEach(v, list) (*values)[k++] = cJSON_IsNumber(v) ? factor * v->valuedouble : MISSING;
    *n = k;
    return ST_OK;
}

status figure_spectra(const figure_request *q, const cJSON *run, figure_file *out, error *e) {
    plot_series lines[FIGURE_MOST] = { 0 };
    double *curve[FIGURE_MOST][4] = { { 0 } };
    static const char *const name[4] = { "wavelength_nm", "reflectance", "reflectance_lo", "reflectance_hi" };
    plot p = figure_plot("Predicted reflectance, 95 % bands", "wavelength (nm)", "reflectance (%)");
    status st = ST_OK;
    const cJSON *s;
    for (size_t k = 0; k < q->n_samples && !st; k++) {
        cJSON_ArrayForEach(s, cJSON_GetObjectItemCaseSensitive(run, "spectra")) {
            size_t n[4] = { 0 };
            if (strcmp(json_member_text(s, "sample"), q->samples[k])) continue;
            for (size_t c = 0; c < 4 && !st; c++) st = array_member(s, name[c], c ? 100.0 : 1.0, &curve[k][c], &n[c], e);
            if (!st && (n[1] != n[0] || n[2] != n[0] || n[3] != n[0]))
                st = fail(e, ST_BAD_INPUT, "the spectrum of '%s' has columns of different length", q->samples[k]);
            lines[p.n_series++] = (plot_series){ .x = curve[k][0], .y = curve[k][1], .lo = curve[k][2], .hi = curve[k][3],
                                                 .n = st ? 0 : n[0], .tone = (int)k, .label = q->samples[k],
                                                 .style = (plot_style)(k % 3) };
            break;
        }
    }
    if (!st && !p.n_series) st = fail(e, ST_BAD_INPUT, "no spectrum was predicted for these samples; their rows say why");
    p.series = lines;
    p.log_y = 1;
    p.y_lo = 0.01;
    p.y_hi = 100.0;
    if (!st) st = figure_finish(q, &p, NULL, out, e);
    for (size_t k = 0; k < FIGURE_MOST; k++)
        for (size_t c = 0; c < 4; c++) free(curve[k][c]);
    return st;
}

/* One curve of each chosen micrograph with a rule where the run found its spacing. */
typedef struct {
    const char *curve, *quantity; /* in the profiles; of the image, where the rule stands */
    double reach;                        /* x up to so many of the rule's */
    double scale;                        /* rule = scale / quantity when > 0, else the quantity */
} curve_kind;

static double rule_at(const curve_kind *c, const cJSON *image) {
    double v = json_member_number(image, c->quantity);
    return c->scale > 0.0 ? c->scale / v : v;
}

static status draw_curves(const figure_request *q, const cJSON *run, const curve_kind *kind, plot *p, figure_file *out, error *e) {
    figure_images c = figure_choose(q, run, FIGURE_MOST);
    xy_curve curve[FIGURE_MOST] = { { 0 } };
    plot_series lines[FIGURE_MOST] = { 0 };
    plot_rule rules[FIGURE_MOST] = { 0 };
    textbuf words[FIGURE_MOST] = { { 0 } };
    char number[NUMBER_TEXT];
    double far = 0.0;
    status st = c.n ? ST_OK : fail(e, ST_BAD_INPUT, "none of the micrographs of these samples was used");
    for (size_t k = 0; k < c.n; k++) far = fmax(far, kind->reach * rule_at(kind, c.image[k])); /* fmax skips a missing one */
    for (size_t k = 0; k < c.n && !st; k++) {
        char *stem = figure_stem(c.image[k]);
        st = stem ? curve_read(q->dir, stem, kind->curve, &curve[k], e)
                  : fail(e, ST_BAD_INPUT, "the run kept no tables of %s", json_member_text(c.image[k], "file"));
        free(stem);
        size_t n = 0;
        while (!st && n < curve[k].n && (curve[k].x[n] <= far || !(far > 0.0))) n++;
        const char *file = json_member_text(c.image[k], "file"), *slash = strrchr(file, '/');
        text_addf(&words[k], "%s: spacing %s nm", slash ? slash + 1 : file, number_text(json_member_number(c.image[k], kind->quantity), 5, number));
        lines[k] = (plot_series){ .x = curve[k].x, .y = curve[k].y, .n = n, .tone = (int)k, .style = (plot_style)(k % 3), .label = words[k].s };
        rules[k] = (plot_rule){ .at = rule_at(kind, c.image[k]), .tone = (int)k };
        if (!st) st = text_check(&words[k], "a label", e);
    }
    p->series = lines;
    p->n_series = c.n;
    p->rules = rules;
    p->n_rules = c.n;
    if (!st) st = figure_finish(q, p, NULL, out, e);
    for (size_t k = 0; k < FIGURE_MOST; k++) {
        xy_curve_free(&curve[k]);
        text_free(&words[k]);
    }
    return st;
}

status figure_acf(const figure_request *q, const cJSON *run, figure_file *out, error *e) {
    static const curve_kind kind = { "acf_curvature", "spacing_acf_nm", 3.0, 0.0 };
    plot p = figure_plot("Autocorrelation of the curvature map", "distance (nm)", "autocorrelation");
    p.y_lo = -0.4; /* up to 1, which it is at 0 by definition, the ring would lie flat */
    p.y_hi = 0.4;
    return draw_curves(q, run, &kind, &p, out, e);
}

status figure_psd(const figure_request *q, const cJSON *run, figure_file *out, error *e) {
    static const curve_kind kind = { "psd_curvature", "spacing_psd_nm", 3.0, 1000.0 };
    plot p = figure_plot("Power spectral density of the curvature map", "spatial frequency (1/\xc2\xb5m)", "power spectral density (nm\xc2\xb2)");
    p.from_zero = 1;
    return draw_curves(q, run, &kind, &p, out, e);
}

enum { BINS = 32, MAX_BINS = 80 };

/* Sizes of all used micrographs of one sample, appended to *all. */
static status add_sizes(const figure_request *q, const cJSON *run, const char *sample, xy_curve *all, error *e) {
    const cJSON *m;
    cJSON_ArrayForEach(m, cJSON_GetObjectItemCaseSensitive(run, "images")) {
        if (strcmp(json_member_text(m, "sample"), sample) || strcmp(json_member_text(m, "status"), "ok")) continue;
        xy_curve one = { 0 }, both;
        char *stem = figure_stem(m);
        status st = stem ? sizes_read(q->dir, stem, &one, e) : ST_OK;
        free(stem);
        if (st) return st;
        both = (xy_curve){ mem_array(all->n + one.n, sizeof(double)), mem_array(all->n + one.n, sizeof(double)), all->n + one.n };
        for (size_t i = 0; both.x && both.y && i < both.n; i++) {
            both.x[i] = i < all->n ? all->x[i] : one.x[i - all->n];
            both.y[i] = i < all->n ? all->y[i] : one.y[i - all->n];
        }
        xy_curve_free(&one);
        xy_curve_free(all);
        *all = both;
        if (!both.x || !both.y) return NO_MEMORY(e, "the sizes");
    }
    return ST_OK;
}

/* D10, D50, D90 of a single sample, as its row has them. */
static size_t size_rules(const cJSON *sample, plot_rule rules[3], textbuf words[3]) {
    static const char *const names[3][2] = { { "size_d10_nm", "D10" }, { "size_d50_nm", "D50" }, { "size_d90_nm", "D90" } };
    char number[NUMBER_TEXT];
    for (size_t k = 0; k < 3; k++) {
        double v = json_member_number(sample, names[k][0]);
        text_addf(&words[k], "%s %s nm", names[k][1], number_text(v, 5, number));
        rules[k] = (plot_rule){ .at = v, .label = words[k].s, .tone = 1 };
    }
    return 3;
}

status figure_sizes(const figure_request *q, const cJSON *run, figure_file *out, error *e) {
    xy_curve sizes[FIGURE_MOST] = { { 0 } };
    double share[MAX_BINS], x[MAX_BINS], y[FIGURE_MOST][MAX_BINS], lo = HUGE_VAL, hi = -HUGE_VAL, step = 1.0;
    plot_series bars[FIGURE_MOST] = { 0 };
    plot_rule rules[3];
    textbuf words[3] = { { 0 } };
    plot p = figure_plot("Size distribution of the cells", "equivalent circular diameter of the cells (nm)", "share of features (%)");
    size_t bins = 0;
    status st = ST_OK;
    for (size_t k = 0; k < q->n_samples && !st; k++) {
        st = add_sizes(q, run, q->samples[k], &sizes[k], e);
        for (size_t i = 0; !st && i < sizes[k].n; i++) {
            lo = fmin(lo, sizes[k].x[i]);
            hi = fmax(hi, sizes[k].x[i]);
        }
    }
    if (!st && !(hi > lo)) st = fail(e, ST_BAD_INPUT, "these samples have no measured sizes");
    if (!st) step = bin_width(&lo, hi, BINS);
    for (; !st && bins < MAX_BINS && lo + (double)bins * step <= hi; bins++) x[bins] = lo + ((double)bins + 0.5) * step;
    for (size_t k = 0; k < q->n_samples && !st; k++) {
        sizes_histogram(&sizes[k], lo, step, bins, share);
        for (size_t i = 0; i < bins; i++) y[k][i] = 100.0 * share[i];
        bars[k] = (plot_series){ .x = x, .y = y[k], .n = sizes[k].n ? bins : 0, .tone = (int)k, .style = PLOT_STEPS, .label = q->samples[k] };
    }
    p.series = bars;
    p.n_series = q->n_samples;
    p.from_zero = 1;
    p.rules = rules;
    if (!st && q->n_samples == 1) p.n_rules = size_rules(runfile_sample(run, q->samples[0]), rules, words);
    if (!st) st = figure_finish(q, &p, NULL, out, e);
    for (size_t k = 0; k < FIGURE_MOST; k++) xy_curve_free(&sizes[k]);
    for (size_t k = 0; k < 3; k++) text_free(&words[k]);
    return st;
}

/* One sweep: angle, mean, lo, hi, polished, coated. */
enum { SWEEP_COLUMNS = 6, MOST_SWEEPS = 3 };
static status read_sweep(const cJSON *sweep, double **v, size_t *n, error *e) {
    static const char *const names[SWEEP_COLUMNS] = { "angle_deg", "weighted_reflectance", "weighted_reflectance_lo",
                                                      "weighted_reflectance_hi", "polished_reflectance", "coated_reflectance" };
    const cJSON *list = cJSON_GetObjectItemCaseSensitive(sweep, "angles"), *row;
    *n = (size_t)cJSON_GetArraySize(list);
    *v = mem_array(*n, SWEEP_COLUMNS * sizeof **v);
    if (!*v) return NO_MEMORY(e, "the angles");
    size_t i = 0;
    cJSON_ArrayForEach(row, list) {
        for (size_t k = 0; k < SWEEP_COLUMNS; k++) (*v)[k * *n + i] = (k ? 100.0 : 1.0) * json_member_number(row, names[k]);
        i++;
    }
    return *n ? ST_OK : fail(e, ST_BAD_INPUT, "there are no angles in it");
}

static void add_references(const double *v, size_t n, plot_series *lines, size_t *n_lines) {
    static const char *const names[2] = { "polished silicon", "with 75 nm nitride" };
    for (size_t k = 0; k < 2; k++)
        if (figure_any(v + (4 + k) * n, n))
            lines[(*n_lines)++] = (plot_series){ .x = v, .y = v + (4 + k) * n, .n = n, .style = k ? PLOT_DOTTED : PLOT_DASHED, .tone = 3,
                                                 .label = names[k] };
}

status figure_angles(const figure_request *q, const cJSON *run, figure_file *out, error *e) {
    cJSON *owned = NULL;
    const cJSON *member = NULL, *one;
    double *v[MOST_SWEEPS] = { NULL };
    plot_series lines[MOST_SWEEPS + 2] = { 0 };
    size_t n_lines = 0, sweeps = 0, n = 0;
    plot p = figure_plot("Weighted reflectance against the angle of incidence", "angle of incidence (\xc2\xb0)",
                         "weighted reflectance (%)");
    status st = figure_member(q, run, "angles", "sward predict --angles 0:80:5 --json ... > angles.json", &owned, &member, e);
    const cJSON *list = cJSON_GetObjectItemCaseSensitive(member, "samples");
    if (!st && !list) { /* a sweep of `sward predict` */
        st = read_sweep(member, &v[0], &n, e);
        if (!st) lines[n_lines++] = (plot_series){ .x = v[0], .y = v[0] + n, .lo = v[0] + 2 * n, .hi = v[0] + 3 * n, .n = n, .label = "predicted" };
        sweeps = 1;
    }
    cJSON_ArrayForEach(one, list) {
        const char *sample = json_member_text(one, "sample");
        if (st || sweeps == MOST_SWEEPS || !figure_wants(q, sample)) continue;
        double **mine = &v[sweeps];
        st = read_sweep(cJSON_GetObjectItemCaseSensitive(one, "sweep"), mine, &n, e);
        if (!st) lines[n_lines++] = (plot_series){ .x = *mine, .y = *mine + n, .lo = *mine + 2 * n, .hi = *mine + 3 * n, .n = n,
                                                   .tone = (int)sweeps, .style = (plot_style)(sweeps % 3), .label = sample };
        sweeps++;
    }
    if (!st && !n_lines) st = fail(e, ST_BAD_INPUT, "the run swept the angle for none of these samples; leave --sample out to see which it has");
    if (!st) add_references(v[0], n, lines, &n_lines);
    p.series = lines;
    p.n_series = n_lines;
    p.log_y = 1;
    if (!st) st = figure_finish(q, &p, NULL, out, e);
    for (size_t k = 0; k < MOST_SWEEPS; k++) free(v[k]);
    cJSON_Delete(owned);
    return st;
}

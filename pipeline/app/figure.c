/* The charts of the report room on the tables of a run. Colours of the page are variables that follow its scheme; a file of
 * its own gets the plain colours behind them, because not every program that prints SVG knows variables. */
#include "app/figure.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/runfile.h"
#include "base/limits.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "io/file.h"
#include "report/curves.h"
#include "report/html.h"
#include "report/plot.h"
#include "report/rows.h"

static const char *const kinds[] = { "spectra", "sizes", "acf", "history", "micrograph" };
enum { N_KINDS = sizeof kinds / sizeof kinds[0], WIDTH = 640, HEIGHT = 400 };

int figure_kind_known(const char *kind) {
    for (size_t i = 0; i < N_KINDS; i++)
        if (!strcmp(kinds[i], kind)) return 1;
    return 0;
}

static plot empty_plot(const char *title, const char *x_label, const char *y_label) {
    return (plot){ .title = title, .x_label = x_label, .y_label = y_label, .y_lo = MISSING, .y_hi = MISSING,
                   .target_lo = MISSING, .target_hi = MISSING, .width = WIDTH, .height = HEIGHT };
}

/* Replaces var(--name,#colour) by the colour. */
static void settle_colours(const char *svg, textbuf *out) {
    for (const char *p = svg; p && *p;) {
        const char *var = strstr(p, "var(--"), *comma = var ? strchr(var, ',') : NULL, *end = comma ? strchr(comma, ')') : NULL;
        if (!end) {
            text_add(out, p);
            return;
        }
        text_add_n(out, p, (size_t)(var - p));
        text_add_n(out, comma + 1, (size_t)(end - comma - 1));
        p = end + 1;
    }
}

static void finish(const plot *p, textbuf *out) {
    textbuf raw = { 0 };
    plot_svg(p, &raw);
    text_add(out, "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n");
    settle_colours(raw.s, out);
    if (raw.failed) out->failed = 1;
    text_free(&raw);
}

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

static status draw_spectra(const figure_request *q, const cJSON *run, textbuf *out, error *e) {
    plot_series lines[FIGURE_MOST] = { 0 };
    double *curve[FIGURE_MOST][4] = { { 0 } };
    static const char *const name[4] = { "wavelength_nm", "reflectance", "reflectance_lo", "reflectance_hi" };
    plot p = empty_plot("Predicted reflectance, 95 % bands", "wavelength (nm)", "reflectance (%)");
    status st = ST_OK;
    const cJSON *s;
    for (size_t k = 0; k < q->n_samples && !st; k++) {
        cJSON_ArrayForEach(s, cJSON_GetObjectItemCaseSensitive(run, "spectra")) {
            size_t n[4] = { 0 };
            if (strcmp(runfile_text(s, "sample"), q->samples[k])) continue;
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
    if (!st) finish(&p, out);
    for (size_t k = 0; k < FIGURE_MOST; k++)
        for (size_t c = 0; c < 4; c++) free(curve[k][c]);
    return st;
}

/* "overlays/sub/name.png" -> "sub/name"; caller frees. NULL without an overlay or without memory. */
static char *stem_of(const cJSON *image) {
    const char *overlay = runfile_text(image, "overlay"), *slash = strchr(overlay, '/');
    char *stem = slash ? mem_text(slash + 1) : NULL, *dot = stem ? strrchr(stem, '.') : NULL;
    if (dot) *dot = '\0';
    return stem;
}

/* The first used micrographs of the wanted samples, in the order of the run. */
typedef struct {
    const cJSON *image[FIGURE_MOST];
    size_t n;
} chosen;

static chosen choose_images(const figure_request *q, const cJSON *run, size_t most) {
    chosen c = { .n = 0 };
    const cJSON *m;
    for (size_t k = 0; k < q->n_samples; k++) {
        size_t of_this = 0;
        cJSON_ArrayForEach(m, cJSON_GetObjectItemCaseSensitive(run, "images")) {
            if (c.n == most || of_this == most / q->n_samples) break;
            if (strcmp(runfile_text(m, "sample"), q->samples[k]) || strcmp(runfile_text(m, "status"), "ok")) continue;
            c.image[c.n++] = m;
            of_this++;
        }
    }
    return c;
}

static status draw_acf(const figure_request *q, const cJSON *run, textbuf *out, error *e) {
    chosen c = choose_images(q, run, FIGURE_MOST);
    xy_curve curve[FIGURE_MOST] = { { 0 } };
    plot_series lines[2 * FIGURE_MOST] = { 0 };
    double ring[FIGURE_MOST][2], height[2] = { -0.3, 1.0 }, far = 0.0;
    plot p = empty_plot("Autocorrelation of the curvature map; dashes: the ring", "distance (nm)", "autocorrelation");
    status st = ST_OK;
    for (size_t k = 0; k < c.n; k++) far = fmax(far, 3.0 * runfile_number(c.image[k], "spacing_acf_nm"));
    for (size_t k = 0; k < c.n && !st; k++) {
        char *stem = stem_of(c.image[k]);
        st = stem ? curve_read(q->dir, stem, "acf_curvature", &curve[k], e)
                  : fail(e, ST_BAD_INPUT, "the run kept no tables of %s", runfile_text(c.image[k], "file"));
        free(stem);
        size_t n = 0;
        while (!st && n < curve[k].n && curve[k].x[n] <= far) n++;
        ring[k][0] = ring[k][1] = runfile_number(c.image[k], "spacing_acf_nm");
        lines[2 * k] = (plot_series){ .x = curve[k].x, .y = curve[k].y, .n = n, .tone = (int)k, .label = runfile_text(c.image[k], "file") };
        lines[2 * k + 1] = (plot_series){ .x = ring[k], .y = height, .n = isfinite(ring[k][0]) ? 2 : 0, .style = PLOT_DASHED, .tone = (int)k };
    }
    if (!st && !c.n) st = fail(e, ST_BAD_INPUT, "none of the micrographs of these samples was used");
    p.series = lines;
    p.n_series = 2 * c.n;
    if (!st) finish(&p, out);
    for (size_t k = 0; k < FIGURE_MOST; k++) xy_curve_free(&curve[k]);
    return st;
}

enum { BINS = 32, MAX_BINS = 80 };

/* Sizes of all used micrographs of one sample, appended to *all. */
static status add_sizes(const figure_request *q, const cJSON *run, const char *sample, xy_curve *all, error *e) {
    const cJSON *m;
    cJSON_ArrayForEach(m, cJSON_GetObjectItemCaseSensitive(run, "images")) {
        if (strcmp(runfile_text(m, "sample"), sample) || strcmp(runfile_text(m, "status"), "ok")) continue;
        xy_curve one = { 0 }, both;
        char *stem = stem_of(m);
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

static status draw_sizes(const figure_request *q, const cJSON *run, textbuf *out, error *e) {
    xy_curve sizes[FIGURE_MOST] = { { 0 } };
    double share[MAX_BINS], x[FIGURE_MOST][2 * MAX_BINS], y[FIGURE_MOST][2 * MAX_BINS], lo = HUGE_VAL, hi = -HUGE_VAL, step = 1.0;
    plot_series lines[FIGURE_MOST] = { 0 };
    plot p = empty_plot("Size distribution of the cells", "cell diameter (nm)", "share of features (%)");
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
    while (!st && bins < MAX_BINS && lo + (double)bins * step <= hi) bins++;
    for (size_t k = 0; k < q->n_samples && !st; k++) {
        sizes_histogram(&sizes[k], lo, step, bins, share);
        for (size_t i = 0; i < bins; i++) {
            x[k][2 * i] = lo + (double)i * step;
            x[k][2 * i + 1] = x[k][2 * i] + step;
            y[k][2 * i] = y[k][2 * i + 1] = 100.0 * share[i];
        }
        lines[k] = (plot_series){ .x = x[k], .y = y[k], .n = sizes[k].n ? 2 * bins : 0, .tone = (int)k,
                                  .style = (plot_style)(k % 3), .label = q->samples[k] };
    }
    p.series = lines;
    p.n_series = q->n_samples;
    p.from_zero = 1;
    if (!st) finish(&p, out);
    for (size_t k = 0; k < FIGURE_MOST; k++) xy_curve_free(&sizes[k]);
    return st;
}

typedef struct {
    const cJSON *row;
    size_t place;
} etch;

static int by_time(const void *a, const void *b) {
    const etch *p = a, *q = b;
    const char *s = runfile_text(p->row, "etched_at"), *t = runfile_text(q->row, "etched_at");
    int order = !*s || !*t ? !*s - !*t : strcmp(s, t);
    return order ? order : (p->place > q->place) - (p->place < q->place);
}

/* Every sample of the run in time order, with U (k = 2) or its 95 % interval. */
static status draw_history(const figure_request *q, const cJSON *run, textbuf *out, error *e) {
    const cJSON *list = cJSON_GetObjectItemCaseSensitive(run, "samples"), *s;
    const column *c = column_find(sample_columns, n_sample_columns, q->quantity);
    size_t n = (size_t)cJSON_GetArraySize(list), k = 0;
    if (!c || c->kind != COL_NUMBER)
        return fail(e, ST_BAD_INPUT, "--quantity: '%s' is no number of samples.csv; try spacing_nm", q->quantity);
    etch *order = mem_array(n, sizeof *order);
    double *v = mem_array(4 * n, sizeof *v);
    const char **names = mem_array(n, sizeof *names);
    textbuf u = { 0 }, lo = { 0 }, hi = { 0 }, label = { 0 };
    text_addf(&u, "%s_u", q->quantity);
    text_addf(&lo, "%s_lo", q->quantity);
    text_addf(&hi, "%s_hi", q->quantity);
    text_addf(&label, "%s (%s)", q->quantity, c->unit);
    status st = order && v && names ? text_check(&label, "a label", e) : NO_MEMORY(e, "the series");
    if (!st) {
        cJSON_ArrayForEach(s, list) {
            order[k] = (etch){ s, k };
            k++;
        }
        qsort(order, n, sizeof *order, by_time);
        for (size_t i = 0; i < n; i++) {
            double value = runfile_number(order[i].row, q->quantity), du = 2.0 * runfile_number(order[i].row, u.s);
            double from = runfile_number(order[i].row, lo.s), to = runfile_number(order[i].row, hi.s);
            names[i] = runfile_text(order[i].row, "sample");
            v[i] = (double)i;
            v[n + i] = value;
            v[2 * n + i] = isfinite(from) ? from : value - du;
            v[3 * n + i] = isfinite(to) ? to : value + du;
        }
        plot_series points = { .x = v, .y = v + n, .lo = v + 2 * n, .hi = v + 3 * n, .n = n, .style = PLOT_POINTS };
        plot p = empty_plot("Samples in time order, bars about 95 %", "samples, in time order of the etch", label.s);
        p.names = names;
        p.n_names = n;
        p.series = &points;
        p.n_series = 1;
        p.width = 960;
        finish(&p, out);
    }
    free(order);
    free(v);
    free(names);
    text_free(&u);
    text_free(&lo);
    text_free(&hi);
    text_free(&label);
    return st;
}

/* The overlay of the first used micrograph, inside the SVG at its own resolution, with what was measured below it. */
static status draw_micrograph(const figure_request *q, const cJSON *run, textbuf *out, error *e) {
    chosen c = choose_images(q, run, q->n_samples);
    char *bytes = NULL, *path = c.n ? path_join(q->dir, runfile_text(c.image[0], "overlay")) : NULL;
    size_t n = 0;
    if (!c.n) return fail(e, ST_BAD_INPUT, "none of the micrographs of this sample was used");
    status st = path ? file_read(path, LIMIT_FILE_BYTES, &bytes, &n, e) : NO_MEMORY(e, "a path");
    const unsigned char *head = (const unsigned char *)bytes;
    if (!st && (n < 24 || memcmp(head, "\x89PNG", 4) != 0)) st = fail(e, ST_BAD_INPUT, "%s is no PNG picture", path);
    if (!st) {
        unsigned nx = (unsigned)head[16] << 24 | (unsigned)head[17] << 16 | (unsigned)head[18] << 8 | head[19];
        unsigned ny = (unsigned)head[20] << 24 | (unsigned)head[21] << 16 | (unsigned)head[22] << 8 | head[23];
        text_addf(out, "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 %u %u\" "
                       "role=\"img\" aria-label=\"", nx, ny);
        html_text(out, runfile_text(c.image[0], "file"));
        text_addf(out, "\">\n<image width=\"%u\" height=\"%u\" href=\"data:image/png;base64,", nx, ny);
        text_base64(out, head, n);
        text_add(out, "\"/>\n</svg>\n");
    }
    free(bytes);
    free(path);
    return st;
}

/* Without a choice all samples, where one chart can carry them. */
static status settle_samples(figure_request *q, const cJSON *run, error *e) {
    const cJSON *list = cJSON_GetObjectItemCaseSensitive(run, "samples"), *s;
    int n = cJSON_GetArraySize(list), most = strcmp(q->kind, "micrograph") ? FIGURE_MOST : 1;
    if (!strcmp(q->kind, "history")) return ST_OK;
    for (size_t k = 0; k < q->n_samples; k++)
        if (!runfile_sample(run, q->samples[k]))
            return fail(e, ST_BAD_INPUT, "--sample: the run in '%s' has no sample '%s'", q->dir, q->samples[k]);
    if (q->n_samples > (size_t)most) return fail(e, ST_BAD_INPUT, "a figure of the kind %s shows at most %d samples", q->kind, most);
    if (q->n_samples) return ST_OK;
    if (n > most)
        return fail(e, ST_BAD_INPUT, "the run has %d samples and this figure shows at most %d: name them with --sample, such as '%s'", n,
                    most, runfile_text(cJSON_GetArrayItem(list, 0), "sample"));
    cJSON_ArrayForEach(s, list) q->samples[q->n_samples++] = runfile_text(s, "sample");
    return q->n_samples ? ST_OK : fail(e, ST_BAD_INPUT, "the run in '%s' has no sample", q->dir);
}

status figure_svg(const figure_request *given, const cJSON *run, textbuf *out, error *e) {
    static status (*const draw[N_KINDS])(const figure_request *, const cJSON *, textbuf *, error *) = {
        draw_spectra, draw_sizes, draw_acf, draw_history, draw_micrograph
    };
    figure_request q = *given;
    status st = settle_samples(&q, run, e);
    for (size_t i = 0; !st && i < N_KINDS; i++)
        if (!strcmp(kinds[i], q.kind)) st = draw[i](&q, run, out, e);
    return st ? st : text_check(out, "a figure", e);
}

/* Figures of places: the process window with the samples in it, wafer maps, a micrograph with scale bar. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/figure_priv.h"
#include "base/limits.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/file.h"
#include "io/json.h"
#include "io/load.h"
#include "io/table.h"
#include "report/html.h"
#include "report/rows.h"

/* ---- process window ---- */

typedef struct {
    sheet_cells cells;
    double *x, *y, *v;               /* of the cells, owned */
    double *edge_x, *least, *sure;   /* contour, one block */
    size_t n_edge;
    double *spacing, *height;        /* samples, one block */
    plot_mark *marks;
    const char **names;
    size_t n_samples;
} window_figure;

static void window_figure_free(window_figure *w) {
    free(w->x);
    free(w->y);
    free(w->v);
    free(w->edge_x);
    free(w->spacing);
    free(w->marks);
    free(w->names);
}

enum { MOST_CELLS = 200 }; /* a side, as `sward window` makes at most */

static int ascends(const double *v, size_t n) {
    for (size_t i = 0; i < n; i++)
        if (!isfinite(v[i]) || (i && !(v[i] > v[i - 1]))) return 0;
    return 1;
}

/* The cells stand row by row; a row ends where x begins anew. */
static status read_cells(const cJSON *member, const char *across, window_figure *w, error *e) {
    const cJSON *list = cJSON_GetObjectItemCaseSensitive(member, "cells"), *c;
    size_t n = (size_t)cJSON_GetArraySize(list), i = 0, nx = 0;
    w->x = mem_array(n, sizeof *w->x);
    w->y = mem_array(n, sizeof *w->y);
    w->v = mem_array(n, sizeof *w->v);
    if (!w->x || !w->y || !w->v) return NO_MEMORY(e, "the process window");
    cJSON_ArrayForEach(c, list) {
        double x = json_member_number(c, across);
        if (!nx && i && !(x > w->x[i - 1])) nx = i;
        if (!nx) w->x[i] = x;
        if (!nx || i % nx == 0) w->y[nx ? i / nx : 0] = json_member_number(c, "height_nm");
        w->v[i++] = 100.0 * json_member_number(c, "weighted_reflectance");
    }
    if (!nx) nx = n;
    if (!n || n % nx || !ascends(w->x, nx) || !ascends(w->y, n / nx) || nx > MOST_CELLS || n / nx > MOST_CELLS)
        return fail(e, ST_BAD_INPUT, "the cells of the process window are no grid of at most %d values a side", MOST_CELLS);
    w->cells = (sheet_cells){ w->x, w->y, w->v, nx, n / nx, "weighted reflectance (%)" };
    return ST_OK;
}

static status read_contour(const cJSON *member, const char *across, window_figure *w, error *e) {
    const cJSON *list = cJSON_GetObjectItemCaseSensitive(member, "contour"), *row;
    size_t n = (size_t)cJSON_GetArraySize(list), i = 0;
    w->edge_x = mem_array(n, 3 * sizeof *w->edge_x);
    if (!w->edge_x) return NO_MEMORY(e, "the contour");
    w->least = w->edge_x + n;
    w->sure = w->edge_x + 2 * n;
    cJSON_ArrayForEach(row, list) {
        w->edge_x[i] = json_member_number(row, across);
        w->least[i] = json_member_number(row, "least_height_nm");
        w->sure[i++] = json_member_number(row, "sure_height_nm");
    }
    w->n_edge = n;
    return ST_OK;
}

static plot_mark mark_of(const char *verdict) {
    return !strcmp(verdict, "conforms") ? MARK_DISC : !strcmp(verdict, "undecided") ? MARK_DIAMOND : !strcmp(verdict, "fails") ? MARK_TRIANGLE : MARK_SQUARE;
}

static status read_samples(const figure_request *q, const cJSON *member, window_figure *w, error *e) {
    const cJSON *list = cJSON_GetObjectItemCaseSensitive(member, "samples"), *row;
    size_t n = (size_t)cJSON_GetArraySize(list);
    w->spacing = mem_array(n, 2 * sizeof *w->spacing);
    w->marks = mem_array(n, sizeof *w->marks);
    w->names = mem_array(n, sizeof *w->names);
    if (!w->spacing || !w->marks || !w->names) return NO_MEMORY(e, "the samples");
    w->height = w->spacing + n;
    cJSON_ArrayForEach(row, list) {
        if (!figure_wants(q, json_member_text(row, "sample"))) continue;
        w->spacing[w->n_samples] = json_member_number(row, "spacing_nm");
        w->height[w->n_samples] = json_member_number(row, "height_nm");
        w->names[w->n_samples] = json_member_text(row, "sample");
        w->marks[w->n_samples++] = mark_of(json_member_text(row, "verdict"));
    }
    return ST_OK;
}

/* The samples of one verdict as a series of their own, so that the legend names it. y [n] holds the heights of these only. */
static size_t split_samples(const window_figure *w, double *y, plot_mark *of, plot_series *lines) {
    static const char *const words[4] = { "conforms", "undecided", "fails", "no verdict" };
    size_t lists = 0;
    for (int mark = 0; mark < 4; mark++) {
        size_t any = 0;
        for (size_t i = 0; i < w->n_samples; i++) {
            int mine = (int)w->marks[i] == mark;
            y[(size_t)mark * w->n_samples + i] = mine ? w->height[i] : MISSING;
            of[(size_t)mark * w->n_samples + i] = (plot_mark)mark;
            any += (size_t)mine;
        }
        if (any)
            lines[lists++] = (plot_series){ .x = w->spacing, .y = y + (size_t)mark * w->n_samples, .n = w->n_samples, .style = PLOT_POINTS,
                                            .marks = of + (size_t)mark * w->n_samples, .label = words[mark],
                                            .point_names = mark == MARK_DISC ? NULL : w->names }; /* the reader asks which those are */
    }
    return lists;
}

static status draw_window(const figure_request *q, const window_figure *w, const char *across, double target, figure_file *out, error *e) {
    static const char *const axes[3][2] = { { "spacing_nm", "spacing (nm)" }, { "exponent", "exponent of the shape" },
                                            { "thickness_nm", "thickness of the outermost coating (nm)" } };
    char number[NUMBER_TEXT];
    const char *x_label = across;
    textbuf least = { 0 }, sure = { 0 };
    double *y = mem_array(w->n_samples, 4 * sizeof *y);
    plot_mark *of = mem_array(w->n_samples, 4 * sizeof *of);
    plot_series lines[6];
    size_t n = 0;
    for (size_t k = 0; k < 3; k++)
        if (!strcmp(axes[k][0], across)) x_label = axes[k][1];
    text_addf(&least, "reaches %s %%", number_text(100.0 * target, 4, number));
    text_add(&sure, "the same with 95 % confidence");
    status st = y && of ? text_check(&least, "a label", e) : NO_MEMORY(e, "the process window");
    if (!st) st = text_check(&sure, "a label", e);
    if (!st) {
        lines[n++] = (plot_series){ .x = w->edge_x, .y = w->least, .n = w->n_edge, .tone = 1, .label = least.s };
        lines[n++] = (plot_series){ .x = w->edge_x, .y = w->sure, .n = w->n_edge, .tone = 1, .style = PLOT_DASHED, .label = sure.s };
        n += split_samples(w, y, of, lines + n);
        plot p = figure_plot("Process window", x_label, "height (nm)");
        p.series = lines;
        p.n_series = n;
        st = figure_finish(q, &p, &w->cells, out, e);
    }
    free(y);
    free(of);
    text_free(&least);
    text_free(&sure);
    return st;
}

status figure_window(const figure_request *q, const cJSON *run, figure_file *out, error *e) {
    cJSON *owned = NULL;
    const cJSON *member = NULL;
    window_figure w = { .n_edge = 0 };
    status st = figure_member(q, run, "window", "sward window --results DIR --json > window.json", &owned, &member, e);
    const char *across = *json_member_text(member, "across") ? json_member_text(member, "across") : "spacing_nm";
    if (!st) st = read_cells(member, across, &w, e);
    if (!st) st = read_contour(member, across, &w, e);
    if (!st) st = read_samples(q, strcmp(across, "spacing_nm") ? NULL : member, &w, e);
    if (!st) st = draw_window(q, &w, across, json_member_number(member, "target"), out, e);
    window_figure_free(&w);
    cJSON_Delete(owned);
    return st;
}

/* ---- wafers ---- */

enum { MOST_WAFERS = 24, LABEL = 32 };

typedef struct {
    sheet_wafer wafers[MOST_WAFERS];
    size_t n;
    double *numbers;       /* [3][room] x, y, value */
    char (*labels)[LABEL]; /* [room] */
    const char **label;    /* [room] */
    char names[MOST_WAFERS][96];
} wafer_figure;

static const cJSON *place_of(const cJSON *places, const char *sample) {
    const cJSON *p;
    cJSON_ArrayForEach(p, places)
        if (!strcmp(json_member_text(p, "sample"), sample)) return p;
    return NULL;
}

static int same_wafer(const cJSON *a, const cJSON *b) {
    return !strcmp(json_member_text(a, "lot"), json_member_text(b, "lot")) && !strcmp(json_member_text(a, "wafer"), json_member_text(b, "wafer"));
}

/* Appends the wafer of `first`, when that is its first placed sample; returns how many positions it has. */
static size_t add_wafer(const figure_request *q, const cJSON *run, const cJSON *first, double factor, int digits, size_t at, size_t room,
                        wafer_figure *w) {
    const cJSON *places = cJSON_GetObjectItemCaseSensitive(run, "places"), *s;
    double *x = w->numbers + at, *y = w->numbers + room + at, *v = w->numbers + 2 * room + at;
    size_t n = 0;
    int wanted = 0;
    cJSON_ArrayForEach(s, cJSON_GetObjectItemCaseSensitive(run, "samples")) {
        const cJSON *p = place_of(places, json_member_text(s, "sample"));
        char number[NUMBER_TEXT];
        double value = json_member_number(s, q->quantity);
        if (!p || !same_wafer(s, first) || !isfinite(value)) continue;
        if (!n && s != first) return 0;
        wanted |= figure_wants(q, json_member_text(s, "sample"));
        x[n] = json_member_number(p, "x_mm");
        y[n] = json_member_number(p, "y_mm");
        v[n] = factor * value;
        snprintf(w->labels[at + n], LABEL, "%s", factor > 1.0 ? number_percent(value, digits, number) : number_text(value, digits, number));
        w->label[at + n] = w->labels[at + n];
        n++;
    }
    if (!n || !wanted) return 0;
    snprintf(w->names[w->n], sizeof w->names[w->n], "%s%s%s", json_member_text(first, "lot"), *json_member_text(first, "lot") ? " " : "",
             json_member_text(first, "wafer"));
    w->wafers[w->n] = (sheet_wafer){ w->names[w->n], x, y, v, w->label + at, n };
    w->n++;
    return n;
}

status figure_wafers(const figure_request *q, const cJSON *run, figure_file *out, error *e) {
    const column *c = column_find(sample_columns, n_sample_columns, q->quantity);
    const cJSON *list = cJSON_GetObjectItemCaseSensitive(run, "samples"), *s;
    size_t room = (size_t)cJSON_GetArraySize(list), at = 0;
    textbuf label = { 0 };
    if (!c || c->kind != COL_NUMBER)
        return fail(e, ST_BAD_INPUT, "--quantity: '%s' is no number of samples.csv; try spacing_nm", q->quantity);
    wafer_figure *w = mem_array(1, sizeof *w);
    if (!w) return NO_MEMORY(e, "the wafer maps");
    w->numbers = mem_array(room, 3 * sizeof *w->numbers);
    w->labels = mem_array(room, sizeof *w->labels);
    w->label = mem_array(room, sizeof *w->label);
    double factor = figure_label(q->quantity, c->unit, &label);
    status st = w->numbers && w->labels && w->label ? text_check(&label, "a label", e) : NO_MEMORY(e, "the wafer maps");
    if (!st) cJSON_ArrayForEach(s, list) {
        if (w->n < MOST_WAFERS) at += add_wafer(q, run, s, factor, c->digits, at, room, w);
    }
    if (!st && !w->n)
        st = fail(e, ST_BAD_INPUT, "no sample of this run has a place on its wafer: give x_mm and y_mm in the sample sheet, or \"positions\" in the protocol");
    if (!st) {
        sheet_wafers map = { w->wafers, w->n, label.s, "Wafer map", "Wafer map: values at their positions, one map a wafer" };
        st = sheet_draw_wafers(&map, &q->sheet, &out->bytes, &out->n, e);
    }
    free(w->numbers);
    free(w->labels);
    free(w->label);
    free(w);
    text_free(&label);
    return st;
}

/* ---- micrograph ---- */

/* The folder of the micrographs: the user's, else the one in run.json. Caller frees; NULL without memory or word. */
static char *find_folder(const figure_request *q) {
    char *path = path_join(q->dir, "run.json"), *bytes = NULL, *folder = NULL;
    size_t n = 0;
    if (q->folder) folder = mem_text(q->folder);
    else if (path && file_read(path, LIMIT_TEXT_FILE_BYTES, &bytes, &n, NULL) == ST_OK) {
        cJSON *o = cJSON_ParseWithLength(bytes, n);
        folder = mem_text(json_member_text(o, "folder"));
        cJSON_Delete(o);
    }
    free(path);
    free(bytes);
    return folder;
}

static status load_image(const figure_request *q, const cJSON *image, micrograph *m, error *e) {
    char *folder = find_folder(q), *path = folder ? path_join(folder, json_member_text(image, "file")) : NULL;
    load_options o = load_defaults();
    error why = { 0 };
    status st = path ? ST_OK : NO_MEMORY(e, "a path");
    if (!st && load_file(path, &o, m, &why))
        st = fail(e, ST_BAD_INPUT, "%s cannot be read (%.200s); name the folder of the micrographs with --folder", path, why.text);
    else if (!st && strcmp(m->hash, json_member_text(image, "sha256")) != 0)
        st = fail(e, ST_BAD_INPUT, "%s is no longer the file that was measured; name the folder of the micrographs with --folder", path);
    free(folder);
    free(path);
    return st;
}

typedef struct {
    double *x, *y;
    int *counted;
    size_t n;
} centres;

static status read_centres(const figure_request *q, const cJSON *image, centres *c, error *e) {
    static const char *const names[3] = { "x_px", "y_px", "in_guard" };
    csv table = { 0 };
    long at[3] = { 0 };
    char *stem = figure_stem(image), *file = NULL;
    textbuf t = { 0 };
    text_addf(&t, "features/%s.csv", stem ? stem : "");
    status st = stem && (file = path_join(q->dir, t.s ? t.s : "")) ? text_check(&t, "a path", e) : NO_MEMORY(e, "a path");
    if (!st) st = csv_read(file, &table, e);
    for (size_t k = 0; k < 3 && !st; k++)
        if ((at[k] = csv_column(&table, names[k])) < 0) st = fail(e, ST_BAD_INPUT, "%s has no column %s", file, names[k]);
    if (!st) {
        c->x = mem_array(table.n_rows, sizeof *c->x);
        c->y = mem_array(table.n_rows, sizeof *c->y);
        c->counted = mem_array(table.n_rows, sizeof *c->counted);
        if (!c->x || !c->y || !c->counted) st = NO_MEMORY(e, "the features");
    }
    for (size_t i = 0; !st && i < table.n_rows; i++) {
        if (!number_parse(csv_cell(&table, i, at[0]), &c->x[c->n]) || !number_parse(csv_cell(&table, i, at[1]), &c->y[c->n])) continue;
        c->counted[c->n++] = !strcmp(csv_cell(&table, i, at[2]), "1");
    }
    csv_free(&table);
    free(stem);
    free(file);
    text_free(&t);
    return st;
}

static void place_ring(const centres *c, const cJSON *image, sheet_picture *p) {
    double best = HUGE_VAL, spacing = json_member_number(image, "spacing_acf_nm");
    for (size_t i = 0; i < c->n; i++) {
        double far = hypot(c->x[i] - 0.5 * (double)p->m->nx, c->y[i] - 0.5 * (double)p->m->ny);
        if (!c->counted[i] || !(far < best)) continue;
        best = far;
        p->ring_x = c->x[i];
        p->ring_y = c->y[i];
    }
    if (isfinite(best) && p->px_nm > 0.0) p->ring_px = spacing / p->px_nm;
}

status figure_micrograph(const figure_request *q, const cJSON *run, figure_file *out, error *e) {
    figure_images c = figure_choose(q, run, q->n_samples);
    micrograph m = { 0 };
    centres found = { NULL, NULL, NULL, 0 };
    textbuf ring = { 0 }, words = { 0 };
    char number[NUMBER_TEXT];
    if (!c.n) return fail(e, ST_BAD_INPUT, "none of the micrographs of this sample was used");
    status st = load_image(q, c.image[0], &m, e);
    if (!st && q->signs) st = read_centres(q, c.image[0], &found, e);
    sheet_picture p = { .m = &m, .px_nm = json_member_number(c.image[0], "px_nm"), .x = found.x, .y = found.y, .counted = found.counted,
                        .n = found.n, .ring_px = MISSING, .title = json_member_text(c.image[0], "file") };
    if (!st && q->signs) {
        place_ring(&found, c.image[0], &p);
        text_addf(&ring, "spacing %s nm", number_text(json_member_number(c.image[0], "spacing_acf_nm"), 5, number));
        st = text_check(&ring, "a label", e);
        p.ring_label = ring.s;
    }
    text_addf(&words, "Micrograph %s of the sample %s. %s", p.title, json_member_text(c.image[0], "sample"), ring.s ? ring.s : "");
    p.description = words.s;
    if (!st) st = text_check(&words, "a figure", e);
    if (!st) st = sheet_draw_picture(&p, &q->sheet, &out->bytes, &out->n, e);
    free(found.x);
    free(found.y);
    free(found.counted);
    text_free(&ring);
    text_free(&words);
    micrograph_free(&m);
    return st;
}

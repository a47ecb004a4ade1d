/* Tables in, curves out. Nothing is smoothed or thinned. */
#include "report/curves.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/text.h"
#include "io/file.h"
#include "io/table.h"

void xy_curve_free(xy_curve *c) {
    free(c->x);
    free(c->y);
    *c = (xy_curve){ 0 };
}

static status read_table(const char *dir, const char *kind, const char *stem, csv *table, error *e) {
    textbuf t = { 0 };
    text_addf(&t, "%s/%s.csv", kind, stem);
    status st = text_check(&t, "a path", e);
    char *path = st ? NULL : path_join(dir, t.s);
    if (!st && !path) st = NO_MEMORY(e, "a path");
    if (!st) st = csv_read(path, table, e);
    free(path);
    text_free(&t);
    return st;
}

/* Column numbers of what is wanted, or a sentence that names what is missing. */
static status find_columns(const csv *table, const char *const *names, size_t n, const char *stem, long *at, error *e) {
    for (size_t k = 0; k < n; k++) {
        at[k] = csv_column(table, names[k]);
        if (at[k] < 0)
            return fail(e, ST_BAD_INPUT, "the table of %s has no column %s; was it written by this program?", stem, names[k]);
    }
    return ST_OK;
}

static status make_room(xy_curve *c, size_t n, error *e) {
    c->x = mem_array(n, sizeof *c->x);
    c->y = mem_array(n, sizeof *c->y);
    return c->x && c->y ? ST_OK : NO_MEMORY(e, "a curve");
}

/* The end of every reader: the table goes, the curve is the caller's or goes too. */
static status hand_over(status st, csv *table, xy_curve *c, xy_curve *out) {
    csv_free(table);
    if (st)
        xy_curve_free(c);
    else
        *out = *c;
    return st;
}

status curve_read(const char *dir, const char *stem, const char *name, xy_curve *out, error *e) {
    static const char *const wanted[] = { "curve", "x", "x_unit", "value" };
    csv table = { 0 };
    xy_curve c = { 0 };
    long at[4] = { 0 };
    status st = read_table(dir, "profiles", stem, &table, e);
    if (!st) st = find_columns(&table, wanted, 4, stem, at, e);
    if (!st) st = make_room(&c, table.n_rows, e);
    for (size_t i = 0; !st && i < table.n_rows; i++) {
        const char *unit = csv_cell(&table, i, at[2]);
        if (strcmp(csv_cell(&table, i, at[0]), name) || (strcmp(unit, "nm") && strcmp(unit, "1/um"))) continue;
        if (number_parse(csv_cell(&table, i, at[1]), &c.x[c.n]) && number_parse(csv_cell(&table, i, at[3]), &c.y[c.n])) c.n++;
    }
    return hand_over(st, &table, &c, out);
}

status sizes_read(const char *dir, const char *stem, xy_curve *out, error *e) {
    static const char *const wanted[] = { "cell_ecd_nm", "border_weight" };
    csv table = { 0 };
    xy_curve c = { 0 };
    long at[2] = { 0 };
    status st = read_table(dir, "features", stem, &table, e);
    if (!st) st = find_columns(&table, wanted, 2, stem, at, e);
    if (!st) st = make_room(&c, table.n_rows, e);
    for (size_t i = 0; !st && i < table.n_rows; i++)
        if (number_parse(csv_cell(&table, i, at[0]), &c.x[c.n]) && number_parse(csv_cell(&table, i, at[1]), &c.y[c.n]) &&
            c.y[c.n] > 0.0)
            c.n++;
    return hand_over(st, &table, &c, out);
}

status centres_read(const char *dir, const char *stem, int counted, xy_curve *out, error *e) {
    static const char *const wanted[] = { "x_px", "y_px", "in_guard" };
    csv table = { 0 };
    xy_curve c = { 0 };
    long at[3] = { 0 };
    status st = read_table(dir, "features", stem, &table, e);
    if (!st) st = find_columns(&table, wanted, 3, stem, at, e);
    if (!st) st = make_room(&c, table.n_rows, e);
    for (size_t i = 0; !st && i < table.n_rows; i++)
        if (!strcmp(csv_cell(&table, i, at[2]), counted ? "1" : "0") && number_parse(csv_cell(&table, i, at[0]), &c.x[c.n]) &&
            number_parse(csv_cell(&table, i, at[1]), &c.y[c.n]))
            c.n++;
    return hand_over(st, &table, &c, out);
}

void sizes_histogram(const xy_curve *sizes, double lo, double step, size_t n, double *share) {
    double all = 0.0;
    for (size_t k = 0; k < n; k++) share[k] = 0.0;
    for (size_t i = 0; i < sizes->n; i++) {
        double place = floor((sizes->x[i] - lo) / step);
        all += sizes->y[i];
        if (place >= 0.0 && place < (double)n) share[(size_t)place] += sizes->y[i];
    }
    for (size_t k = 0; all > 0.0 && k < n; k++) share[k] /= all;
}

double bin_width(double *lo, double hi, size_t most) {
    double raw = (hi - *lo) / (double)(most - 1), decade = pow(10.0, floor(log10(raw))), lead = raw / decade;
    double step = decade * (lead <= 1.0 ? 1.0 : lead <= 2.0 ? 2.0 : lead <= 5.0 ? 5.0 : 10.0);
    *lo = step * floor(*lo / step);
    return step;
}

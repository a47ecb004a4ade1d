/* The tables of a run as CSV and JSON. Every number passes through its column (io/column), so the outputs agree to
 * the digit. results.json is the CSV plus what does not fit a table: budgets, figures in px, sentences.
 * The description of the tables for other programs is in package.c, the page for people in page.c. */
#include "report/results.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/flags.h"
#include "base/mem.h"
#include "base/number.h"
#include "io/file.h"
#include "io/json.h"
#include "report/package.h"
#include "report/schema.h"

static const char *sample_extra_cell(const void *row, size_t k) {
    const sample_row *s = row;
    return k < s->n_extra ? s->extra[k] : NULL;
}

static table_view image_table(const results *r) {
    return (table_view){ .columns = image_columns,
                         .n_columns = n_image_columns,
                         .rows = r->images,
                         .n_rows = r->n_images,
                         .row_size = sizeof *r->images };
}

static table_view sample_table(const results *r) {
    return (table_view){ .columns = sample_columns,
                         .n_columns = n_sample_columns,
                         .rows = r->samples,
                         .n_rows = r->n_samples,
                         .row_size = sizeof *r->samples,
                         .extra_names = r->sample_extra,
                         .n_extra = r->n_sample_extra,
                         .extra_cell = sample_extra_cell };
}

void images_csv(const results *r, textbuf *out) {
    table_view t = image_table(r);
    table_to_csv(&t, out);
}

void samples_csv(const results *r, textbuf *out) {
    table_view t = sample_table(r);
    table_to_csv(&t, out);
}

void spectra_csv(const results *r, textbuf *out) {
    table_view t = { .columns = spectrum_columns,
                     .n_columns = n_spectrum_columns,
                     .rows = r->spectra,
                     .n_rows = r->n_spectra,
                     .row_size = sizeof *r->spectra };
    table_to_csv(&t, out);
}

void features_csv(const feature_row *rows, size_t n, textbuf *out) {
    table_view t = { .columns = feature_columns,
                     .n_columns = n_feature_columns,
                     .rows = rows,
                     .n_rows = n,
                     .row_size = sizeof *rows };
    table_to_csv(&t, out);
}

void profiles_csv(const profile_row *rows, size_t n, textbuf *out) {
    table_view t = { .columns = profile_columns,
                     .n_columns = n_profile_columns,
                     .rows = rows,
                     .n_rows = n,
                     .row_size = sizeof *rows };
    table_to_csv(&t, out);
}

/* The rows of a table as a JSON array, each with its further members spliced in before the closing brace. */
static void rows_json(const table_view *t, const char *const *more, textbuf *out) {
    text_add(out, "[");
    for (size_t i = 0; i < t->n_rows; i++) {
        textbuf row = { 0 };
        table_row_to_json(t, i, &row);
        if (row.failed || !row.n) out->failed = 1;
        text_add(out, i ? ",\n    " : "\n    ");
        if (row.n && more && more[i] && more[i][0]) {
            text_add_n(out, row.s, row.n - 1);
            text_addf(out, ", %s}", more[i]);
        } else if (row.n) {
            text_add_n(out, row.s, row.n);
        }
        text_free(&row);
    }
    text_add(out, t->n_rows ? "\n  ]" : "]");
}

/* The number of one spectrum row in the column `name`, as the CSV prints it. */
static void spectrum_number(const spectrum_row *row, const char *name, textbuf *out) {
    for (size_t i = 0; i < n_spectrum_columns; i++) {
        char buffer[NUMBER_TEXT];
        if (strcmp(spectrum_columns[i].name, name)) continue;
        const char *cell = column_cell(&spectrum_columns[i], row, buffer);
        text_add(out, *cell ? cell : "null");
    }
}

static int same_text(const char *a, const char *b) { return !strcmp(a ? a : "", b ? b : ""); }

static int same_spectrum(const spectrum_row *a, const spectrum_row *b) {
    return same_text(a->sample, b->sample) && same_text(a->polarization, b->polarization) &&
           !(a->angle_deg < b->angle_deg) && !(a->angle_deg > b->angle_deg);
}

/* One column of the rows [from, to) as "name": [numbers]. */
static void spectrum_member(const results *r, size_t from, size_t to, const char *name, textbuf *out) {
    text_addf(out, ", \"%s\": [", name);
    for (size_t i = from; i < to; i++) {
        if (i > from) text_add(out, ", ");
        spectrum_number(&r->spectra[i], name, out);
    }
    text_add(out, "]");
}

static void spectra_json(const results *r, textbuf *out) {
    text_add(out, "[");
    for (size_t from = 0, to; from < r->n_spectra; from = to) {
        const spectrum_row *s = &r->spectra[from];
        for (to = from + 1; to < r->n_spectra && same_spectrum(s, &r->spectra[to]);) to++;
        text_addf(out, "%s\n    {\"sample\": ", from ? "," : "");
        json_string(out, s->sample);
        text_add(out, ", \"angle_deg\": ");
        spectrum_number(s, "angle_deg", out);
        text_add(out, ", \"polarization\": ");
        json_string(out, s->polarization);
        spectrum_member(r, from, to, "wavelength_nm", out);
        spectrum_member(r, from, to, "reflectance", out);
        spectrum_member(r, from, to, "reflectance_lo", out);
        spectrum_member(r, from, to, "reflectance_hi", out);
        text_add(out, "}");
    }
    text_add(out, r->n_spectra ? "\n  ]" : "]");
}

/* Samples whose place on the wafer is known. */
static void places_json(const results *r, textbuf *out) {
    int any = 0;
    text_add(out, "[");
    for (size_t k = 0; k < r->n_samples && r->sample_x_mm && r->sample_y_mm; k++) {
        if (!isfinite(r->sample_x_mm[k]) || !isfinite(r->sample_y_mm[k])) continue;
        text_add(out, any ? ",\n    {\"sample\": " : "\n    {\"sample\": ");
        json_string(out, r->samples[k].sample);
        text_add(out, ", \"x_mm\": ");
        json_number(out, r->sample_x_mm[k], 9);
        text_add(out, ", \"y_mm\": ");
        json_number(out, r->sample_y_mm[k], 9);
        text_add(out, "}");
        any = 1;
    }
    text_add(out, any ? "\n  ]" : "]");
}

static void flags_json(textbuf *out) {
    text_add(out, "[");
    for (int bit = 0; bit < FLAG_COUNT; bit++) {
        text_addf(out, "%s\n    {\"flag\": ", bit ? "," : "");
        json_string(out, flag_word(bit));
        text_add(out, ", \"meaning\": ");
        json_string(out, flag_meaning(bit));
        text_add(out, "}");
    }
    text_add(out, "\n  ]");
}

void results_json(const results *r, textbuf *out) {
    table_view images = image_table(r), samples = sample_table(r);
    text_addf(out, "{\n  \"manifest\": %s,\n  \"summary\": ", r->manifest_json ? r->manifest_json : "{}");
    json_string(out, r->summary ? r->summary : "");
    text_addf(out, ",\n  \"wafers\": %s", r->wafers_json ? r->wafers_json : "[]");
    text_addf(out, ",\n  \"series\": %s", r->series_json ? r->series_json : "[]");
    text_addf(out, ",\n  \"window\": %s,\n  \"angles\": %s", r->window_json ? r->window_json : "null", r->angles_json ? r->angles_json : "null");
    text_add(out, ",\n  \"images\": ");
    rows_json(&images, r->image_json, out);
    text_add(out, ",\n  \"samples\": ");
    rows_json(&samples, r->sample_json, out);
    text_add(out, ",\n  \"places\": ");
    places_json(r, out);
    text_add(out, ",\n  \"spectra\": ");
    spectra_json(r, out);
    text_add(out, ",\n  \"flags\": ");
    flags_json(out);
    text_add(out, "\n}\n");
}

static status save(const char *dir, const char *name, const textbuf *t, error *e) {
    status st = text_check(t, name, e);
    if (st) return st;
    char *path = path_join(dir, name);
    if (!path) return NO_MEMORY(e, name);
    st = file_write(path, t->s ? t->s : "", t->n, e);
    free(path);
    return st;
}

status results_write(const results *r, const char *out_dir, error *e) {
    enum { FILES = 6 };
    textbuf body[FILES] = { 0 };
    static const char *const name[FILES] = { "images.csv", "samples.csv", "spectra.csv", "results.json", "results.schema.json", "datapackage.json" };
    images_csv(r, &body[0]);
    samples_csv(r, &body[1]);
    spectra_csv(r, &body[2]);
    results_json(r, &body[3]);
    schema_json(r, &body[4]);
    package_json(r, out_dir, &body[5]);
    status st = ST_OK;
    for (size_t i = 0; i < FILES && !st; i++) st = save(out_dir, name[i], &body[i], e);
    for (size_t i = 0; i < FILES; i++) text_free(&body[i]);
    return st;
}

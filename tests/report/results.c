/* One digit string per figure in every output; formula guard only in CSV cells; empty is empty or null; JSON parses. */
#include "report/results.h"

#include <cjson/cJSON.h>
#include <stdlib.h>
#include <unistd.h>

#include "base/flags.h"
#include "base/mem.h"
#include "check.h"
#include "demo_rows.h"
#include "io/file.h"

static const cJSON *row_of(const cJSON *root, const char *table, int i) {
    return cJSON_GetArrayItem(cJSON_GetObjectItemCaseSensitive(root, table), i);
}
static const cJSON *cell_of(const cJSON *row, const char *name) {
    return cJSON_GetObjectItemCaseSensitive(row, name);
}
static int is_text(const cJSON *v, const char *want) {
    return cJSON_IsString(v) && !strcmp(v->valuestring, want);
}

static void check_csv(const demo *d) {
    textbuf t = { 0 };
    char cell[80];
    images_csv(&d->r, &t);
    CHECK(!t.failed && t.s && !strncmp(t.s, "file,sample,status,reason,flags,px_nm,", 38));
    CHECK(strstr(t.s, "'=a/<img src=x onerror="));                  /* a spreadsheet must not run it */
    CHECK(strstr(t.s, "\xef\xbf\xbd.tif") && !strstr(t.s, "\xff")); /* the byte that is no UTF-8 */
    CHECK(strstr(t.s, "\nb.png,etch 1,excluded,few_pixels blurred,,,,,,"));
    CHECK(strstr(t.s, "\nc.tif,@etch <2>,unreadable,the file ends after 12 bytes,,,") ||
          strstr(t.s, "\nc.tif,'@etch <2>,unreadable,the file ends after 12 bytes,,,"));
    text_free(&t);
    samples_csv(&d->r, &t);
    CHECK(!t.failed && t.s);
    size_t spacing = demo_column(sample_columns, n_sample_columns, "spacing_nm");
    demo_csv_cell(t.s, 1, spacing, cell, sizeof cell);
    CHECK(!strcmp(cell, "351.23"));
    demo_csv_cell(t.s, 1, spacing + 1, cell, sizeof cell);
    CHECK(!strcmp(cell, "8.12"));
    demo_csv_cell(t.s, 2, spacing, cell, sizeof cell);
    CHECK(!cell[0]);
    CHECK(strstr(t.s, ",flags,verdict_spacing_nm,operator\n"));
    text_free(&t);
}

static void check_json(const demo *d) {
    textbuf t = { 0 };
    results_json(&d->r, &t);
    CHECK(!t.failed);
    cJSON *root = cJSON_ParseWithOpts(t.s, NULL, 1);
    CHECK(root != NULL);
    CHECK(strstr(t.s, "\"spacing_nm\": 351.23, ") || strstr(t.s, "\"spacing_nm\":351.23,"));
    const cJSON *good = row_of(root, "images", 0), *bad = row_of(root, "images", 1),
                *dead = row_of(root, "images", 2);
    CHECK(is_text(cell_of(good, "file"),
                  "=a/<img src=x onerror=\"alert(1)\">&'\xef\xbf\xbd.tif")); /* no apostrophe */
    CHECK(cJSON_GetArraySize(good) == (int)n_image_columns + 1);
    CHECK_NEAR(cell_of(cell_of(good, "pixels"), "spacing_px")->valuedouble, 85.6, 1e-12);
    CHECK(cJSON_IsNull(cell_of(bad, "spacing_acf_nm")) && cJSON_IsNull(cell_of(bad, "n_features")));
    CHECK(is_text(cell_of(bad, "reason"), "few_pixels blurred"));
    CHECK(is_text(cell_of(dead, "status"), "unreadable"));
    CHECK(is_text(cell_of(dead, "reason"), "the file ends after 12 bytes"));
    const cJSON *sample = row_of(root, "samples", 0);
    CHECK(cJSON_GetArraySize(sample) == (int)n_sample_columns + 2);
    CHECK(is_text(cell_of(sample, "verdict_spacing_nm"), "conforms"));
    CHECK(cJSON_IsNull(cell_of(row_of(root, "samples", 1), "operator")));
    const cJSON *spectrum = row_of(root, "spectra", 0);
    CHECK(cJSON_GetArraySize(cJSON_GetObjectItem(root, "spectra")) == 1);
    CHECK(is_text(cell_of(spectrum, "polarization"), "mean"));
    CHECK(cJSON_GetArraySize(cell_of(spectrum, "wavelength_nm")) == DEMO_WAVELENGTHS);
    CHECK_NEAR(cJSON_GetArrayItem(cell_of(spectrum, "reflectance"), 0)->valuedouble, 0.0123456, 1e-12);
    CHECK(cJSON_IsNull(cJSON_GetArrayItem(cell_of(spectrum, "reflectance_lo"), 2)));
    CHECK(cJSON_GetArraySize(cJSON_GetObjectItem(root, "flags")) == FLAG_COUNT);
    CHECK(is_text(cell_of(cell_of(root, "manifest"), "program"), "sward"));
    cJSON_Delete(root);
    text_free(&t);
}

/* Two samples, two angles: one group each, in order. */
static void check_groups(void) {
    static char a[] = "a", b[] = "b", mean[] = "mean", s[] = "s";
    spectrum_row rows[] = { { a, 400, 0, mean, 0.1, 0.1, 0.1 },
                            { a, 500, 0, mean, 0.2, 0.2, 0.2 },
                            { a, 400, 8, mean, 0.3, 0.3, 0.3 },
                            { a, 400, 8, s, 0.4, 0.4, 0.4 },
                            { b, 400, 8, s, 0.5, 0.5, 0.5 } };
    results r = { .spectra = rows, .n_spectra = 5 };
    textbuf t = { 0 };
    results_json(&r, &t);
    cJSON *root = cJSON_Parse(t.s);
    CHECK(cJSON_GetArraySize(cJSON_GetObjectItem(root, "spectra")) == 4);
    CHECK(cJSON_GetArraySize(cell_of(row_of(root, "spectra", 0), "reflectance")) == 2);
    CHECK(is_text(cell_of(row_of(root, "spectra", 3), "sample"), "b"));
    CHECK(cJSON_GetArraySize(cJSON_GetObjectItem(root, "images")) == 0);
    cJSON_Delete(root);
    text_free(&t);
}

static const cJSON *resource_named(const cJSON *package, const char *name) {
    const cJSON *r;
    cJSON_ArrayForEach(r, cJSON_GetObjectItem(package, "resources")) {
        if (is_text(cell_of(r, "name"), name)) return r;
    }
    return NULL;
}

static char *read_out(const char *dir, const char *name) {
    char *path = path_join(dir, name), *bytes = NULL;
    size_t n = 0;
    error e = { 0 };
    CHECK(path && file_read(path, (size_t)1 << 24, &bytes, &n, &e) == ST_OK);
    free(path);
    return bytes;
}

static void check_files(demo *d) {
    char dir[] = "sward-results-XXXXXX";
    error e = { 0 };
    CHECK(mkdtemp(dir) != NULL);
    char *features = path_join(dir, "features");
    CHECK(folder_make(features, &e) == ST_OK);
    char *one = path_join(features, "a.csv");
    textbuf body = { 0 };
    feature_row f = { .feature = 1,
                      .x_px = 1.5,
                      .y_px = 2.25,
                      .x_nm = MISSING,
                      .y_nm = MISSING,
                      .cell_ecd_nm = 101.26,
                      .n_neighbours = 6,
                      .in_guard = 1 };
    features_csv(&f, 1, &body);
    CHECK(!strncmp(body.s, "feature,x_px,y_px,x_nm,y_nm,cell_ecd_nm,", 40));
    CHECK(strstr(body.s, "\n1,1.5,2.25,,,101.26,"));
    CHECK(file_write(one, body.s, body.n, &e) == ST_OK);
    text_free(&body);
    static char acf[] = "acf", nm[] = "nm", unit[] = "1";
    profile_row p = { acf, 4.1, nm, 0.98765432, unit };
    profiles_csv(&p, 1, &body);
    CHECK(!strcmp(body.s, "curve,x,x_unit,value,value_unit\nacf,4.1,nm,0.987654,1\n"));
    text_free(&body);

    const char *stems[DEMO_IMAGES] = { "a", NULL, NULL };
    d->r.image_stems = stems;
    CHECK(results_write(&d->r, dir, &e) == ST_OK);
    d->r.image_stems = NULL;
    char *text = read_out(dir, "datapackage.json");
    cJSON *package = cJSON_Parse(text);
    CHECK(package != NULL);
    CHECK(cJSON_GetArraySize(cJSON_GetObjectItem(package, "resources")) ==
          4); /* three tables, one features file */
    const cJSON *fields = cell_of(cell_of(resource_named(package, "samples"), "schema"), "fields");
    CHECK(cJSON_GetArraySize(fields) == (int)n_sample_columns + 2);
    const cJSON *spacing =
        cJSON_GetArrayItem(fields, (int)demo_column(sample_columns, n_sample_columns, "spacing_nm"));
    CHECK(is_text(cell_of(spacing, "name"), "spacing_nm") && is_text(cell_of(spacing, "type"), "number") &&
          is_text(cell_of(spacing, "unit"), "nm"));
    CHECK(is_text(cell_of(resource_named(package, "features-1"), "path"), "features/a.csv"));
    cJSON_Delete(package);
    free(text);
    static const char *const names[] = { "images.csv", "samples.csv", "spectra.csv", "results.json",
                                         "results.schema.json", "datapackage.json" };
    for (size_t i = 0; i < 6; i++) {
        char *path = path_join(dir, names[i]);
        CHECK(path && file_exists(path) && remove(path) == 0);
        free(path);
    }
    CHECK(remove(one) == 0 && rmdir(features) == 0 && rmdir(dir) == 0);
    free(one);
    free(features);
    CHECK_FAILS(results_write(&d->r, "no/such/folder", &e), ST_IO, e, "images.csv");
}

static void check_memory(const demo *d) {
    for (size_t n = 1; n < 40; n++) {
        textbuf t = { 0 };
        error e = { 0 };
        mem_fail_after(n);
        results_json(&d->r, &t);
        mem_fail_after(0);
        cJSON *root = t.failed ? NULL : cJSON_Parse(t.s);
        CHECK(t.failed ? text_check(&t, "results.json", &e) == ST_NO_MEMORY : root != NULL);
        cJSON_Delete(root);
        text_free(&t);
    }
}

int main(void) {
    demo d;
    demo_make(&d);
    check_csv(&d);
    check_json(&d);
    check_groups();
    check_files(&d);
    check_memory(&d);
    return check_done();
}

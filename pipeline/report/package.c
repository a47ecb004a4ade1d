/* Describes what a run wrote, from the same column tables that wrote it. Units are a member "unit" of each field (the
 * schema allows further members). An image's features and profiles are resources of their own. */
#include "report/package.h"

#include <stdlib.h>
#include <string.h>

#include "io/file.h"
#include "io/json.h"

static const char *field_type(column_kind kind) {
    switch (kind) {
    case COL_NUMBER:
        return "number";
    case COL_COUNT:
        return "integer";
    default:
        return "string";
    }
}

void package_describe(const char *unit, const char *meaning, textbuf *out) {
    if (unit[0]) {
        text_add(out, ", \"unit\": ");
        json_string(out, unit);
    }
    text_add(out, ", \"description\": ");
    json_string(out, meaning);
    text_add(out, "}");
}

static void add_field(textbuf *out, int first, const char *name, const char *type, const char *unit,
                      const char *meaning) {
    text_addf(out, "%s\n          {\"name\": ", first ? "" : ",");
    json_string(out, name);
    text_addf(out, ", \"type\": \"%s\"", type);
    package_describe(unit, meaning, out);
}

static void add_extra_field(textbuf *out, const char *name) {
    static const char prefix[] = "verdict_";
    textbuf meaning = { 0 };
    if (!strncmp(name, prefix, sizeof prefix - 1))
        text_addf(&meaning, "verdict on %s alone", name + sizeof prefix - 1);
    else
        text_add(&meaning, "carried along from the sample sheet");
    add_field(out, 0, name, "string", "", meaning.s ? meaning.s : "");
    text_free(&meaning);
}

typedef struct {
    const char *name, *path, *title, *key; /* key: primary key column, or NULL */
    const column *columns;
    size_t n_columns;
    const char *const *extra;
    size_t n_extra;
} resource;

static void add_resource(textbuf *out, int first, const resource *s) {
    text_addf(out, "%s\n    {\"name\": ", first ? "" : ",");
    json_string(out, s->name);
    text_add(out, ", \"path\": ");
    json_string(out, s->path);
    text_add(out, ", \"title\": ");
    json_string(out, s->title);
    text_add(
        out,
        ",\n      \"profile\": \"tabular-data-resource\", \"format\": \"csv\", \"mediatype\": \"text/csv\", "
        "\"encoding\": \"utf-8\",\n      \"dialect\": {\"delimiter\": \",\", \"lineTerminator\": \"\\n\", "
        "\"quoteChar\": \"\\\"\", \"doubleQuote\": true, \"header\": true},\n      \"schema\": {"
        "\"missingValues\": [\"\"], ");
    if (s->key) text_addf(out, "\"primaryKey\": \"%s\", ", s->key);
    text_add(out, "\"fields\": [");
    for (size_t i = 0; i < s->n_columns; i++) {
        const column *c = &s->columns[i];
        add_field(out, i == 0, c->name, field_type(c->kind), c->unit, c->help);
    }
    for (size_t i = 0; i < s->n_extra; i++) add_extra_field(out, s->extra[i]);
    text_add(out, "\n      ]}}");
}

int image_stem(const results *r, size_t i, textbuf *out) {
    const char *given = r->image_stems ? r->image_stems[i] : r->overlay_paths ? r->overlay_paths[i] : NULL;
    if (!given) return 0;
    if (r->image_stems) {
        text_add(out, given);
        return 1;
    }
    const char *slash = strchr(given, '/'), *name = slash ? slash + 1 : given, *dot = strrchr(name, '.');
    text_add_n(out, name, dot ? (size_t)(dot - name) : strlen(name));
    return 1;
}

/* features/<stem>.csv or profiles/<stem>.csv of image i, if it is there. */
static void add_image_resource(const results *r, size_t i, const char *folder, const column *columns,
                               size_t n_columns, const char *out_dir, textbuf *out) {
    textbuf path = { 0 }, name = { 0 }, title = { 0 };
    char *full = NULL;
    text_addf(&path, "%s/", folder);
    if (!image_stem(r, i, &path)) goto done;
    text_add(&path, ".csv");
    text_addf(&name, "%s-%zu", folder, i + 1);
    text_addf(&title, "%s of %s", folder, r->images[i].file ? r->images[i].file : "");
    if (path.failed || name.failed || title.failed || !(full = path_join(out_dir, path.s)))
        out->failed = 1;
    else if (file_exists(full))
        add_resource(out, 0,
                     &(resource){ .name = name.s,
                                  .path = path.s,
                                  .title = title.s,
                                  .columns = columns,
                                  .n_columns = n_columns });
done:
    free(full);
    text_free(&path);
    text_free(&name);
    text_free(&title);
}

void package_json(const results *r, const char *out_dir, textbuf *out) {
    text_add(out,
             "{\n  \"profile\": \"tabular-data-package\",\n  \"name\": \"sward-results\",\n  \"title\": ");
    json_string(out, r->title ? r->title : "sward results");
    text_add(out, ",\n  \"description\": \"Texture of etched silicon measured on top-view micrographs, and "
                  "the reflectance "
                  "predicted from it. An empty cell means not measured; reason or flags says why.\",\n  "
                  "\"resources\": [");
    add_resource(out, 1,
                 &(resource){ .name = "images",
                              .path = "images.csv",
                              .title = "one row per micrograph",
                              .key = "file",
                              .columns = image_columns,
                              .n_columns = n_image_columns });
    add_resource(out, 0,
                 &(resource){ .name = "samples",
                              .path = "samples.csv",
                              .title = "one row per sample",
                              .key = "sample",
                              .columns = sample_columns,
                              .n_columns = n_sample_columns,
                              .extra = r->sample_extra,
                              .n_extra = r->n_sample_extra });
    add_resource(out, 0,
                 &(resource){ .name = "spectra",
                              .path = "spectra.csv",
                              .title = "predicted reflectance spectra",
                              .columns = spectrum_columns,
                              .n_columns = n_spectrum_columns });
    for (size_t i = 0; out_dir && i < r->n_images; i++) {
        add_image_resource(r, i, "features", feature_columns, n_feature_columns, out_dir, out);
        add_image_resource(r, i, "profiles", profile_columns, n_profile_columns, out_dir, out);
    }
    text_add(out, "\n  ]\n}\n");
}

/* The bar would end a Markdown cell. */
static void add_markdown_cell(textbuf *out, const char *s) {
    for (; *s; s++) {
        if (*s == '|') text_add(out, "\\");
        text_add_n(out, s, 1);
    }
}

void columns_markdown(const column *columns, size_t n, textbuf *out) {
    text_add(out, "| column | unit | digits | meaning |\n|---|---|---|---|\n");
    for (size_t i = 0; i < n; i++) {
        const column *c = &columns[i];
        text_addf(out, "| `%s` | ", c->name);
        add_markdown_cell(out, c->kind == COL_TEXT ? "text" : c->unit[0] ? c->unit : "count");
        if (c->kind == COL_NUMBER)
            text_addf(out, " | %d | ", c->digits);
        else
            text_add(out, " | | ");
        add_markdown_cell(out, c->help);
        text_add(out, " |\n");
    }
}

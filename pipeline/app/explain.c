#include "app/explain.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/runfile.h"
#include "base/mem.h"
#include "io/file.h"
#include "io/json.h"
#include "io/table.h"
#include "judge/history.h"
#include "report/html.h" /* column_find */
#include "report/rows.h"

/* Beginning of the column's name, and where its definition is from. */
static const struct {
    const char *name, *source;
} sources[] = {
    { "spacing_", "Wiener-Khinchin theorem for autocorrelation and spectrum; first ring of the curvature map: the program's own definition, "
                  "known ratios to the other spacings in its documentation" },
    { "density_", "counting in a guard frame: Stoyan D., Stoyan H. 1994, Fractals, Random Shapes and Point Fields" },
    { "nn_", "Hanisch K.-H. 1984 (edge correction of nearest neighbours)" },
    { "size_", "ISO 13322-1 (image analysis, border correction), ISO 9276-2 (mean sizes)" },
    { "top_", "ISO 13322-1" },
    { "clark_evans", "Clark P.J., Evans F.C. 1954; edge correction of Donnelly K. 1978" },
    { "sal_", "ISO 25178-2 (autocorrelation length), applied to the brightness" },
    { "str", "ISO 25178-2 (texture aspect ratio), applied to the brightness" },
    { "weighted_reflectance", "graded index by effective media (Bruggeman D.A.G. 1935), multilayer recursion; photon flux of ASTM G173" },
    { "current_loss", "photon flux of ASTM G173, one electron a photon" },
    { "polished_", "Fresnel equations; photon flux of ASTM G173" },
    { "coated_", "Fresnel equations for a film; photon flux of ASTM G173" },
};

const char *explain_source(const char *quantity) {
    for (size_t i = 0; i < sizeof sources / sizeof sources[0]; i++)
        if (!strncmp(quantity, sources[i].name, strlen(sources[i].name))) return sources[i].source;
    return "";
}

/* Copies members that are there; cJSON_AddItem takes a NULL as nothing. */
static void take(cJSON *to, const cJSON *from, const char *const *names, size_t n) {
    for (size_t i = 0; i < n; i++) {
        const cJSON *v = cJSON_GetObjectItemCaseSensitive(from, names[i]);
        if (v) cJSON_AddItemToObject(to, names[i], cJSON_Duplicate(v, 1));
    }
}
#define TAKE(to, from, names) take((to), (from), (names), sizeof(names) / sizeof(names)[0])

/* The quantity whose budget stands for a column of the sample. */
static const char *budget_name(const cJSON *manifest, const char *quantity) {
    if (strcmp(quantity, "spacing_nm") != 0) return quantity;
    return !strcmp(json_member_text(manifest, "spacing"), "density") ? "spacing_hex_nm" : "spacing_acf_nm";
}

/* Parts of a combined uncertainty and their share of its square. */
static cJSON *parts_of(const cJSON *from, const char *const (*names)[2], size_t n) {
    double total = 0.0;
    cJSON *list = cJSON_CreateArray();
    for (size_t i = 0; i < n; i++) {
        double u = json_member_number(from, names[i][0]);
        if (isfinite(u)) total += u * u;
    }
    for (size_t i = 0; list && i < n; i++) {
        double u = json_member_number(from, names[i][0]);
        if (!isfinite(u)) continue;
        cJSON *part = cJSON_CreateObject();
        cJSON_AddStringToObject(part, "part", names[i][1]);
        cJSON_AddNumberToObject(part, "u", u);
        cJSON_AddNumberToObject(part, "share", total > 0.0 ? u * u / total : 0.0);
        cJSON_AddItemToArray(list, part);
    }
    return list;
}

static cJSON *uncertainty_of(const cJSON *sample, const cJSON *manifest, const char *quantity) {
    static const char *const measured[][2] = { { "sampling", "sampling: another field of the same texture would differ" },
                                               { "detection", "detection: features missed or invented" },
                                               { "definition", "definition: the method's own error" },
                                               { "pixel_size", "pixel size: common to all micrographs of the instrument" } };
    static const char *const predicted[][2] = { { "u_height", "height" },       { "u_shape", "shape of the features" },
                                                { "u_tip", "tip" },             { "u_coverage", "bare floor" },
                                                { "u_spread", "spread of the heights" }, { "u_spacing", "spacing" },
                                                { "u_mixing", "mixing rule" },  { "u_model", "error of the model itself" } };
    if (!strcmp(quantity, "weighted_reflectance"))
        return parts_of(cJSON_GetObjectItemCaseSensitive(sample, "prediction"), predicted, sizeof predicted / sizeof predicted[0]);
    const cJSON *budget = cJSON_GetObjectItemCaseSensitive(cJSON_GetObjectItemCaseSensitive(sample, "budget"), budget_name(manifest, quantity));
    return budget ? parts_of(budget, measured, sizeof measured / sizeof measured[0]) : NULL;
}

static const cJSON *judgement_of(const cJSON *sample, const char *quantity) {
    const cJSON *j;
    cJSON_ArrayForEach(j, cJSON_GetObjectItemCaseSensitive(sample, "judgements")) {
        if (!strcmp(json_member_text(j, "quantity"), quantity)) return j;
    }
    return NULL;
}

static void known_quantities(const cJSON *sample, textbuf *out) {
    for (size_t i = 0; i < n_sample_columns; i++) {
        const char *name = sample_columns[i].name;
        size_t n = strlen(name);
        if (sample_columns[i].kind == COL_TEXT || (n > 3 && (!strcmp(name + n - 2, "_u") || !strcmp(name + n - 3, "_lo") || !strcmp(name + n - 3, "_hi")))) continue;
        if (cJSON_GetObjectItemCaseSensitive(sample, name)) text_addf(out, "%s%s", out->n ? " " : "", name);
    }
}

static status add_quantity(cJSON *list, const cJSON *sample, const cJSON *manifest, const char *quantity, error *e) {
    const cJSON *value = cJSON_GetObjectItemCaseSensitive(sample, quantity);
    const column *c = column_find(sample_columns, n_sample_columns, quantity);
    if (!value || (c && c->kind == COL_TEXT)) {
        textbuf known = { 0 };
        known_quantities(sample, &known);
        status st = fail(e, ST_BAD_INPUT, "'%.60s' is no quantity of a sample; there are %.330s", quantity, known.s ? known.s : "none");
        text_free(&known);
        return st;
    }
    cJSON *q = cJSON_CreateObject();
    cJSON_AddItemToArray(list, q);
    cJSON_AddStringToObject(q, "quantity", quantity);
    cJSON_AddItemToObject(q, "value", cJSON_Duplicate(value, 1));
    static const char *const ends[] = { "_u", "_lo", "_hi" };
    for (size_t i = 0; i < 3; i++) {
        textbuf name = { 0 };
        text_addf(&name, "%s%s", quantity, ends[i]);
        const cJSON *v = name.s ? cJSON_GetObjectItemCaseSensitive(sample, name.s) : NULL;
        if (v) cJSON_AddItemToObject(q, ends[i] + 1, cJSON_Duplicate(v, 1));
        text_free(&name);
    }
    cJSON_AddStringToObject(q, "unit", c ? c->unit : "");
    const char *stands_for = budget_name(manifest, quantity);
    const column *of_image = strcmp(stands_for, quantity) ? column_find(image_columns, n_image_columns, stands_for) : NULL;
    cJSON_AddStringToObject(q, "definition", of_image ? of_image->help : c ? c->help : "carried along from the sample sheet");
    cJSON_AddStringToObject(q, "stands_for", stands_for);
    cJSON_AddStringToObject(q, "source", explain_source(stands_for));
    cJSON *parts = uncertainty_of(sample, manifest, quantity);
    if (parts) cJSON_AddItemToObject(q, "uncertainty", parts);
    const cJSON *judged = judgement_of(sample, quantity);
    if (judged) cJSON_AddItemToObject(q, "target", cJSON_Duplicate(judged, 1));
    else if (cJSON_GetObjectItemCaseSensitive(sample, "judgements")) cJSON_AddNullToObject(q, "target"); /* a ledger does not say */
    return ST_OK;
}

static status add_quantities(cJSON *account, const cJSON *sample, const cJSON *manifest, const char *quantity, error *e) {
    cJSON *list = cJSON_AddArrayToObject(account, "quantities");
    const cJSON *j, *judged = cJSON_GetObjectItemCaseSensitive(sample, "judgements");
    if (quantity) return add_quantity(list, sample, manifest, quantity, e);
    status st = ST_OK;
    cJSON_ArrayForEach(j, judged) {
        if (st == ST_OK) st = add_quantity(list, sample, manifest, json_member_text(j, "quantity"), e);
    }
    if (cJSON_GetArraySize(judged) > 0) return st;
    st = add_quantity(list, sample, manifest, "spacing_nm", e);
    return st == ST_OK ? add_quantity(list, sample, manifest, "weighted_reflectance", e) : st;
}

/* Of the features of one micrograph: how many the frame cuts and how many lie outside the guard frame. */
static void count_features(const char *dir, const char *overlay, cJSON *m) {
    textbuf name = { 0 };
    csv c = { 0 };
    const char *stem = strchr(overlay, '/'), *dot = stem ? strrchr(stem, '.') : NULL;
    if (!dot) return;
    text_add(&name, "features");
    text_add_n(&name, stem, (size_t)(dot - stem));
    text_add(&name, ".csv");
    char *path = name.s ? path_join(dir, name.s) : NULL;
    if (path && csv_read(path, &c, NULL) == ST_OK) {
        double *weight = mem_array(c.n_rows, sizeof *weight), *guard = mem_array(c.n_rows, sizeof *guard);
        if (weight && guard && csv_numbers(&c, "border_weight", path, weight, NULL) == ST_OK &&
            csv_numbers(&c, "in_guard", path, guard, NULL) == ST_OK) {
            size_t cut = 0, outside = 0;
            for (size_t i = 0; i < c.n_rows; i++) {
                cut += !(weight[i] > 0.0);
                outside += !(guard[i] > 0.0);
            }
            cJSON_AddNumberToObject(m, "features_found", (double)c.n_rows);
            cJSON_AddNumberToObject(m, "features_cut_by_the_frame", (double)cut);
            cJSON_AddNumberToObject(m, "features_outside_the_guard_frame", (double)outside);
        }
        free(weight);
        free(guard);
    }
    csv_free(&c);
    free(path);
    text_free(&name);
}

static void add_micrographs(const char *dir, cJSON *account, const cJSON *root, const char *sample) {
    static const char *const names[] = { "file", "sha256", "status", "reason", "flags", "px_nm", "px_source", "px_u_rel", "sources", "n_features", "detail" };
    cJSON *list = cJSON_AddArrayToObject(account, "micrographs");
    const cJSON *i;
    cJSON_ArrayForEach(i, cJSON_GetObjectItemCaseSensitive(root, "images")) {
        if (strcmp(json_member_text(i, "sample"), sample) != 0) continue;
        cJSON *m = cJSON_CreateObject();
        TAKE(m, i, names);
        count_features(dir, json_member_text(i, "overlay"), m);
        cJSON_AddItemToArray(list, m);
    }
}

static void add_link(cJSON *account, const cJSON *sample, const cJSON *manifest) {
    static const char *const mine[] = { "height_nm", "height_nm_u", "height_source", "aspect", "optics_model" };
    static const char *const common[] = { "calibration", "mixing", "ambient" };
    cJSON *link = cJSON_AddObjectToObject(account, "link");
    TAKE(link, sample, mine);
    TAKE(link, manifest, common);
    const cJSON *note = cJSON_GetObjectItemCaseSensitive(cJSON_GetObjectItemCaseSensitive(sample, "prediction"), "note");
    if (note) cJSON_AddItemToObject(link, "note", cJSON_Duplicate(note, 1));
}

status explain_run(const char *dir, const char *sample, const char *quantity, cJSON **account, error *e) {
    static const char *const whole[] = { "sample", "lot", "wafer", "position", "etched_at", "n_images", "n_used", "verdict", "flags" };
    static const char *const made[] = { "program", "version", "libraries", "protocol", "protocol_sha256", "basis_sha256", "materials", "options",
                                        "scale_standard", "warnings" };
    cJSON *root = NULL;
    status st = runfile_read(dir, &root, e);
    if (st != ST_OK) return st;
    const cJSON *row = runfile_sample(root, sample), *manifest = cJSON_GetObjectItemCaseSensitive(root, "manifest");
    cJSON *a = cJSON_CreateObject();
    if (!a) st = NO_MEMORY(e, "the account");
    if (st == ST_OK && !row)
        st = fail(e, ST_BAD_INPUT, "'%.80s' is no sample of the run in '%.200s'; samples.csv there lists them", sample, dir);
    if (st == ST_OK) {
        TAKE(a, row, whole);
        st = add_quantities(a, row, manifest, quantity, e);
    }
    if (st == ST_OK) {
        add_micrographs(dir, a, root, sample);
        add_link(a, row, manifest);
        cJSON *m = cJSON_AddObjectToObject(a, "manifest");
        TAKE(m, manifest, made);
        *account = a;
        a = NULL;
    }
    cJSON_Delete(a);
    cJSON_Delete(root);
    return st;
}

/* --- from a ledger --- */

static const history_row *newest_row(const history_list *l, const char *sample) {
    const history_row *found = NULL;
    for (size_t i = 0; i < l->n; i++)
        if (!strcmp(l->rows[i].sample, sample)) found = &l->rows[i];
    return found;
}

static status account_of_row(const history_row *r, const char *quantity, cJSON **account, error *e) {
    static const char *const whole[] = { "sample", "lot", "wafer", "position", "etched_at", "n_images", "n_used", "verdict", "verdict_reasons", "flags" };
    cJSON *row = cJSON_Parse(r->row_json), *a = cJSON_CreateObject();
    status st = row && a ? ST_OK : fail(e, ST_IO, "the row of '%.80s' in the history is damaged", r->sample);
    if (st == ST_OK) {
        TAKE(a, row, whole);
        st = add_quantities(a, row, NULL, quantity, e);
    }
    if (st == ST_OK) {
        add_link(a, row, NULL);
        cJSON *m = cJSON_AddObjectToObject(a, "manifest");
        const char *const texts[][2] = { { "program", "sward" },   { "version", r->version }, { "protocol", r->protocol },
                                         { "protocol_sha256", r->protocol_sha256 }, { "run_at", r->run_at }, { "folder", r->folder },
                                         { "excluded", r->excluded } };
        for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++)
            if (texts[i][1] && texts[i][1][0]) cJSON_AddStringToObject(m, texts[i][0], texts[i][1]);
        cJSON_AddStringToObject(a, "note", "From the history: the parts of the uncertainty, exclusions and optical data are in the output folder of the run "
                                           "(sward explain SAMPLE --out DIR).");
        *account = a;
        a = NULL;
    }
    cJSON_Delete(a);
    cJSON_Delete(row);
    return st;
}

status explain_history(const char *path, const char *sample, const char *quantity, cJSON **account, error *e) {
    history *h = NULL;
    history_list list = { 0 };
    status st = history_open(path, 1, &h, e);
    if (st == ST_OK) st = history_read(h, NULL, NULL, &list, e);
    if (st == ST_OK) {
        const history_row *r = newest_row(&list, sample);
        st = r ? account_of_row(r, quantity, account, e)
               : fail(e, ST_BAD_INPUT, "'%.80s' is no sample of the history %.200s; 'sward history' lists them", sample, path);
    }
    history_list_free(&list);
    history_close(h);
    return st;
}

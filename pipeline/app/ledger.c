#include "app/ledger.h"

#include <stdlib.h>
#include <string.h>

#include "app/process.h"
#include "base/mem.h"
#include "io/file.h"
#include "io/json.h"
#include "judge/history.h"

void ledger_free(ledger_result *r) {
    free(r->path);
    free(r->json);
    free(r->process);
    free(r->series);
    for (size_t i = 0; r->row_json && i < r->n_rows; i++) free(r->row_json[i]);
    free(r->row_json);
    *r = (ledger_result){ 0 };
}

static const char *extra_cell(const void *row, size_t k) {
    const sample_row *r = row;
    return k < r->n_extra ? r->extra[k] : NULL;
}

/* Names of the columns behind the fixed ones: verdicts, then what the sheet carries along. */
static status extra_names(const protocol *p, const sheet *columns, char **names, error *e) {
    status st = ST_OK;
    for (size_t i = 0; st == ST_OK && i < p->n_targets + columns->n_extra; i++) {
        textbuf name = { 0 };
        if (i < p->n_targets) text_addf(&name, "verdict_%s", p->targets[i].quantity);
        else text_add(&name, columns->extra_names[i - p->n_targets]);
        st = text_check(&name, "the history", e);
        names[i] = name.s;
    }
    return st;
}

/* The samples.csv row as one JSON object, in an array of its own. */
static status rows_json(const joined *samples, size_t n, const protocol *p, const sheet *columns, char **out, error *e) {
    size_t n_extra = p->n_targets + columns->n_extra;
    char **names = mem_array(n_extra, sizeof *names);
    status st = names ? extra_names(p, columns, names, e) : NO_MEMORY(e, "the history");
    for (size_t i = 0; st == ST_OK && i < n; i++) {
        textbuf t = { 0 };
        table_view view = { sample_columns, n_sample_columns, &samples[i].row, 1, sizeof samples[i].row,
                            (const char *const *)names, n_extra, extra_cell };
        table_row_to_json(&view, 0, &t);
        st = text_check(&t, "a row of the history", e);
        out[i] = t.s;
    }
    for (size_t i = 0; names && i < n_extra; i++) free(names[i]);
    free(names);
    return st;
}

/* The newest entry of each sample: rows come in order of etched_at, sample, run_at. */
static int superseded(const history_list *l, size_t i) {
    const history_row *r = &l->rows[i];
    return i + 1 < l->n && !strcmp(l->rows[i + 1].sample, r->sample) && !strcmp(l->rows[i + 1].etched_at, r->etched_at);
}

static void series_json(const history_list *l, textbuf *t) {
    const char *separator = "";
    text_add(t, "[");
    for (size_t i = 0; i < l->n; i++) {
        const history_row *r = &l->rows[i];
        if (superseded(l, i) || r->excluded[0]) continue;
        text_addf(t, "%s{\"sample\": ", separator);
        json_string(t, r->sample);
        text_add(t, ", \"lot\": ");
        json_string(t, r->lot);
        text_add(t, ", \"etched_at\": ");
        json_string(t, r->etched_at);
        text_add(t, ", \"spacing_nm\": ");
        json_number(t, r->spacing_nm, 5);
        text_add(t, ", \"spacing_nm_u\": ");
        json_number(t, r->spacing_nm_u, 3);
        text_add(t, ", \"weighted_reflectance\": ");
        json_number(t, r->weighted_reflectance, 5);
        text_add(t, ", \"verdict\": ");
        json_string(t, r->verdict);
        text_add(t, "}");
        separator = ", ";
    }
    text_add(t, "]");
}

/* What all rows of a run share. */
typedef struct {
    const protocol *p;
    const char *run_at;
    char protocol_sha256[65];
    char *folder; /* absolute; NULL: it is gone */
} origin;

static status find_origin(const protocol *p, const char *run_at, const char *folder, origin *o, error *e) {
    textbuf full = { 0 };
    *o = (origin){ .p = p, .run_at = run_at };
    protocol_full_text(p, &full);
    status st = text_check(&full, "the protocol", e);
    if (st == ST_OK) sha256_hex(full.s, full.n, o->protocol_sha256);
    text_free(&full);
    o->folder = realpath(folder, NULL);
    return st;
}

static history_row entry(const joined *j, const origin *o, const char *row_json) {
    const sample_row *r = &j->row;
    return (history_row){ .sample = r->sample, .lot = r->lot, .wafer = r->wafer, .position = r->position, .etched_at = r->etched_at,
                          .run_at = o->run_at, .fingerprint = j->fingerprint, .version = SWARD_VERSION,
                          .protocol = o->p->name, .protocol_sha256 = o->protocol_sha256, .folder = o->folder,
                          .spacing_nm = r->spacing_nm, .spacing_nm_u = r->spacing_nm_u,
                          .density_per_um2 = r->density_per_um2, .size_d50_nm = r->size_d50_nm,
                          .weighted_reflectance = r->weighted_reflectance, .verdict = r->verdict, .row_json = row_json,
                          .micrographs = j->files, .n_micrographs = j->n_files };
}

status ledger_keep(const char *path, const char *out, const char *run_at, const protocol *p, const sheet *columns, const char *folder,
                   const joined *samples, size_t n, ledger_result *result, error *e) {
    history *h = NULL;
    history_list list = { 0 };
    history_notes notes = { 0 };
    history_row *rows = mem_array(n, sizeof *rows);
    result->row_json = mem_array(n, sizeof *result->row_json);
    result->n_rows = n;
    textbuf etches = { 0 }, process = { 0 }, charts = { 0 };
    status st = rows && result->row_json ? rows_json(samples, n, p, columns, result->row_json, e) : NO_MEMORY(e, "the history");
    origin from = { 0 };
    if (st == ST_OK) st = find_origin(p, run_at, folder, &from, e);
    result->stays_with_output = !path;
    result->path = path ? mem_text(path) : path_join(out, "history.sqlite");
    if (st == ST_OK && !result->path) st = NO_MEMORY(e, "a path");
    for (size_t i = 0; st == ST_OK && i < n; i++) rows[i] = entry(&samples[i], &from, result->row_json[i]);
    if (st == ST_OK) st = history_open(result->path, 0, &h, e);
    if (st == ST_OK) st = history_add(h, rows, n, &result->added, e);
    if (st == ST_OK) st = history_read(h, NULL, NULL, &list, e);
    if (st == ST_OK) {
        result->total = list.n;
        series_json(&list, &etches);
        st = text_check(&etches, "the history", e);
        result->json = etches.s;
        etches = (textbuf){ 0 };
    }
    if (st == ST_OK) st = history_notes_read(h, &notes, e);
    if (st == ST_OK) st = process_describe(&list, &notes, p, &process, &charts, e);
    if (st == ST_OK) {
        result->process = process.s;
        result->series = charts.s;
        process = charts = (textbuf){ 0 };
    }
    text_free(&process);
    text_free(&charts);
    history_notes_free(&notes);
    history_list_free(&list);
    history_close(h);
    text_free(&etches);
    free(from.folder);
    free(rows);
    return st;
}

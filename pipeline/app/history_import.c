/* `sward history import`: numbers from before, into the ledger. A CSV with the columns of samples.csv or any of them, one row per
 * sample; what is no column of samples.csv is kept as a column of the sheet. Rows are marked: their version is "imported".
 * What this file does not do: it checks no number against a micrograph; there is none. */
#include <stdlib.h>
#include <string.h>

#include "app/history_verbs.h"
#include "app/samplesheet.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/column.h"
#include "io/file.h"
#include "io/json.h"
#include "io/table.h"
#include "report/html.h"
#include "report/rows.h"

/* Columns that belong to the ledger, not to the row. */
static int of_ledger(const char *name) {
    static const char *const names[] = { "run_at", "excluded", "protocol", "protocol_sha256", "version", "imported_from" };
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++)
        if (!strcmp(name, names[i])) return 1;
    return 0;
}

static status add_cell(const csv *c, size_t row, size_t k, const char *what, textbuf *out, error *e) {
    const char *name = c->names[k], *cell = csv_cell(c, row, (long)k);
    const column *known = column_find(sample_columns, n_sample_columns, name);
    double v = MISSING;
    text_add(out, ", ");
    json_string(out, name);
    text_add(out, ": ");
    if (!known || known->kind == COL_TEXT) json_string(out, cell);
    else if (!cell[0] || number_parse(cell, &v)) json_number(out, v, 15);
    else
        return fail(e, ST_BAD_INPUT, "%s line %zu, %s: found '%.60s', expected a number; correct it or leave the cell empty", what,
                    c->lines[row], name, cell);
    return ST_OK;
}

/* The texts behind a row of the ledger, in the order of its members. */
typedef struct {
    char etched_at[32], run_at[32], fingerprint[65];
    char *json;
} import_row;

static status make_row(const csv *c, size_t row, const char *what, const char *file, const char *now, import_row *out, error *e) {
    textbuf t = { 0 };
    const char *sample = csv_cell(c, row, csv_column(c, "sample")), *time = csv_cell(c, row, csv_column(c, "etched_at"));
    const char *run_at = csv_cell(c, row, csv_column(c, "run_at"));
    if (!sample[0]) return fail(e, ST_BAD_INPUT, "%s line %zu, sample: the cell is empty; every row needs a name", what, c->lines[row]);
    if (!iso_time(time, out->etched_at))
        return fail(e, ST_BAD_INPUT, "%s line %zu, etched_at: found '%.60s', expected a time such as 2026-03-14T09:30:00Z", what,
                    c->lines[row], time);
    if (!iso_time(run_at, out->run_at)) memcpy(out->run_at, now, sizeof out->run_at);
    text_add(&t, "{\"sample\": ");
    json_string(&t, sample);
    text_add(&t, ", \"etched_at\": ");
    json_string(&t, out->etched_at);
    text_add(&t, ", \"imported_from\": ");
    json_string(&t, file);
    status st = ST_OK;
    for (size_t k = 0; st == ST_OK && k < c->n_columns; k++)
        if (strcmp(c->names[k], "sample") != 0 && strcmp(c->names[k], "etched_at") != 0 && !of_ledger(c->names[k]))
            st = add_cell(c, row, k, what, &t, e);
    text_add(&t, "}");
    if (st == ST_OK) st = text_check(&t, "a row", e);
    if (st == ST_OK) sha256_hex(t.s, t.n, out->fingerprint); /* the same row again is known, whenever it comes */
    if (st == ST_OK) out->json = t.s;
    else text_free(&t);
    return st;
}

static double number_at(const csv *c, size_t row, const char *name) {
    double v = MISSING;
    return number_parse(csv_cell(c, row, csv_column(c, name)), &v) ? v : MISSING;
}

static history_row ledger_row(const csv *c, size_t row, const import_row *r, const char *protocol) {
    const char *verdict = csv_cell(c, row, csv_column(c, "verdict"));
    return (history_row){ .sample = csv_cell(c, row, csv_column(c, "sample")), .lot = csv_cell(c, row, csv_column(c, "lot")),
                          .wafer = csv_cell(c, row, csv_column(c, "wafer")), .position = csv_cell(c, row, csv_column(c, "position")),
                          .etched_at = r->etched_at, .run_at = r->run_at, .fingerprint = r->fingerprint, .version = "imported",
                          .protocol = protocol ? protocol : "imported", .spacing_nm = number_at(c, row, "spacing_nm"),
                          .spacing_nm_u = number_at(c, row, "spacing_nm_u"), .density_per_um2 = number_at(c, row, "density_per_um2"),
                          .size_d50_nm = number_at(c, row, "size_d50_nm"),
                          .weighted_reflectance = number_at(c, row, "weighted_reflectance"),
                          .verdict = verdict[0] ? verdict : "no_target", .row_json = r->json };
}

static const char *base_name(const char *path) {
    const char *slash = strrchr(path, '/');
    return slash ? slash + 1 : path;
}

status history_import(history *h, const char *path, const char *protocol, const char *now, textbuf *out, error *e) {
    csv c = { 0 };
    size_t added = 0;
    char clock[32] = "";
    status st = csv_read(path, &c, e);
    if (st == ST_OK && (csv_column(&c, "sample") < 0 || csv_column(&c, "etched_at") < 0))
        st = fail(e, ST_BAD_INPUT, "%s: an import needs the columns sample and etched_at", path);
    import_row *made = mem_array(c.n_rows, sizeof *made);
    history_row *rows = mem_array(c.n_rows, sizeof *rows);
    if (st == ST_OK && (!made || !rows)) st = NO_MEMORY(e, "an import");
    if (strlen(now) < sizeof clock) memcpy(clock, now, strlen(now));
    for (size_t i = 0; st == ST_OK && i < c.n_rows; i++) {
        st = make_row(&c, i, path, base_name(path), clock, &made[i], e);
        if (st == ST_OK) rows[i] = ledger_row(&c, i, &made[i], protocol);
    }
    if (st == ST_OK) st = history_add(h, rows, c.n_rows, &added, e);
    if (st == ST_OK) text_addf(out, "%zu of %zu rows are new and were added, marked as imported\n", added, c.n_rows);
    for (size_t i = 0; made && i < c.n_rows; i++) free(made[i].json);
    free(made);
    free(rows);
    csv_free(&c);
    return st;
}

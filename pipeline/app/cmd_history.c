/* `sward history`: the ledger, one row per sample and run, in the order of the etches. */
#include <cjson/cJSON.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "base/mem.h"
#include "base/number.h"
#include "io/column.h"
#include "io/file.h"
#include "io/json.h"
#include "judge/history.h"

#define DEFAULT_LEDGER "sward-out/history.sqlite"
enum { OPT_HISTORY = 1, OPT_SINCE, OPT_LOT, OPT_JSON, OPT_CSV };

/* clang-format off */
static const struct argp_option history_options[] = {
    { "history", OPT_HISTORY, "FILE", 0, "the ledger (default: " DEFAULT_LEDGER ")", 0 },
    { "since",   OPT_SINCE,   "T",    0, "only etches at or after this time (ISO 8601)", 0 },
    { "lot",     OPT_LOT,     "L",    0, "only this lot", 0 },
    { "json",    OPT_JSON,    NULL,   0, "JSON array, rows as in samples.csv with run_at", 0 },
    { "csv",     OPT_CSV,     NULL,   0, "the same as CSV", 0 },
    { 0 } };
/* clang-format on */

typedef struct {
    const char *path, *since, *lot;
    int json, csv;
} request;

static error_t history_option(int key, char *arg, struct argp_state *state) {
    request *q = state->input;
    switch (key) {
    case OPT_HISTORY:
        q->path = arg;
        break;
    case OPT_SINCE:
        q->since = arg;
        break;
    case OPT_LOT:
        q->lot = arg;
        break;
    case OPT_JSON:
        q->json = 1;
        q->csv = 0;
        break;
    case OPT_CSV:
        q->csv = 1;
        q->json = 0;
        break;
    case ARGP_KEY_ARG:
        argp_error(state, "'%s' is no option; the ledger is named with --history", arg);
        break;
    default:
        return ARGP_ERR_UNKNOWN;
    }
    return 0;
}

const struct argp history_argp = { history_options,
                                   history_option,
                                   "",
                                   "The ledger of every sample measured so far, one row per sample and run.",
                                   NULL,
                                   NULL,
                                   NULL };

/* The rows as a table: every key of any row_json is a column, in the order of first appearance, run_at behind
 * etched_at. Used for CSV only; JSON passes the stored objects through. */
typedef struct {
    char **names; /* [n], room for more */
    size_t n, room;
} name_list;

typedef struct {
    const char **cells; /* [n columns], NULL where the row lacks it */
    cJSON *object;      /* owns the text */
    char *numbers;      /* [n columns][NUMBER_TEXT] */
} csv_row;

static size_t name_index(const name_list *l, const char *name) {
    size_t i = 0;
    while (i < l->n && strcmp(l->names[i], name) != 0) i++;
    return i;
}

static status name_add(name_list *l, const char *name, error *e) {
    if (name_index(l, name) < l->n) return ST_OK;
    if (l->n == l->room) {
        char **grown = mem_grow(l->names, l->room + 64, sizeof *grown);
        if (!grown) return NO_MEMORY(e, "the history");
        l->names = grown;
        l->room += 64;
    }
    l->names[l->n] = mem_text(name);
    return l->names[l->n++] ? ST_OK : NO_MEMORY(e, "the history");
}

static status collect(const history_list *l, csv_row *rows, name_list *names, error *e) {
    status st = name_add(names, "sample", e);
    if (st == ST_OK) st = name_add(names, "etched_at", e);
    if (st == ST_OK) st = name_add(names, "run_at", e);
    for (size_t i = 0; i < l->n && st == ST_OK; i++) {
        const cJSON *child;
        rows[i].object = cJSON_Parse(l->rows[i].row_json);
        if (!rows[i].object)
            return fail(e, ST_IO, "the ledger holds a damaged row of the sample '%s'", l->rows[i].sample);
        cJSON_ArrayForEach(child, rows[i].object) if (st == ST_OK) st = name_add(names, child->string, e);
    }
    return st;
}

static status fill(const history_row *r, const name_list *names, csv_row *row, error *e) {
    const cJSON *child;
    row->cells = mem_array(names->n, sizeof *row->cells);
    row->numbers = mem_array(names->n, NUMBER_TEXT);
    if (!row->cells || !row->numbers) return NO_MEMORY(e, "the history");
    cJSON_ArrayForEach(child, row->object) {
        size_t k = name_index(names, child->string);
        if (cJSON_IsString(child))
            row->cells[k] = child->valuestring;
        else if (cJSON_IsNumber(child))
            row->cells[k] = number_text(child->valuedouble, 15, row->numbers + k * NUMBER_TEXT);
    }
    row->cells[name_index(names, "sample")] = r->sample;
    row->cells[name_index(names, "etched_at")] = r->etched_at;
    row->cells[name_index(names, "run_at")] = r->run_at;
    return ST_OK;
}

static const char *csv_cell_of(const void *row, size_t k) { return ((const csv_row *)row)->cells[k]; }

static status print_csv(const history_list *l, textbuf *out, error *e) {
    name_list names = { 0 };
    csv_row *rows = mem_array(l->n, sizeof *rows);
    status st = rows ? collect(l, rows, &names, e) : NO_MEMORY(e, "the history");
    for (size_t i = 0; i < l->n && st == ST_OK; i++) st = fill(&l->rows[i], &names, &rows[i], e);
    if (st == ST_OK) {
        table_view view = { NULL,    0,          rows, l->n, sizeof *rows, (const char *const *)names.names,
                            names.n, csv_cell_of };
        table_to_csv(&view, out);
    }
    for (size_t i = 0; rows && i < l->n; i++) {
        cJSON_Delete(rows[i].object);
        free(rows[i].cells);
        free(rows[i].numbers);
    }
    for (size_t k = 0; k < names.n; k++) free(names.names[k]);
    free(names.names);
    free(rows);
    return st;
}

/* The stored objects, byte for byte, with run_at in front. */
static void print_json(const history_list *l, textbuf *out) {
    text_add(out, "[");
    for (size_t i = 0; i < l->n; i++) {
        const char *body = l->rows[i].row_json + strspn(l->rows[i].row_json, " \t\r\n");
        text_addf(out, "%s{\"run_at\": ", i ? ",\n  " : "\n  ");
        json_string(out, l->rows[i].run_at);
        if (*body == '{') body++;
        text_addf(out, "%s%s", body[strspn(body, " ")] == '}' ? "" : ", ", body);
    }
    text_add(out, "\n]\n");
}

/* A column of the table for people: as wide as its widest cell. */
static size_t width_of(const char *header, size_t longest) {
    size_t n = strlen(header);
    return n > longest ? n : longest;
}

static void print_text(const history_list *l, textbuf *out) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT], d[NUMBER_TEXT], f[NUMBER_TEXT];
    size_t sample = 0, lot = 0;
    for (size_t i = 0; i < l->n; i++) {
        sample = width_of(l->rows[i].sample, sample);
        lot = width_of(l->rows[i].lot, lot);
    }
    sample = width_of("sample", sample);
    lot = width_of("lot", lot);
    text_addf(out, "%-20s  %-*s  %-*s  %11s  %6s  %13s  %9s  %6s  %-12s  %s\n", "etched_at", (int)sample,
              "sample", (int)lot, "lot", "spacing/nm", "+-", "density/um-2", "D50/nm", "R/%", "verdict",
              "run_at");
    for (size_t i = 0; i < l->n; i++) {
        const history_row *r = &l->rows[i];
        text_addf(out, "%-20s  %-*s  %-*s  %11s  %6s  %13s  %9s  %6s  %-12s  %s\n", r->etched_at, (int)sample,
                  r->sample, (int)lot, r->lot, number_text(r->spacing_nm, 5, a),
                  number_text(r->spacing_nm_u, 3, b), number_text(r->density_per_um2, 5, c),
                  number_text(r->size_d50_nm, 5, d), number_percent(r->weighted_reflectance, 4, f),
                  r->verdict, r->run_at);
    }
    text_addf(out, "%zu %s\n", l->n, l->n == 1 ? "row" : "rows");
}

int cmd_history(int argc, char **argv) {
    request q = { .path = DEFAULT_LEDGER };
    history *h = NULL;
    history_list rows = { 0 };
    textbuf out = { 0 };
    error e = { ST_OK, "" };
    argp_parse(&history_argp, argc, argv, 0, NULL, &q);
    status st = file_exists(q.path)
                    ? ST_OK
                    : fail(&e, ST_BAD_INPUT,
                           "there is no ledger '%s' yet; 'sward run' starts one, or name another with "
                           "--history",
                           q.path);
    if (st == ST_OK) st = history_open(q.path, 1, &h, &e);
    if (st == ST_OK) st = history_read(h, q.since, q.lot, &rows, &e);
    if (st == ST_OK) {
        if (q.json)
            print_json(&rows, &out);
        else if (q.csv)
            st = print_csv(&rows, &out, &e);
        else
            print_text(&rows, &out);
    }
    history_list_free(&rows);
    history_close(h);
    if (st == ST_OK) return command_print("history", &out);
    text_free(&out);
    return command_failed("history", &e);
}

/* `sward history` without a verb: the ledger as a table for people, as CSV and as JSON. Rows are scanned, not parsed into trees, so
 * that a ledger of years comes out at once. */
#include <stdlib.h>
#include <string.h>

#include "app/history_verbs.h"
#include "app/rowtext.h"
#include "base/mem.h"
#include "base/number.h"
#include "io/column.h"
#include "io/json.h"

/* Every name of any row is a column of the CSV, in the order of first appearance, run_at and excluded behind etched_at. */
typedef struct {
    char **names; /* [n], room for more */
    size_t n, room;
} name_list;

/* Searched from `from` on and around: rows name their members in the same order. */
static size_t name_index(const name_list *l, const row_member *m, size_t from) {
    for (size_t k = 0; k < l->n; k++) {
        size_t i = from + k < l->n ? from + k : from + k - l->n;
        if (row_named(m, l->names[i])) return i;
    }
    return l->n;
}

static status name_add(name_list *l, char *name, error *e) {
    if (!name) return NO_MEMORY(e, "the history");
    if (l->n == l->room) {
        char **grown = mem_grow(l->names, l->room + 64, sizeof *grown);
        if (!grown) {
            free(name);
            return NO_MEMORY(e, "the history");
        }
        l->names = grown;
        l->room += 64;
    }
    l->names[l->n++] = name;
    return ST_OK;
}

static status collect(const history_list *l, name_list *names, error *e) {
    static const char *const first[] = { "sample", "etched_at", "run_at", "excluded" };
    status st = ST_OK;
    for (size_t i = 0; st == ST_OK && i < sizeof first / sizeof first[0]; i++) st = name_add(names, mem_text(first[i]), e);
    for (size_t i = 0; i < l->n && st == ST_OK; i++) {
        const char *at = l->rows[i].row_json;
        row_member m;
        size_t next = 0;
        int more;
        while (st == ST_OK && (more = row_next(&at, &m)) == 1) {
            size_t k = name_index(names, &m, next);
            row_member name = { .value = m.name, .value_n = m.name_n, .kind = MEMBER_TEXT };
            if (k == names->n) st = name_add(names, row_text(&name), e);
            next = k + 1;
        }
        if (st == ST_OK && more < 0) st = fail(e, ST_IO, "the ledger holds a damaged row of the sample '%s'", l->rows[i].sample);
    }
    return st;
}

/* The cells of the row that is printed, shared by all rows: filled when its first cell is asked for. */
typedef struct {
    const name_list *names;
    const char **cells; /* [names->n] */
    char **owned;       /* [names->n] */
    int failed;
} cell_room;

typedef struct {
    const history_row *row;
    cell_room *room;
} csv_row;

static void fill(const history_row *r, cell_room *c) {
    const char *at = r->row_json;
    row_member m;
    size_t next = 0, n = c->names->n;
    for (size_t k = 0; k < n; k++) {
        free(c->owned[k]);
        c->owned[k] = NULL;
        c->cells[k] = NULL;
    }
    while (row_next(&at, &m) == 1) {
        size_t k = name_index(c->names, &m, next);
        next = k + 1;
        if (k == n || m.kind == MEMBER_OTHER || !m.value_n || c->owned[k]) continue;
        c->cells[k] = c->owned[k] = row_text(&m);
        c->failed |= !c->owned[k];
    }
    const char *const first[] = { r->sample, r->etched_at, r->run_at, r->excluded };
    for (size_t k = 0; k < sizeof first / sizeof first[0]; k++) c->cells[k] = first[k];
}

static const char *cell_of(const void *row, size_t k) {
    const csv_row *r = row;
    if (k == 0) fill(r->row, r->room);
    return r->room->cells[k];
}

static status add_csv(const history_list *l, textbuf *out, error *e) {
    name_list names = { 0 };
    cell_room c = { .names = &names };
    csv_row *rows = mem_array(l->n, sizeof *rows);
    status st = rows ? collect(l, &names, e) : NO_MEMORY(e, "the history");
    c.cells = mem_array(names.n, sizeof *c.cells);
    c.owned = mem_array(names.n, sizeof *c.owned);
    if (st == ST_OK && (!c.cells || !c.owned)) st = NO_MEMORY(e, "the history");
    for (size_t i = 0; st == ST_OK && i < l->n; i++) rows[i] = (csv_row){ &l->rows[i], &c };
    if (st == ST_OK) {
        table_view view = { NULL, 0, rows, l->n, sizeof *rows, (const char *const *)names.names, names.n, cell_of };
        table_to_csv(&view, out);
        if (c.failed) st = NO_MEMORY(e, "the history");
    }
    for (size_t k = 0; k < names.n; k++) {
        if (c.owned) free(c.owned[k]);
        free(names.names[k]);
    }
    free(c.cells);
    free(c.owned);
    free(names.names);
    free(rows);
    return st;
}

/* The stored objects, byte for byte, with what only the ledger knows in front. */
static void add_json(const history_list *l, textbuf *out) {
    text_add(out, "[");
    for (size_t i = 0; i < l->n; i++) {
        const history_row *r = &l->rows[i];
        const char *body = r->row_json + strspn(r->row_json, " \t\r\n");
        text_add(out, i ? ",\n  {\"run_at\": " : "\n  {\"run_at\": ");
        json_string(out, r->run_at);
        text_add(out, ", \"excluded\": ");
        json_string(out, r->excluded[0] ? r->excluded : NULL);
        text_add(out, ", \"protocol\": ");
        json_string(out, r->protocol);
        text_add(out, ", \"protocol_sha256\": ");
        json_string(out, r->protocol_sha256[0] ? r->protocol_sha256 : NULL);
        text_add(out, ", \"version\": ");
        json_string(out, r->version);
        if (*body == '{') body++;
        if (body[strspn(body, " ")] != '}') text_add(out, ", ");
        text_add(out, body);
    }
    text_add(out, "\n]\n");
}

/* A column of the table for people: as wide as its widest cell. */
static int width_of(const char *header, size_t longest) {
    size_t n = strlen(header);
    return (int)(n > longest ? n : longest);
}

static void add_text(const history_list *l, textbuf *out) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT], d[NUMBER_TEXT], f[NUMBER_TEXT];
    size_t longest_sample = 0, longest_lot = 0;
    for (size_t i = 0; i < l->n; i++) {
        size_t n = strlen(l->rows[i].sample), m = strlen(l->rows[i].lot);
        if (n > longest_sample) longest_sample = n;
        if (m > longest_lot) longest_lot = m;
    }
    int sample = width_of("sample", longest_sample), lot = width_of("lot", longest_lot);
    text_addf(out, "%-20s  %-*s  %-*s  %11s  %6s  %13s  %9s  %6s  %-12s  %s\n", "etched_at", sample, "sample", lot, "lot", "spacing/nm",
              "+-", "density/um-2", "D50/nm", "R/%", "verdict", "run_at");
    for (size_t i = 0; i < l->n; i++) {
        const history_row *r = &l->rows[i];
        text_addf(out, "%-20s  %-*s  %-*s  %11s  %6s  %13s  %9s  %6s  %-12s  %s%s%s\n", r->etched_at, sample, r->sample, lot, r->lot,
                  number_text(r->spacing_nm, 5, a), number_text(r->spacing_nm_u, 3, b), number_text(r->density_per_um2, 5, c),
                  number_text(r->size_d50_nm, 5, d), number_percent(r->weighted_reflectance, 4, f), r->verdict, r->run_at,
                  r->excluded[0] ? "  excluded: " : "", r->excluded);
    }
    text_addf(out, "%zu %s\n", l->n, l->n == 1 ? "row" : "rows");
}

status history_print(const history_list *rows, history_form form, textbuf *out, error *e) {
    if (form == FORM_CSV) return add_csv(rows, out, e);
    if (form == FORM_JSON) add_json(rows, out);
    else add_text(rows, out);
    return text_check(out, "the history", e);
}

/* Writers over a column table: CSV (RFC 4180, LF) and JSON (RFC 8259). Both print a number through
 * column_cell, so that they agree to the digit. Text a spreadsheet would run as a formula is defused in CSV
 * only; JSON keeps it exact. */
#include "io/column.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/number.h"
#include "io/json.h"
#include "io/utf8_priv.h"

static const char *cell_text(const column *c, const void *row) {
    const char *s;
    memcpy(&s, (const char *)row + c->offset, sizeof s);
    return s ? s : "";
}

const char *column_cell(const column *c, const void *row, char *buffer) {
    if (c->kind == COL_TEXT) return cell_text(c, row);
    buffer[0] = '\0';
    if (c->kind == COL_NUMBER) {
        double v;
        memcpy(&v, (const char *)row + c->offset, sizeof v);
        return number_text(v, c->digits, buffer);
    }
    long k;
    memcpy(&k, (const char *)row + c->offset, sizeof k);
    if (k >= 0) snprintf(buffer, NUMBER_TEXT, "%ld", k);
    return buffer;
}

/* A lone number such as -3.5 is read as a number by every spreadsheet: no formula. */
static int looks_like_formula(const char *s) {
    double v;
    return *s && strchr("=+-@\t\r", *s) && !number_parse(s, &v);
}

static void csv_text(textbuf *out, const char *s) {
    size_t n = strlen(s);
    int quote = strpbrk(s, ",;\t\"\r\n") != NULL || (n && (s[0] == ' ' || s[n - 1] == ' ')) || s[0] == '#';
    if (quote) text_add(out, "\"");
    if (looks_like_formula(s)) text_add(out, "'");
    while (*s) {
        size_t run = 0, step = 1;
        while (s[run] && s[run] != '"' && (step = utf8_step(s + run)) != 0) run += step;
        text_add_n(out, s, run);
        s += run;
        if (!*s) break;
        text_add(out, *s == '"' ? "\"\"" : UTF8_REPLACEMENT);
        s++;
    }
    if (quote) text_add(out, "\"");
}

void table_to_csv(const table_view *t, textbuf *out) {
    char buffer[NUMBER_TEXT];
    for (size_t c = 0; c < t->n_columns + t->n_extra; c++) {
        if (c) text_add(out, ",");
        csv_text(out, c < t->n_columns ? t->columns[c].name : t->extra_names[c - t->n_columns]);
    }
    text_add(out, "\n");
    for (size_t r = 0; r < t->n_rows; r++) {
        const char *row = (const char *)t->rows + r * t->row_size;
        for (size_t c = 0; c < t->n_columns; c++) {
            if (c) text_add(out, ",");
            const char *s = column_cell(&t->columns[c], row, buffer);
            if (t->columns[c].kind == COL_TEXT)
                csv_text(out, s);
            else
                text_add(out, s);
        }
        for (size_t k = 0; k < t->n_extra; k++) {
            if (k || t->n_columns) text_add(out, ",");
            const char *s = t->extra_cell(row, k);
            if (s) csv_text(out, s);
        }
        text_add(out, "\n");
    }
}

static void json_cell(const column *c, const void *row, textbuf *out) {
    char buffer[NUMBER_TEXT];
    const char *s = column_cell(c, row, buffer);
    if (!s[0])
        text_add(out, "null");
    else if (c->kind == COL_TEXT)
        json_string(out, s);
    else
        text_add(out, s);
}

void table_row_to_json(const table_view *t, size_t r, textbuf *out) {
    const char *row = (const char *)t->rows + r * t->row_size;
    text_add(out, "{");
    for (size_t c = 0; c < t->n_columns; c++) {
        if (c) text_add(out, ", ");
        json_string(out, t->columns[c].name);
        text_add(out, ": ");
        json_cell(&t->columns[c], row, out);
    }
    for (size_t k = 0; k < t->n_extra; k++) {
        if (k || t->n_columns) text_add(out, ", ");
        json_string(out, t->extra_names[k]);
        text_add(out, ": ");
        const char *s = t->extra_cell(row, k);
        json_string(out, s && s[0] ? s : NULL);
    }
    text_add(out, "}");
}

static void blanks(textbuf *out, int n) {
    for (int i = 0; i < n; i++) text_add(out, " ");
}

void table_to_json(const table_view *t, int indent, textbuf *out) {
    text_add(out, "[");
    for (size_t r = 0; r < t->n_rows; r++) {
        text_add(out, r ? ",\n" : "\n");
        blanks(out, indent + 2);
        table_row_to_json(t, r, out);
    }
    if (t->n_rows) {
        text_add(out, "\n");
        blanks(out, indent);
    }
    text_add(out, "]");
}

/* Column tables: one definition of a quantity drives CSV, JSON, Table Schema, report and documentation. */
#ifndef SWARD_IO_COLUMN_H
#define SWARD_IO_COLUMN_H
#include <stddef.h>

#include "base/status.h"
#include "base/text.h"

typedef enum {
    COL_TEXT,   /* char * in the row; NULL or "" = empty cell */
    COL_NUMBER, /* double; not finite = empty cell */
    COL_COUNT   /* long; negative = empty cell */
} column_kind;

typedef struct {
    const char *name; /* as printed, with its unit: spacing_nm */
    column_kind kind;
    size_t offset;    /* of the member in the row struct */
    const char *unit; /* "nm", "1/um2", "deg", "1" for a ratio, "" for text and counts */
    int digits;       /* significant digits of COL_NUMBER */
    const char *help; /* one line: what it is and where it stops being true */
} column;

#define COL(type, member, kind, unit, digits, help) { #member, kind, offsetof(type, member), unit, digits, help }

/* A table ready to be written: fixed columns over an array of structs, then free text columns (the carried-along
 * columns of a sample sheet, verdict_<quantity>). Borrowed pointers only. */
typedef struct {
    const column *columns;
    size_t n_columns;
    const void *rows;
    size_t n_rows, row_size;
    const char *const *extra_names; /* n_extra names, after the fixed columns */
    size_t n_extra;
    const char *(*extra_cell)(const void *row, size_t k); /* text of extra column k, NULL = empty */
} table_view;

/* The cell as printed everywhere: "" when empty. Numbers through number_text. `buffer` holds NUMBER_TEXT bytes;
 * returns it or the row's own text. */
const char *column_cell(const column *c, const void *row, char *buffer);

/* RFC 4180 CSV with header, CRLF-free (LF), UTF-8. Text cells that a spreadsheet would read as a formula
 * (leading = + - @ tab CR) get a leading apostrophe; numbers never do. Invalid UTF-8 becomes U+FFFD. */
void table_to_csv(const table_view *t, textbuf *out);

/* JSON array of objects keyed by column name, same digits as the CSV, empty cell = null, text exact (no
 * apostrophe), invalid UTF-8 as U+FFFD. `indent` blanks in front of each line. */
void table_to_json(const table_view *t, int indent, textbuf *out);

/* One row as a JSON object without line breaks. */
void table_row_to_json(const table_view *t, size_t row, textbuf *out);

#endif

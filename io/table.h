/* CSV reading, RFC 4180: quotes, embedded line breaks, CRLF or LF, a byte order mark, blank lines skipped, lines
 * that begin with '#' kept apart. The separator is found in the header (comma, semicolon or tab). */
#ifndef SWARD_IO_TABLE_H
#define SWARD_IO_TABLE_H
#include <stddef.h>

#include "base/status.h"

typedef struct {
    size_t n_columns, n_rows;
    char **names;      /* [n_columns] header, blanks trimmed */
    char **cells;      /* [n_rows * n_columns], "" where missing, blanks trimmed */
    size_t *lines;     /* [n_rows] line number in the file, from 1 */
    char **comments;   /* [n_comments] text behind the leading '#', blanks trimmed */
    size_t n_comments;
    char separator;
    char *text;        /* what all strings above point into */
} csv;                 /* {0} = empty; owns everything */

/* Empty cells that a spreadsheet leaves at the end of a line, header included, are dropped.
 *   err  ST_BAD_INPUT with the line: no header, a column without a name, a name twice, a row with more cells than the
 *        header, an unclosed quote, a zero byte, a limit passed; ST_NO_MEMORY. `what` names the file in the sentence.
 *   src  RFC 4180 (2005) */
status csv_parse(const char *bytes, size_t n, const char *what, csv *out, error *e);
/* The same for a file, which the sentence names. err ST_IO it cannot be read. */
status csv_read(const char *path, csv *out, error *e);
void csv_free(csv *c);

long csv_column(const csv *c, const char *name); /* index, or -1 */
const char *csv_cell(const csv *c, size_t row, long column); /* "" for column -1 */

/* Reads a numeric column; every cell must be a number.
 *   err ST_BAD_INPUT no such column, or line, column and what was found. `out` is caller's, n_rows long. */
status csv_numbers(const csv *c, const char *name, const char *what, double *out, error *e);

#endif

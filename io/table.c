/* CSV reading after RFC 4180 (2005), tolerant where spreadsheets are: LF, CRLF or CR, semicolons or tabs, a
 * byte order mark, blank lines, empty cells behind the last column. All cells live in one copy of the text,
 * which is unquoted in place. Does not: guess encodings, types or decimal commas. */
#include "io/table.h"

#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "base/number.h"
#include "io/file.h"

/* Pointers of one table: 32 million cells, far beyond any sheet; keeps a header of 256 names with two million
 * one-letter lines from asking for gigabytes. */
#define MAX_CELLS ((size_t)32 << 20)

typedef struct {
    char *next, *end; /* unread text */
    size_t line;      /* of *next */
    char separator;
    const char *what;
    csv *out;
    size_t rows_room, comments_room;
} reader;

static int is_break(char c) { return c == '\n' || c == '\r'; }
static int is_blank(char c) { return c == ' ' || c == '\t'; }

static char *trimmed(char *from, char *to) {
    while (from < to && is_blank(*from)) from++;
    while (to > from && is_blank(to[-1])) to--;
    *to = '\0';
    return from;
}

static void skip_break(reader *r) {
    if (r->next < r->end && *r->next == '\r') {
        r->next++;
        if (r->next < r->end && *r->next == '\n') r->next++;
        r->line++;
    } else if (r->next < r->end && *r->next == '\n') {
        r->next++;
        r->line++;
    }
}

/* The character that separates most cells of the first line, quoted text aside; a comma when there is none.
 */
static char find_separator(const char *s, const char *end) {
    size_t n[3] = { 0 };
    int quoted = 0;
    for (; s < end && (quoted || !is_break(*s)); s++) {
        if (*s == '"')
            quoted = !quoted;
        else if (!quoted)
            n[0] += *s == ',', n[1] += *s == ';', n[2] += *s == '\t';
    }
    if (n[1] > n[0] && n[1] >= n[2]) return ';';
    return n[2] > n[0] ? '\t' : ',';
}

/* Takes one cell off the text, unquoted in place and terminated; *last: the record ends behind it. */
static status next_cell(reader *r, char **cell, int *last, error *e) {
    char *to = r->next, *from = to;
    size_t start = r->line;
    while (r->next < r->end && *r->next == ' ') r->next++;
    int quoted = r->next < r->end && *r->next == '"';
    if (quoted) {
        for (r->next++;; r->next++) {
            if (r->next >= r->end)
                return fail(e, ST_BAD_INPUT, "%s line %zu: a quote is opened here and never closed", r->what,
                            start);
            if (*r->next == '"') {
                if (r->next + 1 >= r->end || r->next[1] != '"') break;
                r->next++;
            } else if (*r->next == '\n' || (*r->next == '\r' && r->next + 1 < r->end && r->next[1] != '\n'))
                r->line++;
            *to++ = *r->next;
        }
        r->next++;
    }
    while (r->next < r->end && *r->next != r->separator && !is_break(*r->next)) *to++ = *r->next++;
    *last = r->next >= r->end || is_break(*r->next);
    if (*last)
        skip_break(r); /* before the terminator may overwrite the break */
    else
        r->next++;
    *cell = trimmed(from, to);
    return ST_OK;
}

static status keep_comment(reader *r, error *e) {
    char *from = ++r->next;
    while (r->next < r->end && !is_break(*r->next)) r->next++;
    char *to = r->next;
    skip_break(r);
    csv *c = r->out;
    if (c->n_comments == r->comments_room) {
        size_t room = r->comments_room ? 2 * r->comments_room : 16;
        char **comments = mem_grow(c->comments, room, sizeof *comments);
        if (!comments) return NO_MEMORY(e, r->what);
        c->comments = comments;
        r->comments_room = room;
    }
    c->comments[c->n_comments++] = trimmed(from, to);
    return ST_OK;
}

/* Passes over blank lines and comments; 1 when a record follows. */
static int at_record(reader *r, status *st, error *e) {
    while (*st == ST_OK && r->next < r->end) {
        char *p = r->next;
        while (p < r->end && is_blank(*p)) p++;
        if (p >= r->end) return 0;
        if (is_break(*p)) {
            r->next = p;
            skip_break(r);
        } else if (*r->next == '#')
            *st = keep_comment(r, e);
        else
            return 1;
    }
    return 0;
}

static status read_header(reader *r, error *e) {
    csv *c = r->out;
    size_t line = r->line;
    int last = 0;
    c->names = mem_array(LIMIT_CSV_COLUMNS, sizeof *c->names);
    if (!c->names) return NO_MEMORY(e, r->what);
    while (!last) {
        char *cell;
        status st = next_cell(r, &cell, &last, e);
        if (st != ST_OK) return st;
        if (c->n_columns == LIMIT_CSV_COLUMNS)
            return fail(e, ST_BAD_INPUT, "%s line %zu: more than %zu columns", r->what, line,
                        LIMIT_CSV_COLUMNS);
        c->names[c->n_columns++] = cell;
    }
    while (c->n_columns && !c->names[c->n_columns - 1][0]) c->n_columns--;
    if (!c->n_columns)
        return fail(e, ST_BAD_INPUT, "%s line %zu: no header; the first line must name the columns", r->what,
                    line);
    for (size_t i = 0; i < c->n_columns; i++) {
        if (!c->names[i][0])
            return fail(e, ST_BAD_INPUT, "%s line %zu: column %zu has no name", r->what, line, i + 1);
        for (size_t k = 0; k < i; k++)
            if (!strcmp(c->names[i], c->names[k]))
                return fail(e, ST_BAD_INPUT, "%s line %zu: column '%s' stands twice; rename or remove one",
                            r->what, line, c->names[i]);
    }
    return ST_OK;
}

static status make_row(reader *r, error *e) {
    csv *c = r->out;
    if (c->n_rows >= LIMIT_CSV_ROWS || (c->n_rows + 1) * c->n_columns > MAX_CELLS)
        return fail(e, ST_BAD_INPUT, "%s line %zu: too many rows; split the table", r->what, r->line);
    if (c->n_rows == r->rows_room) {
        size_t room = r->rows_room ? 2 * r->rows_room : 64;
        char **cells = mem_grow(c->cells, room * c->n_columns, sizeof *cells);
        if (!cells) return NO_MEMORY(e, r->what);
        c->cells = cells;
        size_t *lines = mem_grow(c->lines, room, sizeof *lines);
        if (!lines) return NO_MEMORY(e, r->what);
        c->lines = lines;
        r->rows_room = room;
    }
    return ST_OK;
}

static status read_row(reader *r, char *empty, error *e) {
    csv *c = r->out;
    status st = make_row(r, e);
    if (st != ST_OK) return st;
    char **row = c->cells + c->n_rows * c->n_columns;
    size_t n = 0;
    c->lines[c->n_rows] = r->line;
    for (int last = 0; !last; n++) {
        char *cell;
        st = next_cell(r, &cell, &last, e);
        if (st != ST_OK) return st;
        if (n < c->n_columns)
            row[n] = cell;
        else if (cell[0])
            return fail(e, ST_BAD_INPUT,
                        "%s line %zu: more cells than the header has columns (%zu); from '%.40s' on", r->what,
                        c->lines[c->n_rows], c->n_columns, cell);
    }
    for (; n < c->n_columns; n++) row[n] = empty;
    c->n_rows++;
    return ST_OK;
}

status csv_parse(const char *bytes, size_t n, const char *what, csv *out, error *e) {
    csv c = { 0 };
    if (n >= 3 && !memcmp(bytes, "\xef\xbb\xbf", 3)) bytes += 3, n -= 3;
    const char *zero = n ? memchr(bytes, 0, n) : NULL;
    if (zero) {
        size_t line = 1;
        for (const char *p = bytes; p < zero; p++) line += *p == '\n';
        return fail(e, ST_BAD_INPUT, "%s line %zu: a zero byte; save the file as UTF-8 text", what, line);
    }
    c.text = mem_text_n(n ? bytes : "", n);
    if (!c.text) return NO_MEMORY(e, what);
    reader r = { .next = c.text, .end = c.text + n, .line = 1, .what = what, .out = &c };
    char *empty = r.end; /* the final 0 */
    status st = ST_OK;
    if (at_record(&r, &st, e)) {
        c.separator = r.separator = find_separator(r.next, r.end);
        st = read_header(&r, e);
    } else if (st == ST_OK)
        st = fail(e, ST_BAD_INPUT, "%s: the table is empty; expected a header line", what);
    while (st == ST_OK && at_record(&r, &st, e)) st = read_row(&r, empty, e);
    if (st == ST_OK) {
        *out = c;
        c = (csv){ 0 };
    }
    csv_free(&c);
    return st;
}

status csv_read(const char *path, csv *out, error *e) {
    char *bytes = NULL;
    size_t n = 0;
    status st = file_read(path, LIMIT_TEXT_FILE_BYTES, &bytes, &n, e);
    if (st != ST_OK) return fail_within(e, st, path);
    st = csv_parse(bytes, n, path, out, e);
    free(bytes);
    return st;
}

void csv_free(csv *c) {
    free(c->names);
    free(c->cells);
    free(c->lines);
    free(c->comments);
    free(c->text);
    *c = (csv){ 0 };
}

long csv_column(const csv *c, const char *name) {
    for (size_t i = 0; i < c->n_columns; i++)
        if (!strcmp(c->names[i], name)) return (long)i;
    return -1;
}

const char *csv_cell(const csv *c, size_t row, long column) {
    return column < 0 ? "" : c->cells[row * c->n_columns + (size_t)column];
}

status csv_numbers(const csv *c, const char *name, const char *what, double *out, error *e) {
    long column = csv_column(c, name);
    if (column < 0) return fail(e, ST_BAD_INPUT, "%s: no column '%s'", what, name);
    for (size_t i = 0; i < c->n_rows; i++) {
        const char *cell = csv_cell(c, i, column);
        if (!number_parse(cell, &out[i]))
            return fail(e, ST_BAD_INPUT, "%s line %zu, %s: found '%.60s', expected a number", what,
                        c->lines[i], name, cell);
    }
    return ST_OK;
}

/* The sample sheet: read and check every row, then match rows to files. Matching sorts the files once by path
 * and once by bare name, so that large folders cost n log n. Does not decide the sample of a file without a
 * row (names.c) and opens no micrograph. */
#include "app/samplesheet.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/file.h"
#include "io/table.h"

/* clang-format off */
static const struct { const char *name; size_t offset; } text_columns[] = {
    { "sample",   offsetof(sheet_row, sample) },
    { "lot",      offsetof(sheet_row, lot) },
    { "wafer",    offsetof(sheet_row, wafer) },
    { "position", offsetof(sheet_row, position) },
};
static const struct { const char *name; size_t offset; int positive; } number_columns[] = {
    { "x_mm",        offsetof(sheet_row, x_mm),        0 },
    { "y_mm",        offsetof(sheet_row, y_mm),        0 },
    { "px_nm",       offsetof(sheet_row, px_nm),       1 },
    { "bar_nm",      offsetof(sheet_row, bar_nm),      1 },
    { "height_nm",   offsetof(sheet_row, height_nm),   1 },
    { "height_nm_u", offsetof(sheet_row, height_nm_u), 2 }, /* 0 is fine */
};
/* clang-format on */
enum {
    N_TEXT = sizeof text_columns / sizeof text_columns[0],
    N_NUMBER = sizeof number_columns / sizeof number_columns[0]
};

/* Exactly n digits as a number, or -1. */
static int digits(const char *s, int n) {
    int v = 0;
    for (int i = 0; i < n; i++) {
        if (s[i] < '0' || s[i] > '9') return -1;
        v = 10 * v + (s[i] - '0');
    }
    return v;
}

static int month_days(int year, int month) {
    static const int days[] = { 31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31 };
    int leap = (year % 4 == 0 && year % 100 != 0) || year % 400 == 0;
    return days[month - 1] + (month == 2 && leap);
}

/* Z, +hh, +hhmm, +hh:mm (or -): minutes east of Greenwich into *east; 0 when it is none of these. */
static int zone(const char *s, int *east) {
    *east = 0;
    if (strcmp(s, "Z") == 0 || strcmp(s, "z") == 0) return 1;
    if (s[0] != '+' && s[0] != '-') return 0;
    int h = digits(s + 1, 2), m = 0;
    if (h < 0 || h > 14) return 0;
    if (s[3]) m = digits(s[3] == ':' ? s + 4 : s + 3, 2);
    if (m < 0 || m > 59 || (s[3] && strlen(s) != (s[3] == ':' ? 6U : 5U))) return 0;
    *east = (s[0] == '-' ? -1 : 1) * (60 * h + m);
    return 1;
}

/* Moves the clock by less than a day. */
static void shift_minutes(int *year, int *month, int *day, int *minute_of_day, int by) {
    *minute_of_day += by;
    if (*minute_of_day < 0) {
        *minute_of_day += 1440;
        if (--*day == 0) {
            if (--*month == 0) {
                *month = 12;
                --*year;
            }
            *day = month_days(*year, *month);
        }
    } else if (*minute_of_day >= 1440) {
        *minute_of_day -= 1440;
        if (++*day > month_days(*year, *month)) {
            *day = 1;
            if (++*month == 13) {
                *month = 1;
                ++*year;
            }
        }
    }
}

int iso_time(const char *text, char out[32]) {
    const char *s = text;
    int year = digits(s, 4);
    if (year < 1900 || s[4] != '-') return 0;
    int month = digits(s + 5, 2);
    if (month < 1 || month > 12 || s[7] != '-') return 0;
    int day = digits(s + 8, 2);
    if (day < 1 || day > month_days(year, month)) return 0;
    s += 10;
    if (!*s) {
        snprintf(out, 32, "%04d-%02d-%02d", year, month, day);
        return 1;
    }
    if (*s != 'T' && *s != 't' && *s != ' ') return 0;
    int hour = digits(s + 1, 2), minute, second = 0, east = 0;
    if (hour < 0 || hour > 23 || s[3] != ':') return 0;
    minute = digits(s + 4, 2);
    if (minute < 0 || minute > 59) return 0;
    s += 6;
    if (*s == ':') {
        second = digits(s + 1, 2);
        if (second < 0 || second > 60) return 0;
        s += 3;
        if (*s == '.' || *s == ',') {
            size_t n = strspn(s + 1, "0123456789");
            if (!n) return 0;
            s += 1 + n;
        }
    }
    int zoned = *s != '\0';
    if (zoned && !zone(s, &east)) return 0;
    int at = 60 * hour + minute;
    shift_minutes(&year, &month, &day, &at, -east);
    snprintf(out, 32, "%04d-%02d-%02dT%02d:%02d:%02d%s", year, month, day, at / 60, at % 60, second,
             zoned ? "Z" : "");
    return 1;
}

static int column_is_known(const char *name) {
    if (strcmp(name, "file") == 0 || strcmp(name, "etched_at") == 0) return 1;
    for (size_t i = 0; i < N_TEXT; i++)
        if (strcmp(name, text_columns[i].name) == 0) return 1;
    for (size_t i = 0; i < N_NUMBER; i++)
        if (strcmp(name, number_columns[i].name) == 0) return 1;
    return 0;
}

static status row_numbers(const csv *c, size_t row, const char *what, sheet_row *r, error *e) {
    for (size_t i = 0; i < N_NUMBER; i++) {
        const char *cell = csv_cell(c, row, csv_column(c, number_columns[i].name));
        int rule = number_columns[i].positive;
        double v = MISSING;
        if (cell[0] && (!number_parse(cell, &v) || (rule == 1 && !(v > 0.0)) || (rule == 2 && !(v >= 0.0))))
            return fail(e, ST_BAD_INPUT,
                        "%s line %zu, %s: found '%.60s', expected a number%s; correct the sample sheet or "
                        "leave the cell empty",
                        what, c->lines[row], number_columns[i].name, cell,
                        rule == 1   ? " above 0"
                        : rule == 2 ? " of at least 0"
                                    : "");
        memcpy((char *)r + number_columns[i].offset, &v, sizeof v);
    }
    if (isfinite(r->height_nm_u) && !isfinite(r->height_nm))
        return fail(e, ST_BAD_INPUT,
                    "%s line %zu: height_nm_u stands without height_nm; add the height or leave the cell "
                    "empty",
                    what, c->lines[row]);
    return ST_OK;
}

/* A path as folder_walk gives it: '/' between parts, no leading "./". */
static char *normal_path(const char *cell) {
    while (cell[0] == '.' && (cell[1] == '/' || cell[1] == '\\')) cell += 2;
    char *s = mem_text(cell);
    for (char *q = s; q && *q; q++)
        if (*q == '\\') *q = '/';
    return s;
}

static status row_read(const csv *c, size_t row, const char *what, const sheet *s, sheet_row *r, error *e) {
    const char *file = csv_cell(c, row, csv_column(c, "file"));
    const char *time = csv_cell(c, row, csv_column(c, "etched_at"));
    char normal[32] = "";
    r->line = c->lines[row];
    if (!file[0])
        return fail(e, ST_BAD_INPUT,
                    "%s line %zu, file: the cell is empty, expected a file name; name the micrograph or "
                    "take the row out",
                    what, r->line);
    if (time[0] && !iso_time(time, normal))
        return fail(e, ST_BAD_INPUT,
                    "%s line %zu, etched_at: found '%.60s', expected a time like 2026-03-14 or "
                    "2026-03-14T09:30:00Z (ISO 8601)",
                    what, r->line, time);
    status st = row_numbers(c, row, what, r, e);
    if (st != ST_OK) return st;
    int ok = (r->file = normal_path(file)) != NULL && (r->etched_at = mem_text(normal)) != NULL;
    for (size_t i = 0; i < N_TEXT && ok; i++) {
        char *text = mem_text(csv_cell(c, row, csv_column(c, text_columns[i].name)));
        memcpy((char *)r + text_columns[i].offset, &text, sizeof text);
        ok = text != NULL;
    }
    ok = ok && (r->extra = mem_array(s->n_extra, sizeof *r->extra)) != NULL;
    for (size_t k = 0; k < s->n_extra && ok; k++)
        ok = (r->extra[k] = mem_text(csv_cell(c, row, csv_column(c, s->extra_names[k])))) != NULL;
    return ok ? ST_OK : NO_MEMORY(e, "the sample sheet");
}

/* A text and the row (or file) it belongs to; sorted by text, then number, so that results do not depend on
 * qsort. */
typedef struct {
    const char *text;
    size_t i;
} entry;

static int entry_order(const void *a, const void *b) {
    const entry *x = a, *y = b;
    int by_text = strcmp(x->text, y->text);
    return by_text ? by_text : (x->i > y->i) - (x->i < y->i);
}

/* First entry of a text in a sorted array, or NULL. */
static const entry *entry_first(const entry *a, size_t n, const char *text) {
    size_t lo = 0, hi = n;
    while (lo < hi) {
        size_t mid = lo + (hi - lo) / 2;
        if (strcmp(a[mid].text, text) < 0)
            lo = mid + 1;
        else
            hi = mid;
    }
    return lo < n && strcmp(a[lo].text, text) == 0 ? &a[lo] : NULL;
}

static status two_rows(const sheet *s, size_t a, size_t b, const char *file, error *e) {
    size_t first = s->rows[a].line, second = s->rows[b].line;
    if (first > second) {
        size_t swap = first;
        first = second;
        second = swap;
    }
    return fail(e, ST_BAD_INPUT, "%s lines %zu and %zu both describe '%.120s'; keep one of them", s->path,
                first, second, file);
}

static status check_duplicates(const sheet *s, error *e) {
    entry *a = mem_array(s->n, sizeof *a);
    status st = ST_OK;
    if (!a) return NO_MEMORY(e, "the sample sheet");
    for (size_t i = 0; i < s->n; i++) a[i] = (entry){ s->rows[i].file, i };
    qsort(a, s->n, sizeof *a, entry_order);
    for (size_t i = 1; i < s->n && st == ST_OK; i++)
        if (strcmp(a[i - 1].text, a[i].text) == 0) st = two_rows(s, a[i - 1].i, a[i].i, a[i].text, e);
    free(a);
    return st;
}

/* a[n]: sample name and row index; two rows of one sample with different heights are an error. */
static status check_heights(const sheet *s, entry *a, size_t n, error *e) {
    qsort(a, n, sizeof *a, entry_order);
    const entry *first = NULL; /* of the sample at hand, with a height */
    for (size_t i = 0; i < n; i++) {
        const sheet_row *r = &s->rows[a[i].i];
        if (first && strcmp(first->text, a[i].text) != 0) first = NULL;
        if (!isfinite(r->height_nm)) continue;
        if (!first) {
            first = &a[i];
            continue;
        }
        const sheet_row *q = &s->rows[first->i];
        char one[NUMBER_TEXT], two[NUMBER_TEXT];
        if (q->height_nm < r->height_nm || q->height_nm > r->height_nm)
            return fail(
                e, ST_BAD_INPUT,
                "%s lines %zu and %zu give the sample '%.80s' two heights (%s and %s nm); a sample has "
                "one height: correct one of them or name two samples",
                s->path, q->line, r->line, a[i].text, number_text(q->height_nm, 6, one),
                number_text(r->height_nm, 6, two));
    }
    return ST_OK;
}

static status check_named_heights(const sheet *s, error *e) {
    entry *a = mem_array(s->n, sizeof *a);
    size_t n = 0;
    if (!a) return NO_MEMORY(e, "the sample sheet");
    for (size_t i = 0; i < s->n; i++)
        if (s->rows[i].sample[0]) a[n++] = (entry){ s->rows[i].sample, i };
    status st = check_heights(s, a, n, e);
    free(a);
    return st;
}

status sheet_check_samples(const sheet *s, const sheet_row *const *rows, const char *const *samples, size_t n,
                           error *e) {
    entry *a = mem_array(n, sizeof *a);
    size_t m = 0;
    if (!a) return NO_MEMORY(e, "the sample sheet");
    for (size_t i = 0; i < n; i++)
        if (rows[i]) a[m++] = (entry){ samples[i], (size_t)(rows[i] - s->rows) };
    status st = check_heights(s, a, m, e);
    free(a);
    return st;
}

static status sheet_fill(const csv *c, const char *what, sheet *s, error *e) {
    if (csv_column(c, "file") < 0)
        return fail(e, ST_BAD_INPUT,
                    "%s: no column 'file' in the header; a sample sheet needs it (and may have sample, lot, "
                    "wafer, position, etched_at, px_nm, height_nm ...)",
                    what);
    s->path = mem_text(what);
    s->extra_names = mem_array(c->n_columns, sizeof *s->extra_names);
    s->rows = mem_array(c->n_rows, sizeof *s->rows);
    if (!s->path || !s->extra_names || !s->rows) return NO_MEMORY(e, "the sample sheet");
    for (size_t k = 0; k < c->n_columns; k++) {
        if (column_is_known(c->names[k]) || !c->names[k][0]) continue;
        s->extra_names[s->n_extra] = mem_text(c->names[k]);
        if (!s->extra_names[s->n_extra++]) return NO_MEMORY(e, "the sample sheet");
    }
    for (size_t i = 0; i < c->n_rows; i++) {
        s->n = i + 1;
        status st = row_read(c, i, what, s, &s->rows[i], e);
        if (st != ST_OK) return st;
    }
    status st = check_duplicates(s, e);
    return st == ST_OK ? check_named_heights(s, e) : st;
}

status sheet_parse(const char *bytes, size_t n, const char *what, sheet *out, error *e) {
    csv c = { 0 };
    sheet s = { 0 };
    status st = csv_parse(bytes, n, what, &c, e);
    if (st == ST_OK) st = sheet_fill(&c, what, &s, e);
    if (st == ST_OK)
        *out = s;
    else
        sheet_free(&s);
    csv_free(&c);
    return st;
}

status sheet_read(const char *path, sheet *out, error *e) {
    char *bytes = NULL;
    size_t n = 0;
    status st = input_read(path, &bytes, &n, e);
    if (st != ST_OK) return st;
    st = sheet_parse(bytes, n, path, out, e);
    free(bytes);
    return st;
}

/* The file of a row: the same relative path, else the only file of that bare name. *found 0: none. */
static status row_file(const sheet *s, const sheet_row *r, const char *const *files, const entry *paths,
                       const entry *bares, size_t n, size_t *file, int *found, error *e) {
    const entry *hit = entry_first(paths, n, r->file);
    *found = 0;
    if (!hit && !strchr(r->file, '/')) {
        hit = entry_first(bares, n, r->file);
        if (hit && hit + 1 < bares + n && strcmp(hit[1].text, r->file) == 0)
            return fail(
                e, ST_BAD_INPUT,
                "%s line %zu, file: '%.80s' fits '%.120s' and '%.120s'; write the path from the folder",
                s->path, r->line, r->file, files[hit[0].i], files[hit[1].i]);
    }
    if (hit) {
        *found = 1;
        *file = hit->i;
    }
    return ST_OK;
}

status sheet_match(sheet *s, const char *const *files, size_t n, textbuf *warnings, error *e) {
    entry *paths = mem_array(n, sizeof *paths), *bares = mem_array(n, sizeof *bares);
    size_t *of_file = mem_array(n, sizeof *of_file);
    status st = paths && bares && of_file ? ST_OK : NO_MEMORY(e, "matching the sample sheet");
    for (size_t i = 0; i < n && st == ST_OK; i++) {
        const char *slash = strrchr(files[i], '/');
        paths[i] = (entry){ files[i], i };
        bares[i] = (entry){ slash ? slash + 1 : files[i], i };
    }
    if (st == ST_OK) {
        qsort(paths, n, sizeof *paths, entry_order);
        qsort(bares, n, sizeof *bares, entry_order);
    }
    for (size_t i = 0; i < s->n && st == ST_OK; i++) {
        size_t file = 0;
        int found = 0;
        st = row_file(s, &s->rows[i], files, paths, bares, n, &file, &found, e);
        if (st != ST_OK) break;
        if (!found)
            text_addf(warnings, "%s line %zu: there is no file '%s' in the folder\n", s->path,
                      s->rows[i].line, s->rows[i].file);
        else if (of_file[file])
            st = two_rows(s, of_file[file] - 1, i, files[file], e);
        else
            of_file[file] = i + 1;
    }
    free(paths);
    free(bares);
    if (st != ST_OK) {
        free(of_file);
        return st;
    }
    free(s->of_file);
    s->of_file = of_file;
    s->n_files = n;
    return ST_OK;
}

const sheet_row *sheet_row_of(const sheet *s, size_t i) {
    return i < s->n_files && s->of_file[i] ? &s->rows[s->of_file[i] - 1] : NULL;
}

void sheet_free(sheet *s) {
    for (size_t i = 0; i < s->n; i++) {
        sheet_row *r = &s->rows[i];
        char *owned[] = { r->file, r->sample, r->lot, r->wafer, r->position, r->etched_at };
        for (size_t k = 0; k < sizeof owned / sizeof owned[0]; k++) free(owned[k]);
        for (size_t k = 0; k < s->n_extra && r->extra; k++) free(r->extra[k]);
        free(r->extra);
    }
    for (size_t k = 0; k < s->n_extra; k++) free(s->extra_names[k]);
    free(s->path);
    free(s->rows);
    free(s->extra_names);
    free(s->of_file);
    *s = (sheet){ 0 };
}

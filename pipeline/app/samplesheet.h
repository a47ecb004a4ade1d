/* The sample sheet: which file belongs to which sample and what else is known of it. CSV, columns as in the
 * README; every other column is carried along. */
#ifndef SWARD_APP_SAMPLESHEET_H
#define SWARD_APP_SAMPLESHEET_H
#include <stddef.h>

#include "base/status.h"
#include "base/text.h"

typedef struct {
    size_t line; /* of the sheet */
    char *file;  /* as written: path relative to the folder, or a bare name */
    char *sample, *lot, *wafer, *position, *etched_at; /* "" where not said; etched_at normal ISO 8601 */
    double x_mm, y_mm, px_nm, bar_nm, height_nm, height_nm_u; /* NAN where not said */
    char **extra; /* [sheet.n_extra] text of the carried-along columns, "" where empty */
} sheet_row;      /* all owned by the sheet */

typedef struct {
    char *path;
    sheet_row *rows; /* in the order of the file */
    size_t n;
    char **extra_names; /* header of the carried-along columns, [n_extra] */
    size_t n_extra;
    size_t *of_file; /* after sheet_match: [n_files] row + 1 of each file, 0 = none */
    size_t n_files;
} sheet; /* {0} = empty: no sheet */

/* Reads and checks every row on its own.
 *   err  ST_BAD_INPUT with file, line, column, found and expected: no column `file`, an empty file cell,
 * numbers not above 0, a time that is not ISO 8601, the same file in two rows, two heights in one sample
 * (both lines); there is no such file; ST_IO it cannot be read; ST_NO_MEMORY. out untouched on failure */
status sheet_read(const char *path, sheet *out, error *e);
status sheet_parse(const char *bytes, size_t n, const char *what, sheet *out, error *e);

/* Finds the row of each file of the folder.
 *   in   files[n] relative paths with '/'
 *   out  s->of_file; warnings: a line for each row whose file does not exist
 *   err  ST_BAD_INPUT a bare name that fits two files (both named), two rows for one file (both lines);
 * ST_NO_MEMORY */
status sheet_match(sheet *s, const char *const *files, size_t n, textbuf *warnings, error *e);

/* Two heights in one sample, once every file has its sample (sheet_read sees only the samples the sheet
 * names).
 *   in   rows[n] the row of each file, NULL: none; samples[n] the sample of each file
 *   err  ST_BAD_INPUT both lines and heights; ST_NO_MEMORY */
status sheet_check_samples(const sheet *s, const sheet_row *const *rows, const char *const *samples, size_t n,
                           error *e);

/* The row of files[i] of the last sheet_match, or NULL. */
const sheet_row *sheet_row_of(const sheet *s, size_t i);

void sheet_free(sheet *s);

/* 1 when the text is a date or a date and time of ISO 8601 (2026-03-14, 2026-03-14T09:30, ...:05, .25, Z or
 * +01:00; a blank for the T); the normal form ("2026-03-14T09:30:05Z", UTC where a zone was said) goes into
 * out[32]. */
int iso_time(const char *text, char out[32]);

#endif

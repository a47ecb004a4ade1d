/* Measured reflectance from a spectrometer's text file, whatever dialect it is written in. */
#ifndef SWARD_APP_SPECTRUM_FILE_H
#define SWARD_APP_SPECTRUM_FILE_H
#include <stddef.h>

#include "base/status.h"

typedef struct {
    size_t n;
    double *wavelength_nm, *R; /* [n] ascending, R as a share; owned */
    char note[200]; /* how it was read: "percent, um, descending, 3 duplicates averaged"; "" plain */
} spectrum;         /* {0} = empty */

/* Lines of an instrument's preamble are passed over until the first line that begins with a number; the last line
 * before it is the header. Columns: the one whose name speaks of wavelength and the one that speaks of reflectance; in a
 * file of two columns the first and the second. Separators: semicolon, tab, comma or blanks; a decimal comma with all but
 * comma. Wavelengths all below 10 are um. Percent where the header says so or a value passes 1.5. Any order; equal
 * wavelengths are averaged; lines whose reflectance is blank, a dash or NaN are left out and counted in the note.
 *   err  ST_BAD_INPUT with the line: no numbers, no telling columns, transmittance or wave numbers, a cell that is no
 *        number, a wavelength outside 100 to 20000 nm, a reflectance outside -2 % to 105 %, a share between 1.05 and 1.5
 *        (share or percent?), equal wavelengths more than 5 % apart in R, commas that might separate or be decimal, fewer
 *        than 2 wavelengths, a zero byte (UTF-16); ST_NO_MEMORY */
status spectrum_parse(const char *bytes, size_t n, const char *what, spectrum *out, error *e);
/* The same for a file. err ST_BAD_INPUT no such file; ST_IO it cannot be read */
status spectrum_read(const char *path, spectrum *out, error *e);
void spectrum_free(spectrum *s);

#endif

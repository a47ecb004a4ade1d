/* Evenness of each wafer of a run, from the samples whose place on it the sheet says. */
#ifndef SWARD_APP_WAFERS_H
#define SWARD_APP_WAFERS_H
#include "base/text.h"
#include "report/rows.h"

/* Spacing, density and predicted reflectance of each wafer (lot and wafer the same, wafer named) with at least 3 placed
 * samples.
 *   in   rows[n], x_mm[n], y_mm[n] from the middle of the wafer, NAN unknown
 *   out  objects: a JSON array with one object per wafer and quantity; lines: a sentence on the spacing of each wafer, with line
 *        breaks; a failed append stays in them
 *   err  ST_NO_MEMORY */
status wafers_describe(const sample_row *rows, const double *x_mm, const double *y_mm, size_t n, textbuf *objects, textbuf *lines,
                       error *e);

#endif

/* Curves and feature sizes of a micrograph, read back from profiles/<stem>.csv and features/<stem>.csv of a run, so that the
 * page and `sward figure` draw exactly what the tables hold. */
#ifndef SWARD_REPORT_CURVES_H
#define SWARD_REPORT_CURVES_H
#include <stddef.h>

#include "base/status.h"

typedef struct {
    double *x, *y; /* [n], owned */
    size_t n;
} xy_curve; /* {0} = empty */

/* The rows of one curve ("acf_curvature") whose x is in nm or 1/um.
 *   in   dir output folder of a run; stem without kind and ending
 *   out  free with xy_curve_free; n = 0 where the micrograph has no pixel size or no such curve
 *   err  ST_IO no such file; ST_BAD_INPUT not such a table; ST_NO_MEMORY */
status curve_read(const char *dir, const char *stem, const char *name, xy_curve *out, error *e);

/* Equivalent circular diameters of the cells (x, nm) and their border weights (y), cells that the frame cuts (weight 0) left
 * out. Err as curve_read. */
status sizes_read(const char *dir, const char *stem, xy_curve *out, error *e);

/* Centres of the features, px from the top left of the plane: those that count for the density (counted 1) or the others (0).
 * Err as curve_read. */
status centres_read(const char *dir, const char *stem, int counted, xy_curve *out, error *e);

/* Share of the features (weighted by y) in each of n bins from lo, `step` wide; sums to 1 where all lie inside. */
void sizes_histogram(const xy_curve *sizes, double lo, double step, size_t n, double *share);

/* A round bin width (1, 2, 5 x 10^k) that divides the range into at most `most` bins; *lo is moved to its multiple. */
double bin_width(double *lo, double hi, size_t most);

void xy_curve_free(xy_curve *c);

#endif

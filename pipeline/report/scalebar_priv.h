/* Scale bars of a round length. Not for other rooms. */
#ifndef SWARD_REPORT_SCALEBAR_PRIV_H
#define SWARD_REPORT_SCALEBAR_PRIV_H
#include <stddef.h>

#include "report/pen_priv.h"

/* The largest of 1, 2, 5 x 10^k that does not exceed `most`. */
double scalebar_length(double most);
/* "500 nm", "2 um" with a real micro sign, "1 mm". */
void scalebar_label(double length_nm, char *out, size_t room);
/* The bar with end ticks in the pen's ink, about a letter high. Its ends are the outer edges of the ticks: it is `length` long. */
void scalebar_draw(pen *p, double x, double y, double length, double em);

#endif

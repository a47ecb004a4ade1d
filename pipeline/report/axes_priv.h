/* Ranges, ticks and scales of a `plot`, shared by everything that draws one. Not for other rooms. */
#ifndef SWARD_REPORT_AXES_PRIV_H
#define SWARD_REPORT_AXES_PRIV_H
#include <stddef.h>

#include "report/plot.h"

typedef struct {
    double left, right, top, bottom; /* of the plotting area, in the units of the drawing, y down */
    double x_lo, x_hi, y_lo, y_hi;   /* shown range; y in log10 when log_y */
    int log_y;
} axes;

/* Finds the shown ranges; the frame is the caller's. 0: there is no value to draw. */
int axes_find(const plot *p, axes *a);

/* Places in the drawing. y is clamped to the frame, so that a value beyond a capped axis runs along its edge. */
double axes_x(const axes *a, double x);
double axes_y(const axes *a, double y);
int axes_below(const axes *a, double y); /* 1: lies under the axis */

enum { AXES_TICKS = 16 };
/* Ticks where there is room for about so many labels; how many they are. */
size_t axes_x_ticks(const axes *a, double room, double tick[AXES_TICKS]);
size_t axes_y_ticks(const axes *a, double room, double tick[AXES_TICKS]);

/* 1: both ends of the band are known at point i of a series that has one. */
int axes_in_band(const plot_series *s, size_t i);

/* Width of the bins of PLOT_STEPS. */
double axes_bin_step(const plot_series *s);

#endif

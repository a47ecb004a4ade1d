/* The first scale of a texture when the plain autocorrelation does not show it. */
#ifndef SWARD_METRICS_SCALE_H
#define SWARD_METRICS_SCALE_H
#include "metrics/spacing.h"

/* A weakly ordered texture, or one with islands, voids or a broad mixture of sizes, has brightness that varies over
 * many spacings; its plain autocorrelation then has no significant trough although the spacing is plain to see. This
 * looks at the picture without what is wider than a length, for a row of lengths, and takes the length at which the
 * trough is deepest.
 *   in   f flattened; min_z significance that is asked for
 *   out  first_minimum_px, scale_px and z of the trough; NAN, NAN, 0 when there is none
 *   err  ST_NO_MEMORY */
status scale_without_background(const float *f, size_t nx, size_t ny, double min_z, first_scale *out,
                                error *e);

#endif

/* Numbers of a field from its features. */
#ifndef SWARD_METRICS_STATISTICS_H
#define SWARD_METRICS_STATISTICS_H
#include "metrics/detect.h"
#include "metrics/masked.h"

/* From t->features (centres, cells, tops): density, spacing_hex, nn_px, nn_mean, clark_evans, size_*,
 * top_d50, lognormal_ad, n_features, with u_sampling. in d the detection they come from, h the holes of the field. err ST_NO_MEMORY */
status statistics_fill(texture *t, size_t nx, size_t ny, const detection *d, const hole *h, error *e);

/* What the order of the texture and the detector say about u: the method parts of every uncertainty of t (how far each
 * number is off as an estimate of its definition, found on rendered micrographs of known truth; of the count also how much it
 * depends on the detector's criterion), and the sampling part of spacing_acf. */
void statistics_uncertainty(texture *t, const detection *d);

/* Share of the field above a level of the flattened picture: `level` of the way from its 1 % to its 99 %
 * quantile. A figure for comparing like micrographs, never a solid share.
 *   in   mask pixels that do not count, or NULL; unit_px length over which pixels are alike (the spacing), NAN: a sixteenth of the shorter side
 *   err  ST_NO_MEMORY */
status bright_share(const float *f, const unsigned char *mask, size_t nx, size_t ny, double level, double unit_px, measured *out,
                    error *e);

#endif

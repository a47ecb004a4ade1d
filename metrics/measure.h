/* Everything for one plane. Single-threaded and pure: same input, same bits. */
#ifndef SWARD_METRICS_MEASURE_H
#define SWARD_METRICS_MEASURE_H
#include "base/status.h"
#include "metrics/texture.h"

typedef struct {
    relief relief;             /* given, or RELIEF_AUTO */
    /* fitness limits; below/above: excluded, the second figure: flagged */
    double min_px_per_spacing, warn_px_per_spacing; /* 8, 12 */
    double min_features, warn_features;             /* 50, 200 */
    double max_blur, warn_blur;                     /* sd of the blur / spacing: 0.25, 0.12 */
    double max_clipped, warn_clipped;               /* share of the plane: documented in fitness.h */
    double max_noise, warn_noise;                   /* noise sd / texture sd at 24 px per spacing; scales with it */
    double max_streaks, warn_streaks;               /* see fitness.h */
    double max_stretch, warn_stretch;               /* ratio: see fitness.h */
    double max_jitter, warn_jitter;                 /* rms shift between neighbouring scan lines / spacing: 0.15, 0.05 */
    double warn_astigmatism;                        /* sd of a blur in one direction only / spacing: 0.07 */
    double scan_axis_deg;                           /* a stretch so near a scan axis is called drift: 5 */
    double min_order, warn_order;                   /* Clark-Evans index: 1.3 (only where there is no ring), 1.5 */
    double warn_contradiction;                      /* |spacing_acf / spacing_hex - 1|: 0.15 */
    double warn_size_gsd;                           /* geometric sd of the cell diameters: 1.35 */
    double warn_second;                             /* a second spacing at least so many times larger or smaller: 1.4 */
    double bright_level;       /* level of bright_share: fraction of the way from the 1 % to the 99 % grey quantile */
    double min_ring_z;         /* significance of the ring: 6 */
} measure_options;

measure_options measure_defaults(void);

/* Measures a plane. A micrograph that is not fit still returns ST_OK with its numbers as far as they exist and the
 * reasons set.
 *   own  caller frees out with texture_free
 *   err  ST_BAD_INPUT smaller than LIMIT_MIN_SIDE, px NULL; ST_NO_MEMORY. out untouched on failure */
status measure_plane(const plane *p, const measure_options *o, texture *out, error *e);

#endif

/* Can this micrograph carry the numbers? Measures of blur, streaks, clipping, drift; the limits live in
 * measure_options and are justified in the .c. */
#ifndef SWARD_METRICS_FITNESS_H
#define SWARD_METRICS_FITNESS_H
#include "metrics/measure.h"
#include "metrics/spectrum.h"

typedef struct {
    double blur_sd_px;     /* from the noise-corrected end of the spectrum; NAN unknown */
    double noise_sd;       /* grey */
    double texture_sd;     /* grey, noise removed */
    double streaks;        /* row-mean variance beyond what the texture explains, / texture variance */
    double line_jitter_px; /* rms shift between neighbouring lines; NAN unknown */
} sharpness;
/* f flattened, d_px the scale (NAN unknown). err ST_NO_MEMORY */
status fitness_look(const float *f, const plane *p, double d_px, sharpness *out, error *e);

/* Sets reasons and flags of t from its numbers and the limits. */
void fitness_judge(const sharpness *s, const plane *p, const measure_options *o, texture *t);

#endif

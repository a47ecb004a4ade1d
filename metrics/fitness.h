/* Can this micrograph carry the numbers? Measures of blur, noise, streaks and line jitter, and the verdict.
 * The limits live in measure_options; their defaults are set and justified in the .c. A refused micrograph costs the user a
 * sample, a flagged one a glance: limits of exclusion are wide, those of remarks narrow. */
#ifndef SWARD_METRICS_FITNESS_H
#define SWARD_METRICS_FITNESS_H
#include "metrics/measure.h"
#include "metrics/smear.h"
#include "metrics/spectrum.h"

typedef struct {
    /* sd of the blur that must be undone for the noise-corrected spectrum to fall like that of a surface with
     * creases; 0 none, NAN unknown (no scale, or nothing above the noise) */
    double blur_sd_px;
    double detail; /* finest spatial frequency at which the texture equals the noise, in 1 / spacing; NAN unknown */
    double finest_per_px; /* the same without a spacing, 1/px */
    double ring_over_noise; /* ln of the power at the ring / noise */
    /* grey; level of the end of the spectrum, or Immerkaer's when that is lower */
    double noise_sd;
    double texture_sd; /* grey, noise removed */
    /* variance of what runs along the scan lines beyond the texture's own / texture variance */
    double streaks;
    double second_px; /* spacing of a second population; NAN none */
    /* rms shift between neighbouring lines beyond that between columns; NAN unknown */
    double line_jitter_px;
    fine_anisotropy fine; /* from which astigmatism follows once the stretch is known */
} sharpness;

sharpness sharpness_unknown(void);

/* in f flattened, d_px the scale (NAN unknown); out also the radial power spectrum behind it, psd may be NULL (caller frees
 * psd->points). err ST_NO_MEMORY, out and psd untouched */
status fitness_look(const float *f, const plane *p, double d_px, sharpness *out, curve *psd, error *e);

/* Sets reasons, flags, sharpness, noise_rel and second_spacing_px of t from s, its numbers and the limits.
 * Adds to what is set already. */
void fitness_judge(const sharpness *s, const plane *p, const measure_options *o, texture *t);

#endif

/* Monte Carlo of a prediction: the distributions of the inputs carried through to the reflectance. */
#ifndef SWARD_LINK_TRIALS_H
#define SWARD_LINK_TRIALS_H
#include <stdint.h>

#include "link/predict.h"

typedef enum {
    INPUT_HEIGHT,
    INPUT_SHAPE,
    INPUT_TIP,
    INPUT_COVERAGE,
    INPUT_SPREAD,
    INPUT_LEVEL,
    INPUT_MIXING,
    INPUT_SPACING,
    INPUT_MODEL,
    INPUTS
} input_kind;
const char *input_name(input_kind k); /* height shape tip coverage height_spread level mixing spacing model */

/* Batches of trials are added until the ends of the weighted interval are known to the tolerance, or to a twentieth of
 * the sd where that is more (about the second digit of u, JCGM 101, 7.9.2). */
typedef struct {
    double tolerance; /* absolute R */
    uint64_t seed;    /* same seed, same result */
} trial_options;
trial_options trial_defaults(void); /* 0.0005, seed 1 */

typedef struct {
    double mean, sd, median, lo, hi; /* weighted; lo, hi: 2.5 and 97.5 % */
    double sd_of[INPUTS];            /* sd with only this input free */
    int varied[INPUTS];              /* 1: this input was uncertain */
    size_t trials;
    double tolerance; /* that was asked of the ends */
    int settled;      /* 0: it was not met with the most trials */
    size_t n;
    double *wavelength_nm, *R_lo, *R_hi; /* [n] spectrum on the 10 nm grid, 2.5 and 97.5 %; owned */
} distribution;

/* Distribution of the true reflectance of the front surface, as far as the inputs and the known error of the model tell.
 *   in   as predict(): standard uncertainties of height, spacing, exponent, flat top or tip radius, coverage, spread.
 *        Alternatives are drawn with equal chances: the shapes of a texture whose shape nobody stated; with a height
 *        spread, level floor or level tips; the two-dimensional rules Bruggeman and Maxwell Garnett, except where the
 *        model's error was calculated case by case (a rule's error is then known, see interval.c)
 *   err  ST_NO_RESULT planar, refused, by facets, without a spacing or with a measured profile: nothing to vary;
 *        as predict()
 *   src  JCGM 101:2008 (propagation of distributions, 7.9 adaptive procedure) */
status predict_trials(const surface_input *in, const optics_setup *o, const trial_options *t,
                      distribution *out, error *e);
void distribution_free(distribution *d);

#endif

/* A calibrated link as it is used: what a fit to measured spectra says of the height and the shape of a further sample
 * of the same recipe, and how good that is. Lengths in nm, reflectances as shares. */
#ifndef SWARD_LINK_CALIBRATION_H
#define SWARD_LINK_CALIBRATION_H
#include "link/predict.h"

/* Within one recipe height and spacing grow together: the link is a mean aspect (height / spacing), its scatter the
 * uncertainty of a further sample. */
typedef struct {
    size_t n_samples;                    /* 0: no calibration */
    double spacing_lo_nm, spacing_hi_nm; /* of the samples it was made on */
    double spacing_u_nm;                 /* largest standard uncertainty of theirs */
    double height_lo_nm, height_hi_nm;
    double aspect;         /* mean */
    double aspect_u;       /* standard uncertainty of that mean from the fit alone */
    double aspect_scatter; /* sd over the samples; NAN for one sample */
    double exponent, exponent_u, height_spread, coverage, offset;
    double residual_rms; /* of the fit */
    double left_out,
        left_out_spectral;         /* rms error of weighted R, and over the spectrum, of samples left out; NAN
                                             below three samples */
    double band_lo_nm, band_hi_nm; /* of the fit */
    double height_by_size;         /* as it was in the fit */
    int level_at_tips, pores;
    mixing mixing;
} calibration;

/* Height of a sample: its own of the sheet, else the calibrated aspect x spacing, else what link_height() finds. With
 * a calibration (not NULL, n_samples > 0) the shape in *o becomes the fitted one, whoever gives the height.
 *   out  height_nm; its u holds the scatter of the aspect, the fit and the spacing; *src; *o
 *   err  as link_height() */
status calibrated_height(const calibration *c, quantity sheet, link_options *o, quantity spacing_nm,
                         quantity *height_nm, height_source *src, error *e);

/* 1 when the sample lies outside what was calibrated: its spacing beyond the range by more than twice the combined
 * uncertainty, or pores against hillocks. */
int calibration_outside(const calibration *c, quantity spacing_nm, int pores);

/* Relative standard uncertainty of a further sample's aspect from the scatter of n. One sample says nothing of it: then
 * 30 %, as for an aspect nobody measured. Few samples: times the Student factor of n - 1 over the normal one, but not
 * beyond those 30 % unless the scatter itself is. */
double calibration_scatter_rel(const calibration *c);

/* Opens the interval of a prediction whose height came from the calibration to the error of samples left out, where
 * that is larger, and adds to its note on how many samples, which range and which age (days, NAN unknown) it rests. */
void calibration_apply(const calibration *c, int height_from_it, quantity spacing_nm, int pores,
                       double age_days, prediction *p);

/* Student's t for 95 % (two-sided), degrees of freedom of at least 1. */
double student_95(size_t freedom);

#endif

/* Calibration of the link: height and shape of textures from their measured reflectance. Lengths in nm, reflectances as
 * shares. */
#ifndef SWARD_LINK_CALIBRATE_H
#define SWARD_LINK_CALIBRATE_H
#include "base/text.h"
#include "link/calibration.h"

typedef enum { FIT_HEIGHT, FIT_EXPONENT, FIT_SPREAD, FIT_FLOOR, FIT_OFFSET, FIT_KINDS } fit_kind;
const char *fit_kind_name(fit_kind k); /* height exponent spread floor offset */
/* "height,exponent,offset" -> bits 1 << kind. err ST_BAD_INPUT an unknown or repeated word, nothing at all */
status fit_kinds_parse(const char *list, unsigned *bits, error *e);

typedef struct {
    const char *name;
    const double *wavelength_nm, *R; /* [n] ascending, measured */
    size_t n;
    quantity spacing_nm; /* value NAN: unknown */
    quantity height_nm;  /* used where the height is not free; value NAN: unknown */
} fit_sample;

typedef struct {
    unsigned free;     /* bits 1 << kind; default height, exponent, offset */
    link_options link; /* values of what is not free */
    int pores;
    double band_lo_nm,
        band_hi_nm; /* values outside are not used; 300 to 1000: light from the rear is not modelled */
    double noise;   /* standard, of one measured value; NAN: estimated from neighbouring values */
} fit_options;
fit_options fit_defaults(void);

/* One fitted number. */
typedef struct {
    fit_kind kind;
    size_t sample;   /* of a height; 0 for what all samples share */
    double value, u; /* u: standard; INFINITY where the data say nothing, 0 at an end of its range */
    int at_bound;    /* -1 lower end, 1 upper end of the range */
} fit_number;

typedef struct {
    quantity height_nm;
    double aspect;                             /* NAN: no spacing */
    size_t n;                                  /* values in the band, after averaging */
    double *wavelength_nm, *measured, *fitted; /* [n] fitted holds the offset */
    double residual_rms;
    double weighted; /* photon-weighted measured R over lo_nm..hi_nm, offset taken off; NAN outside the sun */
    double lo_nm, hi_nm;
    double left_out; /* predicted from the other samples minus measured; NAN below three samples */
} fit_curve;

typedef struct {
    size_t n_samples, n_numbers;
    fit_curve *curves;                /* [n_samples] */
    fit_number *numbers;              /* [n_numbers] heights first, then exponent, spread, floor, offset */
    double *covariance, *correlation; /* [n_numbers * n_numbers] */
    link_options link;                /* shape as fitted */
    double offset;
    double noise, residual_rms; /* of one averaged value */
    double reduced;             /* chi-squared over the degrees of freedom, against the noise */
    double neighbours, widened; /* correlation of neighbouring residuals; factor on every u because of it */
    size_t freedom, n_starts, n_arrived;
    int determined;        /* 1: every free number is told by the data */
    calibration link_made; /* n_samples 0 where a spacing is missing */
    textbuf remarks;       /* sentences, one a line: what the data cannot tell, what else to know */
} fit_result;              /* {0} = empty */

/* Joint fit of all samples: a height each, the rest common.
 *   out  owned by the caller (fit_free)
 *   err  ST_BAD_INPUT no samples, none free, too few values in the band, a height neither free nor given, a wavelength
 *        outside a table; ST_NO_RESULT no start arrived at a minimum; ST_NO_MEMORY
 *   src  least squares: leastsq.h; correlated residuals: Bayley G.V., Hammersley J.M. (1946), Suppl. J. R. Stat. Soc. 8,
 *        184 (from memory) */
status fit_spectra(const fit_sample *samples, size_t n, const fit_options *o, const optics_setup *optics,
                   fit_result *out, error *e);
void fit_free(fit_result *r);

#endif

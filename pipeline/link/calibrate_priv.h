/* What the files of the calibration share: the averaged data and the model behind them. */
#ifndef SWARD_LINK_CALIBRATE_PRIV_H
#define SWARD_LINK_CALIBRATE_PRIV_H
#include "link/calibrate.h"
#include "link/leastsq.h"

/* One sample's values in the band, averaged in groups. */
typedef struct {
    const fit_sample *from;
    size_t n, first;           /* first: of its residuals in the joint vector */
    double *wavelength_nm, *R; /* [n] */
    double noise;              /* of one averaged value, NAN unknown */
    double per_group;          /* measured values in one group, mean */
} fit_data;

/* A joint fit over some samples. Parameters: a height per sample (when free), then the shared ones that are free. */
typedef struct {
    const fit_options *o;
    const optics_setup *optics;
    fit_data *data;    /* [n] */
    size_t n, m;       /* samples, residuals */
    double tolerance;  /* of the reflectance */
    double *up, *down; /* [longest sample] work */
} fit_model;

/* Numbers that describe one sample's spectrum. */
typedef struct {
    double value[FIT_KINDS];
} fit_point;

extern const double fit_lower[FIT_KINDS], fit_upper[FIT_KINDS], fit_step[FIT_KINDS];

static inline int fit_is_free(const fit_options *o, fit_kind k) { return (int)(o->free >> k & 1u); }
size_t fit_parameters(const fit_model *f);
/* Index of a parameter in x, or -1 when it is not free. */
long fit_index(const fit_model *f, fit_kind k, size_t sample);
fit_point fit_point_at(const fit_model *f, const double *x, size_t sample);

/* Averages groups of values closer than 5 nm in the band; estimates the noise. err ST_BAD_INPUT too few values */
status fit_data_make(const fit_sample *s, const fit_options *o, fit_data *out, error *e);
void fit_data_free(fit_data *d);

/* R of the model with the offset, at n wavelengths. err as link_profile, reflectance */
status fit_spectrum(const fit_model *f, const fit_point *p, double spacing_nm, const double *wavelength_nm,
                    size_t n, double *R, error *e);
/* The callbacks of least_squares; user is a fit_model. */
status fit_residuals(void *user, const double *x, double *r, error *e);
status fit_jacobian(void *user, const double *x, double *j, error *e);

/* starts[FIT_STARTS * parameters]: minima of a scan over height and exponent; *n of them. */
enum { FIT_STARTS = 12 };
status fit_starts(const fit_model *f, double *starts, size_t *n, error *e);

/* The sentences of a fit that stands; fills remarks and determined. */
void fit_remarks(const fit_sample *samples, const fit_options *o, const optics_setup *optics,
                 const least_fit *fit, fit_result *r);

#endif

/* One prediction with its interval: the stage "predict" for a sample or for numbers from the command line. */
#ifndef SWARD_LINK_PREDICT_H
#define SWARD_LINK_PREDICT_H
#include "link/surface.h"
#include "optics/escape.h"
#include "optics/reflectance.h"
#include "optics/trust.h"

/* Which model: the graded index for textures finer than the waves, geometric optics for large steep facets. */
typedef enum { OPTICS_GRADED, OPTICS_FACETS, OPTICS_AUTO } optics_choice;

/* The optical set-up; borrowed pointers. */
typedef struct {
    const material *ambient, *substrate, *air;
    const material *nitride;       /* of the coated reference, 75 nm */
    laminate front;
    const layer *coatings;
    size_t n_coatings;
    mixing mixing;
    reflect_options reflect;
    const sun *sun;
    double band_lo_nm, band_hi_nm; /* 300..1200 */
    double step_nm;                /* grid of the spectrum, 1 */
    int plain;                     /* 1: no interval is wanted, for speed; lo and hi stay NAN */
    optics_choice model;           /* auto: graded inside its validity, else facets where steep enough, else refused */
    rear_side rear;                /* thickness 0: front surface only */
    double facet_angle_deg;        /* of the facets; not above 0: from height and spacing (optics/facets.h) */
} optics_setup;

typedef struct {
    quantity spacing_nm;           /* value NAN: unknown (measured profile): no validity statement */
    quantity height_nm;            /* 0: planar */
    int pores;
    const double *cell_area_nm2;
    size_t n_cells;
    const profile *measured;       /* non-NULL replaces height and shape */
    link_options link;
} surface_input;

typedef struct {
    size_t n;
    double *wavelength_nm, *R, *R_lo, *R_hi; /* [n] owned; lo/hi 95 % interval; NAN when no model error is known */
    double weighted, weighted_lo, weighted_hi; /* NAN when refused */
    double current_loss_mA_cm2;
    double polished, coated;       /* references, same ambient, angle, polarization and rear */
    order_shares shares;           /* NAN when spacing is unknown */
    double rear_escape;            /* of the weighted value, from the rear; NAN: front surface only */
    double area_ratio, aspect;
    const char *model;             /* "graded", "facets", or "none" when refused */
    char note[960];                /* which model and why, what the interval holds, what is outside validity */
    /* budget of the weighted reflectance, standard uncertainties, absolute */
    double u_height, u_shape, u_tip, u_spread, u_coverage, u_spacing, u_mixing, u_model, model_bias;
    size_t slabs;
    int refused;                   /* 1: no model serves, the note says why */
} prediction;

/*   err as in reflectance(); a texture outside the model is no error but `refused`. */
status predict(const surface_input *in, const optics_setup *o, prediction *out, error *e);
void prediction_free(prediction *p);

#endif

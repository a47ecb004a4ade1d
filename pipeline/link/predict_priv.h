/* What predict.c and interval.c share: one texture under variation, on one grid. */
#ifndef SWARD_LINK_PREDICT_PRIV_H
#define SWARD_LINK_PREDICT_PRIV_H
#include "base/text.h"
#include "link/predict.h"

/* The texture as predicted, or with one input moved. */
typedef struct {
    double height_nm, spacing_nm;
    link_options link; /* of the shape only */
    mixing mixing;
} variant;
variant variant_central(const surface_input *in, const optics_setup *o);

/* An ascending grid from lo to hi, both included. */
typedef struct {
    size_t n;
    double *wavelength_nm;
    double tolerance; /* of reflectance on it */
} grid;

/* From lo to hi in steps, the last one shorter. err ST_NO_MEMORY; free(g->wavelength_nm) */
status grid_make(double lo, double hi, double step, double tolerance, grid *g, error *e);
/* The grid of the variations. */
status grid_coarse(const optics_setup *o, grid *g, error *e);

/* R of a variant on a grid. slabs may be NULL. err as in link_profile(), reflectance() */
status variant_spectrum(const surface_input *in, const optics_setup *o, const variant *v, const grid *g, double *R,
                        size_t *slabs, error *e);
/* R of the polished substrate in an ambient; in_air: without the sample's ambient or laminate. */
status polished_spectrum(const optics_setup *o, int in_air, const grid *g, double *R, error *e);
status photon_mean(const optics_setup *o, const grid *g, const double *y, double *mean, error *e);

/* Which model serves this texture. */
typedef struct {
    double beyond;    /* share of the photons with spacing / wavelength above 2.5: no table of the model's error */
    int facets;       /* 1: geometric optics, else the graded index */
    int refused;      /* 1: neither */
    double angle_deg; /* of the facets */
    const char *why;  /* why facets do not serve, "" where they were not needed */
} route;
/* err ST_BAD_INPUT from the sun's band */
status route_choose(const surface_input *in, const optics_setup *o, const variant *v, route *out, error *e);

/* Spectrum, weighted value, interval and budget of *out by geometric optics, on its own grid. err as reflectance() */
status facets_fill(const surface_input *in, const optics_setup *o, const route *r, const grid *g, prediction *out,
                   error *e);

/* The sentences on the choice. */
void route_say(const route *r, const surface_input *in, const optics_setup *o, textbuf *t);

/* Adds what returns from the rear to spectrum, interval, weighted value and current; nothing without a rear.
 * err as reflectance() */
status rear_add(const surface_input *in, const optics_setup *o, const variant *v, const grid *fine, int facets,
                prediction *out, error *e);
/* The same for a flat surface with planar coatings. */
status rear_add_flat(const optics_setup *o, const layer *film, size_t n_films, const grid *g, double *R, error *e);
/* The sentence on it: included or not. */
void rear_say(const optics_setup *o, const prediction *p, textbuf *t);

/* Current that a spectrum costs, by photon flux. */
status current_of(const optics_setup *o, const grid *g, const double *R, double *mA_cm2, error *e);

/* A number for a sentence: two digits, but never fewer than stand before the point; shown[NUMBER_TEXT]. */
const char *rough_text(double v, char *shown);

/* Index of the ambient the texture lies in, and the angle there (a diffuse sky counts as 45 degrees). */
double ambient_index(const optics_setup *o);
double texture_angle_deg(const optics_setup *o);

/* The model's error as the interval uses it: bias is graded minus true, res the standard uncertainty of what is left. */
typedef struct {
    double bias, res, cap; /* weighted; the general recipe; no texture reflects more than cap */
    double res_rule;       /* res without what drawing one of the two rules of mixing brings in */
    int studied;           /* 1: calculated case by case, see interval.c */
    double *bias_at, *res_at, *res_rule_at, *cap_at; /* [grid n] the caller's */
} model_parts;

/* Fills the interval and the budget of *out, whose spectrum and weighted value are there. `coarse`: grid of the
 * variations; parts may be NULL. Leaves lo/hi NAN (and parts untouched) when the spacing is unknown. */
status interval_fill(const surface_input *in, const optics_setup *o, const variant *central, const grid *coarse,
                     prediction *out, model_parts *parts, error *e);

/* 1: the rule of mixing is an open question for this variant; 0: its error was calculated case by case. */
int interval_rules_matter(const model_parts *m, const variant *v);
/* Weighted truth of a variant whose graded index gives b2d with the 2-D Bruggeman rule and `rule` with the one that was
 * drawn, and its standard uncertainty. drawn: 1 where rules are drawn at all. */
double interval_truth(const model_parts *m, const variant *v, double b2d, double rule, int drawn, double *u);

#endif

/* What light meets, from above: ambient, conformal or planar coatings, textured profile, substrate. Borrowed
 * pointers only; the caller keeps everything alive. */
#ifndef SWARD_OPTICS_STACK_H
#define SWARD_OPTICS_STACK_H
#include <stddef.h>

#include "base/limits.h"
#include "optics/material.h"

/* Volume shares against depth, piecewise linear. depth_nm[0] = 0 is the highest point, depth_nm[n-1] the floor; below
 * it the substrate. The ambient has what solid and coatings leave. n = 0: no texture (planar stack). Two nodes at the
 * same depth make a step. */
typedef struct {
    size_t n;
    double *depth_nm;
    double *solid;                       /* [n] 0..1, substrate material */
    double *coating[LIMIT_COATINGS];     /* [n] each, share of coating j; NULL beyond n_coatings */
    size_t n_coatings;
    int pores;                           /* 1: the pore is the inclusion for Maxwell Garnett */
} profile;                               /* {0} = empty */

void profile_free(profile *p); /* frees owned arrays, clears */

typedef struct {
    const material *material;
    double thickness_nm;
} layer;

typedef enum { MIX_BRUGGEMAN_2D, MIX_MAXWELL_GARNETT_2D, MIX_BRUGGEMAN_3D, MIX_MAXWELL_GARNETT_3D, MIX_LOOYENGA,
               MIX_VOLUME } mixing;
enum { MIXINGS = 6 };
const char *mixing_name(mixing m);            /* "bruggeman-2d" ... as on the command line */
int mixing_from_name(const char *name, mixing *m); /* 1 found */

typedef enum { POL_MEAN, POL_S, POL_P } polarization;
const char *polarization_name(polarization p); /* mean s p */

/* A thick incoherent front: air / glass / encapsulant; the texture then lies in the encapsulant. Intensities are
 * added (Stokes 1862), absorption of both is counted, angles are in air. */
typedef struct {
    const material *glass;      /* NULL: no laminate */
    double glass_mm;            /* default 3.2 */
    const material *encapsulant;
    double encapsulant_mm;      /* default 0.45 */
} laminate;

typedef struct {
    const material *ambient;    /* index constant 1 = air; with a laminate the encapsulant is used instead */
    laminate front;
    const layer *coatings;      /* [n_coatings], outermost first: planar layers when profile.n = 0, else the
                                   materials of profile.coating[j] (thickness then unused here) */
    size_t n_coatings;
    const profile *profile;     /* NULL or n = 0: planar */
    const material *substrate;  /* semi-infinite */
    mixing mixing;              /* the two-dimensional rules: arithmetic mean along the axis (uniaxial) */
} stack;

#endif

/* Is fine detail smeared in one direction (an astigmatic or drifting probe), or is the texture itself stretched? See the .c. */
#ifndef SWARD_METRICS_SMEAR_H
#define SWARD_METRICS_SMEAR_H
#include <stddef.h>

/* The anisotropy of the fine end of a spectrum, still both in one. */
typedef struct {
    double c, s;       /* what a smear alone would make of it: difference of variances, px^2, as a vector of the doubled angle */
    double per_strain; /* what one of strain along the same axis would pass for, px^2 */
    double u;          /* standard uncertainty of c and s; NAN: too little texture above the noise */
} fine_anisotropy;

/*   in   psd [ny][nx/2+1] two-dimensional power spectrum (psd2d), floor its noise level, d_px the spacing, last the finest spatial
 *        frequency at which the texture stands out of the noise, 1/px */
fine_anisotropy smear_look(const float *psd, size_t nx, size_t ny, double floor, double d_px, double last);

typedef struct {
    double smear_px;  /* sd of the blur along the smeared direction beyond that across it; NAN unknown */
    double angle_deg; /* that direction, 0..180 counter-clockwise from x */
    double z;         /* standard score; 0 unknown */
} smear;

/* The smear that is left when the texture's own stretch, as its spacing shows it, is taken off. */
smear smear_beyond(const fine_anisotropy *f, double stretch, double stretch_u, double angle_deg);

#endif

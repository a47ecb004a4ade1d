/* A texture as a graded layer: one block of wavelengths, several angles and polarizations at once (they share
 * the mixing, which is the dear part). Internal to the room. */
#ifndef SWARD_OPTICS_GRADED_H
#define SWARD_OPTICS_GRADED_H
#include "optics/mixing.h"
#include "optics/slabs.h"

/* One angle and polarization. X = G/F as in multilayer.h. */
typedef struct {
    int p_polarized;
    double s2[LANES];   /* tangential wave number over k0, squared */
    lanes ambient;      /* X of the ambient half-space */
    lanes start;        /* X of the substrate */
    lanes x;            /* work */
    double R[3][LANES]; /* out: the best extrapolated value; work */
} channel;

/* Carries X of every channel from the substrate to the top through the slabs, then R = |(Xa - X)/(Xa + X)|^2
 * into R[0] of each channel. k0 = 2 pi / wavelength, per lane. */
void graded_walk(const slabs *s, const mixer *m, const double *k0, channel *c, size_t n_channels);

#endif

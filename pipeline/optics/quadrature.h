/* Gauss-Legendre nodes. Internal to the room. */
#ifndef SWARD_OPTICS_QUADRATURE_H
#define SWARD_OPTICS_QUADRATURE_H
#include <stddef.h>

/* n nodes and weights on 0..1. src Newton on the Legendre recurrence; Abramowitz, Stegun 25.4.30 */
void quadrature_gauss(size_t n, double *x, double *w);

#endif

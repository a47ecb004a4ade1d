/* A grating or grid of known pitch as a ruler: lattice vectors from the two-dimensional autocorrelation. */
#ifndef SWARD_METRICS_GRATING_H
#define SWARD_METRICS_GRATING_H
#include "base/status.h"
#include "metrics/plane.h"

typedef enum { GRATING_AUTO, GRATING_LINES, GRATING_SQUARE, GRATING_HEXAGONAL } grating_kind;

/* Lengths of pixels are in pitches: times the pitch in nm they are nm per pixel. Standard uncertainties come from the
 * scatter of four quarters of the picture, widened for their small number: two of them make a 95 % interval. */
typedef struct {
    grating_kind kind;      /* as found or as told */
    double ax, ay, bx, by;  /* lattice vectors, px; lines: a is across the lines, b is 0 */
    double px_x, px_y;      /* width and height of a pixel, pitches; lines: both the same */
    double u_x, u_y;        /* of them */
    double skew_deg, skew_u_deg; /* 90 less the angle between the picture's axes; lines: 0 and NAN */
    double angle_deg;       /* of a against the picture's horizontal, counter-clockwise, -90 to 90 */
    size_t n_peaks;         /* of the autocorrelation behind the fit */
    double residual_px;     /* their scatter about the fit */
} grating;

enum { GRATING_PERIODS = 8 };

/*   in   a plane with at least GRATING_PERIODS periods a side; kind AUTO tells lines, square and hexagonal
 *   err  ST_NO_RESULT no lattice, too few periods, neither square nor hexagonal; ST_NO_MEMORY
 *   src  lattice by least squares over the peaks of the autocorrelation, then over the lines of the spectrum: common
 *        practice; taper: Harris, Proc. IEEE 66 (1978) 51 (Hann) */
status grating_measure(const plane *p, grating_kind kind, grating *out, error *e);

#endif

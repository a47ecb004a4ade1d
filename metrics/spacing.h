/* Spacing from the autocorrelation and the power spectrum. Definitions, biases and checks: see the .c. */
#ifndef SWARD_METRICS_SPACING_H
#define SWARD_METRICS_SPACING_H
#include "base/status.h"
#include "metrics/spectrum.h"

/* First guess of the scale from the plain radial autocorrelation. */
typedef struct {
    double first_minimum_px; /* NAN: none */
    double scale_px;         /* first_minimum / 0.61, good to -9..+28 % */
    double z;                /* significance of the trough, -C(r_min) / se */
} first_scale;
void spacing_first_scale(const curve *acf, size_t nx, size_t ny, first_scale *out);

/* Standard error of C at lag r (Bartlett type, docs in the .c). */
double acf_standard_error(const curve *acf, double r_px, size_t nx, size_t ny);

/* spacing_acf: ring of the autocorrelation of the curvature map K made at sigma = 0.12 d.
 *   in  k_acf its 2-D autocorrelation, d_px the scale (hexagonal spacing), n_features behind it
 *   out spacing (sub-pixel; of the six first-shell peaks where they are distinct, else of the radial ring),
 *       the radial curve's ring, stretch (>= 1) and direction of the longer spacing (deg, y up) when found
 *       from peaks or from the ring's ellipse. u_sampling 0.17/sqrt(N).
 *   err ST_NO_RESULT no ring (the sentence says why); ST_NO_MEMORY */
typedef struct {
    measured spacing, stretch, stretch_angle_deg;
    double radial_ring_px, ring_height, ring_z;
    int from_peaks;
} ring;
status spacing_ring(const acf2d *k_acf, const curve *k_radial, double d_px, size_t n_features, ring *out,
                    error *e);

/* spacing_psd: 1 / spatial frequency at the peak of the radial PSD of K, searched 0.6..1.7 of 1.1/d. */
status spacing_psd_peak(const curve *k_psd, double d_px, size_t n_features, measured *out, error *e);

/* Spacing of a second population: another scale at which the curvature map of its own 0.12 has a first ring.
 *   in  psd radial PSD of the plain flattened field, d_px the spacing found already
 *   out px, at least 1.4 times larger or smaller than d_px; NAN none */
double spacing_second(const curve *psd, double d_px, size_t nx, size_t ny);

double spacing_hex(double density); /* sqrt(2 / (sqrt(3) density)) */

#endif

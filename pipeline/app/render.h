/* Micrographs of known truth: a surface is made, looked at as a scanning electron microscope would, and what is true
 * of it is kept. Pure and deterministic in the seed. For the demo, for tests, and for a user who asks which
 * magnification is enough. */
#ifndef SWARD_APP_RENDER_H
#define SWARD_APP_RENDER_H
#include <stddef.h>
#include <stdint.h>

#include "base/status.h"
#include "metrics/plane.h"

typedef enum { PATTERN_HEX, PATTERN_LLOYD, PATTERN_RSA, PATTERN_MATERN, PATTERN_RANDOM } pattern;

typedef struct {
    double spacing_nm;     /* hexagonal spacing of the density */
    double px_nm;
    size_t nx, ny;         /* plane without the strip */
    pattern pattern;
    double disorder;       /* hex: jitter sd / spacing (0.16); lloyd: relaxation steps (4); rsa, matern: hard-core
                              distance / spacing (0.70, 0.48) */
    double exponent;       /* feature profile 1 - r^q style as in the link: 1 cone, 2 paraboloid */
    double fill;           /* base radius / half spacing; >= 1.15 touching */
    double height_spread;  /* relative sd of the heights */
    double height_by_size; /* heights grow with the own cell */
    relief relief;         /* hillock or pore */
    double edge;           /* edge brightness, share of slope in the signal: 0 */
    double rough;          /* small-scale roughness amplitude / height: 0 */
    double electrons;      /* mean electrons per px at full signal (shot noise); 0 = noiseless */
    double blur_px;        /* sd of the probe */
    double contrast;       /* signal range 0..1 used by the texture: 0.7 */
    double gradient;       /* relative brightness change across the field (charging): 0 */
    double streaks;        /* amplitude of charging streaks / signal range: 0 */
    double stretch;        /* >= 1, along stretch_angle_deg */
    double stretch_angle_deg;
    int bit_depth;         /* 8 or 16 */
    int strip;             /* 1: info strip appended at the bottom */
    uint64_t seed;
} render_options;
render_options render_defaults(void);

typedef struct {
    void *samples;         /* uint8_t or uint16_t, [ny + strip_rows][nx], owned */
    size_t nx, ny, strip_rows; /* ny: plane rows */
    int bit_depth;
    size_t n;              /* true features inside the plane */
    double *x, *y;         /* px, owned */
    double density_per_px2;
    double spacing_px;     /* hexagonal spacing of the true density */
    double *basin_ecd_px;  /* [n] ideal basins of the noiseless surface; NAN for those that touch the frame; owned */
    double *basin_weight;  /* [n] border weights */
} rendering;

status render_make(const render_options *o, rendering *out, error *e);
void rendering_free(rendering *r);

#endif

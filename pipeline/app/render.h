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
    double spacing_nm;     /* hexagonal spacing of the density: 300 */
    double px_nm;          /* 8 */
    size_t nx, ny;         /* plane without the strip: 1024 x 768 */
    pattern pattern;
    double disorder;       /* NAN: the pattern's own. hex: jitter sd / spacing (0.16); lloyd: relaxation steps (4);
                              rsa, matern: hard-core distance / spacing (0.70, 0.48) */
    double exponent;       /* feature profile 1 - (r/R)^q, as in the link: 1 cone, 2 paraboloid */
    int bell;              /* 1: Gaussian bell exp(-2 (r/R)^2) instead */
    double fill;           /* base radius / half spacing: 1.15, touching; 0.45 leaves a bare floor */
    double height_spread;  /* relative sd of the heights: 0.10 */
    double height_by_size; /* g in height ~ own cell size^g: 0.5 */
    double second_share;   /* two populations: share of the field that the second one covers, in patches: 0 */
    double second_spacing; /* spacing of the second population / that of the first: 2. spacing_nm stays that of both
                              together */
    relief relief;         /* hillock or pore (RELIEF_AUTO: hillock) */
    double edge;           /* edge brightness, share of slope in the signal: 0 */
    double rough;          /* sd of a roughness finer than the features / mean height: 0 */
    double electrons;      /* mean electrons per px at full signal (shot noise); 0 = noiseless */
    double blur_px;        /* sd of the probe: 0.7 */
    double jitter_px;      /* sd by which each scan line is shifted along x: 0 */
    double smear_px, smear_angle_deg; /* astigmatism: sd of a further blur along this direction (counter-clockwise from x): 0 */
    double contrast;       /* share of the grey range between the 0.1 % and 99.9 % quantile of the signal: 0.7; above
                              1 clips */
    double gradient;       /* relative brightness change across the field: 0 */
    double streaks;        /* sd of charging streaks along x / contrast: 0 */
    /* The angle follows its number, as the smear's does. */
    double stretch;        /* >= 1 along stretch_angle_deg (counter-clockwise from x, as measured); keeps the density */
    double stretch_angle_deg;
    int bit_depth;         /* 8 or 16 */
    int strip;             /* 1: info strip appended at the bottom */
    int show_scale;        /* 1: pixel size and scale bar in the strip */
    const char *label;     /* text at the left of the strip, borrowed; NULL: "rendered" */
    uint64_t seed;
} render_options;
render_options render_defaults(void);

typedef struct {
    void *samples;         /* uint8_t or uint16_t, [ny + strip_rows][nx], owned */
    size_t nx, ny, strip_rows; /* ny: plane rows */
    int bit_depth;
    size_t n;              /* true features inside the plane */
    size_t n_hidden;       /* of these, centres that lie below a neighbour's flank: no top of their own to see */
    size_t n_second;       /* of these, features of the second population */
    double *x, *y;         /* px, owned */
    double density_per_px2;
    double spacing_px;     /* hexagonal spacing of the true density */
    double first_px, second_px; /* spacing of each population inside its patches; NAN when there is one only */
    double *basin_ecd_px;  /* [n] equivalent circular diameter of the ideal basins of the noiseless surface; NAN for
                              those that touch the frame or are hidden altogether; owned */
    double *basin_weight;  /* [n] Miles-Lantuejoul border weights, 0 where the diameter is NAN */
} rendering;

/* Makes the surface and its picture. The pattern is scaled about the middle of the field, by a percent or two, until
 * the frame holds the number of features asked for, so that the true density is the asked one to 1/n.
 *   out  out untouched on failure; same options, same bytes
 *   own  caller frees with rendering_free
 *   err  ST_BAD_INPUT an option outside its range, fewer than 4 features in the frame, a hard core too large for the
 *        density; ST_NO_MEMORY
 *   src  random sequential adsorption: Feder 1980 (J. Theor. Biol. 87:237); Matern's second hard-core process 1960;
 *        Lloyd 1982 (IEEE Trans. Inf. Theory 28:129); border weights: Miles and Lantuejoul as in ISO 13322-1; all
 *        from memory */
status render_make(const render_options *o, rendering *out, error *e);
void rendering_free(rendering *r);

#endif

/* Between the files of the renderer: random numbers, centres, surface, look, strip. All lengths in px. */
#ifndef SWARD_APP_RENDER_PRIV_H
#define SWARD_APP_RENDER_PRIV_H
#include <stddef.h>
#include <stdint.h>

#include "app/render.h"

/* One generator per stage, so that more noise does not move the features. */
typedef enum { STREAM_PATTERN = 1, STREAM_HEIGHTS, STREAM_ROUGH, STREAM_STREAKS, STREAM_NOISE, STREAM_GRADIENT,
               STREAM_SECOND, STREAM_PATCHES, STREAM_JITTER } stream;
typedef struct {
    uint64_t s[4];
    double spare; /* second value of the polar method, NAN: none */
} rng;
rng rng_make(uint64_t seed, stream which);
double rng_uniform(rng *r); /* 0 <= u < 1 */
double rng_normal(rng *r);
double rng_poisson(rng *r, double mean);

/* Area-preserving stretch as a metric: r^2 = xx dx^2 + 2 xy dx dy + yy dy^2 is the squared distance before the
 * stretch; fx xy.. the map that takes unstretched to stretched coordinates. */
typedef struct {
    double xx, xy, yy;    /* metric */
    double mxx, mxy, myy; /* stretched = m unstretched */
    double reach;         /* longest stretched length of a unit vector */
} stretching;
stretching stretching_make(double stretch, double angle_deg);

/* Centres in the picture's coordinates, those around the frame included. */
typedef struct {
    size_t n;
    double *x, *y;
    double *size;         /* own cell size / mean: square root of the area ratio, extremes of a random pattern cut off */
    unsigned char *second; /* 1: of the second population */
    double spacing;
    double first, other;  /* spacing of each population, NAN when there is one only */
} centres;
status centres_make(const render_options *o, centres *out, error *e);
void centres_free(centres *c);

/* Patches of the second population: a sum of plane waves above a level. */
enum { PATCH_WAVES = 9 };
typedef struct {
    double kx[PATCH_WAVES], ky[PATCH_WAVES], phase[PATCH_WAVES], level;
} patches;
/* Patches of about `length` that cover `share` of w x h. err ST_NO_MEMORY */
status patches_make(uint64_t seed, double share, double w, double h, double length, patches *out, error *e);
/* Signed distance to the nearest edge, to first order; above 0 inside a patch. */
double patches_distance(const patches *p, double x, double y);

/* Surface at half-pixel steps, `margin` px around the frame included. */
typedef struct {
    size_t nx, ny, margin; /* px, with margins: frame + 2 margin */
    float *height;         /* [ny][nx] mean over each pixel, floor 0, mean feature height 1; owned */
    uint32_t *owner;       /* [2 ny][2 nx] centre whose term is highest; owned */
} surface;
status surface_make(const render_options *o, const centres *c, size_t margin, surface *out, error *e);
void surface_free(surface *s);
/* Fills n, n_hidden, x, y, density, spacing, basins of `out` (arrays owned by out). */
status surface_truth(const render_options *o, const centres *c, const surface *s, rendering *out, error *e);

/* Signal 0..1 (may pass both ends), [o->ny][o->nx]. */
status look_make(const render_options *o, const surface *s, double spacing, float *signal, error *e);

size_t strip_height(const render_options *o);
/* Grey levels 0..1 of the strip, [rows][o->nx]. */
void strip_draw(const render_options *o, size_t rows, float *grey);

enum { FONT_WIDTH = 5, FONT_HEIGHT = 7 };
/* Seven rows of five bits, the highest bit at the left; characters without a picture give a blank. */
const unsigned char *font_rows(char c);

#endif

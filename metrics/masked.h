/* A field with holes: pixels that are no specimen (marks drawn over it). They are filled smoothly, so that filters meet no
 * edge, and then left out: of correlations by their weight, of counts and areas by their distance. */
#ifndef SWARD_METRICS_MASKED_H
#define SWARD_METRICS_MASKED_H
#include "base/status.h"
#include "metrics/detect.h"
#include "metrics/plane.h"
#include "metrics/spectrum.h"

/* out[ny][nx] = px with masked pixels filled by a membrane through their surroundings (Laplace's equation, relaxed from
 * coarse to fine). err ST_NO_MEMORY; ST_BAD_INPUT nothing is left of the field */
status masked_fill(const plane *p, float *out, error *e);

/* Sets the masked pixels of f to the mean of the others, so that they add nothing to a mean-removed correlation. */
void masked_level(const unsigned char *mask, size_t n, float *f);

/* Corrects an autocorrelation of such a plane for the pairs that the holes took away: divides each lag by the share of its
 * pairs that are both specimen. err ST_NO_MEMORY */
status masked_weigh(const unsigned char *mask, acf2d *a, error *e);

/* Distance of every pixel centre to the nearest masked one, px (0 inside); for the counts and areas that keep away.
 *   own  caller frees *out
 *   src  Felzenszwalb and Huttenlocher, Theory of Computing 8 (2012) 415: exact, by lower envelopes of parabolas */
status masked_distance(const unsigned char *mask, size_t nx, size_t ny, float **out, error *e);

/* The holes of a field and how far everything is from them. */
typedef struct {
    const unsigned char *mask; /* borrowed */
    float *distance;           /* [ny][nx] px; owned */
    size_t nx, ny;
} hole;                        /* {0}: the field has none */

status hole_make(const plane *p, hole *out, error *e); /* p->mask set. err ST_NO_MEMORY */
void hole_free(hole *h);                                /* accepts {0} */

/* Distance of a place in the field to the nearest hole, px; HUGE_VAL when there is none. */
double hole_distance(const hole *h, double x, double y);
/* Pixels of the rectangle (centres in x0 <= x < x1) that are closer than `guard` to a hole. */
double hole_area(const hole *h, double x0, double y0, double x1, double y1, double guard);
/* Takes features that lie in a hole out of the list. err ST_NO_RESULT none is left; d then keeps them */
status hole_drop(const hole *h, detection *d, error *e);
/* Cells that reach into a hole are cut off there: their border weight becomes 0, as that of cells at the frame. */
void hole_touch(const hole *h, const uint32_t *cells, feature *features);

#endif

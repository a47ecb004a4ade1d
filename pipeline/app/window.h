/* The process window: weighted reflectance over height and one more quantity, the contour of a target in it, and where
 * today's samples lie. */
#ifndef SWARD_APP_WINDOW_H
#define SWARD_APP_WINDOW_H
#include "base/text.h"
#include "link/predict.h"

typedef enum { ACROSS_SPACING, ACROSS_EXPONENT, ACROSS_THICKNESS } across; /* what runs beside the height */

enum { WINDOW_VALUES = 200, WINDOW_CELLS = 6000 };
typedef struct {
    size_t n;
    double v[WINDOW_VALUES]; /* ascending */
} axis;

typedef struct {
    double R, R_lo, R_hi; /* weighted, 95 % interval; NAN where no model serves */
    double area_ratio;
} window_cell;

/* Least height from which on, up to the top of the map, the target is kept: by the value, and by the upper end of the
 * interval. NAN: nowhere in the map. */
typedef struct {
    double height_nm, area_ratio;
    double sure_height_nm, sure_area_ratio;
} window_edge;

typedef struct {
    char *name, *verdict; /* owned */
    double spacing_nm, height_nm, R;
} window_sample;

typedef struct {
    across across;
    axis x, height;
    double spacing_nm; /* where spacing is not the axis */
    double here;       /* exponent or thickness that the surface has today; filled by window_fill, unused across spacing */
    double target;
    window_cell *cells;     /* [height.n * x.n], one row per height; owned */
    window_edge *edges;     /* [x.n]; owned */
    window_sample *samples; /* [n_samples]; owned */
    size_t n_samples;
    char note[960]; /* of the prediction in the middle of the map */
} window;           /* {0} = empty */
void window_free(window *w);

/* "350" or "150:500:25". err ST_BAD_INPUT no such text, not from lo to hi, more than WINDOW_VALUES values */
status axis_parse(const char *option, const char *text, double lo, double hi, axis *out, error *e);

/* Fills cells and edges from across, x, height, spacing_nm and target.
 *   in   base: surface without spacing and height; o: optics, whose first coating takes the thickness
 *   err  ST_BAD_INPUT too many cells, thickness without a coating; as predict() */
status window_fill(window *w, const surface_input *base, const optics_setup *o, error *e);

/* Least height for the target at one place of the x axis, from cells of one column (stride w->x.n). */
window_edge window_edge_of(const window *w, size_t column);

/* Reads DIR/samples.csv. err ST_BAD_INPUT no such file, no column sample, spacing_nm; ST_NO_MEMORY */
status window_samples(const char *folder, window *w, error *e);

const char *across_name(across a); /* spacing_nm exponent thickness_nm */
void window_json(const window *w, textbuf *out);
void window_csv(const window *w, textbuf *out);
void window_text(const window *w, textbuf *out);

#endif

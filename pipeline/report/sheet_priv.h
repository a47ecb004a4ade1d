/* The sheet under a figure: its surface, pen and colours. Units are points (1/72 inch), y down. Not for other rooms. */
#ifndef SWARD_REPORT_SHEET_PRIV_H
#define SWARD_REPORT_SHEET_PRIV_H
#include "report/axes_priv.h"
#include "report/pen_priv.h"
#include "report/sheet.h"

typedef struct {
    ink paper, ink, soft, faint, target, tone[PLOT_TONES], mark[4]; /* by plot_mark */
} sheet_colours;
sheet_colours sheet_light(void);
sheet_colours sheet_dark(void);

typedef struct {
    const sheet_options *o;
    double width, height, em; /* pt */
    double line;              /* width of a curve, pt */
    sheet_colours colours;
    pen pen;
    cairo_surface_t *surface;
    textbuf sink; /* SVG and PDF as cairo writes them */
} sheet;

/* A sheet of the wanted width and of `height_mm` unless the options name one, paper laid.
 *   own  sheet_close, also after a failure
 *   err  as sheet_plot */
status sheet_open(const sheet_options *o, double height_mm, sheet *s, error *e);
/* The file of what was drawn. Title and description are for those who cannot see it. */
status sheet_finish(sheet *s, const char *title, const char *description, char **bytes, size_t *n, error *e);
void sheet_close(sheet *s);

/* Colour of a share 0..1 of a scale: dark blue over green to light yellow, its lightness rising all the way, so that it reads in
 * grey and for nearly every eye. */
ink sheet_ramp(double share);
/* The same as a bar from bottom to top. */
void sheet_draw_ramp(sheet *s, double x, double top, double width, double bottom);

/* A mark of radius about r, filled and edged. */
void sheet_mark(sheet *s, plot_mark mark, double x, double y, double r);
void sheet_dash(sheet *s, int pattern); /* 0 solid, 1 dashed, 2 dotted, 3 dash-dot; in the scale of the lines */
/* A number of an axis: six digits at most, a real minus. */
void sheet_number(sheet *s, double x, double y, double align, double v);
double sheet_number_width(sheet *s, double v);
/* The title at the top, when it is wanted; returns the height it takes. */
double sheet_title(sheet *s, const char *title);

typedef struct {
    double x0, y0, x1, y1;
} sheet_box; /* {0} = empty */

/* The box of a label of one em beside the point (x, y): below, above, right or left of it, the first that hides nothing of taken [n], else
 * the one that hides least. Returns the area it hides. */
double sheet_place_label(double x, double y, double width, double em, const sheet_box *taken, size_t n, sheet_box *out);

/* The legend of a plot, set in rows from `top` on between left and right; returns its height, draws with draw = 1. */
double sheet_legend(sheet *s, const plot *p, double left, double right, double top, int draw);

/* A plot that is being drawn. */
typedef struct {
    sheet *s;
    const plot *p;
    const sheet_cells *cells;
    axes a;
    double cell_lo, cell_hi; /* log10 of the cells that are drawn */
    double turned;           /* width of turned names below the axis, pt; 0: they stand level */
    size_t name_step;
    size_t bands;            /* how many there are: the more, the fainter */
} sheet_scene;

void sheet_line(sheet_scene *c, double x0, double y0, double x1, double y1);
void sheet_draw_target(sheet_scene *c);
/* Everything else within the frame; the caller has clipped to it. */
void sheet_draw_series(sheet_scene *c);

#endif

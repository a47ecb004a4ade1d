/* Figures for papers and slides: a `plot`, a wafer map or a micrograph on a sheet of a size in mm, as SVG, PDF or PNG. All three
 * come from the same drawing. Lettering is the program's own: outlines in SVG, embedded in PDF. The same input gives the same
 * bytes: no time, no random name is written. */
#ifndef SWARD_REPORT_SHEET_H
#define SWARD_REPORT_SHEET_H
#include <stddef.h>
#include <stdint.h>

#include "base/status.h"
#include "io/micrograph.h"
#include "report/plot.h"

typedef enum { SHEET_SVG, SHEET_PDF, SHEET_PNG } sheet_format;

typedef struct {
    sheet_format format;
    double width_mm;     /* 20 to 1000 */
    double height_mm;    /* 0: what suits the figure */
    double dpi;          /* of PNG, 30 to 1200 */
    double text_pt;      /* size of the lettering, 4 to 40 */
    int dark;            /* light ink on dark ground */
    int titled;          /* 1: the title is drawn above; it is in the file's own title either way */
    const char *creator; /* into the PDF: the program and its version */
} sheet_options;
/* SVG, one column of a journal (85 mm), 300 dots per inch, 7 pt, no title. */
sheet_options sheet_defaults(void);

/* Values over a grid, drawn as coloured cells under a plot, logarithmic, with a colour bar. */
typedef struct {
    const double *x, *y; /* [nx], [ny] middles of the cells, ascending */
    const double *v;     /* [ny][nx]; not finite or not positive: blank */
    size_t nx, ny;
    const char *label;   /* of the colour bar, with unit */
} sheet_cells;

/* A micrograph with a scale bar, and signs where features are. */
typedef struct {
    const micrograph *m;
    double px_nm;        /* NAN: no scale bar */
    const double *x, *y; /* [n] centres, px; NULL: none */
    const int *counted;  /* [n] 1: a disc, 0: an open diamond */
    size_t n;
    double ring_x, ring_y, ring_px; /* a circle; ring_px NAN: none */
    const char *ring_label;         /* in the key below, which is there when there are centres */
    const char *title, *description;
} sheet_picture;

typedef struct {
    const char *name;              /* above the map */
    const double *x_mm, *y_mm, *v; /* [n] from the middle of the wafer */
    const char *const *labels;     /* [n] the value as the table prints it */
    size_t n;
} sheet_wafer;
typedef struct {
    const sheet_wafer *wafers; /* [n], one scale of colours for all */
    size_t n;
    const char *label; /* of the values, with unit */
    const char *title, *description;
} sheet_wafers;

/* Each writes a whole file into memory.
 *   out  *bytes [*n], the caller frees them
 *   err  ST_BAD_INPUT a size or resolution outside its range, too many pixels for one picture; ST_NO_MEMORY */
status sheet_plot(const plot *p, const sheet_cells *cells, const sheet_options *o, char **bytes, size_t *n, error *e);
status sheet_draw_wafers(const sheet_wafers *w, const sheet_options *o, char **bytes, size_t *n, error *e);
status sheet_draw_picture(const sheet_picture *p, const sheet_options *o, char **bytes, size_t *n, error *e);

#endif

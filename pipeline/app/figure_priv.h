/* The kinds of figures, one function each, and what they share. Not for other rooms. */
#ifndef SWARD_APP_FIGURE_PRIV_H
#define SWARD_APP_FIGURE_PRIV_H
#include "app/figure.h"
#include "app/runfile.h"

/* Where a figure goes. */
typedef struct {
    char *bytes;
    size_t n;
} figure_file;

typedef status figure_drawer(const figure_request *q, const cJSON *run, figure_file *out, error *e);
figure_drawer figure_spectra, figure_sizes, figure_acf, figure_psd, figure_angles, figure_window, figure_history, figure_wafers,
    figure_micrograph;

/* A plot with nothing in it: open axes, no target. */
plot figure_plot(const char *title, const char *x_label, const char *y_label);
/* Draws a plot to the wanted file. err as sheet_plot */
status figure_finish(const figure_request *q, const plot *p, const sheet_cells *cells, figure_file *out, error *e);

/* The first used micrographs of the wanted samples, in the order of the run. */
typedef struct {
    const cJSON *image[FIGURE_MOST];
    size_t n;
} figure_images;
figure_images figure_choose(const figure_request *q, const cJSON *run, size_t most);
/* "overlays/sub/name.png" -> "sub/name", the stem of a micrograph's tables; caller frees. NULL without one or without memory. */
char *figure_stem(const cJSON *image);

/* The member of the run, or the object in q->data when one is given. *owned is to be deleted by the caller in any case.
 *   err  ST_BAD_INPUT neither is there: the sentence says how to make it; as input_read; no JSON */
status figure_member(const figure_request *q, const cJSON *run, const char *name, const char *how, cJSON **owned, const cJSON **member,
                     error *e);
/* 1: one of them is finite. */
int figure_any(const double *v, size_t n);
/* 1: the sample is wanted, or all are. */
int figure_wants(const figure_request *q, const char *sample);

/* "weighted_reflectance" -> "weighted reflectance (%)", "spacing_nm" -> "spacing (nm)": the label of an axis, and by what the values
 * are multiplied. */
double figure_label(const char *name, const char *unit, textbuf *label);

#endif

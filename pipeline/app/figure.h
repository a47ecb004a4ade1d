/* One chart of a finished run as a file of its own, drawn from the run's tables: same numbers, units on the axes. */
#ifndef SWARD_APP_FIGURE_H
#define SWARD_APP_FIGURE_H
#include <cjson/cJSON.h>
#include <stddef.h>

#include "base/status.h"
#include "base/text.h"

enum { FIGURE_MOST = 4 }; /* samples or micrographs in one chart: as many as there are tones */

typedef struct {
    const char *kind;     /* spectra, sizes, acf, history, micrograph */
    const char *dir;      /* output folder of the run */
    const char *quantity; /* for history: spacing_nm ... */
    const char *samples[FIGURE_MOST];
    size_t n_samples;     /* 0: all, if there are not more than FIGURE_MOST */
} figure_request;

int figure_kind_known(const char *kind);

/* Appends a standalone SVG.
 *   in   run the parsed results.json of q->dir
 *   err  ST_BAD_INPUT a sample or quantity that the run does not have, nothing to draw; ST_IO a table cannot be read */
status figure_svg(const figure_request *q, const cJSON *run, textbuf *out, error *e);

#endif

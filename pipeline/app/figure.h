/* Figures of a finished run, drawn from the run's own tables and results.json: same numbers, units on the axes, nothing computed
 * again. */
#ifndef SWARD_APP_FIGURE_H
#define SWARD_APP_FIGURE_H
#include <cjson/cJSON.h>
#include <stddef.h>

#include "base/status.h"
#include "report/sheet.h"

enum { FIGURE_MOST = 4 }; /* samples or micrographs in one chart: as many as there are tones */

typedef struct {
    const char *kind;     /* figure_kind of what the user wrote */
    const char *dir;      /* output folder of the run */
    const char *data;     /* for window, angles, history: a JSON file of the command that made it; NULL: the run's own */
    const char *folder;   /* for micrograph: where the files are; NULL: where run.json says they were */
    const char *quantity; /* for history and wafer: spacing_nm ... */
    const char *samples[FIGURE_MOST];
    size_t n_samples;     /* 0: all, if there are not more than FIGURE_MOST */
    int signs;            /* micrograph: with centres and ring */
    sheet_options sheet;
} figure_request;

/* The kind by its name or its short name ("acf"), NULL when there is none. */
const char *figure_kind(const char *name);
/* "spectra, distribution, ... or micrograph" */
const char *figure_kinds(void);

/* A whole file in memory, in the format of q->sheet; the caller frees *bytes.
 *   in   run the parsed results.json of q->dir
 *   err  ST_BAD_INPUT a sample, quantity or member that the run does not have, nothing to draw, sizes outside their range; ST_IO a
 *        table or micrograph cannot be read; ST_NO_MEMORY */
status figure_draw(const figure_request *q, const cJSON *run, char **bytes, size_t *n, error *e);

#endif

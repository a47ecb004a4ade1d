/* Two runs over samples of the same names: before and after a change of the process. */
#ifndef SWARD_APP_COMPARE_H
#define SWARD_APP_COMPARE_H
#include <cjson/cJSON.h>
#include <stddef.h>

#include "base/status.h"
#include "base/text.h"

typedef struct {
    const char *sample, *quantity, *unit; /* borrowed from the first run and the column table */
    double before, after, difference;
    double u;    /* standard uncertainty of the difference; NAN: unknown, then nothing is called real */
    double p;    /* two-sided probability of a difference this large without a change (normal); NAN unknown */
    int same;    /* the very same micrographs in both runs: u is 0, p unknown, every difference is real */
    int real;    /* p below 0.05 */
} comparison;

typedef struct {
    comparison *rows;
    size_t n;
    textbuf notes; /* sentences: samples of one run only, protocols that differ */
} comparisons;     /* {0} = empty */

/* Only what varies from run to run counts: the sampling part of a texture quantity, the height part of the reflectance.
 * Where a sample rests on the same micrographs in both runs, sampling is common too: what differs is the work of the protocol, the
 * sheet or the program. Method and pixel size are common to both runs as long as instrument, settings and protocol are, and cancel.
 *   in   before, after: parsed results.json; they must outlive *out
 *   err  ST_BAD_INPUT no sample is in both; ST_NO_MEMORY
 *   src  JCGM 100:2008, 5.2 (common effects cancel in a difference) and G.3 (normal coverage) */
status compare_runs(const cJSON *before, const cJSON *after, comparisons *out, error *e);
void comparisons_free(comparisons *c);

void compare_text(const comparisons *c, textbuf *out);
void compare_json(const comparisons *c, textbuf *out);

#endif

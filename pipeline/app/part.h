/* A run divided over several processes or machines: `sward run --part K/N` measures every N-th file and writes a part, gather
 * joins all N to the outputs of a single run, bit for bit. */
#ifndef SWARD_APP_PART_H
#define SWARD_APP_PART_H
#include <stddef.h>

#include "app/run.h"

/* "2/8"; 0 when the text is no such thing. */
int part_parse(const char *text, int *part, int *parts);

/* Joins the parts in `folders` to o->out. Of `o` counts what does not belong to measuring: out, history, jobs, no_report,
 * quiet, verbose, json; the rest is as the parts were made with. The micrographs are not read again; protocol, sheet and
 * scale file must lie where they lay, unchanged.
 *   err  ST_BAD_INPUT no part, not all parts of one run, made by another version or with another protocol or sheet;
 *        as run_folder */
status part_gather(const run_options *o, const char *const *folders, size_t n, run_outcome *outcome, error *e);

#endif

/* What a run would do, said without doing it. */
#ifndef SWARD_APP_DRYRUN_H
#define SWARD_APP_DRYRUN_H
#include "app/folder.h"

/* Prints a line a micrograph to standard output: file, sample, position, pixel size and its source, flags; or why it
 * cannot be read. Nothing is measured or written.
 *   out  *unusable files that cannot be read or have no pixel size
 *   err  ST_NO_MEMORY */
status dry_run(const folder *f, const examine_options *o, int *unusable, error *e);

#endif

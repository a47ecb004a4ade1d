/* The results of an earlier run, for the commands that draw or compare them. */
#ifndef SWARD_APP_RUNFILE_H
#define SWARD_APP_RUNFILE_H
#include <cjson/cJSON.h>

#include "base/status.h"

/* results.json of an output folder; the caller deletes *root.
 *   err  ST_BAD_INPUT no such folder, no results in it, or not this program's; ST_IO; ST_NO_MEMORY */
status runfile_read(const char *dir, cJSON **root, error *e);

/* The row of "samples" with that name, or NULL. */
const cJSON *runfile_sample(const cJSON *root, const char *sample);

#endif

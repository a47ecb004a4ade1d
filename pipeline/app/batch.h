/* The only place with threads: one micrograph (or one sample) a worker, results by index, so that neither the number of
 * workers nor their order can be seen in the outcome. */
#ifndef SWARD_APP_BATCH_H
#define SWARD_APP_BATCH_H
#include "app/examine.h"
#include "app/join.h"

typedef struct {
    const char *path;      /* to open */
    const char *relative;  /* as in the tables */
    const char *stem;      /* of the output files */
    double sheet_px_nm, sheet_bar_nm; /* NAN: the sheet does not say */
} batch_item;

/* jobs 0 = one per core. `progress` 1: a line on stderr that counts. `stop` (NULL: never) is asked before each micrograph; once it
 * says 1, the others are left as they are.
 *   out  [n], zeroed before; all filled even on failure (examined_free each)
 *   err  the first failure in item order */
status batch_examine(const batch_item *items, size_t n, const examine_options *o, int jobs, int progress, int (*stop)(void),
                     examined *out, error *e);

/* err the first failure in sample order; out [n] filled as far as possible (joined_free each) */
status batch_join(const sample_group *groups, size_t n, const examined *all, const join_options *o, int jobs, joined *out,
                  error *e);

/* Marks every file whose bytes came before as DUPLICATE. err ST_NO_MEMORY */
status batch_mark_duplicates(examined *all, size_t n, error *e);

#endif

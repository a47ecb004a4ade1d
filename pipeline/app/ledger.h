/* The run's entry in the history and what the report shows of it. */
#ifndef SWARD_APP_LEDGER_H
#define SWARD_APP_LEDGER_H
#include "app/join.h"

typedef struct {
    char *path;        /* of the ledger */
    char *json;        /* array of {sample, etched_at, spacing_nm, spacing_nm_u, weighted_reflectance, verdict} in time
                          order, one entry per sample: its newest run; excluded etches are left out */
    char *series;      /* array of control charts, see process.h */
    char *process;     /* what the history says of the process, lines; NULL: too few etches */
    char **row_json;   /* [n_rows] the samples.csv row of each sample as one JSON object */
    size_t n_rows;
    size_t added, total;
    int stays_with_output; /* no place was named: the ledger lies in OUT */
} ledger_result;

/* Adds every sample once with its micrographs, the sheet's carried-along columns included, and reads the ledger back. `path` NULL: OUT/history.sqlite;
 * folder: of the micrographs.
 * err ST_IO, ST_NO_MEMORY; ST_BAD_INPUT the file is no ledger */
status ledger_keep(const char *path, const char *out, const char *run_at, const protocol *p, const sheet *columns, const char *folder,
                   const joined *samples, size_t n, ledger_result *result, error *e);
void ledger_free(ledger_result *r);

#endif

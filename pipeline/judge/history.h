/* The ledger of every sample measured so far: SQLite, atomic, idempotent, safe under several writers. */
#ifndef SWARD_JUDGE_HISTORY_H
#define SWARD_JUDGE_HISTORY_H
#include <stddef.h>

#include "base/status.h"

typedef struct history history;

/* One sample of one run. Strings are borrowed when writing, owned by the list when reading. */
typedef struct {
    const char *sample, *lot, *wafer, *etched_at; /* "" where unknown */
    const char *run_at;                           /* ISO 8601 UTC */
    const char *fingerprint;  /* hash of micrographs, protocol and version: the same run again adds nothing */
    const char *version;      /* of the program */
    const char *protocol;     /* its name */
    double spacing_nm, spacing_nm_u, density_per_um2, size_d50_nm, weighted_reflectance; /* NAN missing */
    const char *verdict;
    const char *row_json;     /* the whole samples.csv row as one JSON object */
} history_row;

typedef struct {
    history_row *rows; /* in order of etched_at, then sample, then run_at */
    size_t n;
    char **storage;    /* private */
    size_t n_storage;
} history_list;

/* Opens or creates. err ST_IO not a ledger of this program, not writable, locked for more than 30 s. */
status history_open(const char *path, int read_only, history **h, error *e);
/* Adds the rows in one transaction; a row whose (sample, fingerprint) is known is left alone. *added: how many came. */
status history_add(history *h, const history_row *rows, size_t n, size_t *added, error *e);
/* Rows since a time (ISO 8601, NULL all) and of a lot (NULL all). */
status history_read(history *h, const char *since, const char *lot, history_list *out, error *e);
void history_list_free(history_list *l);
void history_close(history *h); /* NULL is fine */

#endif

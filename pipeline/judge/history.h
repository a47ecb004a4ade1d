/* The ledger of every sample measured so far: SQLite, atomic, idempotent, safe under several writers. */
#ifndef SWARD_JUDGE_HISTORY_H
#define SWARD_JUDGE_HISTORY_H
#include <stddef.h>

#include "base/status.h"

typedef struct history history;

/* One micrograph behind a row. */
typedef struct history_micrograph {
    const char *file, *sha256, *px_source; /* relative to the row's folder; "" unknown */
    double px_nm;                          /* NAN unknown */
    int used;                              /* 0: it was there and did not enter the sample */
} history_micrograph;

/* One sample of one run. Strings are borrowed when writing, owned by the list when reading. */
typedef struct {
    const char *sample, *lot, *wafer, *position, *etched_at; /* "" where unknown; NULL as "" when writing */
    const char *run_at;                           /* ISO 8601 UTC */
    const char *fingerprint;  /* hash of micrographs, protocol and version: the same run again adds nothing */
    const char *version;      /* of the program */
    const char *protocol;     /* its name */
    const char *protocol_sha256; /* of its canonical text; "" unknown */
    const char *folder;       /* where the micrographs were, absolute; "" unknown */
    double spacing_nm, spacing_nm_u, density_per_um2, size_d50_nm, weighted_reflectance; /* NAN missing */
    const char *verdict;
    const char *row_json;     /* the whole samples.csv row as one JSON object, sheet columns included */
    const history_micrograph *micrographs; /* [n_micrographs], for writing only */
    size_t n_micrographs;
    /* for reading only */
    double day;               /* when etched (where unknown: run), in days; differences count, not the origin */
    const char *excluded;     /* "": counts; else the reason and, in brackets, the initials */
} history_row;

typedef struct {
    history_row *rows; /* in order of time etched, then sample, then run_at */
    size_t n;
    char **storage;    /* private */
    size_t n_storage;
} history_list;

/* Opens or creates (read_only: never creates).
 *   out  *h the caller's (history_close), NULL on failure
 * An older ledger is brought up to date in one transaction when it is opened for writing, and read as it is otherwise.
 *   err  ST_IO no name, not a ledger of this program, a newer ledger, not writable, absent when read_only, locked for
 *        more than two minutes; ST_NO_MEMORY */
status history_open(const char *path, int read_only, history **h, error *e);
/* How long a locked file is waited for; 120 000 ms after history_open. */
void history_set_wait(history *h, int wait_ms);
/* Adds the rows in one transaction, all or none; a row whose (sample, fingerprint) is known is left alone.
 *   out  *added how many came (0 on failure)
 *   err  ST_IO read-only, locked, disk full, damaged; ST_NO_MEMORY */
status history_add(history *h, const history_row *rows, size_t n, size_t *added, error *e);
/* Which rows; a NULL member does not choose. `until` as `since`, inclusive; protocol is a name or the beginning of a digest. */
typedef struct {
    const char *since, *until, *lot, *protocol;
    int heads_only; /* row_json comes empty */
} history_filter;
/* history_read with every choice.
 *   err  also ST_BAD_INPUT `until` is no date */
status history_select(history *h, const history_filter *f, history_list *out, error *e);

/* Rows etched (where unknown: run) at or after a time (ISO 8601, UTC unless it says otherwise; NULL all) and of a lot
 * (NULL all), in order of that time, then sample, then run_at.
 *   out  the caller's (history_list_free), untouched on failure
 *   err  ST_BAD_INPUT `since` is no date; ST_IO damaged, locked; ST_NO_MEMORY */
status history_read(history *h, const char *since, const char *lot, history_list *out, error *e);
void history_list_free(history_list *l);
/* A time as a day, as in history_row. `what` opens the sentence.
 *   err  ST_BAD_INPUT it is no date and no time; ST_IO */
status history_day(history *h, const char *time, const char *what, double *day, error *e);

/* What happened to the process, by people. A change starts a new phase of every chart; a remark does not. */
typedef struct {
    const char *at, *text, *kind, *initials; /* ISO 8601; kind "change" or "remark"; initials "" unknown */
    double day;                              /* for reading only, as in history_row */
} history_note;

typedef struct {
    history_note *notes; /* in order of time */
    size_t n;
    char **storage; /* private, [n] */
} history_notes;

/* err  ST_BAD_INPUT no text, no such kind, `at` is no time; ST_IO; ST_NO_MEMORY */
status history_note_add(history *h, const history_note *note, error *e);
/* out  the caller's (history_notes_free), untouched on failure
 * err  ST_IO damaged, locked; ST_NO_MEMORY */
status history_notes_read(history *h, history_notes *out, error *e);
void history_notes_free(history_notes *n);

/* Takes an etch out of charts and comparisons, or back in. Nothing is deleted: each decision is one more row with its
 * reason, the newest counts, and the rows of the runs stay as they are.
 *   in   sample; etched_at NULL: the sample has one time of etching; excluded 1 out, 0 in; at: now, ISO 8601
 *   err  ST_BAD_INPUT no reason or initials, no such sample (at that time), several times and none named; ST_IO;
 *        ST_NO_MEMORY */
status history_exclude(history *h, const char *sample, const char *etched_at, int excluded, const char *reason,
                       const char *initials, const char *at, error *e);
/* Calls use() for every different micrograph (folder, file, SHA-256) behind the chosen rows, in the order of folder and file.
 *   in   use: a status other than ST_OK ends the walk and is returned
 *   err  ST_BAD_INPUT as history_select; ST_IO; those of use() */
typedef status history_use(const char *at, const history_micrograph *m, void *user, error *e);
status history_micrographs(history *h, const history_filter *f, history_use *use, void *user, error *e);

/* The only way in which rows leave the ledger: those that meet every criterion, at least one of which has to be set. Notes and
 * exclusions stay, and what was done is recorded.
 *   in   superseded: only rows of which a newer run of the same sample and time of etching exists; reason and initials: who
 *        decided; at: now, ISO 8601; sure 0: nothing is deleted, only counted
 *   out  *n rows that are, or would be, deleted
 *   err  ST_BAD_INPUT no criterion, no reason or initials, a date that is none; ST_IO; nothing is deleted then */
typedef struct {
    const char *before, *lot, *protocol; /* etched (where unknown: run) before; NULL: not asked */
    int superseded;
} history_prunable;
status history_prune(history *h, const history_prunable *which, const char *reason, const char *initials, const char *at, int sure,
                     size_t *n, error *e);
const char *history_engine(void); /* version of SQLite */
void history_close(history *h); /* NULL is fine */

#endif

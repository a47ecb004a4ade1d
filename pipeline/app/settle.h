/* Which micrographs of a watched folder are complete. A file that is being copied grows, or is there in full before its
 * contents are: it counts once nothing has changed between two looks and it can be decoded; one that cannot be decoded is
 * given time, and then it is what it is. */
#ifndef SWARD_APP_SETTLE_H
#define SWARD_APP_SETTLE_H
#include <stddef.h>

#include "base/status.h"
#include "io/file.h"

typedef struct {
    char *name;       /* below the root; owned */
    file_state state;
    double since_s;   /* when it was first seen like this */
    int looks;        /* how often it was seen like this */
    int decodes;      /* -1 not tried */
    int settled;      /* complete, or long enough as it is */
    int was_settled;  /* and once was, perhaps with other contents */
    int seen;         /* in this look */
} settle_file;

typedef struct {
    char *root;
    double patience_s;
    settle_file *files; /* [n] in byte order of the names */
    size_t n;
    size_t n_waiting;   /* files not settled */
    int hold;           /* 1: a file that was measured, or a text file beside, is being written again: better wait */
    char texts[65];     /* names and states of the sheets, sidecars and protocols in the folder */
    double texts_since_s;
} settle;               /* {0} = empty */

/* Between two looks that count, and before a file nobody touches is taken as it is unless the caller says otherwise. */
#define SETTLE_QUIET_S 1.0
#define SETTLE_PATIENCE_S 60.0

/* err ST_NO_MEMORY */
status settle_start(const char *root, double patience_s, settle *s, error *e);
/* Looks at the folder. `now_s` runs evenly; `wall_s` is the clock of the files' times.
 *   err  ST_IO the folder cannot be read; ST_NO_MEMORY */
status settle_look(settle *s, double now_s, double wall_s, error *e);
/* 1: a settled file, by its name. For run_hooks.admit; `s` is the settle. */
int settle_admits(void *s, const char *relative);
/* Names and states of the settled files as one SHA-256: the same text, nothing to do. err ST_NO_MEMORY */
status settle_digest(const settle *s, char out[65], error *e);
void settle_free(settle *s);

#endif

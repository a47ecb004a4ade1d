/* The output folder as readers see it: everything of a run is written beside it, into OUT/.sward-new, and moved into place at
 * the end in one go, so that tables, page, overlays and curves always belong to one run. A killed run leaves the old outputs;
 * one killed while it moves is finished by the next. One program at a time writes an OUT. */
#ifndef SWARD_APP_STAGE_H
#define SWARD_APP_STAGE_H
#include "base/status.h"

typedef struct {
    char *out, *folder; /* OUT, and where to write meanwhile; owned */
    int lock;           /* open file, -1: none */
} stage;                /* {0} is not empty: STAGE_NONE */
#define STAGE_NONE ((stage){ .lock = -1 })

/* Makes OUT, takes its lock, and finishes or clears away what a killed run has left. The lock dies with the process; where
 * the file system has no locks there is none.
 *   err  ST_IO cannot be made or written, another process (named) is writing there; ST_NO_MEMORY */
status stage_open(const char *out, stage *s, error *e);

/* An empty s->folder. err ST_IO, ST_NO_MEMORY */
status stage_begin(const stage *s, error *e);

/* Brings dir/relative, a finished output, to s->folder/relative: as a second name of the same file, or as a copy where the file
 * system has no such names.  err ST_IO, ST_NO_MEMORY */
status stage_adopt(const stage *s, const char *dir, const char *relative, error *e);

/* Moves everything into place. err ST_IO */
status stage_commit(const stage *s, error *e);

/* Drops what was not committed and gives the lock back. */
void stage_close(stage *s);

/* The folders above the last part of the path. err ST_IO, ST_NO_MEMORY */
status folder_make_parents(const char *path, error *e);

#endif

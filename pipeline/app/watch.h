/* A folder under watch: run again whenever something in it has come to rest, until asked to stop. */
#ifndef SWARD_APP_WATCH_H
#define SWARD_APP_WATCH_H
#include "app/run.h"

typedef struct {
    run_options run;        /* folder, out and so on; quiet is watch's own: verdicts are printed unless */
    double every_s;         /* looks at least so often */
    double patience_s;      /* a file that cannot be decoded is left for later so long */
    const char *on_verdict; /* program; NULL: none */
    double verdict_s;       /* how long it may take */
    int once;               /* stop when everything is complete and measured */
} watch_options;

/* Prints a line on stdout for every sample with a new verdict; what goes wrong later than at the start is said on stderr and
 * tried again. SIGINT and SIGTERM must be blocked in all threads (watch_block_signals, called before there are any): they are
 * looked for between micrographs and while waiting, and end the watch with everything written or nothing.
 *   err  ST_BAD_INPUT no such folder, wrong protocol, no such program; ST_IO the outputs cannot be written or locked, the
 *        signals; ST_NO_MEMORY */
status watch_folder(const watch_options *o, error *e);
status watch_block_signals(error *e);

#endif

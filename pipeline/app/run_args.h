/* The options that `sward run` and `sward watch` have in common. */
#ifndef SWARD_APP_RUN_ARGS_H
#define SWARD_APP_RUN_ARGS_H
#include <argp.h>

#include "app/run.h"

enum { OPT_PROTOCOL = 0x200, OPT_SHEET, OPT_OUT, OPT_HISTORY, OPT_JOBS, OPT_PX, OPT_BAR, OPT_SCALE, OPT_KEEP_TILT, OPT_NO_REPORT,
       OPT_FRESH, OPT_QUIET, OPT_VERBOSE, OPT_OF_COMMAND };

/* clang-format off */
#define RUN_ARGS \
    { "protocol",  OPT_PROTOCOL,  "FILE", 0, "how to measure, link, predict and judge (default: FOLDER/protocol.json if there, else built in)", 0 }, \
    { "sheet",     OPT_SHEET,     "FILE", 0, "sample sheet, CSV (default: FOLDER/samples.csv if there)", 0 }, \
    { "out",       OPT_OUT,       "DIR",  0, "where the results go (default: sward-out)", 0 }, \
    { "history",   OPT_HISTORY,   "FILE", 0, "the ledger of all samples (default: as the protocol says, else DIR/history.sqlite)", 0 }, \
    { "jobs",      OPT_JOBS,      "N",    0, "workers, 0 = one per core (default)", 0 }, \
    { "px",        OPT_PX,        "NM",   0, "pixel size of every micrograph, nm; outranks all other sources", 0 }, \
    { "bar",       OPT_BAR,       "LENGTH", 0, "what the burnt-in scale bar of every micrograph stands for, such as 5um; the sheet's bar_nm outranks it", 0 }, \
    { "scale",     OPT_SCALE,     "FILE", 0, "scale file of 'sward scale --save': replaces the instrument's pixel size where it applies", 0 }, \
    { "keep-tilt", OPT_KEEP_TILT, NULL,   0, "flag tilted views, do not stretch them (a holder that tilts back by itself)", 0 }, \
    { "no-report", OPT_NO_REPORT, NULL,   0, "tables only, no page", 0 }, \
    { "fresh",     OPT_FRESH,     NULL,   0, "measure everything again, even what is remembered", 0 }, \
    { "quiet",     OPT_QUIET,     NULL,   0, "no summary, no progress", 0 }, \
    { "verbose",   OPT_VERBOSE,   NULL,   0, "a line for each file left alone, and progress also when the output is no terminal", 0 }
/* clang-format on */

/* Takes such an option, or FOLDER, or checks at the end that there is one; what it does not know is ARGP_ERR_UNKNOWN. */
error_t run_args_parse(int key, char *arg, struct argp_state *state, run_options *o);

#endif

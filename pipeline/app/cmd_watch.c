/* sward watch FOLDER: runs again whenever new micrographs have come. */
#include <stdlib.h>

#include "app/command.h"
#include "app/run_args.h"
#include "app/settle.h"
#include "app/watch.h"
#include "base/number.h"
#include "base/quantity.h"

enum { OPT_EVERY = OPT_OF_COMMAND, OPT_PATIENCE, OPT_ON_VERDICT, OPT_VERDICT_TIME, OPT_ONCE };

/* clang-format off */
static const struct argp_option options[] = {
    RUN_ARGS,
    { "every",      OPT_EVERY,      "SECONDS", 0, "look at least so often, also where the system does not tell of changes (5)", 0 },
    { "patience",   OPT_PATIENCE,   "SECONDS", 0, "a file that cannot be decoded counts as half-copied until it has rested so long; then it is unreadable (60)", 0 },
    { "on-verdict", OPT_ON_VERDICT, "PROGRAM", 0, "run PROGRAM once for every sample whose verdict is new or has changed; see below", 0 },
    { "verdict-time", OPT_VERDICT_TIME, "SECONDS", 0, "end PROGRAM when it takes longer (10)", 0 },
    { "once",       OPT_ONCE,       NULL,      0, "end as soon as everything is complete and measured", 0 },
    { 0 }
};
/* clang-format on */

static double seconds(const char *arg, const char *option, double least, struct argp_state *state) {
    double v = 0.0;
    if (!number_parse(arg, &v) || v < least || v > 86400.0)
        argp_error(state, "%s: found '%s', expected seconds from %g to 86400", option, arg, least);
    return v;
}

static error_t parse(int key, char *arg, struct argp_state *state) {
    watch_options *o = state->input;
    switch (key) {
    case OPT_EVERY: o->every_s = seconds(arg, "--every", 0.1, state); break;
    case OPT_PATIENCE: o->patience_s = seconds(arg, "--patience", 0.0, state); break;
    case OPT_ON_VERDICT: o->on_verdict = arg; break;
    case OPT_VERDICT_TIME: o->verdict_s = seconds(arg, "--verdict-time", 0.1, state); break;
    case OPT_ONCE: o->once = 1; break;
    default: return run_args_parse(key, arg, state, &o->run);
    }
    return 0;
}

const struct argp watch_argp = {
    options, parse, "FOLDER",
    "Watches a folder: each micrograph that comes is measured as soon as it is complete, exactly as by 'sward run', and tables, page "
    "and history are brought up to date in one go. Prints a line for every sample whose verdict is new or has changed. Ends on SIGINT "
    "(Ctrl-C) or SIGTERM with exit status 0. Killed or not, the next watch or run goes on where it ended. One program at a time writes "
    "to an output folder."
    "\vA file is complete when it has not changed between two looks at least a second apart and can be decoded.\n\n"
    "PROGRAM is run without a shell and without arguments. Its environment has SWARD_SAMPLE, SWARD_VERDICT, SWARD_PREVIOUS_VERDICT "
    "(empty: none), SWARD_REASONS, SWARD_ETCHED_AT and SWARD_OUT; its standard input is one JSON object with sample, verdict, "
    "previous_verdict, reasons, etched_at, at, out and row, the sample's row of samples.csv. What it prints goes to standard error. "
    "That it fails or is ended is said there too and stops nothing. What was said of each sample stands in OUT/verdicts.jsonl, so a "
    "restart repeats nothing; only a kill while PROGRAM runs lets it run once more.\n\n"
    "Exit status: 0 ended as asked; 1 failed inside or at reading or writing; 2 wrong use or wrong protocol.",
    NULL, NULL, NULL
};

int cmd_watch(int argc, char **argv) {
    watch_options o = { .run = { .px_nm = MISSING, .bar_nm = MISSING }, .every_s = 5.0, .patience_s = SETTLE_PATIENCE_S, .verdict_s = 10.0 };
    error e = { 0 };
    if (argp_parse(&watch_argp, argc, argv, 0, NULL, &o) != 0) return EXIT_USAGE;
    if (watch_block_signals(&e) != ST_OK || watch_folder(&o, &e) != ST_OK) return command_failed("watch", &e);
    return EXIT_DONE;
}

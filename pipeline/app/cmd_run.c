/* sward run FOLDER: the whole pipeline. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "app/options.h"
#include "app/length.h"
#include "app/run.h"
#include "base/quantity.h"

enum { OPT_PROTOCOL = 0x200, OPT_SHEET, OPT_OUT, OPT_HISTORY, OPT_JOBS, OPT_PX, OPT_BAR, OPT_SCALE, OPT_KEEP_TILT, OPT_DRY_RUN, OPT_GATE, OPT_NO_REPORT, OPT_FRESH,
       OPT_QUIET, OPT_VERBOSE };

/* clang-format off */
static const struct argp_option options[] = {
    { "protocol",  OPT_PROTOCOL,  "FILE", 0, "how to measure, link, predict and judge (default: FOLDER/protocol.json if there, else built in)", 0 },
    { "sheet",     OPT_SHEET,     "FILE", 0, "sample sheet, CSV (default: FOLDER/samples.csv if there)", 0 },
    { "out",       OPT_OUT,       "DIR",  0, "where the results go (default: sward-out)", 0 },
    { "history",   OPT_HISTORY,   "FILE", 0, "the ledger of all samples (default: as the protocol says, else DIR/history.sqlite)", 0 },
    { "jobs",      OPT_JOBS,      "N",    0, "workers, 0 = one per core (default)", 0 },
    { "px",        OPT_PX,        "NM",   0, "pixel size of every micrograph, nm; outranks all other sources", 0 },
    { "bar",       OPT_BAR,       "LENGTH", 0, "what the burnt-in scale bar of every micrograph stands for, such as 5um; the sheet's bar_nm outranks it", 0 },
    { "scale",     OPT_SCALE,     "FILE", 0, "scale file of 'sward scale --save': replaces the instrument's pixel size where it applies", 0 },
    { "keep-tilt", OPT_KEEP_TILT, NULL,   0, "flag tilted views, do not stretch them (a holder that tilts back by itself)", 0 },
    { "dry-run",   OPT_DRY_RUN,   NULL,   0, "say which file belongs to which sample and what its pixel size is; measure and write nothing", 0 },
    { "gate",      OPT_GATE,      NULL,   0, "exit with 4 when a target is missed", 0 },
    { "no-report", OPT_NO_REPORT, NULL,   0, "tables only, no page", 0 },
    { "fresh",     OPT_FRESH,     NULL,   0, "measure everything again, even what is remembered", 0 },
    { "quiet",     OPT_QUIET,     NULL,   0, "no summary, no progress", 0 },
    { "verbose",   OPT_VERBOSE,   NULL,   0, "a line for each file left alone, and progress also when the output is no terminal", 0 },
    { 0 }
};
/* clang-format on */

static error_t parse(int key, char *arg, struct argp_state *state) {
    run_options *o = state->input;
    switch (key) {
    case OPT_PROTOCOL: o->protocol = arg; break;
    case OPT_SHEET: o->sheet = arg; break;
    case OPT_OUT: o->out = arg; break;
    case OPT_HISTORY: o->history = arg; break;
    case OPT_JOBS: o->jobs = option_jobs(arg, state); break;
    case OPT_PX: o->px_nm = option_px_nm(arg, state); break;
    case OPT_BAR:
        if (!length_parse(arg, &o->bar_nm))
            argp_error(state, "--bar: found '%s', expected a length with its unit, such as 5um or 500nm", arg);
        break;
    case OPT_SCALE: o->scale = arg; break;
    case OPT_KEEP_TILT: o->keep_tilt = 1; break;
    case OPT_DRY_RUN: o->dry_run = 1; break;
    case OPT_GATE: o->gate = 1; break;
    case OPT_NO_REPORT: o->no_report = 1; break;
    case OPT_FRESH: o->fresh = 1; break;
    case OPT_QUIET: o->quiet = 1; break;
    case OPT_VERBOSE: o->verbose = 1; break;
    case ARGP_KEY_ARG:
        if (o->folder) argp_error(state, "one FOLDER only; found '%s' too", arg);
        o->folder = arg;
        break;
    case ARGP_KEY_END:
        if (!o->folder) argp_error(state, "FOLDER is missing: the folder that holds the micrographs");
        break;
    default: return ARGP_ERR_UNKNOWN;
    }
    return 0;
}

const struct argp run_argp = {
    options, parse, "FOLDER",
    "Loads the micrographs of a folder, measures their texture, predicts the reflectance of every sample, judges it "
    "against the targets, remembers it, and writes tables, overlays and a report."
    "\vExit status: 0 done; 1 failed inside or at reading or writing; 2 wrong use or wrong protocol; 3 done, but some "
    "inputs could not be used (their rows say why); 4 with --gate: a target is missed.",
    NULL, NULL, NULL
};

int cmd_run(int argc, char **argv) {
    run_options o = { .px_nm = MISSING, .bar_nm = MISSING };
    run_outcome outcome = { 0, 0 };
    error e = { 0 };
    if (argp_parse(&run_argp, argc, argv, 0, NULL, &o) != 0) return EXIT_USAGE;
    if (run_folder(&o, &outcome, &e) != ST_OK) return command_failed("run", &e);
    if (o.gate && outcome.missed) return EXIT_TARGET_MISSED;
    return outcome.unusable ? EXIT_PARTIAL : EXIT_DONE;
}

/* sward run FOLDER: the whole pipeline. */
#include "app/command.h"
#include "app/part.h"
#include "app/run_args.h"
#include "base/quantity.h"

enum { OPT_DRY_RUN = OPT_OF_COMMAND, OPT_GATE, OPT_PART, OPT_JSON };

/* clang-format off */
static const struct argp_option options[] = {
    RUN_ARGS,
    { "json",      OPT_JSON,      NULL,   0, "print what results.json holds, not the summary", 0 },
    { "dry-run",   OPT_DRY_RUN,   NULL,   0, "say which file belongs to which sample and what its pixel size is; measure and write nothing", 0 },
    { "gate",      OPT_GATE,      NULL,   0, "exit with 4 when a target is missed", 0 },
    { "part",      OPT_PART,      "K/N",  0, "measure only part K of N, for 'sward gather' to join with the others", 0 },
    { 0 }
};
/* clang-format on */

static error_t parse(int key, char *arg, struct argp_state *state) {
    run_options *o = state->input;
    switch (key) {
    case OPT_JSON: o->json = 1; break;
    case OPT_DRY_RUN: o->dry_run = 1; break;
    case OPT_GATE: o->gate = 1; break;
    case OPT_PART:
        if (!part_parse(arg, &o->part, &o->parts))
            argp_error(state, "--part: found '%s', expected K/N with K from 1 to N, such as 2/8", arg);
        break;
    case ARGP_KEY_END:
        if (o->parts && (o->json || o->gate || o->dry_run))
            argp_error(state, "--part has no verdicts yet: --json and --gate belong to 'sward gather', --dry-run to the whole folder");
        return run_args_parse(key, arg, state, o);
    default: return run_args_parse(key, arg, state, o);
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
    run_outcome outcome = { .stopped = 0 };
    error e = { 0 };
    if (argp_parse(&run_argp, argc, argv, 0, NULL, &o) != 0) return EXIT_USAGE;
    if (run_folder(&o, NULL, &outcome, &e) != ST_OK) return command_failed("run", &e);
    if (o.gate && outcome.missed) return EXIT_TARGET_MISSED;
    return outcome.unusable ? EXIT_PARTIAL : EXIT_DONE;
}

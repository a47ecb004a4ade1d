/* sward gather PART...: joins what `sward run --part` wrote. */
#include <stdlib.h>

#include "app/command.h"
#include "app/options.h"
#include "app/part.h"
#include "app/run_args.h"
#include "base/mem.h"
#include "base/quantity.h"

enum { OPT_GATE = OPT_OF_COMMAND, OPT_JSON };

/* clang-format off */
static const struct argp_option options[] = {
    { "out",       OPT_OUT,       "DIR",  0, "where the results go (default: sward-out)", 0 },
    { "history",   OPT_HISTORY,   "FILE", 0, "the ledger of all samples (default: as the protocol says, else DIR/history.sqlite)", 0 },
    { "jobs",      OPT_JOBS,      "N",    0, "workers, 0 = one per core (default)", 0 },
    { "json",      OPT_JSON,      NULL,   0, "print what results.json holds, not the summary", 0 },
    { "gate",      OPT_GATE,      NULL,   0, "exit with 4 when a target is missed", 0 },
    { "no-report", OPT_NO_REPORT, NULL,   0, "tables only, no page", 0 },
    { "quiet",     OPT_QUIET,     NULL,   0, "no summary", 0 },
    { 0 }
};
/* clang-format on */

typedef struct {
    run_options o;
    const char **folders; /* [n] */
    size_t n;
} use;

static error_t parse(int key, char *arg, struct argp_state *state) {
    use *u = state->input;
    switch (key) {
    case OPT_JSON: u->o.json = 1; break;
    case OPT_GATE: u->o.gate = 1; break;
    case ARGP_KEY_ARG: u->folders[u->n++] = arg; break;
    case ARGP_KEY_END:
        if (!u->n) argp_error(state, "PART is missing: the output folders of 'sward run --part'");
        break;
    default: return run_args_parse(key, arg, state, &u->o);
    }
    return 0;
}

const struct argp gather_argp = {
    options, parse, "PART...",
    "Joins the parts that 'sward run FOLDER --part K/N --out PART' wrote, on one machine or on many, to the very outputs of a single "
    "run. All N parts are named, in any order. The micrographs are not read again; the protocol and the sample sheet must lie where "
    "they lay."
    "\vExit status: as that of 'sward run'.",
    NULL, NULL, NULL
};

int cmd_gather(int argc, char **argv) {
    use u = { .o = { .px_nm = MISSING, .bar_nm = MISSING } };
    run_outcome outcome = { .stopped = 0 };
    error e = { 0 };
    int code = EXIT_USAGE;
    u.folders = mem_array((size_t)argc, sizeof *u.folders);
    if (!u.folders) {
        NO_MEMORY(&e, "the parts");
        return command_failed("gather", &e);
    }
    if (argp_parse(&gather_argp, argc, argv, 0, NULL, &u) != 0) goto done;
    if (part_gather(&u.o, u.folders, u.n, &outcome, &e) != ST_OK) code = command_failed("gather", &e);
    else if (u.o.gate && outcome.missed) code = EXIT_TARGET_MISSED;
    else code = outcome.unusable ? EXIT_PARTIAL : EXIT_DONE;
done:
    free(u.folders);
    return code;
}

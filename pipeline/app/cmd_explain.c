/* sward explain SAMPLE [QUANTITY]: how a number came about. */
#include <stdlib.h>

#include "app/command.h"
#include "app/explain.h"

enum { OPT_OUT = 0x200, OPT_HISTORY, OPT_JSON };

/* clang-format off */
static const struct argp_option options[] = {
    { "out",     OPT_OUT,     "DIR",  0, "output folder of the run (default: sward-out)", 0 },
    { "history", OPT_HISTORY, "FILE", 0, "the newest row of this ledger instead, where the outputs are gone", 0 },
    { "json",    OPT_JSON,    NULL,   0, "one JSON object", 0 },
    { 0 }
};
/* clang-format on */

typedef struct {
    const char *sample, *quantity, *out, *history;
    int json;
} use;

static error_t parse(int key, char *arg, struct argp_state *state) {
    use *u = state->input;
    switch (key) {
    case OPT_OUT: u->out = arg; break;
    case OPT_HISTORY: u->history = arg; break;
    case OPT_JSON: u->json = 1; break;
    case ARGP_KEY_ARG:
        if (!u->sample) u->sample = arg;
        else if (!u->quantity) u->quantity = arg;
        else argp_error(state, "one SAMPLE and one QUANTITY only; found '%s' too", arg);
        break;
    case ARGP_KEY_END:
        if (!u->sample) argp_error(state, "SAMPLE is missing: a name of the column sample in samples.csv");
        if (u->out && u->history) argp_error(state, "--out or --history, not both");
        break;
    default: return ARGP_ERR_UNKNOWN;
    }
    return 0;
}

const struct argp explain_argp = {
    options, parse, "SAMPLE [QUANTITY]",
    "Tells how a number of a sample came about, from the outputs of a run: its micrographs with their SHA-256, where the pixel size is "
    "from and by which length standard, what the quantity is and where that is published, what was left out and why, the parts of the "
    "uncertainty, target and decision rule, where the height is from, program and protocol. QUANTITY is a column of samples.csv; without "
    "one, those with a target are explained."
    "\vNothing is measured anew: 'sward history verify' tells whether the files are still the ones that were measured.",
    NULL, NULL, NULL
};

int cmd_explain(int argc, char **argv) {
    use u = { .json = 0 };
    error e = { 0 };
    textbuf t = { 0 };
    cJSON *account = NULL;
    if (argp_parse(&explain_argp, argc, argv, 0, NULL, &u) != 0) return EXIT_USAGE;
    status st = u.history ? explain_history(u.history, u.sample, u.quantity, &account, &e)
                          : explain_run(u.out ? u.out : "sward-out", u.sample, u.quantity, &account, &e);
    if (st != ST_OK) return command_failed("explain", &e);
    if (u.json) {
        char *printed = cJSON_Print(account);
        text_add(&t, printed ? printed : "");
        text_add(&t, "\n");
        if (!printed) t.failed = 1;
        cJSON_free(printed);
    } else {
        explain_text(account, &t);
    }
    cJSON_Delete(account);
    return command_print("explain", &t);
}

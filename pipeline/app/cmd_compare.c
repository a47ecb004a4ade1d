/* sward compare RUN_A RUN_B: what changed between two runs over the same samples, and what of it is real. */
#include "app/command.h"
#include "app/compare.h"
#include "app/runfile.h"

enum { OPT_JSON = 0x200 };

/* clang-format off */
static const struct argp_option options[] = {
    { "json", OPT_JSON, NULL, 0, "one JSON object: differences and notes", 0 },
    { 0 }
};
/* clang-format on */

typedef struct {
    const char *dir[2];
    int n, json;
} compare_use;

static error_t parse(int key, char *arg, struct argp_state *state) {
    compare_use *u = state->input;
    switch (key) {
    case OPT_JSON: u->json = 1; break;
    case ARGP_KEY_ARG:
        if (u->n == 2) argp_error(state, "two runs only; found '%s' too", arg);
        else u->dir[u->n++] = arg;
        break;
    case ARGP_KEY_END:
        if (u->n < 2) argp_error(state, "name two output folders: before and after");
        break;
    default: return ARGP_ERR_UNKNOWN;
    }
    return 0;
}

const struct argp compare_argp = {
    options, parse, "RUN_A RUN_B",
    "Compares two finished runs sample by sample, matched by name: the difference of every quantity with its uncertainty, and "
    "whether it is real at 95 %. Only what varies from run to run counts; method and pixel size cancel when instrument, setting "
    "and protocol are the same.",
    NULL, NULL, NULL
};

int cmd_compare(int argc, char **argv) {
    compare_use u = { { NULL, NULL }, 0, 0 };
    error e = { 0 };
    cJSON *run[2] = { NULL, NULL };
    comparisons c = { 0 };
    textbuf out = { 0 };
    if (argp_parse(&compare_argp, argc, argv, 0, NULL, &u) != 0) return EXIT_USAGE;
    status st = runfile_read(u.dir[0], &run[0], &e);
    if (!st) st = runfile_read(u.dir[1], &run[1], &e);
    if (!st) st = compare_runs(run[0], run[1], &c, &e);
    if (!st && u.json) compare_json(&c, &out);
    else if (!st) compare_text(&c, &out);
    comparisons_free(&c);
    cJSON_Delete(run[0]);
    cJSON_Delete(run[1]);
    if (!st) return command_print("compare", &out);
    text_free(&out);
    return command_failed("compare", &e);
}

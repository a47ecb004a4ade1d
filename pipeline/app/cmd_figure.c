/* sward figure KIND: one chart of a finished run as an SVG file, for a paper or a slide. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "app/figure.h"
#include "app/runfile.h"
#include "io/file.h"

enum { OPT_RESULTS = 0x200, OPT_SAMPLE, OPT_QUANTITY, OPT_OUT };

/* clang-format off */
static const struct argp_option options[] = {
    { "results",  OPT_RESULTS,  "DIR",  0, "output folder of a run (default: sward-out)", 0 },
    { "sample",   OPT_SAMPLE,   "NAME", 0, "which sample; may be repeated up to four times (default: all, where they fit)", 0 },
    { "quantity", OPT_QUANTITY, "NAME", 0, "for history: a column of samples.csv (default: spacing_nm)", 0 },
    { "out",      OPT_OUT,      "FILE", 0, "the SVG file (default: standard output)", 0 },
    { 0 }
};
/* clang-format on */

typedef struct {
    figure_request q;
    const char *out;
} figure_use;

static error_t parse(int key, char *arg, struct argp_state *state) {
    figure_use *u = state->input;
    size_t n;
    switch (key) {
    case OPT_RESULTS: u->q.dir = arg; break;
    case OPT_QUANTITY: u->q.quantity = arg; break;
    case OPT_SAMPLE:
        if (u->q.n_samples == FIGURE_MOST) argp_error(state, "--sample: at most %d samples in one figure", FIGURE_MOST);
        else u->q.samples[u->q.n_samples++] = arg;
        break;
    case OPT_OUT:
        n = strlen(arg);
        if (n < 5 || strcmp(arg + n - 4, ".svg") != 0) argp_error(state, "--out: found '%s', expected a name that ends in .svg", arg);
        u->out = arg;
        break;
    case ARGP_KEY_ARG:
        if (u->q.kind) argp_error(state, "one KIND only; found '%s' too", arg);
        else if (!figure_kind_known(arg)) argp_error(state, "found '%s', expected spectra, sizes, acf, history or micrograph", arg);
        u->q.kind = arg;
        break;
    case ARGP_KEY_END:
        if (!u->q.kind) argp_error(state, "KIND is missing: spectra, sizes, acf, history or micrograph");
        break;
    default: return ARGP_ERR_UNKNOWN;
    }
    return 0;
}

const struct argp figure_argp = {
    options, parse, "KIND",
    "Draws one chart of a finished run from its tables: spectra (with their 95 % bands), sizes, acf (autocorrelation with its "
    "ring), history (a quantity over the etches), micrograph (the overlay).",
    NULL, NULL, NULL
};

int cmd_figure(int argc, char **argv) {
    figure_use u = { .q = { .dir = "sward-out", .quantity = "spacing_nm" } };
    error e = { 0 };
    cJSON *run = NULL;
    textbuf svg = { 0 };
    if (argp_parse(&figure_argp, argc, argv, 0, NULL, &u) != 0) return EXIT_USAGE;
    status st = runfile_read(u.q.dir, &run, &e);
    if (!st) st = figure_svg(&u.q, run, &svg, &e);
    if (!st && u.out) st = file_write(u.out, svg.s, svg.n, &e);
    cJSON_Delete(run);
    if (st || u.out) {
        text_free(&svg);
        return st ? command_failed("figure", &e) : EXIT_DONE;
    }
    return command_print("figure", &svg);
}

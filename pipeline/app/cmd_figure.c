/* sward figure KIND: one figure of a finished run as SVG, PDF or PNG, for a paper or a slide. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "app/figure.h"
#include "app/runfile.h"
#include "base/number.h"
#include "io/file.h"

enum { OPT_RESULTS = 0x200, OPT_SAMPLE, OPT_QUANTITY, OPT_OUT, OPT_WIDTH, OPT_HEIGHT, OPT_DPI, OPT_TEXT, OPT_DARK, OPT_TITLE, OPT_OVERLAY, OPT_DATA, OPT_FOLDER };

/* clang-format off */
static const struct argp_option options[] = {
    { NULL, 0, NULL, 0, "What is drawn:", 1 },
    { "results",  OPT_RESULTS,  "DIR",  0, "output folder of a run (default: sward-out)", 1 },
    { "run",      OPT_RESULTS,  NULL,   OPTION_ALIAS, NULL, 1 },
    { "sample",   OPT_SAMPLE,   "NAME", 0, "which sample; may be repeated up to four times (default: all, where they fit)", 1 },
    { "samples",  OPT_SAMPLE,   NULL,   OPTION_ALIAS, NULL, 1 },
    { "quantity", OPT_QUANTITY, "NAME", 0, "for history and wafer: a column of samples.csv (default: spacing_nm)", 1 },
    { "overlay",  OPT_OVERLAY,  NULL,   0, "for micrograph: with the centres found and a ring of the spacing", 1 },
    { "data",     OPT_DATA,     "FILE", 0, "for window, angles and history: what `sward window`, `sward predict --angles` or `sward history chart` printed with --json, instead of the run's own", 1 },
    { "folder",   OPT_FOLDER,   "DIR",  0, "for micrograph: where the files are, when they were moved after the run", 1 },
    { NULL, 0, NULL, 0, "How:", 2 },
    { "out",      OPT_OUT,      "FILE", 0, "the file; its ending .svg, .pdf or .png is the format (default: SVG to standard output)", 2 },
    { "width",    OPT_WIDTH,    "MM",   0, "width of the figure (default: 85, one column of a journal)", 2 },
    { "height",   OPT_HEIGHT,   "MM",   0, "its height (default: what suits the kind)", 2 },
    { "dpi",      OPT_DPI,      "N",    0, "dots per inch of a PNG (default: 300)", 2 },
    { "text",     OPT_TEXT,     "PT",   0, "size of the lettering and, with it, of lines and marks (default: 7)", 2 },
    { "title",    OPT_TITLE,    NULL,   0, "write the title above the figure", 2 },
    { "dark",     OPT_DARK,     NULL,   0, "light ink on a dark ground, for slides", 2 },
    { 0 }
};
/* clang-format on */

typedef struct {
    figure_request q;
    const char *out;
} figure_use;

static double number_option(const char *name, const char *arg, struct argp_state *state) {
    double v = 0.0;
    if (!number_parse(arg, &v) || !(v > 0.0)) argp_error(state, "--%s: found '%s', expected a number above 0", name, arg);
    return v;
}

static int ends_with(const char *text, const char *ending) {
    size_t n = strlen(text), m = strlen(ending);
    return n > m && !strcmp(text + n - m, ending);
}

static void set_out(figure_use *u, char *arg, struct argp_state *state) {
    static const char *const endings[] = { ".svg", ".pdf", ".png" };
    u->out = arg;
    for (int k = 0; k < 3; k++)
        if (ends_with(arg, endings[k])) {
            u->q.sheet.format = (sheet_format)k;
            return;
        }
    argp_error(state, "--out: found '%s', expected a name that ends in .svg, .pdf or .png", arg);
}

static void add_sample(figure_use *u, char *arg, struct argp_state *state) {
    if (u->q.n_samples == FIGURE_MOST) argp_error(state, "--sample: at most %d samples in one figure", FIGURE_MOST);
    else u->q.samples[u->q.n_samples++] = arg;
}

static error_t parse(int key, char *arg, struct argp_state *state) {
    figure_use *u = state->input;
    switch (key) {
    case OPT_RESULTS: u->q.dir = arg; break;
    case OPT_QUANTITY: u->q.quantity = arg; break;
    case OPT_DATA: u->q.data = arg; break;
    case OPT_FOLDER: u->q.folder = arg; break;
    case OPT_OVERLAY: u->q.signs = 1; break;
    case OPT_TITLE: u->q.sheet.titled = 1; break;
    case OPT_DARK: u->q.sheet.dark = 1; break;
    case OPT_WIDTH: u->q.sheet.width_mm = number_option("width", arg, state); break;
    case OPT_HEIGHT: u->q.sheet.height_mm = number_option("height", arg, state); break;
    case OPT_DPI: u->q.sheet.dpi = number_option("dpi", arg, state); break;
    case OPT_TEXT: u->q.sheet.text_pt = number_option("text", arg, state); break;
    case OPT_SAMPLE: add_sample(u, arg, state); break;
    case OPT_OUT: set_out(u, arg, state); break;
    case ARGP_KEY_ARG:
        if (u->q.kind) argp_error(state, "one KIND only; found '%s' too", arg);
        else if (!figure_kind(arg)) argp_error(state, "found '%s', expected %s", arg, figure_kinds());
        u->q.kind = figure_kind(arg);
        break;
    case ARGP_KEY_END:
        if (!u->q.kind) argp_error(state, "KIND is missing: %s", figure_kinds());
        break;
    default: return ARGP_ERR_UNKNOWN;
    }
    return 0;
}

const struct argp figure_argp = {
    options, parse, "KIND",
    "Draws one figure of a finished run from its tables, for print: spectra (with their 95 % bands), distribution (of the cells' "
    "sizes), autocorrelation (with its ring), psd, angles, window (the process window with the samples in it), history (a control "
    "chart), wafer (a map of each wafer), micrograph (with a scale bar).",
    NULL, NULL, NULL
};

int cmd_figure(int argc, char **argv) {
    figure_use u = { .q = { .dir = "sward-out", .quantity = "spacing_nm", .sheet = sheet_defaults() } };
    error e = { 0 };
    cJSON *run = NULL;
    char *bytes = NULL;
    size_t n = 0;
    u.q.sheet.creator = "sward " SWARD_VERSION;
    if (argp_parse(&figure_argp, argc, argv, 0, NULL, &u) != 0) return EXIT_USAGE;
    status st = runfile_read(u.q.dir, &run, &e);
    if (!st) st = figure_draw(&u.q, run, &bytes, &n, &e);
    if (!st && u.out) st = file_write(u.out, bytes, n, &e);
    cJSON_Delete(run);
    if (!st && !u.out) {
        textbuf svg = { 0 };
        text_add_n(&svg, bytes, n);
        free(bytes);
        return command_print("figure", &svg);
    }
    free(bytes);
    return st ? command_failed("figure", &e) : EXIT_DONE;
}

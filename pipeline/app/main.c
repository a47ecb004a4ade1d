/* The command table, dispatch, and the promise that exit 0 means the results were written. Everything else
 * lives in the cmd_ files. */
#include <errno.h>
#include <fftw3.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "app/command.h"
#include "io/json.h"

static const command commands[] = {
    { "run", cmd_run, &run_argp, "the whole pipeline on a folder" },
    { "watch", cmd_watch, &watch_argp, "a folder watched: new micrographs measured as they come" },
    { "explain", cmd_explain, &explain_argp, "how a number of a sample came about" },
    { "gather", cmd_gather, &gather_argp, "the parts of a divided run joined to its outputs" },
    { "measure", cmd_measure, &measure_argp, "texture numbers only" },
    { "repeat", cmd_repeat, &repeat_argp, "how well the measurement repeats, against the targets" },
    { "inspect", cmd_inspect, &inspect_argp, "what a file itself says: pixel size, strip, facts" },
    { "predict", cmd_predict, &predict_argp, "reflectance from numbers" },
    { "fit", cmd_fit, &fit_argp, "the link calibrated on measured spectra" },
    { "window", cmd_window, &window_argp, "process window: reflectance over spacing and height" },
    { "compare", cmd_compare, &compare_argp, "two runs over the same samples: what changed, and is it real?" },
    { "figure", cmd_figure, &figure_argp, "one chart of a run as an SVG file" },
    { "render", cmd_render, &render_argp, "micrographs of known truth" },
    { "scale", cmd_scale, &scale_argp, "pixel size from a grating or grid of known pitch" },
    { "history", cmd_history, &history_argp, "the ledger of every sample measured so far" },
    { "protocol", cmd_protocol, &protocol_argp, "print, check or explain a protocol" },
};
enum { N_COMMANDS = sizeof commands / sizeof commands[0] };

/* A full disk or a closed pipe is found here, also after argp's own output. */
static void check_stdout(void) {
    if (ferror(stdout) || fflush(stdout) != 0) {
        fprintf(stderr, "sward: cannot write the output: %s\n", strerror(errno));
        _exit(EXIT_FAILED);
    }
}

static const command *find(const char *name) {
    for (size_t i = 0; i < N_COMMANDS; i++)
        if (strcmp(commands[i].name, name) == 0) return &commands[i];
    return NULL;
}

static int unknown(const char *name) {
    const char *names[N_COMMANDS];
    for (size_t i = 0; i < N_COMMANDS; i++) names[i] = commands[i].name;
    const char *near = json_nearest(name, names, N_COMMANDS);
    fprintf(stderr, "sward: unknown command '%.80s'%s%s%s; see 'sward --help'\n", name,
            near ? ", did you mean '" : "", near ? near : "", near ? "'?" : "");
    return EXIT_USAGE;
}

/* Runs a command under the name argp shall print: "sward predict". */
static int dispatch(const command *c, int argc, char **argv) {
    char title[40];
    snprintf(title, sizeof title, "sward %s", c->name);
    argv[0] = title;
    int code = command_check_options(c, argc, argv);
    return code == EXIT_DONE ? c->run(argc, argv) : code;
}

/* `sward help` and `sward help COMMAND`. */
static int help(int argc, char **argv) {
    textbuf t = { 0 };
    if (argc > 2) {
        const command *c = find(argv[2]);
        char option[] = "--help";
        char *args[] = { NULL, option, NULL };
        return c ? dispatch(c, 2, args) : unknown(argv[2]);
    }
    help_overview(commands, N_COMMANDS, &t);
    return command_print("help", &t);
}

int main(int argc, char **argv) {
    signal(SIGPIPE, SIG_IGN); /* a closed pipe is a write error, and reported as one */
    if (atexit(check_stdout) != 0) return EXIT_FAILED;
    fftwf_make_planner_thread_safe();
    textbuf t = { 0 };
    if (argc < 2) {
        fputs("Usage: sward COMMAND [OPTION...] [FILE...]; see 'sward --help'\n", stderr);
        return EXIT_USAGE;
    }
    if (strcmp(argv[1], "help") == 0 || strcmp(argv[1], "--help") == 0 || strcmp(argv[1], "-h") == 0)
        return help(strcmp(argv[1], "help") == 0 ? argc : 2, argv);
    if (strcmp(argv[1], "--version") == 0 || strcmp(argv[1], "-V") == 0) {
        text_addf(&t, "%s\n", argp_program_version);
        return command_print("version", &t);
    }
    if (strcmp(argv[1], "--man") == 0) {
        help_manual(commands, N_COMMANDS, &t);
        return command_print("man", &t);
    }
    if (strcmp(argv[1], "--completion") == 0) {
        help_completion(commands, N_COMMANDS, &t);
        return command_print("completion", &t);
    }
    const command *c = find(argv[1]);
    return c ? dispatch(c, argc - 1, argv + 1) : unknown(argv[1]);
}

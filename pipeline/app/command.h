/* One row per subcommand: main dispatches, help, man page and completion read the same rows. */
#ifndef SWARD_APP_COMMAND_H
#define SWARD_APP_COMMAND_H
#include <argp.h>

#include "base/status.h"
#include "base/text.h"

enum { EXIT_DONE = 0, EXIT_FAILED = 1, EXIT_USAGE = 2, EXIT_PARTIAL = 3, EXIT_TARGET_MISSED = 4 };

typedef struct {
    const char *name;
    int (*run)(int argc, char **argv); /* argv[0] is "sward NAME"; returns the exit code */
    const struct argp *argp;           /* its options, for the man page and completion */
    const char *summary;               /* one line */
} command;

/* argp needs its GNU long options only; every command parses with this: exit status 2 on wrong use. */
extern const struct argp run_argp, measure_argp, predict_argp, fit_argp, window_argp, render_argp, history_argp, protocol_argp,
    repeat_argp, inspect_argp, scale_argp, figure_argp, compare_argp, gather_argp, watch_argp, explain_argp;
int cmd_run(int argc, char **argv);
int cmd_gather(int argc, char **argv);
int cmd_explain(int argc, char **argv);
int cmd_watch(int argc, char **argv);
int cmd_measure(int argc, char **argv);
int cmd_repeat(int argc, char **argv);
int cmd_inspect(int argc, char **argv);
int cmd_predict(int argc, char **argv);
int cmd_fit(int argc, char **argv);
int cmd_window(int argc, char **argv);
int cmd_compare(int argc, char **argv);
int cmd_figure(int argc, char **argv);
int cmd_render(int argc, char **argv);
int cmd_scale(int argc, char **argv);
int cmd_history(int argc, char **argv);
int cmd_protocol(int argc, char **argv);

/* Prints "sward NAME: sentence" to stderr. Returns EXIT_USAGE when the user's input is at fault, else
 * EXIT_FAILED. */
int command_failed(const char *name, const error *e);

/* Prints the text to stdout and frees it. Returns EXIT_DONE, or EXIT_FAILED with a sentence on stderr. main
 * checks stdout once more when the program ends. */
int command_print(const char *name, textbuf *t);

/* The first long option in argv that the command does not have: EXIT_USAGE with a hint on stderr; EXIT_DONE:
 * all known. argp alone names the option but no near one. */
int command_check_options(const command *c, int argc, char **argv);

/* A file the user named and that is not there is wrong use, not an I/O failure: ST_BAD_INPUT "PATH: there is
 * no such file", else ST_OK. */
status input_wanted(const char *path, error *e);

/* A text file the user named, whole (LIMIT_TEXT_FILE_BYTES), NUL behind the n bytes; the sentence of a failure begins with the
 * path. Caller frees *bytes, NULL on failure. err as input_wanted; ST_IO; ST_NO_MEMORY */
status input_read(const char *path, char **bytes, size_t *n, error *e);

/* Overview of all commands for `sward --help`; the manual page in man(7) macros; completion for bash. */
void help_overview(const command *commands, size_t n, textbuf *out);
void help_manual(const command *commands, size_t n, textbuf *out);
void help_completion(const command *commands, size_t n, textbuf *out);

#endif

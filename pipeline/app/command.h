/* One row per subcommand: main dispatches, help, man page and completion read the same rows. */
#ifndef SWARD_APP_COMMAND_H
#define SWARD_APP_COMMAND_H
#include <argp.h>

enum { EXIT_DONE = 0, EXIT_FAILED = 1, EXIT_USAGE = 2, EXIT_PARTIAL = 3, EXIT_TARGET_MISSED = 4 };

typedef struct {
    const char *name;
    int (*run)(int argc, char **argv); /* argv[0] is "sward NAME"; returns the exit code */
    const struct argp *argp;           /* its options, for the man page and completion */
    const char *summary;               /* one line */
} command;

/* argp needs its GNU long options only; every command parses with this: exit status 2 on wrong use. */
extern const struct argp run_argp, measure_argp, predict_argp, render_argp, history_argp, protocol_argp;
int cmd_run(int argc, char **argv);
int cmd_measure(int argc, char **argv);
int cmd_predict(int argc, char **argv);
int cmd_render(int argc, char **argv);
int cmd_history(int argc, char **argv);
int cmd_protocol(int argc, char **argv);

#endif

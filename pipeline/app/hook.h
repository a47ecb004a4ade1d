/* Runs a program of the user's for a verdict: no shell, no arguments, what it needs in its environment and on its standard
 * input. Its failure is a sentence, its hanging ends with its life; neither is ours. */
#ifndef SWARD_APP_HOOK_H
#define SWARD_APP_HOOK_H
#include <stddef.h>

#include "base/status.h"

typedef struct {
    const char *name, *value; /* value NULL: "" */
} hook_variable;

/* in   program: a path; variables: added to the environment; input: to its standard input, then end of file; timeout_s: after it
 *      the program and what it has started in its group get SIGTERM, a second later SIGKILL; stop: asked meanwhile, 1 shortens
 *      the wait to two seconds, NULL never
 * err  ST_IO cannot be started, ended with a failure, was ended; ST_NO_MEMORY */
status hook_run(const char *program, const hook_variable *variables, size_t n, const char *input, size_t n_input, double timeout_s,
                int (*stop)(void), error *e);

#endif

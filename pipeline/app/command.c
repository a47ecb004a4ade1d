/* What all commands share: version, exit status of wrong use, failures and results on their streams, hints
 * for mistyped options. */
#include "app/command.h"

#include <errno.h>
#include <stdio.h>
#include <string.h>

#include "base/limits.h"
#include "io/file.h"
#include "io/json.h"

const char *argp_program_version = "sward " SWARD_VERSION;
error_t argp_err_exit_status = EXIT_USAGE;

int command_failed(const char *name, const error *e) {
    fprintf(stderr, "sward %s: %s\n", name,
            e->text[0] ? e->text : "failed without a reason; please report this");
    return e->code == ST_BAD_INPUT ? EXIT_USAGE : EXIT_FAILED;
}

int command_print(const char *name, textbuf *t) {
    error e = { ST_OK, "" };
    int code = EXIT_DONE;
    if (text_check(t, "the output", &e) != ST_OK)
        code = command_failed(name, &e);
    else if (t->n && (fwrite(t->s, 1, t->n, stdout) != t->n || fflush(stdout) != 0)) {
        fail(&e, ST_IO, "cannot write the output: %s", strerror(errno));
        code = command_failed(name, &e);
        clearerr(stdout); /* said once */
    }
    text_free(t);
    return code;
}

status input_wanted(const char *path, error *e) {
    return file_exists(path) ? ST_OK : fail(e, ST_BAD_INPUT, "%s: there is no such file", path);
}

status input_read(const char *path, char **bytes, size_t *n, error *e) {
    *bytes = NULL;
    status st = input_wanted(path, e);
    if (st != ST_OK) return st;
    st = file_read(path, LIMIT_TEXT_FILE_BYTES, bytes, n, e);
    return st == ST_OK ? ST_OK : fail_within(e, st, path);
}

enum { MAX_OPTIONS = 64 };
/* argp's own. */
static const char *const common[] = { "help", "usage", "version" };

/* The option a "--word" (n bytes) names, also abbreviated as getopt allows: 1, and whether it takes a value.
 */
static int option_known(const struct argp_option *o, const char *word, size_t n, int *takes_value) {
    *takes_value = 0;
    for (size_t i = 0; i < sizeof common / sizeof common[0]; i++)
        if (strncmp(common[i], word, n) == 0) return 1;
    for (; o && (o->name || o->key || o->doc || o->group); o++)
        if (o->name && strncmp(o->name, word, n) == 0) {
            *takes_value = o->arg != NULL && !(o->flags & OPTION_ARG_OPTIONAL);
            return 1;
        }
    return 0;
}

int command_check_options(const command *c, int argc, char **argv) {
    for (int i = 1; i < argc && strcmp(argv[i], "--") != 0; i++) {
        const char *word = argv[i] + 2;
        size_t n = strcspn(word - 2, "=");
        int takes_value = 0;
        if (strncmp(argv[i], "--", 2) != 0) continue;
        n -= 2;
        if (option_known(c->argp->options, word, n, &takes_value)) {
            if (takes_value && word[n] != '=') i++;
            continue;
        }
        const char *names[MAX_OPTIONS];
        size_t n_names = 0;
        for (const struct argp_option *o = c->argp->options; o && (o->name || o->key || o->doc || o->group);
             o++)
            if (o->name && !(o->flags & OPTION_HIDDEN) && n_names < MAX_OPTIONS) names[n_names++] = o->name;
        char typed[80];
        snprintf(typed, sizeof typed, "%.*s", (int)(n < 79 ? n : 79), word);
        const char *near = json_nearest(typed, names, n_names);
        fprintf(stderr, "sward %s: unknown option '--%s'%s%s%s; see 'sward %s --help'\n", c->name, typed,
                near ? ", did you mean '--" : "", near ? near : "", near ? "'?" : "", c->name);
        return EXIT_USAGE;
    }
    return EXIT_DONE;
}

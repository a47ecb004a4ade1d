/* `sward protocol`: the built-in protocol, a check of a file, and what a file means. */
#include <stdio.h>
#include <string.h>

#include "app/command.h"
#include "app/materials.h"
#include "app/protocol.h"

typedef struct {
    const char *verb, *file;
} request;

static error_t protocol_option(int key, char *arg, struct argp_state *state) {
    request *q = state->input;
    switch (key) {
    case ARGP_KEY_ARG:
        if (state->arg_num == 0)
            q->verb = arg;
        else if (state->arg_num == 1)
            q->file = arg;
        else
            argp_error(state, "one file at a time");
        return 0;
    case ARGP_KEY_END:
        if (!q->verb)
            argp_error(state, "say print, check or explain");
        else if (strcmp(q->verb, "print") == 0 && q->file)
            argp_error(state, "print shows the built-in protocol and takes no file");
        else if (strcmp(q->verb, "check") == 0 && !q->file)
            argp_error(state, "check needs a protocol file");
        else if (strcmp(q->verb, "print") != 0 && strcmp(q->verb, "check") != 0 &&
                 strcmp(q->verb, "explain") != 0)
            argp_error(state, "'%s' is none of print, check, explain", q->verb);
        return 0;
    default:
        return ARGP_ERR_UNKNOWN;
    }
}

const struct argp protocol_argp = {
    NULL,
    protocol_option,
    "print\ncheck FILE\nexplain [FILE]",
    "A protocol says how to measure, how to link, which optical stack, which targets.\v"
    "print writes the built-in protocol with a comment per key; it is a valid protocol itself. check names "
    "the first "
    "mistake with its line and exits 2. explain says in sentences what a protocol means, the built-in one "
    "without FILE.",
    NULL,
    NULL,
    NULL
};

int cmd_protocol(int argc, char **argv) {
    request q = { NULL, NULL };
    textbuf out = { 0 };
    error e = { ST_OK, "" };
    protocol p = { 0 };
    setup s = { 0 };
    argp_parse(&protocol_argp, argc, argv, 0, NULL, &q);
    int check = strcmp(q.verb, "check") == 0;
    status st = ST_OK;
    if (strcmp(q.verb, "print") == 0)
        protocol_print(&out);
    else
        st = q.file ? protocol_read(q.file, &p, &e) : protocol_defaults(&p, &e);
    if (st == ST_OK && check) { /* what it names must be there too */
        st = setup_make(&p, &s, &e);
        if (st != ST_OK) fail_within(&e, st, q.file);
    }
    if (st == ST_OK && check)
        text_addf(&out, "%s is fine\n", q.file);
    else if (st == ST_OK && p.name)
        protocol_explain(&p, &out);
    setup_free(&s);
    protocol_free(&p);
    if (st == ST_OK) return command_print("protocol", &out);
    text_free(&out);
    return command_failed("protocol", &e);
}

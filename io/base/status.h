/* How every room says that something went wrong: a status to branch on, one sentence to show. */
#ifndef SWARD_BASE_STATUS_H
#define SWARD_BASE_STATUS_H

typedef enum {
    ST_OK,
    ST_BAD_INPUT, /* what the user gave cannot be used: file, option, protocol, number */
    ST_NO_RESULT, /* the input is fine but does not carry the answer */
    ST_IO,        /* reading or writing failed */
    ST_NO_MEMORY, /* memory or a limit of the program */
    ST_BUG        /* should not happen */
} status;

typedef struct {
    status code;
    char text[480]; /* one sentence: where, what was found, what was expected, what to do */
} error;            /* {0} = fine */

/* Records the first cause (a later call on a filled error keeps it) and returns `code`. `e` may be NULL. */
status fail(error *e, status code, const char *fmt, ...) __attribute__((format(printf, 3, 4)));

/* Puts "context: " in front of a recorded failure (a file name, a sample); returns its code. */
status fail_within(error *e, status code, const char *context);

#endif

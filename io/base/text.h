/* A growing text, the base of every writer (CSV, JSON, SVG, HTML). A failed append is remembered, so that a
 * writer checks once at the end. */
#ifndef SWARD_BASE_TEXT_H
#define SWARD_BASE_TEXT_H
#include <stddef.h>

#include "base/status.h"

typedef struct {
    char *s; /* NUL-terminated once anything was added; NULL when empty */
    size_t n, room;
    int failed;
} textbuf; /* {0} = empty */

void text_add(textbuf *t, const char *s);
void text_add_n(textbuf *t, const char *s, size_t n);
/* The same with control characters shown as '?': names of files reach a terminal through this. */
void text_add_plain(textbuf *t, const char *s);
void text_addf(textbuf *t, const char *fmt, ...) __attribute__((format(printf, 2, 3)));
/* ST_NO_MEMORY when any append failed (or passed LIMIT_OUTPUT_BYTES), else ST_OK. */
status text_check(const textbuf *t, const char *what, error *e);
void text_free(textbuf *t);

#endif

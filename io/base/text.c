#include "base/text.h"

#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"

static int make_room(textbuf *t, size_t more) {
    if (t->failed) return 0;
    if (more < t->room - t->n && t->room) return 1;
    size_t want = t->n + more + 1, room = t->room ? t->room : 256;
    while (room < want && room <= LIMIT_OUTPUT_BYTES) room *= 2;
    char *s = room > LIMIT_OUTPUT_BYTES ? NULL : mem_grow(t->s, room, 1);
    if (!s) {
        t->failed = 1;
        return 0;
    }
    t->s = s;
    t->room = room;
    return 1;
}

void text_add_n(textbuf *t, const char *s, size_t n) {
    if (!make_room(t, n)) return;
    memcpy(t->s + t->n, s, n);
    t->n += n;
    t->s[t->n] = '\0';
}

void text_add(textbuf *t, const char *s) { text_add_n(t, s, strlen(s)); }

void text_add_plain(textbuf *t, const char *s) {
    for (const unsigned char *p = (const unsigned char *)s; *p; p++) {
        int c1 = p[0] == 0xc2 && p[1] >= 0x80 && p[1] < 0xa0; /* U+0080 to U+009F */
        if (*p < 0x20 || *p == 0x7f || c1) text_add_n(t, "?", 1);
        else text_add_n(t, (const char *)p, 1);
        p += c1;
    }
}

void text_addf(textbuf *t, const char *fmt, ...) {
    va_list args, again;
    va_start(args, fmt);
    va_copy(again, args);
    int n = vsnprintf(NULL, 0, fmt, args);
    if (n >= 0 && make_room(t, (size_t)n)) {
        vsnprintf(t->s + t->n, (size_t)n + 1, fmt, again);
        t->n += (size_t)n;
    }
    va_end(again);
    va_end(args);
}

status text_check(const textbuf *t, const char *what, error *e) { return t->failed ? NO_MEMORY(e, what) : ST_OK; }

void text_free(textbuf *t) {
    free(t->s);
    *t = (textbuf){ 0 };
}

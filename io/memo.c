#include "io/memo.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/file.h"

enum { MARK = 16 };

static char *entry_path(const char *folder, const char *key, const char *kind) {
    char name[96];
    snprintf(name, sizeof name, "%.64s.%.20s", key, kind);
    return path_join(folder, name);
}

int memo_get(const char *folder, const char *key, const char *kind, char **bytes, size_t *n) {
    char *path = entry_path(folder, key, kind), *all = NULL, mark[17];
    size_t size = 0, head = strlen(kind) + 1;
    int ok = path && file_read(path, LIMIT_FILE_BYTES, &all, &size, NULL) == ST_OK && size >= head + MARK &&
             !memcmp(all, kind, head - 1) && all[head - 1] == '\n';
    if (ok) {
        quick_mark(all, size - MARK, mark);
        ok = !memcmp(mark, all + size - MARK, MARK);
    }
    if (ok) {
        *n = size - MARK - head;
        memmove(all, all + head, *n);
        *bytes = all;
        all = NULL;
    }
    free(all);
    free(path);
    return ok;
}

status memo_put(const char *folder, const char *key, const char *kind, const textbuf *body, error *e) {
    textbuf all = { 0 };
    char *path = entry_path(folder, key, kind), mark[17];
    text_addf(&all, "%s\n", kind);
    if (body->n) text_add_n(&all, body->s, body->n);
    status st = path ? text_check(&all, "what is remembered", e) : NO_MEMORY(e, "a path");
    if (st == ST_OK) {
        quick_mark(all.s, all.n, mark);
        text_add_n(&all, mark, MARK);
        st = text_check(&all, "what is remembered", e);
    }
    if (st == ST_OK) st = folder_make(folder, e);
    if (st == ST_OK) st = file_write(path, all.s, all.n, e);
    text_free(&all);
    free(path);
    return st;
}

#include "app/told.h"

#include <cjson/cJSON.h>
#include <errno.h>
#include <fcntl.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "base/limits.h"
#include "base/mem.h"
#include "base/text.h"
#include "io/file.h"
#include "io/json.h"

void told_free(told *t) {
    for (size_t i = 0; i < t->n; i++) {
        free(t->entries[i].sample);
        free(t->entries[i].verdict);
    }
    free(t->entries);
    free(t->path);
    *t = (told){ .n = 0 };
}

static told_entry *find(const told *t, const char *sample) {
    for (size_t i = t->n; i-- > 0;)
        if (!strcmp(t->entries[i].sample, sample)) return &t->entries[i];
    return NULL;
}

const char *told_last(const told *t, const char *sample) {
    const told_entry *e = find(t, sample);
    return e ? e->verdict : NULL;
}

static status keep(told *t, const char *sample, const char *verdict, error *e) {
    told_entry *known = find(t, sample);
    char *word = mem_text(verdict);
    if (!word) return NO_MEMORY(e, "the verdicts said");
    if (known) {
        free(known->verdict);
        known->verdict = word;
        return ST_OK;
    }
    told_entry *entries = mem_grow(t->entries, t->n + 1, sizeof *entries);
    char *name = entries ? mem_text(sample) : NULL;
    if (entries) t->entries = entries;
    if (!name) {
        free(word);
        return NO_MEMORY(e, "the verdicts said");
    }
    t->entries[t->n++] = (told_entry){ name, word };
    return ST_OK;
}

static status read_line(told *t, const char *line, size_t n, error *e) {
    cJSON *o = cJSON_ParseWithLength(line, n);
    const cJSON *sample = cJSON_GetObjectItemCaseSensitive(o, "sample"), *verdict = cJSON_GetObjectItemCaseSensitive(o, "verdict");
    status st = ST_OK;
    if (cJSON_IsString(sample) && cJSON_IsString(verdict)) st = keep(t, sample->valuestring, verdict->valuestring, e);
    cJSON_Delete(o);
    return st;
}

status told_open(const char *out, told *t, error *e) {
    char *bytes = NULL;
    size_t n = 0;
    *t = (told){ .path = path_join(out, "verdicts.jsonl") };
    if (!t->path) return NO_MEMORY(e, "a path");
    if (!file_exists(t->path)) return ST_OK;
    status st = file_read(t->path, LIMIT_TEXT_FILE_BYTES, &bytes, &n, e);
    if (st != ST_OK) return fail_within(e, st, t->path);
    t->torn = n && bytes[n - 1] != '\n';
    for (size_t at = 0; st == ST_OK && at < n;) {
        const char *end = memchr(bytes + at, '\n', n - at);
        size_t length = end ? (size_t)(end - bytes) - at : n - at;
        if (end) st = read_line(t, bytes + at, length, e);
        at += length + 1;
    }
    free(bytes);
    return st;
}

status told_add(told *t, const char *at, const char *sample, const char *verdict, error *e) {
    textbuf line = { 0 };
    text_addf(&line, "%s{\"at\": \"%s\", \"sample\": ", t->torn ? "\n" : "", at);
    json_string(&line, sample);
    text_add(&line, ", \"verdict\": ");
    json_string(&line, verdict);
    text_add(&line, "}\n");
    status st = text_check(&line, "the verdicts said", e);
    int fd = st == ST_OK ? open(t->path, O_WRONLY | O_CREAT | O_APPEND | O_CLOEXEC, 0666) : -1;
    if (st == ST_OK && (fd < 0 || write(fd, line.s, line.n) != (ssize_t)line.n || fsync(fd)))
        st = fail(e, ST_IO, "%s: cannot be written: %s", t->path, strerror(errno));
    if (fd >= 0) close(fd);
    t->torn = st != ST_OK;
    text_free(&line);
    return st == ST_OK ? keep(t, sample, verdict, e) : st;
}

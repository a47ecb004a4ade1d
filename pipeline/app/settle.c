#include "app/settle.h"

#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "app/folder.h"
#include "base/mem.h"
#include "base/text.h"
#include "io/load.h"

void settle_free(settle *s) {
    for (size_t i = 0; i < s->n; i++) free(s->files[i].name);
    free(s->files);
    free(s->root);
    *s = (settle){ .n = 0 };
}

status settle_start(const char *root, double patience_s, settle *s, error *e) {
    *s = (settle){ .patience_s = patience_s, .root = mem_text(root), .texts_since_s = -SETTLE_PATIENCE_S };
    return s->root ? ST_OK : NO_MEMORY(e, "a path");
}

static int by_name(const void *a, const void *b) { return strcmp(((const settle_file *)a)->name, ((const settle_file *)b)->name); }

static settle_file *find(const settle *s, const char *name) {
    char *key = mem_text(name); /* the key of a search is not const */
    settle_file wanted = { .name = key };
    settle_file *found = key && s->n ? bsearch(&wanted, s->files, s->n, sizeof *s->files, by_name) : NULL;
    free(key);
    return found;
}

static int same_state(const file_state *a, const file_state *b) {
    return a->bytes == b->bytes && a->seconds == b->seconds && a->nanoseconds == b->nanoseconds;
}

static int decodes(const char *path) {
    load_options o = load_defaults();
    micrograph m = { 0 };
    int ok = load_file(path, &o, &m, NULL) == ST_OK;
    micrograph_free(&m);
    return ok;
}

static void judge_file(const settle *s, settle_file *f, const char *path, double now_s, double wall_s) {
    file_state now;
    f->seen = 1;
    if (!file_state_of(path, &now)) now = (file_state){ .bytes = 0 }; /* a pipe, a broken link: unreadable once settled */
    if (!f->looks || !same_state(&now, &f->state)) {
        f->state = now;
        f->since_s = now_s;
        f->looks = 0;
        f->settled = 0;
        f->decodes = -1;
    }
    f->looks++;
    if (f->settled) return;
    /* Untouched for long, or as it is for long enough. */
    int rested = wall_s - (double)now.seconds >= s->patience_s || now_s - f->since_s >= s->patience_s;
    int quiet = f->looks >= 2 && now_s - f->since_s >= SETTLE_QUIET_S;
    if (quiet && !rested && f->decodes < 0) f->decodes = decodes(path);
    if (rested || (quiet && f->decodes > 0)) f->settled = f->was_settled = 1;
}

/* What is gone leaves the list, the new ones enter it. */
static status merge(settle *s, const file_list *list, error *e) {
    settle_file *files = mem_array(list->n, sizeof *files);
    if (!files) return NO_MEMORY(e, "the files of the folder");
    for (size_t i = 0; i < list->n; i++) { /* the list is in byte order too */
        settle_file *old = find(s, list->paths[i]);
        if (old) {
            files[i] = *old;
            old->seen = -1; /* moved */
        } else if (!(files[i].name = mem_text(list->paths[i]))) {
            for (size_t k = 0; k < i; k++) free(files[k].name);
            for (size_t k = 0; k < s->n; k++)
                if (s->files[k].seen >= 0) free(s->files[k].name);
            free(files);
            free(s->files);
            s->files = NULL;
            s->n = 0;
            return NO_MEMORY(e, "the files of the folder");
        }
    }
    for (size_t k = 0; k < s->n; k++)
        if (s->files[k].seen >= 0) free(s->files[k].name);
    free(s->files);
    s->files = files;
    s->n = list->n;
    if (s->n) qsort(s->files, s->n, sizeof *s->files, by_name);
    return ST_OK;
}

static int is_text(const char *relative) {
    static const char *const endings[] = { ".csv", ".json", ".txt", ".hdr" };
    size_t n = strlen(relative);
    for (size_t i = 0; i < sizeof endings / sizeof endings[0]; i++) {
        size_t k = strlen(endings[i]);
        if (n > k && !strcasecmp(relative + n - k, endings[i])) return 1;
    }
    return 0;
}

static void add_state(const char *name, const file_state *f, textbuf *t) {
    text_addf(t, "%s|%lld|%lld|%lld\n", name, f->bytes, f->seconds, f->nanoseconds);
}

/* Sheets, sidecars and protocols: a change of any of them is worth another run, once it has come to rest. */
static status look_at_texts(settle *s, double now_s, error *e) {
    file_list list = { 0 };
    textbuf t = { 0 };
    char digest[65];
    status st = folder_walk(s->root, is_text, &list, e);
    for (size_t i = 0; st == ST_OK && i < list.n; i++) {
        file_state state;
        char *path = path_join(s->root, list.paths[i]);
        if (path && file_state_of(path, &state)) add_state(list.paths[i], &state, &t);
        free(path);
    }
    if (st == ST_OK) st = text_check(&t, "the folder", e);
    if (st == ST_OK) {
        sha256_hex(t.s ? t.s : "", t.n, digest);
        if (s->texts[0] && strcmp(digest, s->texts)) s->texts_since_s = now_s;
        memcpy(s->texts, digest, sizeof digest);
        if (now_s - s->texts_since_s < SETTLE_QUIET_S) s->hold = 1;
    }
    text_free(&t);
    file_list_free(&list);
    return st;
}

status settle_look(settle *s, double now_s, double wall_s, error *e) {
    file_list list = { 0 };
    status st = folder_walk(s->root, folder_is_picture, &list, e);
    if (st == ST_OK) st = merge(s, &list, e);
    s->n_waiting = 0;
    s->hold = 0;
    if (st == ST_OK) st = look_at_texts(s, now_s, e);
    for (size_t i = 0; st == ST_OK && i < s->n; i++) {
        settle_file *f = &s->files[i];
        char *path = path_join(s->root, f->name);
        if (!path) st = NO_MEMORY(e, "a path");
        else judge_file(s, f, path, now_s, wall_s);
        free(path);
        s->n_waiting += (size_t)!f->settled;
        if (!f->settled && f->was_settled) s->hold = 1;
    }
    file_list_free(&list);
    return st;
}

int settle_admits(void *s, const char *relative) {
    const settle_file *f = find(s, relative);
    return f && f->settled;
}

status settle_digest(const settle *s, char out[65], error *e) {
    textbuf t = { 0 };
    text_addf(&t, "%s\n", s->texts);
    for (size_t i = 0; i < s->n; i++)
        if (s->files[i].settled) add_state(s->files[i].name, &s->files[i].state, &t);
    status st = text_check(&t, "the files of the folder", e);
    if (st == ST_OK) sha256_hex(t.s ? t.s : "", t.n, out);
    text_free(&t);
    return st;
}

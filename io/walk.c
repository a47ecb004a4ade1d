/* The walk through a folder of micrographs: every regular file that is wanted, in byte order of the relative
 * names, whatever order the file system keeps. Links are followed only within the root and never in a circle.
 */
#define _XOPEN_SOURCE 700 /* realpath */
#include <dirent.h>
#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/file.h"

typedef struct {
    dev_t device;
    ino_t node;
} place;

typedef struct {
    const char *root;
    char *real_root; /* resolved, to judge where a link leads */
    int (*keep)(const char *relative);
    file_list list;
    size_t room;
    place above[LIMIT_FOLDER_DEPTH + 1]; /* the folders we stand in */
} walker;

/* sward's own description of an output folder names the program in its first lines; a data package of
 * somebody else is an ordinary folder. */
static int is_own_output(const char *folder) {
    char *path = path_join(folder, "datapackage.json"), *text = NULL;
    size_t n = 0;
    int own = path && file_read(path, LIMIT_TEXT_FILE_BYTES, &text, &n, NULL) == ST_OK &&
              strstr(text, "sward") != NULL;
    free(text);
    free(path);
    return own;
}

static int link_stays_inside(const walker *w, const char *path) {
    char *target = realpath(path, NULL);
    if (!target) return 1; /* leads nowhere: whoever opens it will say so */
    size_t n = strlen(w->real_root);
    int inside = !strncmp(target, w->real_root, n) && (target[n] == '/' || w->real_root[n - 1] == '/');
    free(target);
    return inside;
}

static status take_file(walker *w, char **relative, error *e) {
    if (w->keep && !w->keep(*relative)) return ST_OK;
    if (w->list.n == LIMIT_FOLDER_FILES)
        return fail(e, ST_NO_MEMORY, "%s: more than %zu files; split the folder", w->root,
                    LIMIT_FOLDER_FILES);
    if (w->list.n == w->room) {
        size_t room = w->room ? 2 * w->room : 64;
        char **paths = mem_grow(w->list.paths, room, sizeof *paths);
        if (!paths) return NO_MEMORY(e, w->root);
        w->list.paths = paths;
        w->room = room;
    }
    w->list.paths[w->list.n++] = *relative;
    *relative = NULL;
    return ST_OK;
}

static status walk_folder(walker *w, const char *relative, int depth, error *e);

static status visit(walker *w, const char *folder, const char *name, int depth, error *e) {
    struct stat info;
    status st = ST_OK;
    char *relative = path_join(folder, name);
    char *path = relative ? path_join(w->root, relative) : NULL;
    if (!path) {
        st = NO_MEMORY(e, w->root);
        goto done;
    }
    if (lstat(path, &info)) goto done; /* gone since we listed it */
    if (S_ISLNK(info.st_mode) && !link_stays_inside(w, path)) goto done;
    if (S_ISLNK(info.st_mode) && stat(path, &info)) info.st_mode = S_IFLNK;
    if (!S_ISDIR(info.st_mode)) /* pipes, sockets and broken links too: refused when opened, but not left out */
        st = take_file(w, &relative, e);
    else if (depth < LIMIT_FOLDER_DEPTH) {
        for (int i = 0; i <= depth; i++)
            if (w->above[i].device == info.st_dev && w->above[i].node == info.st_ino) goto done;
        w->above[depth + 1] = (place){ info.st_dev, info.st_ino };
        if (!is_own_output(path)) st = walk_folder(w, relative, depth + 1, e);
    }
done:
    free(path);
    free(relative);
    return st;
}

static status walk_folder(walker *w, const char *relative, int depth, error *e) {
    char *path = path_join(w->root, relative);
    if (!path) return NO_MEMORY(e, w->root);
    DIR *d = opendir(path);
    if (!d) {
        char why[128] = "";
        int code = errno;
        if (strerror_r(code, why, sizeof why)) snprintf(why, sizeof why, "system error %d", code);
        status st = fail(e, ST_IO, "%s: the folder cannot be read: %s", path, why);
        free(path);
        return st;
    }
    status st = ST_OK;
    for (const struct dirent *entry; st == ST_OK && (entry = readdir(d)) != NULL;)
        if (entry->d_name[0] != '.') st = visit(w, relative, entry->d_name, depth, e);
    closedir(d);
    free(path);
    return st;
}

static int compare_paths(const void *a, const void *b) {
    return strcmp(*(const char *const *)a, *(const char *const *)b);
}

status folder_walk(const char *root, int (*keep)(const char *relative), file_list *out, error *e) {
    walker w = { .root = root[0] ? root : ".", .keep = keep };
    struct stat info;
    w.real_root = realpath(w.root, NULL);
    status st = ST_OK;
    if (!w.real_root || stat(w.root, &info))
        st = fail(e, ST_IO, "%s: no such folder", w.root);
    else {
        w.above[0] = (place){ info.st_dev, info.st_ino };
        st = walk_folder(&w, "", 0, e);
    }
    if (st == ST_OK) {
        if (w.list.n) qsort(w.list.paths, w.list.n, sizeof *w.list.paths, compare_paths);
        *out = w.list;
        w.list = (file_list){ 0 };
    }
    file_list_free(&w.list);
    free(w.real_root);
    return st;
}

void file_list_free(file_list *l) {
    for (size_t i = 0; i < l->n; i++) free(l->paths[i]);
    free(l->paths);
    *l = (file_list){ 0 };
}

/* The walk through a folder of micrographs: every regular file that is wanted, in natural order of the relative
 * names, whatever order the file system keeps. Links are followed only within the root and never in a circle;
 * what is left alone is listed with its reason. */
#define _XOPEN_SOURCE 700 /* realpath */
#include <dirent.h>
#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>
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

/* The lock of whoever writes an output lies in it from the start; the description at its end names the program in its first
 * lines; a data package of somebody else is an ordinary folder. */
static int is_own_output(const char *folder) {
    char *lock = path_join(folder, OUTPUT_LOCK), *path = path_join(folder, "datapackage.json"), *text = NULL;
    size_t n = 0;
    int locked = lock && file_exists(lock);
    free(lock);
    int own = !locked && path && file_read(path, LIMIT_TEXT_FILE_BYTES, &text, &n, NULL) == ST_OK &&
              strstr(text, "sward") != NULL;
    free(text);
    free(path);
    return locked || own;
}

static int link_stays_inside(const walker *w, const char *path) {
    char *target = realpath(path, NULL);
    if (!target) return 1; /* leads nowhere: whoever opens it will say so */
    size_t n = strlen(w->real_root);
    int inside = !strncmp(target, w->real_root, n) && (!target[n] || target[n] == '/' || w->real_root[n - 1] == '/');
    free(target);
    return inside;
}

/* Names that programs give to what they have not finished or only keep for themselves. */
static int is_temporary(const char *name) {
    static const char *const endings[] = { "~", ".tmp", ".temp", ".part", ".partial", ".filepart", ".crdownload", ".download" };
    size_t n = strlen(name);
    if (name[0] == '~') return 1;
    for (size_t i = 0; i < sizeof endings / sizeof endings[0]; i++) {
        size_t k = strlen(endings[i]);
        if (n > k && !strcasecmp(name + n - k, endings[i])) return 1;
    }
    return 0;
}

status file_list_leave(file_list *l, const char *path, const char *why, int matters, error *e) {
    left_file *left = mem_grow(l->left, l->n_left + 1, sizeof *left);
    if (!left) return NO_MEMORY(e, "the folder");
    l->left = left;
    char *copy = mem_text(path);
    if (!copy) return NO_MEMORY(e, "the folder");
    l->left[l->n_left++] = (left_file){ copy, why, matters };
    return ST_OK;
}

static status leave(walker *w, const char *relative, const char *why, int matters, error *e) {
    if (w->list.n_left >= LIMIT_FOLDER_FILES)
        return fail(e, ST_NO_MEMORY, "%s: more than %zu files; split the folder", w->root, LIMIT_FOLDER_FILES);
    return file_list_leave(&w->list, relative, why, matters, e);
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

static int is_above(const walker *w, int depth, const struct stat *info) {
    for (int i = 0; i <= depth; i++)
        if (w->above[i].device == info->st_dev && w->above[i].node == info->st_ino) return 1;
    return 0;
}

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
    if (name[0] == '.' || (!S_ISDIR(info.st_mode) && is_temporary(name))) {
        st = leave(w, relative, name[0] == '.' ? "hidden" : "a temporary file by its name", 0, e);
        goto done;
    }
    if (S_ISLNK(info.st_mode) && !link_stays_inside(w, path)) {
        st = leave(w, relative, "a link that leads out of the folder", 0, e);
        goto done;
    }
    if (S_ISLNK(info.st_mode) && stat(path, &info)) info.st_mode = S_IFLNK;
    if (!S_ISDIR(info.st_mode)) /* pipes, sockets and broken links too: refused when opened, but not left out */
        st = take_file(w, &relative, e);
    else if (depth >= LIMIT_FOLDER_DEPTH)
        st = leave(w, relative, "folders nested too deeply", 1, e);
    else if (is_above(w, depth, &info))
        st = leave(w, relative, "a link to a folder around it", 0, e);
    else if (is_own_output(path))
        st = leave(w, relative, "results of an earlier run", 0, e);
    else {
        w->above[depth + 1] = (place){ info.st_dev, info.st_ino };
        st = walk_folder(w, relative, depth + 1, e);
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
        status st = depth ? leave(w, relative, "a folder that cannot be read", 1, e)
                          : fail(e, ST_IO, "%s: the folder cannot be read: %s", path, why);
        free(path);
        return st;
    }
    status st = ST_OK;
    for (const struct dirent *entry; st == ST_OK && (entry = readdir(d)) != NULL;)
        if (strcmp(entry->d_name, ".") != 0 && strcmp(entry->d_name, "..") != 0)
            st = visit(w, relative, entry->d_name, depth, e);
    closedir(d);
    free(path);
    return st;
}

static int is_digit(char c) { return c >= '0' && c <= '9'; }

int compare_natural(const char *a, const char *b) {
    const char *x = a, *y = b;
    while (*x && *y) {
        if (is_digit(*x) && is_digit(*y)) {
            while (*x == '0') x++;
            while (*y == '0') y++;
            size_t n = 0, m = 0;
            while (is_digit(x[n])) n++;
            while (is_digit(y[m])) m++;
            int order = n != m ? (n > m) - (n < m) : strncmp(x, y, n);
            if (order) return order;
            x += n, y += m;
            continue;
        }
        /* A separator comes before every other byte, so that a folder's files stay together. */
        int u = *x == '/' ? 0 : (unsigned char)*x, v = *y == '/' ? 0 : (unsigned char)*y;
        if (u != v) return u - v;
        x++, y++;
    }
    if (*x || *y) return *x ? 1 : -1;
    return strcmp(a, b);
}

static int compare_paths(const void *a, const void *b) {
    return compare_natural(*(const char *const *)a, *(const char *const *)b);
}

static int compare_left(const void *a, const void *b) {
    return compare_natural(((const left_file *)a)->path, ((const left_file *)b)->path);
}

int file_state_of(const char *path, file_state *out) {
    struct stat info;
    if (stat(path, &info)) return 0;
    *out = (file_state){ (long long)info.st_size, (long long)info.st_mtim.tv_sec, (long long)info.st_mtim.tv_nsec };
    return 1;
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
        if (w.list.n_left) qsort(w.list.left, w.list.n_left, sizeof *w.list.left, compare_left);
        *out = w.list;
        w.list = (file_list){ 0 };
    }
    file_list_free(&w.list);
    free(w.real_root);
    return st;
}

void file_list_free(file_list *l) {
    for (size_t i = 0; i < l->n; i++) free(l->paths[i]);
    for (size_t i = 0; i < l->n_left; i++) free(l->left[i].path);
    free(l->paths);
    free(l->left);
    *l = (file_list){ 0 };
}

/* Order of a commit: the marker (synced), one rename a file, the marker away. What is found at the next start: a marker means
 * everything was ready, the remaining renames are done; no marker means it was not, and all of it goes. Rename over a second
 * name of the same file does nothing (POSIX), which is as wanted. */
#include "app/stage.h"

#include <dirent.h>
#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "base/limits.h"
#include "base/mem.h"
#include "base/text.h"
#include "io/file.h"

static const char stage_name[] = ".sward-new", marker[] = ".complete", lock_name[] = OUTPUT_LOCK;

status folder_make_parents(const char *path, error *e) {
    char *folder = mem_text(path);
    if (!folder) return NO_MEMORY(e, "a path");
    char *slash = strrchr(folder, '/');
    status st = ST_OK;
    if (slash && slash > folder) {
        *slash = '\0';
        st = folder_make(folder, e);
    }
    free(folder);
    return st;
}

static status said(const char *path, const char *what, error *e) {
    int code = errno;
    char why[128];
    if (strerror_r(code, why, sizeof why)) snprintf(why, sizeof why, "system error %d", code);
    return fail(e, ST_IO, "%s: %s: %s", path, what, why);
}

/* What to do with each file and, after its contents, each folder below a folder. */
typedef struct tree_task {
    status (*file)(const struct tree_task *t, const char *path, const char *relative, error *e);
    status (*folder)(const struct tree_task *t, const char *path, error *e); /* NULL: nothing */
    const char *to;
} tree_task;

static status visit_tree(const tree_task *t, const char *path, const char *relative, int depth, error *e);

/* Folders in a first round, files in a second: the tables at the top come last and close together. */
static status visit_entry(const tree_task *t, const char *folder, const char *relative, const char *name, int folders,
                          int depth, error *e) {
    struct stat info;
    char *path = path_join(folder, name), *below = relative[0] ? path_join(relative, name) : mem_text(name);
    status st = path && below ? ST_OK : NO_MEMORY(e, "a path");
    if (st == ST_OK && !lstat(path, &info)) {
        int is_folder = S_ISDIR(info.st_mode);
        if (is_folder && folders && depth < LIMIT_FOLDER_DEPTH + 2) st = visit_tree(t, path, below, depth + 1, e);
        if (!is_folder && !folders) st = t->file(t, path, below, e);
    }
    free(path);
    free(below);
    return st;
}

static status visit_tree(const tree_task *t, const char *path, const char *relative, int depth, error *e) {
    status st = ST_OK;
    for (int folders = 1; st == ST_OK && folders >= 0; folders--) {
        DIR *d = opendir(path);
        if (!d) return errno == ENOENT ? ST_OK : said(path, "the folder cannot be read", e);
        for (const struct dirent *entry; st == ST_OK && (entry = readdir(d)) != NULL;)
            if (strcmp(entry->d_name, ".") && strcmp(entry->d_name, ".."))
                st = visit_entry(t, path, relative, entry->d_name, folders, depth, e);
        closedir(d);
    }
    return st == ST_OK && t->folder ? t->folder(t, path, e) : st;
}

static status remove_file(const tree_task *t, const char *path, const char *relative, error *e) {
    (void)t, (void)relative;
    return unlink(path) && errno != ENOENT ? said(path, "cannot be removed", e) : ST_OK;
}

static status remove_folder(const tree_task *t, const char *path, error *e) {
    (void)t;
    return rmdir(path) && errno != ENOENT ? said(path, "cannot be removed", e) : ST_OK;
}

static status remove_tree(const char *path, error *e) {
    return visit_tree(&(tree_task){ remove_file, remove_folder, NULL }, path, "", 0, e);
}

static status move_file(const tree_task *t, const char *path, const char *relative, error *e) {
    if (!strcmp(relative, marker)) return ST_OK;
    char *to = path_join(t->to, relative);
    status st = to ? folder_make_parents(to, e) : NO_MEMORY(e, "a path");
    if (st == ST_OK && rename(path, to)) st = said(to, "cannot be written", e);
    free(to);
    return st;
}

static void sync_folder(const char *path) {
    int fd = open(path, O_RDONLY | O_DIRECTORY | O_CLOEXEC);
    if (fd < 0) return;
    (void)fsync(fd); /* a file system that cannot do it is no failure */
    close(fd);
}

static status move_all(const stage *s, error *e) {
    char *done = path_join(s->folder, marker);
    status st = done ? visit_tree(&(tree_task){ move_file, NULL, s->out }, s->folder, "", 0, e) : NO_MEMORY(e, "a path");
    if (st == ST_OK) {
        sync_folder(s->out);
        if (unlink(done)) st = said(done, "cannot be removed", e);
    }
    free(done);
    return st == ST_OK ? remove_tree(s->folder, e) : st;
}

/* Temporary names of a killed process. */
static status remove_part(const tree_task *t, const char *path, const char *relative, error *e) {
    size_t n = strlen(relative);
    int is_part = !strncmp(relative, ".sward-", 7) && n > 5 && !strcmp(relative + n - 5, ".part");
    return is_part ? remove_file(t, path, relative, e) : ST_OK;
}

static status clear_away(const stage *s, error *e) {
    char *done = path_join(s->folder, marker), *cache = path_join(s->out, "cache");
    status st = done && cache ? ST_OK : NO_MEMORY(e, "a path");
    if (st == ST_OK) st = file_exists(done) ? move_all(s, e) : remove_tree(s->folder, e);
    if (st == ST_OK) st = visit_tree(&(tree_task){ remove_part, NULL, NULL }, cache, "", 0, e);
    free(done);
    free(cache);
    return st;
}

/* A record lock: the system takes it back when the process ends in whatever way, and tells who holds it. */
static status take_lock(stage *s, error *e) {
    char *path = path_join(s->out, lock_name);
    if (!path) return NO_MEMORY(e, "a path");
    struct flock all = { .l_type = F_WRLCK, .l_whence = SEEK_SET };
    s->lock = open(path, O_RDWR | O_CREAT | O_CLOEXEC, 0666);
    status st = s->lock < 0 ? said(path, "cannot be written", e) : ST_OK;
    if (st == ST_OK && fcntl(s->lock, F_SETLK, &all) && (errno == EACCES || errno == EAGAIN)) {
        all.l_type = F_WRLCK;
        all.l_pid = 0;
        (void)fcntl(s->lock, F_GETLK, &all);
        st = fail(e, ST_IO, "%s: another sward (process %ld) is writing there; wait for its end, or name another place with --out",
                  s->out, (long)all.l_pid);
    }
    free(path);
    return st;
}

status stage_open(const char *out, stage *s, error *e) {
    *s = STAGE_NONE;
    s->out = mem_text(out);
    s->folder = path_join(out, stage_name);
    status st = s->out && s->folder ? folder_make(out, e) : NO_MEMORY(e, "a path");
    if (st == ST_OK) st = take_lock(s, e);
    if (st == ST_OK) {
        st = clear_away(s, e);
    } else {
        if (s->lock >= 0) close(s->lock);
        s->lock = -1;
    }
    if (st != ST_OK) stage_close(s);
    return st;
}

status stage_begin(const stage *s, error *e) {
    status st = remove_tree(s->folder, e);
    return st == ST_OK ? folder_make(s->folder, e) : st;
}

status stage_adopt(const stage *s, const char *dir, const char *relative, error *e) {
    char *from = path_join(dir, relative), *to = path_join(s->folder, relative), *bytes = NULL;
    size_t n = 0;
    status st = from && to ? folder_make_parents(to, e) : NO_MEMORY(e, "a path");
    if (st == ST_OK && link(from, to)) {
        st = file_read(from, LIMIT_FILE_BYTES, &bytes, &n, e);
        if (st != ST_OK) fail_within(e, st, from);
        if (st == ST_OK) st = file_write(to, bytes, n, e);
    }
    free(bytes);
    free(from);
    free(to);
    return st;
}

status stage_commit(const stage *s, error *e) {
    char *done = path_join(s->folder, marker);
    status st = done ? file_write(done, "", 0, e) : NO_MEMORY(e, "a path");
    if (st == ST_OK) st = move_all(s, e);
    free(done);
    return st;
}

void stage_close(stage *s) {
    char *done = s->folder ? path_join(s->folder, marker) : NULL;
    if (s->lock >= 0) {
        if (done && !file_exists(done)) (void)remove_tree(s->folder, NULL); /* a commit that failed half-way is finished by the next run */
        close(s->lock);
    }
    free(done);
    free(s->out);
    free(s->folder);
    *s = STAGE_NONE;
}

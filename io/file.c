/* Files and folders over POSIX: read whole, write atomically (temporary name, fsync, rename, fsync of the
 * folder), walk in byte order. Names are bytes; no encoding is assumed. Does not: lock, watch, follow links
 * out of a root. */
#include "io/file.h"

#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <time.h>
#include <unistd.h>

#include "base/limits.h"
#include "base/mem.h"

static const char *reason(int code, char *buffer, size_t size) {
    if (strerror_r(code, buffer, size)) snprintf(buffer, size, "system error %d", code);
    return buffer;
}
#define REASON(code) reason((code), (char[128]){ 0 }, 128)

static status read_all(int fd, size_t limit, char **bytes, size_t *n, error *e) {
    struct stat info;
    if (fstat(fd, &info)) return fail(e, ST_IO, "cannot be read: %s", REASON(errno));
    if (!S_ISREG(info.st_mode)) return fail(e, ST_IO, "is not a regular file");
    size_t size = (size_t)info.st_size;
    if (size > limit)
        return fail(e, ST_NO_MEMORY, "holds %zu bytes, more than the limit of %zu", size, limit);
    char *s = mem_array(size + 1, 1);
    if (!s) return NO_MEMORY(e, "the file");
    size_t got = 0;
    while (got < size) {
        ssize_t k = read(fd, s + got, size - got);
        if (k < 0 && errno == EINTR) continue;
        if (k < 0) {
            free(s);
            return fail(e, ST_IO, "cannot be read: %s", REASON(errno));
        }
        if (!k) break; /* became shorter while we read */
        got += (size_t)k;
    }
    s[got] = '\0';
    *bytes = s;
    *n = got;
    return ST_OK;
}

status file_read(const char *path, size_t limit, char **bytes, size_t *n, error *e) {
    /* NONBLOCK: opening a pipe must not wait for its writer. */
    int fd = open(path, O_RDONLY | O_CLOEXEC | O_NONBLOCK);
    if (fd < 0) return fail(e, ST_IO, "cannot be opened: %s", REASON(errno));
    status st = read_all(fd, limit, bytes, n, e);
    close(fd);
    return st;
}

/* Length of "dir/" in front of the last part; 0 when there is none. */
static size_t folder_length(const char *path) {
    const char *slash = strrchr(path, '/');
    return slash ? (size_t)(slash - path) + 1 : 0;
}

static int write_all(int fd, const char *bytes, size_t n) {
    while (n) {
        ssize_t k = write(fd, bytes, n);
        if (k < 0 && errno == EINTR) continue;
        if (k < 0) return 0;
        bytes += k;
        n -= (size_t)k;
    }
    return 1;
}

/* A new file in the folder of `path`; its name does not contain the last part, which may already be 255
 * bytes. */
static int open_temporary(const char *path, char **name) {
    size_t folder = folder_length(path), room = folder + 64;
    *name = mem_array(room, 1);
    if (!*name) {
        errno = ENOMEM;
        return -1;
    }
    int fd = -1;
    for (int k = 0; k < 10000 && fd < 0; k++) {
        snprintf(*name, room, "%.*s.sward-%ld-%d.part", (int)folder, path, (long)getpid(), k);
        fd = open(*name, O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, 0666);
        if (fd < 0 && errno != EEXIST) break;
    }
    return fd;
}

/* Makes the rename itself durable; a file system that cannot do it is not an error. */
static void sync_folder(const char *path) {
    size_t n = folder_length(path);
    char *folder = n ? mem_text_n(path, n) : mem_text(".");
    int fd = folder ? open(folder, O_RDONLY | O_DIRECTORY | O_CLOEXEC) : -1;
    if (fd >= 0) {
        (void)fsync(fd);
        close(fd);
    }
    free(folder);
}

status file_write(const char *path, const void *bytes, size_t n, error *e) {
    char *part = NULL;
    int fd = open_temporary(path, &part), code = errno;
    if (fd < 0) {
        free(part);
        return fail(e, ST_IO, "%s: cannot be written: %s", path, REASON(code));
    }
    int ok = write_all(fd, bytes, n) && !fsync(fd);
    code = errno;
    if (close(fd) && ok) ok = 0, code = errno;
    if (ok && rename(part, path)) ok = 0, code = errno;
    if (ok)
        sync_folder(path);
    else
        (void)unlink(part);
    free(part);
    return ok ? ST_OK : fail(e, ST_IO, "%s: cannot be written: %s", path, REASON(code));
}

status folder_make(const char *path, error *e) {
    char *copy = mem_text(path);
    if (!copy) return NO_MEMORY(e, path);
    status st = ST_OK;
    for (char *p = copy + 1; st == ST_OK && copy[0]; p++) {
        if (*p != '/' && *p) continue;
        char kept = *p;
        *p = '\0';
        if (mkdir(copy, 0777) && !folder_exists(copy)) {
            int code = errno == EEXIST ? ENOTDIR : errno;
            st = fail(e, ST_IO, "%s: the folder cannot be made: %s", copy, REASON(code));
        }
        *p = kept;
        if (!kept) break;
    }
    free(copy);
    return st;
}

int file_exists(const char *path) {
    struct stat info;
    return !stat(path, &info) && S_ISREG(info.st_mode);
}

int folder_exists(const char *path) {
    struct stat info;
    return !stat(path, &info) && S_ISDIR(info.st_mode);
}

void file_time(const char *path, char *out) {
    struct stat info;
    struct tm utc;
    out[0] = '\0';
    if (!stat(path, &info) && gmtime_r(&info.st_mtime, &utc)) strftime(out, 32, "%Y-%m-%dT%H:%M:%SZ", &utc);
}

char *path_join(const char *dir, const char *name) {
    if (!dir || !dir[0] || name[0] == '/') return mem_text(name);
    size_t a = strlen(dir), b = strlen(name);
    int slash = dir[a - 1] != '/';
    char *s = mem_array(a + b + 2, 1);
    if (!s) return NULL;
    memcpy(s, dir, a);
    if (slash) s[a] = '/';
    memcpy(s + a + (size_t)slash, name, b);
    return s;
}

/* Files and folders: read whole, write atomically, walk, hash. */
#ifndef SWARD_IO_FILE_H
#define SWARD_IO_FILE_H
#include <stddef.h>
#include <stdint.h>

#include "base/status.h"

/* Reads a whole regular file (size checked against `limit`), NUL added behind the n bytes. Caller frees *bytes.
 *   err  ST_IO not there, no regular file, reading fails; ST_NO_MEMORY larger than the limit. The sentence does not
 *        repeat the path (the caller knows how the user wrote it: fail_within). */
status file_read(const char *path, size_t limit, char **bytes, size_t *n, error *e);

/* Writes to a temporary name beside `path`, fsyncs, renames: readers see the old or the new file, never a part.
 *   err  ST_IO with the path; nothing is left behind */
status file_write(const char *path, const void *bytes, size_t n, error *e);

status folder_make(const char *path, error *e); /* with its parents; fine if it exists */
int file_exists(const char *path);
int folder_exists(const char *path);
/* Modification time as ISO 8601 UTC ("2026-03-14T09:30:00Z"), "" if unknown. `out` holds 32 bytes. */
void file_time(const char *path, char *out);

/* What a walk left alone, and why. */
typedef struct {
    char *path;      /* relative to the root */
    const char *why; /* half a sentence; static */
    int matters;     /* 1: it may hide micrographs that somebody misses */
} left_file;

typedef struct {
    char **paths; /* [n] relative to the root, '/' between parts, exact bytes, in the order of compare_natural */
    size_t n;
    left_file *left; /* [n_left], in the same order */
    size_t n_left;
} file_list;
/* In an output folder from the start; empty. */
#define OUTPUT_LOCK ".sward-lock"
/* Every file below `root` for which keep(relative path) is true; pipes, devices and links that lead nowhere count as
 * files, so that opening them tells why they cannot be read. Left alone, and listed as that: names that begin with a dot or
 * are those of temporary files, folders that hold sward's own datapackage.json or lock or cannot be read, links that leave the root
 * or lead to a folder around them, folders deeper than LIMIT_FOLDER_DEPTH. The root itself is always walked.
 *   err ST_IO the root cannot be read; ST_NO_MEMORY more than LIMIT_FOLDER_FILES. */
status folder_walk(const char *root, int (*keep)(const char *relative), file_list *out, error *e);
status file_list_leave(file_list *l, const char *path, const char *why, int matters, error *e);
void file_list_free(file_list *l);

/* Order of names as people count: digits by their value (img2 before img10), the rest by bytes, a folder's own files
 * together. Names that are equal so far: by bytes. <0, 0, >0 as strcmp. */
int compare_natural(const char *a, const char *b);

/* Size in bytes and time of last change of what `path` leads to. 0: there is nothing. */
typedef struct {
    long long bytes, seconds, nanoseconds;
} file_state;
int file_state_of(const char *path, file_state *out);

/* dir + "/" + name; `name` alone when it is absolute or dir is "" or NULL. Caller frees; NULL: no memory. */
char *path_join(const char *dir, const char *name);

void sha256_hex(const void *bytes, size_t n, char out[65]); /* FIPS 180-4: names a content for good */
/* Tells whether bytes are still the same, ten times as fast; no defence against somebody who wants them to seem so. 16 hex digits. */
void quick_mark(const void *bytes, size_t n, char out[17]);

#endif

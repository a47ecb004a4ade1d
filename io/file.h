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

typedef struct {
    char **paths; /* [n] relative to the root, '/' between parts, exact bytes, in byte order of the names */
    size_t n;
} file_list;
/* Every file below `root` for which keep(relative path) is true; pipes, devices and links that lead nowhere count as
 * files, so that opening them tells why they cannot be read. Left out: names that begin with a dot,
 * folders that hold sward's own datapackage.json, links that leave the root or lead to a folder around them, folders deeper than
 * LIMIT_FOLDER_DEPTH. The root itself is always walked. err ST_IO the folder cannot be read; ST_NO_MEMORY more than LIMIT_FOLDER_FILES. */
status folder_walk(const char *root, int (*keep)(const char *relative), file_list *out, error *e);
void file_list_free(file_list *l);

/* dir + "/" + name; `name` alone when it is absolute or dir is "" or NULL. Caller frees; NULL: no memory. */
char *path_join(const char *dir, const char *name);

void sha256_hex(const void *bytes, size_t n, char out[65]); /* FIPS 180-4 */

#endif

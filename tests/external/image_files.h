/* Public image files of two Debian packages, found where those packages put them; programs that judge from
 * outside. */
#ifndef SWARD_TESTS_EXTERNAL_IMAGE_FILES_H
#define SWARD_TESTS_EXTERNAL_IMAGE_FILES_H
#include <fcntl.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <sys/wait.h>
#include <unistd.h>

#include "base/limits.h"
#include "check.h"
#include "io/file.h"
#include "io/picture_priv.h"

/* The first of the folders that exists, or NULL with a visible word. */
static inline const char *first_folder(const char *const *folders, const char *package) {
    for (; *folders; folders++)
        if (folder_exists(*folders)) return *folders;
    printf("skipped: Debian package %s is not installed\n", package);
    return NULL;
}

/* Runs a program silently; its exit code, or -1 when it does not exist. */
static inline int run_program(const char *const *arguments) {
    pid_t child = fork();
    if (!child) {
        int nowhere = open("/dev/null", O_WRONLY);
        if (nowhere >= 0) dup2(nowhere, 1), dup2(nowhere, 2);
        union {
            const char *const *in;
            char *const *out;
        } view = { arguments };
        execvp(arguments[0], view.out);
        _exit(127);
    }
    int code = 0;
    if (child < 0 || waitpid(child, &code, 0) < 0 || !WIFEXITED(code) || WEXITSTATUS(code) == 127) return -1;
    return WEXITSTATUS(code);
}

typedef status decoder_fn(const uint8_t *, size_t, size_t, picture *, error *);

static inline status decode_path(decoder_fn *decode, const char *folder, const char *name, picture *p,
                                 error *e) {
    char *path = path_join(folder, name), *bytes = NULL;
    size_t n = 0;
    status st = file_read(path, LIMIT_FILE_BYTES, &bytes, &n, e);
    if (st == ST_OK) st = decode((const uint8_t *)bytes, n, LIMIT_PIXELS, p, e);
    free(bytes);
    free(path);
    return st;
}

/* Sum of the plane in levels of its own depth. */
static inline double level_sum(const picture *p) {
    double sum = 0.0, top = (double)((1u << p->bit_depth) - 1u);
    for (size_t i = 0; p->px && i < p->nx * p->ny; i++) sum += round((double)p->px[i] * top);
    return sum;
}

static inline double mean_level(const picture *p) {
    double sum = 0.0;
    for (size_t i = 0; p->px && i < p->nx * p->ny; i++) sum += (double)p->px[i];
    return sum / (double)(p->nx * p->ny);
}

static inline int same_plane(const picture *a, const picture *b) {
    return a->px && b->px && a->nx == b->nx && a->ny == b->ny &&
           !memcmp(a->px, b->px, a->nx * a->ny * sizeof *a->px);
}

#endif

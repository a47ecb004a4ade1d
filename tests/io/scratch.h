/* A folder of its own for a test, in the working directory, removed with everything in it. */
#ifndef SWARD_TESTS_IO_SCRATCH_H
#define SWARD_TESTS_IO_SCRATCH_H
#include <dirent.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

static char scratch_root[64];

static inline void scratch_make(void) {
    snprintf(scratch_root, sizeof scratch_root, "scratch-XXXXXX");
    if (!mkdtemp(scratch_root)) {
        printf("no scratch folder\n");
        exit(1);
    }
}

/* root/name in one of four buffers that take turns. */
static inline const char *scratch(const char *name) {
    static char buffer[4][512];
    static int turn;
    char *b = buffer[turn++ % 4];
    snprintf(b, sizeof buffer[0], "%s/%s", scratch_root, name);
    return b;
}

static inline void scratch_put(const char *name, const void *bytes, size_t n) {
    FILE *f = fopen(scratch(name), "wb");
    if (!f || (n && fwrite(bytes, 1, n, f) != n) || fclose(f)) {
        printf("cannot write %s\n", name);
        exit(1);
    }
}

static inline void scratch_remove(const char *folder) {
    DIR *d = opendir(folder);
    for (struct dirent *entry; d && (entry = readdir(d)) != NULL;) {
        if (!strcmp(entry->d_name, ".") || !strcmp(entry->d_name, "..")) continue;
        char path[1024];
        struct stat info;
        int n = snprintf(path, sizeof path, "%s/%s", folder, entry->d_name);
        if (n < 0 || (size_t)n >= sizeof path) continue;
        if (!lstat(path, &info) && S_ISDIR(info.st_mode))
            scratch_remove(path);
        else
            unlink(path);
    }
    if (d) closedir(d);
    rmdir(folder);
}

#endif

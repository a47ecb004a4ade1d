/* What a folder holds: order, names of outputs, samples from sheet, sub-folder and name. */
#include <stdlib.h>
#include <sys/stat.h>
#include <unistd.h>

#include "app/folder.h"
#include "base/mem.h"
#include "check.h"

static void put(const char *root, const char *name, const char *body) {
    error e = { 0 };
    char *path = path_join(root, name);
    CHECK(path && file_write(path, body, strlen(body), &e) == ST_OK);
    free(path);
}

int main(void) {
    char root[] = "/tmp/sward-folder-XXXXXX", sub[64];
    error e = { 0 };
    folder f = { 0 };
    CHECK(mkdtemp(root) != NULL);
    snprintf(sub, sizeof sub, "%s/L7", root);
    mkdir(sub, 0700);
    put(root, "b_02.png", "x");
    put(root, "b_01.png", "x");
    put(root, "a.png", "x");
    put(root, "a.tif", "y");
    put(root, "L7/c.png", "z");
    put(root, "photo.jpg", "j");
    put(root, "notes.md", "n");
    put(root, "samples.csv", "file,sample,lot,height_nm,height_nm_u,recipe\nL7/c.png,S9,K2,310,12,slow\nb_02.png,B,,,,\nghost.png,G,,,,\n");
    CHECK(folder_open(root, NULL, NULL, NULL, &f, &e) == ST_OK);
    CHECK(f.n == 6 && f.n_other == 2); /* notes.md and the sheet itself are no pictures */
    if (f.n != 6) return check_done();
    CHECK(!strcmp(f.relative[0], "L7/c.png") && !strcmp(f.relative[1], "b_02.png")); /* sheet order first */
    CHECK(!strcmp(f.relative[2], "a.png") && !strcmp(f.relative[4], "b_01.png"));
    CHECK(!strcmp(f.stems[0], "L7/c") && !strcmp(f.stems[2], "a-png") && !strcmp(f.stems[3], "a-tif"));
    CHECK(strstr(f.warnings.s ? f.warnings.s : "", "ghost.png") != NULL);

    protocol p = { 0 };
    examined all[6] = { { .readable = 1 } };
    sample_group *groups = NULL;
    size_t n = 0;
    CHECK(protocol_defaults(&p, &e) == ST_OK);
    memcpy(all[0].file_time, "2026-03-01T08:00:00Z", 21);
    CHECK(folder_samples(&f, &p, all, &groups, &n, &e) == ST_OK);
    CHECK(n == 5 && !strcmp(groups[0].name, "S9") && !strcmp(groups[0].lot, "K2"));
    CHECK_NEAR(groups[0].height_nm.value, 310.0, 0.0);
    CHECK_NEAR(groups[0].height_nm.u, 12.0, 0.0);
    CHECK(groups[0].time_from_file && !strcmp(groups[0].etched_at, "2026-03-01T08:00:00Z"));
    CHECK(!strcmp(groups[1].name, "B") && !strcmp(all[2].row.sample, "a") && !strcmp(all[4].row.sample, "b"));
    CHECK(groups[2].n_members == 2); /* a.png and a.tif are one sample */
    for (size_t i = 0; i < n; i++) sample_group_free(&groups[i]);
    free(groups);
    for (size_t i = 0; i < 6; i++) examined_free(&all[i]);
    folder_close(&f);
    protocol_free(&p);

    put(root, "samples.csv", "file,sample,height_nm\na.png,S,300\nb_01.png,S,301\n");
    CHECK_FAILS(folder_open(root, NULL, NULL, NULL, &f, &e), ST_BAD_INPUT, e, "300");
    CHECK_FAILS(folder_open("/nowhere/at/all", NULL, NULL, NULL, &f, &e), ST_IO, e, "/nowhere/at/all");
    static const char *const names[] = { "b_02.png", "b_01.png", "a.png", "a.tif", "L7/c.png", "photo.jpg", "notes.md", "samples.csv" };
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++) {
        char *path = path_join(root, names[i]);
        unlink(path);
        free(path);
    }
    rmdir(sub);
    rmdir(root);
    return check_done();
}

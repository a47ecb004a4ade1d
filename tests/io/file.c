/* Files: whole or not at all, limits, folders, names of any bytes. */
#include "io/file.h"

#include <sys/stat.h>

#include "check.h"
#include "scratch.h"

static int count_entries(const char *folder) {
    DIR *d = opendir(folder);
    int n = 0;
    while (d && readdir(d)) n++;
    if (d) closedir(d);
    return n - 2;
}

static void read_and_write(void) {
    error e = { 0 };
    char *bytes = NULL;
    size_t n = 0;
    CHECK(file_write(scratch("a.txt"), "one", 3, &e) == ST_OK);
    CHECK(file_write(scratch("a.txt"), "two\0three", 9, &e) == ST_OK);
    CHECK(file_read(scratch("a.txt"), 100, &bytes, &n, &e) == ST_OK && n == 9);
    CHECK(bytes && !memcmp(bytes, "two\0three", 10)); /* the added 0 included */
    free(bytes);
    CHECK(file_write(scratch("empty"), "", 0, &e) == ST_OK);
    CHECK(file_read(scratch("empty"), 100, &bytes, &n, &e) == ST_OK && n == 0 && bytes[0] == '\0');
    free(bytes);
    CHECK(count_entries(scratch_root) == 2); /* no temporary stays */

    CHECK_FAILS(file_read(scratch("a.txt"), 8, &bytes, &n, &e), ST_NO_MEMORY, e, "limit");
    CHECK_FAILS(file_read(scratch("none"), 8, &bytes, &n, &e), ST_IO, e, "No such file");
    CHECK_FAILS(file_read(scratch_root, 8, &bytes, &n, &e), ST_IO, e, "not a regular file");
    CHECK(mkfifo(scratch("pipe"), 0600) == 0);
    CHECK_FAILS(file_read(scratch("pipe"), 8, &bytes, &n, &e), ST_IO, e,
                "not a regular file"); /* and does not wait */

    CHECK_FAILS(file_write(scratch("no/such/folder"), "x", 1, &e), ST_IO, e, "no/such/folder");
    CHECK(folder_make(scratch("taken"), &e) == ST_OK);
    CHECK_FAILS(file_write(scratch("taken"), "x", 1, &e), ST_IO, e,
                "taken"); /* rename fails: the part is gone again */
    CHECK(count_entries(scratch_root) == 4);

    char longest[256], name[256];
    memset(longest, 'n', 255);
    longest[255] = '\0';
    CHECK(file_write(scratch(longest), "x", 1, &e) == ST_OK && file_exists(scratch(longest)));
    memcpy(name, "b\xff\n\xb5 .txt", 10);
    CHECK(file_write(scratch(name), "x", 1, &e) == ST_OK && file_exists(scratch(name)));
}

static void folders(void) {
    error e = { 0 };
    char when[32];
    CHECK(folder_make(scratch("p/q//r/"), &e) == ST_OK && folder_exists(scratch("p/q/r")));
    CHECK(folder_make(scratch("p/q"), &e) == ST_OK);
    CHECK_FAILS(folder_make(scratch("a.txt/x"), &e), ST_IO, e, "cannot be made");
    CHECK(!folder_exists(scratch("a.txt")) && !file_exists(scratch("p")));
    file_time(scratch("a.txt"), when);
    CHECK(strlen(when) == 20 && when[10] == 'T' && when[19] == 'Z');
    file_time(scratch("none"), when);
    CHECK(when[0] == '\0');

    static const struct {
        const char *dir, *name, *want;
    } joins[] = { { "a", "b", "a/b" }, { "a/", "b", "a/b" }, { "", "b", "b" },
                  { NULL, "b", "b" },  { "a", "/b", "/b" },  { "/", "b", "/b" } };
    for (size_t i = 0; i < sizeof joins / sizeof joins[0]; i++) {
        char *got = path_join(joins[i].dir, joins[i].name);
        CHECK(got && !strcmp(got, joins[i].want));
        free(got);
    }
}

int main(void) {
    scratch_make();
    read_and_write();
    folders();
    scratch_remove(scratch_root);
    return check_done();
}

/* The walk: byte order, what is left out, links that leave or loop. */
#include <unistd.h>

#include "base/limits.h"
#include "check.h"
#include "io/file.h"
#include "io/load.h"
#include "scratch.h"

static void put(const char *name) { scratch_put(name, "x", 1); }

static int walked(const file_list *l, const char *name) {
    for (size_t i = 0; i < l->n; i++)
        if (!strcmp(l->paths[i], name)) return 1;
    return 0;
}

int main(void) {
    error e = { 0 };
    file_list l = { 0 };
    scratch_make();
    static const char *const made[] = { "in", "in/sub", "in/sub/.hidden", "in/done", "in/foreign", "out" };
    for (size_t i = 0; i < sizeof made / sizeof made[0]; i++)
        CHECK(folder_make(scratch(made[i]), &e) == ST_OK);
    static const char *const images[] = {
        "in/b.png",  "in/a.TIF",      "in/B.tiff",        "in/sub/c.tif", "in/sub/.hidden/d.png",
        "in/.e.png", "in/done/f.png", "in/foreign/g.png", "out/h.png",    "in/\xff\x01.png"
    };
    for (size_t i = 0; i < sizeof images / sizeof images[0]; i++) put(images[i]);
    put("in/notes.txt");
    static const char own[] = "{ \"name\": \"sward-results\" }", other[] = "{ \"name\": \"weather\" }";
    scratch_put("in/done/datapackage.json", own, sizeof own - 1);
    scratch_put("in/datapackage.json", own, sizeof own - 1); /* the root is walked all the same */
    scratch_put("in/foreign/datapackage.json", other, sizeof other - 1);
    CHECK(!symlink("../out/h.png", scratch("in/leaves.png")) && !symlink("../out", scratch("in/leaves")));
    CHECK(!symlink("..", scratch("in/sub/loop")) && !symlink("b.png", scratch("in/z.png")));
    CHECK(!symlink("nowhere.png", scratch("in/broken.png")) && !symlink("self.png", scratch("in/self.png")));
    CHECK(!mkfifo(scratch("in/pipe.png"), 0600));

    CHECK(folder_walk(scratch("in"), load_knows_name, &l, &e) == ST_OK);
    static const char *const want[] = { "B.tiff",   "a.TIF",    "b.png",     "broken.png", "foreign/g.png",
                                        "pipe.png", "self.png", "sub/c.tif", "z.png",      "\xff\x01.png" };
    CHECK(l.n == sizeof want / sizeof want[0]);
    for (size_t i = 0; i < l.n && i < sizeof want / sizeof want[0]; i++) CHECK(!strcmp(l.paths[i], want[i]));
    file_list_free(&l);
    file_list_free(&l);

    char deep[400] = "in";
    for (int i = 0; i < LIMIT_FOLDER_DEPTH + 2; i++) {
        memcpy(deep + strlen(deep), "/d", 3);
        CHECK(folder_make(scratch(deep), &e) == ST_OK);
    }
    memcpy(deep + strlen(deep), "/x.png", 7);
    put(deep);
    CHECK(folder_walk(scratch("in"), load_knows_name, &l, &e) == ST_OK && !walked(&l, deep + 3) &&
          walked(&l, "b.png"));
    file_list_free(&l);
    CHECK_FAILS(folder_walk(scratch("absent"), load_knows_name, &l, &e), ST_IO, e, "no such folder");
    CHECK_FAILS(folder_walk(scratch("in/b.png"), load_knows_name, &l, &e), ST_IO, e, "cannot be read");
    scratch_remove(scratch_root);
    return check_done();
}

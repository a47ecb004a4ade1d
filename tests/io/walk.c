/* The walk: natural order, what is left alone and why, links that leave or loop. */
#include <sys/stat.h>
#include <unistd.h>

#include "base/limits.h"
#include "check.h"
#include "io/file.h"
#include "io/load.h"
#include "scratch.h"

static void put(const char *name) { scratch_put(name, "x", 1); }

static const char *left_because(const file_list *l, const char *name) {
    for (size_t i = 0; i < l->n_left; i++)
        if (!strcmp(l->left[i].path, name)) return l->left[i].why;
    return "";
}

static void test_order(void) {
    static const char *const some[] = { "",    "a",      "a/z",  "a1",    "a01",     "a1b",     "a2",     "a10",
                                        "a10.1", "a10.09", "a10x", "a-b/c", "img9/x1", "img10/x", "img10y", "\xff\x01" };
    enum { N = sizeof some / sizeof some[0] };
    CHECK(compare_natural("img2.png", "img10.png") < 0 && compare_natural("img10.png", "img2.png") > 0);
    CHECK(compare_natural("W3_9", "W03_10") < 0 && compare_natural("W03_9", "W3_10") < 0);
    CHECK(compare_natural("a/b", "a-c") < 0 && compare_natural("a/b10", "a/b9") > 0);
    CHECK(compare_natural("x1", "x01") != 0 && compare_natural("x1", "x1") == 0);
    CHECK(compare_natural("99999999999999999999998", "99999999999999999999999") < 0);
    for (int i = 0; i < N; i++)
        for (int j = 0; j < N; j++) {
            int ij = compare_natural(some[i], some[j]), ji = compare_natural(some[j], some[i]);
            CHECK((ij > 0) == (ji < 0) && (ij == 0) == (i == j));
            for (int k = 0; k < N; k++) /* an order that qsort can live with */
                if (ij < 0 && compare_natural(some[j], some[k]) < 0) CHECK(compare_natural(some[i], some[k]) < 0);
        }
}

static int walked(const file_list *l, const char *name) {
    for (size_t i = 0; i < l->n; i++)
        if (!strcmp(l->paths[i], name)) return 1;
    return 0;
}

int main(void) {
    error e = { 0 };
    file_list l = { 0 };
    scratch_make();
    test_order();
    static const char *const made[] = { "in", "in/sub", "in/sub/.hidden", "in/done", "in/foreign", "out" };
    for (size_t i = 0; i < sizeof made / sizeof made[0]; i++)
        CHECK(folder_make(scratch(made[i]), &e) == ST_OK);
    static const char *const images[] = {
        "in/b.png",  "in/a.TIF",      "in/B.tiff",        "in/sub/c.tif", "in/sub/.hidden/d.png",
        "in/.e.png", "in/done/f.png", "in/foreign/g.png", "out/h.png",    "in/\xff\x01.png"
    };
    for (size_t i = 0; i < sizeof images / sizeof images[0]; i++) put(images[i]);
    put("in/notes.txt");
    put("in/~$b.png");
    put("in/b.png.Part");
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
    CHECK(!strcmp(left_because(&l, ".e.png"), "hidden") && !strcmp(left_because(&l, "sub/.hidden"), "hidden"));
    CHECK(strstr(left_because(&l, "~$b.png"), "temporary") && strstr(left_because(&l, "b.png.Part"), "temporary"));
    CHECK(strstr(left_because(&l, "leaves.png"), "out of the folder") && strstr(left_because(&l, "leaves"), "out of"));
    CHECK(strstr(left_because(&l, "done"), "earlier run") && strstr(left_because(&l, "sub/loop"), "around it"));
    CHECK(l.n_left == 8);
    file_list_free(&l);
    file_list_free(&l);
    if (geteuid() != 0) { /* the superuser reads everything */
        CHECK(folder_make(scratch("in/shut"), &e) == ST_OK && !chmod(scratch("in/shut"), 0));
        CHECK(folder_walk(scratch("in"), load_knows_name, &l, &e) == ST_OK &&
              strstr(left_because(&l, "shut"), "cannot be read"));
        CHECK(!chmod(scratch("in/shut"), 0700));
        file_list_free(&l);
    }

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

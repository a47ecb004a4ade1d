/* Sample from a file name: template, sub-folder, stem without its number. */
#include "app/names.h"

#include "check.h"

/* relative, pattern -> sample lot wafer position joined with '|'. */
static void gives(const char *relative, const char *pattern, const char *want) {
    name_parts p = { 0 };
    error e = { ST_OK, "" };
    char got[400] = "";
    CHECK(name_sample(relative, pattern, &p, &e) == ST_OK);
    if (p.sample) snprintf(got, sizeof got, "%s|%s|%s|%s", p.sample, p.lot, p.wafer, p.position);
    CHECK(strcmp(got, want) == 0);
    if (strcmp(got, want) != 0)
        printf("  %s with %s: got %s, wanted %s\n", relative, pattern ? pattern : "-", got, want);
    name_parts_free(&p);
    name_parts_free(&p);
}

int main(void) {
    static const char usual[] = "{lot}_W{wafer}_{position}_{n}";
    error e = { ST_OK, "" };
    gives("wafer7_03.tif", NULL, "wafer7|||");
    gives("wafer7 (2).png", NULL, "wafer7|||");
    gives("grass-12.5-003.png", NULL, "grass-12.5|||");
    gives("img0001.tif", NULL, "img|||");
    gives("0001.tif", NULL, "0001|||");
    gives("plain.png", NULL, "plain|||");
    gives("noextension9", NULL, "noextension|||");
    gives(".hidden", NULL, ".hidden|||");
    gives("lot3/w2/a_1.png", NULL, "lot3/w2|||");
    gives("L7_W03_centre_2.tif", usual, "L7_W03_centre|L7|03|centre");
    gives("deep/L7_W03_centre_2.tif", usual, "L7_W03_centre|L7|03|centre");
    gives("A_B_W1_top_left_12.tif", usual, "A_B_W1_top_left|A_B|1|top_left");
    gives("L7_W03_centre_x.tif", usual, "L7_W03_centre_x|||"); /* {n} is digits: no match, stem */
    gives("deep/other.tif", usual, "deep|||");
    gives("L7_anything_9.png", "{lot}_{}_{n}", "L7|L7||");
    gives("L7_W03_centre_20k_2b.png", "{lot}_W{wafer}_{position}_{magnification}_{image}", "L7_W03_centre|L7|03|centre");
    gives("x_9_L7.png", "x_{n}_{lot}", "L7|L7||");
    gives("run5/w3/k.png", "{lot}/w{wafer}/{}", "run5/w3|run5|3|");
    gives("c-A7-L3.png", "c-{sample}-{lot}", "A7|L3||");
    /* A name made to look everywhere: must end at once. */
    gives("aaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaa"
          "aaaaaaaaaaaaab.png",
          "{lot}a{}a{}a{}a{}a{}a{}a{}a{wafer}c",
          "aaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaa"
          "aaaaaaaaaaaaab|||");
    CHECK(pattern_check(usual, &e) == ST_OK && pattern_check("{sample}", &e) == ST_OK);
    CHECK_FAILS(pattern_check("{waferr}_{n}", &e), ST_BAD_INPUT, e, "did you mean '{wafer}'?");
    CHECK_FAILS(pattern_check("{lot", &e), ST_BAD_INPUT, e, "opened and not closed");
    CHECK_FAILS(pattern_check("{lot}{wafer}", &e), ST_BAD_INPUT, e, "cannot be told apart");
    CHECK_FAILS(pattern_check("{lot}_{lot}", &e), ST_BAD_INPUT, e, "stands twice");
    CHECK_FAILS(pattern_check("{magnification}_{image}", &e), ST_BAD_INPUT, e, "no field that names a sample");
    CHECK_FAILS(pattern_check("image_{n}", &e), ST_BAD_INPUT, e, "no field that names a sample");
    CHECK_FAILS(pattern_check("plain", &e), ST_BAD_INPUT, e, "no field that names a sample");
    CHECK_FAILS(pattern_check("{lot}_{n}.tif", &e), ST_BAD_INPUT, e, "leave the extension out");
    CHECK_FAILS(pattern_check("{lot}a{}b{}c{}d{}e{}f{}g{}h{}i{}j{}k{}l{}m{}n{}o{}p{}q", &e), ST_BAD_INPUT, e,
                "more than");
    return check_done();
}

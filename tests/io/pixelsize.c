/* Which statement wins, what is said about the others. */
#include "io/pixelsize_priv.h"

#include "check.h"

static micrograph choose(const scales *s) {
    micrograph m = { 0 };
    pixelsize_choose(s, 0.01, &m);
    return m;
}

int main(void) {
    static const struct {
        scale_rank rank;
        const char *name;
    } ranks[] = {
        { SCALE_RESOLUTION, "pHYs" }, { SCALE_SCAL, "sCAL" },     { SCALE_DESCRIPTION, "description" },
        { SCALE_OME, "ome-xml" },     { SCALE_TAG, "tag 34118" }, { SCALE_SIDECAR, "sidecar" },
        { SCALE_SHEET, "sheet" },     { SCALE_OPTION, "option" }
    };
    scales s = { 0 };
    micrograph m = choose(&s);
    CHECK(isnan(m.px_nm) && isnan(m.px_u_rel) && !strcmp(m.px_source, "none") &&
          m.flags == FLAG(NO_PIXEL_SIZE) && !m.note[0]);
    for (size_t i = 0; i < sizeof ranks / sizeof ranks[0]; i++) { /* each outranks all before it */
        scales_add(&s, ranks[i].rank, ranks[i].name, 5.0 + 0.001 * (double)i, (double)NAN);
        m = choose(&s);
        CHECK(!strcmp(m.px_source, ranks[i].name) && m.flags == 0 && !m.note[0]);
        CHECK_NEAR(m.px_nm, 5.0 + 0.001 * (double)i, 0.0);
        CHECK_NEAR(m.px_u_rel, 0.01, 0.0);
    }
    s = (scales){ 0 };
    scales_add(&s, SCALE_RESOLUTION, "pHYs", 2.54e7 / 72.0, 2.54e7 / 72.0); /* a screen's */
    m = choose(&s);
    CHECK(m.flags == FLAG(NO_PIXEL_SIZE) &&
          strstr(m.note, "352.8 um per pixel: a screen or print resolution"));
    scales_add(&s, SCALE_SHEET, "sheet", 5.0, 5.0);
    m = choose(&s);
    CHECK(m.flags == 0); /* and no contradiction either */
    scales_add(&s, SCALE_TAG, "tag 34118", 5.2, 5.2);
    m = choose(&s);
    CHECK(m.flags == FLAG(PX_DISAGREE) &&
          !strcmp(m.note, "Pixel size 5 nm (sheet) was used, but tag 34118 says 5.2 nm."));
    s.list[2].x_nm = 12.7;
    CHECK(strstr(choose(&s).note, "inch taken for centimetre"));
    s.list[2].x_nm = 10.0;
    CHECK(strstr(choose(&s).note, "resized"));
    s.list[2].x_nm = 5.09;
    CHECK(choose(&s).flags == 0);
    s = (scales){ 0 };
    scales_add(&s, SCALE_TAG, "tag 34682", 5.0, 5.006);
    m = choose(&s);
    CHECK(m.flags == FLAG(PX_UNEQUAL) && strstr(m.note, "5 nm wide and 5.006 nm high (tag 34682)"));
    CHECK_NEAR(m.px_nm, 5.0, 0.0);
    s.list[0].y_nm = 5.004;
    CHECK(choose(&s).flags == 0);
    s = (scales){ 0 };
    scales_add(&s, SCALE_SIDECAR, "sidecar", 2e5, 2e5);
    CHECK(choose(&s).flags == FLAG(PX_ODD));
    s = (scales){ 0 };
    scales_add(&s, SCALE_TAG, "x", 0.0, 1.0); /* zero means unknown */
    scales_add(&s, SCALE_TAG, "x", (double)NAN, 1.0);
    scales_add(&s, SCALE_TAG, "x", -1.0, 1.0);
    scales_add(&s, SCALE_TAG, "x", (double)INFINITY, 1.0);
    CHECK(s.n == 0);
    for (int i = 0; i < 100; i++) scales_add(&s, SCALE_DESCRIPTION, "description", 5.0, 5.0);
    scales_add(&s, SCALE_OPTION, "option", 7.0, 7.0); /* a file full of statements cannot shut the user out */
    CHECK(!strcmp(choose(&s).px_source, "option"));
    for (int i = 0; i < 9; i++) s.list[i].x_nm = 5.0 + i;
    m = choose(&s);
    CHECK(strlen(m.note) > 300 && strlen(m.note) < sizeof m.note && m.note[strlen(m.note) - 1] != ' ');
    return check_done();
}

/* Evenness over a wafer: groups by radius, what is left out, the sentence. */
#include "judge/wafer.h"

#include "base/quantity.h"
#include "check.h"

int main(void) {
    static const double v[] = { 340.0, 347.0, 366.0, 364.0, MISSING, 500.0 };
    static const double x[] = { 0.0, 45.0, 90.0, 0.0, 0.0, MISSING }, y[] = { 0.0, 0.0, 0.0, -90.0, 60.0, 0.0 };
    wafer_evenness w;
    CHECK(wafer_even(v, x, y, 6, &w) && w.n == 4 && w.n_centre == 1 && w.n_edge == 2);
    CHECK_NEAR(w.mean, 354.25, 1e-12);
    CHECK_NEAR(w.range, 26.0, 1e-12);
    CHECK_NEAR(w.edge_minus_centre, 25.0, 1e-12);
    CHECK_NEAR(w.edge_minus_centre_rel, 25.0 / 340.0, 1e-12);
    CHECK_NEAR(w.sd, sqrt((14.25 * 14.25 + 7.25 * 7.25 + 11.75 * 11.75 + 9.75 * 9.75) / 3.0), 1e-12);
    CHECK_NEAR(w.radius_mm, 90.0, 1e-12);
    CHECK(!wafer_even(v, x, y, 2, &w)); /* two are too few */
    static const double middle[] = { 0.0, 0.0, 0.0 };
    CHECK(!wafer_even(v, middle, middle, 3, &w));
    CHECK(wafer_even(v, x + 1, y + 1, 3, &w) && w.n_centre == 0 && isnan(w.edge_minus_centre)); /* none inside a third */

    textbuf t = { 0 };
    sentence_subject s = { "spacing_nm", "nm", 5, MISSING, MISSING };
    CHECK(wafer_even(v, x, y, 6, &w));
    wafer_sentence(&s, "G115 W05", &w, &t);
    CHECK(t.s && !strcmp(t.s, "spacing on wafer G115 W05: edge less centre +25 nm (+7.4 %), range 26 nm, sd 12.8 nm (3.6 %), 4 samples"));
    if (t.s) printf("%s\n", t.s);
    text_free(&t);
    w.edge_minus_centre = -40.0;
    w.edge_minus_centre_rel = -0.12;
    wafer_sentence(&s, "W1", &w, &t);
    CHECK(t.s && strstr(t.s, "edge less centre -40 nm (-12 %)") && strstr(t.s, "look at gas distribution"));
    text_free(&t);
    w.edge_minus_centre = w.edge_minus_centre_rel = MISSING;
    wafer_sentence(&s, "W1", &w, &t);
    CHECK(t.s && !strstr(t.s, "edge less") && !strstr(t.s, "look at"));
    text_free(&t);
    return check_done();
}

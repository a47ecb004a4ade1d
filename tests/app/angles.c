/* The sweep over angles: its text, and the angle up to which a limit holds. */
#include "app/angles.h"

#include "base/quantity.h"
#include "check.h"

static int parses(const char *text) {
    double a, b, c;
    error e = { 0 };
    return angles_parse("--angles", text, &a, &b, &c, &e) == ST_OK;
}

int main(void) {
    double from, to, step;
    error e = { 0 };
    CHECK(angles_parse("--angles", "5:80.5:2.5", &from, &to, &step, &e) == ST_OK);
    CHECK_NEAR(from, 5.0, 0.0);
    CHECK_NEAR(to, 80.5, 0.0);
    CHECK_NEAR(step, 2.5, 0.0);
    CHECK(parses("0:0:1"));
    static const char *const wrong[] = { "",       "0:80",     "0:80:5:1", "80:0:5", "-1:80:5", "0:90:5",
                                         "0:80:0", "0:80:0.1", "0::5",     "a:b:c",  "0:80:5x", ":80:5" };
    for (size_t i = 0; i < sizeof wrong / sizeof wrong[0]; i++) CHECK(!parses(wrong[i]));
    CHECK_FAILS(angles_parse("--angles", "0:95:5", &from, &to, &step, &e), ST_BAD_INPUT, e, "such as 0:80:5");

    angle_row rows[4] = { { .angle_deg = 0, .mean = 0.01, .mean_hi = 0.03 },
                          { .angle_deg = 10, .mean = 0.02, .mean_hi = 0.05 },
                          { .angle_deg = 20, .mean = 0.06, .mean_hi = 0.09 },
                          { .angle_deg = 30, .mean = 0.01, .mean_hi = 0.02 } };
    angle_sweep s = { .n = 4, .rows = rows };
    CHECK_NEAR(angles_under(&s, 0.03, 0), 12.5, 1e-12); /* the dip behind the rise does not count */
    CHECK_NEAR(angles_under(&s, 0.04, 1), 5.0, 1e-12);
    CHECK(isnan(angles_under(&s, 0.005, 0)) && isnan(angles_under(&s, 0.02, 1)));
    CHECK_NEAR(angles_under(&s, 0.5, 0), 30.0, 0.0);
    rows[2].mean = MISSING; /* no model there */
    CHECK_NEAR(angles_under(&s, 0.03, 0), 10.0, 0.0);
    return check_done();
}

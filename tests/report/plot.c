/* Ticks are round and inside the range; charts hold their labels, break at missing values and say when there are none. */
#include "report/plot.h"

#include "base/quantity.h"
#include "check.h"

static size_t count_of(const char *text, const char *word) {
    size_t n = 0;
    for (const char *p = text; (p = strstr(p, word)); p += strlen(word)) n++;
    return n;
}

static void check_ticks(void) {
    double t[16];
    size_t n = plot_ticks(271.3, 433.9, 6, t);
    CHECK(n == 3);
    CHECK_NEAR(t[0], 300.0, 1e-9);
    CHECK_NEAR(t[1] - t[0], 50.0, 1e-9);
    CHECK(plot_ticks(1.0, 1.0, 6, t) == 0 && plot_ticks(0.0, 1.0, 1, t) == 0);
    n = plot_ticks(0.0, 0.03, 6, t);
    CHECK(n >= 3 && n <= 6);
    CHECK_NEAR(t[0], 0.0, 1e-15);
}

int main(void) {
    check_ticks();
    double x[5] = { 300, 400, 500, 600, 700 }, y[5] = { 1.0, 2.0, MISSING, 3.0, 4.0 };
    double lo[5] = { 0.5, 1.5, MISSING, 2.5, 3.5 }, hi[5] = { 1.5, 2.5, MISSING, 3.5, 4.5 };
    plot_series s = { .x = x, .y = y, .lo = lo, .hi = hi, .n = 5, .label = "a < b" };
    plot p = { .title = "T & U",
               .x_label = "wavelength (nm)",
               .y_label = "R (%)",
               .y_lo = MISSING,
               .y_hi = MISSING,
               .target_lo = MISSING,
               .target_hi = 2.0,
               .target_label = "target",
               .series = &s,
               .n_series = 1 };
    textbuf t = { 0 };
    plot_svg(&p, &t);
    CHECK(!t.failed && strstr(t.s, "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 720 320\""));
    CHECK(strstr(t.s, "T &amp; U") && strstr(t.s, "a &lt; b") && strstr(t.s, "wavelength (nm)") &&
          strstr(t.s, ">R (%)"));
    CHECK(strstr(t.s, ">400</text>") && strstr(t.s, ">600</text>"));
    CHECK(count_of(t.s, "Z\" style") == 2); /* the band breaks where a value is missing */
    CHECK(!strstr(t.s, "nan") && !strstr(t.s, "inf"));
    text_free(&t);

    const char *names[] = { "one", "a very long name of an etch", NULL };
    double k[3] = { 0, 1, 2 }, v[3] = { 10.0, 20.0, MISSING };
    plot_mark marks[3] = { MARK_DISC, MARK_TRIANGLE, MARK_SQUARE };
    plot_series points = { .x = k, .y = v, .n = 3, .style = PLOT_POINTS, .marks = marks };
    plot q = { .title = "series",
               .x_label = "etch",
               .y_label = "spacing (nm)",
               .y_lo = MISSING,
               .y_hi = MISSING,
               .target_lo = 12.0,
               .target_hi = MISSING,
               .names = names,
               .n_names = 3,
               .series = &points,
               .n_series = 1 };
    plot_svg(&q, &t);
    CHECK(count_of(t.s, "<circle") == 1 && strstr(t.s, "<title>one: 10</title>") &&
          strstr(t.s, ">one</text>"));
    CHECK(strstr(t.s, "a very long name o\xe2\x80\xa6</text>"));
    text_free(&t);

    /* a logarithmic axis takes zeros and negatives to its floor */
    double small[5] = { 0.0, -1.0, 0.1, 1.0, 10.0 };
    plot_series logs = { .x = x, .y = small, .n = 5 };
    plot l = { .title = "log",
               .x_label = "x",
               .y_label = "y",
               .log_y = 1,
               .y_lo = 0.1,
               .y_hi = 100.0,
               .target_lo = MISSING,
               .target_hi = MISSING,
               .series = &logs,
               .n_series = 1 };
    plot_svg(&l, &t);
    CHECK(strstr(t.s, ">0.1</text>") && strstr(t.s, ">100</text>") && !strstr(t.s, "nan") &&
          !strstr(t.s, "inf"));
    text_free(&t);

    /* one point, equal values, nothing at all */
    double one = 5.0;
    plot_series single = { .x = &one, .y = &one, .n = 1 };
    l = (plot){ .title = "one",
                .x_label = "x",
                .y_label = "y",
                .y_lo = MISSING,
                .y_hi = MISSING,
                .target_lo = MISSING,
                .target_hi = MISSING,
                .series = &single,
                .n_series = 1 };
    plot_svg(&l, &t);
    CHECK(!strstr(t.s, "nan") && !strstr(t.s, "inf"));
    text_free(&t);
    single.n = 0;
    plot_svg(&l, &t);
    CHECK(strstr(t.s, "no values to draw"));
    text_free(&t);
    return check_done();
}

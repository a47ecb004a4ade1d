/* What a run's tables hold comes back unchanged; a foreign or missing table is a sentence; bins are round and count by weight. */
#include "report/curves.h"

#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "check.h"
#include "io/file.h"
#include "report/html.h"
#include "report/plot.h"
#include "report/results.h"

static void write_in(const char *dir, const char *kind, const char *name, const textbuf *t) {
    error e = { 0 };
    char *folder = path_join(dir, kind), *path = folder ? path_join(folder, name) : NULL;
    CHECK(path && folder_make(folder, &e) == ST_OK && file_write(path, t->s, t->n, &e) == ST_OK);
    free(path);
    free(folder);
}

static void remove_in(const char *dir, const char *kind, const char *name) {
    char *folder = path_join(dir, kind), *path = folder ? path_join(folder, name) : NULL;
    if (path) CHECK(remove(path) == 0);
    if (folder) (void)rmdir(folder);
    free(path);
    free(folder);
}

static void check_tables(const char *dir) {
    static char acf[] = "acf", other[] = "acf_curvature", nm[] = "nm", px[] = "px", one[] = "1";
    profile_row rows[4] = { { acf, 0, nm, 1, one }, { other, 5, nm, 0.5, one }, { other, 10, nm, -0.25, one }, { other, 1, px, 9, one } };
    feature_row cells[3] = { { .cell_ecd_nm = 100, .border_weight = 1 }, { .cell_ecd_nm = 300, .border_weight = 0 },
                             { .cell_ecd_nm = 149, .border_weight = 3 } };
    textbuf t = { 0 };
    error e = { 0 };
    xy_curve c = { 0 };
    profiles_csv(rows, 4, &t);
    write_in(dir, "profiles", "a.csv", &t);
    write_in(dir, "features", "wrong.csv", &t);
    CHECK(curve_read(dir, "a", "acf_curvature", &c, &e) == ST_OK && c.n == 2);
    if (c.n == 2) {
        CHECK_NEAR(c.x[1], 10.0, 0.0);
        CHECK_NEAR(c.y[1], -0.25, 0.0);
    }
    xy_curve_free(&c);
    text_free(&t);
    features_csv(cells, 3, &t);
    write_in(dir, "features", "a.csv", &t);
    text_free(&t);
    CHECK(sizes_read(dir, "a", &c, &e) == ST_OK && c.n == 2);
    double lo = 100.0, share[5], step = bin_width(&lo, 149.0, 6);
    CHECK_NEAR(step, 10.0, 1e-12);
    sizes_histogram(&c, lo, step, 5, share);
    CHECK_NEAR(share[0], 0.25, 1e-12);
    CHECK_NEAR(share[4], 0.75, 1e-12);
    xy_curve_free(&c);
    CHECK_FAILS(sizes_read(dir, "wrong", &c, &e), ST_BAD_INPUT, e, "cell_ecd_nm");
    CHECK_FAILS(curve_read(dir, "none", "acf", &c, &e), ST_IO, e, "none");
    remove_in(dir, "features", "wrong.csv");
    remove_in(dir, "features", "a.csv");
    remove_in(dir, "profiles", "a.csv");
}

/* A chart's table holds every finite point of the series asked for, and no other. */
static void check_plot_table(void) {
    const double x[3] = { 1, 2, 3 }, y[3] = { 10.5, (double)NAN, 30 }, lo[3] = { 9, 0, 29 }, hi[3] = { 12, 0, 31 };
    plot_series s[2] = { { .x = x, .y = y, .n = 3, .label = "reference" }, { .x = x, .y = y, .lo = lo, .hi = hi, .n = 3, .label = "<own>" } };
    plot p = { .title = "t & u", .x_label = "x (nm)", .y_label = "y (%)", .series = s, .n_series = 2 };
    textbuf t = { 0 };
    plot_table(&p, 1, "own", &t);
    CHECK(t.s && strstr(t.s, "<tr><td class=\"t\">&lt;own&gt;<td>1<td>10.5<td>9<td>12\n"));
    CHECK(t.s && !strstr(t.s, "reference") && !strstr(t.s, "nan") && !strstr(t.s, "<td>2<"));
    CHECK(t.s && strstr(t.s, "Data: t &amp; u") && strstr(t.s, "id=\"own\""));
    text_free(&t);
}

static void check_href(void) {
    textbuf t = { 0 };
    html_href(&t, "overlays/a b#1?\"<\xc3\xa9:%.png");
    CHECK(t.s && !strcmp(t.s, "./overlays/a%20b%231%3F%22%3C%C3%A9%3A%25.png"));
    text_free(&t);
}

int main(void) {
    char dir[] = "sward-curves-XXXXXX";
    CHECK(mkdtemp(dir) != NULL);
    check_tables(dir);
    check_plot_table();
    check_href();
    CHECK(rmdir(dir) == 0);
    return check_done();
}

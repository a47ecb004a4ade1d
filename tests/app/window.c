/* The process window: axes, the contour on made-up cells, samples of a run, all three outputs. */
#include "app/window.h"

#include <stdio.h>
#include <stdlib.h>
#include <unistd.h>

#include "base/quantity.h"
#include "bare_silicon.h"
#include "check.h"

static void axes(void) {
    axis a;
    error e = { 0 };
    CHECK(axis_parse("--spacing", "150:500:25", 1.0, 1e5, &a, &e) == ST_OK && a.n == 15);
    CHECK_NEAR(a.v[14], 500.0, 1e-9);
    CHECK(axis_parse("--spacing", "1:2:0.3", 0.05, 20.0, &a, &e) == ST_OK && a.n == 4);
    CHECK(axis_parse("--spacing", "333.3", 1.0, 1e5, &a, &e) == ST_OK && a.n == 1);
    static const char *const wrong[] = { "",        "a",       "500:150:25",   "0:500:25",   "150:500:0",
                                         "150:500", "1:2:3:4", "150:500:1e-3", "150:500:25:" };
    for (size_t i = 0; i < sizeof wrong / sizeof wrong[0]; i++)
        CHECK_FAILS(axis_parse("--spacing", wrong[i], 1.0, 1e5, &a, &e), ST_BAD_INPUT, e, "--spacing: found");
}

/* Heights 100, 200, 300, 400; limit crossed at 250 by the value, at 350 by the upper end. */
static void edges(void) {
    window_cell cells[4] = { { 0.10, 0.08, 0.12, 1.5 },
                             { 0.03, 0.02, 0.05, 2.0 },
                             { 0.01, 0.0, 0.03, 3.0 },
                             { 0.005, 0.0, 0.01, 4.0 } };
    window w = {
        .x = { 1, { 300.0 } }, .height = { 4, { 100, 200, 300, 400 } }, .target = 0.02, .cells = cells
    };
    window_edge g = window_edge_of(&w, 0);
    CHECK_NEAR(g.height_nm, 250.0, 1e-9);
    CHECK_NEAR(g.area_ratio, 2.5, 1e-9);
    CHECK_NEAR(g.sure_height_nm, 350.0, 1e-9);
    CHECK_NEAR(g.sure_area_ratio, 3.5, 1e-9);
    cells[1].R = 0.001; /* a dip below a rise does not count: the target has to hold from there to the top */
    cells[2].R = 0.04;
    g = window_edge_of(&w, 0);
    CHECK_NEAR(g.height_nm, 300.0 + 100.0 * 0.02 / 0.035, 1e-9);
    cells[3].R_hi = 0.021;
    g = window_edge_of(&w, 0);
    CHECK(isnan(g.sure_height_nm) && isnan(g.sure_area_ratio));
    for (int i = 0; i < 4; i++) cells[i].R = 0.01;
    CHECK_NEAR(window_edge_of(&w, 0).height_nm, 100.0, 0.0); /* kept everywhere: the lowest of the map */
    cells[1].R = MISSING; /* no model there: nothing is claimed across it */
    CHECK_NEAR(window_edge_of(&w, 0).height_nm, 300.0, 0.0);
}

static void real_map(void) {
    optics_setup o = setup();
    window w = { .target = 0.02, .x = { 2, { 200.0, 300.0 } }, .height = { 3, { 250.0, 300.0, 350.0 } } };
    surface_input base = { .link = link_defaults() };
    error e = { 0 };
    textbuf json = { 0 }, csv = { 0 }, text = { 0 };
    CHECK(window_fill(&w, &base, &o, &e) == ST_OK);
    static const char source[] = "cones of 250, 300 and 350 nm by 2-D Bruggeman, computed independently";
    CHECK_SOURCE(w.cells[0].R, 0.0402, 1e-4, source);
    CHECK_SOURCE(w.cells[2].R, 0.0183, 1e-4, source);
    CHECK_SOURCE(w.cells[5].R, 0.0076, 1e-4, source);
    CHECK(w.edges[0].height_nm > 250.0 && w.edges[0].height_nm < 300.0);
    CHECK_NEAR(w.edges[0].height_nm, w.edges[1].height_nm,
               1e-6); /* the plain value does not see the spacing */
    CHECK(!(w.edges[1].sure_height_nm <= w.edges[1].height_nm));
    window_json(&w, &json);
    window_csv(&w, &csv);
    window_text(&w, &text);
    CHECK(strstr(json.s, "\"contour\": [") && strstr(json.s, "a person decides") &&
          strstr(json.s, "\"area_ratio\": "));
    CHECK(strstr(csv.s, "spacing_nm,height_nm,weighted_reflectance") && strstr(text.s, "at least ") &&
          strstr(text.s, "silane"));
    text_free(&json);
    text_free(&csv);
    text_free(&text);
    window_free(&w);
    w = (window){
        .across = ACROSS_THICKNESS, .spacing_nm = 300.0, .x = { 1, { 10.0 } }, .height = { 1, { 300.0 } }
    };
    CHECK_FAILS(window_fill(&w, &base, &o, &e), ST_BAD_INPUT, e, "needs a coating");
    window_free(&w);
    layer film = { &nitride, 75.0 };
    o.coatings = &film;
    o.n_coatings = 1;
    w = (window){
        .across = ACROSS_THICKNESS, .spacing_nm = 300.0, .x = { 2, { 0.0, 40.0 } }, .height = { 1, { 300.0 } }
    };
    CHECK(window_fill(&w, &base, &o, &e) == ST_OK);
    CHECK_NEAR(w.cells[0].R, 0.0183, 2e-4); /* no film, no effect */
    CHECK(fabs(w.cells[1].R - w.cells[0].R) > 1e-3);
    CHECK_NEAR(film.thickness_nm, 75.0, 0.0);
    window_free(&w);
    w = (window){ .x = { 150, { 1.0 } }, .height = { 150, { 1.0 } } };
    CHECK_FAILS(window_fill(&w, &base, &o, &e), ST_BAD_INPUT, e, "22500 cells");
    window_free(&w);
}

static void samples(void) {
    char folder[] = "window-XXXXXX", path[80];
    error e = { 0 };
    window w = { .x = { 2, { 200.0, 300.0 } }, .height = { 2, { 300.0, 400.0 } } };
    CHECK(mkdtemp(folder) != NULL);
    snprintf(path, sizeof path, "%s/samples.csv", folder);
    CHECK_FAILS(window_samples(folder, &w, &e), ST_BAD_INPUT, e, "there is no such file");
    FILE *f = fopen(path, "w");
    if (f) {
        fputs("sample,spacing_nm,height_nm,weighted_reflectance,verdict\nW1,250.5,380,0.0123,conforms\nW2,,,,"
              "not_measured\n",
              f);
        fclose(f);
    }
    CHECK(window_samples(folder, &w, &e) == ST_OK && w.n_samples == 2);
    CHECK(w.n_samples == 2 && !strcmp(w.samples[0].name, "W1") && !strcmp(w.samples[0].verdict, "conforms"));
    CHECK_NEAR(w.samples[0].spacing_nm, 250.5, 0.0);
    CHECK(isnan(w.samples[1].spacing_nm) && isnan(w.samples[1].R));
    window_free(&w);
    f = fopen(path, "w");
    if (f) {
        fputs("name,size\na,3\n", f);
        fclose(f);
    }
    CHECK_FAILS(window_samples(folder, &w, &e), ST_BAD_INPUT, e, "no columns sample and spacing_nm");
    window_free(&w);
    unlink(path);
    rmdir(folder);
}

int main(void) {
    error e = { 0 };
    CHECK(table_material("silicon", &silicon) && table_material("nitride", &nitride) && table_sun(&am15g) &&
          material_constant(&air, 1.0, 0.0, &e) == ST_OK);
    axes();
    edges();
    real_map();
    samples();
    material_free(&silicon);
    material_free(&nitride);
    material_free(&air);
    sun_free(&am15g);
    return check_done();
}

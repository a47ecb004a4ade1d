/* Every key of a protocol, every kind of mistake, and that the printed protocol reads back to itself. */
#include "app/protocol.h"

#include <stdlib.h>
#include <string.h>

#include "app/protocol_keys.h"
#include "base/mem.h"
#include "check.h"

static status parse(const char *text, protocol *p, error *e) {
    return protocol_parse(text, strlen(text), "p.json", "dir", p, e);
}

/* The text fails with these words. */
static void fails_with(const char *text, const char *words) {
    protocol p = { 0 };
    error e = { ST_OK, "" };
    int as_wanted = parse(text, &p, &e) == ST_BAD_INPUT && strstr(e.text, words) != NULL;
    CHECK(as_wanted);
    if (!as_wanted) printf("  for %s\n  got: %s\n", text, e.text);
    CHECK(p.name == NULL); /* untouched */
    protocol_free(&p);
}

static const char every_key[] =
    "{ \"protocol\": \"line 3\", \"relief\": \"pore\", \"spacing\": \"density\", \"px_u_rel\": 0.013,\n"
    "  \"history\": \"line3.sqlite\", \"samples\": { \"pattern\": \"{lot}_W{wafer}_{n}\" },\n"
    "  \"fitness\": { \"min_px_per_spacing\": 7.5, \"warn_px_per_spacing\": 11, \"min_features\": 61, "
    "\"warn_features\": 190,\n"
    "    \"max_blur\": 0.21, \"warn_blur\": 0.11, \"max_clipped\": 0.031, \"warn_clipped\": 0.011, "
    "\"max_noise\": 1.7,\n"
    "    \"warn_noise\": 0.7, \"max_streaks\": 0.41, \"warn_streaks\": 0.13, \"max_stretch\": 1.31, "
    "\"warn_stretch\": 1.07,\n"
    "    \"bright_level\": 0.47, \"min_ring_z\": 5.5 },\n"
    "  \"targets\": { \"spacing_nm\": { \"min\": 280, \"max\": 420 },\n"
    "    \"weighted_reflectance\": { \"max\": 0.02, \"error\": \"repeat\" } },\n"
    "  \"link\": { \"height_nm\": 351, \"height_nm_u\": 31, \"aspect\": 1.3, \"aspect_u\": 0.2, \"shape\": "
    "\"paraboloid\",\n"
    "    \"exponent_u\": 0.3, \"height_spread\": 0.15, \"height_by_size\": 0.4, \"level\": \"tips\", "
    "\"coverage\": 0.93,\n"
    "    \"profile\": \"depth.csv\" },\n"
    "  \"optics\": { \"ambient\": \"laminate\", \"glass_mm\": 2.1, \"encapsulant_mm\": 0.6, \"substrate\": "
    "3.5,\n"
    "    \"coatings\": [ { \"material\": \"alumina\", \"thickness_nm\": 11 }, { \"material\": \"my.csv\", "
    "\"thickness_nm\": 70.5 } ],\n"
    "    \"mixing\": \"looyenga\", \"angle_deg\": 8, \"polarization\": \"s\", \"hemispherical\": true,\n"
    "    \"band_nm\": [350, 1100], \"step_nm\": 2.5 } }\n";

static void reads_every_key(void) {
    protocol p = { 0 };
    error e = { ST_OK, "" };
    CHECK(parse(every_key, &p, &e) == ST_OK);
    if (e.text[0]) printf("%s\n", e.text);
    CHECK(p.name && strcmp(p.name, "line 3") == 0 && p.measure.relief == RELIEF_PORE &&
          p.spacing == SPACING_DENSITY);
    CHECK_NEAR(p.px_u_rel, 0.013, 0);
    CHECK(p.history && strcmp(p.history, "dir/line3.sqlite") == 0);
    CHECK(p.pattern && strcmp(p.pattern, "{lot}_W{wafer}_{n}") == 0);
    const measure_options *m = &p.measure;
    const double got[] = { m->min_px_per_spacing,
                           m->warn_px_per_spacing,
                           m->min_features,
                           m->warn_features,
                           m->max_blur,
                           m->warn_blur,
                           m->max_clipped,
                           m->warn_clipped,
                           m->max_noise,
                           m->warn_noise,
                           m->max_streaks,
                           m->warn_streaks,
                           m->max_stretch,
                           m->warn_stretch,
                           m->bright_level,
                           m->min_ring_z,
                           p.link.height_nm,
                           p.link.height_nm_u,
                           p.link.aspect,
                           p.link.aspect_u,
                           p.link.exponent,
                           p.link.exponent_u,
                           p.link.height_spread,
                           p.link.height_by_size,
                           p.link.coverage,
                           p.glass_mm,
                           p.encapsulant_mm,
                           p.angle_deg,
                           p.band_lo_nm,
                           p.band_hi_nm,
                           p.step_nm };
    const double want[] = { 7.5,  11,   61,   190,  0.21, 0.11, 0.031, 0.011, 1.7, 0.7, 0.41,
                            0.13, 1.31, 1.07, 0.47, 5.5,  351,  31,    1.3,   0.2, 2,   0.3,
                            0.15, 0.4,  0.93, 2.1,  0.6,  8,    350,   1100,  2.5 };
    for (size_t i = 0; i < sizeof want / sizeof want[0]; i++) CHECK_NEAR(got[i], want[i], 0);
    CHECK(p.link.level_at_tips == 1 && p.hemispherical == 1 && p.polarization == POL_S &&
          p.mixing == MIX_LOOYENGA);
    CHECK(p.profile && strcmp(p.profile, "dir/depth.csv") == 0);
    CHECK(p.ambient && strcmp(p.ambient, "laminate") == 0 && p.substrate && strcmp(p.substrate, "3.5") == 0);
    CHECK(p.n_coatings == 2 && strcmp(p.coatings[0].material, "alumina") == 0 &&
          strcmp(p.coatings[1].material, "dir/my.csv") == 0);
    CHECK_NEAR(p.coatings[1].thickness_nm, 70.5, 0);
    CHECK(p.n_targets == 2 && strcmp(p.targets[0].quantity, "spacing_nm") == 0 &&
          p.targets[0].error == ERROR_FULL);
    if (p.n_targets == 2) {
        CHECK_NEAR(p.targets[0].min, 280, 0);
        CHECK_NEAR(p.targets[0].max, 420, 0);
        CHECK(isnan(p.targets[1].min) && p.targets[1].error == ERROR_REPEAT);
    }
    CHECK(strcmp(p.path, "p.json") == 0);
    protocol_free(&p);
    protocol_free(&p); /* accepts {0} */
}

static void names_each_mistake(void) {
    fails_with("{\n\"link\": {\n\n\"height_spred\": 0.1 } }",
               "p.json line 4: unknown key 'height_spred' in link; did you mean 'height_spread'?");
    fails_with("{\n\"spacng\": \"density\" }",
               "p.json line 2: unknown key 'spacng'; did you mean 'spacing'?");
    fails_with("{ \"optic\": {} }", "did you mean 'optics'?");
    fails_with("{ \"height_nm\": 300 }", "unknown key 'height_nm'; it belongs in \"link\"");
    fails_with("{ \"link\": { \"relief\": \"pore\" } }",
               "unknown key 'relief' in link; it belongs to the top level");
    fails_with("{ \"qqqqqqqqqq\": 1 }", "unknown key 'qqqqqqqqqq'");
    fails_with(
        "{ \"link\":\n { \"height_nm\": \"tall\" } }",
        "p.json line 2, link.height_nm: found \"tall\", expected a number above 0 and at most 100000 (nm)");
    fails_with("{ \"link\": { \"height_nm\": 0 } }", "link.height_nm: found 0, expected a number above 0");
    fails_with("{ \"link\": { \"coverage\": 1.01 } }",
               "link.coverage: found 1.01, expected a number from 0 to 1");
    fails_with("{ \"link\": { \"shape\": \"pyramid\" } }",
               "expected \"cone\", \"paraboloid\", \"unknown\" or a number from 0.05 to 20");
    fails_with("{ \"link\": [] }", "link: found [], expected an object in braces");
    fails_with("{ \"link\": { \"height_nm_u\": 30 } }", "height_nm_u stands without link.height_nm");
    fails_with("{ \"link\": { \"aspect_u\": 0.3 } }", "aspect_u stands without link.aspect");
    fails_with("{ \"relief\": \"bumps\" }", "expected one of \"auto\", \"hillock\", \"pore\"");
    fails_with("{ \"relief\": 1 }", "found 1, expected one of");
    fails_with("{ \"protocol\": 3 }", "protocol: found 3, expected a text in quotes");
    fails_with("{ \"optics\": { \"hemispherical\": 1 } }", "expected true or false");
    fails_with("{ \"optics\": { \"band_nm\": [1200, 300] } }", "expected [low, high], low below high");
    fails_with("{ \"optics\": { \"band_nm\": 300 } }", "expected [low, high]");
    fails_with("{ \"optics\": { \"ambient\": -1 } }",
               "expected a material name, a CSV path or a refractive index");
    fails_with("{ \"optics\": { \"coatings\": { } } }", "expected a list of at most 8");
    fails_with("{ \"optics\": {\n \"coatings\": [ 3 ] } }", "p.json line 2, optics.coatings: found 3");
    fails_with("{ \"optics\": { \"coatings\": [ { \"material\": \"alumina\" } ] } }",
               "both \"material\" and \"thickness_nm\"");
    fails_with("{ \"optics\": { \"coatings\": [ { \"material\": \"alumina\",\n \"thickness\": 3 } ] } }",
               "line 2: unknown key 'thickness' in optics.coatings; did you mean 'thickness_nm'?");
    fails_with("{ \"optics\": { \"coatings\": [ { \"material\": 2, \"thickness_nm\": -3 } ] } }",
               "coatings.thickness_nm: found -3, expected a number from 0");
    fails_with("{ \"optics\": { \"coatings\": [ { \"material\": true, \"thickness_nm\": 3 } ] } }",
               "coatings.material: found true");
    fails_with("{ \"targets\": [] }", "expected an object of");
    fails_with("{ \"targets\": {\n \"spacing\": { \"min\": 1 } } }",
               "p.json line 2: targets: 'spacing' is no quantity of samples.csv");
    fails_with("{ \"targets\": { \"spacing_mm\": { \"min\": 1 } } }", "did you mean 'spacing_nm'?");
    fails_with("{ \"targets\": { \"spacing_nm\": { \"min\": 3, \"rule\": \"guess\" } } }", "expected the rule \"guard\"");
    fails_with("{ \"targets\": { \"spacing_nm\": { \"min\": 3, \"at_least\": 0.5 } } }", "a probability above 0.5 and below 1");
    fails_with("{ \"targets\": { \"spacing_nm\": { \"min\": 3, \"sheet\": 1 } } }", "expected true or false");
    fails_with("{ \"samples\": {\n \"positions\": { \"C\": [0] } } }", "p.json line 2, samples.positions.C: found [0], expected [x, y] in mm");
    fails_with("{ \"samples\": { \"positions\": [1] } }", "an object of [x, y] in mm by position");
    fails_with("{ \"charts\": { \"rules\": \"zone,zoned\" } }", "charts.rules: 'zoned' is no rule");
    fails_with("{ \"charts\": { \"baseline\": -1 } }", "charts.baseline: found -1");
    fails_with("{ \"targets\": { \"sample\": { \"min\": 1 } } }", "a target needs a column of numbers");
    fails_with("{ \"targets\": { \"spacing_nm\": { } } }", "expected \"min\", \"max\" or both");
    fails_with("{ \"targets\": { \"spacing_nm\": 300 } }", "targets.spacing_nm: found 300");
    fails_with("{ \"targets\": { \"spacing_nm\": { \"min\": 3, \"max\": 2 } } }", "expected min below max");
    fails_with("{ \"targets\": { \"spacing_nm\": { \"min\": \"a\" } } }", "expected a number as limit");
    fails_with("{ \"plan\": { \"half_width\": { \"spacing_mn\": 3 } } }", "plan.half_width.spacing_mn is no quantity");
    fails_with("{ \"plan\": { \"half_width\": { \"spacing_nm\": 0 } } }", "a half-width above 0");
    fails_with("{ \"plan\": { \"half_width\": [3] } }", "an object of half-widths above 0");
    fails_with("{ \"targets\": { \"spacing_nm\": { \"min\": 3, \"error\": \"none\" } } }",
               "expected \"full\" or \"repeat\"");
    fails_with("{ \"targets\": { \"spacing_nm\": { \"mn\": 3 } } }",
               "unknown key 'mn' in targets.spacing_nm; did you mean 'min'?");
    fails_with("{ \"samples\": { \"pattern\": \"{lott}\" } }",
               "unknown field '{lott}', did you mean '{lot}'?");
    fails_with("{ \"spacing\": \"density\",\n \"spacing\": \"density\" }", "line 2");
    fails_with("{ \"spacing\": }", "p.json");
}

static void comments_and_null(void) {
    protocol p = { 0 };
    error e = { ST_OK, "" };
    CHECK(parse("// head\n{ // tail \"spacng\": 1\n \"protocol\": \"a // b \\\" // c\", // more\n "
                "\"px_u_rel\": null,"
                " \"link\": { \"height_nm\": null } }\n// end",
                &p, &e) == ST_OK);
    CHECK(p.name && strcmp(p.name, "a // b \" // c") == 0);
    CHECK(isnan(p.px_u_rel) && isnan(p.link.height_nm));
    protocol_free(&p);
    fails_with("{ // one\n // two\n \"spacng\": 1 }", "p.json line 3: unknown key");
}

static void prints_what_it_reads(void) {
    textbuf text = { 0 }, built_in = { 0 }, read_back = { 0 };
    protocol a = { 0 }, b = { 0 };
    error e = { ST_OK, "" };
    protocol_print(&text);
    CHECK(text_check(&text, "test", &e) == ST_OK && protocol_defaults(&a, &e) == ST_OK);
    CHECK(text.s && parse(text.s, &b, &e) == ST_OK);
    if (e.text[0]) printf("%s\n", e.text);
    protocol_full_text(&a, &built_in);
    protocol_full_text(&b, &read_back);
    CHECK(built_in.s && read_back.s && strcmp(built_in.s, read_back.s) == 0);
    for (size_t i = 0; i < n_protocol_keys && text.s; i++) {
        char key[60];
        snprintf(key, sizeof key, "\"%s\": ", protocol_keys[i].name);
        CHECK(strstr(text.s, key) != NULL);
    }
    text_free(&text);
    text_free(&built_in);
    text_free(&read_back);
    protocol_free(&a);
    protocol_free(&b);
}

/* Same meaning, same text; another meaning, another text; the measuring part only moves with the measuring
 * keys. */
static void fingerprint(const char *one, const char *two, int same_measuring, int same_full) {
    textbuf m1 = { 0 }, m2 = { 0 }, f1 = { 0 }, f2 = { 0 };
    protocol a = { 0 }, b = { 0 };
    error e = { ST_OK, "" };
    CHECK(parse(one, &a, &e) == ST_OK && parse(two, &b, &e) == ST_OK);
    protocol_measuring_text(&a, &m1);
    protocol_measuring_text(&b, &m2);
    protocol_full_text(&a, &f1);
    protocol_full_text(&b, &f2);
    CHECK((strcmp(m1.s, m2.s) == 0) == same_measuring);
    CHECK((strcmp(f1.s, f2.s) == 0) == same_full);
    text_free(&m1);
    text_free(&m2);
    text_free(&f1);
    text_free(&f2);
    protocol_free(&a);
    protocol_free(&b);
}

static void explains(void) {
    protocol p = { 0 };
    error e = { ST_OK, "" };
    textbuf t = { 0 };
    CHECK(parse("{ \"relief\": \"hillock\", \"targets\": { \"spacing_nm\": { \"min\": 280, \"max\": 420 } },"
                " \"link\": { \"height_nm\": 350, \"height_nm_u\": 30 }, \"history\": \"/x/l.sqlite\","
                " \"optics\": { \"coatings\": [ { \"material\": \"alumina\", \"thickness_nm\": 10 } ] } }",
                &p, &e) == ST_OK);
    protocol_explain(&p, &t);
    static const char *const words[] = { "bright hillocks", "350 +- 30 nm", "10 nm of alumina",
                                         "300 to 1200 nm",  "/x/l.sqlite",  "spacing_nm is 280 to 420" };
    for (size_t i = 0; i < sizeof words / sizeof words[0]; i++) CHECK(t.s && strstr(t.s, words[i]));
    text_free(&t);
    protocol_free(&p);
}

/* A stated shape is known, an uncertainty makes it uncertain, nothing leaves it open, and so does the word for it. */
static void shapes(void) {
    static const struct { const char *text; double exponent, u; int open; } cases[] = {
        { "{}", 1.0, (double)NAN, 1 },
        { "{ \"link\": { \"shape\": \"unknown\" } }", 1.0, (double)NAN, 1 },
        { "{ \"link\": { \"shape\": \"cone\" } }", 1.0, (double)NAN, 0 },
        { "{ \"link\": { \"shape\": 1.5 } }", 1.5, (double)NAN, 0 },
        { "{ \"link\": { \"shape\": \"paraboloid\", \"exponent_u\": 0.2 } }", 2.0, 0.2, 0 },
        { "{ \"link\": { \"exponent_u\": 0.3 } }", 1.0, 0.3, 0 },
        { "{ \"link\": { \"exponent_u\": 0, \"shape\": \"unknown\" } }", 1.0, 0.0, 0 },
    };
    error e = { ST_OK, "" };
    textbuf first = { 0 };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        protocol p = { 0 };
        textbuf t = { 0 };
        CHECK(parse(cases[i].text, &p, &e) == ST_OK);
        CHECK_NEAR(p.link.exponent, cases[i].exponent, 0.0);
        CHECK(p.link.shape_open == cases[i].open && isnan(p.link.exponent_u) == isnan(cases[i].u));
        protocol_full_text(&p, i ? &t : &first); /* fingerprints tell the known cone from the open shape */
        if (i) CHECK(!strcmp(t.s, first.s) == (i == 1));
        text_free(&t);
        protocol_free(&p);
    }
    text_free(&first);
    protocol p = { 0 };
    textbuf t = { 0 };
    CHECK(parse("{ \"link\": { \"flat_top\": 0.25, \"height_spread\": 0.2, \"spread_law\": \"lognormal\", "
                "\"coverage\": 0.9, \"coverage_u\": 0.03 } }", &p, &e) == ST_OK);
    CHECK(p.link.lognormal == 1);
    protocol_explain(&p, &t);
    CHECK(strstr(t.s, "flat at the top on 25 % of their foot (50 % of the full height cut off)") && strstr(t.s, "log-normal") &&
          strstr(t.s, "not stated"));
    text_free(&t);
    protocol_free(&p);
    CHECK_FAILS(parse("{ \"link\": { \"flat_top\": 0.1, \"tip_radius_nm\": 10 } }", &p, &e), ST_BAD_INPUT, e,
                "a tip is flat or round");
}

static void options(void) {
    protocol p = { 0 };
    error e = { ST_OK, "" };
    CHECK(protocol_defaults(&p, &e) == ST_OK);
    CHECK(protocol_set(&p, "link", "coverage", "0.8", "--coverage", &e) == ST_OK);
    CHECK(protocol_set(&p, "link", "shape", "1.5", "--shape", &e) == ST_OK);
    CHECK(protocol_set(&p, "optics", "band_nm", "320:1100", "--band", &e) == ST_OK);
    CHECK(protocol_set(&p, "optics", "coatings", "alumina:10", "--coating", &e) == ST_OK);
    CHECK(protocol_set(&p, "optics", "coatings", "2.1+0.1i:20", "--coating", &e) == ST_OK);
    CHECK(protocol_set(&p, "optics", "ambient", "1.33", "--ambient", &e) == ST_OK);
    CHECK(protocol_set(&p, "optics", "mixing", "volume", "--mixing", &e) == ST_OK);
    CHECK(protocol_set(&p, "optics", "hemispherical", "true", "--hemispherical", &e) == ST_OK);
    CHECK_NEAR(p.link.coverage, 0.8, 0);
    CHECK_NEAR(p.link.exponent, 1.5, 0);
    CHECK_NEAR(p.band_hi_nm, 1100, 0);
    CHECK(p.n_coatings == 2 && strcmp(p.coatings[1].material, "2.1+0.1i") == 0 && p.hemispherical &&
          p.mixing == MIX_VOLUME);
    CHECK(strcmp(p.ambient, "1.33") == 0);
    CHECK_FAILS(protocol_set(&p, "link", "coverage", "2", "--coverage", &e), ST_BAD_INPUT, e,
                "--coverage: found 2, expected a number from 0 to 1");
    CHECK_FAILS(protocol_set(&p, "optics", "band_nm", "300-1200", "--band", &e), ST_BAD_INPUT, e,
                "--band: found \"300-1200\"");
    CHECK_FAILS(protocol_set(&p, "optics", "coatings", "alumina", "--coating", &e), ST_BAD_INPUT, e,
                "MATERIAL:NM");
    CHECK_FAILS(protocol_set(&p, "optics", "mixing", "mean", "--mixing", &e), ST_BAD_INPUT, e,
                "maxwell-garnett-2d");
    protocol_free(&p);
}

/* Every allocation of ours fails once: a status, a sentence, nothing left behind (the sanitizer looks). */
static void survives_no_memory(void) {
    status st = ST_NO_MEMORY;
    for (size_t n = 1; n < 500 && st != ST_OK; n++) {
        protocol p = { 0 };
        error e = { ST_OK, "" };
        mem_fail_after(n);
        st = parse(every_key, &p, &e);
        mem_fail_after(0);
        CHECK(st == ST_OK || (st == ST_NO_MEMORY && e.text[0]));
        protocol_free(&p);
    }
    CHECK(st == ST_OK);
}

/* Rules, columns of the sheet, places, charts: read, and told apart from what changes results. */
static void judging(void) {
    protocol p = { 0 };
    error e = { 0 };
    static char mass[] = "mass_loss_mg", mass_u[] = "mass_loss_mg_u", gas[] = "gas";
    char *columns[] = { gas, mass, mass_u };
    CHECK(parse("{ \"targets\": { \"mass_loss_mg\": { \"max\": 3, \"rule\": \"probability\", \"at_least\": 0.9 }, \"spacing_mm\": { \"min\": 1, "
                "\"sheet\": true, \"rule\": \"simple\" }, \"n_used\": { \"min\": 3 } },"
                " \"samples\": { \"positions\": { \"C\": [0, 0], \"E\": [0, -70.5] } },"
                " \"charts\": { \"rules\": \"iso,ewma\", \"baseline\": 25, \"phase\": \"bath\" } }", &p, &e) == ST_OK);
    CHECK(p.n_targets == 3 && p.targets[0].of_sheet && p.targets[0].rule == DECIDE_PROBABILITY && p.targets[1].of_sheet && !p.targets[2].of_sheet);
    CHECK(p.targets[1].rule == DECIDE_SIMPLE && p.targets[2].rule == DECIDE_GUARD);
    CHECK(p.n_places == 2 && !strcmp(p.places[1].position, "E") && fabs(p.places[1].y_mm + 70.5) < 1e-12);
    CHECK(!strcmp(p.chart_rules, "iso,ewma") && !strcmp(p.chart_phase, "bath") && fabs(p.chart_baseline - 25.0) < 1e-12);
    CHECK_FAILS(protocol_meet_sheet(&p, columns, 3, &e), ST_BAD_INPUT, e, "'spacing_mm' is neither a quantity of samples.csv nor a column");
    static char spacing[] = "spacing_mm";
    columns[0] = spacing;
    e = (error){ 0 };
    CHECK(protocol_meet_sheet(&p, columns, 3, &e) == ST_OK && p.targets[0].sheet_at == 2 && p.targets[0].sheet_u_at == 3);
    CHECK(p.targets[1].sheet_at == 1 && p.targets[1].sheet_u_at == 0);
    textbuf t = { 0 };
    protocol_explain(&p, &t);
    CHECK(t.s && strstr(t.s, "with 90 % conformance probability") && strstr(t.s, "simple acceptance"));
    text_free(&t);
    protocol_free(&p);
    fingerprint("{}", "{ \"charts\": { \"rules\": \"iso\" } }", 1, 1); /* charts change no result */
    fingerprint("{ \"targets\": { \"spacing_nm\": { \"max\": 300 } } }", "{ \"targets\": { \"spacing_nm\": { \"max\": 300, \"rule\": \"simple\" } } }", 1, 0);
    fingerprint("{}", "{ \"samples\": { \"positions\": { \"C\": [0, 0] } } }", 1, 0);
}

int main(void) {
    protocol p = { 0 };
    error e = { ST_OK, "" };
    reads_every_key();
    survives_no_memory();
    names_each_mistake();
    comments_and_null();
    prints_what_it_reads();
    fingerprint("{}", "{ \"protocol\": \"other name\", \"history\": \"h.sqlite\" }", 1, 1);
    fingerprint("{ \"link\": { \"height_nm\": 300 } }", "{ \"link\": { \"height_nm\": 300.0000001 } }", 1, 0);
    fingerprint("{ \"relief\": \"pore\" }", "{ \"relief\": \"hillock\" }", 0, 0);
    fingerprint("{ \"fitness\": { \"max_blur\": 0.3 }, \"px_u_rel\": 0.02 }",
                "{ \"px_u_rel\": 2e-2, // same\n \"fitness\": { \"max_blur\": 3e-1 } }", 1, 1);
    fingerprint("{}", "{ \"targets\": { \"spacing_nm\": { \"max\": 300 } } }", 1, 0);
    fingerprint("{}", "{ \"optics\": { \"coatings\": [ { \"material\": 2, \"thickness_nm\": 3 } ] } }", 1, 0);
    explains();
    shapes();
    options();
    CHECK_FAILS(protocol_read("no/such/protocol.json", &p, &e), ST_BAD_INPUT, e, "no/such/protocol.json");
    judging();
    return check_done();
}

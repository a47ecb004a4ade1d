/* Materials by name, path and number; measured profiles; the set-up of a protocol. */
#include "app/materials.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "base/mem.h"
#include "check.h"
#include "io/file.h"

static char folder[200];

/* A file in the test's own folder; its path. */
static const char *file(const char *name, const char *text) {
    static char path[300];
    error e = { ST_OK, "" };
    snprintf(path, sizeof path, "%s/%s", folder, name);
    CHECK(file_write(path, text, strlen(text), &e) == ST_OK);
    return path;
}

static void index_of(const char *name, double nm, double n, double k) {
    material m = { 0 };
    error e = { ST_OK, "" };
    double got_n = 0, got_k = 0;
    CHECK(material_load(name, &m, &e) == ST_OK && material_at(&m, nm, &got_n, &got_k, &e) == ST_OK);
    if (e.text[0]) printf("%s\n", e.text);
    CHECK_NEAR(got_n, n, 1e-12);
    CHECK_NEAR(got_k, k, 1e-12);
    material_free(&m);
}

static void loads_materials(void) {
    material m = { 0 };
    error e = { ST_OK, "" };
    index_of("air", 555, 1, 0);
    index_of("2", 555, 2, 0);
    index_of("2.09+0.01i", 555, 2.09, 0.01);
    index_of("1.5e0+1e-3i", 555, 1.5, 0.001);
    index_of("silicon", 300, 4.976, 4.234); /* M. A. Green (2008), as tabled */
    index_of("silicon", 250, 1.665, 3.665);
    index_of(file("own.csv", "# source: own film\nwavelength_nm,n,k\n300,2.1,0.1\n400,2.3,0.3\n"), 350, 2.2,
             0.2);
    index_of(file("lossless.csv", "wavelength_nm,n\n300,2.1\n400,2.3\n"), 350, 2.2, 0);
    CHECK_FAILS(material_load("silicn", &m, &e), ST_BAD_INPUT, e,
                "unknown material 'silicn', did you mean 'silicon'?");
    CHECK(strstr(e.text, "alumina") && strstr(e.text, "nitride") && !strstr(e.text, "am15g"));
    CHECK_FAILS(material_load("am15g", &m, &e), ST_BAD_INPUT, e, "unknown material");
    CHECK_FAILS(material_load("-2", &m, &e), ST_BAD_INPUT, e, "-2");
    CHECK_FAILS(material_load("2+i", &m, &e), ST_BAD_INPUT, e, "unknown material");
    CHECK_FAILS(material_load("nowhere/film.csv", &m, &e), ST_BAD_INPUT, e, "nowhere/film.csv");
    CHECK_FAILS(material_load(file("bad.csv", "wavelength_nm,n,k\n300,2.1,0.1\n400,x,0.3\n"), &m, &e),
                ST_BAD_INPUT, e, "line 3");
    CHECK_FAILS(material_load(file("down.csv", "wavelength_nm,n,k\n400,2.1,0.1\n300,2,0.3\n"), &m, &e),
                ST_BAD_INPUT, e, "down.csv");
    CHECK_FAILS(material_load(file("nok.csv", "wavelength_nm,k\n400,2.1\n"), &m, &e), ST_BAD_INPUT, e,
                "nok.csv");
}

static void lists_materials(void) {
    textbuf t = { 0 };
    error e = { ST_OK, "" };
    CHECK(materials_list(&t, &e) == ST_OK);
    CHECK(t.s && strstr(t.s, "silicon ") && strstr(t.s, "Green") && strstr(t.s, "nitride") &&
          strstr(t.s, "air"));
    text_free(&t);
    char *found = NULL;
    setenv("SWARD_MATERIALS", "no/such/folder", 1);
    CHECK_FAILS(materials_folder(&found, &e), ST_IO, e, "SWARD_MATERIALS names 'no/such/folder'");
    CHECK(found == NULL);
    setenv("SWARD_MATERIALS", SWARD_MATERIALS, 1);
}

static void reads_profiles(void) {
    profile p = { 0 };
    error e = { ST_OK, "" };
    CHECK(profile_read(file("p.csv", "depth_nm,solid_fraction\n5,0\n105,0.4\n105,0.7\n305,1\n"), &p, &e) ==
          ST_OK);
    CHECK(p.n == 4 && p.n_coatings == 0);
    if (p.n == 4) {
        CHECK_NEAR(p.depth_nm[0], 0, 0);
        CHECK_NEAR(p.depth_nm[3], 300, 0);
        CHECK_NEAR(p.solid[2], 0.7, 0);
    }
    profile_free(&p);
    CHECK_FAILS(profile_read(file("p.csv", "depth_nm,solid_fraction\n0,0\n9,1.2\n"), &p, &e), ST_BAD_INPUT, e,
                "line 3, solid_fraction: found 1.2, expected a share from 0 to 1");
    CHECK_FAILS(profile_read(file("p.csv", "depth_nm,solid_fraction\n9,0\n3,1\n"), &p, &e), ST_BAD_INPUT, e,
                "line 3, depth_nm: found 3 after 9");
    CHECK_FAILS(profile_read(file("p.csv", "depth_nm,solid_fraction\n9,0\n"), &p, &e), ST_BAD_INPUT, e,
                "at least two");
    CHECK_FAILS(profile_read(file("p.csv", "depth,solid_fraction\n9,0\n"), &p, &e), ST_BAD_INPUT, e,
                "depth_nm");
    CHECK_FAILS(profile_read("nowhere/p.csv", &p, &e), ST_BAD_INPUT, e, "nowhere/p.csv");
}

static void makes_setups(void) {
    protocol p = { 0 };
    setup s = { 0 };
    error e = { ST_OK, "" };
    textbuf one = { 0 }, two = { 0 };
    CHECK(protocol_defaults(&p, &e) == ST_OK && setup_make(&p, &s, &e) == ST_OK);
    if (e.text[0]) printf("%s\n", e.text);
    CHECK(s.optics.substrate == &s.substrate && s.optics.front.glass == NULL && s.optics.n_coatings == 0 &&
          s.measured.n == 0);
    CHECK_NEAR(s.optics.band_hi_nm, 1200, 0);
    setup_text(&s, &one);
    setup_free(&s);
    CHECK(protocol_set(&p, "optics", "ambient", "laminate", "--ambient", &e) == ST_OK);
    CHECK(protocol_set(&p, "optics", "coatings", "alumina:10", "--coating", &e) == ST_OK);
    CHECK(protocol_set(&p, "optics", "angle_deg", "8", "--angle", &e) == ST_OK);
    CHECK(setup_make(&p, &s, &e) == ST_OK);
    CHECK(s.optics.front.glass == &s.glass && s.optics.front.encapsulant == &s.encapsulant &&
          s.optics.n_coatings == 1);
    CHECK_NEAR(s.optics.front.glass_mm, 3.2, 0);
    CHECK_NEAR(s.optics.coatings[0].thickness_nm, 10, 0);
    CHECK_NEAR(s.optics.reflect.angle_deg, 8, 0);
    setup_text(&s, &two);
    CHECK(one.s && two.s && strcmp(one.s, two.s) != 0);
    setup_free(&s);
    setup_free(&s);
    CHECK(protocol_set(&p, "link", "profile", "depth.csv", "--profile", &e) == ST_OK);
    CHECK_FAILS(setup_make(&p, &s, &e), ST_BAD_INPUT, e, "take the coatings out");
    free(p.profile);
    p.profile = NULL;
    e = (error){ ST_OK, "" };
    CHECK(protocol_set(&p, "optics", "band_nm", "200:1200", "--band", &e) == ST_OK);
    CHECK_FAILS(setup_make(&p, &s, &e), ST_BAD_INPUT, e, "200");
    CHECK(s.substrate.n == 0);
    text_free(&one);
    text_free(&two);
    protocol_free(&p);
}

/* Every allocation fails once: a status, a sentence, nothing left behind (the sanitizer looks). */
static void survives_no_memory(void) {
    status st = ST_NO_MEMORY;
    protocol p = { 0 };
    error e = { ST_OK, "" };
    CHECK(protocol_defaults(&p, &e) == ST_OK);
    setup absorbing = { 0 };
    CHECK(protocol_set(&p, "optics", "ambient", "2.1+0.1i", "--ambient", &e) == ST_OK);
    CHECK_FAILS(setup_make(&p, &absorbing, &e), ST_BAD_INPUT, e, "light cannot come from far away in it");
    CHECK(protocol_set(&p, "optics", "ambient", "2.1", "--ambient", &e) == ST_OK);
    CHECK(protocol_set(&p, "link", "profile", file("p.csv", "depth_nm,solid_fraction\n0,0\n9,1\n"),
                       "--profile", &e) == ST_OK);
    for (size_t n = 1; n < 40000 && st != ST_OK; n += n < 40 ? 1 : 97) {
        setup s = { 0 };
        e = (error){ ST_OK, "" };
        mem_fail_after(n);
        st = setup_make(&p, &s, &e);
        mem_fail_after(0);
        CHECK(st == ST_OK || (st == ST_NO_MEMORY && e.text[0]));
        setup_free(&s);
    }
    CHECK(st == ST_OK);
    protocol_free(&p);
}

int main(void) {
    const char *tmp = getenv("TMPDIR");
    snprintf(folder, sizeof folder, "%s/sward-materials-XXXXXX", tmp ? tmp : "/tmp");
    CHECK(mkdtemp(folder) != NULL);
    setenv("SWARD_MATERIALS", SWARD_MATERIALS, 1);
    loads_materials();
    lists_materials();
    reads_profiles();
    makes_setups();
    survives_no_memory();
    static const char *const made[] = {
        "own.csv", "lossless.csv", "bad.csv", "down.csv", "nok.csv", "p.csv"
    };
    for (size_t i = 0; i < sizeof made / sizeof made[0]; i++) {
        char path[300];
        snprintf(path, sizeof path, "%s/%s", folder, made[i]);
        unlink(path);
    }
    CHECK(rmdir(folder) == 0);
    return check_done();
}

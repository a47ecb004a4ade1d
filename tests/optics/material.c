/* Optical constants: interpolation, ends, each refusal, every table of the folder. */
#include "optics/material.h"

#include "base/mem.h"
#include "check.h"
#include "optics_data.h"

static void reading(void) {
    static const double w[] = { 400.5, 500, 613 }, n[] = { 5, 4, 3.9 }, k[] = { 0.3, 0.05, 0 };
    material m = { 0 }, copy = { 0 };
    error e = { 0 };
    double a, b;
    CHECK(material_make(&m, "test film", "made up", 3, w, n, k, &e) == ST_OK);
    CHECK(material_at(&m, 400.5, &a, &b, &e) == ST_OK);
    CHECK_NEAR(a, 5, 0);
    CHECK_NEAR(b, 0.3, 0);
    CHECK(material_at(&m, 613, &a, &b, &e) == ST_OK);
    CHECK_NEAR(a, 3.9, 0);
    CHECK_NEAR(b, 0, 0);
    CHECK(material_at(&m, 450.25, &a, &b, &e) == ST_OK);
    CHECK_NEAR(a, 4.5, 1e-14);
    CHECK_NEAR(b, 0.175, 1e-14);
    CHECK_FAILS(material_at(&m, 400.4, &a, &b, &e), ST_BAD_INPUT, e,
                "test film is tabled from 400.5 to 613 nm, 400.4 nm was asked for; choose a band inside");
    CHECK_FAILS(material_at(&m, 613.1, &a, &b, &e), ST_BAD_INPUT, e, "613.1 nm was asked for");
    CHECK_FAILS(material_at(&m, (double)NAN, &a, &b, &e), ST_BAD_INPUT, e, "asked for");
    e = (error){ 0 };
    CHECK(material_copy(&copy, &m, &e) == ST_OK && copy.n == 3 && !strcmp(copy.name, "test film"));
    CHECK(copy.index_n != m.index_n && !strcmp(copy.source, "made up"));
    material_free(&m);
    CHECK(!m.n && !m.name);
    CHECK(material_copy(&m, &(material){ 0 }, &e) == ST_OK && !m.n);
    CHECK_FAILS(material_at(&m, 500, &a, &b, &e), ST_BAD_INPUT, e, "no optical constants");
    material_free(&copy);
    material_free(&m); /* {0} is fine */
}

static void constants(void) {
    material m = { 0 };
    error e = { 0 };
    double a, b;
    CHECK(material_constant(&m, 2, 0, &e) == ST_OK && !strcmp(m.name, "n=2"));
    CHECK(material_at(&m, 123456, &a, &b, &e) == ST_OK);
    CHECK_NEAR(a, 2, 0);
    material_free(&m);
    CHECK(material_constant(&m, 3.882, 0.019, &e) == ST_OK && !strcmp(m.name, "n=3.882,k=0.019"));
    material_free(&m);
    CHECK_FAILS(material_constant(&m, 0, 0, &e), ST_BAD_INPUT, e, "n at");
    CHECK_FAILS(material_constant(&m, 1.5, -0.1, &e), ST_BAD_INPUT, e, "k at");
}

static void refusals(void) {
    static const double w[] = { 400, 500 }, back[] = { 500, 400 }, zero[] = { 0, 500 }, one[] = { 1, 1 };
    double odd[] = { 1, (double)NAN }, negative[] = { 1, -1 };
    material m = { 0 };
    error e = { 0 };
    CHECK_FAILS(material_make(&m, "x", "", 0, w, one, one, &e), ST_BAD_INPUT, e, "empty");
    CHECK_FAILS(material_make(&m, "x", "", 2, back, one, one, &e), ST_BAD_INPUT, e,
                "x: wavelengths have to ascend, but 400 nm follows 500 nm");
    CHECK_FAILS(material_make(&m, "x", "", 2, zero, one, one, &e), ST_BAD_INPUT, e, "wavelength 1");
    CHECK_FAILS(material_make(&m, "x", "", 2, w, negative, one, &e), ST_BAD_INPUT, e, "n at 500 nm");
    CHECK_FAILS(material_make(&m, "x", "", 2, w, odd, one, &e), ST_BAD_INPUT, e, "n at 500 nm");
    CHECK_FAILS(material_make(&m, "x", "", 2, w, one, negative, &e), ST_BAD_INPUT, e, "k at 500 nm");
    CHECK_FAILS(material_make(&m, "x", "", 2, w, one, odd, &e), ST_BAD_INPUT, e, "k at 500 nm");
    for (size_t i = 1; i <= 5; i++) {
        mem_fail_after(i);
        CHECK_FAILS(material_make(&m, "x", "", 2, w, one, one, &e), ST_NO_MEMORY, e, "memory");
        CHECK(!m.name && !m.n);
    }
    mem_fail_after(0);
}

/* Every table of the folder, at 633 nm (figures of the sources' tables, linear in wavelength). */
static void tables(void) {
    static const struct {
        const char *name;
        double n;
    } rows[] = { { "silicon", 3.8736 },
                 { "silicon-schinke-2015", 3.8636 },
                 { "silicon-aspnes-1983", 3.8823 },
                 { "nitride-n1", 1.9047 },
                 { "nitride", 2.0884 },
                 { "nitride-n3", 2.1324 },
                 { "nitride-stoichiometric", 2.0105 },
                 { "oxide", 1.4570 },
                 { "alumina", 1.6773 },
                 { "titania", 2.3893 },
                 { "glass", 1.5120 },
                 { "encapsulant", 1.4897 } };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        material m = data_material(rows[i].name);
        error e = { 0 };
        double n = 0, k = 0;
        CHECK(material_at(&m, 633, &n, &k, &e) == ST_OK);
        CHECK_SOURCE(n, rows[i].n, 5.1e-5, rows[i].name);
        CHECK(m.wavelength_nm[0] <= 300); /* the band of the weighted reflectance begins here */
        CHECK(m.wavelength_nm[m.n - 1] >= (strcmp(rows[i].name, "silicon-aspnes-1983") ? 1200 : 826));
        material_free(&m);
    }
}

int main(void) {
    reading();
    constants();
    refusals();
    tables();
    return check_done();
}

/* Link files: what is written is read, wounds are named, ages count to the etch. */
#include <stdio.h>
#include <stdlib.h>
#include <unistd.h>

#include "app/linkfile.h"
#include "base/mem.h"
#include "check.h"
#include "io/file.h"

static char folder[] = "/tmp/sward-link-XXXXXX";

static calibration made(void) {
    return (calibration){ .n_samples = 3, .spacing_lo_nm = 281.25, .spacing_hi_nm = 391.7, .spacing_u_nm = 6.1,
                          .height_lo_nm = 300.2, .height_hi_nm = 430.9, .aspect = 1.0 / 3.0 + 0.8, .aspect_u = 0.011,
                          .aspect_scatter = 0.0625, .exponent = 1.375, .exponent_u = 0.03, .height_spread = 0.08,
                          .coverage = 0.93, .offset = -0.0021, .residual_rms = 0.0007, .left_out = 0.0012,
                          .left_out_spectral = MISSING, .band_lo_nm = 310.0, .band_hi_nm = 990.0, .pores = 1,
                          .level_at_tips = 1, .mixing = MIX_MAXWELL_GARNETT_2D };
}

static void write_and_read(const char *path) {
    static const char *const names[] = { "W1", "W \"2\"", "W3" };
    protocol p = { 0 };
    linkfile l = { 0 };
    error e = { 0 };
    fit_sample samples[3];
    fit_curve curves[3];
    fit_number numbers[1] = { { FIT_HEIGHT, 1, 320.0, 2.0, 0 } };
    double covariance[1] = { 4.0 };
    fit_result r = { .n_samples = 3, .n_numbers = 1, .curves = curves, .numbers = numbers, .covariance = covariance,
                     .noise = 0.001, .reduced = 1.1, .link_made = made() };
    for (size_t i = 0; i < 3; i++) {
        samples[i] = (fit_sample){ .name = names[i], .spacing_nm = { 300.0, 3.0, 1 } };
        curves[i] = (fit_curve){ .height_nm = { 320.0, (double)INFINITY, 1 }, .aspect = MISSING, .left_out = MISSING };
    }
    CHECK(protocol_defaults(&p, &e) == ST_OK);
    CHECK(linkfile_write(path, samples, &r, &p, "2026-03-12T10:00:00Z", &e) == ST_OK);
    CHECK(linkfile_read(path, &l, &e) == ST_OK);
    if (e.text[0]) printf("%s\n", e.text);
    calibration want = made(), got = l.link;
    CHECK(got.n_samples == 3 && got.pores == 1 && got.level_at_tips == 1 && got.mixing == MIX_MAXWELL_GARNETT_2D);
    CHECK_NEAR(got.aspect, want.aspect, 0.0); /* every bit */
    CHECK_NEAR(got.offset, want.offset, 0.0);
    CHECK_NEAR(got.spacing_hi_nm, want.spacing_hi_nm, 0.0);
    CHECK_NEAR(got.left_out, want.left_out, 0.0);
    CHECK(isnan(got.left_out_spectral) && !strcmp(l.made_at, "2026-03-12T10:00:00Z"));
    CHECK(!strcmp(l.substrate, p.substrate) && !strcmp(l.ambient, p.ambient));
    CHECK_FAILS(linkfile_fits(&l, &p, &e), ST_BAD_INPUT, e, "mixing rule maxwell-garnett-2d and the protocol says bruggeman");
    p.mixing = MIX_MAXWELL_GARNETT_2D;
    e = (error){ 0 };
    CHECK(linkfile_fits(&l, &p, &e) == ST_OK);
    l.substrate[0] = 'z';
    CHECK_FAILS(linkfile_fits(&l, &p, &e), ST_BAD_INPUT, e, "'zilicon' and the protocol's substrate is 'silicon'");
    linkfile none = { 0 };
    e = (error){ 0 };
    CHECK(linkfile_fits(&none, &p, &e) == ST_OK);
    textbuf a = { 0 }, b = { 0 };
    linkfile_text(&l, &a);
    l.link.exponent += 1e-12;
    linkfile_text(&l, &b);
    CHECK(a.n > 100 && strcmp(a.s, b.s) != 0);
    text_free(&a);
    linkfile_text(&none, &a);
    CHECK(a.n == 0);
    text_free(&b);
    r.link_made.n_samples = 0;
    CHECK_FAILS(linkfile_write(path, samples, &r, &p, "2026-03-12", &e), ST_NO_RESULT, e, "nothing is saved");
    linkfile_free(&l);
    linkfile_free(&l);
    protocol_free(&p);
}

/* The written file with one text replaced by another. */
static status wounded(const char *path, const char *from, const char *to, error *e) {
    char *bytes = NULL, copy[4096], other[300];
    size_t n = 0;
    linkfile l = { 0 };
    *e = (error){ 0 };
    CHECK(file_read(path, 1 << 20, &bytes, &n, e) == ST_OK);
    char *at = bytes ? strstr(bytes, from) : NULL;
    CHECK(at != NULL && n + strlen(to) < sizeof copy);
    if (!at) return ST_BUG;
    snprintf(copy, sizeof copy, "%.*s%s%s", (int)(at - bytes), bytes, to, at + strlen(from));
    snprintf(other, sizeof other, "%s/wounded.json", folder);
    CHECK(file_write(other, copy, strlen(copy), e) == ST_OK);
    status st = linkfile_read(other, &l, e);
    CHECK(st != ST_OK || l.link.n_samples);
    linkfile_free(&l);
    free(bytes);
    unlink(other);
    return st;
}

static void wounds(const char *path) {
    static const struct { const char *from, *to, *words; } cases[] = {
        { "sward link", "another", "is no link file" },
        { "\"version\": 1", "\"version\": 2", "line 3, version: expected 1; the file is from another version" },
        { "\"n_samples\": 3", "\"n_samples\": 0", "n_samples: expected a number of at least 1" },
        { "\"made_at\": \"2026-03-12T10:00:00Z\"", "\"made_at\": \"yesterday\"", "made_at: expected a date" },
        { "maxwell-garnett-2d", "half and half", "mixing: expected a mixing rule" },
        { "\"relief\": \"pore\"", "\"relief\": \"hole\"", "relief: expected" },
        { "\"substrate\": \"silicon\"", "\"substrate\": 4", "substrate: expected a text" },
        { "\"exponent\": 1.375", "\"exponent\": 99", "exponent: expected a number from 0.05 to 20" },
        { "\"exponent\": 1.375", "\"exponent\": null", "exponent: expected a number" },
        { "\"exponent\": ", "\"exponant\": ", "exponent is missing" },
        { "\"spacing_lo_nm\": 281.25", "\"spacing_lo_nm\": 500", "not in order" },
        { "\"aspect_scatter\": 0.0625", "\"aspect_scatter\": null", "aspect_scatter is missing for 3 samples" },
        { "\"relief\"", "\"relief", "" }, /* no JSON any more */
    };
    error e;
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        CHECK(wounded(path, cases[i].from, cases[i].to, &e) == ST_BAD_INPUT && strstr(e.text, cases[i].words));
        CHECK(strstr(e.text, "wounded.json") != NULL);
        if (!strstr(e.text, cases[i].words)) printf("%s\n", e.text);
    }
    CHECK(wounded(path, "\"left_out\": 0.0011999999999999999", "\"left_out\": null", &e) == ST_OK);
    linkfile l;
    CHECK_FAILS(linkfile_read("/nowhere/link.json", &l, &e), ST_BAD_INPUT, e, "there is no such file");
    status st = ST_NO_MEMORY;
    for (size_t n = 1; n < 400 && st == ST_NO_MEMORY; n++) {
        e = (error){ 0 };
        mem_fail_after(n);
        st = linkfile_read(path, &l, &e);
        mem_fail_after(0);
    }
    CHECK(st == ST_OK);
    linkfile_free(&l);
}

static void ages(void) {
    static const struct { const char *made, *etched; double days; } cases[] = {
        { "2026-03-12", "2026-03-13", 1.0 },
        { "2026-03-12T18:00:00Z", "2026-03-13T06:00:00Z", 0.5 },
        { "2024-02-28", "2024-03-01", 2.0 }, /* a leap year */
        { "2025-02-28", "2025-03-01", 1.0 },
        { "2025-12-31", "2024-12-31", -365.0 },
        { "1999-12-31", "2026-03-14", 9570.0 },
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        linkfile l = { 0 };
        snprintf(l.made_at, sizeof l.made_at, "%s", cases[i].made);
        CHECK_NEAR(linkfile_age_days(&l, cases[i].etched), cases[i].days, 1e-9);
        CHECK(isnan(linkfile_age_days(&l, "")) && isnan(linkfile_age_days(&l, NULL)));
    }
}

int main(void) {
    char path[300];
    CHECK(mkdtemp(folder) != NULL);
    snprintf(path, sizeof path, "%s/link.json", folder);
    write_and_read(path);
    wounds(path);
    ages();
    unlink(path);
    rmdir(folder);
    return check_done();
}

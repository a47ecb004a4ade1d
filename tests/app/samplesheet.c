/* The sample sheet: columns, mistakes with their lines, rows matched to files, times. */
#include "app/samplesheet.h"

#include <string.h>

#include "base/mem.h"
#include "check.h"

static status parse(const char *text, sheet *s, error *e) {
    return sheet_parse(text, strlen(text), "s.csv", s, e);
}

static void fails_with(const char *text, const char *words) {
    sheet s = { 0 };
    error e = { ST_OK, "" };
    int as_wanted = parse(text, &s, &e) == ST_BAD_INPUT && strstr(e.text, words) != NULL;
    CHECK(as_wanted);
    if (!as_wanted) printf("  got: %s\n", e.text);
    CHECK(s.rows == NULL);
    sheet_free(&s);
}

static void reads_columns(void) {
    sheet s = { 0 };
    error e = { ST_OK, "" };
    CHECK(parse("file,sample,lot,wafer,position,x_mm,y_mm,etched_at,px_nm,bar_nm,height_nm,height_nm_u,power_"
                "W,note\n"
                "./a.png,S1,L1,7,centre,-12.5,3,2026-03-14 09:30,4.1,500,351,31,750,\"free, text\"\n"
                "sub\\b.png,S1,,,,,,,,,,,,\n",
                &s, &e) == ST_OK);
    if (e.text[0]) printf("%s\n", e.text);
    CHECK(s.n == 2 && s.n_extra == 2 && strcmp(s.extra_names[0], "power_W") == 0);
    if (s.n == 2) {
        const sheet_row *r = &s.rows[0];
        CHECK(r->line == 2 && strcmp(r->file, "a.png") == 0 && strcmp(r->lot, "L1") == 0 &&
              strcmp(r->wafer, "7") == 0);
        CHECK(strcmp(r->position, "centre") == 0 && strcmp(r->etched_at, "2026-03-14T09:30:00") == 0);
        CHECK(strcmp(r->extra[1], "free, text") == 0);
        CHECK_NEAR(r->x_mm, -12.5, 0);
        CHECK_NEAR(r->y_mm, 3, 0);
        CHECK_NEAR(r->px_nm, 4.1, 0);
        CHECK_NEAR(r->bar_nm, 500, 0);
        CHECK_NEAR(r->height_nm, 351, 0);
        CHECK_NEAR(r->height_nm_u, 31, 0);
        r = &s.rows[1];
        CHECK(strcmp(r->file, "sub/b.png") == 0 && isnan(r->px_nm) && isnan(r->height_nm) &&
              r->etched_at[0] == '\0');
    }
    sheet_free(&s);
    sheet_free(&s);
}

static void names_each_mistake(void) {
    fails_with("name,sample\na.png,S1\n", "s.csv: no column 'file'");
    fails_with("file,px_nm\na.png,4\nb.png,0\n",
               "s.csv line 3, px_nm: found '0', expected a number above 0; correct the sample");
    fails_with("file,px_nm\na.png,4 nm\n", "s.csv line 2, px_nm: found '4 nm'");
    fails_with("file,height_nm\na.png,-3\n",
               "s.csv line 2, height_nm: found '-3', expected a number above 0");
    fails_with("file,height_nm,height_nm_u\na.png,300,-1\n",
               "height_nm_u: found '-1', expected a number of at least 0");
    fails_with("file,height_nm,height_nm_u\na.png,,10\n", "height_nm_u stands without height_nm");
    fails_with("file,x_mm\na.png,left\n", "x_mm: found 'left', expected a number");
    fails_with("file,sample\n,S1\n", "s.csv line 2, file: the cell is empty");
    fails_with("file,etched_at\na.png,14.3.2026\n",
               "s.csv line 2, etched_at: found '14.3.2026', expected a time like");
    fails_with("file,sample\na.png,S1\nb.png,S1\n./a.png,S2\n", "s.csv lines 2 and 4 both describe 'a.png'");
    fails_with("file,sample,height_nm\na.png,S1,300\nb.png,S2,310\nc.png,S1,\nd.png,S1,301\n",
               "s.csv lines 2 and 5 give the sample 'S1' two heights (300 and 301 nm)");
    sheet s = { 0 };
    error e = { ST_OK, "" };
    CHECK_FAILS(sheet_read("no/such/sheet.csv", &s, &e), ST_BAD_INPUT, e, "no/such/sheet.csv");
}

static void matches_files(void) {
    static const char *const files[] = { "x/b.png", "a.png", "x/a.png", "y/c.png", "z/c.png", "x/d.png" };
    enum { N = sizeof files / sizeof files[0] };
    sheet s = { 0 };
    textbuf warnings = { 0 };
    error e = { ST_OK, "" };
    CHECK(parse("file,height_nm\nb.png,300\na.png,310\ny/c.png,320\ngone.png,1\n", &s, &e) == ST_OK);
    CHECK(sheet_row_of(&s, 0) == NULL);
    CHECK(sheet_match(&s, files, N, &warnings, &e) == ST_OK);
    CHECK(sheet_row_of(&s, 0) == &s.rows[0] && sheet_row_of(&s, 1) == &s.rows[1] &&
          sheet_row_of(&s, 2) == NULL);
    CHECK(sheet_row_of(&s, 3) == &s.rows[2] && sheet_row_of(&s, 4) == NULL && sheet_row_of(&s, 99) == NULL);
    CHECK(warnings.s && strcmp(warnings.s, "s.csv line 5: there is no file 'gone.png' in the folder\n") == 0);
    static const char *const one_sample[] = { "S", "S", "S", "T", "T", "T" }, *const own[] = {
        "A", "B", "C", "D", "E", "F"
    };
    const sheet_row *rows[N];
    for (size_t i = 0; i < N; i++) rows[i] = sheet_row_of(&s, i);
    CHECK_FAILS(sheet_check_samples(&s, rows, one_sample, N, &e), ST_BAD_INPUT, e,
                "lines 2 and 3 give the sample 'S' two heights");
    e = (error){ ST_OK, "" };
    CHECK(sheet_check_samples(&s, rows, own, N, &e) == ST_OK);
    sheet_free(&s);
    text_free(&warnings);
    CHECK(parse("file\nb.png\nc.png\n", &s, &e) == ST_OK);
    CHECK_FAILS(sheet_match(&s, files, N, &warnings, &e), ST_BAD_INPUT, e,
                "s.csv line 3, file: 'c.png' fits 'y/c.png' and 'z/c.png'");
    sheet_free(&s);
    e = (error){ ST_OK, "" };
    CHECK(parse("file\nb.png\nx/b.png\n", &s, &e) == ST_OK);
    CHECK_FAILS(sheet_match(&s, files, N, &warnings, &e), ST_BAD_INPUT, e,
                "lines 2 and 3 both describe 'x/b.png'");
    sheet_free(&s);
    sheet none = { 0 };
    e = (error){ ST_OK, "" };
    CHECK(sheet_match(&none, files, N, &warnings, &e) == ST_OK && sheet_row_of(&none, 1) == NULL);
    sheet_free(&none);
    text_free(&warnings);
}

static void reads_times(void) {
    static const struct {
        const char *text, *want;
    } good[] = { { "2026-03-14", "2026-03-14" },
                 { "2026-03-14T09:30:05Z", "2026-03-14T09:30:05Z" },
                 { "2026-03-14T09:30:05.25Z", "2026-03-14T09:30:05Z" },
                 { "2026-03-14 09:30", "2026-03-14T09:30:00" },
                 { "2026-01-01T00:30:00+01:00", "2025-12-31T23:30:00Z" },
                 { "2024-02-28T23:30-0100", "2024-02-29T00:30:00Z" },
                 { "2026-12-31T23:59:59-05", "2027-01-01T04:59:59Z" } };
    static const char *const bad[] = { "",
                                       "2026",
                                       "14.3.2026",
                                       "2026-13-01",
                                       "2026-02-29",
                                       "2026-03-14T",
                                       "2026-03-14T9:30",
                                       "2026-03-14T24:00",
                                       "2026-03-14T09:30:61",
                                       "2026-03-14T09:30X",
                                       "2026-03-14T09:30+1",
                                       "2026-03-14T09:30:05.",
                                       "2026-03-14T09:30+01:0",
                                       "2026-03-14T09:30+15:00",
                                       "26-03-14" };
    char out[32];
    for (size_t i = 0; i < sizeof good / sizeof good[0]; i++)
        CHECK(iso_time(good[i].text, out) == 1 && strcmp(out, good[i].want) == 0);
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++) CHECK(iso_time(bad[i], out) == 0);
}

/* Every allocation fails once: a status, a sentence, nothing left behind (the sanitizer looks). */
static void survives_no_memory(void) {
    static const char *const files[] = { "x/b.png", "a.png" };
    status st = ST_NO_MEMORY;
    for (size_t n = 1; n < 500 && st != ST_OK; n++) {
        sheet s = { 0 };
        textbuf warnings = { 0 };
        error e = { ST_OK, "" };
        mem_fail_after(n);
        st = parse("file,sample,height_nm,power\na.png,S1,300,7\nb.png,S1,,8\n", &s, &e);
        if (st == ST_OK) st = sheet_match(&s, files, 2, &warnings, &e);
        mem_fail_after(0);
        CHECK(st == ST_OK || (st == ST_NO_MEMORY && e.text[0]));
        text_free(&warnings);
        sheet_free(&s);
    }
    CHECK(st == ST_OK);
}

int main(void) {
    survives_no_memory();
    reads_columns();
    names_each_mistake();
    matches_files();
    reads_times();
    return check_done();
}

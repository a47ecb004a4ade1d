/* CSV as people and spreadsheets write it, and each mistake with its line. */
#include "io/table.h"

#include <stdlib.h>

#include "base/limits.h"
#include "base/text.h"
#include "check.h"
#include "scratch.h"

static status parse(const char *s, csv *c, error *e) { return csv_parse(s, strlen(s), "sheet.csv", c, e); }

static void forms(void) {
    csv c = { 0 };
    error e = { 0 };
    CHECK(parse("\xef\xbb\xbf# made by hand\r\nfile, sample ,px_nm\r\n\r\na.png,\"x, \"\"y\"\"\",5.5\r\n  "
                "\r\n#two\nb.png\r\n"
                "\"c\nd\",,7,,\nlast,1,2",
                &c, &e) == ST_OK);
    CHECK(c.n_columns == 3 && c.n_rows == 4 && c.separator == ',' && c.n_comments == 2);
    CHECK(!strcmp(c.names[1], "sample") && !strcmp(c.comments[0], "made by hand") &&
          !strcmp(c.comments[1], "two"));
    CHECK(!strcmp(csv_cell(&c, 0, 1), "x, \"y\"") && !strcmp(csv_cell(&c, 1, 2), "") &&
          !strcmp(csv_cell(&c, 2, 0), "c\nd"));
    CHECK(!strcmp(csv_cell(&c, 3, 2), "2") && !strcmp(csv_cell(&c, 0, -1), ""));
    CHECK(c.lines[0] == 4 && c.lines[1] == 7 && c.lines[2] == 8 && c.lines[3] == 10);
    CHECK(csv_column(&c, "px_nm") == 2 && csv_column(&c, "PX_NM") == -1);
    csv_free(&c);
    csv_free(&c);
    CHECK(parse("a;b,c;d\n1,5;2;3\n", &c, &e) == ST_OK && c.separator == ';' && c.n_columns == 3);
    CHECK(!strcmp(csv_cell(&c, 0, 0), "1,5"));
    csv_free(&c);
    CHECK(parse("a\tb\n\t2\n", &c, &e) == ST_OK && c.separator == '\t' && !strcmp(csv_cell(&c, 0, 0), "") &&
          !strcmp(csv_cell(&c, 0, 1), "2"));
    csv_free(&c);
    CHECK(parse("a,b\r1,2\r3,4\r", &c, &e) == ST_OK && c.n_rows == 2 && c.lines[1] == 3);
    csv_free(&c);
    CHECK(parse("only\n", &c, &e) == ST_OK && c.n_rows == 0);
    csv_free(&c);
}

static void mistakes(void) {
    csv c = { 0 };
    error e = { 0 };
    CHECK_FAILS(parse("", &c, &e), ST_BAD_INPUT, e, "empty");
    CHECK_FAILS(parse("# x\n\n  \n", &c, &e), ST_BAD_INPUT, e, "empty");
    CHECK_FAILS(parse(",,\n1,2\n", &c, &e), ST_BAD_INPUT, e, "line 1: no header");
    CHECK_FAILS(parse("a,,b\n", &c, &e), ST_BAD_INPUT, e, "column 2 has no name");
    CHECK_FAILS(parse("\na,b,a\n", &c, &e), ST_BAD_INPUT, e, "sheet.csv line 2: column 'a' stands twice");
    CHECK_FAILS(parse("a,b\n1,2\n1,2,3\n", &c, &e), ST_BAD_INPUT, e, "line 3: more cells");
    CHECK_FAILS(parse("a,b\n1,\"2\n3\n", &c, &e), ST_BAD_INPUT, e, "line 2: a quote");
    CHECK_FAILS(csv_parse("a\n1\0", 4, "sheet.csv", &c, &e), ST_BAD_INPUT, e, "line 2: a zero byte");
    textbuf t = { 0 };
    for (size_t i = 0; i <= LIMIT_CSV_COLUMNS; i++) text_addf(&t, "%sc%zu", i ? "," : "", i);
    CHECK_FAILS(parse(t.s, &c, &e), ST_BAD_INPUT, e, "more than 256 columns");
    text_free(&t);
    CHECK(!c.text && !c.cells);
}

static void numbers(void) {
    csv c = { 0 };
    error e = { 0 };
    double v[2];
    CHECK(parse("nm,R\n400, 0.01 \n410,1e-3\n", &c, &e) == ST_OK &&
          csv_numbers(&c, "R", "r.csv", v, &e) == ST_OK);
    CHECK_NEAR(v[0], 0.01, 0.0);
    CHECK_NEAR(v[1], 1e-3, 0.0);
    CHECK_FAILS(csv_numbers(&c, "T", "r.csv", v, &e), ST_BAD_INPUT, e, "no column 'T'");
    csv_free(&c);
    CHECK(parse("nm,R\n400,0.01\n410,n/a\n", &c, &e) == ST_OK);
    CHECK_FAILS(csv_numbers(&c, "R", "r.csv", v, &e), ST_BAD_INPUT, e, "r.csv line 3, R: found 'n/a'");
    csv_free(&c);
    scratch_make();
    scratch_put("t.csv", "a\n1\n", 4);
    CHECK(csv_read(scratch("t.csv"), &c, &e) == ST_OK && c.n_rows == 1);
    csv_free(&c);
    CHECK_FAILS(csv_read(scratch("none.csv"), &c, &e), ST_IO, e, "none.csv: cannot be opened");
    scratch_remove(scratch_root);
}

int main(void) {
    forms();
    mistakes();
    numbers();
    return check_done();
}

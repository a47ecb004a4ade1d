/* One table, two writers: the same digits, quoting, formulas defused in CSV only. */
#include "io/column.h"

#include "base/number.h"
#include "check.h"
#include "io/json.h"

typedef struct {
    const char *file;
    double spacing_nm;
    long n;
} row;

static const column columns[] = {
    COL(row, file, COL_TEXT, "", 0, "name"),
    COL(row, spacing_nm, COL_NUMBER, "nm", 5, "spacing"),
    COL(row, n, COL_COUNT, "", 0, "features"),
};
static const char *const extra_names[] = { "operator, shift" };

static const char *extra(const void *r, size_t k) {
    return k == 0 && ((const row *)r)->n > 0 ? "=SUM(A1)" : NULL;
}

int main(void) {
    const row rows[] = {
        { "a \"b\",\nc", 312.345678, 7 },
        { "=cmd()", (double)NAN, -1 },
        { "-3.5", -0.00012345678, 0 },
        { "@x", 1e22, 1 },
        { "bad \xff utf \xc3\xa9", 5.0, 2 },
        { NULL, 0.0, 3 },
        { "-dash", 1.0, -1 },
    };
    table_view t = { columns, 3, rows, sizeof rows / sizeof rows[0], sizeof rows[0], extra_names, 1, extra };
    textbuf out = { 0 };
    table_to_csv(&t, &out);
    CHECK(!strcmp(out.s, "file,spacing_nm,n,\"operator, shift\"\n"
                         "\"a \"\"b\"\",\nc\",312.35,7,'=SUM(A1)\n"
                         "'=cmd(),,,\n"
                         "-3.5,-0.00012346,0,\n"
                         "'@x,1e+22,1,'=SUM(A1)\n"
                         "bad \xef\xbf\xbd utf \xc3\xa9,5,2,'=SUM(A1)\n"
                         ",0,3,'=SUM(A1)\n"
                         "'-dash,1,,\n"));
    text_free(&out);
    table_row_to_json(&t, 0, &out);
    CHECK(!strcmp(out.s, "{\"file\": \"a \\\"b\\\",\\nc\", \"spacing_nm\": 312.35, \"n\": 7, \"operator, "
                         "shift\": \"=SUM(A1)\"}"));
    text_free(&out);
    table_row_to_json(&t, 1, &out);
    CHECK(!strcmp(out.s,
                  "{\"file\": \"=cmd()\", \"spacing_nm\": null, \"n\": null, \"operator, shift\": null}"));
    text_free(&out);
    table_to_json(&t, 2, &out);
    error e = { 0 };
    json j = { 0 };
    textbuf whole = { 0 };
    text_addf(&whole, "{\"rows\": %s}", out.s);
    CHECK(json_parse(whole.s, whole.n, "out", &j, &e) == ST_OK && j.n_keys == 1 + 4 * t.n_rows);
    json_free(&j);
    text_free(&whole);
    text_free(&out);
    t.n_rows = 0;
    table_to_json(&t, 2, &out);
    CHECK(!strcmp(out.s, "[]"));
    text_free(&out);
    char cell[NUMBER_TEXT];
    CHECK(!strcmp(column_cell(&columns[1], &rows[0], cell), "312.35") &&
          !strcmp(column_cell(&columns[2], &rows[1], cell), ""));
    return check_done();
}

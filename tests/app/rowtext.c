/* Members of stored rows: kinds, escapes, numbers in texts, what is no flat object. */
#include "app/rowtext.h"

#include <stdlib.h>

#include "check.h"

static int count(const char *text) {
    const char *at = text;
    row_member m;
    int n = 0, more;
    while ((more = row_next(&at, &m)) == 1) n++;
    return more < 0 ? -1 : n;
}

int main(void) {
    static const char row[] = "{ \"sample\": \"W\\u0031 \\\"a\\\"\", \"spacing_nm\":351.25 , \"etch_s\": \"180\", \"none\": null,"
                              "\"on\": true, \"dr\\\"oll\": -2.5e-3, \"empty\": \"\" }\n";
    const char *at = row;
    row_member m;
    CHECK(row_next(&at, &m) == 1 && row_named(&m, "sample") && !row_named(&m, "sampl") && m.kind == MEMBER_TEXT);
    CHECK(row_named_like(&m, "Sample") && !row_named_like(&m, "Samples") && !row_named_like(&m, "Sampl"));
    char *text = row_text(&m);
    CHECK(text && !strcmp(text, "W1 \"a\""));
    CHECK(isnan(row_number(&m)));
    free(text);
    CHECK(row_next(&at, &m) == 1 && m.kind == MEMBER_NUMBER && fabs(row_number(&m) - 351.25) < 1e-12);
    text = row_text(&m);
    CHECK(text && !strcmp(text, "351.25"));
    free(text);
    CHECK(row_next(&at, &m) == 1 && m.kind == MEMBER_TEXT && fabs(row_number(&m) - 180.0) < 1e-12);
    CHECK(row_next(&at, &m) == 1 && m.kind == MEMBER_OTHER && isnan(row_number(&m)));
    CHECK(row_next(&at, &m) == 1 && m.kind == MEMBER_OTHER);
    CHECK(row_next(&at, &m) == 1 && row_named(&m, "dr\"oll") && fabs(row_number(&m) + 2.5e-3) < 1e-15);
    CHECK(row_next(&at, &m) == 1 && isnan(row_number(&m)) && m.value_n == 0);
    CHECK(row_next(&at, &m) == 0 && row_next(&at, &m) == 0);
    CHECK(count("{}") == 0 && count("  { } ") == 0 && count("{\"a\": 1}") == 1);
    static const char *const bad[] = { "", "{", "[]", "{\"a\"", "{\"a\": }", "{\"a\": \"b}", "{\"a\": 1", "{\"a\": {\"b\": 1}}", "{\"a\": [1]}",
                                       "{\"a\": 1} x", "{\"a\": \"b\\", "{a: 1}", "{\"a\": 1 \"b\": 2}", "null" };
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++) CHECK(count(bad[i]) == -1);
    return check_done();
}

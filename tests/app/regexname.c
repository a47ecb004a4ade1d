/* Sample names by regular expressions: groups, joined names, names of any bytes, faults of the expression, explosions. */
#include "app/regexname.h"

#include "check.h"

static void expect(const char *relative, const char *pattern, const char *sample, const char *lot,
                   const char *wafer, const char *position) {
    name_parts p = { 0 };
    error e = { 0 };
    CHECK(pattern_check(pattern, &e) == ST_OK && name_sample(relative, pattern, &p, &e) == ST_OK);
    if (e.code) printf("  %s\n", e.text);
    CHECK(p.sample && !strcmp(p.sample, sample) && !strcmp(p.lot, lot) && !strcmp(p.wafer, wafer) &&
          !strcmp(p.position, position));
    if (p.sample && strcmp(p.sample, sample) != 0) printf("  %s: got '%s'\n", relative, p.sample);
    name_parts_free(&p);
}

int main(void) {
    static const char by_part[] = "re:(?<lot>L\\d+)[/_](?<wafer>W\\d+)(?:_(?<position>[a-z]+))?";
    error e = { 0 };
    expect("L7/W03_centre_2.tif", by_part, "L7_W03_centre", "L7", "W03", "centre");
    expect("L7_W03_9.tif", by_part, "L7_W03", "L7", "W03", "");
    expect("other_12.tif", by_part, "other", "", "", ""); /* no match: the stem without its number */
    expect("sub/other_12.tif", by_part, "sub", "", "", "");
    expect("x-77-y.png", "re:-(?<sample>\\d+)-", "77", "", "", "");
    expect("a.b.png", "re:(?<sample>.*)$", "a.b", "", "", ""); /* without the ending */
    expect("\xff\xfeW3.png", "re:(?<wafer>W\\d)", "W3", "", "W3", "");
    expect("\xc3\xa9t\xc3\xa9_1.png", "re:^(?<sample>\\X{3})", "\xc3\xa9t\xc3\xa9", "", "", "");
    expect("W.png", "re:W(?<wafer>\\d*)", "W", "", "", ""); /* matched nothing that names: falls through */
    CHECK_FAILS(pattern_check("re:(?<wafer>W", &e), ST_BAD_INPUT, e,
                "not a regular expression: missing closing parenthesis");
    CHECK_FAILS(pattern_check("re:W(\\d+)", &e), ST_BAD_INPUT, e,
                "names no group of lot, wafer, position, sample");
    name_parts p = { 0 };
    char longest[200];
    memset(longest, 'a', sizeof longest - 1);
    longest[sizeof longest - 1] = '\0';
    CHECK_FAILS(name_sample(longest, "re:^(?<sample>(a|aa)+)[0-9]$", &p, &e), ST_BAD_INPUT, e, "too many steps");
    CHECK(!p.sample);
    return check_done();
}

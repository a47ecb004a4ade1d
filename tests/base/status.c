/* The first cause stays, the context goes in front; text grows; numbers print once and for all. */
#include <stdlib.h>

#include "base/flags.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/text.h"
#include "check.h"

int main(void) {
    error e = { 0 };
    CHECK(fail(&e, ST_IO, "disk %d", 7) == ST_IO && fail(&e, ST_BUG, "later") == ST_BUG);
    CHECK(e.code == ST_IO && !strcmp(e.text, "disk 7"));
    CHECK(fail_within(&e, ST_IO, "a.png") == ST_IO && !strcmp(e.text, "a.png: disk 7"));

    size_t huge = (size_t)atoll("4611686018427387904");
    CHECK(mem_array(huge, 8) == NULL);
    mem_fail_after(2);
    void *first = mem_array(3, 8), *second = mem_array(3, 8), *third = mem_array(3, 8);
    CHECK(first && !second && third);
    free(first);
    free(third);

    textbuf t = { 0 };
    for (int i = 0; i < 1000; i++) text_addf(&t, "%03d", i);
    CHECK(t.n == 3000 && !strcmp(t.s + 2997, "999") && text_check(&t, "text", &e) == ST_OK);
    text_free(&t);
    text_add_plain(&t, "a\x1b[31m\n\xc2\x9b" "b\xc3\xa9");
    CHECK(!strcmp(t.s, "a?[31m??b\xc3\xa9"));
    text_free(&t);

    double v = 0.0;
    char out[NUMBER_TEXT];
    CHECK(number_parse(" -2.5e-3 ", &v));
    CHECK_NEAR(v, -2.5e-3, 0.0);
    CHECK(!number_parse("nan", &v) && !number_parse("0x10", &v) && !number_parse("1,5", &v) && !number_parse("", &v));
    CHECK(!strcmp(number_text(0.0183112, 4, out), "0.01831") && !strcmp(number_percent(0.0183112, 4, out), "1.831"));
    CHECK(!strcmp(number_text((double)NAN, 4, out), ""));

    char words[1024];
    CHECK(!strcmp(flags_text(FLAG(BLURRED) | FLAG(NO_PIXEL_SIZE), words, sizeof words), "no_pixel_size blurred"));
    CHECK(strlen(flags_text(~(flags)0, words, sizeof words)) < 1000);
    return check_done();
}

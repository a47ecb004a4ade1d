/* The README's lists are those of the program: the blocks between <!-- name --> and <!-- end --> must equal what the
 * column and flag tables print. SWARD_UPDATE=1 rewrites the blocks; a person reads the difference. */
#include <stdlib.h>

#include "base/flags.h"
#include "base/text.h"
#include "check.h"
#include "io/file.h"
#include "report/results.h"

static void flags_markdown(textbuf *t) {
    text_add(t, "| word | meaning |\n|---|---|\n");
    for (int b = 0; b < FLAG_COUNT; b++) text_addf(t, "| `%s` | %s |\n", flag_word(b), flag_meaning(b));
}

/* The block behind "<!-- name -->\n" up to "<!-- end -->": replaced in `out`, compared with `want`. */
static const char *block(const char *at, const char *name, const textbuf *want, textbuf *out, int *same) {
    char mark[80];
    snprintf(mark, sizeof mark, "<!-- %s -->\n", name);
    const char *begin = strstr(at, mark);
    if (!begin) return NULL;
    begin += strlen(mark);
    const char *end = strstr(begin, "<!-- end -->");
    if (!end) return NULL;
    *same = (size_t)(end - begin) == want->n && !memcmp(begin, want->s, want->n);
    text_add_n(out, at, (size_t)(begin - at));
    text_add_n(out, want->s, want->n);
    return end;
}

int main(void) {
    char *readme = NULL;
    size_t n = 0;
    error e = { 0 };
    const char *path = SWARD_TESTS "/../README.md";
    CHECK(file_read(path, 1 << 20, &readme, &n, &e) == ST_OK);
    if (!readme) return check_done();
    textbuf lists[3] = { { 0 } }, out = { 0 };
    static const char *const names[] = { "columns of images.csv", "columns of samples.csv", "flags" };
    columns_markdown(image_columns, n_image_columns, &lists[0]);
    columns_markdown(sample_columns, n_sample_columns, &lists[1]);
    flags_markdown(&lists[2]);
    const char *at = readme;
    int all = 1;
    for (size_t i = 0; i < 3 && at; i++) {
        int same = 0;
        at = block(at, names[i], &lists[i], &out, &same);
        CHECK(at != NULL);
        if (!same) printf("README.md, block '%s' is not what the program has; run this test with SWARD_UPDATE=1\n", names[i]);
        all = all && same;
    }
    if (at) text_add(&out, at);
    if (at && getenv("SWARD_UPDATE")) CHECK(file_write(path, out.s, out.n, &e) == ST_OK);
    else CHECK(all);
    for (size_t i = 0; i < 3; i++) text_free(&lists[i]);
    text_free(&out);
    free(readme);
    return check_done();
}

/* Named groups through PCRE2, in UTF-8 where the name is that, on bytes where it is not. Steps and memory of a match are
 * bounded: an expression that explodes is an error, not a wait. */
#include "app/regexname.h"

#define PCRE2_CODE_UNIT_WIDTH 8
#include <pcre2.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/text.h"

enum { MAX_STEPS = 100000, MAX_HEAP_KIB = 16384, GROUPS = 4 };
static const char *const group_names[GROUPS] = { "lot", "wafer", "position", "sample" };

static pcre2_code *compile(const char *expression, error *e) {
    int code = 0;
    PCRE2_SIZE at = 0;
    pcre2_code *re =
        pcre2_compile((PCRE2_SPTR)expression, PCRE2_ZERO_TERMINATED,
                      PCRE2_UTF | PCRE2_MATCH_INVALID_UTF | PCRE2_NEVER_BACKSLASH_C, &code, &at, NULL);
    if (re) return re;
    PCRE2_UCHAR why[160] = "";
    (void)pcre2_get_error_message(code, why, sizeof why);
    (void)fail(e, ST_BAD_INPUT, "not a regular expression: %s at character %zu", (const char *)why,
               (size_t)at + 1);
    return NULL;
}

status regex_check(const char *expression, error *e) {
    pcre2_code *re = compile(expression, e);
    if (!re) return ST_BAD_INPUT;
    int known = 0;
    for (int k = 0; k < GROUPS; k++)
        known += pcre2_substring_number_from_name(re, (PCRE2_SPTR)group_names[k]) > 0;
    pcre2_code_free(re);
    return known ? ST_OK
                 : fail(e, ST_BAD_INPUT,
                        "the regular expression names no group of lot, wafer, position, sample: write "
                        "(?<wafer>W\\d+)");
}

/* The text of a group, "" where it took no part. NULL: no memory. */
static char *group_text(const pcre2_code *re, pcre2_match_data *m, const char *path, const char *name) {
    int k = pcre2_substring_number_from_name(re, (PCRE2_SPTR)name);
    const PCRE2_SIZE *place = pcre2_get_ovector_pointer(m);
    if (k <= 0 || (uint32_t)k >= pcre2_get_ovector_count(m) || place[2 * k] == PCRE2_UNSET ||
        place[2 * k + 1] < place[2 * k])
        return mem_text("");
    return mem_text_n(path + place[2 * k], place[2 * k + 1] - place[2 * k]);
}

static int take_groups(const pcre2_code *re, pcre2_match_data *m, const char *path, name_parts *out) {
    char **slots[GROUPS] = { &out->lot, &out->wafer, &out->position, &out->sample };
    textbuf joined = { 0 };
    for (int k = 0; k < GROUPS; k++) {
        *slots[k] = group_text(re, m, path, group_names[k]);
        if (!*slots[k]) return 0;
        if (k == GROUPS - 1 || !(*slots[k])[0]) continue;
        if (joined.n) text_add(&joined, "_");
        text_add(&joined, *slots[k]);
    }
    if (!out->sample[0] && joined.n && !joined.failed) {
        free(out->sample);
        out->sample = mem_text(joined.s);
    }
    int ok = !joined.failed && out->sample;
    text_free(&joined);
    return ok;
}

status regex_sample(const char *path, size_t n, const char *expression, name_parts *out, int *found,
                    error *e) {
    *found = 0;
    pcre2_code *re = compile(expression, e);
    if (!re) return ST_BAD_INPUT;
    pcre2_match_data *m = pcre2_match_data_create_from_pattern(re, NULL);
    pcre2_match_context *limits = pcre2_match_context_create(NULL);
    status st = m && limits ? ST_OK : NO_MEMORY(e, "the sample names");
    if (st == ST_OK) {
        (void)pcre2_set_match_limit(limits, MAX_STEPS);
        (void)pcre2_set_heap_limit(limits, MAX_HEAP_KIB);
        int code = pcre2_match(re, (PCRE2_SPTR)path, n, 0, 0, m, limits);
        if (code > 0) {
            name_parts got = { 0 };
            if (!take_groups(re, m, path, &got))
                st = NO_MEMORY(e, "the sample names");
            else if (got.sample[0])
                *found = 1;
            if (*found)
                *out = got;
            else
                name_parts_free(&got);
        } else if (code != PCRE2_ERROR_NOMATCH)
            st = fail(e, ST_BAD_INPUT,
                      "name_pattern takes too many steps on the name '%.*s'; make it simpler",
                      (int)(n < 120 ? n : 120), path);
    }
    pcre2_match_context_free(limits);
    pcre2_match_data_free(m);
    pcre2_code_free(re);
    return st;
}

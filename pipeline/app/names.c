/* Sample from a file name: the protocol's template, else the sub-folder, else the stem without its number. A
 * template is literal text and fields in braces; it matches as a whole, fields take as little as they can
 * ({n}: digits only), and a table of hopeless (part, position) pairs keeps the search polynomial. */
#include "app/names.h"
#include "app/regexname.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/text.h"
#include "io/json.h"

typedef enum {
    FIELD_LOT,
    FIELD_WAFER,
    FIELD_POSITION,
    FIELD_SAMPLE,
    FIELD_N,             /* from here on: told apart, but no part of the sample's name */
    FIELD_MAGNIFICATION,
    FIELD_IMAGE,
    FIELD_ANY,
    FIELD_UNKNOWN,
    LITERAL
} part_kind;
static const char *const field_names[] = { "lot", "wafer", "position", "sample", "n", "magnification", "image" };
enum { N_FIELDS = 7, MAX_PARTS = 32 };
_Static_assert((int)FIELD_IMAGE + 1 == N_FIELDS, "one name per field");

typedef struct {
    part_kind kind;
    const char *text; /* LITERAL: in the template, not terminated */
    size_t n;
    size_t from, to; /* where it matched */
} part;

/* A field's kind by the n bytes between its braces. */
static part_kind field_kind(const char *s, size_t n) {
    if (!n) return FIELD_ANY;
    for (int f = 0; f < N_FIELDS; f++)
        if (strlen(field_names[f]) == n && memcmp(field_names[f], s, n) == 0) return (part_kind)f;
    return FIELD_UNKNOWN;
}

static status unknown_field(const part *q, error *e) {
    char word[40];
    snprintf(word, sizeof word, "%.*s", (int)(q->n < 39 ? q->n : 39), q->text);
    const char *near = json_nearest(word, field_names, N_FIELDS);
    return fail(e, ST_BAD_INPUT,
                "unknown field '{%s}'%s%s%s; fields are {lot} {wafer} {position} {sample} {n} {magnification} {image} {}", word,
                near ? ", did you mean '{" : "", near ? near : "", near ? "}'?" : "");
}

/* The template cut into at most MAX_PARTS parts. */
static status pattern_parts(const char *s, part *parts, size_t *n, error *e) {
    *n = 0;
    while (*s) {
        if (*n == MAX_PARTS) return fail(e, ST_BAD_INPUT, "the template has more than %d parts", MAX_PARTS);
        part *q = &parts[(*n)++];
        if (*s != '{') {
            *q = (part){ .kind = LITERAL, .text = s, .n = strcspn(s, "{") };
            s += q->n;
            continue;
        }
        size_t inside = strcspn(s + 1, "{}");
        if (s[1 + inside] != '}') return fail(e, ST_BAD_INPUT, "a brace is opened and not closed");
        *q = (part){ .kind = field_kind(s + 1, inside), .text = s + 1, .n = inside };
        if (q->kind == FIELD_UNKNOWN) return unknown_field(q, e);
        s += inside + 2;
    }
    return ST_OK;
}

static int ends_like_image(const char *s) {
    static const char *const endings[] = { ".png", ".tif", ".tiff", ".PNG", ".TIF", ".TIFF" };
    size_t n = strlen(s);
    for (size_t i = 0; i < sizeof endings / sizeof endings[0]; i++) {
        size_t m = strlen(endings[i]);
        if (n >= m && strcmp(s + n - m, endings[i]) == 0) return 1;
    }
    return 0;
}

static const char *regex_of(const char *pattern) {
    return pattern && !strncmp(pattern, "re:", 3) ? pattern + 3 : NULL;
}

status pattern_check(const char *pattern, error *e) {
    if (regex_of(pattern)) return regex_check(regex_of(pattern), e);
    part parts[MAX_PARTS];
    error inner = { ST_OK, "" };
    int seen[N_FIELDS + 1] = { 0 }, naming = 0;
    size_t n = 0;
    if (pattern_parts(pattern, parts, &n, &inner) != ST_OK)
        return fail(e, ST_BAD_INPUT, "'%.100s': %s", pattern, inner.text);
    if (ends_like_image(pattern))
        return fail(e, ST_BAD_INPUT, "'%.100s': leave the extension out, the template is matched without it",
                    pattern);
    for (size_t i = 0; i < n; i++) {
        if (parts[i].kind == LITERAL) continue;
        if (i && parts[i - 1].kind != LITERAL)
            return fail(e, ST_BAD_INPUT,
                        "'%.100s': two fields without text between them cannot be told apart", pattern);
        if (parts[i].kind == FIELD_ANY) continue;
        if (seen[parts[i].kind]++)
            return fail(e, ST_BAD_INPUT, "'%.100s': the field '{%s}' stands twice", pattern,
                        field_names[parts[i].kind]);
        naming += parts[i].kind < FIELD_N;
    }
    if (!naming)
        return fail(e, ST_BAD_INPUT,
                    "'%.100s': no field that names a sample; take {sample}, {lot}, {wafer} or {position}",
                    pattern);
    return ST_OK;
}

typedef struct {
    part *parts;
    size_t n_parts;
    const char *s;
    size_t n;
    unsigned char *hopeless; /* [n_parts][n + 1] */
} search;

/* Matches parts[i..] against s[at..]; depth is at most MAX_PARTS. */
static int match_from(search *m, size_t i, size_t at) {
    if (i == m->n_parts) return at == m->n;
    part *q = &m->parts[i];
    if (m->hopeless[i * (m->n + 1) + at]) return 0;
    if (q->kind == LITERAL) {
        if (at + q->n <= m->n && memcmp(m->s + at, q->text, q->n) == 0 && match_from(m, i + 1, at + q->n))
            return 1;
    } else {
        size_t end = at;
        while (end < m->n && m->s[end] != '/' &&
               (q->kind != FIELD_N || (m->s[end] >= '0' && m->s[end] <= '9'))) {
            q->from = at;
            q->to = ++end;
            if (match_from(m, i + 1, end)) return 1;
        }
    }
    m->hopeless[i * (m->n + 1) + at] = 1;
    return 0;
}

/* What the matched parts say. Without {sample} the sample is the matched text from the first to the last
 * naming field; {n}, {} and the text before them are left out. */
static int take_parts(const search *m, name_parts *out) {
    char **slots[FIELD_N] = { &out->lot, &out->wafer, &out->position, &out->sample };
    textbuf joined = { 0 };
    const part *before = NULL;
    for (size_t i = 0; i < m->n_parts; i++) {
        const part *q = &m->parts[i];
        if (q->kind == LITERAL) {
            before = q;
            continue;
        }
        if (q->kind < FIELD_N) {
            *slots[q->kind] = mem_text_n(m->s + q->from, q->to - q->from);
            if (!*slots[q->kind]) joined.failed = 1;
            if (joined.n && before) text_add_n(&joined, before->text, before->n);
            text_add_n(&joined, m->s + q->from, q->to - q->from);
        }
        before = NULL;
    }
    if (!out->sample && !joined.failed) out->sample = mem_text(joined.s);
    int ok = !joined.failed && out->sample;
    text_free(&joined);
    return ok;
}

static status by_pattern(const char *text, size_t n, const char *pattern, name_parts *out, int *found,
                         error *e) {
    part parts[MAX_PARTS];
    search m = { .parts = parts, .s = text, .n = n };
    *found = 0;
    status st = pattern_parts(pattern, parts, &m.n_parts, e);
    if (st != ST_OK) return st;
    m.hopeless = mem_array(m.n_parts, n + 1);
    if (!m.hopeless) return NO_MEMORY(e, "the sample names");
    if (match_from(&m, 0, 0)) {
        *found = 1;
        if (!take_parts(&m, out)) st = NO_MEMORY(e, "the sample names");
    }
    free(m.hopeless);
    return st;
}

/* Length of the stem without its trailing number, a closing bracket around it and the separators before it.
 */
static size_t without_number(const char *s, size_t n) {
    size_t end = n;
    while (end && s[end - 1] == ')') end--;
    size_t digits = end;
    while (end && s[end - 1] >= '0' && s[end - 1] <= '9') end--;
    if (end == digits) return n;
    while (end && strchr(" _-.(#", s[end - 1])) end--;
    return end ? end : n; /* nothing but a number: the number is the name */
}

status name_sample(const char *relative, const char *pattern, name_parts *out, error *e) {
    const char *slash = strrchr(relative, '/');
    const char *bare = slash ? slash + 1 : relative;
    const char *dot = strrchr(bare, '.');
    size_t stem = dot && dot != bare ? (size_t)(dot - bare) : strlen(bare);
    name_parts got = { 0 };
    int found = 0;
    status st = ST_OK;
    if (regex_of(pattern))
        st = regex_sample(relative, (size_t)(bare - relative) + stem, regex_of(pattern), &got, &found, e);
    else if (pattern && strchr(pattern, '/'))
        st = by_pattern(relative, (size_t)(bare - relative) + stem, pattern, &got, &found, e);
    else if (pattern)
        st = by_pattern(bare, stem, pattern, &got, &found, e);
    if (st == ST_OK && !found)
        got.sample = slash ? mem_text_n(relative, (size_t)(slash - relative))
                           : mem_text_n(bare, without_number(bare, stem));
    if (!got.lot) got.lot = mem_text("");
    if (!got.wafer) got.wafer = mem_text("");
    if (!got.position) got.position = mem_text("");
    if (st == ST_OK && (!got.sample || !got.lot || !got.wafer || !got.position))
        st = NO_MEMORY(e, "the sample names");
    got.matched = found;
    if (st == ST_OK)
        *out = got;
    else
        name_parts_free(&got);
    return st;
}

void name_parts_free(name_parts *p) {
    free(p->sample);
    free(p->lot);
    free(p->wafer);
    free(p->position);
    *p = (name_parts){ 0 };
}

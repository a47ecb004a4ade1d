/* JSON in through cJSON, with the line of every key; JSON out as an emitter of strings and numbers.
 * cJSON keeps no positions: a scan of the text finds the keys in document order (a string followed by a
 * colon), the tree walked in the same order gives the nodes, and the two lists belong together item by item.
 * Does not: comments, NaN, several documents in one text. */
#include "io/json.h"

#include <cjson/cJSON.h>
#include <ctype.h>
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/utf8_priv.h"

static size_t line_at(const char *bytes, size_t at) {
    size_t line = 1;
    for (size_t i = 0; i < at; i++) line += bytes[i] == '\n';
    return line;
}

typedef struct {
    size_t *lines; /* of the keys, in document order */
    size_t n, room;
    size_t depth_line; /* of the first bracket deeper than the limit, 0: none */
} key_scan;

static int add_key(key_scan *k, size_t line) {
    if (k->n == k->room) {
        size_t room = k->room ? 2 * k->room : 64;
        size_t *lines = mem_grow(k->lines, room, sizeof *lines);
        if (!lines) return 0;
        k->lines = lines;
        k->room = room;
    }
    k->lines[k->n++] = line;
    return 1;
}

/* 0: no memory. The text need not be valid; cJSON judges that afterwards. */
static int scan_keys(const char *s, size_t n, key_scan *k) {
    size_t line = 1, depth = 0;
    for (size_t i = 0; i < n && !k->depth_line; i++) {
        if (s[i] == '\n')
            line++;
        else if (s[i] == '{' || s[i] == '[') {
            if (++depth > LIMIT_JSON_DEPTH) k->depth_line = line;
        } else if (s[i] == '}' || s[i] == ']') {
            if (depth) depth--;
        } else if (s[i] == '"') {
            size_t start = line;
            for (i++; i < n && s[i] != '"'; i++) {
                if (s[i] == '\\') i++;
                if (i < n && s[i] == '\n') line++;
            }
            size_t after = i + 1;
            while (after < n && (unsigned char)s[after] <= ' ') after++;
            if (after < n && s[after] == ':' && !add_key(k, start)) return 0;
        }
    }
    return 1;
}

typedef struct {
    const char *name;
    size_t object, index; /* which object holds the key; its place in document order */
} key_name;

typedef struct {
    json *out;
    key_name *names;
    size_t n, objects;
    size_t bad_number; /* index + 1 of the last key before a number beyond double, 0: none */
} tree_walk;

/* Depth is bounded by the scan. Appends nothing beyond out->n_keys. */
static void walk(tree_walk *w, const cJSON *node) {
    size_t object = ++w->objects;
    for (const cJSON *child = node->child; child; child = child->next) {
        if (child->string && w->n < w->out->n_keys) {
            w->out->nodes[w->n] = child;
            w->names[w->n] = (key_name){ child->string, object, w->n };
            w->n++;
        }
        if (cJSON_IsNumber(child) && !isfinite(child->valuedouble) && !w->bad_number) w->bad_number = w->n;
        if (child->child) walk(w, child);
    }
}

static int compare_names(const void *a, const void *b) {
    const key_name *x = a, *y = b;
    if (x->object != y->object) return x->object < y->object ? -1 : 1;
    int c = strcmp(x->name, y->name);
    if (c) return c;
    return x->index < y->index ? -1 : x->index > y->index;
}

static status attach_lines(json *j, const char *what, error *e) {
    tree_walk w = { .out = j, .names = mem_array(j->n_keys, sizeof *w.names) };
    j->nodes = mem_array(j->n_keys, sizeof *j->nodes);
    status st = ST_OK;
    if (!w.names || !j->nodes) {
        st = NO_MEMORY(e, what);
        goto done;
    }
    walk(&w, j->root);
    if (w.n != j->n_keys) {
        st = fail(e, ST_BAD_INPUT, "%s: the keys cannot be told apart; is it plain JSON?", what);
        goto done;
    }
    if (w.bad_number) {
        st = fail(e, ST_BAD_INPUT, "%s line %zu, '%s': the number is too large", what,
                  j->lines[w.bad_number - 1], j->nodes[w.bad_number - 1]->string);
        goto done;
    }
    qsort(w.names, w.n, sizeof *w.names, compare_names);
    for (size_t i = 1; i < w.n; i++) {
        const key_name *a = &w.names[i - 1], *b = &w.names[i];
        if (a->object == b->object && !strcmp(a->name, b->name)) {
            st = fail(e, ST_BAD_INPUT,
                      "%s line %zu: '%s' stands here and already in line %zu; keep one of them", what,
                      j->lines[b->index], b->name, j->lines[a->index]);
            break;
        }
    }
done:
    free(w.names);
    return st;
}

static status parse_tree(const char *bytes, size_t n, const char *what, json *out, error *e) {
    const char *end = NULL;
    out->root = cJSON_ParseWithLengthOpts(bytes, n, &end, 0);
    size_t at = end && end >= bytes && end <= bytes + n ? (size_t)(end - bytes) : n;
    if (!out->root)
        return fail(e, ST_BAD_INPUT, "%s line %zu: not JSON here; look for a missing comma, quote or bracket",
                    what, line_at(bytes, at));
    while (at < n && isspace((unsigned char)bytes[at])) at++;
    if (at < n)
        return fail(e, ST_BAD_INPUT, "%s line %zu: text behind the end of the JSON", what,
                    line_at(bytes, at));
    if (!cJSON_IsObject(out->root))
        return fail(e, ST_BAD_INPUT, "%s line 1: found no object; expected { \"key\": value, ... }", what);
    return ST_OK;
}

status json_parse(const char *bytes, size_t n, const char *what, json *out, error *e) {
    json j = { 0 };
    key_scan keys = { 0 };
    if (n >= 3 && !memcmp(bytes, "\xef\xbb\xbf", 3)) bytes += 3, n -= 3;
    const char *zero = n ? memchr(bytes, 0, n) : NULL;
    status st = ST_OK;
    if (zero)
        st = fail(e, ST_BAD_INPUT, "%s line %zu: a zero byte; save the file as UTF-8 text", what,
                  line_at(bytes, (size_t)(zero - bytes)));
    else if (!scan_keys(bytes, n, &keys))
        st = NO_MEMORY(e, what);
    else if (keys.depth_line)
        st = fail(e, ST_BAD_INPUT, "%s line %zu: brackets nested deeper than %d", what, keys.depth_line,
                  LIMIT_JSON_DEPTH);
    else
        st = parse_tree(bytes, n, what, &j, e);
    if (st == ST_OK) {
        j.lines = keys.lines;
        j.n_keys = keys.n;
        keys = (key_scan){ 0 };
        st = attach_lines(&j, what, e);
    }
    if (st == ST_OK) {
        *out = j;
        j = (json){ 0 };
    }
    free(keys.lines);
    json_free(&j);
    return st;
}

void json_free(json *j) {
    cJSON_Delete(j->root);
    free(j->nodes);
    free(j->lines);
    *j = (json){ 0 };
}

size_t json_line(const json *j, const struct cJSON *node) {
    for (size_t i = 0; i < j->n_keys; i++)
        if (j->nodes[i] == node) return j->lines[i];
    return 0;
}

double json_member_number(const cJSON *object, const char *name) {
    const cJSON *v = cJSON_GetObjectItemCaseSensitive(object, name);
    return cJSON_IsNumber(v) ? v->valuedouble : MISSING;
}

const char *json_member_text(const cJSON *object, const char *name) {
    const cJSON *v = cJSON_GetObjectItemCaseSensitive(object, name);
    return cJSON_IsString(v) ? v->valuestring : "";
}

void json_string(textbuf *out, const char *s) {
    if (!s) {
        text_add(out, "null");
        return;
    }
    text_add(out, "\"");
    while (*s) {
        size_t run = 0, step = 1;
        while ((unsigned char)s[run] >= 0x20 && s[run] != '"' && s[run] != '\\' &&
               (step = utf8_step(s + run)) != 0)
            run += step;
        text_add_n(out, s, run);
        s += run;
        if (!*s) break;
        if (*s == '"')
            text_add(out, "\\\"");
        else if (*s == '\\')
            text_add(out, "\\\\");
        else if (*s == '\n')
            text_add(out, "\\n");
        else if (*s == '\t')
            text_add(out, "\\t");
        else if (*s == '\r')
            text_add(out, "\\r");
        else if ((unsigned char)*s < 0x20)
            text_addf(out, "\\u%04x", (unsigned)*s);
        else
            text_add(out, UTF8_REPLACEMENT);
        s++;
    }
    text_add(out, "\"");
}

void json_number(textbuf *out, double v, int digits) {
    char buffer[NUMBER_TEXT];
    number_text(v, digits, buffer);
    text_add(out, buffer[0] ? buffer : "null");
}

/* Levenshtein (1966) distance; words beyond NEAR_WORD letters are never like a keyword. */
enum { NEAR_WORD = 63 };

static size_t edit_distance(const char *a, size_t na, const char *b, size_t nb) {
    size_t row[NEAR_WORD + 1];
    for (size_t j = 0; j <= nb; j++) row[j] = j;
    for (size_t i = 1; i <= na; i++) {
        size_t diagonal = row[0];
        row[0] = i;
        for (size_t j = 1; j <= nb; j++) {
            size_t best = diagonal + (tolower((unsigned char)a[i - 1]) != tolower((unsigned char)b[j - 1]));
            if (row[j] + 1 < best) best = row[j] + 1;
            if (row[j - 1] + 1 < best) best = row[j - 1] + 1;
            diagonal = row[j];
            row[j] = best;
        }
    }
    return row[nb];
}

const char *json_nearest(const char *word, const char *const *words, size_t n) {
    size_t length = strlen(word), best = SIZE_MAX;
    const char *found = NULL;
    if (length > NEAR_WORD) return NULL;
    for (size_t i = 0; i < n; i++) {
        size_t other = strlen(words[i]);
        if (other > NEAR_WORD) continue;
        size_t d = edit_distance(word, length, words[i], other);
        if (d <= 3 && 2 * d <= length && d < best) {
            best = d;
            found = words[i];
        }
    }
    return found;
}

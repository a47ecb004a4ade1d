/* A scanner for what table_row_to_json writes: one object of texts, numbers, null, true, false. Anything nested is refused.
 * What this file does not do: it does not check escapes or numbers until somebody asks for them. */
#include "app/rowtext.h"

#include <cjson/cJSON.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"

static int is_blank(char c) { return c == ' ' || c == '\t' || c == '\r' || c == '\n'; }

static int ends_value(char c) { return is_blank(c) || c == ',' || c == '}' || c == '{' || c == '[' || c == '"' || c == '\0'; }

static const char *skip_blank(const char *p) {
    while (is_blank(*p)) p++;
    return p;
}

/* Past the text that opens at p; NULL: it does not end. */
static const char *take_text(const char *p, const char **start, size_t *n) {
    *start = ++p;
    while (*p && *p != '"') p += *p == '\\' && p[1] ? 2 : 1;
    if (*p != '"') return NULL;
    *n = (size_t)(p - *start);
    return p + 1;
}

int row_next(const char **at, row_member *m) {
    const char *p = skip_blank(*at);
    if (*p == '}') {
        *at = p;
        return skip_blank(p + 1)[0] ? -1 : 0;
    }
    if (*p != '{' && *p != ',') return -1;
    int opens = *p == '{';
    p = skip_blank(p + 1);
    if (opens && *p == '}') {
        *at = p;
        return row_next(at, m);
    }
    if (*p != '"' || !(p = take_text(p, &m->name, &m->name_n))) return -1;
    m->escaped = memchr(m->name, '\\', m->name_n) != NULL;
    p = skip_blank(p);
    if (*p != ':') return -1;
    p = skip_blank(p + 1);
    if (*p == '"') {
        m->kind = MEMBER_TEXT;
        if (!(p = take_text(p, &m->value, &m->value_n))) return -1;
    } else {
        m->value = p;
        m->value_n = 0;
        while (!ends_value(p[m->value_n])) m->value_n++;
        if (!m->value_n) return -1;
        m->kind = *p == '-' || (*p >= '0' && *p <= '9') ? MEMBER_NUMBER : MEMBER_OTHER;
        p += m->value_n;
    }
    *at = skip_blank(p);
    return **at == ',' || **at == '}' ? 1 : -1;
}

char *row_text(const row_member *m) {
    char *quoted = mem_array(m->value_n + 3, 1), *text = NULL;
    if (!quoted) return NULL;
    if (m->kind != MEMBER_TEXT || !memchr(m->value, '\\', m->value_n)) {
        memcpy(quoted, m->value, m->value_n);
        return quoted;
    }
    quoted[0] = quoted[m->value_n + 1] = '"';
    memcpy(quoted + 1, m->value, m->value_n);
    cJSON *node = cJSON_Parse(quoted);
    if (cJSON_IsString(node)) text = mem_text(node->valuestring);
    cJSON_Delete(node);
    free(quoted);
    return text;
}

int row_named(const row_member *m, const char *name) {
    size_t n = 0;
    while (n < m->name_n && m->name[n] == name[n]) n++; /* a row holds no zero byte */
    if (n == m->name_n && !name[n]) return 1;
    if (!m->escaped) return 0;
    row_member plain = { .value = m->name, .value_n = m->name_n, .kind = MEMBER_TEXT };
    char *text = row_text(&plain);
    int same = text && !strcmp(text, name);
    free(text);
    return same;
}

static int lower(char c) { return c >= 'A' && c <= 'Z' ? c - 'A' + 'a' : c; }

int row_named_like(const row_member *m, const char *name) {
    size_t n = 0;
    while (n < m->name_n && name[n] && lower(m->name[n]) == lower(name[n])) n++;
    return n == m->name_n && !name[n];
}

double row_number(const row_member *m) {
    char shown[64];
    double v = MISSING;
    if (m->kind == MEMBER_OTHER || m->value_n >= sizeof shown) return MISSING;
    memcpy(shown, m->value, m->value_n);
    shown[m->value_n] = '\0';
    return number_parse(shown, &v) ? v : MISSING;
}

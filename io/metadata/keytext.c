/* Keys and values as instruments write them: lines that end in CR, LF or both, sections in brackets, the
 * first '=' separates, blanks around everything, letters of either case. */
#include "io/metadata/keytext_priv.h"

#include <math.h>
#include <stdio.h>
#include <string.h>
#include <strings.h>

#include "io/metadata/scaletext_priv.h"

enum { LINE = KEYTEXT_LINE };

const char *keytext_line(const char *p, char line[KEYTEXT_LINE]) {
    if (!*p) return NULL;
    size_t n = strcspn(p, "\r\n"), from = 0, to = n;
    while (from < to && (p[from] == ' ' || p[from] == '\t')) from++;
    while (to > from && (p[to - 1] == ' ' || p[to - 1] == '\t')) to--;
    size_t length = to - from < LINE - 1 ? to - from : LINE - 1;
    memcpy(line, p + from, length);
    line[length] = '\0';
    p += n;
    if (*p == '\r') p++;
    if (*p == '\n') p++;
    return p;
}

/* `name` with n letters is `pattern`, whose last letter may be a '*'. */
static int is_like(const char *name, size_t n, const char *pattern) {
    size_t k = strlen(pattern);
    if (k && pattern[k - 1] == '*') return n >= k - 1 && !strncasecmp(name, pattern, k - 1);
    return n == k && !strncasecmp(name, pattern, n);
}

int keytext_ini(const char *text, const char *section, const char *key, char value[KEYTEXT_LINE]) {
    char line[LINE];
    int inside = !section;
    for (const char *p = text; (p = keytext_line(p, line)) != NULL;) {
        size_t length = strlen(line);
        if (line[0] == '[' && length >= 2 && line[length - 1] == ']') {
            inside = !section || is_like(line + 1, length - 2, section);
            continue;
        }
        const char *sep = strchr(line, '=');
        if (!inside || !sep) continue;
        size_t k = (size_t)(sep - line);
        while (k && line[k - 1] == ' ') k--;
        if (!is_like(line, k, key)) continue;
        snprintf(value, LINE, "%s", sep + 1 + strspn(sep + 1, " \t"));
        return value[0] != '\0';
    }
    return 0;
}

double keytext_ini_number(const char *text, const char *section, const char *key) {
    char value[LINE];
    double v;
    return keytext_ini(text, section, key, value) && scaletext_number(value, &v) ? v : (double)NAN;
}

double keytext_ini_u_rel(const char *text, const char *section, const char *key) {
    char value[LINE];
    return keytext_ini(text, section, key, value) ? scaletext_u_rel(value) : (double)NAN;
}

int keytext_ini_has(const char *text, const char *section) {
    char line[LINE];
    for (const char *p = text; (p = keytext_line(p, line)) != NULL;) {
        size_t n = strlen(line);
        if (n >= 2 && line[0] == '[' && line[n - 1] == ']' && is_like(line + 1, n - 2, section)) return 1;
    }
    return 0;
}

int keytext_dollar(const char *text, const char *key, char value[KEYTEXT_LINE]) {
    char line[LINE];
    size_t n = strlen(key);
    for (const char *p = text; (p = keytext_line(p, line)) != NULL;) {
        const char *name = line + strspn(line, "$");
        if (name == line || strncasecmp(name, key, n) != 0 || (name[n] != ' ' && name[n] != '\t')) continue;
        snprintf(value, LINE, "%s", name + n + strspn(name + n, " \t"));
        return value[0] != '\0';
    }
    return 0;
}

void keytext_narrow(char *text, size_t *n) {
    const unsigned char *p = (const unsigned char *)text;
    int little = *n >= 2 && ((p[0] == 0xff && p[1] == 0xfe) || (p[0] && !p[1]));
    int big = *n >= 2 && ((p[0] == 0xfe && p[1] == 0xff) || (!p[0] && p[1]));
    if (!little && !big) return;
    size_t k = 0;
    for (size_t i = p[0] >= 0xfe || p[1] >= 0xfe ? 2 : 0; i + 1 < *n; i += 2) {
        unsigned code = little ? p[i] | (unsigned)p[i + 1] << 8 : p[i + 1] | (unsigned)p[i] << 8;
        if (code == 0x3bc) code = 0xb5;
        if (code) text[k++] = (char)(code < 256 ? code : '?');
    }
    text[k] = '\0';
    *n = k;
}

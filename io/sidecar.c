/* Finds and reads the text file that belongs to a micrograph by its name. Only beside the picture, never
 * along a path written inside a file. UTF-8, Latin-1 and UTF-16 texts are read. */
#include "io/sidecar_priv.h"

#include <ctype.h>
#include <dirent.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/file.h"
#include "io/scaletext_priv.h"

enum { KINDS = 4 };
static const struct {
    const char *ending;
    int whole_name; /* NAME.EXT + ending, else NAME + ending */
} kinds[KINDS] = { { ".txt", 1 }, { ".txt", 0 }, { ".json", 1 }, { ".json", 0 } };

static int equal_letters_n(const char *a, const char *b, size_t n) {
    for (size_t i = 0; i < n; i++)
        if (tolower((unsigned char)a[i]) != tolower((unsigned char)b[i])) return 0;
    return 1;
}

/* Does `entry` read `name` (its first n letters) plus `ending`? 2: letter for letter, 1: but for the case. */
static int is_beside(const char *entry, const char *name, size_t n, const char *ending) {
    size_t more = strlen(ending);
    if (strlen(entry) != n + more || !equal_letters_n(entry, name, n) ||
        !equal_letters_n(entry + n, ending, more))
        return 0;
    return !strncmp(entry, name, n) && !strcmp(entry + n, ending) ? 2 : 1;
}

/* UTF-16 text to its low bytes in place (a scale needs no more than Latin-1); the result is terminated. */
static void narrow_utf16(char *text, size_t *n) {
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

static int read_one(const char *folder, const char *name, scales *s) {
    char *path = path_join(folder, name), *text = NULL;
    size_t n = 0, before = s->n;
    error e = { 0 };
    if (!path) return 0;
    if (file_read(path, LIMIT_SIDECAR_BYTES, &text, &n, &e) != ST_OK)
        note_add(s->note, "Sidecar %.80s %.120s.", name, e.text);
    else {
        narrow_utf16(text, &n);
        const char *start = text + (n >= 3 && !memcmp(text, "\xef\xbb\xbf", 3) ? 3 : 0);
        while (isspace((unsigned char)*start)) start++;
        if (*start == '{')
            (void)scaletext_json(start, n - (size_t)(start - text), SCALE_SIDECAR, "sidecar", name, s);
        else
            (void)scaletext_lines(start, SCALE_SIDECAR, "sidecar", name, s);
    }
    free(text);
    free(path);
    return s->n > before;
}

void sidecar_read(const char *path, scales *s) {
    const char *slash = strrchr(path, '/'), *name = slash ? slash + 1 : path;
    const char *dot = strrchr(name, '.');
    size_t whole = strlen(name), stem = dot && dot > name ? (size_t)(dot - name) : whole;
    char *folder = slash ? mem_text_n(path, (size_t)(slash - path) + 1) : mem_text(".");
    char *found[KINDS] = { NULL };
    int exact[KINDS] = { 0 };
    DIR *d = folder ? opendir(folder) : NULL;
    for (const struct dirent *entry; d && (entry = readdir(d)) != NULL;)
        for (int k = 0; k < KINDS; k++) {
            int match = is_beside(entry->d_name, name, kinds[k].whole_name ? whole : stem, kinds[k].ending);
            /* Of names that differ only in case: the exact one, else the first in byte order. */
            if (match > exact[k] ||
                (match && match == exact[k] && found[k] && strcmp(entry->d_name, found[k]) < 0)) {
                free(found[k]);
                found[k] = mem_text(entry->d_name);
                exact[k] = match;
            }
        }
    if (d) closedir(d);
    int done = 0;
    for (int k = 0; k < KINDS; k++) {
        if (found[k] && !done) done = read_one(folder, found[k], s);
        free(found[k]);
    }
    free(folder);
}

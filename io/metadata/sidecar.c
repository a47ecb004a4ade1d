/* Finds and reads the text file that belongs to a micrograph by its name. Only beside the picture, never
 * along a path written inside a file. UTF-8, Latin-1 and UTF-16 texts are read. */
#include "io/metadata/sidecar_priv.h"

#include <ctype.h>
#include <dirent.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/file.h"
#include "io/metadata/instrument_priv.h"
#include "io/metadata/keytext_priv.h"
#include "io/metadata/scaletext_priv.h"

enum { KINDS = 6 };
typedef enum { WHOLE, STEM, DASHED } stem_kind;
static const struct {
    const char *ending;
    stem_kind stem; /* NAME.EXT, NAME or NAME-EXT in front of the ending */
    int hdr;
} kinds[KINDS] = { { ".txt", WHOLE, 0 }, { ".txt", STEM, 0 },   { ".hdr", DASHED, 1 },
                   { ".hdr", STEM, 1 },  { ".json", WHOLE, 0 }, { ".json", STEM, 0 } };

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

/* Told apart by what stands in it, not by its ending; a .hdr without [MAIN] is a map's or a high-range
 * picture's, and none of ours. */
static void read_text(const char *text, size_t n, const char *name, const char *image, int hdr, picture *p) {
    char value[KEYTEXT_LINE];
    if (keytext_ini_has(text, "MAIN"))
        main_block_read(text, SCALE_SIDECAR, "sidecar", p->nx, p->ny, p);
    else if (hdr)
        return;
    else if (keytext_ini_has(text, "SemImageFile") || keytext_ini_has(text, "TemImageFile"))
        sem_image_file_read(text, image, p->nx, p->ny, p);
    else if (keytext_dollar(text, "CM_FORMAT", value) || keytext_dollar(text, "CM_MAG", value) ||
             keytext_dollar(text, "CM_ACCEL_VOLT", value))
        dollar_block_read(text, p->nx, p);
    else if (*text == '{')
        (void)scaletext_json(text, n, SCALE_SIDECAR, "sidecar", name, &p->scales);
    else
        (void)scaletext_lines(text, SCALE_SIDECAR, "sidecar", name, &p->scales);
}

static int read_one(const char *folder, const char *name, const char *image, int hdr, picture *p) {
    char *path = path_join(folder, name), *text = NULL;
    size_t n = 0, before = p->scales.n;
    error e = { 0 };
    if (!path) return 0;
    if (file_read(path, LIMIT_SIDECAR_BYTES, &text, &n, &e) != ST_OK)
        note_add(p->scales.note, "Sidecar %.80s %.120s.", name, e.text);
    else {
        keytext_narrow(text, &n);
        const char *start = text + (n >= 3 && !memcmp(text, "\xef\xbb\xbf", 3) ? 3 : 0);
        while (isspace((unsigned char)*start)) start++;
        read_text(start, n - (size_t)(start - text), name, image, hdr, p);
    }
    free(text);
    free(path);
    return p->scales.n > before;
}

void sidecar_read(const char *path, picture *p) {
    const char *slash = strrchr(path, '/'), *name = slash ? slash + 1 : path;
    const char *dot = strrchr(name, '.');
    size_t whole = strlen(name), stem = dot && dot > name ? (size_t)(dot - name) : whole;
    char *folder = slash ? mem_text_n(path, (size_t)(slash - path) + 1) : mem_text(".");
    char *dashed = mem_text(name), *found[KINDS] = { NULL };
    if (dashed && stem < whole) dashed[stem] = '-';
    int exact[KINDS] = { 0 };
    DIR *d = folder ? opendir(folder) : NULL;
    for (const struct dirent *entry; d && (entry = readdir(d)) != NULL;)
        for (int k = 0; k < KINDS; k++) {
            int dash = kinds[k].stem == DASHED;
            if (dash && !dashed) continue;
            int match = is_beside(entry->d_name, dash ? dashed : name, kinds[k].stem == STEM ? stem : whole,
                                  kinds[k].ending);
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
        if (found[k] && !done) done = read_one(folder, found[k], name, kinds[k].hdr, p);
        free(found[k]);
    }
    free(dashed);
    free(folder);
}

/* Finds and reads the text file that belongs to a micrograph by its name. Only beside the picture, never
 * along a path written inside a file: the companion of OME-XML too. UTF-8, Latin-1 and UTF-16 texts are read. */
#include "io/metadata/sidecar_priv.h"

#include <ctype.h>
#include <dirent.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/file.h"
#include "io/load.h"
#include "io/metadata/instrument_priv.h"
#include "io/metadata/keytext_priv.h"
#include "io/metadata/scaletext_priv.h"
#include "io/metadata/xml_scale_priv.h"

enum { KINDS = 7 };
typedef enum { WHOLE, STEM, DASHED, OME } stem_kind;
typedef enum { TEXT, HEADER, COMPANION } content_kind;
static const struct {
    const char *ending;
    stem_kind stem; /* NAME.EXT, NAME, NAME-EXT, or NAME without its .ome in front of the ending */
    content_kind content;
} kinds[KINDS] = { { ".txt", WHOLE, TEXT },  { ".txt", STEM, TEXT },   { ".hdr", DASHED, HEADER },
                   { ".hdr", STEM, HEADER }, { ".json", WHOLE, TEXT }, { ".json", STEM, TEXT },
                   { ".companion.ome", OME, COMPANION } };

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
static void read_text(const char *text, size_t n, const char *name, const char *image, content_kind content,
                      picture *p) {
    char value[KEYTEXT_LINE];
    if (content == COMPANION)
        ome_read(text, n, p->nx, image, p);
    else if (keytext_ini_has(text, "MAIN"))
        main_block_read(text, SCALE_SIDECAR, "sidecar", p->nx, p->ny, p);
    else if (content == HEADER)
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

static int read_one(const char *folder, const char *name, const char *image, content_kind content, picture *p) {
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
        read_text(start, n - (size_t)(start - text), name, image, content, p);
    }
    free(text);
    free(path);
    return p->scales.n > before;
}

/* The text files that belong to a picture, by their names in its folder. */
typedef struct {
    char *folder, *image; /* owned */
    char *found[KINDS];   /* in the order they are asked; owned, NULL: not there */
} beside;

static void beside_free(beside *b) {
    for (int k = 0; k < KINDS; k++) free(b->found[k]);
    free(b->folder);
    free(b->image);
}

static void look_beside(const char *path, beside *b) {
    const char *slash = strrchr(path, '/'), *name = slash ? slash + 1 : path;
    const char *dot = strrchr(name, '.');
    size_t whole = strlen(name), stem = dot && dot > name ? (size_t)(dot - name) : whole;
    *b = (beside){ .folder = slash ? mem_text_n(path, (size_t)(slash - path) + 1) : mem_text("."), .image = mem_text(name) };
    size_t bare = stem > 4 && equal_letters_n(name + stem - 4, ".ome", 4) ? stem - 4 : stem;
    const size_t lengths[] = { [WHOLE] = whole, [STEM] = stem, [DASHED] = whole, [OME] = bare };
    char *dashed = mem_text(name);
    if (dashed && stem < whole) dashed[stem] = '-';
    int exact[KINDS] = { 0 };
    DIR *d = b->folder ? opendir(b->folder) : NULL;
    for (const struct dirent *entry; d && (entry = readdir(d)) != NULL;)
        for (int k = 0; k < KINDS; k++) {
            int dash = kinds[k].stem == DASHED;
            if (dash && !dashed) continue;
            int match =
                is_beside(entry->d_name, dash ? dashed : name, lengths[kinds[k].stem], kinds[k].ending);
            /* Of names that differ only in case: the exact one, else the first in byte order. */
            if (match > exact[k] ||
                (match && match == exact[k] && b->found[k] && strcmp(entry->d_name, b->found[k]) < 0)) {
                free(b->found[k]);
                b->found[k] = mem_text(entry->d_name);
                exact[k] = match;
            }
        }
    if (d) closedir(d);
    free(dashed);
}

void sidecar_read(const char *path, picture *p) {
    beside b;
    look_beside(path, &b);
    for (int k = 0; b.image && k < KINDS; k++)
        if (b.found[k] && read_one(b.folder, b.found[k], b.image, kinds[k].content, p)) break;
    if (p->companion_wanted && !b.found[KINDS - 1])
        note_add(p->note, "The OME-XML says its words are in a companion file, but no NAME.companion.ome lies "
                          "beside the picture.");
    beside_free(&b);
}

void sidecar_text(const char *path, textbuf *out) {
    beside b;
    look_beside(path, &b);
    for (int k = 0; k < KINDS; k++) {
        char *full = b.found[k] && b.folder ? path_join(b.folder, b.found[k]) : NULL, *text = NULL, hash[65] = "unread";
        size_t n = 0;
        if (full && file_read(full, LIMIT_SIDECAR_BYTES, &text, &n, NULL) == ST_OK) sha256_hex(text, n, hash);
        if (full) text_addf(out, "%d:%s:%s;", k, b.found[k], hash);
        free(text);
        free(full);
    }
    beside_free(&b);
}

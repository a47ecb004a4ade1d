/* TIFF in, through libtiff on the bytes in memory, BigTIFF and both byte orders included: which directory is
 * the micrograph, its pixels (tiff_pixels.c), its tags (tiff_tags.c), its orientation. Of several pages the
 * largest that is no thumbnail or mask, the first of equals; where all are thumbnails, the sub-directories
 * are searched too. Errors go to a handler of the one handle, never to a global or a terminal. Source: TIFF
 * 6.0 (1992), supplement 1 (1995) for sub-directories; libtiff 4.5. */
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <tiffio.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/picture_priv.h"
#include "io/tiff_pixels_priv.h"
#include "io/tiff_tags_priv.h"

enum { MAX_PAGES = 4096, MAX_SUB_PAGES = 64 };

typedef struct {
    const uint8_t *bytes;
    size_t n, at;
    tiff_watch *watch; /* shared by all handles of a file */
} source;

static tmsize_t on_read(thandle_t h, void *to, tmsize_t n) {
    source *s = h;
    size_t left = s->at < s->n ? s->n - s->at : 0, take = n < 0 ? 0 : (size_t)n < left ? (size_t)n : left;
    memcpy(to, s->bytes + (take ? s->at : 0), take);
    s->at += take;
    return (tmsize_t)take;
}

static tmsize_t on_write(thandle_t h, void *from, tmsize_t n) {
    (void)h, (void)from, (void)n;
    return -1;
}

static toff_t on_seek(thandle_t h, toff_t to, int whence) {
    source *s = h;
    toff_t from = whence == SEEK_CUR ? s->at : whence == SEEK_END ? s->n : 0;
    s->at = (size_t)(from + to);
    return s->at;
}

static int on_close(thandle_t h) {
    (void)h;
    return 0;
}

static toff_t on_size(thandle_t h) { return ((source *)h)->n; }

/* libtiff only reads a map opened for reading; its type has no const. */
static int on_map(thandle_t h, void **base, toff_t *size) {
    source *s = h;
    union {
        const uint8_t *in;
        void *out;
    } view = { s->bytes };
    *base = view.out;
    *size = s->n;
    return 1;
}

static void on_unmap(thandle_t h, void *base, toff_t size) { (void)h, (void)base, (void)size; }

__attribute__((format(printf, 4, 0))) static int on_error(TIFF *tif, void *user, const char *module,
                                                          const char *fmt, va_list args) {
    source *s = user;
    (void)tif, (void)module;
    if (!s->watch->what[0]) vsnprintf(s->watch->what, sizeof s->watch->what, fmt, args);
    return 1;
}

/* A JPEG stream that breaks off is only a warning to its decoder, which paints the rest grey. */
__attribute__((format(printf, 4, 0))) static int on_warning(TIFF *tif, void *user, const char *module,
                                                            const char *fmt, va_list args) {
    source *s = user;
    (void)tif;
    if (module && strstr(module, "JPEG")) {
        s->watch->damaged = 1;
        if (!s->watch->what[0]) vsnprintf(s->watch->what, sizeof s->watch->what, fmt, args);
    }
    return 1;
}

static TIFF *open_source(source *s, size_t max_pixels) {
    TIFFOpenOptions *o = TIFFOpenOptionsAlloc();
    if (!o) return NULL;
    size_t ceiling =
        max_pixels > LIMIT_ALLOCATION_BYTES / 8 ? LIMIT_ALLOCATION_BYTES : max_pixels * 8 + (1u << 20);
    TIFFOpenOptionsSetMaxSingleMemAlloc(o, (tmsize_t)ceiling);
    TIFFOpenOptionsSetErrorHandlerExtR(o, on_error, s);
    TIFFOpenOptionsSetWarningHandlerExtR(o, on_warning, s);
    TIFF *tif = TIFFClientOpenExt("picture", "r", s, on_read, on_write, on_seek, on_close, on_size, on_map,
                                  on_unmap, o);
    TIFFOpenOptionsFree(o);
    return tif;
}

/* One directory: where it lies, how large it is, and whether it is a thumbnail or a mask. */
typedef struct {
    toff_t at;
    double area;
    int secondary;
} page;

static page look_at(TIFF *tif) {
    uint32_t nx = 0, ny = 0, kind = 0;
    uint16_t old_kind = 0;
    (void)TIFFGetField(tif, TIFFTAG_IMAGEWIDTH, &nx);
    (void)TIFFGetField(tif, TIFFTAG_IMAGELENGTH, &ny);
    (void)TIFFGetField(tif, TIFFTAG_SUBFILETYPE, &kind);
    (void)TIFFGetField(tif, TIFFTAG_OSUBFILETYPE, &old_kind);
    int secondary = (kind & (FILETYPE_REDUCEDIMAGE | FILETYPE_MASK)) || old_kind == OFILETYPE_REDUCEDIMAGE;
    return (page){ TIFFCurrentDirOffset(tif), (double)nx * ny, secondary };
}

static int is_better(const page *a, const page *b) {
    return a->secondary != b->secondary ? a->secondary < b->secondary : a->area > b->area;
}

/* The sub-directories of the one the handle stands on; leaves it elsewhere. */
static void look_below(TIFF *tif, page *best) {
    uint16_t n = 0;
    toff_t *offsets = NULL, copy[MAX_SUB_PAGES];
    if (!TIFFGetField(tif, TIFFTAG_SUBIFD, &n, &offsets) || !offsets) return;
    if (n > MAX_SUB_PAGES) n = MAX_SUB_PAGES;
    memcpy(copy, offsets, n * sizeof *copy);
    for (uint16_t i = 0; i < n; i++) {
        if (!TIFFSetSubDirectory(tif, copy[i])) continue;
        page p = look_at(tif);
        if (is_better(&p, best)) *best = p;
    }
}

/* The page to measure: the largest that is neither reduced nor a mask, the first of equals. `*number` counts
 * from 1; 0: it is a sub-directory. */
static page choose_page(TIFF *tif, size_t *number, size_t *pages) {
    page best = look_at(tif), p = best;
    size_t n = 0;
    *number = 1;
    do {
        p = look_at(tif);
        if (n && is_better(&p, &best)) {
            best = p;
            *number = n + 1;
        }
        n++;
    } while (n < MAX_PAGES && TIFFReadDirectory(tif));
    *pages = n;
    for (size_t i = 0; best.secondary && i < n && i < MAX_SUB_PAGES; i++) {
        page before = best;
        if (!TIFFSetDirectory(tif, (tdir_t)i)) break;
        look_below(tif, &best);
        if (best.at != before.at) *number = 0;
    }
    return best;
}

/* The page the user names instead of the one that would be chosen. */
static status take_page(TIFF *tif, size_t wanted, size_t pages, page *best, size_t *number, error *e) {
    if (wanted > pages)
        return fail(e, ST_BAD_INPUT, "page %zu was asked for, but the file has %zu", wanted, pages);
    if (!TIFFSetDirectory(tif, (tdir_t)(wanted - 1)))
        return fail(e, ST_BAD_INPUT, "the TIFF is damaged: page %zu cannot be read", wanted);
    *best = look_at(tif);
    *number = wanted;
    return best->secondary ? fail(e, ST_BAD_INPUT, "page %zu, which was asked for, is a thumbnail or a mask by its own word", wanted)
                           : ST_OK;
}

static status damaged(const source *s, error *e) {
    return fail(e, ST_BAD_INPUT, "the TIFF cannot be opened, it is truncated or damaged: %s",
                s->watch->what[0] ? s->watch->what : "no directory");
}

/* Turns the stored rows the way they are to be seen (TIFF 6.0, tag 274). */
static status honour_orientation(TIFF *tif, picture *p, error *e) {
    uint16_t orientation = ORIENTATION_TOPLEFT;
    (void)TIFFGetFieldDefaulted(tif, TIFFTAG_ORIENTATION, &orientation);
    return picture_turn(p, orientation, e);
}

static void note_pages(size_t number, size_t pages, picture *p) {
    p->pages = pages;
    if (number && pages < 2) return;
    p->flags |= FLAG(MANY_PAGES);
    if (number)
        note_add(p->note, "Page %zu of %zu was measured.", number, pages);
    else
        note_add(p->note, "A sub-picture was measured; the %s a reduced copy.",
                 pages > 1 ? "pages are each" : "page is");
}

/* Handles two and three read the planes of a picture in step with the first. */
static status open_planes(source s[3], TIFF *tif[3], toff_t at, size_t max_pixels, error *e) {
    uint16_t config = 0, samples = 1;
    (void)TIFFGetFieldDefaulted(tif[0], TIFFTAG_PLANARCONFIG, &config);
    (void)TIFFGetFieldDefaulted(tif[0], TIFFTAG_SAMPLESPERPIXEL, &samples);
    for (int k = 1; k < 3 && config == PLANARCONFIG_SEPARATE && samples >= 3; k++) {
        tif[k] = open_source(&s[k], max_pixels);
        if (!tif[k] || !TIFFSetSubDirectory(tif[k], at)) return damaged(&s[k], e);
    }
    return ST_OK;
}

status tiff_decode_page(const uint8_t *bytes, size_t n, size_t wanted, size_t max_pixels, picture *out,
                        error *e) {
    tiff_watch watch = { 0 };
    source s[3];
    TIFF *tif[3] = { NULL };
    picture p = { 0 };
    size_t pages = 0, number = 0;
    page best;
    status st = ST_OK;
    for (int k = 0; k < 3; k++) s[k] = (source){ .bytes = bytes, .n = n, .watch = &watch };
    tif[0] = open_source(&s[0], max_pixels);
    if (!tif[0]) {
        st = damaged(&s[0], e);
        goto done;
    }
    best = choose_page(tif[0], &number, &pages);
    if (wanted && pages > 1) st = take_page(tif[0], wanted, pages, &best, &number, e);
    if (st != ST_OK) goto done;
    tiff_tags_read(tif[0], best.at, bytes, n, &p);
    watch = (tiff_watch){ 0 };
    if (!TIFFSetSubDirectory(tif[0], best.at)) {
        st = fail(e, ST_BAD_INPUT, "the TIFF is damaged: page %zu cannot be read", number);
        goto done;
    }
    st = open_planes(s, tif, best.at, max_pixels, e);
    if (st == ST_OK) st = tiff_pixels_read(tif, &watch, n, max_pixels, &p, e);
    if (st == ST_OK) st = honour_orientation(tif[0], &p, e);
    if (st == ST_OK) {
        note_pages(number, pages, &p);
        *out = p;
        p = (picture){ 0 };
    }
done:
    for (int k = 0; k < 3; k++)
        if (tif[k]) TIFFClose(tif[k]);
    picture_free(&p);
    return st;
}

status tiff_decode(const uint8_t *bytes, size_t n, size_t max_pixels, picture *out, error *e) {
    return tiff_decode_page(bytes, n, 0, max_pixels, out, e);
}

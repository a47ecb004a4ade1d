/* An image file's bytes become a micrograph: told apart by content, decoded, strip cropped, clipping counted
 * on the file's own levels, pixel size chosen. The name of a file decides nothing here. */
#include "io/load.h"

#include <ctype.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/file.h"
#include "io/picture_priv.h"
#include "io/pixelsize_priv.h"
#include "io/sidecar_priv.h"
#include "io/strip_priv.h"

load_options load_defaults(void) {
    return (load_options){ .px_nm_option = MISSING,
                           .px_nm_sheet = MISSING,
                           .px_u_rel = 0.01,
                           .crop_strip = 1,
                           .max_pixels = LIMIT_PIXELS };
}

int load_knows_name(const char *path) {
    static const char *const endings[] = { ".png", ".tif", ".tiff" };
    size_t n = strlen(path);
    for (size_t k = 0; k < sizeof endings / sizeof endings[0]; k++) {
        size_t m = strlen(endings[k]);
        if (n <= m || path[n - m - 1] == '/') continue;
        size_t i = 0;
        while (i < m && tolower((unsigned char)path[n - m + i]) == endings[k][i]) i++;
        if (i == m) return 1;
    }
    return 0;
}

static int starts_with(const uint8_t *bytes, size_t n, const char *magic, size_t m) {
    return n >= m && !memcmp(bytes, magic, m);
}

/* What an unreadable file is, as far as its first bytes tell. */
static status refuse(const uint8_t *bytes, size_t n, error *e) {
    static const struct {
        const char *magic;
        size_t n;
        const char *kind;
    } known[] = {
        { "\xff\xd8\xff", 3, "a JPEG" },
        { "GIF8", 4, "a GIF" },
        { "BM", 2, "a BMP" },
        { "%PDF", 4, "a PDF" },
        { "PK\x03\x04", 4, "a ZIP archive" },
        { "\x1f\x8b", 2, "a gzip archive" },
        { "RIFF", 4, "a RIFF file (WebP?)" },
    };
    for (size_t k = 0; k < sizeof known / sizeof known[0]; k++)
        if (starts_with(bytes, n, known[k].magic, known[k].n))
            return fail(e, ST_BAD_INPUT,
                        "is %s; only PNG and TIFF are read: export the micrograph as TIFF or PNG",
                        known[k].kind);
    size_t text = 0, look = n < 512 ? n : 512;
    while (text < look && (bytes[text] >= 0x20 || isspace(bytes[text]))) text++;
    if (text == look) return fail(e, ST_BAD_INPUT, "is text, not a picture; expected PNG or TIFF");
    return fail(e, ST_BAD_INPUT, "is neither PNG nor TIFF (by its first bytes)");
}

static status decode(const uint8_t *bytes, size_t n, size_t max_pixels, picture *p, error *e) {
    if (!n) return fail(e, ST_BAD_INPUT, "the file is empty");
    if (starts_with(bytes, n, "\x89PNG\r\n\x1a\n", 8)) return png_decode(bytes, n, max_pixels, p, e);
    if (starts_with(bytes, n, "II*\0", 4) || starts_with(bytes, n, "MM\0*", 4) ||
        starts_with(bytes, n, "II+\0", 4) || starts_with(bytes, n, "MM\0+", 4))
        return tiff_decode(bytes, n, max_pixels, p, e);
    if (n < 8 && (!memcmp(bytes, "\x89PNG\r\n\x1a", n) || !memcmp(bytes, "II*", n < 3 ? n : 3) ||
                  !memcmp(bytes, "MM\0", n < 3 ? n : 3)))
        return fail(e, ST_BAD_INPUT, "the file is truncated after %zu bytes", n);
    return refuse(bytes, n, e);
}

/* Rows of strip: what the file states when the pixels allow it, else what the pixels show. */
static size_t strip_rows(picture *p) {
    size_t found = strip_find(p->px, p->nx, p->ny);
    if (p->strip_stated && p->strip_stated < p->ny / 3) {
        if (found && found != p->strip_stated)
            note_add(p->note,
                     "The file states %zu rows of info strip, the pixels show %zu; the file's were cropped.",
                     p->strip_stated, found);
        return p->strip_stated;
    }
    return found;
}

static void count_clipped(micrograph *m) {
    size_t low = 0, high = 0, n = m->nx * m->ny;
    for (size_t i = 0; i < n; i++) {
        low += !(m->px[i] > 0.0f);
        high += !(m->px[i] < 1.0f);
    }
    m->clipped_low = (double)low / (double)n;
    m->clipped_high = (double)high / (double)n;
}

static status load_bytes(const uint8_t *bytes, size_t n, const char *path, const load_options *o,
                         micrograph *m, error *e) {
    picture p = { 0 };
    micrograph r = { 0 };
    status st = decode(bytes, n, o->max_pixels, &p, e);
    if (st != ST_OK) goto done;
    r.file_nx = r.nx = p.nx;
    r.file_ny = p.ny;
    r.strip_rows = o->crop_strip ? strip_rows(&p) : 0;
    r.ny = p.ny - r.strip_rows;
    if (r.nx < LIMIT_MIN_SIDE || r.ny < LIMIT_MIN_SIDE) {
        st = fail(e, ST_BAD_INPUT, "the picture has only %zu x %zu pixels; at least %zu a side are needed",
                  r.nx, r.ny, LIMIT_MIN_SIDE);
        goto done;
    }
    r.px = p.px;
    p.px = NULL;
    r.bit_depth = p.bit_depth;
    r.flags = p.flags;
    memcpy(r.acquired_at, p.acquired_at, sizeof r.acquired_at);
    memcpy(r.note, p.note, sizeof r.note);
    count_clipped(&r);
    sha256_hex(bytes, n, r.hash);
    scales_add(&p.scales, SCALE_OPTION, "option", o->px_nm_option, o->px_nm_option);
    scales_add(&p.scales, SCALE_SHEET, "sheet", o->px_nm_sheet, o->px_nm_sheet);
    if (path) sidecar_read(path, &p.scales);
    pixelsize_choose(&p.scales, o->px_u_rel, &r);
    *m = r;
    r = (micrograph){ 0 };
done:
    micrograph_free(&r);
    picture_free(&p);
    return st;
}

status load_memory(const uint8_t *bytes, size_t n, const load_options *o, micrograph *m, error *e) {
    return load_bytes(bytes, n, NULL, o, m, e);
}

status load_file(const char *path, const load_options *o, micrograph *m, error *e) {
    char *bytes = NULL;
    size_t n = 0;
    status st = file_read(path, LIMIT_FILE_BYTES, &bytes, &n, e);
    if (st == ST_OK) st = load_bytes((const uint8_t *)bytes, n, path, o, m, e);
    free(bytes);
    return st;
}

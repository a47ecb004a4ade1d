/* Private tags of TIFF files: fetched from the directory, bounded, and handed to whoever understands them;
 * the binary layouts (chunks of tag 50431, calibrations of 65003 to 65013, the offset table of 33560) are
 * read here. Unknown tags are anonymous to libtiff: count and pointer, no registration needed. Binary blocks
 * are little endian whatever the file is. Nothing is searched for between the parts of a block. */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "base/text.h"
#include "io/metadata/instrument_priv.h"
#include "io/metadata/keytext_priv.h"
#include "io/metadata/scaletext_priv.h"
#include "io/tiff_tags_priv.h"
#include "io/metadata/xml_scale_priv.h"

enum { MAX_BLOCK = 4 << 20, MAX_CHUNKS = 1000, MAX_ENTRIES = 256 };

/* Raw bytes of a private tag whose elements are `width` bytes wide. NULL: absent, of another kind, too large.
 * The pointer is libtiff's. */
static const uint8_t *tag_bytes(TIFF *tif, uint32_t tag, size_t width, size_t *n) {
    const TIFFField *field = TIFFFindField(tif, tag, TIFF_ANY);
    uint32_t count = 0;
    void *bytes = NULL;
    if (!field || !TIFFFieldPassCount(field) || (size_t)TIFFDataWidth(TIFFFieldDataType(field)) != width)
        return NULL;
    if (!TIFFGetField(tif, tag, &count, &bytes) || !bytes || count > MAX_BLOCK / width) return NULL;
    *n = count * width;
    return bytes;
}

/* A terminated copy of a text tag, UTF-16 narrowed; NULL: absent or blank. */
static char *tag_text(TIFF *tif, uint32_t tag, size_t *n) {
    const uint8_t *bytes = tag_bytes(tif, tag, 1, n);
    if (!bytes) return NULL;
    char *text = mem_text_n((const char *)bytes, *n);
    if (!text) return NULL;
    keytext_narrow(text, n);
    if (!text[strspn(text, " \t\r\n")]) { /* exists and says nothing: absent */
        free(text);
        return NULL;
    }
    return text;
}

static uint16_t le16(const uint8_t *p) { return (uint16_t)(p[0] | p[1] << 8); }
static uint32_t le32(const uint8_t *p) { return (uint32_t)le16(p) | (uint32_t)le16(p + 2) << 16; }

static double le_double(const uint8_t *p) {
    uint64_t bits = (uint64_t)le32(p) | (uint64_t)le32(p + 4) << 32;
    double v;
    memcpy(&v, &bits, sizeof v);
    return v;
}

/* Chunks: length (of what follows), type, data; 2 is the main text, 3 the beam's. */
static void read_chunks(const uint8_t *b, size_t n, size_t nx, size_t ny, picture *p) {
    textbuf t = { 0 };
    size_t at = 0;
    int broken = 0;
    for (int k = 0; k < MAX_CHUNKS && at + 6 <= n; k++) {
        uint32_t length = le32(b + at);
        uint16_t type = le16(b + at + 4);
        if (!type) break;
        broken = length < 2 || length > n - at - 4;
        if (broken) break;
        const char *data = (const char *)b + at + 6;
        size_t size = length - 2;
        if (type == 2 || type == 3) {
            const char *end = memchr(data, 0, size);
            text_add(&t, type == 2 ? "\n[MAIN]\n" : "\n[SEM]\n");
            text_add_n(&t, data, end ? (size_t)(end - data) : size);
        }
        at += 4 + length;
    }
    if (broken)
        note_add(p->note, "tag 50431: a chunk has an impossible length; what stood before it was read.");
    if (t.s && !t.failed) main_block_read(t.s, SCALE_TAG, "tag 50431", nx, ny, p);
    text_free(&t);
}

static double tag_double(TIFF *tif, uint32_t tag) {
    size_t n = 0;
    const uint8_t *bytes = tag_bytes(tif, tag, 8, &n);
    double v = MISSING;
    if (bytes && n >= 8) memcpy(&v, bytes, 8); /* libtiff has put it in host order */
    return v;
}

/* nm per unit of a calibration's axis, by its short or its spelled-out word. */
static double axis_unit(TIFF *tif, uint32_t short_tag, uint32_t long_tag) {
    size_t n = 0;
    char *a = tag_text(tif, short_tag, &n), *b = tag_text(tif, long_tag, &n);
    double nm = a ? scaletext_unit(a) : 0.0;
    if (!(nm > 0.0) && b) nm = scaletext_unit(b);
    free(a);
    free(b);
    return nm;
}

static void read_calibration(TIFF *tif, picture *p) {
    double x = tag_double(tif, 65009) * axis_unit(tif, 65003, 65012),
           y = tag_double(tif, 65010) * axis_unit(tif, 65004, 65013);
    scales_add(&p->scales, SCALE_TAG, "tag 65009", fabs(x), fabs(y));
}

/* Table of entries behind "SIS0"; entry 1 points to exponent and pixel sizes. */
static void read_offset_table(TIFF *tif, const uint8_t *file, size_t n_file, picture *p) {
    size_t n = 0;
    const uint8_t *b = tag_bytes(tif, 33560, 1, &n);
    if (!b) { /* the tag's value is the block's place in the file */
        size_t width = 0;
        const uint8_t *place = tag_bytes(tif, 33560, 4, &width);
        uint32_t offset;
        if (!place || width < 4) return;
        memcpy(&offset, place, 4);
        if (offset >= n_file) return;
        b = file + offset;
        n = n_file - offset;
    }
    if (n < 60 || memcmp(b, "SIS0", 4) != 0) return;
    unsigned entries = le16(b + 58);
    for (unsigned i = 0; i < entries && i < MAX_ENTRIES && 60 + 8 * (size_t)(i + 1) <= n; i++) {
        const uint8_t *entry = b + 60 + 8 * (size_t)i;
        uint32_t offset = le32(entry + 4);
        if (le16(entry) != 1 || offset > n_file || n_file - offset < 44) continue;
        const uint8_t *data = file + offset;
        int power = le16(data + 10);
        if (power >= 32768) power -= 65536;
        if (power < -30 || power > 3) return;
        double unit = pow(10.0, power) * 1e9, magnification = le_double(data + 36);
        scales_add(&p->scales, SCALE_TAG, "tag 33560", le_double(data + 12) * unit,
                   le_double(data + 20) * unit);
        if (magnification > 0.0 && isfinite(magnification)) p->facts.magnification = magnification;
        picture_set_time(p, le16(b + 18) + 1900, le16(b + 16) + 1, le16(b + 14), le16(b + 12), le16(b + 10),
                         0);
        return;
    }
}

static void read_pairs(TIFF *tif, size_t nx, picture *p) {
    size_t n = 0;
    char *text = tag_text(tif, 34118, &n);
    if (!text) text = tag_text(tif, 34119, &n);
    if (text) tag_34118_read(text, nx, p);
    free(text);
}

static void read_sections(TIFF *tif, size_t nx, size_t ny, picture *p) {
    size_t n = 0, before = p->scales.n;
    char *text = tag_text(tif, 34682, &n);
    if (text) tag_34682_read(text, nx, ny, p);
    free(text);
    int absent = p->scales.n == before;
    text = tag_text(tif, 34683, &n);
    if (text) tag_34683_read(text, n, nx, p);
    free(text);
    text = absent ? tag_text(tif, 34680, &n) : NULL;
    if (text) tag_34680_read(text, n, nx, p);
    free(text);
}

void tiff_private_read(TIFF *tif, size_t nx, size_t ny, picture *p) {
    size_t n = 0;
    read_pairs(tif, nx, p);
    read_sections(tif, nx, ny, p);
    const uint8_t *chunks = tag_bytes(tif, 50431, 1, &n);
    if (chunks) read_chunks(chunks, n, nx, ny, p);
    read_calibration(tif, p);
    char *text = tag_text(tif, 51123, &n);
    if (text) (void)scaletext_json(text, strlen(text), SCALE_TAG, "tag 51123", "tag 51123", &p->scales);
    free(text);
}

void tiff_private_table(TIFF *tif, const uint8_t *file, size_t n_file, size_t nx, picture *p) {
    enum { LOOK = 4 };
    size_t before = p->scales.n;
    for (tdir_t k = 0; k < LOOK && p->scales.n == before; k++) {
        uint32_t width = 0;
        if (!TIFFSetDirectory(tif, k)) return;
        (void)TIFFGetField(tif, TIFFTAG_IMAGEWIDTH, &width);
        if (width == nx) read_offset_table(tif, file, n_file, p);
    }
}

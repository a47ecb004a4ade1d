/* TIFF in, through libtiff on the bytes in memory: strips and tiles, both byte orders, BigTIFF, every
 * compression libtiff was built with; grey, palette and RGB of 1, 2, 4, 8 or 16 bits, alpha ignored, chunky
 * or separate planes. Anything else (float, signed, 32 bit, CMYK, Lab ...) is refused by name. Of several
 * pages the largest that is no thumbnail or mask, the first of equals. Errors go to a handler of the one
 * handle, never to a global or a terminal. Source: TIFF 6.0 (1992); libtiff 4.5. */
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <tiffio.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/picture_priv.h"
#include "io/tiff_tags_priv.h"

enum { MAX_PAGES = 4096 };

typedef struct {
    const uint8_t *bytes;
    size_t n, at;
    char what[200]; /* the first complaint of libtiff */
    int lossy_warning;
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
    if (!s->what[0]) vsnprintf(s->what, sizeof s->what, fmt, args);
    return 1;
}

/* A JPEG stream that breaks off is only a warning to its decoder, which paints the rest grey. */
__attribute__((format(printf, 4, 0))) static int on_warning(TIFF *tif, void *user, const char *module,
                                                            const char *fmt, va_list args) {
    source *s = user;
    (void)tif;
    if (module && strstr(module, "JPEG")) {
        s->lossy_warning = 1;
        if (!s->what[0]) vsnprintf(s->what, sizeof s->what, fmt, args);
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

typedef struct {
    uint32_t nx, ny, tile_nx, tile_ny; /* tile_nx 0: strips */
    uint16_t bits, samples, photometric, compression;
    int planes; /* 1 grey or palette, 3 RGB */
    int separate;
    float grey[256];       /* level of each code up to 8 bits, palette included */
    uint8_t coloured[256]; /* palette entries that are no grey */
} layout;

/* Level of a palette: entries are 16 bits; writers of grey ramps put the 8-bit level in the high byte, with
 * or without a copy in the low one, and sloppy ones in the low byte alone. */
static int read_palette(TIFF *tif, layout *l) {
    uint16_t *r, *g, *b;
    if (!TIFFGetField(tif, TIFFTAG_COLORMAP, &r, &g, &b)) return 0;
    int n = 1 << l->bits, shift = 0;
    for (int i = 0; i < n; i++)
        if ((r[i] | g[i] | b[i]) > 255) shift = 8;
    float table[256];
    level_table(8, table);
    for (int i = 0; i < n; i++) {
        int x = r[i] >> shift, y = g[i] >> shift, z = b[i] >> shift;
        l->coloured[i] = x != y || y != z;
        l->grey[i] = l->coloured[i] ? picture_luminance(table[x], table[y], table[z]) : table[x];
    }
    return 1;
}

static const char *photometric_name(uint16_t p) {
    switch (p) {
    case PHOTOMETRIC_MASK:
        return "a transparency mask";
    case PHOTOMETRIC_SEPARATED:
        return "CMYK inks";
    case PHOTOMETRIC_YCBCR:
        return "YCbCr colour";
    case PHOTOMETRIC_CIELAB:
    case PHOTOMETRIC_ICCLAB:
    case PHOTOMETRIC_ITULAB:
        return "Lab colour";
    case PHOTOMETRIC_CFA:
        return "a colour filter array";
    case PHOTOMETRIC_LOGL:
    case PHOTOMETRIC_LOGLUV:
        return "logarithmic light";
    default:
        return "an unknown colour space";
    }
}

static status check_samples(TIFF *tif, const layout *l, error *e) {
    uint16_t format = SAMPLEFORMAT_UINT;
    static const char *const kinds[] = { "",        "unsigned",        "signed", "floating-point",
                                         "untyped", "complex integer", "complex" };
    (void)TIFFGetFieldDefaulted(tif, TIFFTAG_SAMPLEFORMAT, &format);
    int known = l->bits == 1 || l->bits == 2 || l->bits == 4 || l->bits == 8 || l->bits == 16;
    if ((format != SAMPLEFORMAT_UINT && format != SAMPLEFORMAT_VOID) || !known)
        return fail(e, ST_BAD_INPUT,
                    "holds %s samples of %u bits; unsigned 1, 2, 4, 8 or 16 bits are read: export as 8 or "
                    "16 bit grey",
                    format < 7 ? kinds[format] : "unknown", l->bits);
    if (!TIFFIsCODECConfigured(l->compression))
        return fail(e, ST_BAD_INPUT,
                    "uses TIFF compression %u, which is not read; export without compression",
                    l->compression);
    return ST_OK;
}

static status read_layout(TIFF *tif, layout *l, error *e) {
    uint16_t config = PLANARCONFIG_CONTIG;
    (void)TIFFGetField(tif, TIFFTAG_IMAGEWIDTH, &l->nx);
    (void)TIFFGetField(tif, TIFFTAG_IMAGELENGTH, &l->ny);
    (void)TIFFGetFieldDefaulted(tif, TIFFTAG_BITSPERSAMPLE, &l->bits);
    (void)TIFFGetFieldDefaulted(tif, TIFFTAG_SAMPLESPERPIXEL, &l->samples);
    (void)TIFFGetFieldDefaulted(tif, TIFFTAG_PLANARCONFIG, &config);
    (void)TIFFGetFieldDefaulted(tif, TIFFTAG_COMPRESSION, &l->compression);
    status st = check_samples(tif, l, e);
    if (st != ST_OK) return st;
    if (!TIFFGetField(tif, TIFFTAG_PHOTOMETRIC, &l->photometric))
        l->photometric = l->samples >= 3 ? PHOTOMETRIC_RGB : PHOTOMETRIC_MINISBLACK;
    if (l->photometric == PHOTOMETRIC_YCBCR && l->compression == COMPRESSION_JPEG &&
        config == PLANARCONFIG_CONTIG && TIFFSetField(tif, TIFFTAG_JPEGCOLORMODE, JPEGCOLORMODE_RGB))
        l->photometric = PHOTOMETRIC_RGB; /* the codec converts */
    l->separate = config == PLANARCONFIG_SEPARATE && l->samples > 1;
    l->planes = l->photometric == PHOTOMETRIC_RGB ? 3 : 1;
    if (l->bits <= 8) level_table(l->bits, l->grey);
    if (l->photometric > PHOTOMETRIC_PALETTE || l->samples < l->planes || (l->planes == 3 && l->bits < 8))
        return fail(e, ST_BAD_INPUT,
                    "holds %s in %u samples of %u bits, which is not read; export as grey or RGB",
                    l->photometric > PHOTOMETRIC_PALETTE ? photometric_name(l->photometric) : "colour",
                    l->samples, l->bits);
    if (l->photometric == PHOTOMETRIC_PALETTE && (l->bits > 8 || !read_palette(tif, l)))
        return fail(e, ST_BAD_INPUT, "is damaged: a palette picture without a usable palette");
    if (TIFFIsTiled(tif)) {
        (void)TIFFGetField(tif, TIFFTAG_TILEWIDTH, &l->tile_nx);
        (void)TIFFGetField(tif, TIFFTAG_TILELENGTH, &l->tile_ny);
        if (!l->tile_nx || !l->tile_ny) return fail(e, ST_BAD_INPUT, "is damaged: tiles without a size");
    }
    return ST_OK;
}

static float level16(const layout *l, unsigned v) {
    return level_of_16(l->photometric == PHOTOMETRIC_MINISWHITE ? 65535u - v : v);
}

/* n grey pixels from the rows of one to three planes; `step` samples from pixel to pixel. */
static void to_grey(const layout *l, const uint8_t *const plane[3], size_t step, size_t n, float *to,
                    flags *f) {
    if (l->planes == 1 && l->bits == 16) {
        for (size_t x = 0; x < n; x++) {
            uint16_t v;
            memcpy(&v, plane[0] + 2 * x * step, 2);
            to[x] = level16(l, v);
        }
    } else if (l->planes == 1) {
        unsigned bits = l->bits, mask = (1u << bits) - 1u,
                 flip = l->photometric == PHOTOMETRIC_MINISWHITE ? mask : 0;
        unsigned colour = 0;
        for (size_t x = 0; x < n && bits == 8; x++) {
            unsigned v = plane[0][x * step] ^ flip;
            to[x] = l->grey[v];
            colour |= l->coloured[v];
        }
        for (size_t x = 0; x < n && bits < 8; x++) {
            size_t bit = x * step * bits;
            unsigned v = (((unsigned)plane[0][bit / 8] >> (8 - bits - bit % 8)) & mask) ^ flip;
            to[x] = l->grey[v];
            colour |= l->coloured[v];
        }
        if (colour) *f |= FLAG(COLOUR);
    } else
        for (size_t x = 0; x < n; x++) {
            float c[3];
            for (int k = 0; k < 3; k++) {
                uint16_t v = 0;
                if (l->bits == 16) memcpy(&v, plane[k] + 2 * x * step, 2);
                c[k] = l->bits == 16 ? level_of_16(v) : l->grey[plane[k][x * step]];
            }
            int equal = !(c[0] < c[1] || c[0] > c[1] || c[1] < c[2] || c[1] > c[2]);
            if (!equal) *f |= FLAG(COLOUR);
            to[x] = equal ? c[0] : picture_luminance(c[0], c[1], c[2]);
        }
}

static status broken(const source *s, const char *where, uint32_t at, error *e) {
    return fail(e, ST_BAD_INPUT, "the TIFF is truncated or damaged in %s %u: %s", where, at,
                s->what[0] ? s->what : "its data end early");
}

/* Separate planes are read in step, each through its own handle, so that memory stays at a row a plane. */
static status read_strips(TIFF *const tif[3], const layout *l, const source *s, picture *p, error *e) {
    int handles = l->separate ? l->planes : 1;
    size_t bytes = (size_t)TIFFScanlineSize64(tif[0]), width = l->bits / 8u;
    size_t need = ((size_t)l->nx * (l->separate ? 1 : l->samples) * l->bits + 7) / 8;
    if (bytes < need) return fail(e, ST_BAD_INPUT, "is damaged: its rows are too short");
    uint8_t *row = mem_array(3, bytes);
    if (!row) return fail(e, ST_NO_MEMORY, "not enough memory for a row of %u pixels", l->nx);
    status st = ST_OK;
    for (uint32_t y = 0; st == ST_OK && y < l->ny; y++) {
        const uint8_t *plane[3];
        for (int k = 0; k < handles; k++)
            if (TIFFReadScanline(tif[k], row + (size_t)k * bytes, y, (uint16_t)k) != 1)
                st = broken(s, "row", y, e);
        if (st == ST_OK && s->lossy_warning) st = broken(s, "row", y, e);
        for (int k = 0; k < 3; k++) plane[k] = row + (size_t)k * (l->separate ? bytes : width);
        if (st == ST_OK)
            to_grey(l, plane, l->separate ? 1 : l->samples, l->nx, p->px + (size_t)y * l->nx, &p->flags);
    }
    free(row);
    return st;
}

static void place_tile(const layout *l, const uint8_t *tile, size_t size, uint32_t x0, uint32_t y0,
                       picture *p) {
    size_t samples = l->separate ? 1 : l->samples, width = l->bits / 8u;
    size_t row_bytes = ((size_t)l->tile_nx * samples * l->bits + 7) / 8;
    uint32_t nx = l->nx - x0 < l->tile_nx ? l->nx - x0 : l->tile_nx,
             ny = l->ny - y0 < l->tile_ny ? l->ny - y0 : l->tile_ny;
    for (uint32_t y = 0; y < ny; y++) {
        const uint8_t *plane[3];
        for (int k = 0; k < 3; k++)
            plane[k] = tile + (size_t)k * (l->separate ? size : width) + y * row_bytes;
        to_grey(l, plane, samples, nx, p->px + (size_t)(y0 + y) * l->nx + x0, &p->flags);
    }
}

static status read_tiles(TIFF *tif, const layout *l, const source *s, picture *p, error *e) {
    size_t size = (size_t)TIFFTileSize64(tif), samples = l->separate ? 1 : l->samples;
    int planes = l->separate ? l->planes : 1;
    double need = (double)l->tile_nx * l->tile_ny * (double)samples * l->bits / 8.0;
    if (!size || (double)size < need) return fail(e, ST_BAD_INPUT, "is damaged: its tiles are too small");
    /* Tiles may stick out of the picture, but not by its manifold. */
    if ((double)size * planes > (double)LIMIT_ALLOCATION_BYTES ||
        (double)l->tile_nx * l->tile_ny > 64.0 * ((double)l->nx + 1024.0) * ((double)l->ny + 1024.0))
        return fail(e, ST_NO_MEMORY, "its tiles of %u x %u pixels are too large", l->tile_nx, l->tile_ny);
    uint8_t *tile = mem_array((size_t)planes, size);
    if (!tile)
        return fail(e, ST_NO_MEMORY, "not enough memory for tiles of %u x %u pixels", l->tile_nx, l->tile_ny);
    status st = ST_OK;
    for (uint32_t y = 0; st == ST_OK && y < l->ny; y += l->tile_ny)
        for (uint32_t x = 0; st == ST_OK && x < l->nx; x += l->tile_nx) {
            for (int k = 0; st == ST_OK && k < planes; k++) {
                uint32_t at = TIFFComputeTile(tif, x, y, 0, (uint16_t)k);
                tmsize_t got = TIFFReadEncodedTile(tif, at, tile + (size_t)k * size, (tmsize_t)size);
                if (got != (tmsize_t)size || s->lossy_warning) st = broken(s, "tile", at, e);
            }
            if (st == ST_OK) place_tile(l, tile, size, x, y, p);
            if (l->nx - x <= l->tile_nx) break; /* the sums above must not pass 2^32 */
            if (x + l->tile_nx < x) break;
        }
    free(tile);
    return st;
}

/* The page to measure: the largest that is neither reduced nor a mask, the first of equals. */
static tdir_t choose_page(TIFF *tif, size_t *pages) {
    tdir_t best = 0, page = 0;
    double best_area = -1.0;
    do {
        uint32_t nx = 0, ny = 0, kind = 0;
        uint16_t old_kind = 0;
        (void)TIFFGetField(tif, TIFFTAG_IMAGEWIDTH, &nx);
        (void)TIFFGetField(tif, TIFFTAG_IMAGELENGTH, &ny);
        (void)TIFFGetField(tif, TIFFTAG_SUBFILETYPE, &kind);
        (void)TIFFGetField(tif, TIFFTAG_OSUBFILETYPE, &old_kind);
        int secondary =
            (kind & (FILETYPE_REDUCEDIMAGE | FILETYPE_MASK)) || old_kind == OFILETYPE_REDUCEDIMAGE;
        double area = secondary ? 0.0 : (double)nx * ny;
        if (area > best_area) {
            best_area = area;
            best = page;
        }
        page++;
    } while (page < MAX_PAGES && TIFFReadDirectory(tif));
    *pages = page;
    return best;
}

/* What a codec can make of the bytes at most: copies cannot grow, deflate reaches 1032 to 1 (RFC 1951). */
static int claims_too_much(const layout *l, size_t n) {
    double bytes = (double)l->nx * l->ny * l->samples * l->bits / 8.0;
    if (l->compression == COMPRESSION_NONE) return bytes > (double)n;
    if (l->compression == COMPRESSION_ADOBE_DEFLATE || l->compression == COMPRESSION_DEFLATE)
        return bytes > 1100.0 * (double)n + 65536.0;
    if (l->compression == COMPRESSION_PACKBITS) return bytes > 64.0 * (double)n + 65536.0;
    return 0;
}

static status read_page(TIFF *const tif[3], const source *s, size_t max_pixels, picture *p, error *e) {
    layout l = { 0 };
    status st = read_layout(tif[0], &l, e);
    if (st != ST_OK) return st;
    if (claims_too_much(&l, s->n))
        return fail(e, ST_BAD_INPUT,
                    "the file is too short for the %u x %u pixels it claims; it is truncated", l.nx, l.ny);
    st = picture_make(p, l.nx, l.ny, max_pixels, e);
    if (st != ST_OK) return st;
    p->bit_depth = l.bits;
    return l.tile_nx ? read_tiles(tif[0], &l, s, p, e) : read_strips(tif, &l, s, p, e);
}

status tiff_decode(const uint8_t *bytes, size_t n, size_t max_pixels, picture *out, error *e) {
    source s[3];
    TIFF *tif[3] = { NULL };
    picture p = { 0 };
    size_t pages = 0;
    tdir_t page = 0;
    uint16_t config = 0, samples = 1;
    status st = ST_OK;
    for (int k = 0; k < 3; k++) s[k] = (source){ .bytes = bytes, .n = n };
    tif[0] = open_source(&s[0], max_pixels);
    if (!tif[0]) {
        st = fail(e, ST_BAD_INPUT, "the TIFF cannot be opened, it is truncated or damaged: %s",
                  s[0].what[0] ? s[0].what : "no directory");
        goto done;
    }
    page = choose_page(tif[0], &pages);
    tiff_tags_read(tif[0], page, &p);
    s[0].what[0] = '\0';
    if (!TIFFSetDirectory(tif[0], page)) {
        st = fail(e, ST_BAD_INPUT, "the TIFF is damaged: page %u cannot be read", (unsigned)page + 1);
        goto done;
    }
    (void)TIFFGetFieldDefaulted(tif[0], TIFFTAG_PLANARCONFIG, &config);
    (void)TIFFGetFieldDefaulted(tif[0], TIFFTAG_SAMPLESPERPIXEL, &samples);
    for (int k = 1; k < 3 && config == PLANARCONFIG_SEPARATE && samples >= 3; k++) {
        tif[k] = open_source(&s[k], max_pixels);
        if (!tif[k] || !TIFFSetDirectory(tif[k], page)) {
            st = fail(e, ST_BAD_INPUT, "the TIFF is damaged: %s", s[k].what);
            goto done;
        }
    }
    st = read_page(tif, &s[0], max_pixels, &p, e);
    if (st == ST_OK && pages > 1) {
        p.flags |= FLAG(MANY_PAGES);
        note_add(p.note, "Page %u of %zu was measured.", (unsigned)page + 1, pages);
    }
    if (st == ST_OK) {
        *out = p;
        p = (picture){ 0 };
    }
done:
    for (int k = 0; k < 3; k++)
        if (tif[k]) TIFFClose(tif[k]);
    picture_free(&p);
    return st;
}

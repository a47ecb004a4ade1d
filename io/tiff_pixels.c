/* Pixels of a TIFF directory to one plane 0..1. Strips and tiles, chunky or separate planes, every
 * compression libtiff was built with. Grey, palette, RGB and CMYK; unsigned samples of 1 to 16 bits by their
 * levels, v / (2^bits - 1); signed samples, 24 bits and more, and floating point by their own smallest and
 * largest value, since such files have no level that means "full". Values without a number (NaN, infinite):
 * up to 1 % are filled from their neighbours and flagged, more are refused. YCbCr, Lab and old JPEG go through
 * libtiff's own conversion to 8-bit RGB. Alpha is ignored. Source: TIFF 6.0 (1992); libtiff 4.5. */
#include "io/tiff_pixels_priv.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "base/number.h"

typedef enum { KIND_LEVELS, KIND_UNSIGNED, KIND_SIGNED, KIND_FLOAT } sample_kind;

typedef struct {
    uint32_t nx, ny, tile_nx, tile_ny; /* tile_nx 0: row by row */
    int whole_strips;                  /* the tiles are strips */
    uint16_t bits, samples, photometric, compression;
    sample_kind kind;
    int planes; /* 1 grey or palette, 3 RGB, 4 CMYK */
    int separate;
    int converted;         /* through libtiff's RGBA interface */
    float grey[256];       /* level of each code up to 8 bits, palette included */
    uint8_t coloured[256]; /* palette entries that are no grey */
    double origin;         /* of KIND_UNSIGNED and the like: subtracted before the value becomes a float */
    int origin_known;
} layout;

static const double few_without_value = 0.01;

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
        return "inks";
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

static const char *compression_name(uint16_t c) {
    static const struct {
        uint16_t code;
        const char *name;
    } names[] = {
        { COMPRESSION_NONE, "none" },       { COMPRESSION_CCITTRLE, "ccitt" },
        { COMPRESSION_CCITTFAX3, "ccitt" }, { COMPRESSION_CCITTFAX4, "ccitt" },
        { COMPRESSION_LZW, "lzw" },         { COMPRESSION_OJPEG, "old jpeg" },
        { COMPRESSION_JPEG, "jpeg" },       { COMPRESSION_ADOBE_DEFLATE, "deflate" },
        { COMPRESSION_DEFLATE, "deflate" }, { COMPRESSION_PACKBITS, "packbits" },
        { COMPRESSION_LZMA, "lzma" },       { COMPRESSION_ZSTD, "zstd" },
        { COMPRESSION_WEBP, "webp" },       { COMPRESSION_LERC, "lerc" },
    };
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++)
        if (names[i].code == c) return names[i].name;
    return "other";
}

static int is_lossy(uint16_t c) {
    return c == COMPRESSION_OJPEG || c == COMPRESSION_JPEG || c == COMPRESSION_WEBP;
}

/* Which samples these are, or a refusal by name. */
static status check_samples(TIFF *tif, layout *l, error *e) {
    static const char *const names[] = { "",        "unsigned",        "signed", "floating-point",
                                         "untyped", "complex integer", "complex" };
    uint16_t format = SAMPLEFORMAT_UINT;
    unsigned bits = l->bits;
    (void)TIFFGetFieldDefaulted(tif, TIFFTAG_SAMPLEFORMAT, &format);
    int known = 0;
    if (format == SAMPLEFORMAT_UINT || format == SAMPLEFORMAT_VOID) {
        l->kind = bits <= 16 ? KIND_LEVELS : KIND_UNSIGNED;
        known = (bits >= 1 && bits <= 16) || bits == 24 || bits == 32 || bits == 64;
    } else if (format == SAMPLEFORMAT_INT) {
        l->kind = KIND_SIGNED;
        known = bits == 8 || bits == 16 || bits == 32 || bits == 64;
    } else if (format == SAMPLEFORMAT_IEEEFP) {
        l->kind = KIND_FLOAT;
        known = bits == 16 || bits == 32 || bits == 64;
    }
    if (!known)
        return fail(e, ST_BAD_INPUT,
                    "holds %s samples of %u bits, which are not read: export as 8 or 16 bit grey",
                    format < 7 ? names[format] : "unknown", bits);
    if (!TIFFIsCODECConfigured(l->compression))
        return fail(e, ST_BAD_INPUT,
                    "uses TIFF compression %u, which is not read; export without compression",
                    l->compression);
    return ST_OK;
}

/* Colours that libtiff turns into RGB better than we would. */
static int wants_conversion(const layout *l) {
    return l->photometric == PHOTOMETRIC_YCBCR || l->compression == COMPRESSION_OJPEG ||
           ((l->photometric == PHOTOMETRIC_CIELAB || l->photometric == PHOTOMETRIC_SEPARATED) &&
            l->bits == 8 && l->samples != 4) ||
           (l->photometric == PHOTOMETRIC_CIELAB && l->bits <= 16);
}

static status read_colours(TIFF *tif, layout *l, error *e) {
    char why[1024] = "";
    l->planes = l->photometric == PHOTOMETRIC_RGB ? 3 : 1;
    if (l->photometric == PHOTOMETRIC_SEPARATED && l->samples >= 4 && l->bits >= 8) l->planes = 4;
    if (l->planes != 4 && wants_conversion(l)) {
        l->converted = TIFFRGBAImageOK(tif, why);
        if (!l->converted)
            return fail(e, ST_BAD_INPUT, "holds %s, which cannot be converted: %.200s",
                        photometric_name(l->photometric), why);
        return ST_OK;
    }
    int colour = l->planes > 1, grey = l->photometric <= PHOTOMETRIC_MINISBLACK;
    if ((!grey && !colour && l->photometric != PHOTOMETRIC_PALETTE) || l->samples < l->planes ||
        (colour && (l->bits < 8 || l->kind != KIND_LEVELS)))
        return fail(e, ST_BAD_INPUT,
                    "holds %s in %u samples of %u bits, which is not read; export as grey or RGB",
                    grey || colour ? "colour" : photometric_name(l->photometric), l->samples, l->bits);
    if (l->photometric == PHOTOMETRIC_PALETTE &&
        (l->bits > 8 || l->kind != KIND_LEVELS || !read_palette(tif, l)))
        return fail(e, ST_BAD_INPUT, "is damaged: a palette picture without a usable palette");
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
    if (l->bits <= 8) level_table(l->bits, l->grey);
    st = read_colours(tif, l, e);
    if (st != ST_OK) return st;
    if (l->separate && l->planes == 4)
        return fail(e, ST_BAD_INPUT,
                    "holds inks in separate planes, which is not read; export as grey or RGB");
    if (TIFFIsTiled(tif)) {
        (void)TIFFGetField(tif, TIFFTAG_TILEWIDTH, &l->tile_nx);
        (void)TIFFGetField(tif, TIFFTAG_TILELENGTH, &l->tile_ny);
        if (!l->tile_nx || !l->tile_ny) return fail(e, ST_BAD_INPUT, "is damaged: tiles without a size");
    } else if (l->compression == COMPRESSION_PACKBITS) {
        /* Runs should end with the row (TIFF 6.0, section 9); of writers whose runs do not, only whole strips
         * come out right. */
        (void)TIFFGetFieldDefaulted(tif, TIFFTAG_ROWSPERSTRIP, &l->tile_ny);
        if (!l->tile_ny || l->tile_ny > l->ny) l->tile_ny = l->ny;
        l->tile_nx = l->nx;
        l->whole_strips = 1;
    }
    return ST_OK;
}

/* Sample k of a row of up to 16 bits each, most significant bit first whatever the byte order (TIFF 6.0, tag
 * 266); 16-bit samples are in host order. */
static unsigned sample_at(const uint8_t *row, unsigned bits, size_t k) {
    if (bits == 8) return row[k];
    if (bits == 16) {
        uint16_t v;
        memcpy(&v, row + 2 * k, 2);
        return v;
    }
    unsigned v = 0;
    for (size_t bit = k * bits, left = bits; left;) {
        unsigned room = 8u - (unsigned)(bit % 8), take = left < room ? (unsigned)left : room;
        unsigned piece = ((unsigned)row[bit / 8] >> (room - take)) & ((1u << take) - 1u);
        v = v << take | piece;
        bit += take;
        left -= take;
    }
    return v;
}

static float level_of(const layout *l, unsigned v) {
    unsigned top = (1u << l->bits) - 1u;
    if (l->bits <= 8) return l->grey[v];
    return l->bits == 16 ? level_of_16(v) : (float)((double)v / (double)top);
}

static double half_float(unsigned v) { /* IEEE 754-2008, binary16 */
    int exponent = (int)(v >> 10 & 31u);
    double mantissa = (double)(v & 1023u), sign = v & 0x8000u ? -1.0 : 1.0;
    if (exponent == 31) return (double)NAN;
    return sign * (exponent ? ldexp(1024.0 + mantissa, exponent - 25) : ldexp(mantissa, -24));
}

#define AS(type, from)                                                                                       \
    do {                                                                                                     \
        type x;                                                                                              \
        memcpy(&x, (from), sizeof x);                                                                        \
        return (double)x;                                                                                    \
    } while (0)

/* A sample that is no level: its value. Samples are in host order. */
static double value_at(const layout *l, const uint8_t *row, size_t k) {
    const uint8_t *p = row + k * (l->bits / 8u);
    if (l->kind == KIND_FLOAT) {
        if (l->bits == 16) return half_float(sample_at(row, 16, k));
        if (l->bits == 32) AS(float, p);
        AS(double, p);
    }
    if (l->kind == KIND_SIGNED) {
        if (l->bits == 8) return (double)(int8_t)*p;
        if (l->bits == 16) AS(int16_t, p);
        if (l->bits == 32) AS(int32_t, p);
        AS(int64_t, p);
    }
    if (l->bits == 24) {
        const uint16_t one = 1;
        int little = *(const uint8_t *)&one == 1;
        return (double)((uint32_t)p[little ? 2 : 0] << 16 | (uint32_t)p[1] << 8 | p[little ? 0 : 2]);
    }
    if (l->bits == 32) AS(uint32_t, p);
    AS(uint64_t, p);
}

/* n values, less the first one of the picture so that a float holds their differences. */
static void to_values(layout *l, const uint8_t *row, size_t step, size_t n, float *to) {
    for (size_t x = 0; x < n; x++) {
        double v = value_at(l, row, x * step);
        if (!l->origin_known && isfinite(v)) {
            l->origin = v;
            l->origin_known = 1;
        }
        v -= l->origin;
        if (l->photometric == PHOTOMETRIC_MINISWHITE) v = -v;
        to[x] = fabs(v) < 1e38 ? (float)v : HUGE_VALF; /* NaN too: no value */
    }
}

/* Inks to light, as libtiff does it: each ink and black take their share away. */
static float ink_level(const layout *l, const uint8_t *row, size_t first, int *coloured) {
    float c[4];
    for (size_t k = 0; k < 4; k++) c[k] = 1.0f - level_of(l, sample_at(row, l->bits, first + k));
    *coloured = c[0] < c[1] || c[0] > c[1] || c[1] < c[2] || c[1] > c[2];
    float light = *coloured ? picture_luminance(c[0], c[1], c[2]) : c[0];
    return light * c[3];
}

/* n grey pixels from the rows of one to three planes; `step` samples from pixel to pixel. */
static void to_grey(layout *l, const uint8_t *const plane[3], size_t step, size_t n, float *to, flags *f) {
    unsigned flip = l->photometric == PHOTOMETRIC_MINISWHITE ? (1u << l->bits % 32u) - 1u : 0, colour = 0;
    if (l->kind != KIND_LEVELS) {
        to_values(l, plane[0], step, n, to);
        return;
    }
    if (l->planes == 1 && l->bits <= 8) {
        for (size_t x = 0; x < n; x++) {
            unsigned v = sample_at(plane[0], l->bits, x * step) ^ flip;
            to[x] = l->grey[v];
            colour |= l->coloured[v];
        }
    } else if (l->planes == 1) {
        for (size_t x = 0; x < n; x++) to[x] = level_of(l, sample_at(plane[0], l->bits, x * step) ^ flip);
    } else if (l->planes == 4) {
        for (size_t x = 0; x < n; x++) {
            int coloured;
            to[x] = ink_level(l, plane[0], x * step, &coloured);
            colour |= (unsigned)coloured;
        }
    } else {
        size_t apart = l->separate ? 0 : 1;
        for (size_t x = 0; x < n; x++) {
            float c[3];
            for (size_t k = 0; k < 3; k++)
                c[k] = level_of(l, sample_at(plane[apart ? 0 : k], l->bits, x * step + k * apart));
            int equal = !(c[0] < c[1] || c[0] > c[1] || c[1] < c[2] || c[1] > c[2]);
            colour |= (unsigned)!equal;
            to[x] = equal ? c[0] : picture_luminance(c[0], c[1], c[2]);
        }
    }
    if (colour) *f |= FLAG(COLOUR);
}

static status broken(const tiff_watch *w, const char *where, uint32_t at, error *e) {
    return fail(e, ST_BAD_INPUT, "the TIFF is truncated or damaged in %s %u: %s", where, at,
                w->what[0] ? w->what : "its data end early");
}

/* Separate planes are read in step, each through its own handle, so that memory stays at a row a plane. */
static status read_strips(TIFF *const tif[3], layout *l, const tiff_watch *w, picture *p, error *e) {
    int handles = l->separate && l->planes == 3 ? 3 : 1;
    size_t bytes = (size_t)TIFFScanlineSize64(tif[0]);
    size_t need = ((size_t)l->nx * (l->separate ? 1 : l->samples) * l->bits + 7) / 8;
    if (bytes < need) return fail(e, ST_BAD_INPUT, "is damaged: its rows are too short");
    uint8_t *row = mem_array(3, bytes);
    if (!row) return fail(e, ST_NO_MEMORY, "not enough memory for a row of %u pixels", l->nx);
    status st = ST_OK;
    for (uint32_t y = 0; st == ST_OK && y < l->ny; y++) {
        const uint8_t *plane[3] = { row, row + bytes, row + 2 * bytes };
        for (int k = 0; st == ST_OK && k < handles; k++)
            if (TIFFReadScanline(tif[k], row + (size_t)k * bytes, y, (uint16_t)k) != 1)
                st = broken(w, "row", y, e);
        if (st == ST_OK && w->damaged) st = broken(w, "row", y, e);
        if (st == ST_OK)
            to_grey(l, plane, l->separate ? 1 : l->samples, l->nx, p->px + (size_t)y * l->nx, &p->flags);
    }
    free(row);
    return st;
}

static void place_tile(layout *l, const uint8_t *tile, size_t size, uint32_t x0, uint32_t y0, picture *p) {
    size_t samples = l->separate ? 1 : l->samples;
    size_t row_bytes = ((size_t)l->tile_nx * samples * l->bits + 7) / 8;
    uint32_t nx = l->nx - x0 < l->tile_nx ? l->nx - x0 : l->tile_nx,
             ny = l->ny - y0 < l->tile_ny ? l->ny - y0 : l->tile_ny;
    for (uint32_t y = 0; y < ny; y++) {
        const uint8_t *plane[3];
        for (size_t k = 0; k < 3; k++)
            plane[k] = tile + (l->separate && l->planes == 3 ? k * size : 0) + y * row_bytes;
        to_grey(l, plane, samples, nx, p->px + (size_t)(y0 + y) * l->nx + x0, &p->flags);
    }
}

/* One tile, or one strip, of which the last may be lower. */
static int read_piece(TIFF *tif, const layout *l, uint32_t x, uint32_t y, uint16_t k, uint8_t *to, size_t size) {
    if (!l->whole_strips)
        return TIFFReadEncodedTile(tif, TIFFComputeTile(tif, x, y, 0, k), to, (tmsize_t)size) == (tmsize_t)size;
    tmsize_t want = (tmsize_t)TIFFVStripSize64(tif, l->ny - y < l->tile_ny ? l->ny - y : l->tile_ny);
    return TIFFReadEncodedStrip(tif, TIFFComputeStrip(tif, y, k), to, want) == want;
}

static status read_tiles(TIFF *tif, layout *l, const tiff_watch *w, picture *p, error *e) {
    size_t size = (size_t)(l->whole_strips ? TIFFVStripSize64(tif, l->tile_ny) : TIFFTileSize64(tif));
    size_t samples = l->separate ? 1 : l->samples;
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
    for (uint32_t y = 0; st == ST_OK && y < l->ny; y += l->tile_ny) {
        for (uint32_t x = 0; st == ST_OK && x < l->nx; x += l->tile_nx) {
            for (int k = 0; st == ST_OK && k < planes; k++) {
                if (!read_piece(tif, l, x, y, (uint16_t)k, tile + (size_t)k * size, size) || w->damaged)
                    st = broken(w, l->whole_strips ? "row" : "tile at row", y, e);
            }
            if (st == ST_OK) place_tile(l, tile, size, x, y, p);
            if (l->nx - x <= l->tile_nx) break; /* the sums above must not pass 2^32 */
        }
        if (l->ny - y <= l->tile_ny) break;
    }
    free(tile);
    return st;
}

/* Through libtiff's RGBA raster; asked for the picture's own orientation it does not turn anything. */
static status read_converted(TIFF *tif, const layout *l, const tiff_watch *w, picture *p, error *e) {
    uint16_t orientation = ORIENTATION_TOPLEFT;
    float table[256];
    size_t n = (size_t)l->nx * l->ny;
    (void)TIFFGetFieldDefaulted(tif, TIFFTAG_ORIENTATION, &orientation);
    uint32_t *raster = mem_array(n, sizeof *raster);
    if (!raster) return fail(e, ST_NO_MEMORY, "not enough memory for %u x %u pixels", l->nx, l->ny);
    int ok = TIFFReadRGBAImageOriented(tif, l->nx, l->ny, raster, orientation, 1);
    level_table(8, table);
    for (size_t i = 0; ok && i < n; i++) {
        unsigned r = TIFFGetR(raster[i]), g = TIFFGetG(raster[i]), b = TIFFGetB(raster[i]);
        int equal = r == g && g == b;
        if (!equal) p->flags |= FLAG(COLOUR);
        p->px[i] = equal ? table[r] : picture_luminance(table[r], table[g], table[b]);
    }
    free(raster);
    return ok && !w->damaged ? ST_OK : broken(w, "row", 0, e);
}

/* Fills pixels without a value from the pixel before them in the row, the row's first ones from the one
 * behind, whole rows from the row above or below. */
static void fill_gaps(picture *p) {
    for (size_t y = 0; y < p->ny; y++) {
        float *row = p->px + y * p->nx;
        size_t first = 0;
        while (first < p->nx && !isfinite(row[first])) first++;
        for (size_t x = 0; first < p->nx && x < first; x++) row[x] = row[first];
        for (size_t x = first; x < p->nx; x++)
            if (!isfinite(row[x])) row[x] = row[x - 1];
        if (first == p->nx && y) memcpy(row, row - p->nx, p->nx * sizeof *row);
    }
    for (size_t y = p->ny; y-- > 1;)
        if (!isfinite(p->px[(y - 1) * p->nx]))
            memcpy(p->px + (y - 1) * p->nx, p->px + y * p->nx, p->nx * sizeof *p->px);
}

/* Values without a known top to 0..1 by their own ends. */
static status scale_values(const layout *l, picture *p, error *e) {
    size_t n = p->nx * p->ny, gaps = 0;
    float low = HUGE_VALF, high = -HUGE_VALF;
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    for (size_t i = 0; i < n; i++) {
        float v = p->px[i];
        if (!isfinite(v)) {
            gaps++;
            continue;
        }
        low = v < low ? v : low;
        high = v > high ? v : high;
    }
    if ((double)gaps > few_without_value * (double)n)
        return fail(e, ST_BAD_INPUT, "%zu of its %zu pixels hold no number (NaN or infinite): more than 1 %%",
                    gaps, n);
    if (gaps) {
        p->flags |= FLAG(FILLED);
        note_add(p->note, "%zu pixels held no number and were filled from their neighbours.", gaps);
        fill_gaps(p);
    }
    double range = (double)high - (double)low;
    for (size_t i = 0; i < n; i++) {
        double v = range > 0.0 ? ((double)p->px[i] - (double)low) / range : 0.5;
        p->px[i] = (float)(v < 0.0 ? 0.0 : v > 1.0 ? 1.0 : v);
    }
    double sign = l->photometric == PHOTOMETRIC_MINISWHITE ? -1.0 : 1.0;
    note_add(p->note, "Values %s to %s became black to white.",
             number_text(l->origin + sign * (double)low, 6, a),
             number_text(l->origin + sign * (double)high, 6, b));
    return ST_OK;
}

/* What a codec can make of the bytes at most: copies cannot grow, deflate reaches 1032 to 1 (RFC 1951). */
static int claims_too_much(const layout *l, size_t n) {
    double bytes = (double)l->nx * l->ny * (l->converted ? 1.0 : l->samples) * l->bits / 8.0;
    if (l->compression == COMPRESSION_NONE) return bytes > (double)n;
    if (l->compression == COMPRESSION_ADOBE_DEFLATE || l->compression == COMPRESSION_DEFLATE)
        return bytes > 1100.0 * (double)n + 65536.0;
    if (l->compression == COMPRESSION_PACKBITS) return bytes > 64.0 * (double)n + 65536.0;
    if (l->compression == COMPRESSION_LZW) return bytes > 4096.0 * (double)n + 65536.0;
    return 0;
}

status tiff_pixels_read(TIFF *const tif[3], const tiff_watch *watch, size_t n_bytes, size_t max_pixels,
                        picture *p, error *e) {
    layout l = { 0 };
    status st = read_layout(tif[0], &l, e);
    if (st != ST_OK) return st;
    if (claims_too_much(&l, n_bytes))
        return fail(e, ST_BAD_INPUT,
                    "the file is too short for the %u x %u pixels it claims; it is truncated", l.nx, l.ny);
    st = picture_credible(l.nx, l.ny, n_bytes, e);
    if (st == ST_OK) st = picture_make(p, l.nx, l.ny, max_pixels, e);
    if (st != ST_OK) return st;
    p->bit_depth = l.converted ? 8 : l.bits;
    picture_set_text(p->compression, sizeof p->compression, compression_name(l.compression));
    if (is_lossy(l.compression)) p->flags |= FLAG(LOSSY);
    if (l.converted) return read_converted(tif[0], &l, watch, p, e);
    st = l.tile_nx ? read_tiles(tif[0], &l, watch, p, e) : read_strips(tif, &l, watch, p, e);
    if (st == ST_OK && l.kind != KIND_LEVELS) st = scale_values(&l, p, e);
    return st;
}

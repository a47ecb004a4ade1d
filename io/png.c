/* PNG in, through libpng: every colour type and depth, interlaced or not, to one plane of levels.
 * gAMA, sRGB, iCCP and the like do not touch the levels: they are data of a detector, not light for an eye.
 * Transparency is ignored. A file that ends early or whose image data do not pass their checks is refused,
 * never filled up. The only place where libpng's longjmp exists: png_decode is the frame it returns to.
 * Source: PNG (ISO/IEC 15948:2004; W3C third edition, 2025). */
#include <png.h>
#include <setjmp.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/picture_priv.h"
#include "io/metadata/public_tags_priv.h"
#include "io/metadata/scaletext_priv.h"
#include "io/metadata/xml_scale_priv.h"

typedef struct {
    const uint8_t *next;
    size_t left;
    int ran_out;
    char what[160]; /* libpng's words for what went wrong */
    uint8_t *row;   /* one row, or the whole image when interlaced */
    png_bytepp rows;
    picture p;
} decoder;

static void on_error(png_structp png, png_const_charp text) {
    decoder *d = png_get_error_ptr(png);
    snprintf(d->what, sizeof d->what, "%s", text);
    png_longjmp(png, 1);
}

static void on_warning(png_structp png, png_const_charp text) { (void)png, (void)text; }

static void on_read(png_structp png, png_bytep to, size_t n) {
    decoder *d = png_get_io_ptr(png);
    if (n > d->left) {
        d->ran_out = 1;
        png_error(png, "the file ends early");
    }
    memcpy(to, d->next, n);
    d->next += n;
    d->left -= n;
}

/* One grey row. `step` samples per pixel (1 grey, 3 RGB), 8-bit table or 16 bits in file order. */
static void row_to_grey(decoder *d, const uint8_t *row, size_t y, int depth, int channels,
                        const float *table) {
    float *to = d->p.px + y * d->p.nx;
    size_t nx = d->p.nx;
    if (channels == 1 && depth <= 8) {
        for (size_t x = 0; x < nx; x++) to[x] = table[row[x]];
    } else if (channels == 1) {
        for (size_t x = 0; x < nx; x++) to[x] = level_of_16((unsigned)row[2 * x] << 8 | row[2 * x + 1]);
    } else if (depth == 8) {
        for (size_t x = 0; x < nx; x++) {
            const uint8_t *c = row + 3 * x;
            if (c[0] == c[1] && c[1] == c[2]) {
                to[x] = table[c[0]];
                continue;
            }
            d->p.flags |= FLAG(COLOUR);
            to[x] = picture_luminance(table[c[0]], table[c[1]], table[c[2]]);
        }
    } else {
        for (size_t x = 0; x < nx; x++) {
            const uint8_t *c = row + 6 * x;
            unsigned r = (unsigned)c[0] << 8 | c[1], g = (unsigned)c[2] << 8 | c[3],
                     b = (unsigned)c[4] << 8 | c[5];
            if (r != g || g != b) d->p.flags |= FLAG(COLOUR);
            to[x] = r == g && g == b ? level_of_16(r)
                                     : picture_luminance(level_of_16(r), level_of_16(g), level_of_16(b));
        }
    }
}

/* A palette entry is 8 bits a channel; `known` entries exist. Returns 0 at an index beyond them. */
static int row_of_palette(decoder *d, const uint8_t *row, size_t y, const float *grey,
                          const uint8_t *coloured, unsigned known) {
    float *to = d->p.px + y * d->p.nx;
    for (size_t x = 0; x < d->p.nx; x++) {
        if (row[x] >= known) return 0;
        if (coloured[row[x]]) d->p.flags |= FLAG(COLOUR);
        to[x] = grey[row[x]];
    }
    return 1;
}

static unsigned palette_levels(png_structp png, png_infop info, float grey[256], uint8_t coloured[256]) {
    png_colorp c = NULL;
    int n = 0;
    float table[256];
    if (!png_get_PLTE(png, info, &c, &n)) return 0;
    level_table(8, table);
    for (int i = 0; i < n && i < 256; i++) {
        coloured[i] = c[i].red != c[i].green || c[i].green != c[i].blue;
        grey[i] = coloured[i] ? picture_luminance(table[c[i].red], table[c[i].green], table[c[i].blue])
                              : table[c[i].red];
    }
    return (unsigned)n;
}

static void read_scale(png_structp png, png_infop info, picture *p) {
    png_uint_32 x = 0, y = 0;
    int unit = 0;
    png_charp width = NULL, height = NULL;
    if (png_get_sCAL_s(png, info, &unit, &width, &height) && unit == PNG_SCALE_METER) {
        double w, h;
        if (scaletext_number(width, &w) && scaletext_number(height, &h))
            scales_add_u(&p->scales, SCALE_SCAL, "sCAL", w * 1e9, h * 1e9, scaletext_u_rel(width));
    }
    if (png_get_pHYs(png, info, &x, &y, &unit) && unit == PNG_RESOLUTION_METER && x && y)
        scales_add(&p->scales, SCALE_RESOLUTION, "pHYs", 1e9 / x, 1e9 / y);
}

/* A picture is stored as it is to be seen (PNG, 11.3.4.6: orientation there may be ignored). */
static void read_exif(png_structp png, png_infop info, picture *p) {
    png_uint_32 n = 0;
    png_bytep bytes = NULL;
    if (png_get_eXIf_1(png, info, &n, &bytes) && bytes) (void)exif_read(bytes, n, p);
}

static int is_ome(const char *text) {
    text += strspn(text, " \t\r\n");
    return !strncmp(text, "<?xml", 5) || !strncmp(text, "<OME", 4);
}

static void read_texts(png_structp png, png_infop info, picture *p) {
    png_textp texts = NULL;
    int n = 0;
    png_get_text(png, info, &texts, &n);
    for (int i = 0; i < n; i++)
        if (texts[i].text && is_ome(texts[i].text))
            ome_read(texts[i].text, strlen(texts[i].text), p->nx, NULL, p);
        else if (texts[i].text)
            scaletext_keyword(texts[i].key, texts[i].text, &p->scales);
}

/* Everything that may longjmp. Returns a status; libpng's own errors leave through the jump. */
static status decode(png_structp png, png_infop info, png_infop end, decoder *d, size_t max_pixels,
                     error *e) {
    float table[256], grey[256];
    uint8_t coloured[256] = { 0 };
    png_set_read_fn(png, d, on_read);
    png_set_user_limits(png, (png_uint_32)LIMIT_SIDE, (png_uint_32)LIMIT_SIDE);
    png_set_chunk_malloc_max(png, 1u << 20);
    png_set_chunk_cache_max(png, 200);
    png_read_info(png, info);
    png_uint_32 nx = png_get_image_width(png, info), ny = png_get_image_height(png, info);
    int depth = png_get_bit_depth(png, info), type = png_get_color_type(png, info);
    int bits = depth * png_get_channels(png, info);
    /* Deflate cannot pack more than 1032 to 1 (RFC 1951): a claim beyond that is a lie, refuse before
     * allocating. */
    if ((double)nx * ny * bits / 8.0 > 1100.0 * (double)d->left + 65536.0)
        return fail(e, ST_BAD_INPUT,
                    "the file is too short for the %u x %u pixels it claims; it is truncated", nx, ny);
    status st = picture_credible(nx, ny, d->left, e);
    if (st == ST_OK) st = picture_make(&d->p, nx, ny, max_pixels, e);
    if (st != ST_OK) return st;
    d->p.bit_depth = depth;
    png_set_packing(png);
    png_set_strip_alpha(png);
    int passes = png_set_interlace_handling(png);
    png_read_update_info(png, info);
    size_t row_bytes = png_get_rowbytes(png, info);
    int channels = png_get_channels(png, info), palette = type == PNG_COLOR_TYPE_PALETTE;
    unsigned known = palette ? palette_levels(png, info, grey, coloured) : 0;
    level_table(depth <= 8 ? depth : 8, table);
    d->row = mem_array(passes > 1 ? ny : 1, row_bytes);
    if (!d->row) return fail(e, ST_NO_MEMORY, "not enough memory for %u x %u pixels", nx, ny);
    if (passes > 1) {
        d->rows = mem_array(ny, sizeof *d->rows);
        if (!d->rows) return fail(e, ST_NO_MEMORY, "not enough memory for %u x %u pixels", nx, ny);
        for (size_t y = 0; y < ny; y++) d->rows[y] = d->row + y * row_bytes;
        png_read_image(png, d->rows);
    }
    for (size_t y = 0; y < ny; y++) {
        const uint8_t *row = d->row + (passes > 1 ? y * row_bytes : 0);
        if (passes == 1) png_read_row(png, d->row, NULL);
        if (!palette)
            row_to_grey(d, row, y, depth, channels, table);
        else if (!row_of_palette(d, row, y, grey, coloured, known))
            return fail(e, ST_BAD_INPUT,
                        "the PNG is damaged: a pixel names a colour its palette does not hold");
    }
    png_read_end(png, end);
    read_scale(png, info, &d->p);
    read_exif(png, info, &d->p);
    read_exif(png, end, &d->p);
    read_texts(png, info, &d->p);
    read_texts(png, end, &d->p);
    return ST_OK;
}

status png_decode(const uint8_t *bytes, size_t n, size_t max_pixels, picture *out, error *e) {
    /* Lives on the heap: its contents must be whole after a longjmp. */
    decoder *d = mem_array(1, sizeof *d);
    if (!d) return NO_MEMORY(e, "the PNG");
    d->next = bytes;
    d->left = n;
    status st = ST_NO_MEMORY;
    png_structp png = png_create_read_struct(PNG_LIBPNG_VER_STRING, d, on_error, on_warning);
    png_infop info = png ? png_create_info_struct(png) : NULL;
    png_infop end = info ? png_create_info_struct(png) : NULL;
    if (!end)
        fail(e, st, "not enough memory for the PNG");
    else if (setjmp(png_jmpbuf(png)))
        st = d->ran_out ? fail(e, ST_BAD_INPUT, "the PNG is truncated: the file ends inside its data")
                        : fail(e, ST_BAD_INPUT, "the PNG is damaged: %s", d->what);
    else
        st = decode(png, info, end, d, max_pixels, e);
    png_destroy_read_struct(&png, &info, &end);
    if (st == ST_OK) {
        *out = d->p;
        d->p = (picture){ 0 };
    }
    free(d->row);
    free(d->rows);
    picture_free(&d->p);
    free(d);
    return st;
}

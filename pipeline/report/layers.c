/* Each source pixel goes to the small pixel it falls into: grey levels as their mean, borders and marks as the strongest one. That
 * is a box average to within a source pixel, which a thumbnail cannot show. PNG through libpng's simplified interface. */
#include "report/layers.h"

#include <math.h>
#include <png.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/file.h"
#include "io/png_write.h"
#include "report/overlay_priv.h"

enum { WIDTH = 524 };                                    /* of the file: as wide as the page ever shows it */
enum { GREY, BORDER, APART, PARTS };                     /* channels of the file */
enum { NONE = 0, CUT = 128, STRIP = 255 };               /* levels of APART */
enum { FAINT_BORDER = 128, FULL_BORDER = 255 };          /* between two cut cells; of a whole one */

/* A picture that is being reduced. */
typedef struct {
    size_t nx, ny, small_nx, small_ny;
    float *sum;
    uint32_t *count;
    uint8_t *rgb; /* [small_ny][small_nx][PARTS] */
} reducer;

static void reducer_free(reducer *r) {
    free(r->sum);
    free(r->count);
    free(r->rgb);
}

static status reducer_make(size_t nx, size_t ny, size_t width, reducer *r, error *e) {
    *r = (reducer){ .nx = nx, .ny = ny, .small_nx = width < nx ? width : nx };
    r->small_ny = (size_t)lround((double)ny * (double)r->small_nx / (double)nx);
    if (!r->small_ny) r->small_ny = 1;
    size_t n = r->small_nx * r->small_ny;
    r->sum = mem_array(n, sizeof *r->sum);
    r->count = mem_array(n, sizeof *r->count);
    r->rgb = mem_array(n, PARTS);
    return r->sum && r->count && r->rgb ? ST_OK : NO_MEMORY(e, "a small copy of a micrograph");
}

static void put(reducer *r, size_t x, size_t y, double grey, uint8_t border, uint8_t apart) {
    size_t i = y * r->small_ny / r->ny * r->small_nx + x * r->small_nx / r->nx;
    r->sum[i] += (float)(grey > 1.0 ? 1.0 : grey > 0.0 ? grey : 0.0); /* also for a NaN: 0 */
    r->count[i]++;
    if (border > r->rgb[i * PARTS + BORDER]) r->rgb[i * PARTS + BORDER] = border;
    if (apart > r->rgb[i * PARTS + APART]) r->rgb[i * PARTS + APART] = apart;
}

static void settle(reducer *r) {
    for (size_t i = 0; i < r->small_nx * r->small_ny; i++)
        r->rgb[i * PARTS + GREY] = r->count[i] ? (uint8_t)lround(255.0 * (double)r->sum[i] / (double)r->count[i]) : 0;
}

static int is_whole(const texture *t, uint32_t label) { return label && label <= t->n_found && t->features[label - 1].weight > 0.0; }

static void put_plane(reducer *r, const micrograph *m, const texture *t, double low, double span, size_t top) {
    for (size_t y = 0; y < m->ny; y++)
        for (size_t x = 0; x < m->nx; x++) {
            size_t i = y * m->nx + x;
            uint8_t border = NONE, apart = NONE;
            if (t->cells) {
                uint32_t here = t->cells[i], right = x + 1 < m->nx ? t->cells[i + 1] : here, below = y + 1 < m->ny ? t->cells[i + m->nx] : here;
                int whole = is_whole(t, here);
                if (here && !whole) apart = CUT;
                if (right != here || below != here)
                    border = whole || is_whole(t, right) || is_whole(t, below) ? FULL_BORDER : FAINT_BORDER;
            }
            put(r, x, top + y, ((double)m->px[i] - low) / span, border, apart);
        }
}

static void put_strip(reducer *r, const micrograph *m, size_t from, size_t rows, size_t at) {
    for (size_t y = 0; y < rows; y++)
        for (size_t x = 0; x < m->nx; x++) put(r, x, at + y, (double)m->strip[(from + y) * m->nx + x], NONE, STRIP);
}

status layers_encode(const micrograph *m, const texture *t, uint8_t **bytes, size_t *n, error *e) {
    reducer r = { 0 };
    double low = 0.0, span = 1.0;
    if (t->cells && (t->nx != m->nx || t->ny != m->ny))
        return fail(e, ST_BUG, "the layers of a micrograph were asked for with a texture of another size");
    size_t above = m->strip ? m->strip_top : 0, strip = m->strip ? m->strip_rows : 0;
    status st = overlay_stretch(m, &low, &span, e);
    if (st == ST_OK) st = reducer_make(m->nx, m->ny + strip, WIDTH, &r, e);
    if (st == ST_OK) {
        put_strip(&r, m, 0, above, 0);
        put_plane(&r, m, t, low, span, above);
        put_strip(&r, m, above, strip - above, above + m->ny);
        settle(&r);
        png_format f = { r.small_nx, r.small_ny, 3, 8, 0.0 };
        st = png_encode(r.rgb, &f, bytes, n, e);
    }
    reducer_free(&r);
    return st;
}

/* ---- for the page ---- */

static status read_file(const char *path, uint8_t **rgb, size_t *nx, size_t *ny, error *e) {
    char *bytes = NULL;
    size_t n = 0;
    png_image image = { .version = PNG_IMAGE_VERSION };
    status st = file_read(path, LIMIT_FILE_BYTES, &bytes, &n, e);
    if (st) return st;
    int ok = png_image_begin_read_from_memory(&image, bytes, n) && image.width && image.width <= WIDTH &&
             image.height <= LIMIT_PIXELS / image.width;
    image.format = PNG_FORMAT_RGB;
    *rgb = ok ? mem_array((size_t)image.width * image.height, PARTS) : NULL;
    if (!ok) st = fail(e, ST_BAD_INPUT, "%s is no picture of layers", path);
    else if (!*rgb) st = NO_MEMORY(e, "the layers of a micrograph");
    else if (!png_image_finish_read(&image, NULL, *rgb, 0, NULL)) st = fail(e, ST_BAD_INPUT, "%s is damaged (%s)", path, image.message);
    *nx = image.width;
    *ny = image.height;
    png_image_free(&image);
    free(bytes);
    return st;
}

/* A PNG of at most four colours, the first of them transparent. */
static status encode_mask(const uint8_t *index, size_t nx, size_t ny, const uint8_t colours[4][4], uint8_t **bytes, size_t *n, error *e) {
    png_image image = { .version = PNG_IMAGE_VERSION, .width = (png_uint_32)nx, .height = (png_uint_32)ny,
                        .format = PNG_FORMAT_RGBA_COLORMAP, .colormap_entries = 4 };
    png_alloc_size_t room = 0;
    if (!png_image_write_to_memory(&image, NULL, &room, 0, index, 0, colours)) return fail(e, ST_NO_MEMORY, "a layer could not be encoded");
    *bytes = mem_array(room, 1);
    if (!*bytes) return NO_MEMORY(e, "a layer");
    if (!png_image_write_to_memory(&image, *bytes, &room, 0, index, 0, colours)) return fail(e, ST_NO_MEMORY, "a layer could not be encoded");
    *n = room;
    return ST_OK;
}

static size_t strip_rows(const reducer *r, size_t from, size_t step) {
    size_t n = 0;
    for (size_t y = from; n < r->small_ny && r->rgb[y * r->small_nx * PARTS + APART] == STRIP; y += step) n++;
    return n;
}

static status encode_masks(const reducer *r, page_layers *out, error *e) {
    static const uint8_t cell_ink[4][4] = { { 0, 0, 0, 0 }, { 0x5f, 0xd0, 0xff, 0x70 }, { 0x5f, 0xd0, 0xff, 0xd8 }, { 0, 0, 0, 0 } };
    static const uint8_t veil[4][4] = { { 0, 0, 0, 0 }, { 0x6b, 0x6b, 0x6b, 0x78 }, { 0, 0, 0, 0 }, { 0, 0, 0, 0 } };
    size_t n = r->small_nx * r->small_ny, bordered = 0, cut = 0;
    uint8_t *index = mem_array(n, 1);
    if (!index) return NO_MEMORY(e, "a layer");
    for (size_t i = 0; i < n; i++) {
        uint8_t v = r->rgb[i * PARTS + BORDER];
        index[i] = v == FULL_BORDER ? 2 : v ? 1 : 0;
        bordered += v != 0;
    }
    status st = bordered ? encode_mask(index, r->small_nx, r->small_ny, cell_ink, &out->cells, &out->n_cells, e) : ST_OK;
    for (size_t i = 0; i < n; i++) {
        index[i] = r->rgb[i * PARTS + APART] == CUT;
        cut += index[i];
    }
    if (st == ST_OK && cut) st = encode_mask(index, r->small_nx, r->small_ny, veil, &out->cut, &out->n_cut, e);
    free(index);
    return st;
}

static status encode_ground(const reducer *r, page_layers *out, error *e) {
    uint8_t *grey = mem_array(r->small_nx * r->small_ny, 1);
    if (!grey) return NO_MEMORY(e, "the layers of a micrograph");
    for (size_t i = 0; i < r->small_nx * r->small_ny; i++) grey[i] = r->rgb[i * PARTS + GREY];
    status st = jpeg_make(grey, r->small_nx, r->small_ny, 1, &out->ground, e);
    free(grey);
    return st;
}

status layers_read(const char *path, size_t width, page_layers *out, error *e) {
    uint8_t *rgb = NULL;
    size_t nx = 0, ny = 0;
    reducer r = { 0 };
    page_layers l = { 0 };
    status st = read_file(path, &rgb, &nx, &ny, e);
    if (st == ST_OK) st = reducer_make(nx, ny, width, &r, e);
    if (st == ST_OK) {
        for (size_t i = 0; i < nx * ny; i++)
            put(&r, i % nx, i / nx, rgb[i * PARTS + GREY] / 255.0, rgb[i * PARTS + BORDER], rgb[i * PARTS + APART]);
        settle(&r);
        l.nx = r.small_nx;
        l.ny = r.small_ny;
        l.strip_above = strip_rows(&r, 0, 1);
        l.strip_below = l.strip_above < r.small_ny ? strip_rows(&r, r.small_ny - 1, (size_t)-1) : 0;
        st = encode_ground(&r, &l, e);
    }
    if (st == ST_OK) st = encode_masks(&r, &l, e);
    if (st == ST_OK) *out = l;
    else page_layers_free(&l);
    reducer_free(&r);
    free(rgb);
    return st;
}

void page_layers_free(page_layers *l) {
    small_picture_free(&l->ground);
    free(l->cells);
    free(l->cut);
    *l = (page_layers){ 0 };
}

/* Box average in two passes over exact pixel shares (columns, then rows), sums in double. Reads PNG through libpng's
 * simplified interface, which keeps its jumps to itself; writes JPEG, a fifth of the size of PNG for a noisy picture. */
#include "report/thumbnail.h"

#include <math.h>
#include <png.h>
#include <setjmp.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <jpeglib.h> /* wants FILE and size_t */

#include "base/limits.h"
#include "base/mem.h"
#include "io/file.h"
#include "io/memo.h"

enum { QUALITY = 72 };

/* Adds source pixels [from, to) (fractions included) of `n`, `step` apart, weighted by their share. */
static double average(const float *src, size_t n, size_t step, double from, double to) {
    double sum = 0.0;
    for (size_t i = (size_t)from; i < n && (double)i < to; i++) {
        double share = fmin(to, (double)i + 1.0) - fmax(from, (double)i);
        sum += share * (double)src[i * step];
    }
    return sum / (to - from);
}

status box_average(const uint8_t *rgb, size_t nx, size_t ny, size_t width, uint8_t **small, size_t *small_ny,
                   error *e) {
    double ratio = (double)nx / (double)width;
    size_t height = (size_t)lround((double)ny / ratio);
    if (!height) height = 1;
    double ratio_y = (double)ny / (double)height;
    float *line = mem_array(nx * 3, sizeof *line), *half = mem_array(ny * width, 3 * sizeof *half);
    uint8_t *out = mem_array(height * width, 3);
    status st = ST_OK;
    if (!line || !half || !out) {
        st = NO_MEMORY(e, "a small copy of the overlay");
        goto done;
    }
    for (size_t y = 0; y < ny; y++) {
        for (size_t i = 0; i < nx * 3; i++) line[i] = (float)rgb[y * nx * 3 + i];
        for (size_t x = 0; x < width; x++)
            for (size_t k = 0; k < 3; k++)
                half[(y * width + x) * 3 + k] =
                    (float)average(line + k, nx, 3, (double)x * ratio, ((double)x + 1.0) * ratio);
    }
    for (size_t y = 0; y < height; y++)
        for (size_t i = 0; i < width * 3; i++)
            out[y * width * 3 + i] = (uint8_t)lround(average(half + i, ny, width * 3, (double)y * ratio_y,
                                                             fmin((double)ny, ((double)y + 1.0) * ratio_y)));
    *small = out;
    *small_ny = height;
    out = NULL;
done:
    free(line);
    free(half);
    free(out);
    return st;
}

static status decode(const char *path, uint8_t **rgb, size_t *nx, size_t *ny, error *e) {
    char *bytes = NULL;
    size_t n = 0;
    png_image image = { .version = PNG_IMAGE_VERSION };
    uint8_t *pixels = NULL;
    status st = file_read(path, LIMIT_FILE_BYTES, &bytes, &n, e);
    if (st) return st;
    if (!png_image_begin_read_from_memory(&image, bytes, n)) {
        st = fail(e, ST_BAD_INPUT, "%s is no PNG picture (%s)", path, image.message);
        goto done;
    }
    image.format = PNG_FORMAT_RGB;
    if (!image.width || !image.height || image.width > LIMIT_PIXELS / image.height) {
        st = fail(e, ST_BAD_INPUT, "%s is too large for an overlay", path);
        goto done;
    }
    pixels = mem_array((size_t)image.width * image.height, 3);
    if (!pixels) {
        st = NO_MEMORY(e, "an overlay");
    } else if (!png_image_finish_read(&image, NULL, pixels, 0, NULL)) {
        st = fail(e, ST_BAD_INPUT, "%s is damaged (%s)", path, image.message);
    } else {
        *rgb = pixels;
        *nx = image.width;
        *ny = image.height;
        pixels = NULL;
    }
done:
    png_image_free(&image);
    free(pixels);
    free(bytes);
    return st;
}

/* libjpeg's errors come back by longjmp to jpeg_make, the only place here that has one. */
typedef struct {
    struct jpeg_error_mgr manager; /* first: libjpeg knows only this */
    jmp_buf back;
} encoder;

static void on_error(j_common_ptr c) { longjmp(((encoder *)(void *)c->err)->back, 1); }
static void on_message(j_common_ptr c) { (void)c; }

/* Everything that may longjmp. Colour at full resolution: the marks are one pixel wide. */
static void compress(struct jpeg_compress_struct *j, const uint8_t *samples, size_t nx, size_t ny, int channels, unsigned char **bytes,
                     unsigned long *n) {
    jpeg_mem_dest(j, bytes, n);
    j->image_width = (JDIMENSION)nx;
    j->image_height = (JDIMENSION)ny;
    j->input_components = channels;
    j->in_color_space = channels == 3 ? JCS_RGB : JCS_GRAYSCALE;
    jpeg_set_defaults(j);
    jpeg_set_quality(j, QUALITY, TRUE);
    j->comp_info[0].h_samp_factor = j->comp_info[0].v_samp_factor = 1;
    j->dct_method = JDCT_ISLOW; /* the same bytes on every machine */
    j->optimize_coding = TRUE;
    jpeg_start_compress(j, TRUE);
    for (size_t y = 0; y < ny; y++) {
        uint8_t *line = (uint8_t *)(uintptr_t)(samples + y * nx * (size_t)channels); /* libjpeg only reads it */
        if (jpeg_write_scanlines(j, &line, 1) != 1) j->err->error_exit((j_common_ptr)j);
    }
    jpeg_finish_compress(j);
}

status jpeg_make(const uint8_t *samples, size_t nx, size_t ny, int channels, small_picture *out, error *e) {
    /* On the heap: their contents must be whole after a longjmp. */
    typedef struct {
        struct jpeg_compress_struct j;
        encoder errors;
        unsigned char *bytes;
        unsigned long n;
    } work;
    work *w = mem_array(1, sizeof *w);
    if (!w) return NO_MEMORY(e, "a small picture");
    status st = ST_OK;
    w->j.err = jpeg_std_error(&w->errors.manager);
    w->errors.manager.error_exit = on_error;
    w->errors.manager.output_message = on_message;
    if (setjmp(w->errors.back)) {
        st = fail(e, ST_NO_MEMORY, "a small picture of the overlay could not be encoded");
    } else {
        jpeg_create_compress(&w->j);
        compress(&w->j, samples, nx, ny, channels, &w->bytes, &w->n);
    }
    jpeg_destroy_compress(&w->j);
    if (st) {
        free(w->bytes);
    } else {
        *out = (small_picture){ w->bytes, (size_t)w->n, nx, ny };
    }
    free(w);
    return st;
}

static status encode_middle(const uint8_t *rgb, size_t nx, size_t ny, size_t cut_nx, size_t cut_ny,
                            small_picture *out, error *e) {
    if (cut_nx > nx) cut_nx = nx;
    if (cut_ny > ny) cut_ny = ny;
    uint8_t *cut = mem_array(cut_nx * cut_ny, 3);
    if (!cut) return NO_MEMORY(e, "a detail of the overlay");
    size_t x0 = (nx - cut_nx) / 2, y0 = (ny - cut_ny) / 2;
    for (size_t y = 0; y < cut_ny; y++)
        memcpy(cut + y * cut_nx * 3, rgb + ((y0 + y) * nx + x0) * 3, cut_nx * 3);
    status st = jpeg_make(cut, cut_nx, cut_ny, 3, out, e);
    free(cut);
    return st;
}

status thumbnail_make(const char *path, size_t width, size_t detail_nx, size_t detail_ny, small_picture *whole,
                      small_picture *detail, error *e) {
    uint8_t *full = NULL, *small = NULL;
    size_t nx = 0, ny = 0, small_ny = 0;
    status st = decode(path, &full, &nx, &ny, e);
    if (st) return st;
    size_t small_nx = width < nx ? width : nx;
    if (width) st = box_average(full, nx, ny, small_nx, &small, &small_ny, e);
    if (!st && width) st = jpeg_make(small, small_nx, small_ny, 3, whole, e);
    if (!st && detail_nx && detail_ny) st = encode_middle(full, nx, ny, detail_nx, detail_ny, detail, e);
    free(full);
    free(small);
    return st;
}

/* An entry: size, columns and rows of both pictures, then their bytes. */
enum { NUMBERS = 6 };
static const char remembered[] = "pictures-1";

static int recall(const char *cache, const char *key, small_picture *whole, small_picture *detail) {
    char *bytes = NULL;
    uint64_t v[NUMBERS];
    size_t n = 0;
    if (!memo_get(cache, key, remembered, &bytes, &n)) return 0;
    int ok = n >= sizeof v;
    if (ok) {
        memcpy(v, bytes, sizeof v);
        n -= sizeof v;
        ok = v[0] <= n && v[3] == n - v[0];
    }
    small_picture *both[] = { whole, detail };
    for (size_t i = 0, at = sizeof v; ok && i < 2; at += v[3 * i], i++) {
        uint8_t *jpeg = mem_array(v[3 * i], 1);
        ok = jpeg != NULL;
        if (!ok) break;
        memcpy(jpeg, bytes + at, v[3 * i]);
        *both[i] = (small_picture){ jpeg, v[3 * i], v[3 * i + 1], v[3 * i + 2] };
    }
    free(bytes);
    return ok;
}

static void remember(const char *cache, const char *key, const small_picture *whole, const small_picture *detail) {
    const uint64_t v[NUMBERS] = { whole->n, whole->nx, whole->ny, detail->n, detail->nx, detail->ny };
    textbuf body = { 0 };
    text_add_n(&body, (const char *)v, sizeof v);
    if (whole->n) text_add_n(&body, (const char *)whole->jpeg, whole->n);
    if (detail->n) text_add_n(&body, (const char *)detail->jpeg, detail->n);
    if (!body.failed) (void)memo_put(cache, key, remembered, &body, NULL); /* the page goes without */
    text_free(&body);
}

status thumbnail_recall(const char *cache, const char *mark, const char *path, size_t width, size_t detail_nx, size_t detail_ny,
                        small_picture *whole, small_picture *detail, error *e) {
    char key[65], text[160];
    if (!cache || !mark || !mark[0]) return thumbnail_make(path, width, detail_nx, detail_ny, whole, detail, e);
    int n = snprintf(text, sizeof text, "%s|%zu|%zu|%zu|%d", mark, width, detail_nx, detail_ny, (int)QUALITY);
    sha256_hex(text, n > 0 ? (size_t)n : 0, key);
    if (recall(cache, key, whole, detail)) return ST_OK;
    small_picture_free(whole);
    small_picture_free(detail);
    status st = thumbnail_make(path, width, detail_nx, detail_ny, whole, detail, e);
    if (!st) remember(cache, key, whole, detail);
    return st;
}

void small_picture_free(small_picture *s) {
    free(s->jpeg);
    *s = (small_picture){ 0 };
}

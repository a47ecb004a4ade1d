/* JPEG in, through libjpeg-turbo: grey, YCbCr, RGB, CMYK and YCCK, baseline and progressive, 8 bits, to one
 * plane of levels. Always flagged LOSSY: the compression has altered noise and edges, whatever its quality. A
 * stream that breaks off or whose codes are damaged is refused; the library would paint the rest grey. The
 * only place where libjpeg's longjmp exists: jpeg_decode is the frame it returns to. Source: ITU-T T.81
 * (1992); JFIF 1.02 (1992) and Exif 2.3 for resolution, which stays behind the 1 um gate, text and orientation. */
#include <setjmp.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* needs size_t and FILE before it */
#include <jpeglib.h>

#include <jerror.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/picture_priv.h"
#include "io/metadata/public_tags_priv.h"
#include "io/metadata/scaletext_priv.h"

enum { MAX_SCANS = 200, MAX_MARKER = 65535, EXIF_HEAD = 6 };

typedef struct {
    struct jpeg_error_mgr manager; /* first: libjpeg knows only this */
    struct jpeg_progress_mgr progress;
    jmp_buf back;
    char what[JMSG_LENGTH_MAX];
    int damaged;
    int orientation; /* by Exif, 1 to 8 */
    int unknown;     /* a process or precision the library does not have */
    int upright; /* inks as inks; what is usual is inks stored inverted, as light */
    uint8_t *row;
    picture p;
} decoder;

static decoder *decoder_of(j_common_ptr c) { return (decoder *)(void *)c->err; }

static void leave(j_common_ptr c) { longjmp(decoder_of(c)->back, 1); }

static void on_error(j_common_ptr c) {
    decoder *d = decoder_of(c);
    if (!d->what[0]) d->manager.format_message(c, d->what);
    int code = d->manager.msg_code;
    d->unknown = code == JERR_BAD_PRECISION || code == JERR_SOF_UNSUPPORTED || code == JERR_ARITH_NOTIMPL;
    leave(c);
}

/* Warnings that change pixels end the decoding; the others are habits of writers. */
static void on_message(j_common_ptr c, int level) {
    decoder *d = decoder_of(c);
    int code = d->manager.msg_code;
    if (level >= 0 || code == JWRN_EXTRANEOUS_DATA || code == JWRN_ADOBE_XFORM || code == JWRN_JFIF_MAJOR)
        return;
    if (!d->damaged) d->manager.format_message(c, d->what);
    d->damaged = 1;
    leave(c);
}

static void on_output(j_common_ptr c) { (void)c; }

/* Thousands of empty scans are a way to keep a decoder busy. */
static void on_progress(j_common_ptr c) {
    decoder *d = decoder_of(c);
    if (!c->is_decompressor || ((j_decompress_ptr)(void *)c)->input_scan_number <= MAX_SCANS) return;
    snprintf(d->what, sizeof d->what, "more than %d scans", MAX_SCANS);
    leave(c);
}

static void row_to_grey(decoder *d, size_t y, int channels, const float table[256]) {
    float *to = d->p.px + y * d->p.nx;
    const uint8_t *c = d->row;
    unsigned coloured = 0;
    for (size_t x = 0; x < d->p.nx; x++, c += channels) {
        if (channels == 1) {
            to[x] = table[c[0]];
            continue;
        }
        unsigned flip = d->upright ? 255 : 0, r = c[0] ^ flip, g = c[1] ^ flip, b = c[2] ^ flip;
        coloured |= r != g || g != b;
        to[x] = r == g && g == b ? table[r] : picture_luminance(table[r], table[g], table[b]);
        if (channels == 4) to[x] *= table[c[3] ^ flip];
    }
    if (coloured) d->p.flags |= FLAG(COLOUR);
}

static void read_texts(const struct jpeg_decompress_struct *j, decoder *d) {
    picture *p = &d->p;
    if (j->saw_JFIF_marker && j->density_unit && j->X_density && j->Y_density) {
        double unit = j->density_unit == 1 ? 2.54e7 : 1e7;
        scales_add(&p->scales, SCALE_RESOLUTION, "resolution", unit / j->X_density, unit / j->Y_density);
    }
    for (const struct jpeg_marker_struct *m = j->marker_list; m; m = m->next) {
        char *text = m->marker == JPEG_COM ? mem_text_n((const char *)m->data, m->data_length) : NULL;
        if (text) scaletext_keyword("Comment", text, &p->scales);
        free(text);
        if (m->marker == JPEG_APP0 + 1 && m->data_length > EXIF_HEAD && !memcmp(m->data, "Exif\0", EXIF_HEAD))
            d->orientation = exif_read(m->data + EXIF_HEAD, m->data_length - EXIF_HEAD, p);
    }
}

/* Everything that may longjmp. */
static status decode(struct jpeg_decompress_struct *j, decoder *d, const uint8_t *bytes, size_t n,
                     size_t max_pixels, error *e) {
    float table[256];
    jpeg_mem_src(j, bytes, (unsigned long)n);
    jpeg_save_markers(j, JPEG_COM, MAX_MARKER);
    jpeg_save_markers(j, JPEG_APP0 + 1, MAX_MARKER);
    (void)jpeg_read_header(j, TRUE);
    int colour = j->jpeg_color_space == JCS_CMYK || j->jpeg_color_space == JCS_YCCK ? 4
                 : j->num_components == 1                                           ? 1
                                                                                    : 3;
    j->out_color_space = colour == 4 ? JCS_CMYK : colour == 3 ? JCS_RGB : JCS_GRAYSCALE;
    d->upright = colour == 4 && !j->saw_Adobe_marker;
    j->dct_method = JDCT_ISLOW;
    j->mem->max_memory_to_use = (long)(LIMIT_ALLOCATION_BYTES / 2);
    status st = picture_credible(j->image_width, j->image_height, n, e);
    if (st == ST_OK) st = picture_make(&d->p, j->image_width, j->image_height, max_pixels, e);
    if (st != ST_OK) return st;
    d->row = mem_array(j->image_width, (size_t)colour);
    if (!d->row) return NO_MEMORY(e, "a row of the JPEG");
    d->p.bit_depth = 8;
    d->p.flags |= FLAG(LOSSY);
    picture_set_text(d->p.compression, sizeof d->p.compression, "jpeg");
    level_table(8, table);
    (void)jpeg_start_decompress(j);
    while (j->output_scanline < j->output_height) {
        size_t y = j->output_scanline;
        JSAMPROW row = d->row;
        if (jpeg_read_scanlines(j, &row, 1) == 1) row_to_grey(d, y, colour, table);
    }
    read_texts(j, d); /* finishing frees the markers */
    (void)jpeg_finish_decompress(j);
    return picture_turn(&d->p, d->orientation, e);
}

status jpeg_decode(const uint8_t *bytes, size_t n, size_t max_pixels, picture *out, error *e) {
    /* Both live on the heap: their contents must be whole after a longjmp. */
    decoder *d = mem_array(1, sizeof *d);
    struct jpeg_decompress_struct *j = mem_array(1, sizeof *j);
    status st = ST_OK;
    if (!d || !j) {
        free(d);
        free(j);
        return NO_MEMORY(e, "the JPEG");
    }
    j->err = jpeg_std_error(&d->manager);
    d->manager.error_exit = on_error;
    d->manager.emit_message = on_message;
    d->manager.output_message = on_output;
    d->progress.progress_monitor = on_progress;
    if (setjmp(d->back))
        st = d->unknown
                 ? fail(e, ST_BAD_INPUT,
                        "is a JPEG of a kind that is not read (%s); export the micrograph as TIFF or PNG", d->what)
                 : fail(e, ST_BAD_INPUT, "the JPEG is truncated or damaged: %s", d->what);
    else {
        jpeg_create_decompress(j);
        j->progress = &d->progress;
        st = decode(j, d, bytes, n, max_pixels, e);
    }
    jpeg_destroy_decompress(j);
    if (st == ST_OK) {
        *out = d->p;
        d->p = (picture){ 0 };
    }
    free(d->row);
    picture_free(&d->p);
    free(d);
    free(j);
    return st;
}

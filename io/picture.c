/* The decoded picture and the list of statements about its scale: made, filled, freed. */
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/picture_priv.h"
#include "io/utf8_priv.h"

void scales_add(scales *s, scale_rank rank, const char *name, double x_nm, double y_nm) {
    scales_add_u(s, rank, name, x_nm, y_nm, (double)NAN);
}

void scales_add_u(scales *s, scale_rank rank, const char *name, double x_nm, double y_nm, double u_rel) {
    if (isnan(y_nm)) y_nm = x_nm;
    size_t room =
        rank <= SCALE_SIDECAR ? MAX_SCALES : MAX_SCALES - 4; /* the file never crowds the user out */
    if (s->n >= room || !(x_nm > 0.0) || !(y_nm > 0.0) || !isfinite(x_nm) || !isfinite(y_nm)) return;
    scale *k = &s->list[s->n++];
    *k = (scale){ .rank = rank, .x_nm = x_nm, .y_nm = y_nm, .u_rel = u_rel };
    snprintf(k->name, sizeof k->name, "%s", name);
}

void note_add(char note[MAX_NOTE], const char *fmt, ...) {
    size_t n = strlen(note);
    if (n + 2 >= MAX_NOTE) return;
    if (n) note[n++] = ' ';
    va_list args;
    va_start(args, fmt);
    int want = vsnprintf(note + n, MAX_NOTE - n, fmt, args);
    va_end(args);
    if (want < 0) note[n] = '\0';
    if (want < 0 || (size_t)want < MAX_NOTE - n) return;
    char *blank = strrchr(note, ' '); /* never half a word, never half a UTF-8 sequence */
    if (blank) *blank = '\0';
}

void picture_free(picture *p) {
    free(p->px);
    *p = (picture){ 0 };
}

status picture_make(picture *p, size_t nx, size_t ny, size_t max_pixels, error *e) {
    if (!nx || !ny) return fail(e, ST_BAD_INPUT, "the picture has no pixels (%zu x %zu)", nx, ny);
    if (nx > LIMIT_SIDE || ny > LIMIT_SIDE || nx > max_pixels / ny)
        return fail(e, ST_NO_MEMORY,
                    "the picture is too large: %zu x %zu pixels, at most %zu a side and %zu in all", nx, ny,
                    LIMIT_SIDE, max_pixels);
    p->px = mem_array(nx * ny, sizeof *p->px);
    if (!p->px) return fail(e, ST_NO_MEMORY, "not enough memory for %zu x %zu pixels", nx, ny);
    p->nx = nx;
    p->ny = ny;
    return ST_OK;
}

status picture_credible(size_t nx, size_t ny, size_t file_bytes, error *e) {
    /* Noise does not compress: micrographs hold a byte for 1 to 20 pixels, JPEG included. */
    if (nx * ny <= LIMIT_PACKED_PIXELS || nx * ny / LIMIT_PIXELS_PER_BYTE <= file_bytes) return ST_OK;
    return fail(e, ST_BAD_INPUT,
                "a file of %zu bytes unpacks to %zu x %zu pixels: no micrograph, its content is empty or a decompression bomb",
                file_bytes, nx, ny);
}

void picture_set_text(char *to, size_t size, const char *text) {
    size_t n = 0;
    while (*text && n + 1 < size) {
        size_t k = utf8_step(text);
        if (k > 1 && n + k >= size) break;
        if (k <= 1)
            to[n++] = (unsigned char)*text < 0x20 || *text == 0x7f ? ' ' : k ? *text : '?', text++;
        else
            memcpy(to + n, text, k), n += k, text += k;
    }
    while (n && to[n - 1] == ' ') n--;
    to[n] = '\0';
}

static void swap_scales(scales *s) {
    for (size_t i = 0; i < s->n; i++) {
        double x = s->list[i].x_nm;
        s->list[i].x_nm = s->list[i].y_nm;
        s->list[i].y_nm = x;
    }
}

status picture_turn(picture *p, int orientation, error *e) {
    if (orientation <= 1 || orientation > 8) return ST_OK;
    size_t nx = p->nx, ny = p->ny;
    int transposed = orientation >= 5;
    float *to = mem_array(nx * ny, sizeof *to);
    if (!to) return NO_MEMORY(e, "the turned picture");
    /* Stored column 0 is seen at the right in 2, 3; row 0 at the bottom in 3, 4; in 5 to 8 rows are columns. */
    int from_right = orientation == 2 || orientation == 3 || orientation == 7 || orientation == 8;
    int from_bottom = orientation == 3 || orientation == 4 || orientation == 6 || orientation == 7;
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx; x++) {
            size_t u = from_right ? nx - 1 - x : x, v = from_bottom ? ny - 1 - y : y;
            to[transposed ? u * ny + v : v * nx + u] = p->px[y * nx + x];
        }
    free(p->px);
    p->px = to;
    p->strip_stated = 0; /* its rows are no longer at the bottom */
    if (transposed) {
        p->nx = ny;
        p->ny = nx;
        swap_scales(&p->scales);
    }
    return ST_OK;
}

void picture_set_time(picture *p, int year, int month, int day, int hour, int minute, int second) {
    if (year < 1980 || year > 9999 || month < 1 || month > 12 || day < 1 || day > 31 || hour < 0 ||
        hour > 23 || minute < 0 || minute > 59 || second < 0 || second > 60)
        return;
    snprintf(p->acquired_at, sizeof p->acquired_at, "%04d-%02d-%02dT%02d:%02d:%02d", year, month, day, hour,
             minute, second);
}

void level_table(int bits, float table[256]) {
    unsigned top = (1u << bits) - 1u;
    for (unsigned v = 0; v < 256; v++) table[v] = v < top ? (float)((double)v / top) : 1.0f;
}

float level_of_16(unsigned v) { return (float)((double)v / 65535.0); }

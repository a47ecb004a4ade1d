/* One file per entry: a line that names the format, the body, the SHA-256 of both. The body lists every member of the
 * texture in a fixed order through one pair of functions, so that reading and writing cannot drift apart. */
#include "app/cache.h"

#include <inttypes.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/quantities.h"
#include "base/limits.h"
#include "base/mem.h"
#include "base/text.h"
#include "io/file.h"

static const char head[] = "sward texture 4\n";
enum { HASH = 64 };

/* Either appends to `out` or takes from bytes[at..n). */
typedef struct {
    textbuf *out;
    const char *bytes;
    size_t at, n;
    int failed;
} stream;

static void pass(stream *s, void *value, size_t size) {
    if (s->out) {
        text_add_n(s->out, value, size);
    } else if (s->failed || size > s->n - s->at) {
        s->failed = 1;
    } else {
        memcpy(value, s->bytes + s->at, size);
        s->at += size;
    }
}

static void pass_number(stream *s, double *v) { pass(s, v, sizeof *v); }

static void pass_count(stream *s, size_t *v) {
    uint64_t wide = *v;
    pass(s, &wide, sizeof wide);
    *v = (size_t)wide;
}

static void pass_int(stream *s, int *v) { pass(s, v, sizeof *v); }

static void pass_feature(stream *s, feature *f) {
    double *numbers[] = { &f->x, &f->y, &f->response, &f->cell_area_px2, &f->cell_ecd_px, &f->top_ecd_px,
                          &f->feret_max_px, &f->feret_min_px, &f->perimeter_px, &f->nn_px, &f->weight };
    int *whole[] = { &f->box_x0, &f->box_y0, &f->box_x1, &f->box_y1, &f->n_neighbours, &f->in_guard };
    for (size_t i = 0; i < sizeof numbers / sizeof numbers[0]; i++) pass_number(s, numbers[i]);
    for (size_t i = 0; i < sizeof whole / sizeof whole[0]; i++) pass_int(s, whole[i]);
}

/* Curve names and units are words of the program: kept as an index into this list. */
static const char *const words[] = { "acf", "acf_curvature", "psd_curvature", "pair_correlation", "px", "1/px",
                                     "1",   "px2",           "psd",           "ripley_l" };

static void pass_word(stream *s, const char **word) {
    size_t k = 0, n = sizeof words / sizeof words[0];
    if (s->out)
        while (k < n && strcmp(words[k], *word)) k++;
    pass_count(s, &k);
    if (k >= n) s->failed = 1;
    else *word = words[k];
}

/* Makes room for n elements when reading; the count must be covered by the bytes that are left. */
static void *reading_room(stream *s, size_t n, size_t size) {
    if (s->failed || n > (s->n - s->at) / 8) {
        s->failed = 1;
        return NULL;
    }
    void *block = mem_array(n, size);
    if (!block) s->failed = 1;
    return block;
}

static void pass_texture(stream *s, texture *t) {
    int relief_word = (int)t->relief;
    pass_int(s, &relief_word);
    t->relief = (relief)relief_word;
    for (int q = 0; q < QUANTITIES; q++) {
        measured *m = (measured *)(void *)((char *)t + quantity_table[q].in_texture);
        pass_number(s, &m->value);
        pass_number(s, &m->u_sampling);
        pass_number(s, &m->u_method);
        pass_count(s, &m->n);
    }
    double *numbers[] = { &t->relief_skew, &t->clipped_share, &t->lognormal_ad, &t->ring_z, &t->second_spacing_px,
                          &t->count_u_rel, &t->pair_ring_px, &t->pair_ring_height };
    for (size_t i = 0; i < sizeof numbers / sizeof numbers[0]; i++) pass_number(s, numbers[i]);
    pass_count(s, &t->n_features);
    pass(s, &t->reasons, sizeof t->reasons);
    pass(s, &t->flags, sizeof t->flags);
    pass_count(s, &t->nx);
    pass_count(s, &t->ny);

    size_t n = t->n_found;
    pass_count(s, &n);
    if (!s->out && (t->features = reading_room(s, n, sizeof *t->features))) t->n_found = n;
    for (size_t i = 0; i < n && !s->failed; i++) pass_feature(s, &t->features[i]);

    size_t curves = t->n_curves;
    pass_count(s, &curves);
    if (curves > MAX_CURVES) s->failed = 1;
    for (size_t k = 0; k < curves && !s->failed; k++) {
        curve *c = &t->curves[k];
        pass_word(s, &c->name);
        pass_word(s, &c->x_unit);
        pass_word(s, &c->y_unit);
        pass_count(s, &c->n);
        if (!s->out) {
            c->points = reading_room(s, c->n, sizeof *c->points);
            t->n_curves = k + 1;
        }
        for (size_t i = 0; i < c->n && !s->failed; i++) {
            pass_number(s, &c->points[i].x);
            pass_number(s, &c->points[i].y);
        }
    }
}

static char *entry_path(const char *folder, const char *key) {
    char name[80];
    snprintf(name, sizeof name, "%.64s.bin", key);
    return path_join(folder, name);
}

int cache_get(const char *folder, const char *key, texture *t, char overlay_hash[65]) {
    char *path = entry_path(folder, key), *bytes = NULL;
    size_t n = 0;
    texture made = { 0 };
    int ok = 0;
    if (!path || file_read(path, LIMIT_FILE_BYTES, &bytes, &n, NULL) != ST_OK) goto done;
    size_t head_n = sizeof head - 1;
    if (n < head_n + 2 * HASH || memcmp(bytes, head, head_n)) goto done;
    char sum[65];
    sha256_hex(bytes, n - HASH, sum);
    if (memcmp(sum, bytes + n - HASH, HASH)) goto done;
    stream s = { .bytes = bytes, .at = head_n, .n = n - HASH };
    pass(&s, overlay_hash, HASH);
    overlay_hash[HASH] = '\0';
    pass_texture(&s, &made);
    ok = !s.failed && s.at == s.n;
    if (ok) {
        *t = made;
        made = (texture){ 0 };
    }
done:
    texture_free(&made);
    free(bytes);
    free(path);
    return ok;
}

status cache_put(const char *folder, const char *key, const texture *t, const char *overlay_hash, error *e) {
    textbuf out = { 0 };
    char *path = entry_path(folder, key), overlay[65] = "", sum[65];
    texture copy = *t; /* pass_texture only reads when it writes out */
    stream s = { .out = &out };
    text_add(&out, head);
    snprintf(overlay, sizeof overlay, "%-64.64s", overlay_hash);
    text_add_n(&out, overlay, HASH);
    pass_texture(&s, &copy);
    status st = s.failed ? fail(e, ST_BUG, "a curve of the texture has a name the cache does not know")
                         : text_check(&out, "the remembered measurement", e);
    if (st == ST_OK && !path) st = NO_MEMORY(e, "a path");
    if (st == ST_OK) {
        sha256_hex(out.s, out.n, sum);
        text_add_n(&out, sum, HASH);
        st = text_check(&out, "the remembered measurement", e);
    }
    if (st == ST_OK) st = file_write(path, out.s, out.n, e);
    text_free(&out);
    free(path);
    return st;
}

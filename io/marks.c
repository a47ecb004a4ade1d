/* Which pixels were drawn, not seen. Drawn ink has one level, exactly or nearly, and an edge that is over
 * within two pixels; what it covers ends there, while a hillock that saturates falls off around its top. Levels
 * that come in runs of equal pixels are candidates; for each of them the picture is taken as ink and ground and
 * searched for straight edges (bars, boxes, cross hairs) and for strokes (letters, arrows). The mask is widened a
 * little, since drawing programs smooth their edges and lossy compression rings.
 *
 * A false alarm costs specimen, a missed mark costs accuracy: where the ink level also belongs to the texture
 * (clipped tops all over the field) only straight edges and what stands beside them count. The figures are rules
 * of this project, tried on tests/io/marks.c. Does not: read, or find marks in levels that vary. */
#include "io/marks_priv.h"

#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"

enum { LEVELS = 65536, RUN = 8, LEAST = 24, MOST_INKS = 4, SMALLEST = 32 };
static const float near_ink = 0.12f, lossy_core = 0.06f;
static const double most_masked = 0.35, most_flat = 0.5, most_clipped = 0.3, most_equal = 0.35; /* of the field: beyond, the marks are the picture */

static unsigned level_at(const float *px, size_t i) { return (unsigned)(px[i] * 65535.0f + 0.5f); }

/* Pixels in runs of equal level, along rows and columns, by level. */
static void count_runs(const float *px, size_t nx, size_t ny, uint32_t *count) {
    for (int down = 0; down < 2; down++) {
        size_t lines = down ? nx : ny, length = down ? ny : nx, step = down ? nx : 1, line_step = down ? 1 : nx;
        for (size_t k = 0; k < lines; k++) {
            const float *line = px + k * line_step;
            for (size_t i = 0; i < length;) {
                unsigned v = level_at(line, i * step);
                size_t end = i + 1;
                while (end < length && level_at(line, end * step) == v) end++;
                if (end - i >= RUN) count[v] += (uint32_t)(end - i);
                i = end;
            }
        }
    }
}

/* Candidate levels, the commonest first. None where a few levels own most of the field: a picture of two levels has no
 * specimen that differs from ink. */
static int choose_inks(const float *px, size_t nx, size_t ny, uint32_t *count, float inks[MOST_INKS]) {
    double in_runs = 0.0;
    int n = 0;
    size_t black = 0, white = 0;
    for (size_t i = 0; i < nx * ny; i++) black += !(px[i] > 0.0f), white += !(px[i] < 1.0f);
    count_runs(px, nx, ny, count);
    /* The ends of the scale are the usual inks, and small letters have no runs. */
    if (black >= LEAST) inks[n++] = 0.0f;
    if (white >= LEAST) inks[n++] = 1.0f;
    in_runs = (double)count[0] + (double)count[LEVELS - 1];
    count[0] = count[LEVELS - 1] = 0;
    for (; n < MOST_INKS; n++) {
        unsigned best = 0;
        for (unsigned v = 1; v < LEVELS; v++)
            if (count[v] > count[best]) best = v;
        if (count[best] < LEAST) break;
        in_runs += (double)count[best];
        inks[n] = (float)best / 65535.0f;
        count[best] = 0;
    }
    return in_runs <= most_flat * 2.0 * (double)(nx * ny) ? n : 0; /* every pixel is met twice */
}

/* The ends of the range, where lossy compression has spread an exact level. */
static int lossy_inks(const float *px, size_t n, float inks[MOST_INKS]) {
    float low = 1.0f, high = 0.0f;
    for (size_t i = 0; i < n; i++) {
        if (px[i] < low) low = px[i];
        if (px[i] > high) high = px[i];
    }
    if (high - low < 0.25f) return 0;
    inks[0] = high - 0.5f * lossy_core;
    inks[1] = low + 0.5f * lossy_core;
    return 2;
}

static void take_ink(ink_view *v) {
    float core = v->lossy ? lossy_core : 0.5f / 65535.0f, near_level = v->lossy ? near_ink + lossy_core : near_ink;
    size_t cores = 0;
    for (size_t i = 0; i < v->nx * v->ny; i++) {
        float d = fabsf(v->px[i] - v->level);
        cores += d <= core;
        v->ink[i] = d <= core ? INK_CORE : d <= near_level ? INK_NEAR : INK_NONE;
    }
    v->share = (double)cores / (double)(v->nx * v->ny);
}

/* Ink in most tiles of the field; its margin may hold a frame, and what is masked already does not count. */
static int is_spread(const ink_view *v, unsigned char least) {
    enum { TILES = 4, MOST_TILES = 8, MARGIN = 8, PER_MILLE = 1 };
    size_t ink[TILES * TILES] = { 0 };
    int tiles = 0;
    for (size_t y = MARGIN; y + MARGIN < v->ny; y++)
        for (size_t x = MARGIN; x + MARGIN < v->nx; x++)
            ink[y * TILES / v->ny * TILES + x * TILES / v->nx] +=
                v->ink[y * v->nx + x] >= least && !v->mask[y * v->nx + x];
    for (int k = 0; k < TILES * TILES; k++) tiles += 1000 * TILES * TILES * ink[k] > PER_MILLE * v->nx * v->ny;
    return tiles > MOST_TILES;
}

/* Widens the mask by r pixels each way, along rows and then along columns. */
static status widen(unsigned char *mask, size_t nx, size_t ny, size_t r, error *e) {
    size_t longest = nx > ny ? nx : ny;
    unsigned char *line = mem_array(longest, 1);
    if (!line) return NO_MEMORY(e, "the marks");
    for (int down = 0; down < 2; down++) {
        size_t lines = down ? nx : ny, length = down ? ny : nx, step = down ? nx : 1, line_step = down ? 1 : nx;
        for (size_t k = 0; k < lines; k++) {
            unsigned char *m = mask + k * line_step;
            for (size_t i = 0; i < length; i++) line[i] = m[i * step];
            for (size_t i = 0; i < length; i++) {
                if (!line[i]) continue;
                size_t from = i < r ? 0 : i - r, to = i + r < length ? i + r : length - 1;
                for (size_t j = from; j <= to; j++) m[j * step] = 1;
            }
        }
    }
    free(line);
    return ST_OK;
}

static size_t count_mask(const unsigned char *mask, size_t n) {
    size_t k = 0;
    for (size_t i = 0; i < n; i++) k += mask[i];
    return k;
}

/* 1 when the picture has noise: neighbours along rows are mostly not equal. */
static int is_noisy(const float *px, size_t nx, size_t ny) {
    size_t equal = 0;
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 1; x < nx; x++) equal += level_at(px, y * nx + x) == level_at(px, y * nx + x - 1);
    return (double)equal < most_equal * (double)((nx - 1) * ny);
}

/* One search over the inks that are there, with exact levels or with room around them. */
static status search(ink_view *v, uint32_t *count, error *e) {
    float inks[MOST_INKS];
    status st = ST_OK;
    int n = v->lossy ? lossy_inks(v->px, v->nx * v->ny, inks) : choose_inks(v->px, v->nx, v->ny, count, inks);
    for (int k = 0; st == ST_OK && k < n; k++) {
        v->level = inks[k];
        take_ink(v);
        v->at_end = v->lossy || !(v->level > 0.0f) || !(v->level < 1.0f);
        v->in_texture = is_spread(v, INK_CORE);
        v->joins = v->in_texture || is_spread(v, INK_NEAR) ? INK_CORE : INK_NEAR;
        if (v->in_texture && v->share > most_clipped) continue; /* nothing tells ink from specimen */
        (void)marks_edges(v);
        if (v->at_end) st = marks_strokes(v, e);
    }
    return st;
}

status marks_find(const float *px, size_t nx, size_t ny, int lossy, unsigned char **mask, size_t *n, error *e) {
    *mask = NULL;
    *n = 0;
    if (nx < SMALLEST || ny < SMALLEST) return ST_OK;
    ink_view v = { .px = px, .nx = nx, .ny = ny, .lossy = lossy };
    uint32_t *count = mem_array(LEVELS, sizeof *count);
    v.ink = mem_array(nx * ny, 1);
    v.mask = mem_array(nx * ny, 1);
    size_t drawn = 0;
    status st = v.ink && v.mask && count ? ST_OK : NO_MEMORY(e, "the marks");
    if (st == ST_OK) st = search(&v, count, e);
    if (st == ST_OK) drawn = count_mask(v.mask, nx * ny);
    if (st == ST_OK && !drawn && !lossy && is_noisy(px, nx, ny)) { /* a picture that was a JPEG before does not say so */
        v.lossy = v.cautious = 1;
        st = search(&v, count, e);
        if (st == ST_OK) drawn = count_mask(v.mask, nx * ny);
    }
    if (drawn) st = widen(v.mask, nx, ny, v.lossy ? 4 : 2, e);
    size_t masked = st == ST_OK && drawn ? count_mask(v.mask, nx * ny) : 0;
    if (masked && (double)masked <= most_masked * (double)(nx * ny)) {
        *mask = v.mask;
        *n = masked;
        v.mask = NULL;
    }
    free(count);
    free(v.ink);
    free(v.mask);
    return st;
}

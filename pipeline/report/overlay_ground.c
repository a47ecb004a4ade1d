/* The raster part of an overlay: grey levels, veil, and the borders of the label map as coverage masks. */
#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "report/overlay_priv.h"

enum { BINS = 4096 };

static double histogram_level(const size_t *count, size_t n, double share) {
    double want = share * (double)n, sum = 0.0;
    for (size_t b = 0; b < BINS; b++) {
        sum += (double)count[b];
        if (sum >= want) return ((double)b + 0.5) / BINS;
    }
    return 1.0;
}

status overlay_stretch(const micrograph *m, double *low, double *span, error *e) {
    size_t n = m->nx * m->ny, counted = 0;
    float lo = HUGE_VALF, hi = -HUGE_VALF;
    for (size_t i = 0; i < n; i++) {
        if (m->masked && m->masked[i]) continue; /* white letters would press the texture dark */
        lo = m->px[i] < lo ? m->px[i] : lo;
        hi = m->px[i] > hi ? m->px[i] : hi;
        counted++;
    }
    *low = 0.0;
    *span = 1.0;
    if (!(hi > lo)) return ST_OK;
    size_t *count = mem_array(BINS, sizeof *count);
    if (!count) return NO_MEMORY(e, "the overlay");
    double width = (double)hi - (double)lo, factor = BINS / width;
    for (size_t i = 0; i < n; i++) {
        if (m->masked && m->masked[i]) continue;
        double bin = ((double)m->px[i] - (double)lo) * factor;
        count[bin >= BINS ? BINS - 1 : bin > 0.0 ? (size_t)bin : 0]++;
    }
    double from = histogram_level(count, counted, 0.002), to = histogram_level(count, counted, 0.998);
    if (to > from) {
        *low = (double)lo + from * width;
        *span = (to - from) * width;
    }
    free(count);
    return ST_OK;
}

/* A cell that touches the frame is left out of the sizes. */
static int is_whole(const texture *t, uint32_t label) {
    return label && label <= t->n_found && t->features[label - 1].weight > 0.0;
}

static uint32_t grey_pixel(double v) {
    uint32_t g = (uint32_t)(255.0 * (v > 1.0 ? 1.0 : v > 0.0 ? v : 0.0) + 0.5); /* also for a NaN: 0 */
    return 0xff000000u | g << 16 | g << 8 | g;
}

static const double veil = 0.45, veil_grey = 0.42, strip_contrast = 0.35, strip_grey = 0.28;

/* What is not measured: little contrast on a middle grey. */
static uint32_t greyed(float level) { return grey_pixel(strip_grey + strip_contrast * fmin(fmax((double)level, 0.0), 1.0)); }

static void plane_row(const overlay_scene *s, size_t y, const overlay_tile *tile, uint32_t *row) {
    const float *px = s->m->px + y * s->m->nx + tile->x0;
    const unsigned char *masked = s->m->masked ? s->m->masked + y * s->m->nx + tile->x0 : NULL;
    const uint32_t *cell = s->t->cells ? s->t->cells + y * s->m->nx + tile->x0 : NULL;
    double factor = 1.0 / s->span;
    uint32_t last = 0;
    int veiled = 0;
    for (size_t x = 0; x < tile->nx; x++) {
        double v = ((double)px[x] - s->low) * factor;
        if (cell && (!x || cell[x] != last)) {
            last = cell[x];
            veiled = last && !is_whole(s->t, last);
        }
        if (veiled) v = (1.0 - veil) * fmin(fmax(v, 0.0), 1.0) + veil * veil_grey;
        row[x] = masked && masked[x] ? greyed(px[x]) : grey_pixel(v);
    }
}

void overlay_ground(const overlay_scene *s, const overlay_tile *tile) {
    const micrograph *m = s->m;
    for (size_t k = 0; k < tile->ny; k++) {
        uint32_t *row = (uint32_t *)(void *)(tile->data + k * tile->stride);
        size_t y = tile->y0 + k, above = m->strip ? m->strip_top : 0, rows = m->strip ? m->strip_rows : 0;
        if (y >= s->plane_y && y < s->plane_y + m->ny) {
            plane_row(s, y - s->plane_y, tile, row);
            continue;
        }
        size_t r = y < above ? y : y - m->ny;
        if (r >= rows) continue;
        const float *px = m->strip + r * m->nx + tile->x0;
        for (size_t x = 0; x < tile->nx; x++) row[x] = greyed(px[x]);
    }
}

/* 1 where the cell changes to the right or below, 2 where one of the two is whole; `reach` px wide. */
static int border_at(const texture *t, size_t x, size_t y, size_t reach) {
    const uint32_t *c = t->cells + y * t->nx + x;
    for (size_t k = 1; k <= reach; k++) {
        uint32_t right = x + k < t->nx ? c[k] : *c, below = y + k < t->ny ? c[k * t->nx] : *c;
        if (right == *c && below == *c) continue;
        return is_whole(t, *c) || is_whole(t, right != *c ? right : below) ? 2 : 1;
    }
    return 0;
}

/* Part of a tile that lies on the plane, one pixel wider all round where there is one. */
typedef struct {
    size_t x0, y0, nx, ny;
} window;

static window around(const overlay_scene *s, const overlay_tile *tile) {
    size_t y0 = tile->y0 > s->plane_y ? tile->y0 - s->plane_y : 0, y1 = tile->y0 + tile->ny;
    y1 = y1 > s->plane_y ? y1 - s->plane_y : 0;
    if (y1 > s->m->ny) y1 = s->m->ny;
    window w = { tile->x0 ? tile->x0 - 1 : 0, y0 ? y0 - 1 : 0, 0, 0 };
    size_t x1 = tile->x0 + tile->nx;
    w.nx = (x1 < s->m->nx ? x1 + 1 : s->m->nx) - w.x0;
    if (y1 > y0) w.ny = (y1 < s->m->ny ? y1 + 1 : s->m->ny) - w.y0;
    return w;
}

/* Cover of the line and of its seam (the line, one pixel wider all round) in a window. */
static void fill_masks(const texture *t, const window *w, size_t reach, unsigned char *line, unsigned char *seam, size_t stride) {
    for (size_t y = 0; y < w->ny; y++)
        for (size_t x = 0; x < w->nx; x++) {
            int b = border_at(t, w->x0 + x, w->y0 + y, reach);
            if (b) line[y * stride + x] = b > 1 ? 225 : 105;
        }
    for (size_t y = 0; y < w->ny; y++)
        for (size_t x = 0; x < w->nx; x++) {
            if (!line[y * stride + x]) continue;
            for (size_t v = y ? y - 1 : 0; v <= y + 1 && v < w->ny; v++)
                for (size_t u = x ? x - 1 : 0; u <= x + 1 && u < w->nx; u++)
                    if (seam[v * stride + u] < line[y * stride + x]) seam[v * stride + u] = line[y * stride + x];
        }
}

status overlay_borders(const overlay_scene *s, const overlay_tile *tile, pen *p, error *e) {
    window w = around(s, tile);
    if (!s->t->cells || !w.ny) return ST_OK;
    size_t reach = (size_t)lround(s->line), stride = (size_t)cairo_format_stride_for_width(CAIRO_FORMAT_A8, (int)w.nx);
    unsigned char *line = mem_array(w.ny, stride), *seam = mem_array(w.ny, stride);
    status st = line && seam ? ST_OK : NO_MEMORY(e, "the overlay");
    if (!st) {
        fill_masks(s->t, &w, reach, line, seam, stride);
        cairo_surface_t *dark = cairo_image_surface_create_for_data(seam, CAIRO_FORMAT_A8, (int)w.nx, (int)w.ny, (int)stride);
        cairo_surface_t *light = cairo_image_surface_create_for_data(line, CAIRO_FORMAT_A8, (int)w.nx, (int)w.ny, (int)stride);
        double x = (double)w.x0, y = (double)(w.y0 + s->plane_y);
        pen_ink(p, (ink){ 0.0, 0.05, 0.1, 0.42 });
        if (s->seam) cairo_mask_surface(p->cr, dark, x, y);
        pen_ink(p, (ink){ CELL_INK.r, CELL_INK.g, CELL_INK.b, 0.85 });
        cairo_mask_surface(p->cr, light, x, y);
        cairo_surface_destroy(dark);
        cairo_surface_destroy(light);
    }
    free(line);
    free(seam);
    return st ? st : pen_check(p, e);
}

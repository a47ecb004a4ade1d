/* What a label map says of its cells: area, box, perimeter, Feret diameters, neighbours, border weight.
 *
 * A pixel is a square of side 1, so a Feret diameter is measured between the corners of the pixels (from
 * pixel centres it would be about one pixel shorter). Only the first and the last pixel of each row of a cell
 * can carry the hull; they are collected in one pass. Two cells are neighbours when pixels of theirs share an
 * edge. */
#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "metrics/sizes.h"
#include "metrics/watershed.h"

static void boxes_measure(const uint32_t *cells, size_t nx, size_t ny, feature *f, size_t n) {
    for (size_t k = 0; k < n; k++) {
        f[k].cell_area_px2 = 0.0;
        f[k].box_x0 = (int)nx;
        f[k].box_y0 = (int)ny;
        f[k].box_x1 = f[k].box_y1 = -1;
    }
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx;) {
            size_t end = x;
            uint32_t label = cells[y * nx + x];
            while (end < nx && cells[y * nx + end] == label) end++;
            feature *c = &f[label - 1];
            c->cell_area_px2 += (double)(end - x);
            if ((int)x < c->box_x0) c->box_x0 = (int)x;
            if ((int)end - 1 > c->box_x1) c->box_x1 = (int)end - 1;
            if ((int)y < c->box_y0) c->box_y0 = (int)y;
            c->box_y1 = (int)y;
            x = end;
        }
}

/* row[first[k] + y - box_y0]: leftmost and rightmost pixel of cell k in row y. */
typedef struct {
    int left, right;
} extent;

static void extents_collect(const uint32_t *cells, size_t nx, size_t ny, const feature *f,
                            const size_t *first, extent *row) {
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx;) {
            size_t end = x;
            uint32_t label = cells[y * nx + x];
            while (end < nx && cells[y * nx + end] == label) end++;
            extent *r = &row[first[label - 1] + y - (size_t)f[label - 1].box_y0];
            if (r->right == 0)
                *r = (extent){ (int)x, (int)end };
            else
                r->right = (int)end; /* runs come from left to right */
            x = end;
        }
}

/* Corners of a cell's row ends into xy; returns how many. Right ends are exclusive, so they are corners
 * already. */
static size_t corners(const feature *c, const extent *row, double *xy) {
    size_t n = 0;
    for (int y = c->box_y0; y <= c->box_y1; y++) {
        extent r = row[y - c->box_y0];
        if (r.right == 0) continue;
        for (int side = 0; side < 4; side++) {
            xy[2 * n] = (side & 1) ? (double)r.right : (double)r.left;
            xy[2 * n + 1] = (double)(y + (side >> 1));
            n++;
        }
    }
    return n;
}

static status ferets_measure(const uint32_t *cells, size_t nx, size_t ny, feature *f, size_t n, error *e) {
    size_t *first = mem_array(n + 1, sizeof *first), tallest = 1;
    if (!first) return NO_MEMORY(e, "the diameters of the cells");
    for (size_t k = 0; k < n; k++) {
        size_t rows = f[k].box_y1 >= f[k].box_y0 ? (size_t)(f[k].box_y1 - f[k].box_y0 + 1) : 0;
        first[k + 1] = first[k] + rows;
        if (rows > tallest) tallest = rows;
    }
    extent *row = mem_array(first[n], sizeof *row);
    double *xy = mem_array(8 * tallest, sizeof *xy), *hull = mem_array(8 * tallest + 2, sizeof *hull);
    status st = row && xy && hull ? ST_OK : NO_MEMORY(e, "the diameters of the cells");
    if (st == ST_OK) {
        extents_collect(cells, nx, ny, f, first, row);
        for (size_t k = 0; k < n; k++) {
            size_t m = corners(&f[k], row + first[k], xy);
            feret_diameters(xy, m, hull, &f[k].feret_max_px, &f[k].feret_min_px);
        }
    }
    free(first);
    free(row);
    free(xy);
    free(hull);
    return st;
}

/* Length of the border of each cell from the number of times lines in four directions enter it (Crofton's formula for the mean
 * projection): P = pi / 4 (I_0 + I_90 + (I_45 + I_135) / sqrt 2). On average over directions without bias; a disc of radius 50 comes
 * out within half a percent. Outside the frame is outside every cell. */
static const double axis_share = PI / 8.0, diagonal_share = PI / 8.0 * 0.70710678118654752; /* a crossing is half an intercept */

static void border_add(feature *f, uint32_t a, uint32_t b, double share) {
    if (a == b) return;
    f[a - 1].perimeter_px += share;
    f[b - 1].perimeter_px += share;
}

/* A pixel on the frame: one straight and two slanted lines cross it there; a corner has two sides but loses one slanted line. */
static void frame_add(const uint32_t *cells, size_t nx, size_t ny, feature *f) {
    double side = axis_share + 2.0 * diagonal_share;
    for (size_t x = 0; x < nx; x++) {
        f[cells[x] - 1].perimeter_px += side;
        f[cells[(ny - 1) * nx + x] - 1].perimeter_px += side;
    }
    for (size_t y = 0; y < ny; y++) {
        f[cells[y * nx] - 1].perimeter_px += side;
        f[cells[y * nx + nx - 1] - 1].perimeter_px += side;
    }
    const size_t corner[] = { 0, nx - 1, (ny - 1) * nx, ny * nx - 1 };
    for (int k = 0; k < 4; k++) f[cells[corner[k]] - 1].perimeter_px -= diagonal_share;
}

static void perimeters_measure(const uint32_t *cells, size_t nx, size_t ny, feature *f, size_t n) {
    for (size_t k = 0; k < n; k++) f[k].perimeter_px = 0.0;
    frame_add(cells, nx, ny, f);
    for (size_t y = 0; y < ny; y++) {
        const uint32_t *row = cells + y * nx, *next = row + nx;
        for (size_t x = 0; x + 1 < nx; x++) border_add(f, row[x], row[x + 1], axis_share);
        if (y + 1 == ny) break;
        border_add(f, row[0], next[0], axis_share);
        for (size_t x = 1; x < nx; x++) {
            if (row[x] == next[x] && row[x] == next[x - 1] && row[x - 1] == next[x]) continue; /* inside a cell */
            border_add(f, row[x], next[x], axis_share);
            border_add(f, row[x], next[x - 1], diagonal_share);
            border_add(f, row[x - 1], next[x], diagonal_share);
        }
    }
}

static int by_pair(const void *a, const void *b) {
    uint64_t p = *(const uint64_t *)a, q = *(const uint64_t *)b;
    return (p > q) - (p < q);
}

static void pair_add(uint64_t *pairs, size_t *n, uint32_t a, uint32_t b) {
    uint64_t p = a < b ? (uint64_t)a << 32 | b : (uint64_t)b << 32 | a;
    if (*n && pairs[*n - 1] == p) return; /* borders run along rows */
    pairs[(*n)++] = p;
}

static size_t borders(const uint32_t *cells, size_t nx, size_t ny, uint64_t *pairs) {
    size_t n = 0;
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx; x++) {
            size_t i = y * nx + x;
            if (x + 1 < nx && cells[i] != cells[i + 1]) {
                if (pairs)
                    pair_add(pairs, &n, cells[i], cells[i + 1]);
                else
                    n++;
            }
            if (y + 1 < ny && cells[i] != cells[i + nx]) {
                if (pairs)
                    pair_add(pairs, &n, cells[i], cells[i + nx]);
                else
                    n++;
            }
        }
    return n;
}

static status neighbours_count(const uint32_t *cells, size_t nx, size_t ny, feature *f, size_t n, error *e) {
    uint64_t *pairs = mem_array(borders(cells, nx, ny, NULL), sizeof *pairs);
    if (!pairs) return NO_MEMORY(e, "the neighbours of the cells");
    size_t m = borders(cells, nx, ny, pairs);
    qsort(pairs, m, sizeof *pairs, by_pair);
    for (size_t k = 0; k < n; k++) f[k].n_neighbours = 0;
    for (size_t i = 0; i < m; i++) {
        if (i && pairs[i] == pairs[i - 1]) continue;
        f[(pairs[i] >> 32) - 1].n_neighbours++;
        f[(pairs[i] & UINT32_MAX) - 1].n_neighbours++;
    }
    free(pairs);
    return ST_OK;
}

static double cell_weight(const feature *c, size_t nx, size_t ny) {
    if (c->box_x0 <= 0 || c->box_y0 <= 0 || c->box_x1 + 1 >= (int)nx || c->box_y1 + 1 >= (int)ny) return 0.0;
    /* A box of f pixels has nx - f + 1 places inside a frame of nx pixels. */
    return border_weight((double)nx, (double)ny, (double)(c->box_x1 - c->box_x0),
                         (double)(c->box_y1 - c->box_y0));
}

status cells_describe(const uint32_t *cells, size_t nx, size_t ny, feature *features, size_t n, error *e) {
    boxes_measure(cells, nx, ny, features, n);
    for (size_t k = 0; k < n; k++) {
        feature *c = &features[k];
        c->cell_ecd_px = 2.0 * sqrt(c->cell_area_px2 / PI);
        c->weight = c->cell_area_px2 > 0.0 ? cell_weight(c, nx, ny) : 0.0;
    }
    perimeters_measure(cells, nx, ny, features, n);
    status st = ferets_measure(cells, nx, ny, features, n, e);
    return st == ST_OK ? neighbours_count(cells, nx, ny, features, n, e) : st;
}

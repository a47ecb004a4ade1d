/* Point statistics against a library for spatial point patterns and against published constants (A-01 ..
 * A-19, C-26), and the watershed as a maker of Voronoi cells (A-17, A-18, C-08 .. C-14). The four point sets stand
 * in data/points_*.csv with their sources. */
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "check.h"
#include "metrics/measure.h"
#include "metrics/neighbours.h"
#include "metrics/spacing.h"
#include "metrics/uncertainty.h"
#include "metrics/watershed.h"
#include "metrics/planes.h"

enum { MAX_POINTS = 256, SETS = 4, LINE = 512 };

typedef struct {
    const char *name;
    window w;
    size_t n;
    double x[MAX_POINTS], y[MAX_POINTS], nn[MAX_POINTS], want_nn[MAX_POINTS], area[MAX_POINTS];
    int touches[MAX_POINTS];
} point_set;

static FILE *data_open(const char *name) {
    char path[512];
    snprintf(path, sizeof path, "%s/external/data/%s", SWARD_TESTS, name);
    FILE *f = fopen(path, "r");
    CHECK(f != NULL);
    return f;
}

/* The comma-separated fields of a line, in place; returns how many. */
static size_t fields(char *line, char **field, size_t most) {
    size_t n = 0;
    line[strcspn(line, "\r\n")] = '\0';
    for (char *s = line; s && n < most; n++) {
        field[n] = s;
        s = strchr(s, ',');
        if (s) *s++ = '\0';
    }
    return n;
}

static double number(const char *text) {
    double v = MISSING;
    return number_parse(text, &v) ? v : MISSING;
}

static void set_read(point_set *p) {
    char name[64], line[LINE], *f[8];
    snprintf(name, sizeof name, "points_%s.csv", p->name);
    FILE *in = data_open(name);
    while (in && fgets(line, sizeof line, in)) {
        if (line[0] == '#' || line[0] == 'x' || fields(line, f, 8) < 2) continue;
        if (p->n == MAX_POINTS) break;
        p->x[p->n] = number(f[0]);
        p->y[p->n++] = number(f[1]);
    }
    if (in) fclose(in);
    in = data_open("points_nearest.csv");
    while (in && fgets(line, sizeof line, in)) {
        if (line[0] == '#' || fields(line, f, 8) < 5 || strcmp(f[0], p->name) != 0) continue;
        size_t i = (size_t)number(f[1]);
        CHECK(i < p->n);
        if (i >= p->n) break;
        p->want_nn[i] = number(f[2]);
        p->area[i] = number(f[3]);
        p->touches[i] = number(f[4]) > 0.0;
    }
    if (in) fclose(in);
}

static const char library[] = "spatstat.geom / spatstat.explore 3.0-6";

static void check_set(point_set *p, size_t k) {
    static const double mean[] = { 0.128972874602, 0.0659866062679, 0.028415467375, 7.90754055827 };
    static const double naive[] = { 1.67167951484, 1.06400205533, 0.79360081476, 1.36008165125 };
    static const double donnelly[] = { 1.56042560611, 1.0075072432, 0.769636713356, 1.29106904281 };
    static const double guard[] = { 0.105, 0.105, 0.105, 10.5 };
    static const size_t n_guard[] = { 27, 36, 123, 49 };
    static const double in_guard[] = { 1.62344597707, 1.06099473815, 0.748355374654, 1.36002976531 };
    static const double z[] = { 8.32750633761, 0.987140164546, -5.51383172335, 5.80441411225 };
    error e = { 0 };
    CHECK(nearest_neighbours(p->x, p->y, p->n, p->w, p->nn, &e) == ST_OK);
    for (size_t i = 0; i < p->n; i++)
        CHECK_SOURCE(p->nn[i], p->want_nn[i], 1e-9, "A-01 spatstat.geom nndist");
    CHECK_SOURCE(series_mean(p->nn, p->n), mean[k], 1e-9, "A-01 spatstat.geom nndist");
    CHECK_SOURCE(clark_evans_naive(p->nn, p->n, p->w), naive[k], 1e-9,
                 "A-02 Clark & Evans 1954; clarkevans()");
    CHECK_SOURCE(clark_evans_donnelly(p->nn, p->n, p->w), donnelly[k], 1e-9,
                 "A-03 Donnelly 1978; clarkevans()");
    size_t counted = 0;
    CHECK_SOURCE(clark_evans_guard(p->x, p->y, p->nn, p->n, p->w, guard[k], &counted), in_guard[k], 1e-9,
                 "A-04 clarkevans(correction = guard)");
    CHECK(counted == n_guard[k]);
    CHECK_SOURCE(clark_evans_z(p->nn, p->n, p->w), z[k], 1e-9, "A-06 Clark & Evans 1954; clarkevans.test");
}

/* nearest neighbours on a torus are those of the middle of nine copies. */
static double torus_clark_evans(const double *x, const double *y, size_t n, double a, double b) {
    double *v = mem_array(27 * n, sizeof *v), s = 0.0;
    size_t m = 0;
    for (int j = -1; j <= 1; j++)
        for (int i = -1; i <= 1; i++)
            for (size_t k = 0; k < n; k++, m++) {
                v[m] = x[k] + i * a;
                v[9 * n + m] = y[k] + j * b;
            }
    error e = { 0 };
    CHECK(nearest_neighbours(v, v + 9 * n, m, (window){ -a, -b, 2.0 * a, 2.0 * b }, v + 18 * n, &e) == ST_OK);
    for (size_t k = 0; k < n; k++) s += v[18 * n + 4 * n + k] / (double)n;
    free(v);
    return s * 2.0 * sqrt((double)n / (a * b));
}

static void check_torus(const point_set *p, size_t k) {
    static const double want[] = { 1.59527966364, 1.03172925865, 0.791516057827, 1.29800960682 };
    double a = p->w.x1 - p->w.x0, b = p->w.y1 - p->w.y0;
    CHECK_SOURCE(torus_clark_evans(p->x, p->y, p->n, a, b), want[k], 1e-9, "A-05 definition, all pairs");
}

static void check_lattices(void) {
    enum { COLS = 40, ROWS = 46 };
    static double x[COLS * ROWS], y[COLS * ROWS];
    for (size_t i = 0; i < COLS * ROWS; i++) {
        y[i] = (double)(i / COLS) * sqrt(0.75);
        x[i] = (double)(i % COLS) + ((i / COLS) % 2 ? 0.5 : 0.0);
    }
    CHECK_SOURCE(torus_clark_evans(x, y, COLS * ROWS, COLS, ROWS * sqrt(0.75)), 2.149139863647, 1e-9,
                 "A-08 Clark & Evans 1954: 2.1491");
    for (size_t i = 0; i < COLS * ROWS; i++) y[i] = (double)(i / COLS), x[i] = (double)(i % COLS);
    CHECK_SOURCE(torus_clark_evans(x, y, COLS * ROWS, COLS, ROWS), 2.0, 1e-12, "A-10 geometry");
    static const double rho[] = { 10.0, 25.0, 6.25 },
                        nm[] = { 339.80884896942, 214.91398636471, 429.82797272942 };
    for (int i = 0; i < 3; i++) CHECK_SOURCE(1000.0 * spacing_hex(rho[i]), nm[i], 1e-9, "A-09 geometry");
}

static double uniform(uint64_t *s) { /* xorshift64, Marsaglia 2003 */
    *s ^= *s << 13;
    *s ^= *s >> 7;
    *s ^= *s << 17;
    return ((double)(*s >> 11) + 0.5) / 9007199254740992.0;
}

static void check_random_points(void) {
    enum { N = 100000, R = 20 };
    double *v = mem_array(3 * N, sizeof *v), r[R], g[R];
    uint64_t seed = 20260117;
    for (size_t i = 0; i < 2 * N; i++) v[i] = uniform(&seed);
    error e = { 0 };
    window w = { 0.0, 0.0, 1.0, 1.0 };
    CHECK(nearest_neighbours(v, v + N, N, w, v + 2 * N, &e) == ST_OK);
    measured m = nn_mean_hanisch(v, v + N, v + 2 * N, N, w);
    CHECK_SOURCE(m.value * sqrt((double)N), 0.5, 0.0033, "A-07 Clark & Evans 1954");
    CHECK_SOURCE(series_sd(v + 2 * N, N) * sqrt((double)N), 0.261361600, 0.003, "A-07 Clark & Evans 1954");
    for (size_t k = 0; k < R; k++) r[k] = 0.1 * (double)(k + 2) / sqrt((double)N);
    CHECK(pair_correlation(v, v + N, N, w, 0.15 / sqrt((double)N), r, R, g, &e) == ST_OK);
    for (size_t k = 0; k < R; k++) CHECK_SOURCE(g[k], 1.0, 0.03, "A-12 Ripley 1977: K = pi r^2, so g = 1");
    free(v);
}

static void check_pair_correlation(const point_set *p) {
    char line[LINE], *f[8];
    FILE *in = data_open("points_pair_correlation.csv");
    double unit = sqrt((p->w.x1 - p->w.x0) * (p->w.y1 - p->w.y0) / (double)p->n);
    while (in && fgets(line, sizeof line, in)) {
        if (line[0] == '#' || fields(line, f, 8) < 5 || strcmp(f[0], p->name) != 0) continue;
        double h = number(f[1]), r = number(f[2]), g = MISSING;
        error e = { 0 };
        CHECK(pair_correlation(p->x, p->y, p->n, p->w, 0.15 * unit, &r, 1, &g, &e) == ST_OK);
        CHECK_SOURCE(h, 0.15 * unit, 1e-9 * unit, "A-13 kernel");
        CHECK_SOURCE(g, number(f[3]), 1e-6, "A-13 Stoyan & Stoyan 1994, direct sum");
        if (r > h) CHECK_SOURCE(g, number(f[4]), 1e-3, library);
    }
    if (in) fclose(in);
}

static void check_ripley(const point_set *p) {
    enum { MOST = 256 };
    static double r[MOST], want[MOST], k[MOST];
    char line[LINE], *f[8];
    size_t n = 0;
    FILE *in = data_open("points_ripley.csv");
    while (in && n < MOST && fgets(line, sizeof line, in)) {
        if (line[0] == '#' || fields(line, f, 8) < 3 || strcmp(f[0], p->name) != 0) continue;
        r[n] = number(f[1]);
        want[n++] = number(f[2]);
    }
    if (in) fclose(in);
    error e = { 0 };
    CHECK(n > 40 && ripley_k(p->x, p->y, p->n, p->w, r, n, k, &e) == ST_OK);
    double area = (p->w.x1 - p->w.x0) * (p->w.y1 - p->w.y0);
    for (size_t i = 0; i < n; i++) CHECK_SOURCE(k[i] / area, want[i] / area, 1e-8, "A-11 Ripley 1977, Ohser 1983; Kest()");
}

/* the first ring of g, on a fine grid of r; none for clustered and random points. */
static void check_ring(const point_set *p, double height, double at) {
    enum { R = 1600 };
    static double r[R], g[R];
    double unit = sqrt((p->w.x1 - p->w.x0) * (p->w.y1 - p->w.y0) / (double)p->n);
    for (size_t k = 0; k < R; k++) r[k] = unit * 1.7 * (double)(k + 1) / R;
    error e = { 0 };
    CHECK(pair_correlation(p->x, p->y, p->n, p->w, 0.15 * unit, r, R, g, &e) == ST_OK);
    pair_ring first = pair_first_ring(r, g, R, p->n, p->w, 0.15 * unit);
    if (height > 0.0) {
        CHECK_SOURCE(first.g, height, 1e-4 * height, "A-14 ring of g");
        CHECK_SOURCE(first.r, at, 0.01 * at, "A-14 ring of g");
    } else {
        CHECK(isnan(first.r) && isnan(first.g)); /* A-15 Ripley 1977, Diggle 1983: clustered, random */
    }
}

/* A-15 on a picture: bumps at random or clustered places give no spacing by autocorrelation; at regular ones they do. */
static void check_ring_in_picture(const point_set *p, int has_ring) {
    enum { SIDE = 400 };
    double width = p->w.x1 - p->w.x0, unit = SIDE / sqrt((double)p->n);
    float *f = plane_new(SIDE, SIDE);
    for (size_t i = 0; i < p->n; i++)
        add_bump(f, SIDE, SIDE, p->x[i] / width * SIDE - 0.5, p->y[i] / width * SIDE - 0.5, 0.2 * unit, 0.4);
    plane picture = { f, SIDE, SIDE, 8, 0.0, 0.0, NULL };
    measure_options o = measure_defaults();
    texture t = { 0 };
    error e = { 0 };
    CHECK(measure_plane(&picture, &o, &t, &e) == ST_OK);
    CHECK(isfinite(t.spacing_acf.value) == has_ring);
    if (!has_ring) CHECK((t.reasons | t.flags) & FLAG(NO_RING));
    texture_free(&t);
    free(f);
}

/* the four classical sets in their order (Diggle 1983). */
static void check_order(const point_set *p, size_t k) {
    double r = clark_evans_naive(p->nn, p->n, p->w), z = clark_evans_z(p->nn, p->n, p->w);
    int want[] = { r > 1.0 && z > 3.0, fabs(z) < 2.0, r < 1.0 && z<-3.0, r> 1.0 && z > 3.0 };
    CHECK(want[k]);
}

/* The lower envelope of cones about the points, turned over: its watershed is the Voronoi diagram. */
static void cones(const double *x, const double *y, size_t n, size_t side_x, size_t side_y, double reach,
                  float *f) {
    for (size_t i = 0; i < side_x * side_y; i++) f[i] = -(float)reach;
    for (size_t k = 0; k < n; k++) {
        size_t x0 = (size_t)fmax(0.0, x[k] - reach), x1 = (size_t)fmin((double)side_x - 1.0, x[k] + reach);
        size_t y0 = (size_t)fmax(0.0, y[k] - reach), y1 = (size_t)fmin((double)side_y - 1.0, y[k] + reach);
        for (size_t j = y0; j <= y1; j++)
            for (size_t i = x0; i <= x1; i++) {
                float v = -sqrtf(((float)i - (float)x[k]) * ((float)i - (float)x[k]) +
                                 ((float)j - (float)y[k]) * ((float)j - (float)y[k]));
                if (v > f[j * side_x + i]) f[j * side_x + i] = v;
            }
    }
}

static size_t voronoi(const double *x, const double *y, size_t n, size_t nx, size_t ny, double reach,
                      detection *d) {
    float *f = mem_array(nx * ny, sizeof *f);
    uint32_t *cells = mem_array(nx * ny, sizeof *cells);
    *d = (detection){ .features = mem_array(n, sizeof *d->features), .marker = mem_array(n, sizeof *d->marker), .n = n, .scale_px = 1.0 };
    cones(x, y, n, nx, ny, reach, f);
    for (size_t k = 0; k < n; k++)
        d->marker[k] = (uint32_t)((size_t)(y[k] + 0.5) * nx + (size_t)(x[k] + 0.5));
    error e = { 0 };
    CHECK(watershed(f, nx, ny, 1, d, cells, &e) == ST_OK);
    size_t empty = 0;
    for (size_t i = 0; i < nx * ny; i++) empty += cells[i] == 0 || cells[i] > n;
    free(f);
    free(cells);
    return empty;
}

static void check_voronoi(const point_set *p, size_t k) {
    static const size_t inner[] = { 22, 36, 152, 43 };
    enum { SIDE = 500 };
    double a = p->w.x1 - p->w.x0, b = p->w.y1 - p->w.y0, px = fmax(a, b) / SIDE, x[MAX_POINTS], y[MAX_POINTS];
    size_t nx = (size_t)(a / px + 0.5), ny = (size_t)(b / px + 0.5), off = 0, whole = 0;
    for (size_t i = 0; i < p->n; i++) {
        x[i] = p->x[i] / px - 0.5;
        y[i] = p->y[i] / px - 0.5;
    }
    detection d;
    CHECK(voronoi(x, y, p->n, nx, ny, 0.4 * SIDE, &d) == 0);
    for (size_t i = 0; i < p->n; i++) {
        double edge_px = 4.0 * sqrt(p->area[i]) / px; /* a pixel along the border either way */
        CHECK_SOURCE(d.features[i].cell_area_px2, p->area[i] / (px * px), edge_px + 6.0,
                     "A-17 Voronoi cells, half-plane clipping, deldir 1.0-6");
        whole += d.features[i].weight > 0.0;
        off += (d.features[i].weight > 0.0) == p->touches[i];
    }
    CHECK(off <= 1); /* one corner may end between two pixels */
    CHECK_SOURCE((double)whole, (double)inner[k], 1.0, "A-18 cells that do not touch the window");
    detection_free(&d);
}

/* Poisson-Voronoi cells, seen through the watershed with border weights. */
static void check_random_cells(void) {
    enum { N = 3600, SIDE = 1200 };
    double *v = mem_array(2 * N, sizeof *v), unit2 = (double)SIDE * SIDE / N;
    uint64_t seed = 7;
    for (size_t i = 0; i < 2 * N; i++) v[i] = SIDE * uniform(&seed) - 0.5;
    detection d;
    double sw = 0.0, area = 0.0, area2 = 0.0, sides = 0.0, sides2 = 0.0, share[4] = { 0 };
    double rim = 0.0, rim2 = 0.0, ecd = 0.0, ecd2 = 0.0;
    CHECK(voronoi(v, v + N, N, SIDE, SIDE, 60.0, &d) == 0);
    for (size_t i = 0; i < N; i++) {
        const feature *c = &d.features[i];
        double w = c->weight, s = (double)c->n_neighbours, a = c->cell_area_px2 / unit2;
        sw += w;
        area += w * a;
        area2 += w * a * a;
        sides += w * s;
        sides2 += w * s * s;
        rim += w * c->perimeter_px / sqrt(unit2);
        rim2 += w * c->perimeter_px * c->perimeter_px / unit2;
        ecd += w * c->cell_ecd_px / sqrt(unit2);
        ecd2 += w * c->cell_ecd_px * c->cell_ecd_px / unit2;
        if (s > 3.5 && s < 7.5) share[c->n_neighbours - 4] += w;
    }
    area /= sw;
    sides /= sw;
    CHECK_SOURCE(area, 1.0, 0.03, "C-08 Meijering 1953");
    CHECK_SOURCE(sides, 6.0, 0.10, "C-08 Meijering 1953 (edges shorter than a pixel are not seen)");
    CHECK_SOURCE(area2 / sw - area * area, 0.28017604093, 0.031, "C-09 Gilbert 1962, Brakke 2005");
    CHECK_SOURCE(sides2 / sw - sides * sides, 1.7808116990, 0.18, "C-10 exact integral");
    CHECK_SOURCE(area2 / sw - area * area, 2.0 / 7.0, 0.036, "C-14 gamma law of the cell area: Jarai-Szabo and Neda 2007");
    rim /= sw;
    ecd /= sw;
    CHECK_SOURCE(rim, 4.0, 0.06, "C-08 mean perimeter, Meijering 1953");
    CHECK_SOURCE(rim2 / sw - rim * rim, 0.9458, 0.10, "C-11 variance of the perimeter, Brakke (from memory)");
    CHECK_SOURCE(ecd, 1.0894, 0.02, "C-13 mean equivalent diameter, simulation of 960 000 cells");
    CHECK_SOURCE(sqrt(ecd2 / sw - ecd * ecd), 0.2942, 0.014, "C-13 its standard deviation");
    static const double want[] = { 0.107, 0.259, 0.295, 0.199 };
    for (int i = 0; i < 4; i++)
        CHECK_SOURCE(share[i] / sw, want[i], 0.033, "C-12 Hinde & Miles 1980 (from memory)");
    detection_free(&d);
    free(v);
}

/* C-26: centres in a fixed part of the field, whatever the border cuts: a count without bias. Poisson fields of 25 per um2. */
static void check_frame(void) {
    enum { FIELDS = 1000, PX = 1000, MOST = 80 };
    static feature f[MOST];
    uint64_t seed = 4242;
    double sum = 0.0;
    for (int k = 0; k < FIELDS; k++) {
        size_t n = 0, counted = 0;
        for (double t = -log(uniform(&seed)); t < 25.0 && n < MOST; t -= log(uniform(&seed)), n++) {
            f[n].x = PX * uniform(&seed) - 0.5;
            f[n].y = PX * uniform(&seed) - 0.5;
        }
        sum += guarded_density(f, n, PX, PX, 100.0, &counted) * PX * PX / FIELDS;
    }
    CHECK_SOURCE(sum, 25.0, 4.0 * 5.0 / 0.8 / sqrt(FIELDS), "C-26 Gundersen 1977, Poisson fields");
}

static void check_counts(void) {
    static const double n[] = { 0, 1, 5, 10, 100 };
    static const double low[] = { 0.0, 0.02531780799, 1.623486390, 4.795388696, 81.36399125 };
    static const double high[] = { 3.688879454, 5.571643391, 11.66833208, 18.39035605, 121.6267938 };
    for (int i = 0; i < 5; i++) {
        double a, b;
        poisson_limits((size_t)n[i], 0.95, &a, &b);
        CHECK_SOURCE(a, low[i], 1e-7, "A-19 Garwood 1936, chi-square quantiles");
        CHECK_SOURCE(b, high[i], 1e-7, "A-19 Garwood 1936, chi-square quantiles");
    }
}

int main(void) {
    static point_set set[SETS] = { { .name = "cells", .w = { 0, 0, 1, 1 } },
                                   { .name = "japanesepines", .w = { 0, 0, 1, 1 } },
                                   { .name = "redwoodfull", .w = { 0, 0, 1, 1 } },
                                   { .name = "swedishpines", .w = { 0, 0, 96, 100 } } };
    static const size_t n[] = { 42, 65, 195, 71 };
    for (size_t k = 0; k < SETS; k++) {
        set_read(&set[k]);
        CHECK(set[k].n == n[k]);
        if (set[k].n != n[k]) continue;
        check_set(&set[k], k);
        check_torus(&set[k], k);
        check_pair_correlation(&set[k]);
        check_ripley(&set[k]);
        check_order(&set[k], k);
        check_voronoi(&set[k], k);
    }
    check_ring(&set[0], 1.9042876, 0.1462024);
    check_ring(&set[1], 0.0, 0.0);
    check_ring(&set[2], 0.0, 0.0);
    check_ring(&set[3], 1.4093115, 10.87222);
    check_ring_in_picture(&set[0], 1);
    check_ring_in_picture(&set[1], 0);
    check_ring_in_picture(&set[2], 0);
    check_lattices();
    check_random_points();
    check_random_cells();
    check_counts();
    check_frame();
    return check_done();
}

/* First shell of neighbours from the centres, i.e. from the autocorrelation of a map of points.
 *
 * In the autocorrelation of brightness or of curvature every feature also meets itself: rims meet the opposite rim of
 * their own body one diameter on, just inside the distance of a neighbour in contact, and push the first peaks out by
 * up to a tenth; and between islands the bare ground lowers the mean. Points have no outline and no ground. The
 * density of pairs along r is smoothed with 5 % of the nearest distance; the shell ends half-way (on a log scale) to
 * the second shell of a hexagonal layer, at 3^(1/4) times the mode, and the mean distance of its pairs is the
 * spacing. Stretch: the second angular harmonic of the distances, as in ring.c.
 * The shell is told from a soft core (patterns that only keep a distance) by the gap behind it: density at the mode
 * over the mean density from 1.25 to 1.5 modes. Layers of touching bodies with up to 15 % spread of size, several
 * grains and islands have 5 to 1000, jittered lattices above 2, relaxed patterns 3, hard-core patterns 2. */
#include "metrics/layer.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "metrics/linear.h"
#include "metrics/neighbours.h"

static const double kernel = 0.05;                    /* sd, / median nearest distance */
static const double mode_from = 0.85, mode_to = 1.35; /* of the median nearest distance */
static const double gap_from = 1.25, gap_to = 1.50;   /* of the mode */
static const double shell_end = 1.316074;             /* 3^(1/4), of the mode */
static const double distinct = 5.0;
enum { PER_NN = 100, BINS = 240, MIN_PAIRS = 10 }; /* pairs up to 2.4 median nearest distances */

typedef struct {
    double x, y;
} point;

static int by_row(const void *a, const void *b) {
    const point *p = a, *q = b;
    if (p->y < q->y || p->y > q->y) return p->y < q->y ? -1 : 1;
    return (p->x > q->x) - (p->x < q->x);
}

static int by_value(const void *a, const void *b) {
    double p = *(const double *)a, q = *(const double *)b;
    return (p > q) - (p < q);
}

/* Pairs nearer than reach, each once. */
typedef void (*pair_use)(void *to, double dx, double dy, double r);
static void pairs_each(const point *p, size_t n, double reach, pair_use use, void *to) {
    for (size_t i = 0; i < n; i++)
        for (size_t k = i + 1; k < n && p[k].y - p[i].y < reach; k++) {
            double dx = p[k].x - p[i].x, dy = p[k].y - p[i].y, r = sqrt(dx * dx + dy * dy);
            if (r < reach) use(to, dx, dy, r);
        }
}

typedef struct {
    double per_px, count[BINS];
} histogram;

static void count_pair(void *to, double dx, double dy, double r) {
    histogram *h = to;
    size_t i = (size_t)(r * h->per_px);
    (void)dx, (void)dy;
    if (i < BINS) h->count[i] += 1.0;
}

typedef struct {
    double from, to, sum, squares, m[3][4];
    size_t n;
} shell_sum;

static void shell_pair(void *to, double dx, double dy, double r) {
    shell_sum *s = to;
    if (r < s->from || r > s->to) return;
    double c = (dx * dx - dy * dy) / (r * r), q[3] = { 1.0, c, 2.0 * dx * dy / (r * r) };
    for (int i = 0; i < 3; i++) {
        for (int j = 0; j < 3; j++) s->m[i][j] += q[i] * q[j];
        s->m[i][3] += q[i] * r;
    }
    s->sum += r;
    s->squares += r * r;
    s->n++;
}

/* Smoothed pairs per radius; bin i stands at (i + 1/2) / PER_NN median nearest distances. */
static void density_make(const histogram *h, double *density) {
    long reach = (long)ceil(3.0 * kernel * PER_NN);
    for (long i = 0; i < BINS; i++) {
        double sum = 0.0;
        for (long k = i - reach; k <= i + reach; k++) {
            double t = (double)(k - i) / (kernel * PER_NN);
            if (k >= 0 && k < BINS) sum += h->count[k] * exp(-0.5 * t * t);
        }
        density[i] = sum / ((double)i + 0.5);
    }
}

static void shell_from(const point *p, size_t n, double nn, first_shell *out) {
    histogram h = { .per_px = PER_NN / nn };
    double density[BINS], gap = 0.0;
    size_t mode = 0, n_gap = 0;
    pairs_each(p, n, nn * BINS / PER_NN, count_pair, &h);
    density_make(&h, density);
    for (size_t i = (size_t)(mode_from * PER_NN); i < (size_t)(mode_to * PER_NN); i++)
        if (!mode || density[i] > density[mode]) mode = i;
    double at = ((double)mode + 0.5) / PER_NN;
    for (size_t i = (size_t)(gap_from * at * PER_NN); i < BINS && i < (size_t)(gap_to * at * PER_NN);
         i++, n_gap++)
        gap += density[i];
    shell_sum s = { .from = 0.7 * at * nn, .to = shell_end * at * nn };
    pairs_each(p, n, s.to, shell_pair, &s);
    if (s.n < MIN_PAIRS || !n_gap) return;
    double k[3] = { 1.0, 0.0, 0.0 }, count = (double)s.n, mean = s.sum / count;
    if (linear_solve(&s.m[0][0], 3, 1e-9, k)) {
        out->e1 = k[1] / k[0];
        out->e2 = k[2] / k[0];
    }
    out->mode_px = at * nn;
    out->mean_px = mean;
    out->sd_px = sqrt(fmax(0.0, s.squares / count - mean * mean));
    out->n_pairs = s.n;
    /* An empty gap is as wide as one pair would make it. */
    out->contrast = density[mode] / fmax(gap / (double)n_gap, 1.0 / (gap_to * at * PER_NN));
}

status layer_shell(const feature *features, size_t n, size_t nx, size_t ny, first_shell *out, error *e) {
    first_shell s = { MISSING, MISSING, MISSING, 0.0, 0.0, 0.0, 0 };
    window w = { -0.5, -0.5, (double)nx - 0.5, (double)ny - 0.5 };
    point *p = mem_array(n, sizeof *p);
    double *v = mem_array(3 * n, sizeof *v), *x = v, *y = v ? v + n : NULL, *nn = v ? v + 2 * n : NULL;
    status st = p && v ? ST_OK : NO_MEMORY(e, "the neighbours of a layer");
    for (size_t i = 0; st == ST_OK && i < n; i++) {
        x[i] = features[i].x;
        y[i] = features[i].y;
        p[i] = (point){ x[i], y[i] };
    }
    if (st == ST_OK && n > 1) st = nearest_neighbours(x, y, n, w, nn, e);
    if (st == ST_OK && n > 1) {
        qsort(p, n, sizeof *p, by_row);
        qsort(nn, n, sizeof *nn, by_value);
        if (nn[n / 2] > 0.0) shell_from(p, n, nn[n / 2], &s);
    }
    free(p);
    free(v);
    if (st == ST_OK) *out = s;
    return st;
}

int layer_distinct(const first_shell *s) { return s->n_pairs > 0 && s->contrast >= distinct; }

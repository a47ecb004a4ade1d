/* How far a graded-index prediction can be trusted.
 * Model error: differences between the graded index (2-D Bruggeman) and rigorous coupled-wave calculations of
 * hexagonal cones and paraboloids on silicon (Green 2008), pitch 100-1000 nm, height 100-1000 nm, wavelength
 * from 400 nm, normal incidence; own calculations, 127-301 harmonics, 32 slabs, own error 0.1-0.3 points of
 * R. An independent set of disordered textures was covered to 81 % at one u, 98 % at two. Reading: bilinear
 * in (ln p/wl, ln h/wl); below h/wl = 0.1 in proportion to h/wl; never across p/wl = 2/sqrt(3), where
 * diffraction into air opens; held at the ends. Nodes without a calculation carry the nearest one of their
 * row. The weighted table holds the same calculations case by case. Not covered: oblique light, other
 * substrates, correlated disorder. */
#include "optics/trust.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"

enum { ROWS = 13, COLUMNS = 10, ROWS_BELOW = 9 };     /* rows 0..8 lie below the opening of orders in air */
static const double ORDERS_OPEN = 1.1547005383792515; /* 2/sqrt(3) */

/* clang-format off */
static const double p_over_wl[ROWS] = { 0.10, 0.15, 0.20, 0.25, 0.30, 0.40, 0.60, 0.90, 1.12, 1.20, 1.50, 2.00, 2.50 };
static const double h_over_wl[COLUMNS] = { 0.10, 0.15, 0.20, 0.30, 0.40, 0.60, 0.80, 1.00, 1.50, 2.00 };

static const double u_points[ROWS][COLUMNS] = { /* standard uncertainty, points of R (%) */
    { 1.15, 1.44, 1.39, 1.52, 1.26, 1.14, 0.61, 0.36, 0.17, 0.17 }, /* last: no calculation, nearest */
    { 2.63, 3.71, 3.96, 1.82, 1.06, 0.89, 0.45, 0.25, 0.09, 0.12 },
    { 3.68, 4.97, 5.03, 2.52, 1.07, 0.71, 0.32, 0.16, 0.08, 0.14 },
    { 4.07, 5.56, 5.31, 3.23, 1.63, 0.73, 0.30, 0.16, 0.06, 0.14 },
    { 3.62, 5.33, 5.58, 3.92, 2.47, 0.95, 0.45, 0.27, 0.08, 0.12 },
    { 3.05, 6.13, 7.58, 6.09, 3.88, 1.47, 0.80, 0.45, 0.13, 0.15 },
    { 4.37, 8.77, 10.44, 8.09, 4.96, 1.66, 0.94, 0.59, 0.20, 0.16 },
    { 4.70, 8.58, 10.15, 7.74, 4.65, 2.20, 1.77, 1.20, 0.41, 0.19 },
    { 4.36, 7.23, 8.45, 6.35, 3.84, 2.57, 2.26, 1.56, 0.55, 0.22 },
    { 10.22, 15.24, 22.28, 24.76, 23.83, 16.67, 11.61, 8.76, 4.82, 2.98 },
    { 11.35, 16.89, 23.49, 26.36, 25.20, 17.45, 12.10, 9.38, 5.30, 3.30 },
    { 20.33, 20.33, 26.12, 28.93, 28.25, 21.25, 15.95, 12.82, 7.74, 4.31 }, /* first: nearest */
    { 23.97, 23.97, 29.28, 32.22, 32.80, 28.22, 22.72, 18.37, 11.43, 5.80 }, /* first: nearest */
};
static const double bias_points[ROWS][COLUMNS] = { /* mean of graded index minus rigorous, points of R */
    { 1.1, 1.1, 0.9, 0.4, -0.8, -0.8, -0.4, -0.3, -0.1, -0.1 },
    { 2.5, 3.5, 3.5, 1.2, -0.4, -0.6, -0.3, -0.2, -0.1, -0.1 },
    { 3.5, 4.6, 4.4, 1.3, -0.2, -0.4, -0.2, -0.1, -0.0, -0.0 },
    { 3.7, 4.4, 3.3, 0.4, -0.7, -0.5, -0.1, -0.1, -0.0, 0.0 },
    { 2.5, 1.7, 0.2, -1.5, -1.6, -0.6, -0.2, -0.1, -0.0, 0.0 },
    { -1.1, -4.1, -5.8, -4.9, -2.8, -1.0, -0.5, -0.3, -0.1, 0.0 },
    { -3.9, -8.2, -9.9, -6.7, -3.2, -1.1, -0.7, -0.4, -0.1, 0.0 },
    { -4.3, -8.0, -9.5, -6.1, -2.8, -1.6, -1.3, -0.8, -0.2, -0.0 },
    { -3.9, -6.4, -7.6, -4.6, -2.2, -2.0, -1.8, -1.1, -0.3, -0.1 },
    { -9.5, -14.2, -21.4, -24.5, -23.4, -16.0, -11.1, -8.2, -4.3, -2.6 },
    { -10.6, -15.8, -22.6, -26.1, -24.7, -16.6, -11.5, -8.8, -4.8, -2.9 },
    { -19.4, -19.4, -25.3, -28.6, -27.6, -19.6, -14.1, -11.3, -6.5, -3.6 },
    { -23.1, -23.1, -28.6, -31.8, -32.0, -26.2, -20.4, -16.3, -9.6, -4.7 },
};

/* Rigorous minus graded index, weighted 300-1200 nm, points of R, of the same calculations. */
enum { PITCHES = 7, HEIGHTS = 8 };
static const double pitch_nm[PITCHES] = { 100, 200, 300, 400, 600, 800, 1000 };
static const double tall_nm[HEIGHTS] = { 100, 200, 300, 400, 500, 600, 800, 1000 };
static const double weighted_points[2][HEIGHTS][PITCHES] = {
    { /* cones */
      { -2.50, -0.33, 3.56, 5.48, 7.68, 9.46, 10.57 },
      { -0.26, -0.63, 3.58, 7.66, 12.34, 17.17, 21.19 },
      { 0.87, 0.13, 1.81, 5.04, 8.63, 13.84, 20.13 },
      { 1.06, 0.60, 1.21, 2.57, 4.86, 8.22, 14.15 },
      { 0.94, 0.54, 0.85, 1.18, 2.92, 5.11, 8.93 },
      { 0.71, 0.36, 0.49, 0.68, 1.69, 3.88, 6.16 },
      { 0.30, 0.10, 0.10, 0.29, 0.55, 2.16, 4.03 },
      { 0.17, 0.06, 0.03, 0.13, 0.26, 0.81, 2.40 },
    },
    { /* paraboloids */
      { -2.56, 0.35, 5.33, 8.06, 11.28, 14.00, 15.81 },
      { -1.42, -0.59, 2.17, 5.45, 9.64, 15.29, 20.52 },
      { -0.47, 0.09, 1.35, 2.23, 4.47, 8.95, 14.70 },
      { 0.22, 0.30, 0.98, 1.14, 3.02, 6.29, 10.33 },
      { 0.27, 0.22, 0.51, 0.90, 2.31, 5.45, 8.76 },
      { 0.06, 0.06, 0.27, 0.54, 1.72, 4.36, 7.54 },
      { 0.06, 0.06, 0.10, 0.23, 0.90, 2.30, 4.64 },
      { 0.02, -0.04, -0.01, 0.05, 0.42, 1.34, 2.71 },
    },
};
/* clang-format on */

/* Cell and position of x on nodes[from..to], logarithmic, held at both ends. */
static size_t place(const double *nodes, size_t from, size_t to, double x, double *t) {
    size_t i = from;
    while (i + 2 <= to && nodes[i + 1] <= x) i++;
    double held = fmin(fmax(x, nodes[from]), nodes[to]);
    *t = log(held / nodes[i]) / log(nodes[i + 1] / nodes[i]);
    return i;
}

static double read_table(const double (*table)[COLUMNS], size_t row, double tr, size_t column, double tc) {
    const double *a = table[row], *b = table[row + 1];
    double low = (1.0 - tc) * a[column] + tc * a[column + 1],
           high = (1.0 - tc) * b[column] + tc * b[column + 1];
    return (1.0 - tr) * low + tr * high;
}

void trust_model(double spacing_nm, double height_nm, double wavelength_nm, double *u, double *bias) {
    double p = spacing_nm / wavelength_nm, h = height_nm / wavelength_nm, tr, tc;
    int air = p >= ORDERS_OPEN;
    size_t row = place(p_over_wl, air ? ROWS_BELOW : 0, air ? ROWS - 1 : ROWS_BELOW - 1, p, &tr);
    size_t column = place(h_over_wl, 0, COLUMNS - 1, h, &tc);
    double scale = 0.01 * fmin(1.0, h / h_over_wl[0]);
    *u = scale * read_table(u_points, row, tr, column, tc);
    *bias = scale * read_table(bias_points, row, tr, column, tc);
}

/* Cell and share on plain nodes, held at both ends. */
static size_t place_linear(const double *nodes, size_t n, double x, double *t) {
    size_t i = 0;
    while (i + 2 < n && nodes[i + 1] <= x) i++;
    *t = (fmin(fmax(x, nodes[0]), nodes[n - 1]) - nodes[i]) / (nodes[i + 1] - nodes[i]);
    return i;
}

/* Between nodes the shift bends: leaving single nodes out, it is missed by 0.3 of the change over the cell, rms; half a
 * node apart that is a quarter, and nothing at a node. */
void trust_weighted(double spacing_nm, double height_nm, double exponent, double *shift, double *u) {
    double tp, th, shape[2], bend[2], q = fmin(1.0, fmax(0.0, exponent - 1.0));
    size_t p = place_linear(pitch_nm, PITCHES, spacing_nm, &tp), h = place_linear(tall_nm, HEIGHTS, height_nm, &th);
    double scale = 0.01 * fmin(1.0, fmax(0.0, height_nm) / tall_nm[0]);
    for (int s = 0; s < 2; s++) {
        const double *a = weighted_points[s][h], *b = weighted_points[s][h + 1];
        double upper = (1.0 - tp) * a[p] + tp * a[p + 1], lower = (1.0 - tp) * b[p] + tp * b[p + 1];
        double across = (1.0 - th) * (a[p + 1] - a[p]) + th * (b[p + 1] - b[p]);
        shape[s] = (1.0 - th) * upper + th * lower;
        bend[s] = 0.3 * hypot(tp * (1.0 - tp) * across, th * (1.0 - th) * (lower - upper));
    }
    *shift = scale * ((1.0 - q) * shape[0] + q * shape[1]);
    *u = scale * hypot((1.0 - q) * bend[0] + q * bend[1], q * (1.0 - q) * (shape[1] - shape[0]));
}

/* Grating equation: the first order runs in a medium of index n while n >= |n_ambient sin - q wavelength|;
 * the worst azimuth puts the order against the incident direction, hence q wavelength <= n + n_ambient sin.
 */
order_class trust_orders(double spacing_nm, double wavelength_nm, double angle_deg, double ambient_n,
                         double substrate_n) {
    double q_wavelength = wavelength_nm / (0.5 * sqrt(3.0) * spacing_nm);
    double tangential = ambient_n * sin(angle_deg * PI / 180.0);
    if (q_wavelength < ambient_n + tangential) return ORDERS_IN_AMBIENT;
    return q_wavelength < substrate_n + tangential ? ORDERS_IN_SUBSTRATE : ORDERS_NONE;
}

status trust_shares(double spacing_nm, double angle_deg, double ambient_n, const material *substrate,
                    const sun *s, double lo_nm, double hi_nm, order_shares *out, error *e) {
    if (!(spacing_nm > 0.0) || !(angle_deg >= 0.0 && angle_deg < 90.0) || !(ambient_n > 0.0))
        return fail(e, ST_BAD_INPUT,
                    "orders need a spacing above 0 nm, an angle of 0 to below 90 degrees and an index "
                    "above 0");
    /* A fine even grid with the band's ends; each class is a 0/1 spectrum, weighted like any other. */
    enum { STEPS = 1800 };
    const size_t nodes = STEPS + 1;
    double *w = mem_array(3 * nodes, sizeof *w), none = 0.0, air = 0.0;
    if (!w) return NO_MEMORY(e, "diffraction orders");
    double *is_none = w + nodes, *is_air = w + 2 * nodes;
    status st = ST_OK;
    for (size_t i = 0; i < nodes && !st; i++) {
        double n, k, t = (double)i / STEPS;
        w[i] = (1.0 - t) * lo_nm + t * hi_nm;
        st = material_at(substrate, w[i], &n, &k, e);
        if (st) break;
        order_class c = trust_orders(spacing_nm, w[i], angle_deg, ambient_n, n);
        is_none[i] = c == ORDERS_NONE;
        is_air[i] = c == ORDERS_IN_AMBIENT;
    }
    if (!st) st = sun_weighted(s, w, is_none, nodes, lo_nm, hi_nm, &none, e);
    if (!st) st = sun_weighted(s, w, is_air, nodes, lo_nm, hi_nm, &air, e);
    if (!st) *out = (order_shares){ .none = none, .in_substrate = 1.0 - none - air, .in_ambient = air };
    free(w);
    return st;
}

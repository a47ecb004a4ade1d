/* From features to shares of solid and coatings against depth: f(z) = F sum A_i s(z/h_i) / sum A_i.
 *
 * The sums over cells run over classes of equal height. Features stand on one floor, or (level_at_tips) hang from one
 * tip plane, the substrate then rising between them. Pores are the complement, mirrored in depth: widest at the
 * surface, mouths in one plane, or (level_at_tips) bottoms in one plane.
 * A conformal film is the dilation of the feature on the circle of the mean cell's area; film j is what dilation by
 * all films up to j covers beyond what lies under it. Steps (film on a free floor, rim of a pore, flat tops) become two
 * nodes at one depth.
 * Nodes: for one height u = t^k (k = q within 1..8) with so many steps that linear interpolation errs below 1e-7
 * (exponents 0.5 to 3), but no two nodes within 0.01 nm: within the first nm of blunter tips the error reaches 2e-5;
 * for many heights or films evenly spaced.
 * What this file does not do: cells of different area carry the same film thickness but share one mean radius. */
#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "link/surface_priv.h"

static const double FINEST_NM = 0.01; /* nodes nearer than this say nothing to light */

typedef struct {
    const height_classes *heights;
    const link_options *o;
    solid feature[HEIGHT_CLASSES]; /* of each class */
    double film_nm[LIMIT_COATINGS + 1]; /* cumulated from the innermost: 0, t_n, t_n + t_(n-1), ... */
    size_t n_films;
    int pores;
} texture_model;

static double all_films(const texture_model *m) { return m->film_nm[m->n_films]; }

/* Flat tops of unequal features: a class stands for heights all over its width, so its step is a ramp. */
static double ramp(double beyond_nm, double width_nm) {
    return width_nm > 0.0 ? fmin(1.0, fmax(0.0, 0.5 - beyond_nm / width_nm)) : beyond_nm >= 0.0 ? 0.0 : 1.0;
}
static double ramped_hillock(const solid *f, double film_nm, double width_nm, double y_nm) {
    double top = f->height_nm + film_nm;
    return coated_share(f, film_nm, fmin(y_nm, top * (1.0 - 1e-9))) * ramp(y_nm - top, width_nm);
}
static double ramped_pore(const solid *f, double film_nm, double width_nm, double x_nm) {
    double bottom = f->height_nm - film_nm;
    return 1.0 - (1.0 - coated_pore_share(f, film_nm, fmin(x_nm, bottom * (1.0 - 1e-9)))) * ramp(x_nm - bottom, width_nm);
}

/* Share covered by the feature with the first k films at a depth below the highest point; eps shifts the level off a
 * step towards the bottom. */
static double covered(const texture_model *m, size_t k, double depth_nm, double eps_nm) {
    double sum = 0.0, top = all_films(m), deep = m->heights->tallest_nm, film = m->film_nm[k], width = m->heights->width_nm;
    int ramps = m->o->flat_top > 0.0 && !m->o->level_at_tips && width > 0.0;
    for (size_t i = 0; i < m->heights->n; i++) {
        const solid *f = &m->feature[i];
        double share;
        if (m->pores) {
            double x = depth_nm + eps_nm - top - (m->o->level_at_tips ? deep - f->height_nm : 0.0);
            share = ramps && film < f->height_nm ? ramped_pore(f, film, width, x) : coated_pore_share(f, film, x);
        } else {
            double y = (m->o->level_at_tips ? f->height_nm : deep) + top - depth_nm - eps_nm;
            share = ramps ? ramped_hillock(f, film, width, y) : coated_share(f, film, y);
        }
        sum += m->heights->weight[i] * share;
    }
    return sum < 1.0 ? sum : 1.0;
}

static status allocate(profile *p, size_t n, size_t n_coatings, error *e) {
    p->depth_nm = mem_array(n, sizeof *p->depth_nm);
    p->solid = mem_array(n, sizeof *p->solid);
    int ok = p->depth_nm && p->solid;
    for (size_t j = 0; j < n_coatings; j++) {
        p->coating[j] = mem_array(n, sizeof **p->coating);
        ok = ok && p->coating[j];
    }
    p->n = n;
    p->n_coatings = n_coatings;
    return ok ? ST_OK : NO_MEMORY(e, "the profile");
}

/* ---- one height, no film: the closed form on graded nodes ---- */

static size_t graded_nodes(double q, double *power) {
    double k = q < 1.0 ? 1.0 : q > 8.0 ? 8.0 : q, curve = 2.0 / q * fabs(2.0 / q - 1.0);
    *power = k;
    if (k > 1.0) curve = fmax(fabs(2.0 - k), 0.5) * 2.0; /* the same bound with the nodes' own grading */
    double steps = ceil(sqrt(curve / 8.0 / 0.9e-7));
    return (size_t)(steps < 64.0 ? 64.0 : steps > 8192.0 ? 8192.0 : steps) + 1;
}

/* Complement and mirror image in depth. */
static void mirror(profile *p, double height_nm) {
    for (size_t i = 0, k = p->n - 1; i <= k; i++, k--) {
        double depth = p->depth_nm[i], share = p->solid[i];
        p->depth_nm[i] = height_nm - p->depth_nm[k];
        p->solid[i] = 1.0 - p->solid[k];
        p->depth_nm[k] = height_nm - depth;
        p->solid[k] = 1.0 - share;
        if (k == 0) break;
    }
}

/* A round tip in even steps, then the flank on nodes graded from the family's own tip. */
static status closed_form(const texture_model *m, profile *p, error *e) {
    enum { CAP_STEPS = 512 };
    const solid *f = &m->feature[0];
    double power, h = f->height_nm, full = h + f->apex_nm, last = 0.0;
    size_t kept = 0, n = graded_nodes(f->exponent, &power), cap = f->cap_depth_nm > 0.0 ? CAP_STEPS : 0;
    double start = pow((f->apex_nm + f->cap_depth_nm) / full, 1.0 / power);
    status st = allocate(p, n + cap, 0, e);
    if (st != ST_OK) return st;
    for (size_t i = 0; i < n + cap; i++) {
        double depth = f->cap_depth_nm * (double)i / CAP_STEPS;
        if (i >= cap) {
            double at = start + (1.0 - start) * (double)(i - cap) / (double)(n - 1);
            depth = i + 1 < n + cap ? full * pow(at, power) - f->apex_nm : h;
        }
        if (i == 0) depth = 0.0;
        else if (i + 1 < n + cap && depth - last < FINEST_NM) continue;
        last = depth;
        p->depth_nm[kept] = depth;
        p->solid[kept++] = solid_share(f, depth);
    }
    p->n = kept;
    if (m->pores) mirror(p, h);
    return ST_OK;
}

/* ---- many heights or films: even nodes and the steps ---- */

/* Depths at which a share jumps for all features together: film on a free floor, rims, flat tops and bottoms. */
static size_t step_depths(const texture_model *m, double *at) {
    size_t n = 0;
    double top = all_films(m), total = m->heights->tallest_nm + top;
    int one = m->heights->n == 1, flat = m->o->flat_top > 0.0;
    int floors = one || !m->o->level_at_tips, tops = flat && (one || m->o->level_at_tips);
    int above = m->pores ? floors : tops, below = m->pores ? tops : floors;
    for (size_t k = 0; above && k <= m->n_films; k++) at[n++] = top - m->film_nm[k];
    for (size_t k = 1; below && k <= m->n_films; k++) at[n++] = total - m->film_nm[k];
    return n;
}

static void fill(const texture_model *m, profile *p, size_t i, double depth_nm, double eps_nm) {
    double inner = covered(m, 0, depth_nm, eps_nm);
    p->depth_nm[i] = depth_nm;
    p->solid[i] = inner;
    for (size_t k = 1; k <= m->n_films; k++) {
        double outer = fmax(covered(m, k, depth_nm, eps_nm), inner);
        p->coating[m->n_films - k][i] = outer - inner; /* films count from the inside, coatings from the outside */
        inner = outer;
    }
}

static int ascending(const void *a, const void *b) {
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

static status summed(const texture_model *m, profile *p, error *e) {
    enum { STEPS_MAX = 2 * (LIMIT_COATINGS + 1) };
    double steps[STEPS_MAX], total = m->heights->tallest_nm + all_films(m);
    size_t n_steps = step_depths(m, steps), even = m->n_films ? (m->heights->n > 1 ? 384 : 1024) : 1024;
    status st = allocate(p, even + 1 + 2 * n_steps, m->n_films, e);
    if (st != ST_OK) return st;
    qsort(steps, n_steps, sizeof *steps, ascending);
    size_t n = 0, next = 0;
    for (size_t i = 0; i <= even; i++) {
        double depth = i == even ? total : total * (double)i / (double)even;
        int at_step = 0;
        for (; next < n_steps && steps[next] <= depth; next++) {
            at_step = depth - steps[next] < 1e-9 * total;
            if (steps[next] > 0.0) fill(m, p, n++, steps[next], -1e-9 * total);
            if (steps[next] < total) fill(m, p, n++, steps[next], 1e-9 * total);
        }
        /* the floor counts from above: below it there is the substrate anyway */
        if (!at_step || i == even) fill(m, p, n++, depth, i == even ? -1e-9 * total : 0.0);
    }
    p->n = n;
    return ST_OK;
}

static status check_coatings(const layer *c, size_t n, error *e) {
    if (n > LIMIT_COATINGS)
        return fail(e, ST_BAD_INPUT, "coatings: found %zu, expected at most %d", n, LIMIT_COATINGS);
    for (size_t j = 0; j < n; j++)
        if (!(c[j].thickness_nm >= 0.0) || !isfinite(c[j].thickness_nm))
            return fail(e, ST_BAD_INPUT, "coating %zu: found a thickness of %g nm, expected 0 or more", j + 1,
                        c[j].thickness_nm);
    return ST_OK;
}

status link_profile(double height_nm, double spacing_nm, const double *cell_area_nm2, size_t n_cells, int pores,
                    const link_options *o, const layer *coatings, size_t n_coatings, profile *p, error *e) {
    height_classes heights;
    profile made = { 0 };
    *p = made;
    status st = link_check(height_nm, o, e);
    if (st == ST_OK) st = check_coatings(coatings, n_coatings, e);
    if (st != ST_OK || !(height_nm > 0.0)) return st; /* height 0: planar, no profile */
    size_t bins = n_coatings ? HEIGHT_CLASSES_FILM : HEIGHT_CLASSES;
    st = heights_make(height_nm, cell_area_nm2, n_cells, o, bins, &heights, e);
    if (st != ST_OK) return st;
    texture_model m = { .heights = &heights, .o = o, .n_films = n_coatings, .pores = pores != 0 };
    for (size_t k = 0; k < n_coatings; k++)
        m.film_nm[k + 1] = m.film_nm[k] + coatings[n_coatings - 1 - k].thickness_nm;
    double cell_radius_nm = cell_radius(spacing_nm, cell_area_nm2, n_cells);
    if (n_coatings && !(cell_radius_nm > 0.0))
        return fail(e, ST_BAD_INPUT, "a conformal coating needs the spacing of the features, and none is known; give "
                                     "a spacing");
    st = tip_check(height_nm, cell_radius_nm, o, e);
    if (st != ST_OK) return st;
    if (!(cell_radius_nm > 0.0)) cell_radius_nm = 1.0; /* without film and tip radius shares do not depend on it */
    for (size_t i = 0; i < heights.n; i++) m.feature[i] = solid_make(heights.height_nm[i], cell_radius_nm, o, NULL);
    share_table table;
    int plain = heights.n == 1 && !n_coatings, tabled = !plain && fabs(o->exponent - 1.0) >= 1e-12;
    if (tabled && share_table_make(o->exponent, &table))
        for (size_t i = 0; i < heights.n; i++) m.feature[i].table = &table;
    st = plain ? closed_form(&m, &made, e) : summed(&m, &made, e);
    if (st != ST_OK) {
        profile_free(&made);
        return st;
    }
    made.pores = m.pores;
    *p = made;
    return ST_OK;
}

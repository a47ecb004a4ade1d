/* Bounded non-linear least squares on cminpack's lmder.
 *
 * Bounds by a smooth change of variable (James F., Roos M. (1975), Computer Physics Communications 10, 343):
 *   both ends  x = middle + half sin t;  one end  x = lo - 1 + sqrt(t^2 + 1), mirrored for an upper end.
 * There the derivative vanishes at the bound itself, so a minimum on a bound is approached slowly: a parameter that
 * ends within a thousandth of its range from a bound is then put on it and the others are fitted again; this stands
 * if the sum of squares did not grow and falls only outwards. The covariance takes such a parameter as given.
 * Covariance: QR with column pivoting of the Jacobian at the solution, columns scaled to length 1; a column that adds
 * less than 1e-8 to the others is no independent direction, and every parameter of that direction gets an infinite u.
 * What this file does not do: weights (scale the residuals), robust losses, global search. */
#include "link/leastsq.h"

#include <cminpack.h>
#include <float.h>
#include <limits.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"

static const double RANK = 1e-8;       /* length a column must add, of its own length 1 */
static const double TWIN = 1e-3;       /* share of a column in a blind direction that counts */
static const double NEAR_BOUND = 1e-3; /* of the range */
static const double REJECTED = 1e100; /* residual where the model has no finite value; its square is finite */

least_problem least_defaults(void) {
    return (least_problem){ .sigma = MISSING, .tolerance = 1e-10, .max_evaluations = 2000 };
}

/* Work space of one call; everything in x space unless said. */
typedef struct {
    const least_problem *p;
    size_t n_free, *free;                                     /* parameters in the fit now */
    double *x, *other, *t;                                    /* [n], t [n_free] */
    double *r, *up, *down;                                    /* [m] */
    double *j;                                                /* [m * n] */
    double *jt, *wa1, *wa2, *wa3, *wa4, *qtf, *diag, *column; /* lmder's */
    int *pivot;
    size_t evaluations;
    status st;
    error *e;
} workspace;

static void workspace_free(workspace *w) {
    void *owned[] = { w->free, w->x,   w->other, w->t,   w->r,   w->up,   w->down,   w->j,    w->jt,
                      w->wa1,  w->wa2, w->wa3,   w->wa4, w->qtf, w->diag, w->column, w->pivot };
    for (size_t i = 0; i < sizeof owned / sizeof owned[0]; i++) free(owned[i]);
}

static status workspace_make(workspace *w, const least_problem *p, error *e) {
    size_t n = p->n, m = p->m;
    struct {
        double **at;
        size_t n;
    } wanted[] = {
        { &w->x, n },    { &w->other, n },  { &w->t, n },     { &w->r, m },    { &w->up, m },
        { &w->down, m }, { &w->jt, m * n }, { &w->j, m * n }, { &w->wa1, n },  { &w->wa2, n },
        { &w->wa3, n },  { &w->wa4, m },    { &w->qtf, n },   { &w->diag, n }, { &w->column, n },
    };
    w->p = p;
    w->e = e;
    w->free = mem_array(n, sizeof *w->free);
    w->pivot = mem_array(n, sizeof *w->pivot);
    int ok = w->free && w->pivot;
    for (size_t i = 0; i < sizeof wanted / sizeof wanted[0]; i++) {
        *wanted[i].at = mem_array(wanted[i].n, sizeof(double));
        ok = ok && *wanted[i].at;
    }
    return ok ? ST_OK : NO_MEMORY(e, "a least-squares fit");
}

/* ---- bounds ---- */

static double lower_of(const least_problem *p, size_t k) {
    return p->lower ? p->lower[k] : -(double)INFINITY;
}
static double upper_of(const least_problem *p, size_t k) { return p->upper ? p->upper[k] : (double)INFINITY; }

static double range_of(const least_problem *p, size_t k) {
    double lo = lower_of(p, k), hi = upper_of(p, k);
    if (isfinite(lo) && isfinite(hi)) return hi - lo;
    return fmax(1.0, isfinite(lo) ? fabs(lo) : fabs(hi));
}

static double x_of(const least_problem *p, size_t k, double t) {
    double lo = lower_of(p, k), hi = upper_of(p, k);
    if (isfinite(lo) && isfinite(hi)) return fmin(fmax(0.5 * (lo + hi) + 0.5 * (hi - lo) * sin(t), lo), hi);
    if (isfinite(lo)) return lo - 1.0 + sqrt(t * t + 1.0);
    if (isfinite(hi)) return hi + 1.0 - sqrt(t * t + 1.0);
    return t;
}

static double dx_dt(const least_problem *p, size_t k, double t) {
    double lo = lower_of(p, k), hi = upper_of(p, k);
    if (isfinite(lo) && isfinite(hi)) return 0.5 * (hi - lo) * cos(t);
    if (isfinite(lo)) return t / sqrt(t * t + 1.0);
    if (isfinite(hi)) return -t / sqrt(t * t + 1.0);
    return 1.0;
}

/* A start on a bound moves a hundredth of the range inside: on it the derivative is zero. */
static double t_of(const least_problem *p, size_t k, double x) {
    double lo = lower_of(p, k), hi = upper_of(p, k), inside = 0.01 * range_of(p, k);
    if (isfinite(lo) && isfinite(hi)) {
        x = fmin(fmax(x, lo + inside), hi - inside);
        return asin((x - 0.5 * (lo + hi)) / (0.5 * (hi - lo)));
    }
    double d = isfinite(lo) ? fmax(x - lo, inside) : isfinite(hi) ? fmax(hi - x, inside) : 0.0;
    return isfinite(lo) || isfinite(hi) ? sqrt((d + 1.0) * (d + 1.0) - 1.0) : x;
}

/* -1, 1: nearer to that bound than a thousandth of the range. */
static int near_bound(const least_problem *p, size_t k, double x) {
    double reach = NEAR_BOUND * range_of(p, k);
    return x - lower_of(p, k) < reach ? -1 : upper_of(p, k) - x < reach;
}

/* ---- the callbacks ---- */

static double squares(const double *r, size_t m) {
    double sum = 0.0;
    for (size_t i = 0; i < m; i++) sum += r[i] * r[i];
    return sum;
}

/* 1 fine; 0 stop this start (w->st says whether the whole fit ends). */
static int residuals(workspace *w, const double *x, double *r) {
    w->evaluations++;
    w->st = w->p->residuals(w->p->user, x, r, w->e);
    return w->st == ST_OK && isfinite(squares(r, w->p->m));
}

static int central_differences(workspace *w, const double *x, double *j) {
    const least_problem *p = w->p;
    memcpy(w->other, x, p->n * sizeof *x);
    for (size_t f = 0; f < w->n_free; f++) {
        size_t k = w->free[f];
        double h = p->step ? p->step[k] : cbrt(DBL_EPSILON) * (fabs(x[k]) > 0.0 ? fabs(x[k]) : 1.0);
        double a = fmax(x[k] - h, lower_of(p, k)), b = fmin(x[k] + h, upper_of(p, k));
        w->other[k] = a;
        if (!residuals(w, w->other, w->down)) return 0;
        w->other[k] = b;
        if (!residuals(w, w->other, w->up)) return 0;
        w->other[k] = x[k];
        for (size_t i = 0; i < p->m; i++) j[k * p->m + i] = (w->up[i] - w->down[i]) / (b - a);
    }
    return 1;
}

static int jacobian(workspace *w, const double *x, double *j) {
    if (!w->p->jacobian) return central_differences(w, x, j);
    w->evaluations++;
    w->st = w->p->jacobian(w->p->user, x, j, w->e);
    return w->st == ST_OK && isfinite(squares(j, w->p->m * w->p->n));
}

static int lmder_asks(void *user, int m, int n, const double *t, double *r, double *jt, int ld, int flag) {
    workspace *w = user;
    (void)m;
    (void)n;
    for (size_t f = 0; f < w->n_free; f++) w->x[w->free[f]] = x_of(w->p, w->free[f], t[f]);
    if (flag == 1) {
        if (residuals(w, w->x, r)) return 0;
        for (size_t i = 0; i < w->p->m; i++) r[i] = REJECTED; /* a step too far: lmder takes a shorter one */
        return w->st == ST_OK ? 0 : -1;
    }
    if (!jacobian(w, w->x, w->j)) return -1;
    for (size_t f = 0; f < w->n_free; f++) {
        double slope = dx_dt(w->p, w->free[f], t[f]);
        const double *from = w->j + w->free[f] * w->p->m;
        for (size_t i = 0; i < w->p->m; i++) jt[f * (size_t)ld + i] = from[i] * slope;
    }
    return 0;
}

static const char *words_of(int info) {
    switch (info) {
    case 1:
    case 2:
    case 3:
        return "converged";
    case 4:
        return "converged: no direction lowers the residuals";
    case 5:
        return "stopped at the limit of evaluations before it converged";
    case 6:
    case 7:
    case 8:
        return "converged to the precision of the machine";
    default:
        return "stopped where the model gives no finite value";
    }
}

/* ---- one start ---- */

/* Fits the free parameters from w->x on, into w->x and w->r. *info as lmder's, or below 0. */
static status fit_free(workspace *w, int *info) {
    const least_problem *p = w->p;
    int m = (int)p->m, n = (int)w->n_free, calls = 0, jacobians = 0;
    *info = n > 0 && !residuals(w, w->x, w->r) ? -1 : 4; /* no finite value at the start itself */
    if (w->st != ST_OK) return w->st;
    if (n > 0 && *info > 0) {
        for (size_t f = 0; f < w->n_free; f++) w->t[f] = t_of(p, w->free[f], w->x[w->free[f]]);
        *info = lmder(lmder_asks, w, m, n, w->t, w->r, w->jt, m, p->tolerance, p->tolerance, 0.0,
                      p->max_evaluations, w->diag, 1, 100.0, 0, &calls, &jacobians, w->pivot, w->qtf, w->wa1,
                      w->wa2, w->wa3, w->wa4);
        if (w->st != ST_OK) return w->st;
        for (size_t f = 0; f < w->n_free; f++) w->x[w->free[f]] = x_of(p, w->free[f], w->t[f]);
    }
    if (!residuals(w, w->x, w->r)) *info = -1;
    return w->st;
}

/* The sum of squares falls only outwards at every pinned parameter. */
static int outwards(workspace *w, const int *pinned) {
    const least_problem *p = w->p;
    size_t n_free = w->n_free;
    for (size_t k = 0; k < p->n; k++) w->free[k] = k;
    w->n_free = p->n;
    int ok = jacobian(w, w->x, w->j);
    for (size_t k = 0; k < p->n && ok; k++) {
        double slope = 0.0;
        for (size_t i = 0; i < p->m; i++) slope += w->j[k * p->m + i] * w->r[i];
        if (pinned[k]) ok = pinned[k] > 0 ? slope <= 0.0 : slope >= 0.0;
    }
    w->n_free = n_free;
    return ok;
}

static status fit_start(workspace *w, const double *start, int *pinned, double *x, double *sum, int *info) {
    const least_problem *p = w->p;
    size_t n = p->n, n_pinned = 0;
    memcpy(w->x, start, n * sizeof *x);
    memset(pinned, 0, n * sizeof *pinned);
    w->n_free = n;
    for (size_t k = 0; k < n; k++) w->free[k] = k;
    status st = fit_free(w, info);
    if (st != ST_OK) return st;
    *sum = *info < 0 ? MISSING : squares(w->r, p->m);
    memcpy(x, w->x, n * sizeof *x);
    for (size_t k = 0; k < n && isfinite(*sum); k++) n_pinned += (pinned[k] = near_bound(p, k, x[k])) != 0;
    if (!n_pinned) return ST_OK;
    int again = 0;
    w->n_free = 0;
    for (size_t k = 0; k < n; k++) {
        if (pinned[k])
            w->x[k] = pinned[k] < 0 ? lower_of(p, k) : upper_of(p, k);
        else
            w->free[w->n_free++] = k;
    }
    st = fit_free(w, &again);
    if (st != ST_OK) return st;
    if (again > 0 && squares(w->r, p->m) <= *sum * (1.0 + 1e-6) && outwards(w, pinned)) {
        *info = again;
        *sum = squares(w->r, p->m);
        memcpy(x, w->x, n * sizeof *x);
    } else {
        if (w->st != ST_OK) return w->st;
        memset(pinned, 0, n * sizeof *pinned);
    }
    return ST_OK;
}

/* ---- covariance ---- */

/* Marks every parameter of a direction the data do not see: column d is a sum of the first `rank` ones. */
static void mark_blind(const workspace *w, int n, int rank, double *u) {
    int m = (int)w->p->m;
    for (int d = rank; d < n; d++) {
        u[w->free[w->pivot[d] - 1]] = (double)INFINITY;
        for (int i = rank - 1; i >= 0; i--) { /* back substitution, coefficients into wa1 */
            double c = w->jt[(size_t)d * (size_t)m + (size_t)i];
            for (int k = i + 1; k < rank; k++) c -= w->jt[(size_t)k * (size_t)m + (size_t)i] * w->wa1[k];
            w->wa1[i] = c / w->jt[(size_t)i * (size_t)m + (size_t)i];
            if (fabs(w->wa1[i]) > TWIN) u[w->free[w->pivot[i] - 1]] = (double)INFINITY;
        }
    }
}

/* Jacobian in x at the solution, free columns only, scaled: QR, rank, inverse. */
static status covariance(workspace *w, least_fit *out) {
    const least_problem *p = w->p;
    size_t m = p->m, n = w->n_free;
    if (!jacobian(w, out->x, w->j))
        return w->st != ST_OK
                   ? w->st
                   : fail(w->e, ST_NO_RESULT, "the model gives no finite slopes at the best point");
    for (size_t f = 0; f < n; f++) {
        const double *from = w->j + w->free[f] * m;
        w->column[f] = sqrt(squares(from, m));
        for (size_t i = 0; i < m; i++) w->jt[f * m + i] = w->column[f] > 0.0 ? from[i] / w->column[f] : 0.0;
    }
    qrfac((int)m, (int)n, w->jt, (int)m, 1, w->pivot, (int)n, w->wa1, w->wa2, w->wa3);
    for (size_t f = 0; f < n; f++) w->jt[f * m + f] = w->wa1[f]; /* qrfac keeps R's diagonal apart */
    int rank = 0;
    while ((size_t)rank < n && fabs(w->wa1[rank]) > RANK) rank++;
    out->rank = (size_t)rank;
    out->freedom = m - out->rank;
    out->variance = isfinite(p->sigma) ? p->sigma * p->sigma
                    : out->freedom     ? out->sum_of_squares / (double)out->freedom
                                       : MISSING;
    mark_blind(w, (int)n, rank, out->u);
    covar((int)n, w->jt, (int)m, w->pivot, RANK, w->wa1);
    for (size_t a = 0; a < n; a++)
        for (size_t b = 0; b < n; b++) {
            size_t ka = w->free[a], kb = w->free[b];
            if (!isfinite(out->u[ka]) || !isfinite(out->u[kb])) continue;
            out->covariance[ka * p->n + kb] =
                w->jt[b * m + a] / (w->column[a] * w->column[b]) * out->variance;
        }
    for (size_t a = 0; a < n; a++)
        if (isfinite(out->u[w->free[a]])) out->u[w->free[a]] = sqrt(out->covariance[w->free[a] * (p->n + 1)]);
    return ST_OK;
}

/* ---- all together ---- */

static status check(const least_problem *p, error *e) {
    if (!p->n || !p->n_starts || !p->residuals)
        return fail(e, ST_BAD_INPUT, "a fit needs a model, at least one free parameter and one start");
    if (p->m < p->n || p->m > INT_MAX / (p->n + 1))
        return fail(e, ST_BAD_INPUT, "%zu values cannot determine %zu parameters", p->m, p->n);
    for (size_t k = 0; k < p->n; k++) {
        if (!(lower_of(p, k) < upper_of(p, k)))
            return fail(e, ST_BAD_INPUT, "parameter %zu: the lower bound %g is not below the upper one %g",
                        k + 1, lower_of(p, k), upper_of(p, k));
        for (size_t s = 0; s < p->n_starts; s++) {
            double x = p->starts[s * p->n + k];
            if (!isfinite(x) || !(x >= lower_of(p, k) && x <= upper_of(p, k)))
                return fail(e, ST_BAD_INPUT, "parameter %zu: the start %g lies outside %g to %g", k + 1, x,
                            lower_of(p, k), upper_of(p, k));
        }
    }
    return ST_OK;
}

static status allocate(const least_problem *p, least_fit *f, error *e) {
    size_t n = p->n, s = p->n_starts;
    *f = (least_fit){ .n = n, .m = p->m, .n_starts = s };
    f->x = mem_array(n, sizeof *f->x);
    f->u = mem_array(n, sizeof *f->u);
    f->covariance = mem_array(n * n, sizeof *f->covariance);
    f->at_bound = mem_array(n, sizeof *f->at_bound);
    f->r = mem_array(p->m, sizeof *f->r);
    f->end_x = mem_array(s * n, sizeof *f->end_x);
    f->end_sum = mem_array(s, sizeof *f->end_sum);
    f->end_arrived = mem_array(s, sizeof *f->end_arrived);
    int ok = f->x && f->u && f->covariance && f->at_bound && f->r && f->end_x && f->end_sum && f->end_arrived;
    return ok ? ST_OK : NO_MEMORY(e, "a least-squares fit");
}

/* A converged point beats one that is not; then the smaller sum, the earlier start. */
static int better(const least_fit *f, size_t s, int arrived) {
    if (!isfinite(f->end_sum[s])) return 0;
    if (!isfinite(f->sum_of_squares) || arrived > f->converged) return 1;
    return arrived == f->converged && f->end_sum[s] < f->sum_of_squares;
}

static status every_start(workspace *w, least_fit *f, int *pinned) {
    const least_problem *p = w->p;
    f->sum_of_squares = MISSING;
    f->ended = words_of(-1);
    for (size_t s = 0; s < p->n_starts; s++) {
        int info = 0;
        status st = fit_start(w, p->starts + s * p->n, pinned, f->end_x + s * p->n, &f->end_sum[s], &info);
        if (st != ST_OK) return st;
        int arrived = isfinite(f->end_sum[s]) && info > 0 && info != 5;
        f->end_arrived[s] = arrived;
        f->n_arrived += (size_t)arrived;
        if (!better(f, s, arrived)) continue;
        memcpy(f->x, f->end_x + s * p->n, p->n * sizeof *f->x);
        memcpy(f->at_bound, pinned, p->n * sizeof *pinned);
        f->sum_of_squares = f->end_sum[s];
        f->best_start = s;
        f->converged = arrived;
        f->ended = words_of(info);
    }
    return ST_OK;
}

status least_squares(const least_problem *p, least_fit *out, error *e) {
    *out = (least_fit){ 0 };
    status st = check(p, e);
    if (st != ST_OK) return st;
    workspace w = { 0 };
    least_fit f = { 0 };
    int *pinned = mem_array(p->n, sizeof *pinned);
    st = pinned ? workspace_make(&w, p, e) : NO_MEMORY(e, "a least-squares fit");
    if (st == ST_OK) st = allocate(p, &f, e);
    if (st == ST_OK) st = every_start(&w, &f, pinned);
    if (st == ST_OK && isfinite(f.sum_of_squares)) {
        w.n_free = 0;
        for (size_t k = 0; k < p->n; k++)
            if (!f.at_bound[k]) w.free[w.n_free++] = k;
        if (!residuals(&w, f.x, f.r)) st = w.st;
        if (st == ST_OK) st = covariance(&w, &f);
    }
    f.evaluations = w.evaluations;
    if (st == ST_OK && !f.converged)
        st = fail(e, ST_NO_RESULT, "the fit did not converge from any of %zu starts; the best one %s",
                  p->n_starts, f.ended);
    if (st == ST_OK || (st == ST_NO_RESULT && isfinite(f.sum_of_squares))) {
        *out = f;
        f = (least_fit){ 0 };
    }
    least_free(&f);
    workspace_free(&w);
    free(pinned);
    return st;
}

void least_free(least_fit *f) {
    void *owned[] = { f->x, f->u, f->covariance, f->at_bound, f->r, f->end_x, f->end_sum, f->end_arrived };
    for (size_t i = 0; i < sizeof owned / sizeof owned[0]; i++) free(owned[i]);
    *f = (least_fit){ 0 };
}

double least_correlation(const least_fit *f, size_t a, size_t b) {
    double ua = f->u[a], ub = f->u[b];
    if (!isfinite(ua) || !isfinite(ub) || !(ua > 0.0) || !(ub > 0.0)) return 0.0;
    return f->covariance[a * f->n + b] / (ua * ub);
}

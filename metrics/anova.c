/* Nested analysis of variance by sums over the groups of each level.
 *
 * Level 0 is everything, levels 1 .. factors the groups of the factors, level factors + 1 the single observations. With
 * T_i = sum over groups of (sum of the group)^2 / its size, the sum of squares of level i is T_i - T_{i-1}; the variance
 * component of level j >= i enters its expectation with A(i, j) - A(i - 1, j), where A(i, j) is the sum over groups g of
 * level i of (sum of squared sizes of the groups of level j inside g) / size of g. The system is triangular and is solved
 * from the residual outwards. Not in here: crossed factors, interactions, tests of significance. */
#include "metrics/anova.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"

typedef struct {
    double v;
    int label[ANOVA_FACTORS];
} observation;

static int by_labels(const void *a, const void *b) {
    const observation *p = a, *q = b;
    for (size_t k = 0; k < ANOVA_FACTORS; k++)
        if (p->label[k] != q->label[k]) return p->label[k] < q->label[k] ? -1 : 1;
    return (p->v > q->v) - (p->v < q->v);
}

/* 1 when observation k opens a new group of this level. */
static int opens(const observation *o, size_t k, size_t level, size_t factors) {
    if (k == 0 || level > factors) return 1;
    for (size_t f = 0; f < level; f++)
        if (o[k].label[f] != o[k - 1].label[f]) return 1;
    return 0;
}

/* T of a level, and how many groups it has. */
static double group_squares(const observation *o, size_t n, size_t level, size_t factors, double *groups) {
    double sum = 0.0, size = 0.0, t = 0.0;
    *groups = 0.0;
    for (size_t k = 0; k < n; k++) {
        if (opens(o, k, level, factors)) {
            if (k) t += sum * sum / size;
            sum = size = 0.0;
            *groups += 1.0;
        }
        sum += o[k].v;
        size += 1.0;
    }
    return t + sum * sum / size;
}

static double size_squares(const observation *o, size_t n, size_t i, size_t j, size_t factors) {
    double inner = 0.0, squares = 0.0, outer = 0.0, a = 0.0;
    for (size_t k = 0; k < n; k++) {
        if (k && opens(o, k, j, factors)) {
            squares += inner * inner;
            inner = 0.0;
        }
        if (k && opens(o, k, i, factors)) {
            a += squares / outer;
            squares = outer = 0.0;
        }
        inner += 1.0;
        outer += 1.0;
    }
    return a + (squares + inner * inner) / outer;
}

static void solve(const observation *o, size_t n, size_t factors, anova *out) {
    double t[ANOVA_FACTORS + 2], groups[ANOVA_FACTORS + 2], component[ANOVA_FACTORS + 2] = { 0.0 };
    for (size_t i = 0; i <= factors + 1; i++) t[i] = group_squares(o, n, i, factors, &groups[i]);
    for (size_t i = factors + 1; i >= 1; i--) {
        anova_line *l = &out->line[i - 1];
        *l = (anova_line){ fmax(0.0, t[i] - t[i - 1]), groups[i] - groups[i - 1], MISSING };
        if (!(l->dof > 0.0)) continue;
        double rest = l->ss;
        for (size_t j = i + 1; j <= factors + 1; j++)
            rest -= component[j] * (size_squares(o, n, i, j, factors) - size_squares(o, n, i - 1, j, factors));
        component[i] = rest / (size_squares(o, n, i, i, factors) - size_squares(o, n, i - 1, i, factors));
        l->variance = fmax(0.0, component[i]);
    }
}

status anova_nested(const double *v, const int *label, size_t n, size_t factors, anova *out, error *e) {
    if (n < 2 || factors > ANOVA_FACTORS)
        return fail(e, ST_BAD_INPUT, "analysis of variance of %zu values by %zu causes; expected at least 2 and at most %d", n,
                    factors, ANOVA_FACTORS);
    observation *o = mem_array(n, sizeof *o);
    if (!o) return NO_MEMORY(e, "the analysis of variance");
    double mean = 0.0;
    for (size_t k = 0; k < n; k++) mean += v[k] / (double)n;
    if (!isfinite(mean)) {
        free(o);
        return fail(e, ST_BAD_INPUT, "analysis of variance: a value is missing");
    }
    for (size_t k = 0; k < n; k++) {
        o[k] = (observation){ v[k] - mean, { 0 } }; /* about the mean, so that squares keep their digits */
        for (size_t f = 0; f < factors; f++) o[k].label[f] = label[k * factors + f];
    }
    qsort(o, n, sizeof *o, by_labels);
    *out = (anova){ .mean = mean, .n = n, .factors = factors };
    solve(o, n, factors, out);
    free(o);
    return ST_OK;
}

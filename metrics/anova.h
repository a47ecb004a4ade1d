/* Nested analysis of variance: how much each of several nested causes adds to the scatter of a figure. Pure arithmetic. */
#ifndef SWARD_METRICS_ANOVA_H
#define SWARD_METRICS_ANOVA_H
#include <stddef.h>

#include "base/status.h"

enum { ANOVA_FACTORS = 3 };

/* One line of the table; the last line in use is the residual (repetitions under the same conditions). */
typedef struct {
    double ss;       /* sum of squares */
    double dof;      /* degrees of freedom; 0: this cause never varied */
    double variance; /* component of variance, 0 where the estimate is negative; NAN with dof 0 */
} anova_line;

typedef struct {
    double mean;
    size_t n, factors;
    anova_line line[ANOVA_FACTORS + 1]; /* [factors] factors from the outermost in, then the residual */
} anova;

/* Components of variance of a nested design, unbalanced allowed (expected mean squares of Henderson's first method).
 *   in  v[n]; label[n * factors], row by row: which group of each factor an observation belongs to, from the outermost
 * factor in. Groups of an inner factor are told apart within their outer group only
 *   out *out
 *   err ST_BAD_INPUT n < 2, more than ANOVA_FACTORS factors, a value that is not finite; ST_NO_MEMORY
 *   src ISO 5725-2:2019 (one factor) and 5725-3 (nested, staggered) from memory; Searle S.R., Casella G., McCulloch C.E.
 * 1992, Variance Components, ch. 5 (from memory) */
status anova_nested(const double *v, const int *label, size_t n, size_t factors, anova *out, error *e);

#endif

/* What happened inside one phase of a chart: values that stand out, steps, the onset of a drift. Pure. */
#ifndef SWARD_JUDGE_FINDING_H
#define SWARD_JUDGE_FINDING_H
#include <stddef.h>

#include "base/status.h"
#include "judge/trend.h"

#define FINDINGS_MOST 16      /* of each kind; more are not looked for */
#define FINDINGS_LEAST 20     /* values without which no step is looked for */

typedef struct {
    size_t at;       /* index of the value */
    double value, beside; /* what it is, and the nearer median of its neighbours before and behind */
} finding_outlier;

typedef enum { BREAK_STEP, BREAK_BEND } break_kind; /* the level changes; the slope changes */

typedef struct {
    break_kind kind;
    size_t before, at;     /* last value of the old stretch, first of the new one */
    double size, lo, hi;   /* of a step, between the levels or lines of its two stretches, 95 % interval; of a bend NAN */
    double p;              /* of a break as clear as this anywhere in the stretch without one */
} finding_break;

/* From break to break, without the outliers. */
typedef struct {
    size_t first, last, n;
    trend_slope drift;     /* per value; n 0: fewer than 5 */
} finding_stretch;

typedef struct {
    finding_outlier outliers[FINDINGS_MOST];
    size_t n_outliers;
    finding_break breaks[FINDINGS_MOST]; /* in order */
    size_t n_breaks;
    finding_stretch stretches[FINDINGS_MOST + 1]; /* [n_breaks + 1] */
    size_t n;
} findings;

/* Deterministic: the shuffles have a fixed seed.
 *   in   v[n] in time order, NAN = left out; of more than TREND_MOST the last are taken
 *   out  indices count in v
 *   err  ST_NO_MEMORY
 *   src  outliers: median of the neighbours against the median moving range (Hampel F.R. (1974) J. Am. Stat. Assoc. 69,
 *        383-393, from memory); breaks: largest reduction of the sum of squares over all places, form by Schwarz G. (1978) Ann.
 *        Stat. 6, 461-464, judged by shuffled residuals with sequential stopping (Besag J., Clifford P. (1991) Biometrika 78,
 *        301-304, from memory), then the halves (binary segmentation, Scott A.J., Knott M. (1974) Biometrics 30, 507-512, from memory) */
status findings_of(const double *v, size_t n, findings *out, error *e);

#endif

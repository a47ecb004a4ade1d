/* How well a process keeps its target range, with intervals, and whether the figure may be believed. Pure. */
#ifndef SWARD_JUDGE_CAPABILITY_H
#define SWARD_JUDGE_CAPABILITY_H
#include <stddef.h>

#include "base/status.h"

typedef enum {
    CAPABLE_NORMAL,     /* normality is not refuted: mean and sd */
    CAPABLE_LOG_NORMAL, /* refuted, but not that of the logarithms: quantiles of a log-normal law */
    CAPABLE_NEITHER     /* both refuted: the figures say little */
} capability_form;

typedef struct {
    double value, lo, hi; /* 95 % interval; NAN: cannot be said */
} capability_index;

typedef struct {
    size_t n;
    double mean, sd;               /* of all values */
    double sd_within;              /* from moving ranges: what the process could do without drift */
    capability_index Cp, Cpk;      /* with sd_within, "capability" */
    capability_index Pp, Ppk;      /* with sd, or by quantiles: "performance", what was delivered */
    double normality, normality_p; /* Anderson-Darling, adjusted, and its probability; NAN below 8 values */
    capability_form form;
    double expected_outside; /* share of etches outside the range by the law taken; NAN for NEITHER */
} capability;

/* Index of a range by quantiles, min((hi - q50)/(q_hi - q50), (q50 - lo)/(q50 - q_lo)); a missing limit is open.
 *   src  ISO 22514-2, q_lo and q_hi being the 0.135 % and 99.865 % quantiles */
double capability_by_quantiles(double lo, double hi, double q_lo, double q50, double q_hi);

/* Anderson-Darling statistic of a normal law with estimated mean and sd, adjusted for n.
 *   out  *p probability of a larger one under a normal law
 *   err  NAN and *p NAN below 8 values, without spread, or without memory
 *   src  Stephens M.A. (1974) J. Am. Stat. Assoc. 69, 730-737; p by D'Agostino and Stephens (1986), from memory */
double normality_statistic(const double *v, size_t n, double *p);

/* in   v[n] finite, in time order; lo, hi the target range, NAN = open
 * out  what is unknown is NAN (two-sided indices with an open side, the interval of a quantile form)
 * err  ST_BAD_INPUT no limit, lo not below hi; ST_NO_RESULT fewer than 5 values or no spread; ST_NO_MEMORY
 * src  ISO 22514-2; intervals: chi squared for Cp and Pp, Bissell A.F. (1990) Appl. Stat. 39, 331-340 for Cpk and Ppk; the
 *      mean moving range counts as 0.605 of its n - 1 degrees of freedom (Cryer J.D., Ryan T.P. (1990) J. Qual. Technol.
 *      22, 187-192; from memory) */
status capability_of(const double *v, size_t n, double lo, double hi, capability *out, error *e);

#endif

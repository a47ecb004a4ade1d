/* How many more micrographs of the same kind an uncertainty needs to become small enough. Pure arithmetic. */
#ifndef SWARD_METRICS_PLAN_H
#define SWARD_METRICS_PLAN_H
#include <stddef.h>

#include "metrics/budget.h"

/* What is known now. More micrographs lower `sampling` (the larger of within and between) as 1 / sqrt(number) and add one
 * degree of freedom each; `common` (method, detection, pixel size) stays. */
typedef struct {
    budget_part sampling; /* of the mean over the micrographs; dof HUGE_VAL: judge with the normal law */
    budget_part common;
    size_t micrographs; /* behind `sampling`, at least 1 */
} plan_state;

enum { PLAN_NEVER = -1, PLAN_MOST = 1000 };

typedef struct {
    long more;       /* micrographs beyond those there are; 0: already small enough; PLAN_NEVER: no number serves;
                      * PLAN_MOST: that many would not do */
    double now;      /* k u as it stands */
    double smallest; /* k u that no number of micrographs gets below: that of `common` alone */
} plan_answer;

/* Smallest number of further micrographs that brings k u to `half_width` or below, k from Student's t for the stated coverage
 * (two-sided, 0..1) and the degrees of freedom there will be then. For a guard band on one side with probability p pass coverage
 * 2 p - 1.
 *   in  half_width > 0, same unit as the parts
 *   out numbers NAN and more PLAN_NEVER when a part is unknown
 *   src inverse of JCGM 100 annex G; the scatter seen so far stands for the scatter to come (Stein C. 1945, Ann. Math. Stat. 16:243,
 * does so for the first of two samples; from memory) */
plan_answer plan_micrographs(const plan_state *s, double half_width, double coverage);

#endif

/* An uncertainty budget: independent components to combined uncertainty, degrees of freedom, interval. */
#ifndef SWARD_METRICS_BUDGET_H
#define SWARD_METRICS_BUDGET_H
#include <stddef.h>

typedef struct {
    double u;   /* standard uncertainty, in the unit of the result; NAN: unknown */
    double dof; /* degrees of freedom behind u; HUGE_VAL: u is known exactly */
} budget_part;

typedef struct {
    double u;   /* combined standard uncertainty */
    double dof; /* effective degrees of freedom; HUGE_VAL when every part that counts is known exactly */
    double k;   /* coverage factor */
} budget_total; /* the interval is value -+ k u */

/* Root sum of squares (JCGM 100, 5.1), effective degrees of freedom (Welch-Satterthwaite, G.4.1) and the coverage
 * factor by Student's t (G.3). Degrees of freedom are not rounded down: t is taken between whole numbers (G.4.1, note).
 *   in  part[n] independent of each other; coverage 0..1, such as 0.95
 *   out all NAN when a part is unknown or n = 0; u = 0 gives dof HUGE_VAL
 *   src JCGM 100:2008 (GUM), annex G; clause numbers from memory */
budget_total budget_combine(const budget_part *part, size_t n, double coverage);

/* Degrees of freedom of an uncertainty that is itself only known to a relative standard uncertainty (JCGM 100, G.4.2):
 * 1 / (2 relative^2). */
double dof_of_reliability(double relative);

#endif

/* Combined uncertainty, Welch-Satterthwaite, coverage factor: JCGM 100. Correlated inputs are not in here: what is
 * common to several parts of one figure (the pixel size) enters as one part. */
#include "metrics/budget.h"

#include <math.h>

#include "base/quantity.h"
#include "metrics/student.h"

double dof_of_reliability(double relative) { return 0.5 / (relative * relative); }

budget_total budget_combine(const budget_part *part, size_t n, double coverage) {
    double uu = 0.0, shares = 0.0;
    for (size_t i = 0; i < n; i++) uu += part[i].u * part[i].u;
    if (n == 0 || !isfinite(uu)) return (budget_total){ MISSING, MISSING, MISSING };
    for (size_t i = 0; i < n && uu > 0.0; i++) {
        double share = part[i].u * part[i].u / uu;
        shares += share * share / part[i].dof; /* exactly known: adds nothing */
    }
    double dof = shares > 0.0 ? 1.0 / shares : HUGE_VAL;
    return (budget_total){ sqrt(uu), dof, student_t_at(0.5 + 0.5 * coverage, dof) };
}

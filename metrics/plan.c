/* Planning: the reach k u as a function of the number of micrographs falls steadily towards that of the common part, so
 * the smallest number that does is found by doubling and halving. Not in here: larger fields in place of more
 * micrographs, which lower the part within but not the part between. */
#include "metrics/plan.h"

#include <math.h>

#include "base/quantity.h"

static double reach_with(const plan_state *s, size_t more, double coverage) {
    double n = (double)s->micrographs, m = n + (double)more;
    budget_part part[2] = { { s->sampling.u * sqrt(n / m), s->sampling.dof + (double)more }, s->common };
    budget_total t = budget_combine(part, 2, coverage);
    return t.k * t.u;
}

plan_answer plan_micrographs(const plan_state *s, double half_width, double coverage) {
    budget_total common = budget_combine(&s->common, 1, coverage);
    plan_answer a = { PLAN_NEVER, MISSING, MISSING };
    if (s->micrographs == 0 || !isfinite(s->sampling.u) || !isfinite(s->common.u)) return a;
    a.now = reach_with(s, 0, coverage);
    a.smallest = common.k * common.u;
    if (a.now <= half_width) {
        a.more = 0;
    } else if (a.smallest < half_width) {
        size_t low = 0, high = 1; /* low does not serve, high is not known to */
        while (high < PLAN_MOST && reach_with(s, high, coverage) > half_width) {
            low = high;
            high *= 2;
        }
        if (high > PLAN_MOST) high = PLAN_MOST;
        while (high - low > 1) {
            size_t mid = low + (high - low) / 2;
            if (reach_with(s, mid, coverage) > half_width) low = mid;
            else high = mid;
        }
        a.more = (long)high;
    }
    return a;
}

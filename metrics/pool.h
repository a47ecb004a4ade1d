/* Joins the micrographs of one sample. */
#ifndef SWARD_METRICS_POOL_H
#define SWARD_METRICS_POOL_H
#include "base/status.h"
#include "metrics/texture.h"

/* One quantity over the micrographs of a sample (JCGM 100, 4.2 and 5.1).
 *   in   m[n] the quantity in each micrograph; weight[n] > 0, its number of features, from which field_dof() tells how well each
 *        knows its own part. Micrographs with a value NAN or a weight not above 0 take no part
 *   out  m.value: weighted mean. m.u_sampling: the larger of within, the propagated part sqrt(sum (w u)^2) / sum w, and between,
 *        the standard error of the weighted mean from the scatter (NAN from one micrograph): a wafer that varies from place to
 *        place may not look better known than it is. m.u_method: weighted mean of the method parts, common to all, so it does not
 *        average out. m.n: sum of n. dof of u_sampling: where the scatter agrees with what the micrographs know themselves
 *        (F test, 5 %), both speak for it and their degrees of freedom add; else it is the scatter's, one less than the micrographs
 *   err  ST_NO_RESULT no micrograph has the quantity (out->m is then NAN) */
typedef struct {
    measured m;
    double within, between, dof;
    size_t micrographs;
} pooled;
status pool_parts(const measured *m, const double *weight, size_t n, pooled *out);

/* The same for a direction with period 180 deg (weighted mean of the doubled angle). */
status pool_axis(const measured *m, const double *weight, size_t n, measured *out);

/* Is a stretch that of the texture, or of the imaging? What the texture or a tilted stage does is the same in every micrograph of a
 * sample; astigmatism and drift change from one to the next.
 *   in   stretch[n] (>= 1) and angle_deg[n] with u_sampling of stretch; members without them take no part. Micrographs taken with
 *        turned scan are to be turned back first
 *   out  mean strain as a vector of the doubled angle, weighted by 1 / u^2: its stretch, direction and standard score; p: chance of
 *        so much disagreement between the micrographs if all showed one stretch (chi-square), NAN for one micrograph
 *   err  ST_NO_RESULT none has a stretch */
typedef struct {
    double stretch, angle_deg, z, p;
    size_t micrographs;
} pooled_stretch;
status pool_stretch(const measured *stretch, const measured *angle_deg, size_t n, pooled_stretch *out);

#endif

/* How even a wafer is: centre against edge, range and scatter of the samples taken on it. Pure. */
#ifndef SWARD_JUDGE_WAFER_H
#define SWARD_JUDGE_WAFER_H
#include <stddef.h>

#include "judge/sentence.h"

typedef struct {
    size_t n;
    double mean, sd, range;        /* of the samples; sd with n - 1 */
    double sd_rel;                 /* sd / mean: the "1-sigma over the wafer" */
    double edge_minus_centre;      /* mean of the outer samples less mean of the inner ones */
    double edge_minus_centre_rel;  /* of the mean of the inner ones */
    size_t n_centre, n_edge;
    double radius_mm;              /* of the outermost sample */
} wafer_evenness;

/* Inner samples lie within a third of the radius of the outermost one, outer ones beyond two thirds.
 *   in   v[n] (NAN: left out), x_mm[n], y_mm[n] from the middle of the wafer (NAN: left out)
 *   out  edge figures NAN where no sample lies inside or outside
 *   err  0 with fewer than 3 samples at known places, or all at one place; else 1 */
int wafer_even(const double *v, const double *x_mm, const double *y_mm, size_t n, wafer_evenness *out);

/* "spacing on wafer G115 W05: edge less centre +25.3 nm (+7.4 %), range 25.3 nm, sd 13.1 nm (3.7 %), 3 samples" and, above
 * 10 % of difference, where to look first. */
void wafer_sentence(const sentence_subject *s, const char *wafer, const wafer_evenness *w, textbuf *t);

#endif

/* Layers of bodies in contact: the distance of neighbours. */
#ifndef SWARD_METRICS_LAYER_H
#define SWARD_METRICS_LAYER_H
#include "base/status.h"
#include "metrics/texture.h"

typedef struct {
    double mode_px;  /* most frequent distance of neighbours */
    double mean_px;  /* mean distance within the first shell */
    double sd_px;    /* and the standard deviation about it */
    double contrast; /* density of pairs at the mode / between the first and the second shell */
    double e1, e2;   /* distance ~ mean (1 + e1 cos 2 phi + e2 sin 2 phi), phi clockwise from x (y down) */
    size_t n_pairs;  /* in the shell */
} first_shell;

/*   in   centres of features of a field of nx x ny
 *   out  NAN and 0 where there are fewer than 10 pairs. Untouched on failure
 *   err  ST_NO_MEMORY */
status layer_shell(const feature *features, size_t n, size_t nx, size_t ny, first_shell *out, error *e);

/* 1: the shell stands apart from what follows, as it does where bodies touch or stand on a lattice. */
int layer_distinct(const first_shell *s);

#endif

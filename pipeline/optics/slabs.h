/* A profile cut into slabs. Internal to the room. */
#ifndef SWARD_OPTICS_SLABS_H
#define SWARD_OPTICS_SLABS_H
#include "optics/stack.h"

/* Each slab carries the shares at its two Gauss points (upper, lower), of the straight line that has the
 * profile's mean and first moment there: what a fourth-order step needs. Steps and kinks of the profile are
 * slab boundaries. */
typedef struct {
    size_t n, kinds; /* slabs from the top; kinds = 1 + coatings */
    double *thickness_nm;
    double *share; /* [n][2][kinds] */
} slabs;           /* {0} = empty; owned */

/* err ST_BAD_INPUT: fewer than two nodes, no depth, depths that turn back, shares outside 0..1 or summing
 * above 1 */
status profile_check(const profile *p, error *e);

/* Slabs at a level of refinement: each level doubles every piece. p checked. err ST_NO_MEMORY */
status slabs_make(slabs *s, const profile *p, int level, error *e);
void slabs_free(slabs *s);

#endif

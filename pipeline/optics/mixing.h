/* Effective permittivity of a mixture of phases, one place, many wavelengths. Internal to the room.
 * Phase 0 is the ambient, phase 1 the solid, phases 2.. the coatings. */
#ifndef SWARD_OPTICS_MIXING_H
#define SWARD_OPTICS_MIXING_H
#include "optics/lanes.h"
#include "optics/stack.h"

enum { MIX_PHASES = 2 + LIMIT_COATINGS };

/* One block of wavelengths, prepared once and used for every slab. */
typedef struct {
    mixing rule;
    int pores;        /* Maxwell Garnett: the solid is the host, ambient and coatings are enclosed */
    size_t n, phases; /* lanes in use; >= 2 */
    lanes eps[MIX_PHASES];
    lanes a, b, c;          /* what the two-phase formula of the rule needs per wavelength */
    lanes part[MIX_PHASES]; /* >= 3 phases, what a phase adds in proportion to its share: cube root
                               (Looyenga), polarisability (Maxwell Garnett), logarithm (start of Bruggeman) */
} mixer;

/*   in   eps[phases][n] via m->eps, filled by the caller; Im >= 0
 *   out  m ready for mixing_at */
void mixing_prepare(mixer *m, mixing rule, int pores, size_t phases, size_t n);

/* share[phases - 1]: solid, then coatings; the ambient has the rest.
 *   in   near: NULL, or the in-plane values of a mixture nearby, from where the search of a Bruggeman root
 * with three and more phases starts; the answer is the same to rounding out  in_plane permittivity across the
 * normal; axis along it (same as in_plane for the isotropic rules) */
void mixing_at(const mixer *m, const double *share, const lanes *near, lanes *in_plane, lanes *axis);

/* True for the two-dimensional rules: the mixture is uniaxial, arithmetic mean along the axis. */
int mixing_uniaxial(mixing rule);

#endif

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
    int pores;               /* Maxwell Garnett: the solid is the host, ambient and coatings are enclosed */
    size_t n, phases;        /* lanes in use; >= 2 */
    lanes eps[MIX_PHASES];
    lanes a, b, c;           /* what the two-phase formula of the rule needs per wavelength */
    double complex root[MIX_PHASES][LANES]; /* cube roots (Looyenga) or logarithms (start of Bruggeman), >= 3 phases */
} mixer;

/*   in   eps[phases][n] via m->eps, filled by the caller; Im >= 0
 *   out  m ready for mixing_at */
void mixing_prepare(mixer *m, mixing rule, int pores, size_t phases, size_t n);

/* share[phases - 1]: solid, then coatings; the ambient has the rest.
 *   out  in_plane permittivity across the normal; axis along it (same as in_plane for the isotropic rules) */
void mixing_at(const mixer *m, const double *share, lanes *in_plane, lanes *axis);

/* True for the two-dimensional rules: the mixture is uniaxial, arithmetic mean along the axis. */
int mixing_uniaxial(mixing rule);

/* Left side of the Bruggeman equation, sum of f_i (e_i - e)/(e_i + (d - 1) e): 0 at the answer. */
double complex mixing_bruggeman_residual(const double complex *eps, const double *f, size_t phases, int dimensions,
                                         double complex e);

#endif

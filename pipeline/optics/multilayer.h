/* Plane layers, exactly. Internal to the room.
 * Field pair (F, G) continuous across every interface, depth z downwards, k0 = 2 pi / wavelength:
 *   F' = i k0 b G,   G' = i k0 a F,   X = G/F
 *   s: F = E, a = eps_o - s2, b = 1.          p: F = H, a = 1 - s2/eps_e, b = eps_o.
 * eps_o lies in the plane, eps_e along the normal; s2 is the square of the (real) tangential wave number over
 * k0. A half-space has X = sqrt(a/b); the energy flux is Re(X)|F|^2. */
#ifndef SWARD_OPTICS_MULTILAYER_H
#define SWARD_OPTICS_MULTILAYER_H
#include <complex.h>
#include <stddef.h>

typedef struct {
    double complex in_plane, axis; /* permittivities; equal when isotropic */
    double thickness_nm;           /* of the ambient and the substrate unused */
} film;

typedef struct {
    double R, T; /* of power; T into the substrate */
} powers;

/* Light from `ambient` through films[n] (outermost first) on `substrate`.
 *   in   p_polarized 0: s; s2 as above, = (n_ambient sin theta)^2
 *   out  the powers; field[2 (n + 1)] (may be NULL): F and G at the top of each film and of the substrate,
 * for unit incident F src  Riccati form of the characteristic matrix (Abeles 1950, from memory), walked up
 * from the substrate with decaying exponentials only: no thickness overflows */
powers multilayer(double wavelength_nm, double s2, int p_polarized, const film *ambient, const film *films,
                  size_t n, const film *substrate, double complex *field);

/* a, b and X of a half-space of this film. */
double complex film_a(const film *f, double s2, int p_polarized);
double complex film_b(const film *f, int p_polarized);
double complex film_half_space(const film *f, double s2, int p_polarized);

#endif

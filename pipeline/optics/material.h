/* Optical constants. n + i k, time exp(-i omega t), k >= 0; linear in wavelength between the nodes, never
 * extrapolated. The room reads no file: the app builds materials from pipeline/optics/materials/ or a user's CSV. */
#ifndef SWARD_OPTICS_MATERIAL_H
#define SWARD_OPTICS_MATERIAL_H
#include <stddef.h>

#include "base/status.h"

typedef struct {
    char *name;             /* "silicon" */
    char *source;           /* citation, one line */
    size_t n;               /* nodes; 1 = constant index at every wavelength */
    double *wavelength_nm;  /* [n] ascending, vacuum */
    double *index_n, *index_k; /* [n] */
} material;                 /* {0} = empty; owned */

/* Copies and checks the nodes.
 *   err ST_BAD_INPUT no nodes, wavelengths not ascending or not positive, n <= 0, k < 0, not finite */
status material_make(material *m, const char *name, const char *source, size_t n, const double *wavelength_nm,
                     const double *index_n, const double *index_k, error *e);
status material_constant(material *m, double n, double k, error *e); /* name "n=2" */
status material_copy(material *m, const material *from, error *e);
void material_free(material *m);

/* n and k at a wavelength. err ST_BAD_INPUT outside the table: "silicon is tabled from 250 to 1450 nm, 240 nm was
 * asked for; choose a band inside". */
status material_at(const material *m, double wavelength_nm, double *n, double *k, error *e);

#endif

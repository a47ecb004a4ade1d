/* What the files of this room share: the shape family, the classes of height, the coated feature. Lengths in nm. */
#ifndef SWARD_LINK_SURFACE_PRIV_H
#define SWARD_LINK_SURFACE_PRIV_H
#include "link/surface.h"

/* Heights of a texture, area-weighted, few enough to live on the stack. */
enum { HEIGHT_CLASSES = 129, HEIGHT_CLASSES_FILM = 33 };
typedef struct {
    size_t n;
    double height_nm[HEIGHT_CLASSES], weight[HEIGHT_CLASSES]; /* weights sum to 1 */
    double tallest_nm;
} height_classes;

#define EXPONENT_MIN 0.05
#define EXPONENT_MAX 20.0

/* Options in their ranges. err ST_BAD_INPUT with the option's name. */
status link_check(double height_nm, const link_options *o, error *e);

/* Solid share of the cell at u = depth below the feature's own tip / its height: 0 above, u^(2/q), 1 below. */
double shape_share(double u, double exponent);

/* h_i = h (d_i / d_mean)^g, then the normal spread, cut at 4 sd and at a twentieth of h, in at
 * most `bins` classes.
 *   err ST_BAD_INPUT a cell area that is not above 0 */
status heights_make(double height_nm, const double *cell_area_nm2, size_t n_cells, const link_options *o, size_t bins,
                    height_classes *out, error *e);

/* A solid of revolution on its circular cell. */
typedef struct {
    double height_nm, cell_radius_nm, exponent, coverage;
} solid;

/* Share of the cell that feature and a conformal film of thickness t cover together, y above the floor (t = 0: the
 * feature alone). Dilation by a ball; neighbours' films merge, so the share stops at 1. */
double coated_share(const solid *f, double t_nm, double y_nm);
/* The same for a pore, x below the surface: solid and film together, the film closing the pore from its wall. */
double coated_pore_share(const solid *f, double t_nm, double x_nm);

#endif

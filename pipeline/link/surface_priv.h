/* What the files of this room share: the shape family, the classes of height, the coated feature. Lengths in nm. */
#ifndef SWARD_LINK_SURFACE_PRIV_H
#define SWARD_LINK_SURFACE_PRIV_H
#include "link/surface.h"

/* Heights of a texture, area-weighted, few enough to live on the stack. */
enum { HEIGHT_CLASSES = 129, HEIGHT_CLASSES_FILM = 33 };
typedef struct {
    size_t n;
    double height_nm[HEIGHT_CLASSES], weight[HEIGHT_CLASSES]; /* weights sum to 1 */
    double tallest_nm, width_nm; /* width of a class; 0: one height */
} height_classes;

#define EXPONENT_MIN 0.05
#define EXPONENT_MAX 20.0
#define FLAT_TOP_MAX 0.95

/* Options in their ranges. err ST_BAD_INPUT with the option's name. */
status link_check(double height_nm, const link_options *o, error *e);

/* Solid share of the cell at u = depth below the family's own tip / its height: 0 above, u^(2/q), 1 below. */
double shape_share(double u, double exponent);

/* h_i = h (d_i / d_mean)^g, then the spread, cut at 4 sd and at a twentieth of h, in at most `bins` classes.
 *   err ST_BAD_INPUT a cell area that is not above 0 */
status heights_make(double height_nm, const double *cell_area_nm2, size_t n_cells, const link_options *o, size_t bins,
                    height_classes *out, error *e);

/* A solid of revolution on its circular cell: the family's flank, whose own tip lies apex_nm above the real top, which is
 * flat, or a ball down to cap_depth_nm. */
typedef struct {
    double height_nm, cell_radius_nm, exponent, coverage;
    double apex_nm, cap_radius_nm, cap_depth_nm;
    const struct share_table *table; /* of this exponent, or NULL: by pow; the caller's */
} solid;

/* Shares of the family by straight lines in the root of u, for profiles that ask for them a hundred thousand times: within
 * 1e-6 for the exponents it takes (0.4 to 2; others: 0, no table). */
enum { SHARE_NODES = 4096 };
typedef struct share_table {
    double share[SHARE_NODES + 1];
} share_table;
int share_table_make(double exponent, share_table *t);

/* The solid of this height. Where the tip's radius leaves no flank *fits (may be NULL) becomes 0, and the solid is the
 * paraboloid of that height. */
solid solid_make(double height_nm, double cell_radius_nm, const link_options *o, int *fits);

/* Radius of the circle of the mean cell's area: of cells, else hexagonal from the spacing. NAN without both. */
double cell_radius(double spacing_nm, const double *cell_area_nm2, size_t n_cells);
/* err ST_BAD_INPUT a tip radius without a cell, or one that leaves no flank */
status tip_check(double height_nm, double cell_radius_nm, const link_options *o, error *e);
/* The tip radius of *o, or the largest that still leaves a flank. */
double tip_radius_held(double height_nm, double cell_radius_nm, const link_options *o);

/* Share of the cell at a depth below the top: 0 above, the coverage at the floor, 1 below. */
double solid_share(const solid *f, double depth_nm);

/* Share of the cell that feature and a conformal film of thickness t cover together, y above the floor (t = 0: the
 * feature alone). Dilation by a ball; neighbours' films merge, so the share stops at 1. */
double coated_share(const solid *f, double t_nm, double y_nm);
/* The same for a pore, x below the surface: solid and film together, the film closing the pore from its wall. */
double coated_pore_share(const solid *f, double t_nm, double x_nm);

#endif

/* From texture numbers to the surface that optics needs: height, shape, profile. Lengths in nm. */
#ifndef SWARD_LINK_SURFACE_H
#define SWARD_LINK_SURFACE_H
#include <stddef.h>

#include "base/quantity.h"
#include "base/status.h"
#include "optics/stack.h"

typedef enum { HEIGHT_SHEET, HEIGHT_CALIBRATED, HEIGHT_PROTOCOL, HEIGHT_ASPECT, HEIGHT_DEFAULT } height_source;
const char *height_source_name(height_source s); /* sheet calibrated protocol aspect default */
int height_is_assumed(height_source s);          /* the last three */

/* What the protocol (or the command line) says of the link; NAN = not said. */
typedef struct {
    double height_nm, height_nm_u;
    double aspect, aspect_u;   /* height / spacing */
    double exponent;           /* 0.05..20; q in s(zeta) = (1 - zeta)^(2/q): 1 cone (default), 2 paraboloid */
    double exponent_u;         /* standard, as a factor 1 + u/q; 0 (default): the exponent is taken as known */
    int shape_open;            /* 1: nobody stated the shape; the exponent serves for the plain value, the interval
                                  holds shape_alternatives */
    double flat_top, flat_top_u; /* 0..0.95: share of the foot's area that is flat at the top, the family's shape cut
                                  there and as tall as stated; default 0 */
    double tip_radius_nm, tip_radius_nm_u; /* the tip is a ball of this radius that the flank touches; default 0: as
                                  sharp as the family. Exponents that are rounder already stay as they are */
    double height_spread, height_spread_u; /* relative sd of the heights, default 0 */
    int lognormal;             /* law of that spread: 0 normal (default), 1 log-normal */
    double height_by_size;     /* g in h_i = h (d_i / d_mean)^g, default 0 */
    int level_at_tips;         /* spread: 0 one floor (default), 1 tips in one plane */
    double coverage, coverage_u; /* F, solid share at the floor, default 1 */
} link_options;
link_options link_defaults(void);

/* Exponents that a shape nobody stated may have, equally believed: what published profiles of such textures range over,
 * and the tables of the model's error with them. */
enum { SHAPE_ALTERNATIVES = 3 };
extern const double shape_alternatives[SHAPE_ALTERNATIVES]; /* cone, between, paraboloid */

/* Picks the height: sheet (value NAN if none) > protocol height > protocol aspect x spacing > 1.0 +- 0.3 x spacing.
 *   out  height_nm (u NAN where nobody stated one), *src where it comes from
 *   err  ST_BAD_INPUT a negative height or aspect; ST_NO_RESULT neither height nor spacing */
status link_height(quantity sheet, const link_options *o, quantity spacing_nm, quantity *height_nm, height_source *src,
                   error *e);

/* Solid fraction against depth for features of the given height.
 *   in   cell_area_nm2[n_cells] watershed cells (may be NULL, n 0: one cell of the hexagonal area of spacing_nm)
 *        coatings[n_coatings] conformal, outermost first, thickness_nm used to dilate the equivalent circular cell
 *        pores: the complement
 *   out  p owned by the caller (profile_free)
 *   err  ST_BAD_INPUT height < 0, an option outside its range, a cell without area, too many coatings or one below
 *        0 nm, a coating or a tip radius without spacing and cells, a tip radius no flank is left with; ST_NO_MEMORY
 *   src  design of the family and of the film: shape.c; height 0 gives an empty profile (planar) */
status link_profile(double height_nm, double spacing_nm, const double *cell_area_nm2, size_t n_cells, int pores,
                    const link_options *o, const layer *coatings, size_t n_coatings, profile *p, error *e);

/* Share of the family's full height that flat tops cut off. */
double link_height_cut(const link_options *o);

/* Solid of revolution on the hexagonal cell: true area / projected area; NAN where an input is out of range. */
double link_area_ratio(double height_nm, double spacing_nm, const link_options *o);

#endif

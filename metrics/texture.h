/* The texture numbers of one micrograph, all lengths in px, and what they were made from. */
#ifndef SWARD_METRICS_TEXTURE_H
#define SWARD_METRICS_TEXTURE_H
#include <stddef.h>
#include <stdint.h>

#include "base/flags.h"
#include "metrics/plane.h"

/* A measured figure. The two parts of its standard uncertainty stay apart, because the method part is common to all
 * micrographs and does not average out; the pixel-size part is added where px become nm. */
typedef struct {
    double value;      /* NAN: not measured */
    double u_sampling; /* within the micrograph: would differ in another field of the same texture; NAN unknown */
    double u_method;   /* of the value as an estimate of its definition: detection, known bias; 0 if none */
    size_t n;          /* features, rings or pixels behind it */
} measured;

typedef struct {
    double x, y;           /* refined centre, px */
    double response;       /* of the detector, sigma^2 LoG at the marker */
    double cell_area_px2;  /* watershed cell */
    double cell_ecd_px;    /* 2 sqrt(area / pi) */
    double top_ecd_px;     /* part of the cell above half height */
    double feret_max_px, feret_min_px; /* of the cell, from pixel corners (pixels are squares) */
    double perimeter_px;   /* of the cell, by intercept counts in four directions (Crofton) */
    double nn_px;          /* nearest neighbour over all features; NAN when there is none */
    double weight;         /* border weight (Miles-Lantuejoul); 0: the cell touches the frame and is left out */
    int box_x0, box_y0, box_x1, box_y1; /* bounding box of the cell, inclusive */
    int n_neighbours;      /* cells that share a border with this one */
    int in_guard;          /* 1: inside the guard frame, counts for the density */
} feature;

typedef struct { double x, y; } curve_point;
typedef struct {
    const char *name;      /* acf, acf_curvature, psd, psd_curvature, pair_correlation, ripley_l */
    const char *x_unit;    /* "px" lag, or "1/px" spatial frequency */
    const char *y_unit;    /* "1", "px" or "px2" */
    curve_point *points;   /* owned */
    size_t n;
} curve;
enum { MAX_CURVES = 8 };

typedef struct {
    relief relief;         /* RELIEF_HILLOCK or RELIEF_PORE: found or given */
    double relief_skew;    /* skewness of the curvature map behind the decision */
    measured spacing_acf, spacing_psd, nn_mean, spacing_hex; /* px */
    measured density;      /* 1/px2 */
    measured bright_share; /* share of the field above the stated level */
    measured size_d10, size_d50, size_d90, size_mean, size_gsd; /* ECD of cells, px; gsd 1 */
    measured top_d50;      /* px */
    measured clark_evans;  /* Donnelly edge correction */
    measured sal, str;     /* ISO 25178-2 on brightness, px and 1 */
    measured stretch, stretch_angle_deg; /* longer / shorter spacing >= 1; direction of the longer one, 0..180, y up */
    measured sharpness;    /* sd of the blur, px */
    measured noise_rel;    /* noise sd / texture sd */
    double count_u_rel;    /* relative u of the number of features by the detector: part of many u_method */
    double clipped_share;
    double lognormal_ad;   /* Anderson-Darling A2* of the log-normal fit of cell ECD; NAN none */
    double ring_z;         /* significance of the trough before the first ring */
    double pair_ring_px, pair_ring_height, pair_ring_z; /* first ring of the pair correlation: place, height, significance; NAN none */
    double smear_px, smear_angle_deg, smear_z; /* astigmatism: sd of the blur in one direction only; NAN unknown */
    double second_spacing_px; /* of a second population; NAN none */
    size_t n_features;     /* inside the guard */
    flags reasons;         /* not fit: why (empty = fit) */
    flags flags;           /* remarks */
    feature *features;     /* [n_found], owned */
    size_t n_found;
    uint32_t *cells;       /* [ny][nx] feature index + 1 of each pixel, owned; may be NULL after texture_drop_cells */
    size_t nx, ny;
    curve curves[MAX_CURVES];
    size_t n_curves;
} texture;                 /* {0} = empty */

texture texture_empty(void);         /* nothing measured: every figure NAN */
void texture_free(texture *t);
void texture_drop_cells(texture *t); /* frees the label map only */

#endif

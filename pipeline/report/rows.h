/* The rows of the output contract and their column tables. A new quantity is one member here and one line in
 * rows.c; CSV, JSON, schema, page and documentation follow. Strings are owned by the row. */
#ifndef SWARD_REPORT_ROWS_H
#define SWARD_REPORT_ROWS_H
#include "io/column.h"

#define Q(name) double name, name##_u /* a measured quantity and its combined standard uncertainty */

typedef struct {
    char *file, *sample, *status, *reason, *flags;
    double px_nm;
    char *px_source;
    double px_u_rel;
    long width_px, height_px, strip_px, bit_depth;
    char *relief;
    long n_features;
    Q(spacing_acf_nm); Q(spacing_psd_nm); Q(nn_mean_nm); Q(spacing_hex_nm);
    Q(density_per_um2); Q(bright_share);
    Q(size_d10_nm); Q(size_d50_nm); Q(size_d90_nm); Q(size_mean_nm); Q(size_gsd);
    Q(top_d50_nm); Q(clark_evans); Q(sal_nm); Q(str); Q(stretch); Q(stretch_angle_deg);
    Q(sharpness_px); Q(noise_rel);
    double clipped_share;
} image_row;

typedef struct {
    char *sample, *lot, *wafer, *position, *etched_at;
    long n_images, n_used;
    Q(spacing_nm); Q(density_per_um2);
    Q(size_d10_nm); Q(size_d50_nm); Q(size_d90_nm); Q(size_mean_nm); Q(size_gsd);
    Q(bright_share); Q(clark_evans);
    Q(height_nm);
    char *height_source;
    double aspect, area_ratio;
    double weighted_reflectance, weighted_reflectance_lo, weighted_reflectance_hi;
    double current_loss_mA_cm2, polished_reflectance, coated_reflectance, subwavelength_share;
    char *optics_model, *verdict, *verdict_reasons;
    char *flags;
    char **extra;   /* text of the extra columns: verdict_<quantity>, then carried-along sheet columns; [n_extra] */
    size_t n_extra;
} sample_row;

typedef struct {
    char *sample;
    double wavelength_nm, angle_deg;
    char *polarization;
    double reflectance, reflectance_lo, reflectance_hi;
} spectrum_row;

typedef struct {
    long feature;
    double x_px, y_px, x_nm, y_nm;
    double cell_ecd_nm, top_ecd_nm, feret_max_nm, feret_min_nm, aspect_ratio, perimeter_nm, circularity, nn_nm, border_weight;
    long n_neighbours, in_guard;
} feature_row;

typedef struct {
    char *curve;
    double x;
    char *x_unit;
    double value;
    char *value_unit;
} profile_row;

extern const column image_columns[], sample_columns[], spectrum_columns[], feature_columns[], profile_columns[];
extern const size_t n_image_columns, n_sample_columns, n_spectrum_columns, n_feature_columns, n_profile_columns;

void image_row_free(image_row *r);
void sample_row_free(sample_row *r);

#endif

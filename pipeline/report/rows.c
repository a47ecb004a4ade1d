/* The column tables of the output contract: names, order, units, printed digits and meaning of everything sward
 * writes. CSV, JSON, Table Schema, page and documentation read these lines and nothing else, so a figure cannot
 * differ between two outputs. Digits: lengths and densities 5, reflectance 5 (spectra 6), ratios 4, uncertainties 3; the
 * pixel size 6, because everything in nm is a multiple of it. Definitions and attainable accuracy: metrics/.
 * What is not here: the computation of any of these numbers. */
#include "report/rows.h"

#include <stdlib.h>

#define IMAGE(member, kind, unit, digits, help) COL(image_row, member, kind, unit, digits, help)
#define SAMPLE(member, kind, unit, digits, help) COL(sample_row, member, kind, unit, digits, help)
#define SPECTRUM(member, kind, unit, digits, help) COL(spectrum_row, member, kind, unit, digits, help)
#define FEATURE(member, kind, unit, digits, help) COL(feature_row, member, kind, unit, digits, help)
#define PROFILE(member, kind, unit, digits, help) COL(profile_row, member, kind, unit, digits, help)
#define COUNT_OF(a) (sizeof(a) / sizeof((a)[0]))

/* A measured quantity and, directly behind it, its combined standard uncertainty. */
#define TWIN(type, member, unit, digits, help)                                                               \
    COL(type, member, COL_NUMBER, unit, digits, help),                                                       \
        COL(type, member##_u, COL_NUMBER, unit, 3, "standard uncertainty of " #member                        \
            " as an estimate of the mean of the etch's texture, method and pixel size included")
#define IMAGE_Q(member, unit, digits, help) TWIN(image_row, member, unit, digits, help)
#define SAMPLE_Q(member, unit, digits, help) TWIN(sample_row, member, unit, digits, help)

const column image_columns[] = {
    IMAGE(file, COL_TEXT, "", 0, "path of the micrograph relative to the folder"),
    IMAGE(sample, COL_TEXT, "", 0, "what the micrograph was taken of"),
    IMAGE(status, COL_TEXT, "", 0,
          "ok; excluded (read and measured, not fit, does not enter its sample); unreadable (no picture in the file)"),
    IMAGE(reason, COL_TEXT, "", 0, "why the micrograph does not enter its sample, words of the flag list or a sentence"),
    IMAGE(flags, COL_TEXT, "", 0, "remarks, words of the flag list separated by blanks"),
    IMAGE(px_nm, COL_NUMBER, "nm", 6, "size of one pixel; every length in nm is a multiple of it"),
    IMAGE(px_source, COL_TEXT, "", 0, "where the pixel size was found; the most specific source that is present wins"),
    IMAGE(px_u_rel, COL_NUMBER, "1", 3,
          "relative standard uncertainty of the pixel size; common to all pictures of one instrument, so more pictures "
          "do not lower it"),
    IMAGE(width_px, COL_COUNT, "px", 0, "columns of the measured field"),
    IMAGE(height_px, COL_COUNT, "px", 0, "rows of the picture in the file, info strip included"),
    IMAGE(strip_px, COL_COUNT, "px", 0, "rows of the info strip that were cropped, at the bottom or the top"),
    IMAGE(bit_depth, COL_COUNT, "", 0, "bits of one grey level in the file; of the detector where it fills 16-bit samples with fewer"),
    IMAGE(relief, COL_TEXT, "", 0,
          "what a feature is: hillock (bright) or pore (dark); told from the picture unless the protocol says it, and not "
          "certain where rims are bright (flag relief_unsure)"),
    IMAGE(n_features, COL_COUNT, "", 0, "features inside the guard frame, the ones the density counts"),
    IMAGE_Q(spacing_acf_nm, "nm", 5,
            "spacing: first ring of the autocorrelation of the curvature map, needs no detection; 7 to 12 % too long on "
            "weakly ordered textures (Clark-Evans below 1.5, flag low_order)"),
    IMAGE_Q(spacing_psd_nm, "nm", 5,
            "1 / spatial frequency at the peak of the power spectrum of the curvature map; a row spacing, 0.86 to 1.0 of the "
            "feature spacing depending on the order of the pattern"),
    IMAGE_Q(nn_mean_nm, "nm", 5,
            "mean distance from a feature to its nearest neighbour (Hanisch edge correction); shorter than the spacing, the "
            "more so the less ordered the texture is"),
    IMAGE_Q(spacing_hex_nm, "nm", 5,
            "spacing of the hexagonal lattice of the same density, sqrt(2 / (sqrt(3) density)); rests on detection, blurred or "
            "merged features make it too long"),
    IMAGE_Q(density_per_um2, "1/um2", 5, "features per area, counted inside a guard frame; merged features are counted once"),
    IMAGE_Q(bright_share, "1", 4,
            "share of the field brighter than a stated level; compares like pictures of one instrument, never the solid share "
            "of the optics"),
    IMAGE_Q(size_d10_nm, "nm", 5,
            "10 % of the features (by number) have a cell of smaller equivalent circular diameter; cells tile the field, so "
            "this is the size of the base"),
    IMAGE_Q(size_d50_nm, "nm", 5, "median equivalent circular diameter of the cells, border features weighted (ISO 13322-1)"),
    IMAGE_Q(size_d90_nm, "nm", 5,
            "90 % of the features have a cell of smaller equivalent circular diameter; merged features swell it"),
    IMAGE_Q(size_mean_nm, "nm", 5, "mean equivalent circular diameter of the cells, number-weighted"),
    IMAGE_Q(size_gsd, "1", 4,
            "geometric standard deviation of the cell diameters; 1 = all equal; meaningful where the sizes are near log-normal"),
    IMAGE_Q(top_d50_nm, "nm", 5,
            "median diameter of the part of a feature above half its brightness; depends on detector and focus, for comparing "
            "like pictures only, not a true size"),
    IMAGE_Q(clark_evans, "1", 4,
            "Clark-Evans index with Donnelly's edge correction: 1 random, below 1 clustered, 2.15 perfect hexagonal lattice"),
    IMAGE_Q(sal_nm, "nm", 5,
            "autocorrelation length: fastest decay to 0.2 (ISO 25178-2, applied to brightness, not to heights)"),
    IMAGE_Q(str, "1", 4,
            "texture aspect ratio: fastest / slowest decay (ISO 25178-2, applied to brightness); 1 = the same in all "
            "directions"),
    IMAGE_Q(stretch, "1", 4,
            "longest / shortest spacing over the directions; a tilted view by 20 deg gives 1.06, drift and astigmatism look "
            "alike in one picture"),
    IMAGE_Q(stretch_angle_deg, "deg", 4,
            "direction of the longest spacing, 0 to 180 counter-clockwise from the picture's horizontal; means nothing where "
            "stretch is 1 within its uncertainty"),
    IMAGE_Q(sharpness_px, "px", 4, "standard deviation of the blur; a picture blurred by a quarter of a spacing is excluded"),
    IMAGE_Q(noise_rel, "1", 4, "standard deviation of the noise / of the texture"),
    IMAGE(clipped_share, COL_NUMBER, "1", 4, "share of pixels at the darkest or brightest level the file can hold"),
};
const size_t n_image_columns = COUNT_OF(image_columns);

const column sample_columns[] = {
    SAMPLE(sample, COL_TEXT, "", 0, "wafer, coupon or position the micrographs were taken of; the unit of a verdict"),
    SAMPLE(lot, COL_TEXT, "", 0, "lot, from the sample sheet or the name pattern"),
    SAMPLE(wafer, COL_TEXT, "", 0, "wafer, from the sample sheet or the name pattern"),
    SAMPLE(position, COL_TEXT, "", 0, "position on the wafer, from the sample sheet or the name pattern"),
    SAMPLE(etched_at, COL_TEXT, "", 0,
           "time of the etch (ISO 8601): sample sheet, else acquisition date, else the file's own time (flag time_from_file)"),
    SAMPLE(n_images, COL_COUNT, "", 0, "micrographs of the sample"),
    SAMPLE(n_used, COL_COUNT, "", 0, "micrographs that were fit and entered the figures"),
    SAMPLE_Q(spacing_nm, "nm", 5,
             "feature spacing: spacing_acf_nm of the micrographs, or spacing_hex_nm when the protocol says spacing: density"),
    SAMPLE_Q(density_per_um2, "1/um2", 5, "features per area, mean over the micrographs used"),
    SAMPLE_Q(size_d10_nm, "nm", 5, "10 % of the cells have a smaller equivalent circular diameter"),
    SAMPLE_Q(size_d50_nm, "nm", 5, "median equivalent circular diameter of the cells"),
    SAMPLE_Q(size_d90_nm, "nm", 5, "90 % of the cells have a smaller equivalent circular diameter"),
    SAMPLE_Q(size_mean_nm, "nm", 5, "mean equivalent circular diameter of the cells, number-weighted"),
    SAMPLE_Q(size_gsd, "1", 4, "geometric standard deviation of the cell diameters"),
    SAMPLE_Q(bright_share, "1", 4,
             "share of the field above a stated level; compares like pictures, never the solid share of the optics"),
    SAMPLE_Q(clark_evans, "1", 4, "Clark-Evans index: 1 random, 2.15 perfect hexagonal lattice"),
    SAMPLE_Q(height_nm, "nm", 5, "feature height used for the optics; a top view does not show it, see height_source"),
    SAMPLE(height_source, COL_TEXT, "", 0,
           "where the height comes from: sheet (measured), calibrated, protocol, aspect or default; the last three are assumed "
           "and a prediction that rests on them is no better than the assumption"),
    SAMPLE(aspect, COL_NUMBER, "1", 4, "height / spacing"),
    SAMPLE(area_ratio, COL_NUMBER, "1", 4,
           "true surface area / projected area, from the modelled shape; enlargement of the area, not a recombination factor"),
    SAMPLE(weighted_reflectance, COL_NUMBER, "1", 5,
           "predicted front-surface reflectance averaged over the AM1.5G photon flux; graded-index model (large steep "
           "facets: geometric optics), light from the rear (beyond about 1000 nm) left out unless the "
           "protocol describes it; empty where no model serves"),
    SAMPLE(weighted_reflectance_lo, COL_NUMBER, "1", 5,
           "lower end of the 95 % interval of weighted_reflectance; need not be centred, the known bias of the model is in it"),
    SAMPLE(weighted_reflectance_hi, COL_NUMBER, "1", 5, "upper end of the 95 % interval of weighted_reflectance"),
    SAMPLE(current_loss_mA_cm2, COL_NUMBER, "mA/cm2", 5,
           "current the reflected photons would have given at one electron per photon, AM1.5G, same band"),
    SAMPLE(polished_reflectance, COL_NUMBER, "1", 5,
           "weighted reflectance of polished silicon in the same ambient, angle, polarization and rear"),
    SAMPLE(coated_reflectance, COL_NUMBER, "1", 5,
           "weighted reflectance of polished silicon under 75 nm of silicon nitride, same ambient, angle, polarization and rear"),
    SAMPLE(subwavelength_share, COL_NUMBER, "1", 4,
           "share of the weighted photons for which the texture makes no diffraction order, the domain of the graded-index "
           "model"),
    SAMPLE(optics_model, COL_TEXT, "", 0, "graded (index), facets (geometric optics of large steep textures), or none where neither serves"),
    SAMPLE(verdict, COL_TEXT, "", 0,
           "worst of fails, undecided (the uncertainty straddles a limit), conforms; no_target and not_measured where that is so"),
    SAMPLE(verdict_reasons, COL_TEXT, "", 0, "one sentence per target: value, uncertainty, range"),
    SAMPLE(flags, COL_TEXT, "", 0, "remarks, words of the flag list separated by blanks"),
};
const size_t n_sample_columns = COUNT_OF(sample_columns);

const column spectrum_columns[] = {
    SPECTRUM(sample, COL_TEXT, "", 0, "sample the spectrum was predicted for"),
    SPECTRUM(wavelength_nm, COL_NUMBER, "nm", 6, "wavelength in vacuum"),
    SPECTRUM(angle_deg, COL_NUMBER, "deg", 4, "angle of incidence from the surface normal"),
    SPECTRUM(polarization, COL_TEXT, "", 0,
             "mean (unpolarised), s or p; diffuse: mean over the half space of incidence, then the angle is empty"),
    SPECTRUM(reflectance, COL_NUMBER, "1", 6,
             "predicted total reflectance of the front surface, 0 to 1; beyond about 1000 nm a measurement adds light from the "
             "rear"),
    SPECTRUM(reflectance_lo, COL_NUMBER, "1", 6, "lower end of the 95 % interval; empty where no model error is known"),
    SPECTRUM(reflectance_hi, COL_NUMBER, "1", 6, "upper end of the 95 % interval; empty where no model error is known"),
};
const size_t n_spectrum_columns = COUNT_OF(spectrum_columns);

const column feature_columns[] = {
    FEATURE(feature, COL_COUNT, "", 0, "number of the feature in this micrograph, from 1"),
    FEATURE(x_px, COL_NUMBER, "px", 7, "centre, to the right; the centre of the first pixel is 0"),
    FEATURE(y_px, COL_NUMBER, "px", 7, "centre, downwards; the centre of the first pixel is 0"),
    FEATURE(x_nm, COL_NUMBER, "nm", 7, "centre, to the right"),
    FEATURE(y_nm, COL_NUMBER, "nm", 7, "centre, downwards"),
    FEATURE(cell_ecd_nm, COL_NUMBER, "nm", 5, "equivalent circular diameter of the watershed cell"),
    FEATURE(top_ecd_nm, COL_NUMBER, "nm", 5,
            "equivalent circular diameter of the part above half the brightness of the cell; for comparison only"),
    FEATURE(feret_max_nm, COL_NUMBER, "nm", 5, "longest caliper diameter of the cell, from pixel corners"),
    FEATURE(feret_min_nm, COL_NUMBER, "nm", 5, "shortest caliper diameter of the cell, from pixel corners"),
    FEATURE(aspect_ratio, COL_NUMBER, "1", 4, "feret_min / feret_max (ISO 9276-6): 1 when alike in all directions"),
    FEATURE(perimeter_nm, COL_NUMBER, "nm", 5, "length of the cell's border, from intercept counts in four directions (Crofton)"),
    FEATURE(circularity, COL_NUMBER, "1", 4, "root of 4 pi area / perimeter^2 of the cell (ISO 9276-6): 1 disc, 0.952 regular hexagon"),
    FEATURE(nn_nm, COL_NUMBER, "nm", 5, "distance to the nearest other feature; too long near the frame"),
    FEATURE(border_weight, COL_NUMBER, "1", 5,
            "weight in the size distribution (Miles-Lantuejoul, as in ISO 13322-1); 0: the cell touches the frame"),
    FEATURE(n_neighbours, COL_COUNT, "", 0, "cells that share a border with this one"),
    FEATURE(in_guard, COL_COUNT, "", 0, "1: inside the guard frame, counts for the density; else 0"),
};
const size_t n_feature_columns = COUNT_OF(feature_columns);

const column profile_columns[] = {
    PROFILE(curve, COL_TEXT, "", 0,
            "radial means: acf (autocorrelation of the brightness), acf_curvature (of the curvature map, whose first ring is "
            "spacing_acf), psd and psd_curvature (power spectral density of both); of the features: pair_correlation (g, translation "
            "edge correction, Epanechnikov kernel of 0.15 / sqrt(density)) and ripley_l (sqrt(K / pi), same correction; equal to x "
            "for random placement); of the cell diameters, weighted for the border: size_density (Gaussian kernels, bandwidth "
            "density_bandwidth_nm in results.json) and size_histogram (bins of histogram_bin_nm, x in the middle)"),
    PROFILE(x, COL_NUMBER, "", 6, "lag, distance, diameter or spatial frequency, in x_unit"),
    PROFILE(x_unit, COL_TEXT, "", 0, "nm or 1/um; px or 1/px where the pixel size is unknown"),
    PROFILE(value, COL_NUMBER, "", 6, "value of the curve, in value_unit"),
    PROFILE(value_unit, COL_TEXT, "", 0, "unit of value; 1 for a ratio"),
};
const size_t n_profile_columns = COUNT_OF(profile_columns);

void image_row_free(image_row *r) {
    char *owned[] = { r->file, r->sample, r->status, r->reason, r->flags, r->px_source, r->relief };
    for (size_t i = 0; i < COUNT_OF(owned); i++) free(owned[i]);
    *r = (image_row){ 0 };
}

void sample_row_free(sample_row *r) {
    char *owned[] = { r->sample,        r->lot,          r->wafer,   r->position,        r->etched_at,
                      r->height_source, r->optics_model, r->verdict, r->verdict_reasons, r->flags };
    for (size_t i = 0; i < COUNT_OF(owned); i++) free(owned[i]);
    for (size_t i = 0; i < r->n_extra; i++) free(r->extra[i]);
    free(r->extra);
    *r = (sample_row){ 0 };
}

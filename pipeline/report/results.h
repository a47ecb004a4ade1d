/* Writes the outputs of a run. The app fills the rows; this room prints them. */
#ifndef SWARD_REPORT_RESULTS_H
#define SWARD_REPORT_RESULTS_H
#include "base/text.h"
#include "report/rows.h"

/* Everything one run yields. Borrowed pointers; rows in output order. */
typedef struct {
    const image_row *images;      size_t n_images;
    const char *const *image_json; /* [n_images] further members of the image's JSON object (budgets, pixels, sentence):
                                      text like "\"detail\": \"...\", \"pixels\": {...}", or NULL */
    const sample_row *samples;    size_t n_samples;
    const char *const *sample_json; /* the same for samples */
    const char *const *sample_extra; size_t n_sample_extra; /* names of the extra columns of samples.csv */
    const spectrum_row *spectra;  size_t n_spectra;
    const char *manifest_json;    /* one JSON object: program, version, protocol, inputs (hashes), flags list, history */
    const char *wafers_json;      /* array: evenness of each wafer and quantity; NULL: none */
    const char *series_json;      /* array: control charts of the targets' quantities, of spacing and of reflectance over the history,
                                     objects as documented at control_json in app/control.h; NULL: none */
    const char *window_json, *angles_json; /* objects: the process window around the samples, R against the angle; NULL: none */
    const char *summary;          /* what the terminal says, plain text */
    const char *title;            /* of the page: protocol's name or the folder's */
    /* for the page */
    const char *const *target_quantity; const double *target_min, *target_max; size_t n_targets;
    const char *history_json;     /* array of {sample, etched_at, spacing_nm, spacing_nm_u, weighted_reflectance,
                                     verdict} in time order, or NULL */
    const double *reference_wavelength_nm, *polished_R, *coated_R; size_t n_reference; /* flat references; may be NULL */
    const char *const *overlay_paths; /* [n_images] relative to out_dir, or NULL */
    const char *const *overlay_marks; /* [n_images], and a folder that remembers by it the small pictures of the page; may be NULL */
    const char *picture_cache;
    const char *history_note;     /* where the ledger is, one sentence */
    const double *sample_x_mm, *sample_y_mm; /* [n_samples] from the middle of the wafer, NAN unknown; NULL: no maps */
    const char *const *image_stems; /* [n_images] stem of features/<stem>.csv, profiles/<stem>.csv, NULL entries where
                                       none was written; may be NULL: then the stems of overlay_paths */
} results;

/* images.csv, samples.csv, spectra.csv, results.json with its schema and datapackage.json, each written atomically, the package (which
 * marks the folder as output) last.
 *   in   out_dir exists; features/ and profiles/ of this run are already in it: the package lists what is there
 *   err  ST_IO a file cannot be written; ST_NO_MEMORY */
status results_write(const results *r, const char *out_dir, error *e);

/* Bodies of the same outputs, for `measure --json` and for tests. results_json is a JSON object:
 * {"manifest", "summary", "wafers", "series", "window", "angles", "images", "samples", "places", "spectra", "flags"}; image and sample
 * rows are keyed as the CSV plus the members of image_json / sample_json; places are those of samples on their wafer; spectra are grouped
 * per sample, angle and polarization. */
void images_csv(const results *r, textbuf *out);
void samples_csv(const results *r, textbuf *out);
void spectra_csv(const results *r, textbuf *out);
void results_json(const results *r, textbuf *out);

/* report.html, self-contained: styles, charts and small overlays are inside, nothing is fetched, nothing needs a script. An
 * overlay or a table that cannot be read leaves a sentence in its place.
 *   in   out_dir exists and holds the overlays that overlay_paths names, and features/ and profiles/ of image_stems
 *   err  ST_IO report.html cannot be written; ST_NO_MEMORY */
status report_write(const results *r, const char *out_dir, error *e);

/* features/<stem>.csv and profiles/<stem>.csv bodies. Failure is remembered in `out` (text_check). */
void features_csv(const feature_row *rows, size_t n, textbuf *out);
void profiles_csv(const profile_row *rows, size_t n, textbuf *out);

/* The column list as a Markdown table (for README and `--help` pages). */
void columns_markdown(const column *columns, size_t n, textbuf *out);

#endif

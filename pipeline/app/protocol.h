/* The protocol: how to measure, how to link, which optical stack, which targets. JSON, plus line comments
 * that begin with two slashes. One table of keys in protocol_keys.c drives reading, checking, printing and
 * explaining. */
#ifndef SWARD_APP_PROTOCOL_H
#define SWARD_APP_PROTOCOL_H
#include <stddef.h>

#include "base/status.h"
#include "base/text.h"
#include "judge/target.h"
#include "link/predict.h"
#include "metrics/measure.h"
#include "optics/stack.h"

typedef enum { SPACING_AUTOCORRELATION, SPACING_DENSITY } spacing_choice;

typedef struct {
    char *material; /* a known name, a path that exists from here, or a number "2" or "2+0.1i"; owned */
    double thickness_nm;
} protocol_coating;

/* A 95 % interval no wider than value -+ half_width is wanted. */
typedef struct {
    char *quantity; /* spacing_nm or a texture quantity; owned */
    double half_width;
} width_goal;

/* Where a position name of the sheet lies on the wafer. */
typedef struct {
    char *position; /* owned */
    double x_mm, y_mm;
} named_place;

typedef struct {
    char *path;              /* the file it came from, "" for the built-in one */
    char *name;              /* key "protocol"; "built-in" */
    spacing_choice spacing;  /* which spacing is the sample's spacing_nm */
    measure_options measure; /* measure.relief is the key "relief" */
    double
        px_u_rel;  /* relative standard uncertainty of every pixel size; NAN: what the source of each says */
    char *pattern; /* sample name from file names, see names.h; NULL: none */
    double window_lo_nm, window_hi_nm; /* pixel sizes that are measured; NAN: all */
    double page;                       /* of a file with several, from 1; NAN: the largest */
    int keep_tilt;                     /* tilted views are flagged, not stretched */
    double max_megapixels, max_file_mb, max_memory_mb; /* of one file; the last NAN: as the pixels allow */
    link_options link;
    char *calibration; /* link file of `sward fit`, usable from here; NULL: none */
    char *profile; /* measured profile: CSV path, usable from here; NULL: none */
    char *ambient; /* "air", "laminate", or as a material */
    double glass_mm, encapsulant_mm;
    protocol_coating coatings[LIMIT_COATINGS]; /* outermost first */
    size_t n_coatings;
    char *substrate;
    char *sun; /* CSV path, usable from here; NULL: AM1.5G */
    sun_weight weight;
    rear_side rear; /* thickness 0: none */
    mixing mixing;
    optics_choice model;
    double facet_angle_deg; /* NAN: from height and spacing */
    double angle_deg;
    polarization polarization;
    int hemispherical;
    double band_lo_nm, band_hi_nm, step_nm;
    target *targets; /* [n_targets], in the order of the file; owned */
    size_t n_targets;
    width_goal *goals; /* [n_goals], in the order of the file; owned */
    size_t n_goals;
    named_place *places; /* [n_places]; owned */
    size_t n_places;
    char *chart_phase, *chart_rules; /* column whose values are recipes; pattern tests, as chart_rules_parse reads them */
    double chart_baseline;           /* etches, 0: all of a phase; NAN: its first steady stretch */
    char *scale;   /* scale file of `sward scale`, usable from here; NULL: none */
    char *history; /* path, usable from here; NULL: OUT/history.sqlite */
} protocol;        /* {0} = empty; strings owned */

/* The built-in protocol. err ST_NO_MEMORY */
status protocol_defaults(protocol *out, error *e);

/* Reads a protocol file; what it does not say is as in protocol_defaults.
 *   out  untouched on failure; paths in it are joined to the file's folder
 *   err  ST_BAD_INPUT with file and line: not JSON, unknown key (with the nearest known one), wrong type, out
 * of range, a target on what is nearly a numeric column of samples.csv; there is no such file; ST_IO it cannot be read;
 * ST_NO_MEMORY */
status protocol_read(const char *path, protocol *out, error *e);

/* Finds the columns of targets on the sheet (sheet_at and sheet_u_at of each).
 *   in   names[n] the carried-along columns
 *   err  ST_BAD_INPUT a target is on no such column (with the nearest name) */
status protocol_meet_sheet(protocol *p, char *const *names, size_t n, error *e);

/* protocol_read from memory; `what` names the source in sentences, `folder` is what paths are relative to. */
status protocol_parse(const char *bytes, size_t n, const char *what, const char *folder, protocol *out,
                      error *e);

/* One key from the text of a command-line option, checked like the same key of a file: protocol_set(p,
 * "link", "coverage", "0.8", "--coverage", e). A band is "300:1200"; a coating "alumina:10" is added below
 * the ones before. err  ST_BAD_INPUT "--coverage: found 2, expected a number from 0 to 1"; ST_NO_MEMORY */
status protocol_set(protocol *p, const char *group, const char *name, const char *text, const char *option,
                    error *e);
void protocol_free(protocol *p);

/* Canonical text for fingerprints: same meaning, same text; numbers with 17 digits. The first holds
 * everything that changes what is measured on one micrograph, the second everything except names and paths of
 * files (see setup_text in materials.h for the contents behind material names). */
void protocol_measuring_text(const protocol *p, textbuf *out);
void protocol_full_text(const protocol *p, textbuf *out);

/* The built-in protocol as JSON with a comment per key; protocol_parse reads it back to the same. */
void protocol_print(textbuf *out);

/* What a protocol means, in sentences, one per line. */
void protocol_explain(const protocol *p, textbuf *out);

#endif

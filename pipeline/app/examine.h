/* One micrograph through load and measure: its row, what joins it to its sample, and its own output files. */
#ifndef SWARD_APP_EXAMINE_H
#define SWARD_APP_EXAMINE_H
#include "app/protocol.h"
#include "app/quantities.h"
#include "app/stage.h"
#include "io/load.h"

typedef struct {
    const protocol *protocol;
    double px_nm_option;  /* --px; NAN: none */
    double bar_nm_option; /* --bar; NAN: none */
    const scale_standard *standard; /* --scale; NULL: none */
    int keep_tilt;        /* 1: tilted views are flagged, not stretched; so does the protocol's key */
    const stage *stage;   /* of the output folder; NULL: no files (the command `measure`) */
    int fresh;            /* 1: what was remembered is not used */
} examine_options;

enum { OUTPUT_OVERLAY, OUTPUT_LAYERS, OUTPUT_FEATURES, OUTPUT_PROFILES, OUTPUTS };

/* A further member belongs into cache_examined (cache.c) too. */
typedef struct {
    image_row row;        /* sample, flags and reason are filled by examine_finish */
    char *detail;         /* sentence behind status or flags, "" if none */
    char *json;           /* further members of the image's object in results.json */
    char *overlay;        /* path relative to the output folder, or NULL */
    char hash[65], acquired_at[32];
    char file_time[32];   /* of the file, as file_time says it */
    char outputs[OUTPUTS][17]; /* quick_mark of its output files, where it is readable and there is a stage */
    int readable;         /* a plane was there */
    relief relief;
    flags reasons, flags;
    figure figures[QUANTITIES];
    double *cell_area_nm2; /* [n_cells] of the features, owned */
    size_t n_cells;
    double px_u_rel, count_u_rel; /* of the pixel size; of the number of features */
} examined;

/* What is remembered in OUT/cache is not measured again; its output files are taken over when they are still the same.
 *   in   path opened; relative as it stands in the tables; stem of the output files ("sub/name")
 *        sheet_px_nm, sheet_bar_nm NAN when the sheet says nothing
 *   out  always filled, also for a file that cannot be read (status unreadable, reason = the sentence)
 *   err  only what concerns the outputs: ST_IO a result could not be written, ST_NO_MEMORY */
status examine(const char *path, const char *relative, const char *stem, double sheet_px_nm, double sheet_bar_nm,
               const examine_options *o, examined *out, error *e);

/* How a file of this run is loaded; the sheet's figures NAN when it says nothing. */
load_options examine_loading(const examine_options *o, double sheet_px_nm, double sheet_bar_nm);

/* 1 when the protocol keeps micrographs of this pixel size out (key measure_between_px_nm); NAN: no. */
int examine_keeps_out(const protocol *p, double px_nm);
/* Brings the output files of a micrograph from dir to the stage; they must still be those it remembers.
 *   err  ST_IO one is gone or was changed, named; ST_NO_MEMORY */
status examine_adopt(const stage *s, const char *dir, const char *stem, const examined *x, error *e);

/* Prints status, reason and flags into the row, after duplicates and times are known. err ST_NO_MEMORY */
status examine_finish(examined *x, error *e);
void examined_free(examined *x);

#endif

/* One decoded micrograph: what every later stage knows of the file. */
#ifndef SWARD_IO_MICROGRAPH_H
#define SWARD_IO_MICROGRAPH_H
#include <stddef.h>

#include "base/flags.h"
#include "base/text.h"

/* What the file says of how the picture was taken. Reported, never used to compute a scale. */
typedef struct {
    double magnification;       /* nominal; 0: not said */
    double voltage_V;           /* acceleration; 0: not said */
    double working_distance_mm; /* 0: not said */
    double tilt_deg;            /* of the stage; meaningful with tilt_known */
    int tilt_known;
    int tilt_in_pixels; /* 1: the instrument has already stretched y by 1/cos(tilt) */
    int turned;         /* 1: the scan was rotated: the tilt axis is not the picture's x */
    char detector[48];  /* "" not said */
    char software[48];
} facts;                /* {0}: nothing is said */

/* One statement about the pixel size, used or not. */
typedef struct {
    char source[24];
    double x_nm, y_nm;
} px_statement;
enum { MAX_STATEMENTS = 12 };

typedef struct {
    float *px;             /* [ny][nx] grey levels 0..1, row by row, info strip already cropped; owned */
    size_t nx, ny;         /* of the measured plane */
    size_t file_nx, file_ny;
    size_t strip_rows;     /* rows of info strip cropped, at the bottom and at the top */
    size_t strip_top;      /* those of them at the top */
    float *strip;          /* [strip_rows][nx] the cropped rows, from the top of the file down; owned; NULL: none */
    unsigned char *masked; /* [ny][nx] 1: something drawn over the specimen, no part of it; NULL: nothing; owned */
    size_t n_masked;       /* pixels of it, as found in the file's own rows */
    double y_stretch;      /* rows per row of the file: pixels that are not square, tilted views; else 1.
                              ny = round((file_ny - strip_rows) y_stretch) */
    int bit_depth;         /* of one grey level: 1 to 16, 24, 32, 64; 12 where a 12-bit detector fills 16-bit samples */
    double clipped_low, clipped_high; /* share of the plane's pixels, marks left out, at the lowest / highest level the file can hold */
    double px_nm;          /* pixel size, nm; NAN: unknown */
    double px_u_rel;       /* relative standard uncertainty of px_nm; NAN with it */
    char px_source[24];    /* option sheet standard bar sidecar "tag N" ome-xml description sCAL resolution pHYs none */
    char acquired_at[32];  /* ISO 8601 when the file says so, else "" */
    char hash[65];         /* SHA-256 of the file's bytes, lower-case hex */
    flags flags;           /* PX_DISAGREE, PX_UNEQUAL, COLOUR, MARKS ... */
    char note[480];        /* sentences behind the flags, "" if none */
    facts facts;
    px_statement statements[MAX_STATEMENTS]; /* the most specific first */
    size_t n_statements;
    size_t pages;          /* of the file; 0: its format has none */
    char compression[16];  /* "lzw", "jpeg" ...; "" not known */
} micrograph;              /* {0} = empty */

void micrograph_free(micrograph *m); /* accepts {0}, clears */

/* Two members of a JSON object: "sources": [...], "facts": {...}; null where the file does not say. */
void micrograph_facts_json(const micrograph *m, textbuf *out);

#endif

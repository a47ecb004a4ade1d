/* One decoded micrograph: what every later stage knows of the file. */
#ifndef SWARD_IO_MICROGRAPH_H
#define SWARD_IO_MICROGRAPH_H
#include <stddef.h>

#include "base/flags.h"

typedef struct {
    float *px;             /* [ny][nx] grey levels 0..1, row by row, info strip already cropped; owned */
    size_t nx, ny;         /* of the measured plane */
    size_t file_nx, file_ny;
    size_t strip_rows;     /* rows cropped at the bottom; file_ny = ny + strip_rows */
    int bit_depth;         /* of one sample in the file: 1 2 4 8 16 */
    double clipped_low, clipped_high; /* share of the plane's pixels at the lowest / highest level the file can hold */
    double px_nm;          /* pixel size, nm; NAN: unknown */
    double px_u_rel;       /* relative standard uncertainty of px_nm; NAN with it */
    char px_source[24];    /* option sheet sidecar "tag N" ome-xml description sCAL resolution pHYs none */
    char acquired_at[32];  /* ISO 8601 when the file says so, else "" */
    char hash[65];         /* SHA-256 of the file's bytes, lower-case hex */
    flags flags;           /* PX_DISAGREE, PX_UNEQUAL, COLOUR ... */
    char note[480];        /* sentences behind the flags, "" if none */
} micrograph;              /* {0} = empty */

void micrograph_free(micrograph *m); /* accepts {0}, clears */

#endif

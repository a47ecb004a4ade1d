/* What a decoder hands to load.c: the plane as stored, and every statement about the pixel size it met. Not
 * for other rooms. */
#ifndef SWARD_IO_PICTURE_PRIV_H
#define SWARD_IO_PICTURE_PRIV_H
#include <stddef.h>
#include <stdint.h>

#include "base/flags.h"
#include "base/status.h"
#include "io/micrograph.h"

/* Order of trust, the most specific first; `option`, `sheet`, `standard` and `bar` come from the caller. */
typedef enum {
    SCALE_OPTION,
    SCALE_SHEET,
    SCALE_STANDARD, /* a grating measured at the same nominal pixel size */
    SCALE_BAR, /* the user says what the burnt-in bar stands for */
    SCALE_SIDECAR,
    SCALE_TAG,
    SCALE_OME,
    SCALE_DESCRIPTION,
    SCALE_SCAL,
    SCALE_RESOLUTION /* the only rank behind the 1 um gate: it may be a screen's or a printer's */
} scale_rank;

typedef struct {
    scale_rank rank;
    char name[24];     /* as in micrograph.h, px_source */
    double x_nm, y_nm; /* per pixel of the stored picture */
    double u_rel;      /* relative standard uncertainty the source itself implies; NAN: none */
} scale;

enum { MAX_SCALES = MAX_STATEMENTS, MAX_NOTE = 480 };

typedef struct {
    scale list[MAX_SCALES];
    size_t n;
    char note[MAX_NOTE]; /* why a source that is there was not used; sentences */
} scales;

/* Adds a statement; zero, negative or not finite means "unknown" and is dropped. y_nm NAN: as x. */
void scales_add(scales *s, scale_rank rank, const char *name, double x_nm, double y_nm);
/* The same with the relative standard uncertainty the statement itself implies; NAN: none. */
void scales_add_u(scales *s, scale_rank rank, const char *name, double x_nm, double y_nm, double u_rel);
/* Appends a sentence, cut at a blank when the room ends. */
void note_add(char note[MAX_NOTE], const char *fmt, ...) __attribute__((format(printf, 2, 3)));

typedef struct {
    float *px; /* [ny][nx], 0..1, owned */
    size_t nx, ny;
    int bit_depth;
    flags flags;         /* COLOUR, MANY_PAGES */
    size_t strip_stated; /* rows the file itself says are strip, 0: it does not say */
    size_t pages;        /* of the file; 0: its format has none */
    int companion_wanted; /* OME-XML without words of its own: they are in a file beside */
    char compression[16];
    char acquired_at[32];
    facts facts;
    char note[MAX_NOTE];
    scales scales;
} picture; /* {0} = empty */

void picture_free(picture *p);

/* acquired_at as ISO 8601 without a zone (instruments write local time); an impossible date is left out. */
void picture_set_time(picture *p, int year, int month, int day, int hour, int minute, int second);

/* Copies what fits, never half a UTF-8 sequence; control characters become blanks. */
void picture_set_text(char *to, size_t size, const char *text);

/* Turns a plane stored in `orientation` (1 to 8, TIFF 6.0 tag 274; others count as 1) the way it is to be
 * seen, and the statements of its scale with it. err ST_NO_MEMORY */
status picture_turn(picture *p, int orientation, error *e);

/* Refuses sizes outside the limits before anything is allocated. */
status picture_make(picture *p, size_t nx, size_t ny, size_t max_pixels, error *e);

/* Refuses a large picture that a file far too small for any micrograph unpacks to; to be asked before picture_make. */
status picture_credible(size_t nx, size_t ny, size_t file_bytes, error *e);

/* Luminance of linear-light or coded R, G, B alike; equal channels give that channel exactly.
 *   src  weights of Rec. ITU-R BT.709-6 (2015), item 3.2 */
static inline float picture_luminance(float r, float g, float b) {
    double y = 0.2126 * (double)r + 0.7152 * (double)g + 0.0722 * (double)b;
    return y < 1.0 ? (float)y : 1.0f;
}

status png_decode(const uint8_t *bytes, size_t n, size_t max_pixels, picture *out, error *e);
status jpeg_decode(const uint8_t *bytes, size_t n, size_t max_pixels, picture *out, error *e);
status tiff_decode(const uint8_t *bytes, size_t n, size_t max_pixels, picture *out, error *e);
/* The same with a page the user names, from 1; 0: the largest that is no thumbnail. A file of one page has no choice.
 * err ST_BAD_INPUT too: no such page, or a thumbnail, of which nothing is measured */
status tiff_decode_page(const uint8_t *bytes, size_t n, size_t page, size_t max_pixels, picture *out, error *e);

/* Levels 0..1 of every code of a sample with `bits` bits (1, 2, 4, 8): table[v] = v / (2^bits - 1). */
void level_table(int bits, float table[256]);
float level_of_16(unsigned v);

#endif

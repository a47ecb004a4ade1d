/* A scale file: what a standard of known pitch said about the pixels of one magnification. */
#ifndef SWARD_APP_SCALEFILE_H
#define SWARD_APP_SCALEFILE_H
#include "base/text.h"
#include "io/load.h"
#include "metrics/grating.h"

/* What the standard was and what it gave, ready to be saved. */
typedef struct {
    scale_standard standard;  /* what a run needs */
    double pitch_nm, pitch_u_nm;
    double skew_deg;
    grating_kind kind;
    char file[256], hash[65]; /* the picture of the standard */
} scale_record;

void scalefile_text(const scale_record *r, textbuf *out);

/*   err  ST_BAD_INPUT with the file: not there, not JSON, a key missing or out of range; ST_IO; ST_NO_MEMORY */
status scalefile_read(const char *path, scale_standard *out, error *e);

const char *grating_word(grating_kind kind); /* lines square hexagonal auto */

#endif

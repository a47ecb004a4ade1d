/* `sward predict --angles`: weighted reflectance against the angle of incidence. */
#ifndef SWARD_APP_ANGLES_H
#define SWARD_APP_ANGLES_H
#include "base/text.h"
#include "link/predict.h"

typedef struct {
    double angle_deg;
    double s, p;                   /* weighted, each polarization; NAN where no model serves */
    double mean, mean_lo, mean_hi; /* unpolarised with its 95 % interval */
    double polished, coated;       /* flat silicon at that angle, bare and under 75 nm of nitride */
} angle_row;

typedef struct {
    size_t n;
    double spacing_nm, height_nm;
    angle_row *rows; /* owned */
    char note[960];  /* of the first angle off the vertical */
} angle_sweep;       /* {0} = empty */

/* "0:80:5": from, to, step in degrees.
 *   err ST_BAD_INPUT no such text, an angle outside 0..89, more than 200 angles */
status angles_parse(const char *option, const char *text, double *from, double *to, double *step, error *e);

/* The sweep. o's own angle and polarization are not used. err as predict() */
status angles_sweep(const surface_input *in, const optics_setup *o, double from, double to, double step,
                    angle_sweep *out, error *e);
void angle_sweep_free(angle_sweep *s);

/* The angle up to which the mean stays at or below the limit, linear between the angles; NAN: not even at the first.
 * upper 1: the upper end of the interval instead of the value. */
double angles_under(const angle_sweep *s, double limit, int upper);

/* The sweep as one JSON object, as CSV, or for a person; limit NAN: none asked for. */
void angles_json(const angle_sweep *s, double limit, textbuf *out);
void angles_csv(const angle_sweep *s, textbuf *out);
void angles_text(const angle_sweep *s, double limit, textbuf *out);

#endif

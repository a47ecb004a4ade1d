/* The link file: a calibrated link on disk, with what it was made from. JSON. */
#ifndef SWARD_APP_LINKFILE_H
#define SWARD_APP_LINKFILE_H
#include "app/protocol.h"
#include "link/calibrate.h"

typedef struct {
    calibration link;
    char made_at[32]; /* ISO 8601 */
    char *substrate;  /* material of the fit, as the protocol named it; owned */
    char *ambient;    /* what the spectra were measured in; owned */
} linkfile;           /* {0} = empty: link.n_samples is 0 */

/* Writes a fit.
 *   in   samples[n] as fitted (names, spacings); p the optics it was fitted with; made_at ISO 8601
 *   err  ST_NO_RESULT the fit carries no link (a spacing is missing, or the data do not determine it); ST_IO */
status linkfile_write(const char *path, const fit_sample *samples, const fit_result *r, const protocol *p,
                      const char *made_at, error *e);

/*   err  ST_BAD_INPUT with the path: no such file, not JSON, no link file or a newer version of it, a member missing or
 *        out of range; ST_IO; ST_NO_MEMORY */
status linkfile_read(const char *path, linkfile *out, error *e);
void linkfile_free(linkfile *l);

/* A link holds for the substrate and the mixing rule it was fitted with. err ST_BAD_INPUT with the difference */
status linkfile_fits(const linkfile *l, const protocol *p, error *e);

/* Numbers behind the link, for fingerprints. */
void linkfile_text(const linkfile *l, textbuf *out);

/* Days from `made_at` to the etch, negative when the link was made later; NAN when the etch has no date. */
double linkfile_age_days(const linkfile *l, const char *etched_at);

#endif

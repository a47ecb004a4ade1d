/* What `sward fit` prints. */
#ifndef SWARD_APP_FIT_PRINT_H
#define SWARD_APP_FIT_PRINT_H
#include "app/protocol.h"
#include "link/calibrate.h"

/* One fit, ready to be shown; borrowed. */
typedef struct {
    const fit_sample *samples;
    const char *const *notes;     /* how each file was read, "" plain */
    const quantity *sheet_height; /* of each sample, value NAN: none */
    const fit_options *options;
    const protocol *protocol;
    const fit_result *result;
} fit_view;

void fit_text(const fit_view *v, textbuf *out);
void fit_json(const fit_view *v, textbuf *out);
/* sample, wavelength_nm, measured, fitted, residual: one row a fitted value */
void fit_csv(const fit_view *v, textbuf *out);

#endif

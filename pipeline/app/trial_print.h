/* The Monte Carlo of `sward predict --trials` as JSON and for a person. */
#ifndef SWARD_APP_TRIAL_PRINT_H
#define SWARD_APP_TRIAL_PRINT_H
#include "base/text.h"
#include "link/trials.h"

/* A member "monte_carlo" with a comma behind it. */
void trials_json(const distribution *d, const trial_options *t, textbuf *out);
void trials_text(const distribution *d, const trial_options *t, textbuf *out);

#endif

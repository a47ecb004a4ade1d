/* Options that several commands share, checked in one place; wrong use ends through argp_error (exit status 2). */
#ifndef SWARD_APP_OPTIONS_H
#define SWARD_APP_OPTIONS_H
#include <argp.h>

int option_jobs(const char *arg, const struct argp_state *state);     /* --jobs: 0 (one per core) to 1024 */
double option_px_nm(const char *arg, const struct argp_state *state); /* --px: nanometres per pixel, above 0 */

#endif

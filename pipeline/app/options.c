#include "app/options.h"

#include "base/number.h"

int option_jobs(const char *arg, const struct argp_state *state) {
    double v = 0.0;
    if (!number_parse(arg, &v) || v < 0.0 || v > 1024.0 || v > (double)(int)v || v < (double)(int)v)
        argp_error(state, "--jobs: found '%s', expected a whole number from 0 to 1024", arg);
    return (int)v;
}

double option_px_nm(const char *arg, const struct argp_state *state) {
    double v = 0.0;
    if (!number_parse(arg, &v) || !(v > 0.0))
        argp_error(state, "--px: found '%s', expected nanometres per pixel, above 0", arg);
    return v;
}

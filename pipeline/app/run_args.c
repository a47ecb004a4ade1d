#include "app/run_args.h"

#include "app/length.h"
#include "app/options.h"

error_t run_args_parse(int key, char *arg, struct argp_state *state, run_options *o) {
    switch (key) {
    case OPT_PROTOCOL: o->protocol = arg; break;
    case OPT_SHEET: o->sheet = arg; break;
    case OPT_OUT: o->out = arg; break;
    case OPT_HISTORY: o->history = arg; break;
    case OPT_JOBS: o->jobs = option_jobs(arg, state); break;
    case OPT_PX: o->px_nm = option_px_nm(arg, state); break;
    case OPT_BAR:
        if (!length_parse(arg, &o->bar_nm))
            argp_error(state, "--bar: found '%s', expected a length with its unit, such as 5um or 500nm", arg);
        break;
    case OPT_SCALE: o->scale = arg; break;
    case OPT_KEEP_TILT: o->keep_tilt = 1; break;
    case OPT_NO_REPORT: o->no_report = 1; break;
    case OPT_FRESH: o->fresh = 1; break;
    case OPT_QUIET: o->quiet = 1; break;
    case OPT_VERBOSE: o->verbose = 1; break;
    case ARGP_KEY_ARG:
        if (o->folder) argp_error(state, "one FOLDER only; found '%s' too", arg);
        o->folder = arg;
        break;
    case ARGP_KEY_END:
        if (!o->folder) argp_error(state, "FOLDER is missing: the folder that holds the micrographs");
        break;
    default: return ARGP_ERR_UNKNOWN;
    }
    return 0;
}

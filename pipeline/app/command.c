#include "app/command.h"

const char *argp_program_version = "sward " SWARD_VERSION;
error_t argp_err_exit_status = EXIT_USAGE;

/* The command table and the exit code. Everything else lives in the cmd_ files. */
#include <stdio.h>
#include <string.h>

#include "app/command.h"

int main(int argc, char **argv) {
    (void)argc;
    (void)argv;
    return EXIT_USAGE;
}

/* The verdict at the end of a line gets its colour, everything else stays as it is; no colour where the output is no terminal. */
#include "app/summary.h"

#include <string.h>
#include <unistd.h>

#include "check.h"

int main(void) {
    textbuf t = { 0 };
    summary_colour("head fails here\n  a  312 nm  conforms\n  b  468 nm  fails\n  c  -  undecided\nfails\nlast  conforms", &t);
    CHECK(t.s && !strcmp(t.s, "head fails here\n  a  312 nm  \033[32mconforms\033[0m\n  b  468 nm  \033[1;31mfails\033[0m\n"
                              "  c  -  \033[33mundecided\033[0m\nfails\nlast  \033[32mconforms\033[0m"));
    text_free(&t);
    summary_colour("", &t);
    CHECK(!t.n);
    text_free(&t);
    int pipe_ends[2];
    CHECK(pipe(pipe_ends) == 0 && dup2(pipe_ends[1], STDOUT_FILENO) == STDOUT_FILENO);
    CHECK(!colour_wanted());
    return check_done();
}

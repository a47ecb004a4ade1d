/* What came out, in lines that a person reads on the terminal and at the top of the page. */
#ifndef SWARD_APP_SUMMARY_H
#define SWARD_APP_SUMMARY_H
#include "app/publish.h"

/* Same numbers and digits as the tables; no times, no absolute paths: the same on every run. */
void summary_text(const publication *p, textbuf *out);

/* The same text with the verdict at the end of a line in colour (ANSI escapes), for a terminal. */
void summary_colour(const char *summary, textbuf *out);
/* 1 where colour is welcome: standard output is a terminal, TERM is not "dumb", NO_COLOR is not set. */
int colour_wanted(void);

#endif

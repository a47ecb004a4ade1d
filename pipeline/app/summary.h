/* What came out, in lines that a person reads on the terminal and at the top of the page. */
#ifndef SWARD_APP_SUMMARY_H
#define SWARD_APP_SUMMARY_H
#include "app/publish.h"

/* Same numbers and digits as the tables; no times, no absolute paths: the same on every run. */
void summary_text(const publication *p, textbuf *out);

#endif

/* Numbers as text, always in the C locale: the program never calls setlocale. */
#ifndef SWARD_BASE_NUMBER_H
#define SWARD_BASE_NUMBER_H
#include <stddef.h>

#define NUMBER_TEXT 40

/* The whole text (blanks around it allowed) is one finite decimal number: 1 and *out, else 0. No hex, nan, inf. */
int number_parse(const char *s, double *out);

/* The only number printer of the program: `digits` significant digits, shortest form, "" for a missing value.
 * `out` holds NUMBER_TEXT bytes; returned for convenience. */
const char *number_text(double v, int digits, char *out);

/* The same value times 100 with exactly the digits that number_text(v, digits) shows, without rounding again. */
const char *number_percent(double v, int digits, char *out);

#endif

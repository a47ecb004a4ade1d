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

/* Rounded to 10^-places (places may be negative) and printed with exactly that many decimals: what an uncertainty leaves of a
 * value. "" for a missing value. */
const char *number_places(double v, int places, char *out);

/* Places that keep `digits` significant digits of v; 0 for a value that is 0 or missing. */
int number_places_of(double v, int digits);

/* The same value times 100 with exactly the digits that number_text(v, digits) shows, without rounding again. */
const char *number_percent(double v, int digits, char *out);

#endif

#include "base/number.h"

#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

int number_parse(const char *s, double *out) {
    while (isspace((unsigned char)*s)) s++;
    if (!*s || strspn(s, "+-0123456789.eE") == 0) return 0;
    char *end;
    double v = strtod(s, &end);
    if (end == s || !isfinite(v)) return 0;
    for (const char *p = s; p < end; p++)
        if (!strchr("+-0123456789.eE", *p)) return 0; /* hex, nan, inf */
    while (isspace((unsigned char)*end)) end++;
    if (*end) return 0;
    *out = v;
    return 1;
}

/* What "%.*g" prints, for the usual numbers and without its arbitrary precision: v times an exact power of ten is off by less
 * than 1e-6 of the last digit, so it rounds rightly unless it lies that close to a tie. 0: not one of these. */
static int quick_text(double v, int digits, char *out) {
    static const double power[] = { 1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12 };
    double a = fabs(v);
    if (digits < 1 || digits > 9 || a < 1e-4 || a >= power[digits]) return 0;
    static const double share[] = { 1e0, 1e-1, 1e-2, 1e-3, 1e-4 }; /* doubles a little above what they stand for */
    int decimals = digits - 1;
    for (int x = 0; a < share[x]; x++) decimals++;
    for (int x = 1; a >= power[x]; x++) decimals--;
    double scaled = a * power[decimals];
    long n = (long)scaled;
    double rest = scaled - (double)n;
    if (fabs(rest - 0.5) < 1e-6) return 0;
    if (rest > 0.5) n++;
    if (n >= (long)power[digits]) { /* 9.996 -> 10.00 */
        n /= 10;
        if (decimals-- == 0) return 0;
    }
    while (decimals > 0 && n % 10 == 0) {
        n /= 10;
        decimals--;
    }
    char text[24];
    int at = (int)sizeof text, left = decimals;
    for (; n || left >= 0; n /= 10, left--) {
        if (left == 0 && decimals) text[--at] = '.';
        text[--at] = (char)('0' + n % 10);
    }
    if (v < 0.0) text[--at] = '-';
    memcpy(out, text + at, sizeof text - (size_t)at);
    out[sizeof text - (size_t)at] = '\0';
    return 1;
}

const char *number_text(double v, int digits, char *out) {
    out[0] = '\0';
    if (!isfinite(v)) return out;
    if (fabs(v) < 1e-300) v = 0.0; /* no "-0" */
    if (quick_text(v, digits, out)) return out;
    snprintf(out, NUMBER_TEXT, "%.*g", digits, v);
    return out;
}

enum { MOST_PLACES = 15 };

const char *number_places(double v, int places, char *out) {
    out[0] = '\0';
    if (!isfinite(v) || fabs(v) > 1e15) return isfinite(v) ? number_text(v, MOST_PLACES, out) : out;
    if (places > MOST_PLACES) places = MOST_PLACES;
    double unit = pow(10.0, -places), rounded = places < 0 ? round(v / unit) * unit : v;
    snprintf(out, NUMBER_TEXT, "%.*f", places < 0 ? 0 : places, rounded);
    if (out[0] == '-' && strspn(out + 1, "0.") == strlen(out + 1)) memmove(out, out + 1, strlen(out)); /* no "-0.0" */
    return out;
}

int number_places_of(double v, int digits) {
    double size = fabs(v);
    if (!(size > 0.0) || !isfinite(size)) return 0;
    int places = digits - 1 - (int)floor(log10(size));
    double rounded = round(size * pow(10.0, places)); /* 0.996 with two digits is 1.0, one place less */
    return rounded >= pow(10.0, digits) ? places - 1 : places;
}

const char *number_percent(double v, int digits, char *out) {
    char shown[NUMBER_TEXT];
    number_text(v, digits, shown);
    if (!shown[0]) {
        out[0] = '\0';
        return out;
    }
    return number_text(strtod(shown, NULL) * 100.0, digits, out);
}

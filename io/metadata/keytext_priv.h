/* Keys and values in the text blocks of instruments. Not for other rooms. */
#ifndef SWARD_IO_METADATA_KEYTEXT_PRIV_H
#define SWARD_IO_METADATA_KEYTEXT_PRIV_H
#include <stddef.h>

enum { KEYTEXT_LINE = 256 };

/* Copies the line at `p`, trimmed and cut to fit, and returns the start of the next one; NULL at the end. */
const char *keytext_line(const char *p, char line[KEYTEXT_LINE]);

/* The value of `key` in the first section called `section` that has it; a trailing '*' of section or key
 * matches any ending, section NULL any section. Letters of either case, the first '=' separates. 0: absent or
 * empty. */
int keytext_ini(const char *text, const char *section, const char *key, char value[KEYTEXT_LINE]);
double keytext_ini_number(const char *text, const char *section, const char *key); /* NAN: absent, not a number */
/* What its digits say of it (scaletext_u_rel); NAN: nothing. */
double keytext_ini_u_rel(const char *text, const char *section, const char *key);
int keytext_ini_has(const char *text, const char *section); /* 1: the section is there */

/* The rest of the first line that begins with `key` and a blank, without leading '$' of either. 0: absent or
 * empty. */
int keytext_dollar(const char *text, const char *key, char value[KEYTEXT_LINE]);

/* UTF-16 text, with or without a mark, to Latin-1 in place; other text stays. The result is terminated: the
 * block must have room for a NUL at *n. */
void keytext_narrow(char *text, size_t *n);

#endif

/* HTML building blocks of the page: escaping, cells of a row, badges. Everything that comes from a file goes through
 * html_text. */
#ifndef SWARD_REPORT_HTML_H
#define SWARD_REPORT_HTML_H
#include <stddef.h>
#include <stdint.h>

#include "base/text.h"
#include "io/column.h"

/* Escapes & < > " ' ; invalid UTF-8 and control characters (other than tab and line feed) become U+FFFD. Good for text
 * and for quoted attributes. NULL adds nothing. */
void html_text(textbuf *out, const char *s);

/* The same without escaping, for text that is drawn; tab and line feed become blanks. */
void text_safe(textbuf *out, const char *s);

/* A relative path as the value of href: bytes that a URL gives another meaning, or that are no ASCII, as %XX (RFC 3986),
 * with "./" in front. */
void html_href(textbuf *out, const char *path);

/* Bytes of the first `letters` UTF-8 characters of s, never splitting one. */
size_t html_fit(const char *s, size_t letters);

/* The column of that name, or NULL. */
const column *column_find(const column *columns, size_t n, const char *name);

/* The cell as the CSV prints it, escaped; an en dash when empty. */
void html_cell(textbuf *out, const column *c, const void *row);

/* "value +- U (k = 2)" of a column and its twin, both with the digits that U leaves: two of U. The value stands in a <data>
 * element whose attribute holds the cell of the tables, all digits, so that page and results.json can be compared; U is twice
 * the uncertainty that the CSV prints. `percent` shows both times 100. The twin may be NULL. */
void html_value(textbuf *out, const column *c, const column *twin, const void *row, int percent);

/* A number of a column in a <data> element likewise, shown with at most `digits` significant digits (with exactly
 * two when that is 2), times 100 when `percent`; an en dash when empty. */
void html_number(textbuf *out, const column *c, const void *row, int percent, int digits);

/* Verdict or status as sign + word + colour, never by colour alone. */
void html_badge(textbuf *out, const char *word);

/* Base64 (RFC 4648) of n bytes. */
void text_base64(textbuf *out, const uint8_t *bytes, size_t n);

#endif

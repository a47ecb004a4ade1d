/* A pixel size in words: numbers, units, `key = value unit` lines, JSON keys. Shared by sidecars, TIFF
 * descriptions and PNG texts. Not for other rooms. */
#ifndef SWARD_IO_METADATA_SCALETEXT_PRIV_H
#define SWARD_IO_METADATA_SCALETEXT_PRIV_H
#include <stddef.h>

#include "io/picture_priv.h"

/* A number as instruments write them: blanks around, exponent of any length, a decimal comma when the text
 * has no point. 1 and *out, else 0. */
int scaletext_number(const char *s, double *out);

/* nm per unit of the length unit that is the whole of s (blanks around allowed), or 0: no length. */
double scaletext_unit(const char *s);

/* Splits "12.33 nm/px" into its number and the rest, which starts behind the blanks. 0: no number in front. */
int scaletext_split(const char *s, double *value, const char **rest);

/* Relative standard uncertainty that the digits of the number imply: half a step of the last one, uniform.
 * NAN: no number, or one without a decimal sign, whose last digit says nothing ("5 nm" is mostly five, not 4.5 to 5.5). */
double scaletext_u_rel(const char *s);

/* "12.33 nm" -> nm. 1 and *nm, 0: no number or no length unit. */
int scaletext_length(const char *s, double *nm);

/* Lines in the generic forms (pixel size = 2.5 nm; px_nm = 5.58). A value without a unit is refused with a
 * sentence in s->note, which begins with `where`. Text is NUL-terminated. Returns 1 when a size was added. */
int scaletext_lines(const char *text, scale_rank rank, const char *name, const char *where, scales *s);

/* JSON with px_nm, pixel_size {x, y} in metres, PixelSizeUm, or hfw in metres with resolution [w, h]. 1:
 * added. */
int scaletext_json(const char *text, size_t n, scale_rank rank, const char *name, const char *where,
                   scales *s);

/* A PNG text chunk: keyword that names the pixel size itself, or a description in lines or JSON. */
void scaletext_keyword(const char *keyword, const char *text, scales *s);

#endif

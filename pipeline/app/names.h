/* Which sample a file belongs to when the sheet does not say. */
#ifndef SWARD_APP_NAMES_H
#define SWARD_APP_NAMES_H
#include "base/status.h"

/* What a name says; "" where it does not. Owned. */
typedef struct {
    char *sample, *lot, *wafer, *position;
    int matched; /* 1: by the pattern */
} name_parts;

/* A template, or "re:" and a regular expression (PCRE2) with named groups lot wafer position sample, matched
 * against the relative path without its extension: see regexname.h.
 * The template's own fault: err ST_BAD_INPUT unknown field (with the nearest), no field at all, unclosed
 * brace, two fields without text between them. Fields: lot wafer position sample n magnification image, each
 * at most once; {} skips anything. */
status pattern_check(const char *pattern, error *e);

/* Template ("{lot}_W{wafer}_{position}_{n}", matched against the file's stem, or against the relative path
 * without its extension when the template holds a '/'), else the sub-folder, else the stem without its
 * trailing number and the separators before it. {n} matches digits only. With a template the sample is
 * {sample} when it has that field, else the matched text with {n}, {magnification}, {image}, {} and the text before them left out
 * ("L7_W03_centre_2" gives "L7_W03_centre"). A name that does not match falls through to the other two rules.
 *   in   pattern may be NULL; must have passed pattern_check
 *   err  ST_NO_MEMORY */
status name_sample(const char *relative, const char *pattern, name_parts *out, error *e);
void name_parts_free(name_parts *p);

#endif

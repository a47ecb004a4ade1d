/* Sample from a file name by a regular expression with named groups. */
#ifndef SWARD_APP_REGEXNAME_H
#define SWARD_APP_REGEXNAME_H
#include <stddef.h>

#include "app/names.h"

/* The expression's own fault: err ST_BAD_INPUT not a regular expression (with the place), none of the groups lot
 * wafer position sample. */
status regex_check(const char *expression, error *e);

/* Matched anywhere in the path relative to the folder, without its ending.
 *   out  *found; `out` with every member set where it matched: the groups, "" where one took no part; sample is
 *        the group of that name, else lot, wafer and position joined by '_'
 *   err  ST_BAD_INPUT matching takes too many steps; ST_NO_MEMORY */
status regex_sample(const char *path, size_t n, const char *expression, name_parts *out, int *found, error *e);

#endif

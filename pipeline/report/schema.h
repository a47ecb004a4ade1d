/* results.schema.json: what results.json holds, for programs that read it. */
#ifndef SWARD_REPORT_SCHEMA_H
#define SWARD_REPORT_SCHEMA_H
#include "report/results.h"

/* A JSON Schema (draft 2020-12) made of the column tables: rows have every column of their CSV with its type, its unit as "unit"
 * and its meaning; further members of a row are allowed.
 *   out  one JSON object; failure is remembered in `out` (text_check)
 *   src  JSON Schema, draft 2020-12 (json-schema.org, from memory) */
void schema_json(const results *r, textbuf *out);

#endif

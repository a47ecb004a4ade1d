/* datapackage.json and the Markdown column list: the tables described for other programs and for the documentation. */
#ifndef SWARD_REPORT_PACKAGE_H
#define SWARD_REPORT_PACKAGE_H
#include "report/results.h"

/* Frictionless Data Package (Tabular Data Package) with a Table Schema for every column of every table: name, type,
 * unit, meaning.
 *   in   out_dir where features/<stem>.csv and profiles/<stem>.csv are looked for; NULL: none are listed
 *   out  one JSON object; failure is remembered in `out` (text_check)
 *   src  Data Package and Table Schema, version 1 (specs.frictionlessdata.io, from memory) */
void package_json(const results *r, const char *out_dir, textbuf *out);

/* The end of a field's object, from its unit ("": none) to the closing brace; the JSON Schema writes its properties alike. */
void package_describe(const char *unit, const char *meaning, textbuf *out);

/* Appends the stem of the files of image i ("features/<stem>.csv"); 0 when it has none. */
int image_stem(const results *r, size_t i, textbuf *out);

#endif

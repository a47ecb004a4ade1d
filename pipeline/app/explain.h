/* How a number came about, from what a run has written: micrographs, pixel size, definition, exclusions, uncertainty, target,
 * height and optics, program. Nothing is computed anew but shares and counts. */
#ifndef SWARD_APP_EXPLAIN_H
#define SWARD_APP_EXPLAIN_H
#include <cjson/cJSON.h>

#include "base/status.h"
#include "base/text.h"

/* From the outputs in `dir`. quantity NULL: those with a target, without any spacing_nm and weighted_reflectance.
 *   out  *account an object the caller deletes: sample, quantities [{quantity, value, u ...}], micrographs, link, manifest
 *   err  ST_BAD_INPUT no outputs, no such sample, no such quantity (the known ones are named); ST_IO; ST_NO_MEMORY */
status explain_run(const char *dir, const char *sample, const char *quantity, cJSON **account, error *e);

/* From a ledger: the newest row of the sample; the parts of the uncertainty are not kept there.
 *   err  as explain_run */
status explain_history(const char *path, const char *sample, const char *quantity, cJSON **account, error *e);

/* The account for a person. */
void explain_text(const cJSON *account, textbuf *out);

/* Where the definition of a column is published; "" the program's own. */
const char *explain_source(const char *quantity);

#endif

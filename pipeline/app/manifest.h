/* The account of a run in results.json: what made the numbers, so that somebody else can make them again. Nothing in it depends
 * on where, when or how the program was called; times and places are in run.json. */
#ifndef SWARD_APP_MANIFEST_H
#define SWARD_APP_MANIFEST_H
#include "app/publish.h"

/* One JSON object. Failure is remembered in `out` (text_check). */
void manifest_json(const publication *p, textbuf *out);

#endif

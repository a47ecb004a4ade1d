/* Remembered values: one file an entry, FOLDER/KEY.KIND, with a mark of its bytes at the end, so that a damaged or foreign
 * entry is as good as none. The key says what a value depends on; whoever makes it must leave nothing out. */
#ifndef SWARD_IO_MEMO_H
#define SWARD_IO_MEMO_H
#include "base/status.h"
#include "base/text.h"

/* in   key: at most 64 characters of a file name; kind: the ending of the entry, which also starts its file
 * out  1: *bytes is the body, *n long, the caller frees it; 0: there is none */
int memo_get(const char *folder, const char *key, const char *kind, char **bytes, size_t *n);
/* The folder is made where it is missing. err ST_IO, ST_NO_MEMORY; the caller may go on without */
status memo_put(const char *folder, const char *key, const char *kind, const textbuf *body, error *e);

#endif

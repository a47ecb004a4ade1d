/* Reading a protocol, shared by its own files only. */
#ifndef SWARD_APP_PROTOCOL_PRIV_H
#define SWARD_APP_PROTOCOL_PRIV_H
#include <cjson/cJSON.h>

#include "app/protocol_keys.h"
#include "io/json.h"

/* What every step of reading needs. */
typedef struct {
    const json *doc; /* NULL: the value comes from an option, `what` is its name and there is no line */
    const char *what, *folder;
    protocol *p;
    error *e;
} reader;

size_t reader_line(const reader *r, const cJSON *node);
/* The sentence of every wrong value: where, what was found, what was expected. */
status reader_wrong(const reader *r, size_t line, const char *where, const cJSON *found, const char *expected);
status reader_wrong_value(const reader *r, const cJSON *node, const protocol_key *k);
/* An unknown key inside `where`, with the nearest of the words. */
status reader_unknown(const reader *r, const cJSON *node, const char *where, const char *const *words, size_t n);
/* ", did you mean 'x'?" or nothing. */
void reader_hint(const char *word, const char *const *words, size_t n, char *out, size_t size);

/* The lists of a protocol, in protocol_lists.c. */
status read_targets(const reader *r, const cJSON *node, const protocol_key *k);
status read_goals(const reader *r, const cJSON *node, const protocol_key *k);
status read_places(const reader *r, const cJSON *node, const protocol_key *k);
status read_rules(const reader *r, const cJSON *node, const protocol_key *k);
void protocol_lists_free(protocol *p);

#endif

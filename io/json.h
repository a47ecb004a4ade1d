/* JSON. Reading: cJSON plus the line of every key, so that a mistake in a protocol is named by its line. Writing:
 * a small emitter over `textbuf`, because every number must print with the digits of its column. */
#ifndef SWARD_IO_JSON_H
#define SWARD_IO_JSON_H
#include <stddef.h>

#include "base/status.h"
#include "base/text.h"

struct cJSON;

typedef struct {
    struct cJSON *root; /* object; walk with cJSON's own functions */
    size_t n_keys;
    const struct cJSON **nodes; /* [n_keys] nodes that have a key, in document order */
    size_t *lines;              /* [n_keys] line of each, from 1 */
} json;                         /* {0} = empty */

/*   err  ST_BAD_INPUT with the line: not JSON, deeper than LIMIT_JSON_DEPTH, the same key twice in one object,
 *        the root is no object, text after the end. `what` names the file in the sentence. */
status json_parse(const char *bytes, size_t n, const char *what, json *out, error *e);
void json_free(json *j);
size_t json_line(const json *j, const struct cJSON *node); /* 0 if the node has no key */

double json_member_number(const struct cJSON *object, const char *name);    /* NAN where it is no number */
const char *json_member_text(const struct cJSON *object, const char *name); /* "" where it is no text; lives with the object */

void json_string(textbuf *out, const char *s);             /* quoted and escaped; invalid UTF-8 -> U+FFFD; NULL -> null */
void json_number(textbuf *out, double v, int digits);      /* number_text, or null */

/* Of the n words the one most like `word` (edit distance at most 3 and at most half its length), or NULL. */
const char *json_nearest(const char *word, const char *const *words, size_t n);

#endif

/* A walk through an XML text. Not for other rooms. */
#ifndef SWARD_IO_METADATA_XML_PRIV_H
#define SWARD_IO_METADATA_XML_PRIV_H
#include <stddef.h>

enum { XML_DEPTH = 64, XML_NAME = 64, XML_TEXT = 512 };

/* names[0] is the root, names[depth - 1] the element itself; prefixes of name spaces are cut off. */
typedef struct {
    const char (*names)[XML_NAME];
    size_t depth;
} xml_path;

typedef struct {
    /* attributes: name, value, name, value ... NULL. Either function may be NULL. */
    void (*begin)(void *state, const xml_path *path, const char *const *attributes);
    /* `text` is the element's own first text, trimmed, "" if none, cut at XML_TEXT - 1 bytes. */
    void (*end)(void *state, const xml_path *path, const char *text);
} xml_visitor;

/* Walks the text; `state` of `size` bytes is cleared first (twice when a text that claims to be UTF-8 must be
 * read as Latin-1). 1: well formed to its end; 0: not, deeper than XML_DEPTH, larger than 16 MiB, or with a
 * document type: those may define entities, which are never expanded. */
int xml_walk(const char *text, size_t n, const xml_visitor *visitor, void *state, size_t size);

/* 1 when the last element is `name` and the one above it `parent` (NULL: any). */
int xml_is(const xml_path *path, const char *parent, const char *name);
/* The value of an attribute, or NULL. Prefixes are not looked at. */
const char *xml_attribute(const char *const *attributes, const char *name);

#endif

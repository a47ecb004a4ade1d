/* XML through Expat, as a walk: who calls sees the path of names, attributes and the text of each element.
 * Untrusted: a document type ends the walk (so no entity is ever defined, let alone expanded), depth and size
 * are bounded, names and texts are cut to fixed rooms. A text that claims to be UTF-8 and is not is read once
 * more as Latin-1, which is what instruments then wrote. */
#include "io/metadata/xml_priv.h"

#include <expat.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"

enum { MAX_BYTES = 16 << 20 };

typedef struct {
    XML_Parser parser;
    const xml_visitor *visitor;
    void *state;
    size_t depth;
    char names[XML_DEPTH][XML_NAME];
    char texts[XML_DEPTH][XML_TEXT];
    size_t lengths[XML_DEPTH];
} walk;

static void stop(walk *w) { XML_StopParser(w->parser, XML_FALSE); }

static void on_begin(void *user, const char *name, const char **attributes) {
    walk *w = user;
    const char *colon = strrchr(name, ':');
    if (w->depth == XML_DEPTH) {
        stop(w);
        return;
    }
    snprintf(w->names[w->depth], XML_NAME, "%s", colon ? colon + 1 : name);
    w->lengths[w->depth] = 0;
    w->texts[w->depth++][0] = '\0';
    xml_path path = { (const char(*)[XML_NAME])w->names, w->depth };
    if (w->visitor->begin) w->visitor->begin(w->state, &path, (const char *const *)attributes);
}

static void on_text(void *user, const char *s, int length) {
    walk *w = user;
    if (!w->depth || length <= 0) return;
    char *to = w->texts[w->depth - 1];
    size_t at = w->lengths[w->depth - 1], n = (size_t)length;
    while (n && !at && strchr(" \t\r\n", *s)) s++, n--; /* leading blanks */
    if (n > XML_TEXT - 1 - at) n = XML_TEXT - 1 - at;
    memcpy(to + at, s, n);
    to[at + n] = '\0';
    w->lengths[w->depth - 1] = at + n;
}

static void on_end(void *user, const char *name) {
    walk *w = user;
    (void)name;
    if (!w->depth) return;
    xml_path path = { (const char(*)[XML_NAME])w->names, w->depth };
    char *text = w->texts[w->depth - 1];
    for (size_t n = strlen(text); n && strchr(" \t\r\n", text[n - 1]); n--) text[n - 1] = '\0';
    if (w->visitor->end) w->visitor->end(w->state, &path, text);
    w->depth--;
}

static void on_doctype(void *user, const char *name, const char *system, const char *public_id,
                       int internal) {
    (void)name, (void)system, (void)public_id, (void)internal;
    stop(user);
}

static int walk_as(walk *w, const char *encoding, const char *text, size_t n, int *invalid) {
    w->depth = 0;
    w->parser = XML_ParserCreate(encoding);
    if (!w->parser) return 0;
    XML_SetUserData(w->parser, w);
    XML_SetElementHandler(w->parser, on_begin, on_end);
    XML_SetCharacterDataHandler(w->parser, on_text);
    XML_SetStartDoctypeDeclHandler(w->parser, on_doctype);
    int ok = XML_Parse(w->parser, text, (int)n, 1) == XML_STATUS_OK;
    *invalid = XML_GetErrorCode(w->parser) == XML_ERROR_INVALID_TOKEN;
    XML_ParserFree(w->parser);
    return ok;
}

int xml_walk(const char *text, size_t n, const xml_visitor *visitor, void *state, size_t size) {
    int invalid = 0;
    while (n && !text[n - 1]) n--; /* blocks are filled up with zeros */
    if (n > MAX_BYTES) return 0;
    walk *w = mem_array(1, sizeof *w);
    if (!w) return 0;
    w->visitor = visitor;
    w->state = state;
    memset(state, 0, size);
    int ok = walk_as(w, NULL, text, n, &invalid);
    if (!ok && invalid) {
        memset(state, 0, size);
        ok = walk_as(w, "ISO-8859-1", text, n, &invalid);
    }
    free(w);
    return ok;
}

int xml_is(const xml_path *path, const char *parent, const char *name) {
    if (!path->depth || strcmp(path->names[path->depth - 1], name) != 0) return 0;
    return !parent || (path->depth > 1 && !strcmp(path->names[path->depth - 2], parent));
}

const char *xml_attribute(const char *const *attributes, const char *name) {
    for (; attributes[0]; attributes += 2)
        if (!strcmp(attributes[0], name)) return attributes[1];
    return NULL;
}

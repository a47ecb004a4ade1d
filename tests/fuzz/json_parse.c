/* Whatever the bytes: keys and lines belong together, and what json_string prints can be read again. */
#include <cjson/cJSON.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "io/json.h"

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t n);

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t n) {
    json j = { 0 }, again = { 0 };
    error e = { 0 };
    textbuf t = { 0 };
    status st = json_parse((const char *)bytes, n, "input", &j, &e);
    if ((st == ST_OK) != (e.text[0] == '\0') || st == ST_BUG) abort();
    for (size_t i = 0; st == ST_OK && i < j.n_keys; i++) {
        if (!j.nodes[i] || !j.nodes[i]->string || (i && j.lines[i] < j.lines[i - 1])) abort();
    }
    json_free(&j);
    char *text = malloc(n + 1); /* any bytes as a string: printed as valid JSON */
    if (!text) return 0;
    if (n) memcpy(text, bytes, n);
    text[n] = '\0';
    text_add(&t, "{\"s\": ");
    json_string(&t, text);
    text_add(&t, "}");
    e = (error){ 0 };
    if (json_parse(t.s, t.n, "output", &again, &e) != ST_OK) abort();
    json_free(&again);
    text_free(&t);
    free(text);
    return 0;
}

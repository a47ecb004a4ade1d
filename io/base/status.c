/* The first cause stays; outer layers only add where it happened. */
#include "base/status.h"

#include <stdarg.h>
#include <stdio.h>
#include <string.h>

status fail(error *e, status code, const char *fmt, ...) {
    if (!e || e->code != ST_OK) return code;
    va_list args;
    va_start(args, fmt);
    vsnprintf(e->text, sizeof e->text, fmt, args);
    va_end(args);
    e->code = code;
    return code;
}

status fail_within(error *e, status code, const char *context) {
    if (!e || e->code == ST_OK) return code;
    char inner[sizeof e->text];
    memcpy(inner, e->text, sizeof inner);
    size_t room = sizeof e->text - 1, used = strlen(context);
    if (used > room / 2) used = room / 2;
    memcpy(e->text, context, used);
    snprintf(e->text + used, sizeof e->text - used, ": %.*s", (int)(sizeof e->text - used - 3), inner);
    return code;
}

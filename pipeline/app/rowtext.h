/* A stored row of the ledger, read without building a tree: a chart over 50 000 rows looks at two or three members of each. */
#ifndef SWARD_APP_ROWTEXT_H
#define SWARD_APP_ROWTEXT_H
#include <stddef.h>

typedef enum { MEMBER_TEXT, MEMBER_NUMBER, MEMBER_OTHER } member_kind;

/* Spans of the row; texts without their quotes, escapes as stored. */
typedef struct {
    const char *name, *value;
    size_t name_n, value_n;
    member_kind kind;
    int escaped; /* the name holds a backslash */
} row_member;

/* The members of one flat JSON object, in order.
 *   in   *at the object's text at first, afterwards as it was left
 *   out  1 a member, 0 the end, -1 this is no flat object */
int row_next(const char **at, row_member *m);

/* 1 when the member has this name, escapes in either taken as they are written by io/json.h. */
int row_named(const row_member *m, const char *name);
/* row_named without regard to the case of ASCII letters. */
int row_named_like(const row_member *m, const char *name);

/* The number of a member, a text that is a number included (columns of the sheet are stored as text); NAN else. */
double row_number(const row_member *m);

/* Its text with escapes resolved, or the number as written. The caller's; NULL: no memory, or not valid. */
char *row_text(const row_member *m);

#endif

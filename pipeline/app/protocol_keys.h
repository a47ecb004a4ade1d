/* The table of keys behind protocol.h; only the protocol's own files include it. */
#ifndef SWARD_APP_PROTOCOL_KEYS_H
#define SWARD_APP_PROTOCOL_KEYS_H
#include "app/protocol.h"

typedef enum {
    KEY_TEXT,     /* char * */
    KEY_PATH,     /* char *, joined to the protocol's folder */
    KEY_MATERIAL, /* char *, a name, a path, or a number */
    KEY_NUMBER,   /* double; NAN prints as null */
    KEY_SWITCH,   /* int, true or false */
    KEY_WORD,     /* an enum or int: index into the words */
    KEY_SHAPE,    /* double exponent, or the words cone and paraboloid */
    KEY_BAND,     /* two doubles one after the other: [lo, hi] */
    KEY_COATINGS, /* the coatings of a protocol */
    KEY_REAR,     /* the rear side of the wafer */
    KEY_TARGETS,  /* the targets of a protocol */
    KEY_GOALS,    /* half-widths wanted */
    KEY_PLACES,   /* positions on the wafer */
    KEY_RULES     /* char *, pattern tests of the charts */
} key_kind;

typedef struct {
    const char *group; /* "" = top level */
    const char *name;
    key_kind kind;
    size_t offset;              /* in protocol */
    const char *unit;           /* "" = none */
    double lo, hi;              /* range of numbers; -+INFINITY open */
    int above_lo;               /* 1: lo itself is not allowed */
    const char *(*word)(int i); /* of KEY_WORD; NULL after the last */
    int measuring;              /* 1: changes what is measured on one micrograph */
    const char *help;           /* one sentence without a final stop */
    const char *why;            /* what the default rests on; NULL: it says so itself */
} protocol_key;

extern const protocol_key protocol_keys[]; /* groups are contiguous, in the order they print */
extern const size_t n_protocol_keys;

extern const char *const protocol_groups[]; /* names of the groups that are objects of their own keys */
extern const char *const protocol_group_help[];
enum { PROTOCOL_GROUPS = 7 };

/* The key, or NULL. */
const protocol_key *protocol_key_find(const char *group, const char *name);

/* Members of a protocol by key. */
double key_number(const protocol *p, const protocol_key *k);    /* NUMBER, SHAPE, first of BAND */
double key_high(const protocol *p, const protocol_key *k);      /* second of BAND */
int key_index(const protocol *p, const protocol_key *k);        /* WORD, SWITCH */
const char *key_text(const protocol *p, const protocol_key *k); /* TEXT, PATH, MATERIAL; may be NULL */

/* "a number above 0 (nm)", "one of auto, hillock, pore": what a key accepts. */
void key_expected(const protocol_key *k, textbuf *out);

/* 1 when a material text names a file rather than a table of the program. */
int material_is_path(const char *name);

#endif

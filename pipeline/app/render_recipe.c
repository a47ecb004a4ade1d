/* One table of keys for the renderer, read from the command line and from recipes, written into truth.json. JSON
 * through cJSON and io/json, which knows the line of every key. Values pass through their text form in both cases, so
 * that a key cannot mean two things. */
#include "app/render_recipe.h"

#include <cjson/cJSON.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "app/command.h"
#include "base/mem.h"
#include "base/number.h"
#include "io/json.h"

typedef enum { KEY_NUMBER, KEY_SIZE, KEY_PATTERN, KEY_SHAPE, KEY_RELIEF, KEY_PAIR, KEY_BITS, KEY_FLAG, KEY_SEED,
               KEY_LABEL } key_kind;

typedef struct {
    const char *name;
    key_kind kind;
    size_t offset; /* in render_options, of KEY_NUMBER (double) and KEY_FLAG (int) */
    const char *expected;
} key;

#define AT(member) offsetof(render_options, member)
/* clang-format off */
static const key keys[] = {
    { "spacing_nm",     KEY_NUMBER,  AT(spacing_nm),     "nanometres" },
    { "px_nm",          KEY_NUMBER,  AT(px_nm),          "nanometres per pixel" },
    { "size",           KEY_SIZE,    0,                  "WIDTHxHEIGHT in pixels, such as 1024x768" },
    { "pattern",        KEY_PATTERN, 0,                  "hex, lloyd, rsa, matern or random" },
    { "disorder",       KEY_NUMBER,  AT(disorder),       "a number" },
    { "relief",         KEY_RELIEF,  0,                  "hillock or pore" },
    { "shape",          KEY_SHAPE,   0,                  "cone, paraboloid, bell or an exponent" },
    { "fill",           KEY_NUMBER,  AT(fill),           "base radius over half the spacing" },
    { "height_spread",  KEY_NUMBER,  AT(height_spread),  "a relative standard deviation" },
    { "height_by_size", KEY_NUMBER,  AT(height_by_size), "an exponent" },
    { "second_share",   KEY_NUMBER,  AT(second_share),   "a share of the field" },
    { "second_spacing", KEY_NUMBER,  AT(second_spacing), "a ratio to the spacing of the first population" },
    { "edge",           KEY_NUMBER,  AT(edge),           "a share from 0 to 1" },
    { "rough",          KEY_NUMBER,  AT(rough),          "a standard deviation over the height" },
    { "noise",          KEY_NUMBER,  AT(electrons),      "electrons per pixel at full signal, 0 for none" },
    { "blur",           KEY_NUMBER,  AT(blur_px),        "pixels" },
    { "contrast",       KEY_NUMBER,  AT(contrast),       "a share of the grey range" },
    { "gradient",       KEY_NUMBER,  AT(gradient),       "a relative change of brightness" },
    { "streaks",        KEY_NUMBER,  AT(streaks),        "a standard deviation over the contrast" },
    { "jitter",         KEY_NUMBER,  AT(jitter_px),      "pixels" },
    { "smear",          KEY_PAIR,    AT(smear_px),       "PIXELS:DEGREES, such as 2:30" },
    { "stretch",        KEY_PAIR,    AT(stretch),        "RATIO:DEGREES, such as 1.1:30" },
    { "bits",           KEY_BITS,    0,                  "8 or 16" },
    { "strip",          KEY_FLAG,    AT(strip),          "true or false" },
    { "scale",          KEY_FLAG,    AT(show_scale),     "true or false" },
    { "label",          KEY_LABEL,   0,                  "a text" },
    { "seed",           KEY_SEED,    0,                  "a whole number from 0 to 9007199254740992" },
};
/* clang-format on */
enum { N_KEYS = sizeof keys / sizeof keys[0] };

static const char *const pattern_names[] = { "hex", "lloyd", "rsa", "matern", "random" };
enum { N_PATTERNS = sizeof pattern_names / sizeof pattern_names[0] };

static status unknown_key(const char *name, error *e) {
    const char *words[N_KEYS + 1];
    for (size_t k = 0; k < N_KEYS; k++) words[k] = keys[k].name;
    words[N_KEYS] = "file";
    const char *near = json_nearest(name, words, N_KEYS + 1);
    return fail(e, ST_BAD_INPUT, "'%.80s' is not known%s%s%s", name, near ? "; did you mean '" : "", near ? near : "",
                near ? "'?" : "");
}

/* "a<sep>b" as two numbers. */
static int parse_pair(const char *text, char sep, double *a, double *b) {
    char head[NUMBER_TEXT];
    const char *at = strchr(text, sep);
    size_t n = at ? (size_t)(at - text) : sizeof head;
    if (n >= sizeof head) return 0;
    memcpy(head, text, n);
    head[n] = 0;
    return number_parse(head, a) && number_parse(at + 1, b);
}

static int whole(double v, double most) { return v >= 0.0 && v <= most && !(fabs(v - floor(v)) > 0.0); }

static int set_size(render_options *o, const char *value) {
    double w, h;
    if (!parse_pair(value, 'x', &w, &h) || !whole(w, 1e9) || !whole(h, 1e9)) return 0;
    o->nx = (size_t)w;
    o->ny = (size_t)h;
    return 1;
}

static int set_pattern(render_options *o, const char *value) {
    for (size_t k = 0; k < N_PATTERNS; k++)
        if (!strcmp(value, pattern_names[k])) {
            o->pattern = (pattern)k;
            return 1;
        }
    return 0;
}

static int set_shape(render_options *o, const char *value) {
    double q = !strcmp(value, "paraboloid") ? 2.0 : 1.0;
    int bell = !strcmp(value, "bell");
    if (!bell && strcmp(value, "cone") && strcmp(value, "paraboloid") && !number_parse(value, &q)) return 0;
    o->exponent = q;
    o->bell = bell;
    return 1;
}

static int set_choice(const char *value, const char *no, const char *yes, int *out) {
    if (strcmp(value, no) && strcmp(value, yes)) return 0;
    *out = !strcmp(value, yes);
    return 1;
}

static int set_value(const key *k, recipe_image *image, const char *value) {
    render_options *o = &image->options;
    double v;
    int yes;
    switch (k->kind) {
    case KEY_NUMBER:
        if (!number_parse(value, &v)) return 0;
        memcpy((char *)o + k->offset, &v, sizeof v);
        return 1;
    case KEY_FLAG:
        if (!set_choice(value, "false", "true", &yes)) return 0;
        memcpy((char *)o + k->offset, &yes, sizeof yes);
        return 1;
    case KEY_SIZE: return set_size(o, value);
    case KEY_PATTERN: return set_pattern(o, value);
    case KEY_SHAPE: return set_shape(o, value);
    case KEY_RELIEF:
        if (!set_choice(value, "hillock", "pore", &yes)) return 0;
        o->relief = yes ? RELIEF_PORE : RELIEF_HILLOCK;
        return 1;
    case KEY_BITS:
        if (!set_choice(value, "8", "16", &yes)) return 0;
        o->bit_depth = yes ? 16 : 8;
        return 1;
    case KEY_PAIR: {
        double pair[2];
        if (!parse_pair(value, ':', &pair[0], &pair[1])) return 0;
        memcpy((char *)o + k->offset, pair, sizeof pair);
        return 1;
    }
    case KEY_SEED:
        if (!number_parse(value, &v) || !whole(v, 0x1p53)) return 0;
        o->seed = (uint64_t)v;
        return 1;
    case KEY_LABEL:
        free(image->label);
        image->label = mem_text(value);
        return image->label != NULL;
    }
    return 0;
}

status recipe_set(recipe_image *image, const char *name, const char *value, error *e) {
    for (size_t k = 0; k < N_KEYS; k++) {
        if (strcmp(name, keys[k].name)) continue;
        if (set_value(keys + k, image, value)) return ST_OK;
        return fail(e, ST_BAD_INPUT, "%s: found '%.80s', expected %s", name, value, keys[k].expected);
    }
    return unknown_key(name, e);
}

/* ---- file names ---- */

static int ends_like(const char *file, const char *ending) {
    size_t n = strlen(file), m = strlen(ending);
    return n > m && !strcasecmp(file + n - m, ending);
}

int recipe_file_is_tiff(const char *file) { return ends_like(file, ".tif") || ends_like(file, ".tiff"); }

status recipe_check_file(const char *file, error *e) {
    for (const char *part = file; part; part = strchr(part, '/') ? strchr(part, '/') + 1 : NULL) {
        size_t n = strcspn(part, "/");
        if (n == 0 || (n == 1 && part[0] == '.') || (n == 2 && !strncmp(part, "..", 2)))
            return fail(e, ST_BAD_INPUT, "file: found '%.200s', expected a name inside the output folder", file);
    }
    if (recipe_file_is_tiff(file) || ends_like(file, ".png")) return ST_OK;
    return fail(e, ST_BAD_INPUT, "file: found '%.200s', expected a name that ends in .png, .tif or .tiff", file);
}

/* ---- recipes ---- */

typedef struct {
    const json *doc;
    const char *what; /* the recipe's name in sentences */
    error *e;
} reader;

static status at_line(const reader *r, const cJSON *node) {
    char context[300];
    snprintf(context, sizeof context, "%.200s line %zu", r->what, json_line(r->doc, node));
    return fail_within(r->e, ST_BAD_INPUT, context);
}

static status set_from_json(const reader *r, recipe_image *image, const cJSON *node) {
    char number[NUMBER_TEXT];
    const char *value = cJSON_IsString(node) ? node->valuestring
                        : cJSON_IsNumber(node) ? number_text(node->valuedouble, 17, number)
                        : cJSON_IsTrue(node) ? "true"
                        : cJSON_IsFalse(node) ? "false" : NULL;
    if (!value) {
        fail(r->e, ST_BAD_INPUT, "%.80s: found a list, an object or null, expected one value", node->string);
        return at_line(r, node);
    }
    if (recipe_set(image, node->string, value, r->e) == ST_OK) return ST_OK;
    return at_line(r, node);
}

static status read_file_name(const reader *r, recipe *out, recipe_image *image, const cJSON *node) {
    if (!cJSON_IsString(node)) fail(r->e, ST_BAD_INPUT, "file: expected a text");
    else if (recipe_check_file(node->valuestring, r->e) == ST_OK) {
        for (size_t k = 0; k < out->n; k++)
            if (!strcmp(out->images[k].file, node->valuestring)) {
                fail(r->e, ST_BAD_INPUT, "file: '%.200s' is used twice", node->valuestring);
                return at_line(r, node);
            }
        image->file = mem_text(node->valuestring);
        return image->file ? ST_OK : NO_MEMORY(r->e, "the recipe");
    }
    return at_line(r, node);
}

static void image_clear(recipe_image *image) {
    free(image->file);
    free(image->label);
    *image = (recipe_image){ 0 };
}

/* Reads image `index` into the next place of `out`; what is half read is freed with `out`. */
static status read_image(const reader *r, recipe *out, const recipe_image *defaults, const cJSON *object, size_t index) {
    if (!cJSON_IsObject(object))
        return fail(r->e, ST_BAD_INPUT, "%.200s, image %zu: expected an object {\"file\": ...}", r->what, index + 1);
    recipe_image image = { .options = defaults->options };
    image.options.seed += index;
    status st = ST_OK;
    if (defaults->label) {
        image.label = mem_text(defaults->label);
        if (!image.label) st = NO_MEMORY(r->e, "the recipe");
    }
    for (const cJSON *node = object->child; node && st == ST_OK; node = node->next)
        st = !strcmp(node->string, "file") ? read_file_name(r, out, &image, node) : set_from_json(r, &image, node);
    if (st == ST_OK && !image.file)
        st = fail(r->e, ST_BAD_INPUT, "%.200s, image %zu: no file name; add \"file\": \"name.png\"", r->what, index + 1);
    if (st == ST_OK) out->images[out->n++] = image;
    else image_clear(&image);
    return st;
}

static status read_parts(const reader *r, const cJSON *root, recipe *out) {
    recipe_image defaults = { .options = render_defaults() };
    const cJSON *images = NULL;
    status st = ST_OK;
    for (const cJSON *node = root->child; node && st == ST_OK; node = node->next) {
        if (!strcmp(node->string, "about")) continue;
        if (!strcmp(node->string, "images") && cJSON_IsArray(node)) images = node;
        else if (!strcmp(node->string, "defaults") && cJSON_IsObject(node)) {
            for (const cJSON *k = node->child; k && st == ST_OK; k = k->next) st = set_from_json(r, &defaults, k);
        } else {
            fail(r->e, ST_BAD_INPUT, "found '%.80s', expected about, defaults {...} and images [...]", node->string);
            st = at_line(r, node);
        }
    }
    size_t n = images ? (size_t)cJSON_GetArraySize(images) : 0, index = 0;
    if (st == ST_OK && n == 0) st = fail(r->e, ST_BAD_INPUT, "%.200s: no images; add \"images\": [{...}]", r->what);
    if (st == ST_OK) {
        out->images = mem_array(n, sizeof *out->images);
        if (!out->images) st = NO_MEMORY(r->e, "the recipe");
    }
    for (const cJSON *node = images ? images->child : NULL; node && st == ST_OK; node = node->next)
        st = read_image(r, out, &defaults, node, index++);
    image_clear(&defaults);
    return st;
}

status recipe_read(const char *path, recipe *out, error *e) {
    char *bytes = NULL;
    size_t n = 0;
    json doc = { 0 };
    recipe found = { 0 };
    error own = { 0 }; /* sentences get their line from a filled error, asked for or not */
    reader r = { &doc, path, e ? e : &own };
    status st = input_read(path, &bytes, &n, r.e);
    if (st == ST_OK) st = json_parse(bytes, n, path, &doc, r.e);
    if (st == ST_OK) st = read_parts(&r, doc.root, &found);
    if (st == ST_OK) *out = found;
    else recipe_free(&found);
    json_free(&doc);
    free(bytes);
    return st;
}

void recipe_free(recipe *r) {
    for (size_t k = 0; k < r->n; k++) image_clear(r->images + k);
    free(r->images);
    *r = (recipe){ 0 };
}

/* ---- back to JSON ---- */

static void value_to_json(const key *k, const recipe_image *image, textbuf *out) {
    const render_options *o = &image->options;
    char number[2][NUMBER_TEXT];
    double v;
    int flag;
    switch (k->kind) {
    case KEY_NUMBER:
        memcpy(&v, (const char *)o + k->offset, sizeof v);
        json_number(out, v, 15);
        break;
    case KEY_FLAG:
        memcpy(&flag, (const char *)o + k->offset, sizeof flag);
        text_add(out, flag ? "true" : "false");
        break;
    case KEY_SIZE: text_addf(out, "\"%zux%zu\"", o->nx, o->ny); break;
    case KEY_PATTERN: json_string(out, pattern_names[o->pattern]); break;
    case KEY_RELIEF: json_string(out, o->relief == RELIEF_PORE ? "pore" : "hillock"); break;
    case KEY_SHAPE:
        if (o->bell) json_string(out, "bell");
        else json_number(out, o->exponent, 15);
        break;
    case KEY_PAIR: {
        double pair[2];
        memcpy(pair, (const char *)o + k->offset, sizeof pair);
        text_addf(out, "\"%s:%s\"", number_text(pair[0], 15, number[0]), number_text(pair[1], 15, number[1]));
        break;
    }
    case KEY_BITS: text_addf(out, "%d", o->bit_depth); break;
    case KEY_SEED: text_addf(out, "%llu", (unsigned long long)o->seed); break;
    case KEY_LABEL: json_string(out, image->label); break;
    }
}

void recipe_options_to_json(const recipe_image *image, int indent, textbuf *out) {
    text_add(out, "{");
    const char *comma = "\n";
    for (size_t k = 0; k < N_KEYS; k++) {
        /* Not said is left out: a recipe has no word for it. */
        if (keys[k].kind == KEY_LABEL && !image->label) continue;
        if (keys[k].offset == AT(disorder) && keys[k].kind == KEY_NUMBER && isnan(image->options.disorder)) continue;
        text_addf(out, "%s%*s\"%s\": ", comma, indent + 2, "", keys[k].name);
        value_to_json(keys + k, image, out);
        comma = ",\n";
    }
    text_addf(out, "\n%*s}", indent, "");
}

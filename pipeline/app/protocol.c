/* Reading and checking a protocol: JSON after line comments are blanked, then one walk over its keys against
 * the table in protocol_keys.c. Every mistake is named with file, line, key, what was found and what was
 * expected. Does not look into the files a protocol names; materials.c does. */
#include "app/protocol.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "app/names.h"
#include "app/protocol_priv.h"
#include "base/limits.h"
#include "base/mem.h"
#include "base/number.h"
#include "io/file.h"

status protocol_defaults(protocol *out, error *e) {
    protocol p = { 0 };
    p.path = mem_text("");
    p.name = mem_text("built-in");
    p.ambient = mem_text("air");
    p.substrate = mem_text("silicon");
    p.measure = measure_defaults();
    p.px_u_rel = MISSING;
    p.window_lo_nm = p.window_hi_nm = p.page = p.max_memory_mb = MISSING;
    p.max_megapixels = (double)LIMIT_PIXELS / 1e6;
    p.max_file_mb = (double)LIMIT_FILE_BYTES / 1e6;
    p.link = link_defaults();
    p.link.exponent_u = MISSING;
    p.link.shape_open = 1; /* the shape of real features is not seen from above */
    p.glass_mm = 3.2;
    p.encapsulant_mm = 0.45;
    p.mixing = MIX_BRUGGEMAN_2D;
    p.model = OPTICS_AUTO;
    p.facet_angle_deg = MISSING;
    p.polarization = POL_MEAN;
    p.rear = (rear_side){ 0.0, MISSING, 1 };
    p.band_lo_nm = 300.0;
    p.band_hi_nm = 1200.0;
    p.step_nm = 1.0;
    p.chart_phase = mem_text("recipe");
    p.chart_rules = mem_text("zone");
    p.chart_baseline = MISSING;
    if (!p.chart_phase || !p.chart_rules || !p.path || !p.name || !p.ambient || !p.substrate) {
        protocol_free(&p);
        return NO_MEMORY(e, "the protocol");
    }
    *out = p;
    return ST_OK;
}

void protocol_free(protocol *p) {
    char *owned[] = { p->path, p->name, p->pattern, p->profile, p->calibration, p->ambient, p->substrate, p->sun, p->scale, p->history, p->chart_phase, p->chart_rules };
    for (size_t i = 0; i < sizeof owned / sizeof owned[0]; i++) free(owned[i]);
    for (size_t i = 0; i < LIMIT_COATINGS; i++) free(p->coatings[i].material);
    protocol_lists_free(p);
    *p = (protocol){ 0 };
}

size_t reader_line(const reader *r, const cJSON *node) { return r->doc ? json_line(r->doc, node) : 0; }

status reader_wrong(const reader *r, size_t line, const char *where, const cJSON *found, const char *expected) {
    char *text = cJSON_PrintUnformatted(found);
    const char *shown = text ? text : "?", *more = text && strlen(text) > 60 ? "..." : "";
    status st =
        r->doc ? fail(r->e, ST_BAD_INPUT, "%s line %zu, %s: found %.60s%s, expected %s", r->what, line, where,
                      shown, more, expected)
               : fail(r->e, ST_BAD_INPUT, "%s: found %.60s%s, expected %s", r->what, shown, more, expected);
    cJSON_free(text);
    return st;
}

status reader_wrong_value(const reader *r, const cJSON *node, const protocol_key *k) {
    char where[80];
    textbuf expected = { 0 };
    snprintf(where, sizeof where, "%s%s%s", k->group, k->group[0] ? "." : "", k->name);
    key_expected(k, &expected);
    status st = reader_wrong(r, reader_line(r, node), where, node, expected.s ? expected.s : "something else");
    text_free(&expected);
    return st;
}

static status replace(const reader *r, char **slot, char *text) {
    if (!text) return NO_MEMORY(r->e, "the protocol");
    free(*slot);
    *slot = text;
    return ST_OK;
}

/* A material is a name, a path (joined to the folder), or a number, which becomes its text. NULL: neither. */
static char *material_text(const reader *r, const cJSON *node) {
    char number[NUMBER_TEXT];
    if (cJSON_IsNumber(node)) return mem_text(number_text(node->valuedouble, 15, number));
    return material_is_path(node->valuestring) ? path_join(r->folder, node->valuestring)
                                               : mem_text(node->valuestring);
}

static status read_text(const reader *r, const cJSON *node, const protocol_key *k) {
    char **slot = (char **)(void *)((char *)r->p + k->offset);
    int number = k->kind == KEY_MATERIAL && cJSON_IsNumber(node) && node->valuedouble > 0.0;
    if (!number && (!cJSON_IsString(node) || !node->valuestring[0])) return reader_wrong_value(r, node, k);
    if (k->kind == KEY_MATERIAL) return replace(r, slot, material_text(r, node));
    if (k->kind == KEY_PATH) return replace(r, slot, path_join(r->folder, node->valuestring));
    return replace(r, slot, mem_text(node->valuestring));
}

static int in_range(const cJSON *node, const protocol_key *k) {
    if (!cJSON_IsNumber(node)) return 0;
    double v = node->valuedouble;
    return isfinite(v) && (k->above_lo ? v > k->lo : v >= k->lo) && v <= k->hi;
}

static void put_number(const reader *r, const protocol_key *k, size_t i, double v) {
    memcpy((char *)r->p + k->offset + i * sizeof v, &v, sizeof v);
}

static status read_band(const reader *r, const cJSON *node, const protocol_key *k) {
    const cJSON *lo = cJSON_GetArrayItem(node, 0), *hi = cJSON_GetArrayItem(node, 1);
    if (!cJSON_IsArray(node) || cJSON_GetArraySize(node) != 2 || !in_range(lo, k) || !in_range(hi, k) ||
        !(lo->valuedouble < hi->valuedouble))
        return reader_wrong_value(r, node, k);
    put_number(r, k, 0, lo->valuedouble);
    put_number(r, k, 1, hi->valuedouble);
    return ST_OK;
}

static status read_index(const reader *r, const cJSON *node, const protocol_key *k) {
    int v = -1;
    if (k->kind == KEY_SWITCH && cJSON_IsBool(node)) v = cJSON_IsTrue(node) ? 1 : 0;
    if (k->kind == KEY_WORD && cJSON_IsString(node))
        for (int i = 0; k->word(i) && v < 0; i++)
            if (strcmp(k->word(i), node->valuestring) == 0) v = i;
    if (v < 0) return reader_wrong_value(r, node, k);
    memcpy((char *)r->p + k->offset, &v, sizeof v);
    return ST_OK;
}

static status read_shape(const reader *r, const cJSON *node, const protocol_key *k) {
    int open = cJSON_IsString(node) && strcmp(node->valuestring, "unknown") == 0;
    if (open || (cJSON_IsString(node) && strcmp(node->valuestring, "cone") == 0))
        put_number(r, k, 0, 1.0);
    else if (cJSON_IsString(node) && strcmp(node->valuestring, "paraboloid") == 0)
        put_number(r, k, 0, 2.0);
    else if (in_range(node, k))
        put_number(r, k, 0, node->valuedouble);
    else
        return reader_wrong_value(r, node, k);
    r->p->link.shape_open = open;
    return ST_OK;
}

/* The nearest word as a hint, "" when none is near. */
void reader_hint(const char *word, const char *const *words, size_t n, char *out, size_t size) {
    const char *near = json_nearest(word, words, n);
    out[0] = '\0';
    if (near) snprintf(out, size, "; did you mean '%s'?", near);
}

status reader_unknown(const reader *r, const cJSON *node, const char *where, const char *const *words,
                      size_t n) {
    char near[120];
    reader_hint(node->string, words, n, near, sizeof near);
    return fail(r->e, ST_BAD_INPUT, "%s line %zu: unknown key '%.60s'%s%s%s", r->what, reader_line(r, node),
                node->string, where[0] ? " in " : "", where, near);
}

static status read_coating(const reader *r, const cJSON *item, size_t line, protocol_coating *c) {
    static const char *const words[] = { "material", "thickness_nm" };
    const cJSON *name = NULL, *thickness = NULL, *child;
    if (!cJSON_IsObject(item))
        return reader_wrong(r, line, "optics.coatings", item, "{ \"material\": ..., \"thickness_nm\": ... }");
    cJSON_ArrayForEach(child, item) {
        if (strcmp(child->string, words[0]) == 0)
            name = child;
        else if (strcmp(child->string, words[1]) == 0)
            thickness = child;
        else
            return reader_unknown(r, child, "optics.coatings", words, 2);
    }
    if (!name || !thickness)
        return reader_wrong(r, line, "optics.coatings", item, "both \"material\" and \"thickness_nm\"");
    if (!(cJSON_IsString(name) && name->valuestring[0]) && !(cJSON_IsNumber(name) && name->valuedouble > 0.0))
        return reader_wrong(r, reader_line(r, name), "optics.coatings.material", name,
                     "a material name, a CSV path or a refractive index");
    if (!cJSON_IsNumber(thickness) || !(thickness->valuedouble >= 0.0 && thickness->valuedouble <= 1e5))
        return reader_wrong(r, reader_line(r, thickness), "optics.coatings.thickness_nm", thickness,
                     "a number from 0 to 100000 (nm)");
    c->thickness_nm = thickness->valuedouble;
    return replace(r, &c->material, material_text(r, name));
}

static status read_rear_part(const reader *r, const cJSON *child, rear_side *rear) {
    static const char *const words[] = { "thickness_um", "rear_reflectance", "lambertian" };
    int number = cJSON_IsNumber(child);
    double v = number ? child->valuedouble : 0.0;
    if (strcmp(child->string, words[0]) == 0) {
        if (!number || !(v >= 1.0 && v <= 1e4))
            return reader_wrong(r, reader_line(r, child), "optics.rear.thickness_um", child, "a number from 1 to 10000 (um)");
        rear->thickness_um = v;
    } else if (strcmp(child->string, words[1]) == 0) {
        if (cJSON_IsNull(child)) return ST_OK;
        if (!number || !(v >= 0.0 && v <= 1.0))
            return reader_wrong(r, reader_line(r, child), "optics.rear.rear_reflectance", child, "a share from 0 to 1");
        rear->rear_reflectance = v;
    } else if (strcmp(child->string, words[2]) == 0) {
        if (!cJSON_IsBool(child)) return reader_wrong(r, reader_line(r, child), "optics.rear.lambertian", child, "true or false");
        rear->lambertian = cJSON_IsTrue(child) ? 1 : 0;
    } else
        return reader_unknown(r, child, "optics.rear", words, 3);
    return ST_OK;
}

static status read_rear(const reader *r, const cJSON *node, const protocol_key *k) {
    rear_side rear = { 0.0, MISSING, 1 };
    const cJSON *child;
    if (cJSON_IsNumber(node)) rear.thickness_um = node->valuedouble;
    else if (!cJSON_IsObject(node)) return reader_wrong_value(r, node, k);
    else cJSON_ArrayForEach(child, node) {
        status st = read_rear_part(r, child, &rear);
        if (st != ST_OK) return st;
    }
    if (!(rear.thickness_um >= 1.0 && rear.thickness_um <= 1e4)) return reader_wrong_value(r, node, k);
    r->p->rear = rear;
    return ST_OK;
}

static status read_coatings(const reader *r, const cJSON *node, const protocol_key *k) {
    const cJSON *item;
    if (!cJSON_IsArray(node) || cJSON_GetArraySize(node) > LIMIT_COATINGS) return reader_wrong_value(r, node, k);
    cJSON_ArrayForEach(item, node) {
        status st = read_coating(r, item, reader_line(r, node), &r->p->coatings[r->p->n_coatings]);
        if (st != ST_OK) return st;
        r->p->n_coatings++;
    }
    return ST_OK;
}

static status read_key(const reader *r, const cJSON *node, const protocol_key *k) {
    if (cJSON_IsNull(node)) return ST_OK; /* the default */
    switch (k->kind) {
    case KEY_TEXT:
    case KEY_PATH:
    case KEY_MATERIAL:
        return read_text(r, node, k);
    case KEY_NUMBER:
        if (!in_range(node, k)) return reader_wrong_value(r, node, k);
        put_number(r, k, 0, node->valuedouble);
        return ST_OK;
    case KEY_SWITCH:
    case KEY_WORD:
        return read_index(r, node, k);
    case KEY_SHAPE:
        return read_shape(r, node, k);
    case KEY_BAND:
        return read_band(r, node, k);
    case KEY_COATINGS:
        return read_coatings(r, node, k);
    case KEY_REAR:
        return read_rear(r, node, k);
    case KEY_TARGETS:
        return read_targets(r, node, k);
    case KEY_GOALS:
        return read_goals(r, node, k);
    case KEY_PLACES:
        return read_places(r, node, k);
    case KEY_RULES:
        return read_rules(r, node, k);
    }
    return fail(r->e, ST_BUG, "a key of the protocol has no reader");
}

/* Unknown in this group: the nearest key of the group, else the group in which the key exists. */
static status unknown_key(const reader *r, const cJSON *node, const char *group) {
    const char **words = mem_array(n_protocol_keys + PROTOCOL_GROUPS, sizeof *words);
    const protocol_key *elsewhere = NULL;
    size_t n = 0;
    if (!words) return NO_MEMORY(r->e, "the protocol");
    for (size_t i = 0; i < n_protocol_keys; i++) {
        if (strcmp(protocol_keys[i].group, group) == 0)
            words[n++] = protocol_keys[i].name;
        else if (strcmp(protocol_keys[i].name, node->string) == 0)
            elsewhere = &protocol_keys[i];
    }
    for (size_t i = 0; i < PROTOCOL_GROUPS && !group[0]; i++) words[n++] = protocol_groups[i];
    status st;
    if (elsewhere && elsewhere->group[0])
        st = fail(r->e, ST_BAD_INPUT, "%s line %zu: unknown key '%.60s'%s%s; it belongs in \"%s\"", r->what,
                  reader_line(r, node), node->string, group[0] ? " in " : "", group, elsewhere->group);
    else if (elsewhere)
        st = fail(r->e, ST_BAD_INPUT, "%s line %zu: unknown key '%.60s' in %s; it belongs to the top level",
                  r->what, reader_line(r, node), node->string, group);
    else
        st = reader_unknown(r, node, group, words, n);
    free(words);
    return st;
}

static status read_group(const reader *r, const cJSON *object, const char *group) {
    const cJSON *node;
    cJSON_ArrayForEach(node, object) {
        const protocol_key *k = protocol_key_find(group, node->string);
        const char *inner = NULL;
        for (size_t i = 0; i < PROTOCOL_GROUPS && !group[0]; i++)
            if (strcmp(protocol_groups[i], node->string) == 0) inner = protocol_groups[i];
        status st;
        if (k)
            st = read_key(r, node, k);
        else if (!inner)
            st = unknown_key(r, node, group);
        else if (!cJSON_IsObject(node))
            st = reader_wrong(r, reader_line(r, node), inner, node, "an object in braces with keys of its own");
        else
            st = read_group(r, node, inner);
        if (st != ST_OK) return st;
    }
    return ST_OK;
}

/* What no single key can see. */
static status check_whole(const reader *r) {
    protocol *p = r->p;
    error inner = { ST_OK, "" };
    if (isfinite(p->link.exponent_u)) p->link.shape_open = 0; /* a cone, that uncertain */
    if (p->pattern && pattern_check(p->pattern, &inner) != ST_OK)
        return fail(r->e, inner.code, "%s: name_pattern: %s", r->what, inner.text);
    if (isfinite(p->page) && fabs(p->page - round(p->page)) > 0.0)
        return fail(r->e, ST_BAD_INPUT, "%s: page: found %g, expected a whole number", r->what, p->page);
    if (isfinite(p->link.height_nm_u) && !isfinite(p->link.height_nm))
        return fail(r->e, ST_BAD_INPUT,
                    "%s: link.height_nm_u stands without link.height_nm; add the height or take the "
                    "uncertainty out",
                    r->what);
    if (isfinite(p->link.aspect_u) && !isfinite(p->link.aspect))
        return fail(r->e, ST_BAD_INPUT,
                    "%s: link.aspect_u stands without link.aspect; add the aspect ratio or take the "
                    "uncertainty out",
                    r->what);
    if (p->link.flat_top > 0.0 && p->link.tip_radius_nm > 0.0)
        return fail(r->e, ST_BAD_INPUT, "%s: a tip is flat or round: give link.flat_top or link.tip_radius_nm, not both",
                    r->what);
    return ST_OK;
}

/* An option's text as the JSON value a protocol would hold; NULL: no memory. */
static cJSON *option_value(const protocol_key *k, const char *text) {
    const char *colon = strrchr(text, ':');
    double lo, hi;
    char *head = mem_text_n(text, colon ? (size_t)(colon - text) : strlen(text));
    cJSON *v = NULL;
    if (!head) return NULL;
    int takes_number = k->kind == KEY_NUMBER || k->kind == KEY_SHAPE || k->kind == KEY_MATERIAL ||
                       k->kind == KEY_REAR;
    if (k->kind == KEY_BAND && colon && number_parse(head, &lo) && number_parse(colon + 1, &hi))
        v = cJSON_CreateDoubleArray((const double[]){ lo, hi }, 2);
    else if (k->kind == KEY_COATINGS && colon && number_parse(colon + 1, &hi)) {
        v = cJSON_CreateObject();
        if (!cJSON_AddStringToObject(v, "material", head) ||
            !cJSON_AddNumberToObject(v, "thickness_nm", hi)) {
            cJSON_Delete(v);
            v = NULL;
        }
    } else if (takes_number && number_parse(text, &lo))
        v = cJSON_CreateNumber(lo);
    else if (k->kind == KEY_SWITCH && strcmp(text, "true") == 0)
        v = cJSON_CreateTrue();
    else
        v = cJSON_CreateString(text);
    free(head);
    return v;
}

static status option_coating(const reader *r, const cJSON *v) {
    protocol *p = r->p;
    if (!cJSON_IsObject(v)) return reader_wrong(r, 0, "", v, "MATERIAL:NM, such as alumina:10");
    if (p->n_coatings == LIMIT_COATINGS)
        return fail(r->e, ST_BAD_INPUT, "%s: at most %d coatings", r->what, LIMIT_COATINGS);
    status st = read_coating(r, v, 0, &p->coatings[p->n_coatings]);
    if (st == ST_OK) p->n_coatings++;
    return st;
}

status protocol_set(protocol *p, const char *group, const char *name, const char *text, const char *option,
                    error *e) {
    const protocol_key *k = protocol_key_find(group, name);
    reader r = { NULL, option, "", p, e };
    if (!k) return fail(e, ST_BUG, "%s sets no key of a protocol", option);
    cJSON *v = option_value(k, text);
    if (!v) return NO_MEMORY(e, "an option");
    status st = k->kind == KEY_COATINGS ? option_coating(&r, v) : read_key(&r, v, k);
    cJSON_Delete(v);
    return st;
}

/* Blanks line comments outside strings in place, so that lines keep their numbers. */
static void blank_comments(char *s, size_t n) {
    int in_string = 0;
    for (size_t i = 0; i < n; i++) {
        if (in_string && s[i] == '\\')
            i++;
        else if (s[i] == '"')
            in_string = !in_string;
        else if (!in_string && s[i] == '/' && i + 1 < n && s[i + 1] == '/')
            while (i < n && s[i] != '\n') s[i++] = ' ';
    }
}

status protocol_parse(const char *bytes, size_t n, const char *what, const char *folder, protocol *out,
                      error *e) {
    protocol p = { 0 };
    json doc = { 0 };
    char *text = mem_text_n(bytes, n);
    status st = text ? protocol_defaults(&p, e) : NO_MEMORY(e, "the protocol");
    if (st != ST_OK) goto done;
    blank_comments(text, n);
    st = json_parse(text, n, what, &doc, e);
    if (st != ST_OK) goto done;
    reader r = { &doc, what, folder, &p, e };
    st = read_group(&r, doc.root, "");
    if (st == ST_OK) st = check_whole(&r);
    if (st == ST_OK) st = replace(&r, &p.path, mem_text(what));
    if (st != ST_OK) goto done;
    *out = p;
    p = (protocol){ 0 };
done:
    json_free(&doc);
    protocol_free(&p);
    free(text);
    return st;
}

status protocol_read(const char *path, protocol *out, error *e) {
    char *bytes = NULL;
    size_t n = 0;
    const char *slash = strrchr(path, '/');
    char *folder = slash ? mem_text_n(path, slash == path ? 1 : (size_t)(slash - path)) : mem_text("");
    status st = folder ? input_read(path, &bytes, &n, e) : NO_MEMORY(e, "the protocol");
    if (st == ST_OK) st = protocol_parse(bytes, n, path, folder, out, e);
    free(bytes);
    free(folder);
    return st;
}

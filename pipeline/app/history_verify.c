/* `sward history verify`: are the pictures on the disk still the ones behind the numbers? The ledger and every result hold the SHA-256
 * of the micrographs; here they are computed again. */
#include <cjson/cJSON.h>
#include <stdlib.h>
#include <string.h>

#include "app/history_verbs.h"
#include "base/limits.h"
#include "base/mem.h"
#include "io/file.h"
#include "io/json.h"

static status read_json(const char *dir, const char *name, json *out, error *e) {
    char *path = path_join(dir, name), *bytes = NULL;
    size_t n = 0;
    status st = path ? ST_OK : NO_MEMORY(e, "a path");
    if (st == ST_OK && !file_exists(path))
        st = fail(e, ST_BAD_INPUT, "'%s' holds no %s; name the folder that 'sward run' wrote (--out)", dir, name);
    if (st == ST_OK) st = file_read(path, LIMIT_FILE_BYTES, &bytes, &n, e);
    if (st == ST_OK) st = json_parse(bytes, n, name, out, e);
    free(bytes);
    free(path);
    return st;
}

/* "" when the file is the one that was measured, else what is wrong; NULL without memory. */
static const char *compare(const char *root, const char *file, const char *sha256) {
    char *path = path_join(root, file), *bytes = NULL, hash[65];
    size_t n = 0;
    error why = { ST_OK, "" };
    const char *found = "";
    if (!path) return NULL;
    if (!file_exists(path)) found = "is gone";
    else if (file_read(path, LIMIT_FILE_BYTES, &bytes, &n, &why) != ST_OK) found = "cannot be read";
    else {
        sha256_hex(bytes, n, hash);
        if (strcmp(hash, sha256) != 0) found = "differs from what was measured";
    }
    free(bytes);
    free(path);
    return found;
}

static status check_inputs(const cJSON *inputs, const char *root, textbuf *out, size_t *unlike, error *e) {
    size_t same = 0;
    const cJSON *input;
    cJSON_ArrayForEach(input, inputs) {
        const cJSON *file = cJSON_GetObjectItemCaseSensitive(input, "file"),
                    *hash = cJSON_GetObjectItemCaseSensitive(input, "sha256");
        if (!cJSON_IsString(file) || !cJSON_IsString(hash)) continue; /* it could not be read in the first place */
        const char *found = compare(root, file->valuestring, hash->valuestring);
        if (!found) return NO_MEMORY(e, "a path");
        if (found[0]) {
            ++*unlike;
            text_addf(out, "%s %s\n", file->valuestring, found);
        } else same++;
    }
    text_addf(out, "%zu micrographs are the ones that were measured, %zu are not\n", same, *unlike);
    return text_check(out, "the list", e);
}

/* ---- against the ledger ---- */

typedef struct {
    const char *folder; /* NULL: the row's own */
    textbuf *out;
    size_t same, unlike;
} check;

static status check_one(const char *at, const history_micrograph *m, void *user, error *e) {
    check *c = user;
    const char *root = c->folder ? c->folder : at;
    if (!m->sha256[0]) return ST_OK; /* it could not be read in the first place */
    const char *found = compare(root, m->file, m->sha256);
    if (!found) return NO_MEMORY(e, "a path");
    if (!found[0]) {
        c->same++;
        return ST_OK;
    }
    c->unlike++;
    text_addf(c->out, "%s/%s %s\n", root, m->file, found);
    return ST_OK;
}

status history_verify_ledger(history *h, const history_filter *f, const char *folder, textbuf *out, size_t *unlike, error *e) {
    check c = { folder, out, 0, 0 };
    status st = history_micrographs(h, f, check_one, &c, e);
    *unlike = c.unlike;
    if (st == ST_OK) text_addf(out, "%zu micrographs are the ones that were measured, %zu are not\n", c.same, c.unlike);
    return st == ST_OK ? text_check(out, "the list", e) : st;
}

status history_verify(const char *dir, const char *folder, textbuf *out, size_t *unlike, error *e) {
    json results = { 0 }, run = { 0 };
    *unlike = 0;
    status st = read_json(dir, "results.json", &results, e);
    if (st == ST_OK && !folder) st = read_json(dir, "run.json", &run, e);
    if (st == ST_OK) {
        const cJSON *inputs = cJSON_GetObjectItemCaseSensitive(cJSON_GetObjectItemCaseSensitive(results.root, "manifest"), "inputs");
        const cJSON *root = folder ? NULL : cJSON_GetObjectItemCaseSensitive(run.root, "folder");
        if (!cJSON_IsArray(inputs) || (!folder && !cJSON_IsString(root)))
            st = fail(e, ST_BAD_INPUT, "'%s': results.json or run.json does not say which micrographs were measured", dir);
        else st = check_inputs(inputs, folder ? folder : root->valuestring, out, unlike, e);
    }
    json_free(&results);
    json_free(&run);
    return st;
}

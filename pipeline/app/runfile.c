#include "app/runfile.h"

#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/file.h"
#include "io/json.h"

status runfile_read(const char *dir, cJSON **root, error *e) {
    char *bytes = NULL, *path = path_join(dir, "results.json");
    size_t n = 0;
    if (!path) return NO_MEMORY(e, "a path");
    status st = file_exists(path) ? file_read(path, LIMIT_FILE_BYTES, &bytes, &n, e)
                                  : fail(e, ST_BAD_INPUT, "'%s' holds no results.json; name the output folder of `sward run`", dir);
    cJSON *o = st ? NULL : cJSON_ParseWithLength(bytes, n);
    if (!st && (!cJSON_IsArray(cJSON_GetObjectItemCaseSensitive(o, "samples")) ||
                !cJSON_IsArray(cJSON_GetObjectItemCaseSensitive(o, "images"))))
        st = fail(e, ST_BAD_INPUT, "%s is not what `sward run` writes: it has no samples or no images", path);
    if (st)
        cJSON_Delete(o);
    else
        *root = o;
    free(bytes);
    free(path);
    return st;
}

const cJSON *runfile_sample(const cJSON *root, const char *sample) {
    const cJSON *s;
    cJSON_ArrayForEach(s, cJSON_GetObjectItemCaseSensitive(root, "samples")) {
        if (!strcmp(json_member_text(s, "sample"), sample)) return s;
    }
    return NULL;
}

/* The files of the Debian package checkit-tiff: 9 valid minimal TIFF, BigTIFF among the others, and 26 that break the
 * rules: loops, offsets outside of the file, counts of 0 and two million, doubled and unordered tags. The valid
 * ones decode; the others decode or are refused with a sentence. Skipped visibly where the package is not installed. */
#include "image_files.h"

#define SOURCE "checkit-tiff 0.4.2 (Debian 12)"

static int any(const char *name) {
    size_t n = strlen(name);
    return n > 4 && strstr(name + n - 6, ".tif") != NULL;
}

static size_t try_folder(const char *root, const char *part, int valid) {
    file_list l = { 0 };
    error e = { 0 };
    char *folder = path_join(root, part);
    size_t n = 0;
    if (folder && folder_exists(folder) && folder_walk(folder, any, &l, &e) == ST_OK)
        for (size_t i = 0; i < l.n; i++, n++) {
            picture p = { 0 };
            e = (error){ 0 };
            status st = decode_path(tiff_decode, folder, l.paths[i], &p, &e);
            CHECK((st == ST_OK) == (e.text[0] == '\0') && (st == ST_OK) == (p.px != NULL));
            if (valid) CHECK_SOURCE((double)(st == ST_OK && p.nx == 20 && p.ny == 10), 1.0, 0.0, SOURCE);
            if (valid && st != ST_OK) printf("  %s: %s\n", l.paths[i], e.text);
            picture_free(&p);
        }
    file_list_free(&l);
    free(folder);
    return n;
}

int main(void) {
    static const char *const folders[] = { "/usr/share/checkit_tiff", NULL };
    const char *own = getenv("SWARD_CHECKIT_TIFF"), *root = own ? own : first_folder(folders, "checkit-tiff");
    if (!root) return 77;
    size_t good = try_folder(root, "tiffs_should_pass", 1), bad = try_folder(root, "tiffs_should_fail", 0);
    CHECK(good >= 9 && bad >= 20);
    return check_done();
}

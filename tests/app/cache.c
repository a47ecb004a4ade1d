/* What was remembered comes back bit for bit; a damaged entry is as good as none. */
#include <stdlib.h>
#include <unistd.h>

#include "app/cache.h"
#include "base/mem.h"
#include "base/text.h"
#include "check.h"
#include "io/file.h"

static texture invent(void) {
    texture t = { .relief = RELIEF_PORE, .relief_skew = -0.71, .ring_z = 17.3, .n_features = 2, .nx = 640, .ny = 480 };
    t.spacing_acf = (measured){ 23.71, 0.13, 0.95, 611 };
    t.str = (measured){ 0.91, 0.02, 0.0, 1 };
    t.top_d50 = (measured){ (double)NAN, (double)NAN, 0.0, 0 };
    t.reasons = FLAG(BLURRED);
    t.flags = FLAG(LOW_ORDER);
    t.n_found = 3;
    t.features = mem_array(3, sizeof *t.features);
    for (int i = 0; i < 3; i++)
        t.features[i] = (feature){ .x = 1.37 * i, .nn_px = i ? 19.3 : (double)NAN, .box_x1 = 7 * i, .n_neighbours = 5 + i };
    t.n_curves = 1;
    t.curves[0] = (curve){ "psd_curvature", "1/px", "px2", mem_array(2, sizeof(curve_point)), 2 };
    t.curves[0].points[1] = (curve_point){ 0.043, 3.7e-4 };
    return t;
}

int main(void) {
    char folder[] = "/tmp/sward-cache-XXXXXX", overlay[65];
    error e = { 0 };
    texture t = invent(), back = { 0 };
    const char *key = "0123456789abcdef0123456789abcdef0123456789abcdef0123456789abcdef";
    const char *hash = "fedcba9876543210fedcba9876543210fedcba9876543210fedcba9876543210";
    CHECK(mkdtemp(folder) != NULL);
    CHECK(!cache_get(folder, key, &back, overlay));
    CHECK(cache_put(folder, key, &t, hash, &e) == ST_OK);
    CHECK(cache_get(folder, key, &back, overlay) && !strcmp(overlay, hash));
    CHECK(back.relief == RELIEF_PORE && back.reasons == t.reasons && back.flags == t.flags && back.nx == 640);
    CHECK(!memcmp(&back.spacing_acf, &t.spacing_acf, sizeof t.spacing_acf) && isnan(back.top_d50.value));
    CHECK(back.n_found == 3 && back.features[2].n_neighbours == 7 && isnan(back.features[0].nn_px));
    CHECK(back.n_curves == 1 && !strcmp(back.curves[0].name, "psd_curvature"));
    CHECK_NEAR(back.curves[0].points[1].y, 3.7e-4, 0.0);
    texture_free(&back);

    /* one flipped byte anywhere is noticed */
    char *path = path_join(folder, "0123456789abcdef0123456789abcdef0123456789abcdef0123456789abcdef.bin"), *bytes = NULL;
    size_t n = 0;
    CHECK(file_read(path, 1 << 20, &bytes, &n, &e) == ST_OK);
    for (size_t at = 0; at < n; at += n / 7) {
        bytes[at] ^= 1;
        CHECK(file_write(path, bytes, n, &e) == ST_OK && !cache_get(folder, key, &back, overlay));
        bytes[at] ^= 1;
    }
    CHECK(file_write(path, bytes, n / 2, &e) == ST_OK && !cache_get(folder, key, &back, overlay));
    CHECK(file_write(path, "", 0, &e) == ST_OK && !cache_get(folder, key, &back, overlay));
    free(bytes);
    unlink(path);
    free(path);
    rmdir(folder);
    texture_free(&t);
    return check_done();
}

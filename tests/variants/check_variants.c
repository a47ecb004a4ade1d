/* Holds every file that write.py made against what it says must come out: the plane, level for level, the pixel
 * size within 0.1 % or none, the rows of strip within 2; a refusal has its sentence.  check_variants FOLDER */
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <tiffio.h>

#include "base/limits.h"
#include "base/number.h"
#include "check.h"
#include "io/file.h"
#include "io/load.h"

enum { FIELDS = 5 };
typedef struct {
    char *field[FIELDS]; /* name, verdict, pixel size, strip, tolerance */
} one_case;

static int differ(const char *name, const char *what, const char *wanted, double got) {
    printf("%s: %s %s wanted, got %g\n", name, what, wanted, got);
    return 0;
}

static int same_plane(const char *path, const char *name, double tolerance, const micrograph *m) {
    char *bytes = NULL;
    size_t n = 0;
    uint32_t side[2] = { 0, 0 };
    double worst = 0.0;
    if (file_read(path, LIMIT_FILE_BYTES, &bytes, &n, NULL) == ST_OK && n >= sizeof side)
        memcpy(side, bytes, sizeof side);
    int ok = side[0] && m->nx == side[0] && m->ny == side[1] && n == sizeof side + 4 * m->nx * m->ny;
    for (size_t i = 0; ok && i < m->nx * m->ny; i++) {
        float want;
        memcpy(&want, bytes + sizeof side + 4 * i, 4);
        double d = fabs((double)(m->px[i] - want));
        if (!(d <= worst)) worst = d;
    }
    free(bytes);
    if (!ok) printf("%s: %zu x %zu pixels, wanted %u x %u\n", name, m->nx, m->ny, side[0], side[1]);
    return ok && !(worst <= tolerance) ? differ(name, "the same plane", "within tolerance", worst) : ok;
}

static int right_scale(const one_case *c, const micrograph *m) {
    double want;
    if (!strcmp(c->field[2], "-")) return 1;
    if (!strcmp(c->field[2], "none"))
        return isnan(m->px_nm) ? 1 : differ(c->field[0], "pixel size", c->field[2], m->px_nm);
    return number_parse(c->field[2], &want) && fabs(m->px_nm / want - 1.0) <= 0.001
               ? 1
               : differ(c->field[0], "pixel size", c->field[2], m->px_nm);
}

static int read_well(const char *path, const one_case *c) {
    load_options o = load_defaults();
    micrograph m = { 0 };
    error e = { 0 };
    char want[4200];
    double rows, tolerance;
    int ok = 1;
    o.find_marks = 0;
    o.crop_strip = strcmp(c->field[3], "-") != 0;
    status st = load_file(path, &o, &m, &e);
    int any = !strcmp(c->field[1], "any"),
        zstd_missing = !strcmp(c->field[1], "zstd") && !TIFFIsCODECConfigured(COMPRESSION_ZSTD);
    if (!strcmp(c->field[1], "refused") || zstd_missing || (any && st != ST_OK)) {
        ok = st != ST_OK && strlen(e.text) > 10 && (unsigned char)e.text[0] >= ' ';
        if (!ok) printf("%s: read, though it should be refused with a sentence\n", c->field[0]);
    } else if (st != ST_OK) {
        printf("%s: refused: %s\n", c->field[0], e.text);
        ok = 0;
    } else {
        ok = right_scale(c, &m);
        if (o.crop_strip && number_parse(c->field[3], &rows) && !(fabs((double)m.strip_rows - rows) <= 2.0))
            ok = differ(c->field[0], "rows of strip", c->field[3], (double)m.strip_rows);
        snprintf(want, sizeof want, "%s.want", path);
        if (number_parse(c->field[4], &tolerance)) ok &= same_plane(want, c->field[0], tolerance, &m);
    }
    micrograph_free(&m);
    return ok;
}

/* Cuts the line at its tabs; 0: it has not FIELDS of them. */
static int split(char *line, one_case *c) {
    for (int k = 0; k < FIELDS; k++) {
        c->field[k] = line;
        line = strchr(line, '\t');
        if (k + 1 < FIELDS && !line) return 0;
        if (line) *line++ = '\0';
    }
    return 1;
}

int main(int argc, char **argv) {
    char path[4096], *list = NULL;
    size_t n = 0, seen = 0;
    if (argc != 2) return 2;
    snprintf(path, sizeof path, "%s/cases.txt", argv[1]);
    CHECK(file_read(path, LIMIT_TEXT_FILE_BYTES, &list, &n, NULL) == ST_OK);
    for (char *line = list, *end; line && (end = strchr(line, '\n')) != NULL; line = end + 1) {
        one_case c = { { NULL } };
        *end = '\0';
        CHECK(split(line, &c));
        if (!c.field[FIELDS - 1]) continue;
        snprintf(path, sizeof path, "%s/%s", argv[1], c.field[0]);
        CHECK(read_well(path, &c));
        seen++;
    }
    CHECK(seen >= 146);
    printf("%zu files\n", seen);
    free(list);
    return check_done();
}

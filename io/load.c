/* An image file's bytes become a micrograph: told apart by content, decoded, strip cropped, clipping counted
 * on the file's own levels, pixel size chosen. The name of a file decides nothing here. */
#include "io/load.h"

#include <ctype.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/bar_priv.h"
#include "io/file.h"
#include "io/levels_priv.h"
#include "io/marks_priv.h"
#include "io/picture_priv.h"
#include "io/pixelsize_priv.h"
#include "io/resample_priv.h"
#include "io/metadata/sidecar_priv.h"
#include "io/strip_priv.h"

static const double worth_correcting = 0.001, steepest_tilt_deg = 60.0, same_nominal = 0.005;

load_options load_defaults(void) {
    return (load_options){ .px_nm_option = MISSING,
                           .px_nm_sheet = MISSING,
                           .px_u_rel = 0.01,
                           .bar_nm = MISSING,
                           .crop_strip = 1,
                           .find_marks = 1,
                           .correct_tilt = 1,
                           .max_pixels = LIMIT_PIXELS,
                           .max_bytes = LIMIT_FILE_BYTES };
}

int load_knows_name(const char *path) {
    static const char *const endings[] = { ".png", ".tif", ".tiff", ".jpg", ".jpeg" };
    size_t n = strlen(path);
    for (size_t k = 0; k < sizeof endings / sizeof endings[0]; k++) {
        size_t m = strlen(endings[k]);
        if (n <= m || path[n - m - 1] == '/') continue;
        size_t i = 0;
        while (i < m && tolower((unsigned char)path[n - m + i]) == endings[k][i]) i++;
        if (i == m) return 1;
    }
    return 0;
}

static int starts_with(const uint8_t *bytes, size_t n, const char *magic, size_t m) {
    return n >= m && !memcmp(bytes, magic, m);
}

/* What an unreadable file is, as far as its first bytes tell. */
static status refuse(const uint8_t *bytes, size_t n, error *e) {
    static const struct {
        const char *magic;
        size_t n;
        const char *kind;
    } known[] = {
        { "GIF8", 4, "a GIF" },
        { "BM", 2, "a BMP" },
        { "%PDF", 4, "a PDF" },
        { "PK\x03\x04", 4, "a ZIP archive" },
        { "\x1f\x8b", 2, "a gzip archive" },
        { "RIFF", 4, "a RIFF file (WebP?)" },
    };
    for (size_t k = 0; k < sizeof known / sizeof known[0]; k++)
        if (starts_with(bytes, n, known[k].magic, known[k].n))
            return fail(e, ST_BAD_INPUT,
                        "is %s; only TIFF, PNG and JPEG are read: export the micrograph as TIFF or PNG",
                        known[k].kind);
    size_t text = 0, look = n < 512 ? n : 512;
    while (text < look && (bytes[text] >= 0x20 || isspace(bytes[text]))) text++;
    if (text == look) return fail(e, ST_BAD_INPUT, "is text, not a picture; expected TIFF, PNG or JPEG");
    return fail(e, ST_BAD_INPUT, "is neither TIFF nor PNG nor JPEG (by its first bytes)");
}

static status decode(const uint8_t *bytes, size_t n, const load_options *o, picture *p, error *e) {
    size_t max_pixels = o->max_pixels;
    if (!n) return fail(e, ST_BAD_INPUT, "the file is empty");
    if (starts_with(bytes, n, "\x89PNG\r\n\x1a\n", 8)) return png_decode(bytes, n, max_pixels, p, e);
    if (starts_with(bytes, n, "II*\0", 4) || starts_with(bytes, n, "MM\0*", 4) ||
        starts_with(bytes, n, "II+\0", 4) || starts_with(bytes, n, "MM\0+", 4))
        return tiff_decode_page(bytes, n, o->page, max_pixels, p, e);
    if (starts_with(bytes, n, "\xff\xd8\xff", 3)) return jpeg_decode(bytes, n, max_pixels, p, e);
    if (n < 8 && (!memcmp(bytes, "\x89PNG\r\n\x1a", n) || !memcmp(bytes, "II*", n < 3 ? n : 3) ||
                  !memcmp(bytes, "MM\0", n < 3 ? n : 3)))
        return fail(e, ST_BAD_INPUT, "the file is truncated after %zu bytes", n);
    return refuse(bytes, n, e);
}

/* Rows of strip at the bottom: what the file states when the pixels allow it, else what the pixels show. */
static size_t strip_rows(picture *p) {
    size_t found = strip_find(p->px, p->nx, p->ny);
    if (p->strip_stated && p->strip_stated < p->ny / 3) {
        if (found && found != p->strip_stated)
            note_add(p->note,
                     "The file states %zu rows of info strip, the pixels show %zu; the file's were cropped.",
                     p->strip_stated, found);
        return p->strip_stated;
    }
    return found;
}

static void count_clipped(micrograph *m) {
    size_t low = 0, high = 0, n = 0;
    for (size_t i = 0; i < m->nx * m->ny; i++) {
        if (m->masked && m->masked[i]) continue;
        n++;
        low += !(m->px[i] > 0.0f);
        high += !(m->px[i] < 1.0f);
    }
    m->clipped_low = (double)low / (double)n;
    m->clipped_high = (double)high / (double)n;
}

static status find_marks(micrograph *m, error *e) {
    status st = marks_find(m->px, m->nx, m->ny, (m->flags & FLAG(LOSSY)) != 0, &m->masked, &m->n_masked, e);
    if (st != ST_OK || !m->masked) return st;
    char share[NUMBER_TEXT];
    m->flags |= FLAG(MARKS);
    note_add(m->note, "Marks drawn over the specimen were masked: %s %% of the field.",
             number_percent((double)m->n_masked / (double)(m->nx * m->ny), 2, share));
    return st;
}

/* Rows of square pixels; the mask goes with them. */
static status make_square(micrograph *m, size_t max_pixels, error *e) {
    size_t before = m->ny;
    if (fabs(m->y_stretch - 1.0) < worth_correcting) {
        m->y_stretch = 1.0;
        return ST_OK;
    }
    status st = resample_rows(&m->px, m->nx, &m->ny, m->y_stretch, max_pixels, e);
    return st == ST_OK && m->masked ? resample_mask(&m->masked, m->nx, before, m->ny, e) : st;
}

/* A 16-bit file may hold a detector of fewer bits; a luminance has no levels of its own. */
static void find_true_levels(picture *p) {
    unsigned top;
    if (p->bit_depth != 16 || p->flags & FLAG(COLOUR)) return;
    p->bit_depth = levels_find(p->px, p->nx * p->ny, &top);
    if (p->bit_depth < 16)
        note_add(p->note, "A 16-bit file with the levels of %d bits: the top is %u.", p->bit_depth, top);
}

/* A tilted view shows y shortened by cos(tilt); the tilt axis is the picture's x unless the scan was turned. */
static void judge_tilt(const load_options *o, micrograph *m) {
    const facts *f = &m->facts;
    double stretch = 1.0 / cos(f->tilt_deg * PI / 180.0);
    if (!f->tilt_known || f->tilt_in_pixels || fabs(stretch - 1.0) < worth_correcting) return;
    if (o->correct_tilt && !f->turned && fabs(f->tilt_deg) <= steepest_tilt_deg) {
        m->y_stretch *= stretch;
        m->flags |= FLAG(TILT_CORRECTED);
        note_add(m->note, "The stage was tilted by %.1f degrees; the rows were stretched %.3f times.",
                 f->tilt_deg, stretch);
        return;
    }
    m->flags |= FLAG(TILT_KNOWN);
    note_add(m->note, "The stage was tilted by %.1f degrees%s; lengths along the tilt are too short.",
             f->tilt_deg, f->turned ? " and the scan turned" : "");
}

/* The standard speaks for a micrograph of the same nominal pixel size, or, where the file does not say that, of
 * the same magnification and width. */
static int standard_applies(const scale_standard *k, const picture *p) {
    double nominal = MISSING;
    scale_rank best = SCALE_RESOLUTION;
    for (size_t i = 0; i < p->scales.n; i++) {
        const scale *s = &p->scales.list[i];
        if (s->rank <= SCALE_BAR || s->rank > best || (s->rank == best && isfinite(nominal))) continue;
        best = s->rank;
        nominal = s->x_nm;
    }
    if (k->nominal_px_nm > 0.0 && isfinite(nominal))
        return fabs(nominal / k->nominal_px_nm - 1.0) <= same_nominal;
    return k->magnification > 0.0 && fabs(p->facts.magnification / k->magnification - 1.0) <= same_nominal &&
           p->nx == k->width_px;
}

static void apply_standard(const scale_standard *k, picture *p) {
    if (!standard_applies(k, p)) return;
    scales_add_u(&p->scales, SCALE_STANDARD, "standard", k->px_x_nm, k->px_y_nm, k->u_rel);
    note_add(p->note, "Pixel size by the standard '%.120s' of %s.", k->name, k->date);
}

/* The user says what the bar stands for; one pixel either way, uniform, is the uncertainty of its length. */
static void measure_bar(double bar_nm, size_t top, size_t bottom, picture *p) {
    size_t n = bar_find(p->px, p->nx, p->ny, top, bottom);
    if (n)
        scales_add_u(&p->scales, SCALE_BAR, "bar", bar_nm / (double)n, bar_nm / (double)n,
                     1.0 / sqrt(3.0) / (double)n);
    else
        note_add(p->scales.note, "No scale bar was found, so its length could not be used.");
}

/* The rows that are not measured, for whoever shows the picture. */
static status keep_strip(const float *px, micrograph *m, error *e) {
    if (!m->strip_rows) return ST_OK;
    size_t top = m->strip_top * m->nx, bottom = (m->strip_rows - m->strip_top) * m->nx;
    m->strip = mem_array(m->strip_rows * m->nx, sizeof *m->strip);
    if (!m->strip) return NO_MEMORY(e, "the info strip");
    memcpy(m->strip, px, top * sizeof *px);
    memcpy(m->strip + top, px + top + m->nx * m->ny, bottom * sizeof *px);
    return ST_OK;
}

static void keep_facts(const picture *p, micrograph *m) {
    m->bit_depth = p->bit_depth;
    m->flags = p->flags;
    m->facts = p->facts;
    m->pages = p->pages;
    memcpy(m->compression, p->compression, sizeof m->compression);
    memcpy(m->acquired_at, p->acquired_at, sizeof m->acquired_at);
    memcpy(m->note, p->note, sizeof m->note);
}

status load_bytes(const uint8_t *bytes, size_t n, const char *path, const load_options *o,
                         micrograph *m, error *e) {
    picture p = { 0 };
    micrograph r = { 0 };
    status st = decode(bytes, n, o, &p, e);
    if (st != ST_OK) goto done;
    find_true_levels(&p);
    if (path) sidecar_read(path, &p);
    r.file_nx = r.nx = p.nx;
    r.file_ny = p.ny;
    if (o->crop_strip) {
        r.strip_rows = strip_rows(&p);
        r.strip_top = strip_find_top(p.px, p.nx, p.ny - r.strip_rows);
        r.strip_rows += r.strip_top;
    }
    r.ny = p.ny - r.strip_rows;
    if (o->standard) apply_standard(o->standard, &p);
    if (o->bar_nm > 0.0) measure_bar(o->bar_nm, r.strip_top, r.strip_rows - r.strip_top, &p);
    if (r.nx < LIMIT_MIN_SIDE || r.ny < LIMIT_MIN_SIDE) {
        st = fail(e, ST_BAD_INPUT, "the picture has only %zu x %zu pixels; at least %zu a side are needed",
                  r.nx, r.ny, LIMIT_MIN_SIDE);
        goto done;
    }
    st = keep_strip(p.px, &r, e);
    if (st != ST_OK) goto done;
    if (r.strip_top) memmove(p.px, p.px + r.strip_top * r.nx, r.nx * r.ny * sizeof *p.px);
    r.px = p.px;
    p.px = NULL;
    keep_facts(&p, &r);
    if (o->find_marks) st = find_marks(&r, e);
    if (st != ST_OK) goto done;
    count_clipped(&r);
    sha256_hex(bytes, n, r.hash);
    scales_add(&p.scales, SCALE_OPTION, "option", o->px_nm_option, o->px_nm_option);
    scales_add(&p.scales, SCALE_SHEET, "sheet", o->px_nm_sheet, o->px_nm_sheet);
    pixelsize_choose(&p.scales, o->px_u_rel, &r);
    judge_tilt(o, &r);
    st = make_square(&r, o->max_pixels, e);
    if (st == ST_OK && r.ny < LIMIT_MIN_SIDE)
        st = fail(e, ST_BAD_INPUT,
                  "the picture has only %zu x %zu square pixels; at least %zu a side are needed", r.nx, r.ny,
                  LIMIT_MIN_SIDE);
    if (st != ST_OK) goto done;
    *m = r;
    r = (micrograph){ 0 };
done:
    micrograph_free(&r);
    picture_free(&p);
    return st;
}

status load_memory(const uint8_t *bytes, size_t n, const load_options *o, micrograph *m, error *e) {
    return load_bytes(bytes, n, NULL, o, m, e);
}

status load_file(const char *path, const load_options *o, micrograph *m, error *e) {
    char *bytes = NULL;
    size_t n = 0;
    status st = file_read(path, o->max_bytes, &bytes, &n, e);
    if (st == ST_OK) st = load_bytes((const uint8_t *)bytes, n, path, o, m, e);
    free(bytes);
    return st;
}

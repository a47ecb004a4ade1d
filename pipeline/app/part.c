/* The record of a part: how it was made, the whole list of files, and what each micrograph of its share came to, in the
 * bytes of the cache. Its overlays and curves lie beside it as those of a run. Machines of one kind only: the bytes are
 * those of the machine. */
#include "app/part.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/cache.h"
#include "app/run_priv.h"
#include "base/limits.h"
#include "base/mem.h"
#include "io/memo.h"

static const char record[] = "records", kind[] = "part-1";

/* How a part was made. Paths are absolute; NULL: the default. */
typedef struct {
    char *layout, *folder, *protocol, *sheet, *scale, *warnings; /* owned */
    double px_nm, bar_nm;
    int keep_tilt, part, parts;
    char basis[65], sheet_hash[65]; /* "" no sheet */
    char **names; /* [n] every picture of the folder, in output order; owned */
    size_t n, n_other;
} plan;

static void plan_free(plan *p) {
    char *owned[] = { p->layout, p->folder, p->protocol, p->sheet, p->scale, p->warnings };
    for (size_t i = 0; i < sizeof owned / sizeof owned[0]; i++) free(owned[i]);
    for (size_t i = 0; p->names && i < p->n; i++) free(p->names[i]);
    free(p->names);
    *p = (plan){ .n = 0 };
}

int part_parse(const char *text, int *part, int *parts) {
    char *end = NULL;
    long k = strtol(text, &end, 10), n;
    if (end == text || *end != '/') return 0;
    const char *rest = end + 1;
    n = strtol(rest, &end, 10);
    if (end == rest || *end || k < 1 || n < 1 || k > n || n > 100000) return 0;
    *part = (int)k;
    *parts = (int)n;
    return 1;
}

static void pack_plan(pack *p, plan *f) {
    size_t n = f->n;
    char **texts[] = { &f->layout, &f->folder, &f->protocol, &f->sheet, &f->scale, &f->warnings };
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++) pack_text(p, texts[i]);
    pack_bytes(p, &f->px_nm, sizeof f->px_nm);
    pack_bytes(p, &f->bar_nm, sizeof f->bar_nm);
    int *whole[] = { &f->keep_tilt, &f->part, &f->parts };
    for (size_t i = 0; i < sizeof whole / sizeof whole[0]; i++) pack_bytes(p, whole[i], sizeof **whole);
    pack_bytes(p, f->basis, sizeof f->basis);
    pack_bytes(p, f->sheet_hash, sizeof f->sheet_hash);
    pack_count(p, &f->n_other);
    pack_count(p, &n);
    if (!p->out) {
        if (p->failed || n > LIMIT_FOLDER_FILES || !(f->names = mem_array(n, sizeof *f->names))) p->failed = 1;
        else f->n = n;
    }
    for (size_t i = 0; i < f->n && !p->failed; i++) pack_text(p, &f->names[i]);
}

/* Made absolute, so that the parts can be gathered from anywhere. */
static status absolute(const char *path, char **out, error *e) {
    *out = NULL;
    if (!path) return ST_OK;
    *out = realpath(path, NULL);
    return *out ? ST_OK : fail(e, ST_IO, "%s: cannot be found", path);
}

static status sheet_digest(const char *dir, const char *named, char out[65], error *e) {
    char *path = named ? mem_text(named) : path_join(dir, "samples.csv"), *bytes = NULL;
    size_t n = 0;
    out[0] = '\0';
    status st = path ? ST_OK : NO_MEMORY(e, "a path");
    if (st == ST_OK && (named || file_exists(path))) {
        st = file_read(path, LIMIT_TEXT_FILE_BYTES, &bytes, &n, e);
        if (st == ST_OK) sha256_hex(bytes, n, out);
        else fail_within(e, st, path);
    }
    free(bytes);
    free(path);
    return st;
}

/* Borrows the names of the run. */
static status plan_of(const run *r, plan *f, error *e) {
    const run_options *o = r->o;
    textbuf layout = { 0 };
    cache_layout_text(&layout);
    *f = (plan){ .layout = layout.s, .px_nm = o->px_nm, .bar_nm = o->bar_nm, .keep_tilt = o->keep_tilt, .part = o->part,
                 .parts = o->parts, .n = r->folder.n, .n_other = r->folder.n_other };
    memcpy(f->basis, r->basis, sizeof f->basis);
    status st = text_check(&layout, "a part", e);
    if (st == ST_OK && !(f->warnings = mem_text(r->folder.warnings.s ? r->folder.warnings.s : ""))) st = NO_MEMORY(e, "a part");
    if (st == ST_OK) st = absolute(o->folder, &f->folder, e);
    if (st == ST_OK) st = absolute(r->protocol.path[0] ? r->protocol.path : NULL, &f->protocol, e);
    if (st == ST_OK) st = absolute(o->sheet, &f->sheet, e);
    if (st == ST_OK) st = absolute(o->scale, &f->scale, e);
    return st == ST_OK ? sheet_digest(f->folder, f->sheet, f->sheet_hash, e) : st;
}

static void pack_record(pack *p, examined *x) {
    (void)cache_examined(p, x);
    pack_bytes(p, x->file_time, sizeof x->file_time);
}

status part_write(run *r, run_outcome *outcome, error *e) {
    plan f = { .n = 0 };
    textbuf body = { 0 };
    pack p = { .out = &body };
    status st = plan_of(r, &f, e);
    if (st == ST_OK) {
        f.names = r->folder.relative;
        pack_plan(&p, &f);
        for (size_t i = 0; i < r->folder.n; i++)
            if (r->images[i].row.file) pack_record(&p, &r->images[i]);
        st = text_check(&body, "a part", e);
    }
    if (st == ST_OK) st = memo_put(r->stage.folder, record, kind, &body, e);
    if (st == ST_OK) st = stage_commit(&r->stage, e);
    run_count_unusable(r, outcome);
    if (st == ST_OK && !r->o->quiet)
        printf("Part %d of %d: %d of %zu micrographs measured, %d of them cannot be used.\n"
               "When all parts are there: sward gather PART... --out DIR\n",
               r->o->part, r->o->parts, outcome->micrographs, r->folder.n, outcome->unusable);
    text_free(&body);
    f.names = NULL;
    plan_free(&f);
    return st;
}

/* --- joining --- */

/* A part as it lies on disk. */
typedef struct {
    const char *folder;
    plan plan;
    char *bytes;
    pack rest; /* the records behind the plan */
} part;

static status part_open(const char *dir, part *p, error *e) {
    *p = (part){ .folder = dir };
    if (!memo_get(dir, record, kind, &p->bytes, &p->rest.n))
        return fail(e, ST_BAD_INPUT, "'%s' holds no part; name the output folders of 'sward run --part'", dir);
    p->rest.bytes = p->bytes;
    pack_plan(&p->rest, &p->plan);
    textbuf layout = { 0 };
    cache_layout_text(&layout);
    int ours = !p->rest.failed && layout.s && p->plan.layout && p->plan.folder && !strcmp(layout.s, p->plan.layout);
    text_free(&layout);
    return ours ? ST_OK : fail(e, ST_BAD_INPUT, "%s: this part was written by another version of sward; make it again with this one", dir);
}

static int same_bits(double a, double b) { return !memcmp(&a, &b, sizeof a); }

/* Parts of one and the same run, but for their number. */
static status same_run(const part *a, const part *b, error *e) {
    const plan *x = &a->plan, *y = &b->plan;
    const char *differs = NULL;
    if (x->parts != y->parts) differs = "the number of parts";
    else if (strcmp(x->folder, y->folder)) differs = "the folder";
    else if (strcmp(x->basis, y->basis)) differs = "the protocol";
    else if (strcmp(x->sheet_hash, y->sheet_hash)) differs = "the sample sheet";
    else if (!same_bits(x->px_nm, y->px_nm) || !same_bits(x->bar_nm, y->bar_nm) || x->keep_tilt != y->keep_tilt) differs = "an option";
    int same_names = x->n == y->n && x->n_other == y->n_other;
    for (size_t i = 0; same_names && i < x->n; i++) same_names = x->names[i] && y->names[i] && !strcmp(x->names[i], y->names[i]);
    if (!differs && !same_names) differs = "the files in the folder";
    return differs ? fail(e, ST_BAD_INPUT, "%s and %s are not parts of one run: %s differs; make the older one again", a->folder, b->folder, differs)
                   : ST_OK;
}

static status all_there(const part *parts, size_t n, error *e) {
    size_t wanted = (size_t)parts[0].plan.parts;
    for (size_t k = 1; k <= wanted; k++) {
        size_t found = 0;
        for (size_t i = 0; i < n; i++) found += (size_t)parts[i].plan.part == k;
        if (found == 1) continue;
        return found ? fail(e, ST_BAD_INPUT, "part %zu of %zu is named twice", k, wanted)
                     : fail(e, ST_BAD_INPUT, "part %zu of %zu is missing; run it with --part %zu/%zu and name its folder too", k, wanted, k, wanted);
    }
    return ST_OK;
}

/* The micrographs of one part into their places, their outputs into the stage. */
static status take_part(run *r, part *p, error *e) {
    for (size_t i = (size_t)p->plan.part - 1; i < r->folder.n; i += (size_t)p->plan.parts) {
        examined *x = &r->images[i];
        pack_record(&p->rest, x);
        if (p->rest.failed || !x->row.file || strcmp(x->row.file, r->folder.relative[i]))
            return fail(e, ST_BAD_INPUT, "%s: the part is damaged; make it again", p->folder);
        if (!x->readable) continue;
        status st = examine_adopt(&r->stage, p->folder, r->folder.stems[i], x, e);
        if (st != ST_OK) return st;
    }
    return ST_OK;
}

static status open_plan(run *r, const plan *f, error *e) {
    char now[65];
    status st = sheet_digest(f->folder, f->sheet, now, e);
    if (st == ST_OK && strcmp(now, f->sheet_hash))
        st = fail(e, ST_BAD_INPUT, "the sample sheet is no longer what the parts were made with; make the parts again");
    if (st == ST_OK) st = folder_listed(f->folder, f->names, f->n, f->n_other, f->sheet, &r->folder, e);
    if (st == ST_OK) {
        text_free(&r->folder.warnings);
        text_add(&r->folder.warnings, f->warnings ? f->warnings : "");
        st = text_check(&r->folder.warnings, "the warnings", e);
    }
    if (st == ST_OK) st = run_meet_folder(r, e);
    if (st == ST_OK && strcmp(r->basis, f->basis))
        st = fail(e, ST_BAD_INPUT, "the protocol, a material or the scale file is no longer what the parts were made with; make the parts again");
    if (st == ST_OK && !(r->images = mem_array(f->n, sizeof *r->images))) st = NO_MEMORY(e, "the micrographs");
    return st;
}

static status gather_parts(const run_options *o, part *parts, size_t n, run_outcome *outcome, error *e) {
    const plan *f = &parts[0].plan;
    run_options whole = *o;
    whole.folder = f->folder;
    whole.protocol = f->protocol;
    whole.sheet = f->sheet;
    whole.scale = f->scale;
    whole.px_nm = f->px_nm;
    whole.bar_nm = f->bar_nm;
    whole.keep_tilt = f->keep_tilt;
    run r = { .o = &whole, .stage = STAGE_NONE };
    status st = run_prepare(&r, e);
    r.begun_s[1] = r.begun_s[0];
    if (st == ST_OK) st = open_plan(&r, f, e);
    if (st == ST_OK) st = run_make_stage(&r, e);
    for (size_t i = 0; st == ST_OK && i < n; i++) st = take_part(&r, &parts[i], e);
    if (st == ST_OK) st = run_complete(&r, outcome, e);
    run_free(&r);
    return st;
}

status part_gather(const run_options *o, const char *const *folders, size_t n, run_outcome *outcome, error *e) {
    part *parts = mem_array(n, sizeof *parts);
    status st = parts ? ST_OK : NO_MEMORY(e, "the parts");
    for (size_t i = 0; st == ST_OK && i < n; i++) {
        st = part_open(folders[i], &parts[i], e);
        if (st == ST_OK) st = same_run(&parts[0], &parts[i], e);
    }
    if (st == ST_OK) st = all_there(parts, n, e);
    if (st == ST_OK) st = gather_parts(o, parts, n, outcome, e);
    for (size_t i = 0; parts && i < n; i++) {
        plan_free(&parts[i].plan);
        free(parts[i].bytes);
    }
    free(parts);
    return st;
}

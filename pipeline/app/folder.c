#include "app/folder.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>
#include <time.h>

#include "app/names.h"
#include "base/mem.h"
#include "io/load.h"

/* Pictures this program does not read still get a row with the reason: nothing is skipped in silence. */
int folder_is_picture(const char *relative) {
    static const char *const endings[] = { ".bmp", ".gif", ".webp", ".jp2" };
    size_t n = strlen(relative);
    if (load_knows_name(relative)) return 1;
    for (size_t i = 0; i < sizeof endings / sizeof endings[0]; i++) {
        size_t k = strlen(endings[i]);
        if (n > k && !strcasecmp(relative + n - k, endings[i])) return 1;
    }
    return 0;
}

static int any_file(const char *relative) {
    (void)relative;
    return 1;
}

void folder_close(folder *f) {
    for (size_t i = 0; i < f->n; i++) {
        if (f->paths) free(f->paths[i]);
        if (f->relative) free(f->relative[i]);
        if (f->stems) free(f->stems[i]);
    }
    free(f->paths);
    free(f->relative);
    free(f->stems);
    free(f->rows);
    free(f->root);
    sheet_free(&f->sheet);
    file_list_free(&f->left);
    text_free(&f->warnings);
    *f = (folder){ 0 };
}

/* Index order: rows of the sheet first, in its order, then the others by name. */
typedef struct {
    size_t index, line;
} place;

static int by_line_then_index(const void *a, const void *b) {
    const place *x = a, *y = b;
    if (x->line != y->line) return x->line < y->line ? -1 : 1;
    return (x->index > y->index) - (x->index < y->index);
}

static char *without_ending(const char *relative) {
    char *stem = mem_text(relative);
    if (!stem) return NULL;
    char *slash = strrchr(stem, '/'), *dot = strrchr(stem, '.');
    if (dot && dot > (slash ? slash + 1 : stem)) *dot = '\0';
    return stem;
}

static int by_text(const void *a, const void *b) { return strcmp(*(char *const *)a, *(char *const *)b); }

/* The path without its ending; where two files share it, both keep the ending ("a-png", "a-tif"). */
static status make_stems(folder *f, error *e) {
    char **sorted = mem_array(f->n, sizeof *sorted);
    f->stems = mem_array(f->n, sizeof *f->stems);
    status st = sorted && f->stems ? ST_OK : NO_MEMORY(e, "the names");
    for (size_t i = 0; st == ST_OK && i < f->n; i++) {
        sorted[i] = f->stems[i] = without_ending(f->relative[i]);
        if (!f->stems[i]) st = NO_MEMORY(e, "the names");
    }
    if (st != ST_OK) goto done;
    qsort(sorted, f->n, sizeof *sorted, by_text);
    char **shared = mem_array(f->n, sizeof *shared);
    size_t n_shared = 0;
    if (!shared) {
        st = NO_MEMORY(e, "the names");
        goto done;
    }
    for (size_t i = 0; i < f->n; i++)
        if ((i && !strcmp(sorted[i], sorted[i - 1])) || (i + 1 < f->n && !strcmp(sorted[i], sorted[i + 1])))
            shared[n_shared++] = sorted[i];
    for (size_t i = 0; st == ST_OK && i < f->n; i++) {
        char *name = f->stems[i];
        if (!n_shared || !bsearch(&name, shared, n_shared, sizeof *shared, by_text)) continue;
        char *full = mem_text(f->relative[i]);
        if (!full) {
            st = NO_MEMORY(e, "the names");
            break;
        }
        full[strlen(name)] = '-'; /* the dot of the ending */
        f->stems[i] = full;
    }
    /* Names that were replaced are still in `shared`. */
    for (size_t k = 0; k < n_shared; k++) {
        int kept = 0;
        for (size_t i = 0; i < f->n && !kept; i++) kept = f->stems[i] == shared[k];
        if (!kept) free(shared[k]);
    }
    free(shared);
done:
    free(sorted);
    return st;
}

/* Copying takes a while, and so does an instrument that writes: a file that was changed just now is looked at twice. Half
 * a micrograph is no micrograph: it is left alone and said. */
typedef struct {
    file_state state;
    int fresh; /* changed within the last seconds */
} first_look;

static int changes(const char *path, const first_look *l) {
    file_state now;
    return l->fresh && file_state_of(path, &now) &&
           (now.bytes != l->state.bytes || now.seconds != l->state.seconds || now.nanoseconds != l->state.nanoseconds);
}

static status look_first(const char *root, const file_list *pictures, first_look *looks, size_t *n_fresh, error *e) {
    enum { FRESH_S = 3 };
    long long since = (long long)time(NULL) - FRESH_S;
    for (size_t i = 0; i < pictures->n; i++) {
        char *path = path_join(root, pictures->paths[i]);
        if (!path) return NO_MEMORY(e, "the folder");
        looks[i].fresh = file_state_of(path, &looks[i].state) && looks[i].state.seconds >= since;
        *n_fresh += (size_t)looks[i].fresh;
        free(path);
    }
    return ST_OK;
}

static status leave_growing(const char *root, file_list *pictures, error *e) {
    const struct timespec pause = { 0, 150000000 };
    first_look *looks = mem_array(pictures->n, sizeof *looks);
    size_t n_fresh = 0, kept = 0;
    status st = looks ? look_first(root, pictures, looks, &n_fresh, e) : NO_MEMORY(e, "the folder");
    if (st == ST_OK && n_fresh) (void)nanosleep(&pause, NULL);
    for (size_t i = 0; st == ST_OK && n_fresh && i < pictures->n; i++) {
        char *name = pictures->paths[i], *path = path_join(root, name);
        int growing = path && changes(path, &looks[i]);
        if (!path) st = NO_MEMORY(e, "the folder");
        free(path);
        if (growing && st == ST_OK) st = file_list_leave(pictures, name, "still being written", 1, e);
        pictures->paths[i] = NULL;
        if (growing) free(name);
        else pictures->paths[kept++] = name;
    }
    if (st == ST_OK && n_fresh) pictures->n = kept;
    free(looks);
    return st;
}

static void warn_left(folder *f) {
    for (size_t i = 0; i < f->left.n_left; i++) {
        if (!f->left.left[i].matters) continue;
        text_add_plain(&f->warnings, f->left.left[i].path);
        text_addf(&f->warnings, ": left alone, %s\n", f->left.left[i].why);
    }
}

static status adopt(folder *f, char **names, size_t n, const char *sheet_path, error *e) {
    place *order = mem_array(n, sizeof *order);
    status st = order ? ST_OK : NO_MEMORY(e, "the folder");
    char *found = sheet_path ? mem_text(sheet_path) : path_join(f->root, "samples.csv");
    if (!found) st = NO_MEMORY(e, "a path");
    if (st == ST_OK && (sheet_path || file_exists(found))) {
        st = sheet_read(found, &f->sheet, e);
        if (st == ST_OK) st = sheet_match(&f->sheet, (const char *const *)names, n, &f->warnings, e);
    }
    f->paths = mem_array(n, sizeof *f->paths);
    f->relative = mem_array(n, sizeof *f->relative);
    f->rows = mem_array(n, sizeof *f->rows);
    if (st == ST_OK && (!f->paths || !f->relative || !f->rows)) st = NO_MEMORY(e, "the folder");
    if (st != ST_OK) goto done;
    for (size_t i = 0; i < n; i++) {
        const sheet_row *row = f->sheet.n_files ? sheet_row_of(&f->sheet, i) : NULL;
        order[i] = (place){ i, row ? row->line : (size_t)-1 };
    }
    qsort(order, n, sizeof *order, by_line_then_index);
    f->n = n;
    for (size_t k = 0; st == ST_OK && k < n; k++) {
        size_t i = order[k].index;
        f->relative[k] = mem_text(names[i]);
        f->paths[k] = path_join(f->root, names[i]);
        f->rows[k] = f->sheet.n_files ? sheet_row_of(&f->sheet, i) : NULL;
        if (!f->relative[k] || !f->paths[k]) st = NO_MEMORY(e, "the folder");
    }
    if (st == ST_OK) st = make_stems(f, e);
done:
    free(found);
    free(order);
    return st;
}

/* Pictures stay in the list, everything else is left alone. Whatever fails, each name has one owner. */
static status keep_pictures(folder *f, file_list *list, error *e) {
    size_t n = 0;
    status st = ST_OK;
    for (size_t i = 0; i < list->n; i++) {
        char *name = list->paths[i];
        int picture = folder_is_picture(name);
        list->paths[i] = NULL;
        if (picture) list->paths[n++] = name;
        else if (st == ST_OK) st = file_list_leave(list, name, "no picture by its name", 0, e);
        if (!picture) free(name);
    }
    f->n_other = list->n - n;
    list->n = n;
    return st;
}

status folder_listed(const char *root, char **names, size_t n, size_t n_other, const char *sheet_path, folder *out, error *e) {
    folder f = { .n_other = n_other };
    f.root = mem_text(root);
    status st = f.root ? adopt(&f, names, n, sheet_path, e) : NO_MEMORY(e, "a path");
    if (st == ST_OK) {
        *out = f;
        f = (folder){ 0 };
    }
    folder_close(&f);
    return st;
}

/* What the caller refuses is left alone, and said. */
static status leave_refused(file_list *pictures, int (*admit)(void *, const char *), void *context, error *e) {
    size_t kept = 0;
    status st = ST_OK;
    for (size_t i = 0; i < pictures->n; i++) {
        char *name = pictures->paths[i];
        int wanted = admit(context, name);
        pictures->paths[i] = NULL;
        if (wanted) pictures->paths[kept++] = name;
        else if (st == ST_OK) st = file_list_leave(pictures, name, "still being written", 1, e);
        if (!wanted) free(name);
    }
    pictures->n = kept;
    return st;
}

status folder_open(const char *root, const char *sheet_path, int (*admit)(void *, const char *), void *context, folder *out,
                   error *e) {
    folder f = { 0 };
    file_list list = { 0 };
    f.root = mem_text(root);
    status st = f.root ? folder_walk(root, any_file, &list, e) : NO_MEMORY(e, "a path");
    if (st == ST_OK) st = keep_pictures(&f, &list, e);
    if (st == ST_OK) st = admit ? leave_refused(&list, admit, context, e) : leave_growing(root, &list, e);
    if (st == ST_OK) st = adopt(&f, list.paths, list.n, sheet_path, e);
    if (st == ST_OK) {
        f.left = (file_list){ .left = list.left, .n_left = list.n_left };
        list.left = NULL;
        list.n_left = 0;
        warn_left(&f);
        *out = f;
        f = (folder){ 0 };
    }
    file_list_free(&list);
    folder_close(&f);
    return st;
}

/* --- samples --- */

/* Micrographs of one sample mostly follow each other: the newest group is looked at first. */
static sample_group *group_named(sample_group *groups, size_t n, const char *name) {
    for (size_t i = n; i-- > 0;)
        if (!strcmp(groups[i].name, name)) return &groups[i];
    return NULL;
}

/* The first non-empty text wins: one sample is one wafer or coupon. */
static status adopt_text(char **slot, const char *text, error *e) {
    if (*slot || !text || !text[0]) return ST_OK;
    *slot = mem_text(text);
    return *slot ? ST_OK : NO_MEMORY(e, "a sample");
}

static void adopt_time(sample_group *g, const folder *f, const examined *x, size_t i) {
    const sheet_row *row = f->rows[i];
    if (g->etched_at[0] && !g->time_from_file) return;
    if (row && row->etched_at[0]) {
        snprintf(g->etched_at, sizeof g->etched_at, "%s", row->etched_at);
        g->time_from_file = 0;
    } else if (x->acquired_at[0]) {
        snprintf(g->etched_at, sizeof g->etched_at, "%s", x->acquired_at);
        g->time_from_file = 0;
    } else if (!g->etched_at[0]) {
        memcpy(g->etched_at, x->file_time, sizeof g->etched_at);
        g->time_from_file = 1;
    }
}

static status join_member(sample_group *g, const folder *f, const name_parts *parts, const examined *x, size_t i,
                          error *e) {
    const sheet_row *row = f->rows[i];
    status st = adopt_text(&g->lot, row && row->lot[0] ? row->lot : parts->lot, e);
    if (st == ST_OK) st = adopt_text(&g->wafer, row && row->wafer[0] ? row->wafer : parts->wafer, e);
    if (st == ST_OK) st = adopt_text(&g->position, row && row->position[0] ? row->position : parts->position, e);
    if (st != ST_OK) return st;
    if (row && !isfinite(g->height_nm.value) && isfinite(row->height_nm))
        g->height_nm = (quantity){ row->height_nm, row->height_nm_u, 1 };
    if (row && !g->extra) g->extra = (const char *const *)row->extra;
    adopt_time(g, f, x, i);
    size_t *members = mem_grow(g->members, g->n_members + 1, sizeof *members);
    if (!members) return NO_MEMORY(e, "a sample");
    g->members = members;
    g->members[g->n_members++] = i;
    return ST_OK;
}

/* Two heights in one sample, also where the sample comes from the file's name. */
static status check_heights(const folder *f, const examined *all, error *e) {
    if (!f->sheet.n) return ST_OK;
    const char **names = mem_array(f->n, sizeof *names);
    if (!names) return NO_MEMORY(e, "the samples");
    for (size_t i = 0; i < f->n; i++) names[i] = all[i].row.sample;
    status st = sheet_check_samples(&f->sheet, f->rows, names, f->n, e);
    free(names);
    return st;
}

status folder_samples(const folder *f, const protocol *p, examined *all, sample_group **groups, size_t *n, error *e) {
    sample_group *list = mem_array(f->n, sizeof *list);
    size_t count = 0;
    status st = list ? ST_OK : NO_MEMORY(e, "the samples");
    for (size_t i = 0; st == ST_OK && i < f->n; i++) {
        name_parts parts = { 0 };
        const sheet_row *row = f->rows[i];
        st = name_sample(f->relative[i], p->pattern, &parts, e);
        if (st != ST_OK) break;
        int named = row && row->sample[0];
        const char *name = named ? row->sample : parts.sample;
        if (p->pattern && !named && !parts.matched) all[i].flags |= FLAG(NAME_UNMATCHED);
        sample_group *g = group_named(list, count, name);
        if (!g) {
            g = &list[count];
            *g = (sample_group){ .height_nm = quantity_missing() };
            g->name = mem_text(name);
            if (g->name) count++;
            else st = NO_MEMORY(e, "the samples");
        }
        if (st == ST_OK && !(all[i].row.sample = mem_text(name))) st = NO_MEMORY(e, "the samples");
        if (st == ST_OK) st = join_member(g, f, &parts, &all[i], i, e);
        name_parts_free(&parts);
    }
    if (st == ST_OK) st = check_heights(f, all, e);
    *groups = list;
    *n = count;
    return st;
}

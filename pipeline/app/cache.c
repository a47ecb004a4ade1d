/* Numbers and texts are packed in a fixed order. Rows go by their column table, structs of numbers as they lie in memory. */
#include "app/cache.h"

#include <stdlib.h>
#include <string.h>

#include "io/memo.h"

static const char micrograph_kind[] = "micrograph-1", prediction_kind[] = "prediction-1";

void cache_layout_text(textbuf *out) {
    text_addf(out, "%s|%zu|%zu|%zu|", SWARD_VERSION, sizeof(examined), sizeof(figure), sizeof(prediction));
    for (size_t c = 0; c < n_image_columns; c++) text_addf(out, "%s,", image_columns[c].name);
    text_add(out, "|");
}

static void pack_row(pack *p, image_row *r) {
    for (size_t c = 0; c < n_image_columns && !p->failed; c++) {
        void *member = (char *)r + image_columns[c].offset;
        switch (image_columns[c].kind) {
        case COL_TEXT: pack_text(p, member); break;
        case COL_NUMBER: pack_bytes(p, member, sizeof(double)); break;
        case COL_COUNT: pack_bytes(p, member, sizeof(long)); break;
        }
    }
}

int cache_examined(pack *p, examined *x) {
    void *cells = x->cell_area_nm2;
    pack_row(p, &x->row);
    pack_text(p, &x->detail);
    pack_text(p, &x->json);
    pack_text(p, &x->overlay);
    pack_bytes(p, x->hash, sizeof x->hash);
    pack_bytes(p, x->acquired_at, sizeof x->acquired_at);
    pack_bytes(p, &x->readable, sizeof x->readable);
    pack_bytes(p, &x->relief, sizeof x->relief);
    pack_bytes(p, &x->reasons, sizeof x->reasons);
    pack_bytes(p, &x->flags, sizeof x->flags);
    pack_bytes(p, x->figures, sizeof x->figures);
    pack_array(p, &cells, &x->n_cells, sizeof *x->cell_area_nm2);
    x->cell_area_nm2 = cells;
    pack_bytes(p, &x->px_u_rel, sizeof x->px_u_rel);
    pack_bytes(p, &x->count_u_rel, sizeof x->count_u_rel);
    pack_bytes(p, x->outputs, sizeof x->outputs);
    return !p->failed;
}

int cache_get(const char *folder, const char *key, examined *x) {
    char *bytes = NULL;
    examined made = { .readable = 0 };
    pack p = { .out = NULL };
    if (!memo_get(folder, key, micrograph_kind, &bytes, &p.n)) return 0;
    p.bytes = bytes;
    int ok = cache_examined(&p, &made) && p.at == p.n;
    if (ok) *x = made;
    else examined_free(&made);
    free(bytes);
    return ok;
}

status cache_put(const char *folder, const char *key, const examined *x, error *e) {
    textbuf body = { 0 };
    examined copy = *x; /* writing only reads */
    pack p = { .out = &body };
    (void)cache_examined(&p, &copy);
    status st = text_check(&body, "what is remembered", e);
    if (st == ST_OK) st = memo_put(folder, key, micrograph_kind, &body, e);
    text_free(&body);
    return st;
}

/* The model's name is one of the program's words, not a text of the prediction's own. */
static const char *const models[] = { "graded", "facets", "none" };

static void pack_prediction(pack *p, prediction *d) {
    double **arrays[] = { &d->wavelength_nm, &d->R, &d->R_lo, &d->R_hi };
    double *mine[4];
    size_t model = 0, known = sizeof models / sizeof models[0];
    for (size_t i = 0; i < 4; i++) mine[i] = *arrays[i];
    if (p->out)
        while (model < known && strcmp(models[model], d->model)) model++;
    for (size_t i = 0; p->out && i < 4; i++) *arrays[i] = NULL; /* addresses mean nothing elsewhere */
    if (p->out) d->model = NULL;
    pack_bytes(p, d, sizeof *d);
    for (size_t i = 0; i < 4; i++) {
        void *block = p->out ? mine[i] : NULL;
        size_t n = d->n;
        pack_array(p, &block, &n, sizeof(double));
        *arrays[i] = block;
        if (n != d->n) p->failed = 1;
    }
    pack_count(p, &model);
    if (model < known) d->model = models[model];
    else p->failed = 1;
}

int cache_get_prediction(const char *folder, const char *key, prediction *d) {
    char *bytes = NULL;
    prediction made = { .n = 0 };
    pack p = { .out = NULL };
    if (!memo_get(folder, key, prediction_kind, &bytes, &p.n)) return 0;
    p.bytes = bytes;
    if (p.n >= sizeof made) pack_prediction(&p, &made);
    else p.failed = 1;
    int ok = !p.failed && p.at == p.n;
    if (ok) *d = made;
    else prediction_free(&made);
    free(bytes);
    return ok;
}

status cache_put_prediction(const char *folder, const char *key, const prediction *d, error *e) {
    textbuf body = { 0 };
    prediction copy = *d;
    pack p = { .out = &body };
    pack_prediction(&p, &copy);
    status st = p.failed ? ST_OK : text_check(&body, "what is remembered", e); /* an unknown model: not remembered */
    if (st == ST_OK && !p.failed) st = memo_put(folder, key, prediction_kind, &body, e);
    text_free(&body);
    return st;
}

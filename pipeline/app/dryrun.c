#include "app/dryrun.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "app/names.h"
#include "base/number.h"
#include "base/quantity.h"

/* A terminal is not to obey bytes of a file's name. */
static void print_name(const char *s, int width) {
    int n = 0;
    for (; *s; s++, n++) putchar((unsigned char)*s < 0x20 || *s == 0x7f ? '?' : *s);
    for (; n < width; n++) putchar(' ');
}

static int longest(const folder *f) {
    size_t n = 4;
    for (size_t i = 0; i < f->n; i++)
        if (strlen(f->relative[i]) > n) n = strlen(f->relative[i]);
    return n < 60 ? (int)n : 60;
}

static int say_one(const folder *f, size_t i, const examine_options *o, const name_parts *parts, int width) {
    const sheet_row *row = f->rows[i];
    micrograph m = { 0 };
    error why = { 0 };
    char number[NUMBER_TEXT], words[1024];
    load_options load = examine_loading(o, row ? row->px_nm : MISSING, row ? row->bar_nm : MISSING);
    int read = load_file(f->paths[i], &load, &m, &why) == ST_OK, known = read && isfinite(m.px_nm);
    int unmatched = o->protocol->pattern && !(row && row->sample[0]) && !parts->matched;
    int kept_out = known && examine_keeps_out(o->protocol, m.px_nm);
    print_name(f->relative[i], width);
    printf("  ");
    print_name(row && row->sample[0] ? row->sample : parts->sample, 20);
    printf("  ");
    print_name(row && row->position[0] ? row->position : parts->position, 10);
    if (known)
        printf("  %10s nm  %-12s", number_text(m.px_nm, 6, number), m.px_source);
    else if (read)
        printf("  %10s     %-12s", "-", "none");
    if (!read)
        printf("  unreadable: %s\n", why.text);
    else
        printf("  %s%s\n", kept_out ? "kept out: outside_px_window " : "",
               flags_text(unmatched ? m.flags | FLAG(NAME_UNMATCHED) : m.flags, words, sizeof words));
    micrograph_free(&m);
    return !known || kept_out;
}

status dry_run(const folder *f, const examine_options *o, int *unusable, error *e) {
    int width = longest(f);
    printf("%-*s  %-20s  %-10s  %-13s  %s\n", width, "file", "sample", "position", "pixel size", "source");
    for (size_t i = 0; i < f->n; i++) {
        name_parts parts = { 0 };
        status st = name_sample(f->relative[i], o->protocol->pattern, &parts, e);
        if (st != ST_OK) return st;
        *unusable += say_one(f, i, o, &parts, width);
        name_parts_free(&parts);
    }
    if (f->warnings.s) fputs(f->warnings.s, stdout);
    return ST_OK;
}

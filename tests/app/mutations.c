/* Protocols and sheets with random damage: whatever stands in the text, there is a result or a sentence, and
 * nothing is left behind (the sanitizer looks). The generator is fixed, so a failure repeats. */
#include <stdint.h>

#include "app/names.h"
#include "app/protocol.h"
#include "app/samplesheet.h"
#include "check.h"

enum { ROUNDS = 6000, ROOM = 1200 };

static const char a_protocol[] = "{ \"protocol\": \"line 3\", \"relief\": \"pore\", \"px_u_rel\": 0.013, "
                                 "\"history\": \"l.sqlite\", // ledger\n"
                                 "  \"samples\": { \"pattern\": \"{lot}_W{wafer}_{n}\" }, \"targets\": { "
                                 "\"spacing_nm\": { \"min\": 280, \"error\": \"repeat\" } },\n"
                                 "  \"link\": { \"height_nm\": 351, \"shape\": \"paraboloid\", \"profile\": "
                                 "\"d.csv\" }, \"fitness\": { \"max_blur\": 0.2 },\n"
                                 "  \"optics\": { \"substrate\": 3.5, \"coatings\": [ { \"material\": "
                                 "\"alumina\", \"thickness_nm\": 11 } ], \"band_nm\": [350, 1100] } }";
static const char a_sheet[] = "file,sample,lot,etched_at,height_nm,px_nm,power\n"
                              "a.png,S1,L,2026-03-14T09:30:05+01:00,300,4,7\nb.png,S1,,2026-03-14,,,\"8,9\"\n"
                              "sub/c.png,S2,,,310,,\n";

/* Numerical Recipes' linear congruential step (Knuth, vol. 2, from memory); its upper bits. */
static uint32_t next(uint32_t *state) {
    *state = *state * 1664525u + 1013904223u;
    return *state >> 8;
}

/* One to four wounds: a wrong byte, a lost byte, a byte from elsewhere, a run copied over another. */
static size_t wound(char *s, size_t n, uint32_t *state) {
    for (uint32_t wounds = 1 + next(state) % 4; wounds && n > 1; wounds--) {
        size_t at = next(state) % n, from = next(state) % n, run = next(state) % 20;
        switch (next(state) % 4) {
        case 0:
            s[at] = (char)(next(state) & 0x7f);
            break;
        case 1:
            memmove(s + at, s + at + 1, n - at - 1);
            n--;
            break;
        case 2:
            s[at] = s[from];
            break;
        default:
            if (from + run < n && at + run < n) memmove(s + at, s + from, run);
        }
    }
    return n;
}

static int one_protocol(const char *s, size_t n) {
    protocol p = { 0 };
    textbuf t = { 0 };
    name_parts parts = { 0 };
    error e = { ST_OK, "" };
    status st = protocol_parse(s, n, "p", "d", &p, &e);
    int good = (st == ST_OK) == (e.text[0] == '\0') && st != ST_BUG;
    if (st == ST_OK) {
        protocol_explain(&p, &t);
        protocol_full_text(&p, &t);
        good = good && name_sample("a/L1_W2_3.png", p.pattern, &parts, &e) == ST_OK && parts.sample[0];
    }
    name_parts_free(&parts);
    text_free(&t);
    protocol_free(&p);
    return good;
}

static int one_sheet(const char *s, size_t n) {
    static const char *const files[] = { "a.png", "x/b.png", "sub/c.png" };
    sheet got = { 0 };
    textbuf warnings = { 0 };
    error e = { ST_OK, "" };
    status st = sheet_parse(s, n, "s", &got, &e);
    if (st == ST_OK) st = sheet_match(&got, files, 3, &warnings, &e);
    int good = (st == ST_OK) == (e.text[0] == '\0') && st != ST_BUG;
    text_free(&warnings);
    sheet_free(&got);
    return good;
}

int main(void) {
    uint32_t state = 1;
    char s[ROOM];
    CHECK(one_protocol(a_protocol, sizeof a_protocol - 1) && one_sheet(a_sheet, sizeof a_sheet - 1));
    for (int i = 0; i < ROUNDS; i++) {
        const char *seed = i % 2 ? a_sheet : a_protocol;
        size_t n = strlen(seed);
        memcpy(s, seed, n);
        n = wound(s, n, &state);
        int good = i % 2 ? one_sheet(s, n) : one_protocol(s, n);
        CHECK(good);
        if (!good) printf("  round %d: %.*s\n", i, (int)n, s);
    }
    return check_done();
}

/* Repeatability from made-up readings: by hand on a small design, known variances on a large one, capability, missing parts. */
#include "app/repeat.h"

#include <stdint.h>

#include "check.h"
#include "noise.h"

static uint64_t state = 0x9e3779b97f4a7c15u;
static double normal(void) { return noise_of_twelve(&state); }

enum { MOST = 1200 };
static examined image[MOST];
static repeat_reading taken[MOST];

static void set(size_t i, int place, int who, int when, double v) {
    image[i] = (examined){ .readable = 1 };
    image[i].figures[QUANTITY_ACF] = (figure){ .m = { v, 1.0, 3.0, 500 }, .u_px = 4.0 };
    taken[i] = (repeat_reading){ place, who, when, &image[i] };
}

/* 100 places, 3 operators, 2 sessions each, 2 readings: s of 4 operators, 2 sessions, 1.5 repeats. */
static void known_variances(void) {
    size_t n = 0;
    for (int p = 0; p < 100; p++) {
        double place = 320.0 + 6.0 * normal();
        for (int o = 0; o < 3; o++) {
            double who = 4.0 * normal();
            for (int s = 0; s < 2; s++) {
                double when = 2.0 * normal();
                for (int k = 0; k < 2; k++) set(n++, p, o, s, place + who + when + 1.5 * normal());
            }
        }
    }
    repeat_result r;
    error e = { 0 };
    CHECK(repeat_analyse(taken, n, QUANTITY_ACF, 280.0, 420.0, &r, &e) == ST_OK);
    CHECK(r.n == 1200 && r.places == 100 && r.groups == 600);
    CHECK_NEAR(r.dof_repeat, 600.0, 0.0);
    CHECK_NEAR(r.s_repeat, 1.5, 0.15);
    CHECK_NEAR(r.s_session, 2.0, 0.35);
    CHECK_NEAR(r.s_operator, 4.0, 0.7);
    CHECK_NEAR(r.s_place, 6.0, 1.5);
    CHECK_NEAR(r.s_reproduce * r.s_reproduce, r.s_repeat * r.s_repeat + r.s_session * r.s_session + r.s_operator * r.s_operator, 1e-9);
    CHECK_NEAR(r.limit_repeat, 2.771807648 * r.s_repeat, 1e-6);
    CHECK_NEAR(r.u_common, 5.0, 1e-12);
    CHECK_NEAR(r.share_repeat, 4.0 * r.s_reproduce / 140.0, 1e-12);
    CHECK_NEAR(r.index_full, 0.1 * 140.0 / sqrt(r.s_reproduce * r.s_reproduce + 25.0), 1e-12);
    /* the two figures of ISO 22514-7 say the same: a share of 30 % is an index of 1.33 */
    CHECK_NEAR(r.index_repeat * r.share_repeat, 0.4, 1e-12);
}

int main(void) {
    known_variances();
    repeat_result r;
    error e = { 0 };
    textbuf t = { 0 };
    /* One place, one person, by hand: sd of 300 302 307 is sqrt(13). */
    static const double v[] = { 300.0, 302.0, 307.0 };
    for (size_t i = 0; i < 3; i++) set(i, 0, 0, 0, v[i]);
    CHECK(repeat_analyse(taken, 3, QUANTITY_ACF, (double)NAN, 320.0, &r, &e) == ST_OK);
    CHECK_NEAR(r.s_repeat, sqrt(13.0), 1e-12);
    CHECK(isnan(r.s_reproduce) && isnan(r.s_place) && isnan(r.width) && isnan(r.share_repeat));
    repeat_text(&r, &t);
    CHECK(t.s && strstr(t.s, "spacing_acf_nm: mean 303 nm of 3 micrographs, 1 place\n"));
    CHECK(t.s && strstr(t.s, "repeatability      3.61 nm") && strstr(t.s, "less than 9.99 nm"));
    CHECK(t.s && strstr(t.s, "reproducibility    unknown: no second operator or session") && !strstr(t.s, "target"));
    text_free(&t);
    repeat_json(&r, &t);
    CHECK(t.s && strstr(t.s, "\"s_repeatability\": 3.606") && strstr(t.s, "\"s_reproducibility\": null") && strstr(t.s, "\"capable\": null"));
    text_free(&t);
    /* judged against a width */
    CHECK(repeat_analyse(taken, 3, QUANTITY_ACF, 280.0, 320.0, &r, &e) == ST_OK);
    repeat_text(&r, &t);
    CHECK(t.s && strstr(t.s, "takes 36.1 % of the target's width, index 1.11: not capable"));
    text_free(&t);
    /* nothing repeated; too little */
    for (size_t i = 0; i < 3; i++) set(i, (int)i, 0, 0, v[i]);
    CHECK(repeat_analyse(taken, 3, QUANTITY_ACF, 280.0, 320.0, &r, &e) == ST_OK && isnan(r.s_repeat));
    repeat_text(&r, &t);
    CHECK(t.s && strstr(t.s, "unknown: no place was taken twice"));
    text_free(&t);
    image[1].figures[QUANTITY_ACF].m.value = image[2].figures[QUANTITY_ACF].m.value = (double)NAN;
    CHECK_FAILS(repeat_analyse(taken, 3, QUANTITY_ACF, 280.0, 320.0, &r, &e), ST_NO_RESULT, e, "measured on 1 micrographs");
    return check_done();
}

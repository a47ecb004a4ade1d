/* Advice on undecided verdicts and goals of a protocol, from made-up samples. */
#include "app/planning.h"

#include "check.h"
#include "metrics/plan.h"

static figure made(double value, double sampling, double method, double px) {
    return (figure){ .m = { value, sampling, method, 900 }, .u_px = px, .u_within = sampling, .u_between = sampling,
                     .dof_sampling = 40.0, .micrographs = 2 };
}

static long ask(const target *t, const figure *f, const char *words) {
    textbuf advice = { 0 };
    long more = plan_verdict(t, f, &f[QUANTITY_ACF], &advice);
    CHECK(words[0] ? advice.s && strstr(advice.s, words) : advice.n == 0);
    text_free(&advice);
    return more;
}

int main(void) {
    static char spacing_nm[] = "spacing_nm", density[] = "density_per_um2", reflectance[] = "weighted_reflectance";
    static figure f[QUANTITIES];
    for (int q = 0; q < QUANTITIES; q++) f[q] = made((double)NAN, (double)NAN, 0.0, 0.0);
    f[QUANTITY_ACF] = made(352.0, 3.1, 0.0, 0.0);

    /* 1.645 * 3.1 sqrt(2/m) <= 3 at m = 5.78: six, so four more; 352 is 3 below the limit. */
    const target ceiling = { .quantity = spacing_nm, .min = (double)NAN, .max = 355.0, .error = ERROR_FULL };
    CHECK(ask(&ceiling, f, "4 more micrographs would settle it") == 4);
    f[QUANTITY_ACF].m.u_method = 2.9; /* 1.645 * 2.9 is beyond 3 */
    CHECK(ask(&ceiling, f, "cannot settle it: the method's own uncertainty is larger than the distance") == PLAN_NEVER);
    const target repeat = { .quantity = spacing_nm, .min = (double)NAN, .max = 355.0, .error = ERROR_REPEAT };
    CHECK(ask(&repeat, f, "4 more micrographs") == 4);
    f[QUANTITY_ACF].u_px = 3.5;
    CHECK(ask(&ceiling, f, "the pixel size's own uncertainty") == PLAN_NEVER);
    const target on = { .quantity = spacing_nm, .min = 352.0, .max = (double)NAN, .error = ERROR_REPEAT };
    CHECK(ask(&on, f, "lies on the limit") == PLAN_NEVER);
    const target near = { .quantity = spacing_nm, .min = (double)NAN, .max = 352.01, .error = ERROR_REPEAT };
    CHECK(ask(&near, f, "even 1000 more micrographs") == PLAN_MOST);
    const target both = { .quantity = spacing_nm, .min = 349.0, .max = 380.0, .error = ERROR_REPEAT };
    CHECK(ask(&both, f, "4 more") == 4); /* the nearer limit counts */
    const target optics = { .quantity = reflectance, .min = (double)NAN, .max = 0.02, .error = ERROR_FULL }, unknown = { .quantity = density, .min = 9.0, .max = (double)NAN, .error = ERROR_FULL };
    CHECK(ask(&optics, f, "") == PLAN_NEVER);
    CHECK(ask(&unknown, f, "") == PLAN_NEVER);

    width_goal goals[] = { { spacing_nm, 20.0 }, { density, 0.3 } };
    protocol p = { .goals = goals, .n_goals = 2 };
    textbuf json = { 0 };
    f[QUANTITY_ACF] = made(352.0, 3.1, 1.0, 0.5);
    plan_json(&p, f, &f[QUANTITY_ACF], &json);
    CHECK(json.s && strstr(json.s, "{\"quantity\": \"spacing_nm\", \"half_width\": 20, \"now\": 6.6"));
    CHECK(json.s && strstr(json.s, "\"more_micrographs\": 0, \"smallest\": 2.3"));
    CHECK(json.s && strstr(json.s, "\"density_per_um2\", \"half_width\": 0.3, \"now\": null, \"more_micrographs\": null"));
    text_free(&json);
    CHECK(planned_quantity("size_d50_nm") && planned_quantity("spacing_nm") && !planned_quantity("verdict"));
    return check_done();
}

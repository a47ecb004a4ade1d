/* Goals are half-widths of a 95 % interval (Student's t). A verdict asks for a guard band of one side and 95 % by the normal
 * law, as judge/target.c does, so its plan uses the same. */
#include "app/planning.h"

#include <math.h>
#include <string.h>

#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"
#include "metrics/plan.h"

static int position(const char *name) {
    for (int q = 0; q < QUANTITIES; q++)
        if (!strcmp(quantity_table[q].name, name)) return q;
    return -1;
}

int planned_quantity(const char *name) { return !strcmp(name, "spacing_nm") || position(name) >= 0; }

const figure *planned_figure(const char *name, const figure *f, const figure *spacing) {
    if (!strcmp(name, "spacing_nm")) return spacing;
    int q = position(name);
    return q >= 0 ? &f[q] : NULL;
}

/* What no further micrograph lowers, with its degrees of freedom. */
static plan_state state_of(const figure *f) {
    figure common = *f;
    common.m.u_sampling = 0.0;
    budget_total t = figure_total(&common);
    return (plan_state){ { f->m.u_sampling, f->dof_sampling }, { t.u, t.dof }, f->micrographs };
}

static void member(textbuf *out, const char *name, double v) {
    text_addf(out, ", \"%s\": ", name);
    json_number(out, v, 4);
}

static double number_of(const plan_answer *a) {
    return a->more == PLAN_NEVER || a->more >= PLAN_MOST ? MISSING : (double)a->more;
}

void plan_json(const protocol *p, const figure *f, const figure *spacing, textbuf *out) {
    text_add(out, "\"plan\": [");
    for (size_t i = 0; i < p->n_goals; i++) {
        const width_goal *g = &p->goals[i];
        const figure *about = planned_figure(g->quantity, f, spacing);
        plan_answer a = { PLAN_NEVER, MISSING, MISSING }, repeat = a;
        if (about && isfinite(about->m.value)) {
            plan_state s = state_of(about);
            a = plan_micrographs(&s, g->half_width, 0.95);
            s.common.u = 0.0;
            repeat = plan_micrographs(&s, g->half_width, 0.95);
        }
        text_addf(out, "%s{\"quantity\": ", i ? ", " : "");
        json_string(out, g->quantity);
        member(out, "half_width", g->half_width);
        member(out, "now", a.now);
        member(out, "more_micrographs", number_of(&a));
        member(out, "smallest", a.smallest);
        member(out, "now_repeat", repeat.now);
        member(out, "more_micrographs_repeat", number_of(&repeat));
        text_add(out, "}");
    }
    text_add(out, "]");
}

#define GUARD 1.6448536269514722 /* half-width of a 90 % interval, normal law */

long plan_verdict(const target *t, const figure *f, const figure *spacing, textbuf *advice) {
    const figure *about = planned_figure(t->quantity, f, spacing);
    if (!about || !isfinite(about->m.value) || about->micrographs == 0) return PLAN_NEVER;
    if (!isfinite(about->m.u_sampling)) {
        text_add(advice, "how the micrographs differ is not known yet: 2 more would say it");
        return 2;
    }
    plan_state s = state_of(about);
    s.sampling.dof = s.common.dof = HUGE_VAL;
    if (t->error == ERROR_REPEAT) s.common.u = 0.0;
    plan_answer a = plan_micrographs(&s, GUARD * target_settling_u(t, about->m.value), 0.9);
    if (!isfinite(a.now)) return PLAN_NEVER;
    if (a.more == PLAN_NEVER && s.common.u > 0.0)
        text_addf(advice, "more micrographs cannot settle it: the %s own uncertainty is larger than the distance to the limit",
                  about->u_px > about->m.u_method ? "pixel size's" : "method's");
    else if (a.more == PLAN_NEVER)
        text_add(advice, "more micrographs cannot settle it: the value lies on the limit");
    else if (a.more >= PLAN_MOST)
        text_addf(advice, "even %d more micrographs would not settle it", PLAN_MOST);
    else if (a.more > 0)
        text_addf(advice, "%ld more micrograph%s would settle it", a.more, a.more == 1 ? "" : "s");
    return a.more;
}

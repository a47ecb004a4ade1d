/* Nested analysis of variance against two classical tables of data with their published analyses. */
#include "check.h"
#include "metrics/anova.h"

static void turnip_greens(void) {
    static const double v[] = { 3.28, 3.09, 3.52, 3.48, 2.88, 2.80, 2.46, 2.44, 1.87, 1.92, 2.19, 2.19,
                                2.77, 2.66, 3.74, 3.44, 2.55, 2.55, 3.78, 3.87, 4.07, 4.12, 3.31, 3.31 };
    static const char src[] = "Snedecor G.W., Cochran W.G., Statistical Methods: calcium in turnip greens, 4 plants, 3 leaves each, "
                              "2 determinations each (data from memory, the published mean squares agree)";
    int label[48];
    for (int k = 0; k < 24; k++) {
        label[2 * k] = k / 6;
        label[2 * k + 1] = k / 2 % 3; /* leaves are numbered anew on each plant */
    }
    anova a;
    error e = { 0 };
    CHECK(anova_nested(v, label, 24, 2, &a, &e) == ST_OK);
    CHECK_SOURCE(a.line[0].dof, 3, 0, src);
    CHECK_SOURCE(a.line[1].dof, 8, 0, src);
    CHECK_SOURCE(a.line[2].dof, 12, 0, src);
    CHECK_SOURCE(a.line[0].ss / 3.0, 2.5201, 5e-5, src);
    CHECK_SOURCE(a.line[1].ss / 8.0, 0.3288, 5e-5, src);
    CHECK_SOURCE(a.line[2].ss / 12.0, 0.0067, 5e-5, src);
    CHECK_SOURCE(a.line[0].variance, 0.3652, 5e-5, src);
    CHECK_SOURCE(a.line[1].variance, 0.1610, 1e-4, src); /* from rounded mean squares */
}

static void dyestuff(void) {
    static const double v[] = { 1545, 1440, 1440, 1520, 1580, 1540, 1555, 1490, 1560, 1495, 1595, 1550, 1605, 1510, 1560,
                                1445, 1440, 1595, 1465, 1545, 1595, 1630, 1515, 1635, 1625, 1520, 1455, 1450, 1480, 1445 };
    static const char src[] = "Davies O.L. 1957, Statistical Methods in Research and Production: yield of dyestuff, 6 batches of 5 "
                              "(data from memory, the published analysis agrees)";
    int label[30];
    for (int k = 0; k < 30; k++) label[k] = 70 - k / 5;
    anova a;
    error e = { 0 };
    CHECK(anova_nested(v, label, 30, 1, &a, &e) == ST_OK);
    CHECK_SOURCE(a.mean, 1527.5, 1e-9, src);
    CHECK_SOURCE(a.line[0].ss, 56357.5, 1e-6, src);
    CHECK_SOURCE(a.line[1].ss, 58830.0, 1e-6, src);
    CHECK_SOURCE(a.line[1].variance, 2451.25, 1e-6, src);
    CHECK_SOURCE(a.line[0].variance, 1764.05, 1e-6, src);
}

int main(void) {
    turnip_greens();
    dyestuff();
    return check_done();
}

/* px become nm in one place: powers, the parts of the uncertainty, the JSON of the budget. */
#include "app/quantities.h"
#include "check.h"
#include "metrics/student.h"

int main(void) {
    measured spacing = { 41.37, 0.31, 0.83, 512 }, density = { 6.2e-4, 7.1e-6, 0.0, 512 };
    figure a = figure_in_nm(&spacing, 1, 7.9, 0.013), b = figure_in_nm(&density, -2, 7.9, 0.013);
    CHECK_NEAR(a.m.value, 41.37 * 7.9, 1e-9);
    CHECK_NEAR(a.u_px, 41.37 * 7.9 * 0.013, 1e-9);
    CHECK_NEAR(figure_u(&a), sqrt(pow(0.31 * 7.9, 2) + pow(0.83 * 7.9, 2) + pow(41.37 * 7.9 * 0.013, 2)), 1e-9);
    CHECK_NEAR(b.m.value, 6.2e-4 / (7.9e-3 * 7.9e-3), 1e-9); /* per um2 */
    CHECK_NEAR(b.u_px / b.m.value, 2.0 * 0.013, 1e-12);      /* an area feels the pixel size twice */

    figure unknown = figure_in_nm(&spacing, 1, (double)NAN, (double)NAN);
    CHECK(isnan(unknown.m.value) && isnan(figure_u(&unknown)));
    measured ratio = { 1.4, 0.02, 0.0, 512 };
    figure r = figure_in_nm(&ratio, 0, (double)NAN, (double)NAN); /* a ratio needs no pixel size */
    CHECK_NEAR(r.m.value, 1.4, 0.0);
    CHECK_NEAR(figure_u(&r), 0.02, 1e-15);

    /* the parts add up; method = detection and definition; dof and k by Welch-Satterthwaite and Student */
    a.dof_sampling = 6.0;
    figure_detection(&a, QUANTITY_HEX, 0.005);
    CHECK_NEAR(a.u_detection, 0.5 * 0.005 * a.m.value, 1e-12);
    budget_total all = figure_total(&a);
    CHECK_NEAR(all.u, figure_u(&a), 1e-12);
    double s4 = pow(0.31 * 7.9, 4) / 6.0, d4 = pow(a.u_detection, 4) / 12.5, p4 = pow(a.u_px, 4) / 50.0,
           m4 = pow(pow(0.83 * 7.9, 2) - pow(a.u_detection, 2), 2) / 12.5;
    CHECK_NEAR(all.dof, pow(all.u, 4) / (s4 + d4 + p4 + m4), 1e-9);
    CHECK_NEAR(all.k, student_t_at(0.975, all.dof), 1e-12);
    figure_detection(&a, QUANTITY_DENSITY, 1.0);
    CHECK_NEAR(a.u_detection, a.m.u_method, 0.0); /* never more than the whole */
    static figure f[QUANTITIES];
    for (int q = 0; q < QUANTITIES; q++) f[q].m.value = (double)NAN;
    f[QUANTITY_HEX] = a;
    textbuf json = { 0 };
    figures_json(f, &json);
    static const char *const words[] = { "\"spacing_hex_nm\": {\"sampling\": 2.45", "\"within\": 2.45", "\"between\": null",
                                         "\"detection\": 6.56", "\"definition\": 0,", "\"pixel_size\": 4.25", "\"combined\": ",
                                         "\"dof\": ", "\"k\": 2.", "\"lo\": ", "\"hi\": ", "\"n\": 512" };
    for (size_t i = 0; i < sizeof words / sizeof words[0]; i++) CHECK(json.s && strstr(json.s, words[i]));
    text_free(&json);

    /* every column of the table exists in images.csv and is followed by its twin */
    for (int q = 0; q < QUANTITIES; q++) {
        const quantity_map *map = &quantity_table[q];
        size_t at = n_image_columns;
        for (size_t c = 0; c < n_image_columns; c++)
            if (!strcmp(image_columns[c].name, map->name)) at = c;
        CHECK(at + 1 < n_image_columns);
        if (at + 1 >= n_image_columns) continue;
        CHECK(image_columns[at].offset == map->in_image);
        CHECK(image_columns[at + 1].offset == map->in_image + sizeof(double));
        CHECK(!strncmp(image_columns[at + 1].name, map->name, strlen(map->name)));
    }
    return check_done();
}

/* px become nm in one place: powers, the parts of the uncertainty, the JSON of the budget. */
#include "app/quantities.h"
#include "check.h"

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

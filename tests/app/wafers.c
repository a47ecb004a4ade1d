/* Evenness per wafer: samples grouped by lot and wafer, quantities missing, places unknown. */
#include "app/wafers.h"

#include <cjson/cJSON.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"

int main(void) {
    static char L1[] = "L1", L2[] = "L2", W1[] = "W1", none[] = "";
    sample_row rows[9];
    double x[9], y[9];
    for (size_t i = 0; i < 9; i++) { /* L1 W1, L2 W1 in turn; then three of no wafer */
        rows[i] = (sample_row){ .lot = i % 2 ? L2 : L1, .wafer = i < 6 ? W1 : none, .spacing_nm = 300.0 + 10.0 * (double)i,
                                .density_per_um2 = i == 4 ? MISSING : 9.0, .weighted_reflectance = MISSING };
        x[i] = i < 6 ? 40.0 * (double)(i / 2) : 10.0 * (double)i;
        y[i] = 0.0;
    }
    textbuf json = { 0 }, lines = { 0 };
    error e = { 0 };
    CHECK(wafers_describe(rows, x, y, 9, &json, &lines, &e) == ST_OK);
    cJSON *all = cJSON_Parse(json.s);
    CHECK(cJSON_GetArraySize(all) == 3); /* two spacings, the density of L2 only */
    const cJSON *first = cJSON_GetArrayItem(all, 0), *delta = cJSON_GetObjectItem(first, "edge_minus_centre");
    CHECK(cJSON_IsNumber(delta) && fabs(delta->valuedouble - 40.0) < 1e-9);
    CHECK(lines.s && strstr(lines.s, "spacing on wafer L1 W1: edge less centre +40 nm (+13 %)") && strstr(lines.s, "on wafer L2 W1"));
    cJSON_Delete(all);
    text_free(&json);
    text_free(&lines);
    for (size_t i = 0; i < 9; i++) x[i] = MISSING;
    CHECK(wafers_describe(rows, x, y, 9, &json, &lines, &e) == ST_OK && !strcmp(json.s, "[]") && lines.n == 0);
    text_free(&json);
    text_free(&lines);
    mem_fail_after(1);
    CHECK_FAILS(wafers_describe(rows, x, y, 9, &json, &lines, &e), ST_NO_MEMORY, e, "not enough memory");
    mem_fail_after(0);
    text_free(&json);
    text_free(&lines);
    return check_done();
}

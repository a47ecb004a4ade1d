/* Model error and diffraction orders: nodes, interpolation, clamping, the break at the opening of orders,
 * refusals. */
#include "optics/trust.h"

#include "base/mem.h"
#include "check.h"
#include "optics_data.h"

static double u_of(double p, double h) {
    double u, bias;
    trust_model(p * 700, h * 700, 700, &u, &bias);
    return 100 * u;
}
static double bias_of(double p, double h) {
    double u, bias;
    trust_model(p * 700, h * 700, 700, &u, &bias);
    return 100 * bias;
}

static void table(void) {
    static const char SOURCE[] = "rigorous coupled-wave calculations, table of u and mean error";
    static const struct {
        double p, h, u, bias;
    } nodes[] = { { 0.10, 0.10, 1.15, 1.1 },    { 0.10, 1.50, 0.17, -0.1 },   { 0.15, 2.0, 0.12, -0.1 },
                  { 0.40, 0.20, 7.58, -5.8 },   { 0.60, 0.60, 1.66, -1.1 },   { 0.90, 0.40, 4.65, -2.8 },
                  { 1.12, 0.30, 6.35, -4.6 },   { 1.20, 0.30, 24.76, -24.5 }, { 1.50, 1.00, 9.38, -8.8 },
                  { 2.00, 0.15, 20.33, -19.4 }, { 2.50, 2.00, 5.80, -4.7 } };
    for (size_t i = 0; i < sizeof nodes / sizeof nodes[0]; i++) {
        CHECK_SOURCE(u_of(nodes[i].p, nodes[i].h), nodes[i].u, 1e-9, SOURCE);
        CHECK_SOURCE(bias_of(nodes[i].p, nodes[i].h), nodes[i].bias, 1e-9, SOURCE);
    }
    /* Middle of a cell in the logarithm: the mean of its four corners. */
    CHECK_NEAR(u_of(sqrt(0.2 * 0.25), sqrt(0.3 * 0.4)), (2.52 + 1.07 + 3.23 + 1.63) / 4, 1e-9);
    CHECK_NEAR(bias_of(sqrt(0.2 * 0.25), sqrt(0.3 * 0.4)), (1.3 - 0.2 + 0.4 - 0.7) / 4, 1e-9);
    /* Cells without a calculation carry the nearest of their row. */
    CHECK_NEAR(u_of(0.10, 2.0), 0.17, 1e-9);
    CHECK_NEAR(u_of(2.0, 0.10), 20.33, 1e-9);
    CHECK_NEAR(bias_of(2.5, 0.10), -23.1, 1e-9);
    /* Shallow: in proportion to height; flat: none. */
    CHECK_NEAR(u_of(0.3, 0.05), 0.5 * 3.62, 1e-9);
    CHECK_NEAR(bias_of(0.3, 0.025), 0.25 * 2.5, 1e-9);
    CHECK_NEAR(u_of(0.3, 0), 0, 0);
    /* Held at the ends. */
    CHECK_NEAR(u_of(0.02, 0.4), 1.26, 1e-9);
    CHECK_NEAR(u_of(0.02, 9), 0.17, 1e-9);
    CHECK_NEAR(u_of(7, 0.3), 32.22, 1e-9);
    CHECK_NEAR(u_of(0.6, 5), 0.16, 1e-9);
    /* Never across 2/sqrt(3): the row of 1.12 up to there, the row of 1.20 from there. */
    CHECK_NEAR(u_of(1.154, 0.3), 6.35, 1e-9);
    CHECK_NEAR(u_of(1.1548, 0.3), 24.76, 1e-9);
}

static void orders(void) {
    /* sqrt(3)/2 x 400 = 346.41 nm */
    CHECK(trust_orders(400, 346, 0, 1, 5) == ORDERS_IN_AMBIENT &&
          trust_orders(400, 347, 0, 1, 5) == ORDERS_IN_SUBSTRATE);
    CHECK(trust_orders(400, 346.41 * 3.5 - 1, 0, 1, 3.5) == ORDERS_IN_SUBSTRATE);
    CHECK(trust_orders(400, 346.41 * 3.5 + 1, 0, 1, 3.5) == ORDERS_NONE);
    CHECK(trust_orders(400, 346.41 * 1.5 - 1, 0, 1.5, 3.5) ==
          ORDERS_IN_AMBIENT); /* in glass they open earlier */
    CHECK(trust_orders(400, 346.41 * 1.5 - 1, 30, 1, 3.5) == ORDERS_IN_AMBIENT);
    CHECK(trust_orders(400, 346.41 * 1.5 + 1, 30, 1, 3.5) == ORDERS_IN_SUBSTRATE);
}

static void shares(void) {
    material si = data_material("silicon");
    sun s = data_sun();
    order_shares o = { 0 };
    error e = { 0 };
    CHECK(trust_shares(60, 0, 1, &si, &s, 300, 1200, &o, &e) == ST_OK);
    CHECK(o.none > 0.95 && o.in_ambient < 1e-12);
    CHECK(trust_shares(5000, 0, 1, &si, &s, 300, 1200, &o, &e) ==
          ST_OK); /* F-25: pyramids are out of the model */
    CHECK_NEAR(o.in_ambient, 1, 1e-12);
    double before = 1;
    for (double spacing = 60; spacing < 1500; spacing *= 1.3) {
        CHECK(trust_shares(spacing, 20, 1, &si, &s, 300, 1200, &o, &e) == ST_OK);
        CHECK_NEAR(o.none + o.in_substrate + o.in_ambient, 1, 1e-12);
        CHECK(o.none >= -1e-15 && o.in_substrate >= -1e-12 && o.in_ambient >= -1e-15);
        CHECK(o.none <= before + 1e-12);
        before = o.none;
    }
    CHECK_FAILS(trust_shares(0, 0, 1, &si, &s, 300, 1200, &o, &e), ST_BAD_INPUT, e, "spacing above 0");
    CHECK_FAILS(trust_shares(300, 90, 1, &si, &s, 300, 1200, &o, &e), ST_BAD_INPUT, e, "below 90 degrees");
    CHECK_FAILS(trust_shares(300, 0, 1, &si, &s, 200, 1200, &o, &e), ST_BAD_INPUT, e,
                "silicon is tabled from");
    CHECK_FAILS(trust_shares(300, 0, 1, &si, &s, 270, 1200, &o, &e), ST_BAD_INPUT, e, "solar spectrum");
    mem_fail_after(1);
    CHECK_FAILS(trust_shares(300, 0, 1, &si, &s, 300, 1200, &o, &e), ST_NO_MEMORY, e, "memory");
    mem_fail_after(0);
    material_free(&si), sun_free(&s);
}

int main(void) {
    table();
    orders();
    shares();
    return check_done();
}

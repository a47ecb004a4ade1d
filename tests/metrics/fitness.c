/* Blur, noise, streaks and jitter put into planes on purpose come back; verdicts follow the limits on both
 * sides. */
#include "metrics/fitness.h"

#include "base/flags.h"
#include "base/mem.h"
#include "check.h"
#include "metrics/filter.h"
#include "planes.h"

enum { NX = 512, NY = 384 };
static const double d_px = 24.0;

static void cones(float *f, uint64_t seed) {
    dice d = { seed };
    memset(f, 0, NX * NY * sizeof *f);
    hexagonal(f, NX, NY, d_px, 0.14, 1.0, 0.62 * d_px, raise_cone, &d);
}

static sharpness looked(float *f) {
    error e = { 0 };
    sharpness s = { 0 };
    plane p = { .px = f, .nx = NX, .ny = NY, .bit_depth = 8 };
    CHECK(flatten(&p, f, &e) == ST_OK);
    CHECK(fitness_look(f, &p, d_px, &s, NULL, &e) == ST_OK);
    return s;
}

static void check_blur(float *f) {
    static const double blur[] = { 0.0, 0.06, 0.12, 0.20, 0.30 };
    error e = { 0 };
    for (size_t i = 0; i < sizeof blur / sizeof *blur; i++)
        for (int noisy = 0; noisy < 2; noisy++) {
            dice d = { 17 + i };
            cones(f, 3 + i);
            CHECK(filter_gauss(f, NX, NY, blur[i] * d_px, f, &e) == ST_OK);
            add_noise(f, NX * NY, noisy ? 0.10 : 0.002, &d); /* the second: steps of 8 bit */
            sharpness s = looked(f);
            if (i == 4 && noisy)
                CHECK(s.blur_sd_px / d_px > 0.15 && s.blur_sd_px / d_px < 0.33); /* drowned: a lower limit */
            else if (i)
                CHECK_NEAR(s.blur_sd_px / d_px, blur[i], noisy ? 0.05 : 0.035);
            else
                CHECK(s.blur_sd_px / d_px < 0.10);
            CHECK_NEAR(s.noise_sd / (noisy ? 0.10 : 0.002), 1.0, noisy ? 0.03 : 0.6);
        }
    dice d = { 5 };
    memset(f, 0, NX * NY * sizeof *f);
    add_noise(f, NX * NY, 0.1, &d);
    sharpness s = looked(f);
    CHECK(isnan(s.blur_sd_px) && s.texture_sd < 0.02 &&
          s.streaks < 0.05 * 0.1 * 0.1 / (s.texture_sd * s.texture_sd));
}

static void check_streaks(float *f) {
    for (int i = 0; i < 4; i++) {
        double share = (double[]){ 0.0, 0.03, 0.2, 1.5 }[i];
        dice d = { 101 };
        cones(f, 21);
        sharpness clean = looked(f);
        for (size_t y = 0; y < NY; y++) {
            float offset = (float)(sqrt(share) * clean.texture_sd * dice_normal(&d));
            for (size_t x = 0; x < NX; x++) f[y * NX + x] += offset;
        }
        sharpness s = looked(f);
        double want = share / (1.0 + share); /* the streaks are part of the variance they are divided by */
        if (i)
            CHECK_NEAR(s.streaks / want, 0.8, 0.35); /* cautious: what the gap may hide is left out */
        else
            CHECK(s.streaks < 0.01);
    }
    float *g = plane_new(NX, NY); /* rows of a perfect lattice are no streaks */
    dice d = { 3 };
    hexagonal(g, NX, NY, d_px, 0.0, 1.0, 0.6 * d_px, raise_cone, &d);
    CHECK(looked(g).streaks < 0.01);
    free(g);
}

static void check_jitter(float *f) {
    float *g = plane_new(NX, NY);
    dice d = { 8 };
    cones(f, 33);
    CHECK(looked(f).line_jitter_px < 0.15);
    for (size_t y = 0; y < NY; y++) {
        double shift = 1.2 * dice_normal(&d);
        for (size_t x = 0; x < NX; x++) {
            double at = fmin(fmax((double)x + shift, 0.0), NX - 1.001), t = at - floor(at);
            const float *row = f + y * NX + (size_t)at;
            g[y * NX + x] = (float)((1.0 - t) * (double)row[0] + t * (double)row[1]);
        }
    }
    CHECK_NEAR(looked(g).line_jitter_px, 1.2 * sqrt(2.0), 0.3);
    free(g);
}

/* A texture without fault, to be spoilt one figure at a time. */
static texture sound(void) {
    measured m = { 24.0, 0.1, 0.0, 900 };
    texture t = { .spacing_acf = m, .spacing_hex = m, .n_features = 900, .ring_z = 30.0 };
    t.stretch = (measured){ 1.01, 0.01, 0.0, 900 };
    t.stretch_angle_deg = (measured){ 33.0, 20.0, 0.0, 900 };
    t.clark_evans = (measured){ 1.6, 0.01, 0.0, 900 };
    return t;
}

typedef struct {
    flags reasons, remarks;
} verdict;
static verdict judged(const sharpness *s, const plane *p, texture t) {
    measure_options o = measure_defaults();
    fitness_judge(s, p, &o, &t);
    return (verdict){ t.reasons, t.flags };
}

#define IS(v, r, f) CHECK((v).reasons == (r) && (v).remarks == (f))

static void check_verdict(void) {
    float px[4] = { 0 };
    plane p = { .px = px, .nx = 2, .ny = 2, .bit_depth = 8 };
    sharpness s = { .blur_sd_px = 0.7, .noise_sd = 0.01, .texture_sd = 0.2, .second_px = (double)NAN };
    texture t = sound();
    IS(judged(&s, &p, t), 0, 0);
    t.n_features = 199;
    IS(judged(&s, &p, t), 0, FLAG(SMALL_COUNT));
    t.n_features = 49;
    IS(judged(&s, &p, t), FLAG(FEW_FEATURES), 0);
    t = sound();
    t.spacing_hex.value = 11.9;
    IS(judged(&s, &p, t), 0, FLAG(LOW_RESOLUTION));
    t.spacing_hex.value = 7.9;
    IS(judged(&s, &p, t), FLAG(FEW_PIXELS), 0);
    t = sound();
    s.blur_sd_px = 0.13 * 24.0;
    IS(judged(&s, &p, t), 0, FLAG(UNSHARP));
    s.blur_sd_px = 0.26 * 24.0;
    IS(judged(&s, &p, t), FLAG(BLURRED), 0);
    s.blur_sd_px = 0.16 * 24.0;
    t.size_gsd.value = 1.5;
    IS(judged(&s, &p, t), FLAG(BLURRED), FLAG(UNSHARP));
    t = sound();
    s.blur_sd_px = (double)NAN;
    IS(judged(&s, &p, t), 0, 0);
    s.noise_sd = 0.4;
    IS(judged(&s, &p, t), 0, FLAG(NOISY));
    s.noise_sd = 0.6;
    IS(judged(&s, &p, t), FLAG(NOISY), 0);
    t.spacing_hex.value = 60.0; /* the same noise over wider features */
    IS(judged(&s, &p, t), 0, 0);
    t = sound();
    s.noise_sd = 0.01;
    s.streaks = 0.1;
    IS(judged(&s, &p, t), 0, FLAG(STREAKS));
    s.streaks = 1.2;
    IS(judged(&s, &p, t), FLAG(STREAKS), 0);
    s.streaks = 0.0;
    p.clipped_low = 0.01;
    p.clipped_high = 0.02;
    IS(judged(&s, &p, t), 0, FLAG(CLIPPED));
    p.clipped_high = 0.5;
    IS(judged(&s, &p, t), FLAG(CLIPPED), 0);
    p.clipped_low = p.clipped_high = 0.0;
    t.stretch.value = 1.15;
    IS(judged(&s, &p, t), 0, FLAG(STRETCHED));
    t.stretch_angle_deg.value = 88.0;
    IS(judged(&s, &p, t), 0, FLAG(STRETCHED) | FLAG(DRIFT));
    t.stretch.value = 1.8;
    IS(judged(&s, &p, t), FLAG(DRIFT), FLAG(STRETCHED) | FLAG(DRIFT));
    t.stretch_angle_deg.value = 45.0;
    IS(judged(&s, &p, t), FLAG(TILTED), FLAG(STRETCHED));
    t = sound();
    s.line_jitter_px = 2.0;
    IS(judged(&s, &p, t), 0, FLAG(DRIFT));
    s.line_jitter_px = 4.0;
    IS(judged(&s, &p, t), FLAG(DRIFT), 0);
    s.line_jitter_px = 0.0;
    s.fine = (fine_anisotropy){ 0.0, 9.0, 20.0, 0.5 }; /* smeared by 3 px along 45 deg */
    IS(judged(&s, &p, t), 0, FLAG(ASTIGMATIC));
    t.stretch = (measured){ 1.15, 0.02, 0.0, 900 };
    t.stretch_angle_deg.value = 50.0; /* what the smear makes of the spacing */
    IS(judged(&s, &p, t), 0, FLAG(ASTIGMATIC));
    t.stretch_angle_deg.value = 110.0;
    IS(judged(&s, &p, t), 0, FLAG(STRETCHED) | FLAG(ASTIGMATIC));
    t = sound();
    s.fine.u = (double)NAN;
    IS(judged(&s, &p, t), 0, 0);
    s.second_px = 60.0;
    IS(judged(&s, &p, t), 0, FLAG(TWO_SPACINGS));
    s.second_px = (double)NAN;
    t = sound();
    t.spacing_acf.value = (double)NAN;
    IS(judged(&s, &p, t), 0, FLAG(NO_RING));
    t.clark_evans.value = 1.1;
    IS(judged(&s, &p, t), FLAG(NO_RING), 0);
    measure_options any = measure_defaults();
    any.min_order = 1.0;
    texture same = t;
    fitness_judge(&s, &p, &any, &same);
    CHECK(!same.reasons && same.flags == FLAG(NO_RING));
    t.ring_z = 3.0;
    t.n_features = 0;
    IS(judged(&s, &p, t), FLAG(NO_RING), 0);
    t.ring_z = (double)NAN;
    t.reasons = FLAG(FEATURELESS);
    IS(judged(&s, &p, t), FLAG(FEATURELESS), 0);
}

static void check_no_memory(float *f) {
    plane p = { .px = f, .nx = NX, .ny = NY, .bit_depth = 8 };
    sharpness s;
    error e;
    for (size_t n = 1; n <= 6; n++) {
        mem_fail_after(n);
        CHECK_FAILS(fitness_look(f, &p, d_px, &s, NULL, &e), ST_NO_MEMORY, e, "memory");
    }
    mem_fail_after(0);
}

int main(void) {
    float *f = plane_new(NX, NY);
    check_blur(f);
    check_streaks(f);
    check_jitter(f);
    check_verdict();
    check_no_memory(f);
    free(f);
    return check_done();
}

/* Blur, noise, streaks, line jitter; and the verdict on a micrograph.
 *
 * Blur. A surface of hillocks that touch has creases; the power of a crease falls as k^-5 in two dimensions.
 * On rendered cones, paraboloids and bells (hexagonal to nearly random, 12 to 110 px, no blur) the mean
 * power of the band 0.8 to 1.4 per spacing exceeds that of a band about x per spacing by
 * exp(0.65 + 5 ln x), +-0.8, from x = 1.8 to 14. A probe of sd b multiplies the spectrum by
 * exp(-4 pi^2 b^2 k^2): b is the blur that must be undone for the highest band above the noise to come back
 * to that law. Textures without blur come out below 0.06 spacings (0.11 in strong noise); rendered blurs of
 * 0.12, 0.20 and 0.30 spacings within 0.04 (a blurred picture clipped afterwards: 0.15 instead of 0.30, the
 * edges of the clipping look sharp). Rough or edge-bright pictures fall more slowly and look sharper than
 * they are, never blurrier. Only bands within exp(10.5) of the ring are believed: below that lie the side
 * lobes of windows and of truncated filters.
 * Noise. Level of the spectrum between 0.46 and 0.5 per px. Immerkaer's estimate counts sharp texture as
 * noise, so the smaller of the two is taken.
 * Streaks. What charging leaves runs along x: power in the columns |kx| <= 3 of the spectrum beyond that of
 * the columns 8 to 14 (brought to the same |k| by the radial mean). Means without outliers over bands of ky
 * outside 0.45 to 2 per spacing keep the spots of a lattice out; the gap is filled with the lower of its
 * sides.
 * Line jitter. Shift between neighbouring lines by least squares on the gradient; the second
 * difference keeps what changes from line to line, and the same figure of the columns removes texture and
 * noise.
 * Astigmatism: smear.c. */
#include "metrics/fitness.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "metrics/filter.h"
#include "metrics/spacing.h"

measure_options measure_defaults(void) {
    return (measure_options){
        .relief = RELIEF_AUTO,
        .min_px_per_spacing = 8.0, /* at 6 px the density is 5 % off, at 8 px 1 % */
        .warn_px_per_spacing = 12.0,
        .min_features = 50.0, /* in the whole field: sampling sd of the density 5 % */
        .warn_features = 200.0,
        .max_blur = 0.25, /* spacings: close features merge and the count drops */
        .warn_blur = 0.12,
        /* Saturated tops flatten the brightest few percent. Up to a third of the field at the ends of the
         * scale the density stays within 0.2 % and spacing_acf within 4 %; beyond a half there is more
         * plateau than texture. */
        .max_clipped = 0.50,
        .warn_clipped = 0.02,
        /* At 24 px per spacing; noise is averaged over the detector's width, so that d / 24 times as much is
         * borne. At 2.2 the density is 7 % off, from 2.7 on features are invented or lost by the score. */
        .max_noise = 2.5,
        .warn_noise = 1.25,
        /* Of the texture's variance. At 0.3 the density is 6 % off, at 0.5 the streaks decide stretch and
         * spacing. */
        .max_streaks = 0.40,
        .warn_streaks = 0.02,
        .max_stretch = 1.6, /* a tilt of 51 degrees */
        .warn_stretch = 1.06,
        .max_jitter = 0.15, /* the figure levels off at 0.17: features are torn, the density of weak orders is 15 % off */
        .warn_jitter = 0.05,
        .warn_astigmatism = 0.07,
        .scan_axis_deg = 5.0,
        .min_order = 1.3, /* points without any order that a detector can resolve: 1.36 to 1.43, blurred noise below */
        .warn_order = 1.5,
        .warn_contradiction = 0.15,
        .warn_size_gsd = 1.35,
        .warn_second = 1.4,
        .bright_level = 0.5,
        .min_ring_z = 6.0, /* noise reaches 5.7 */
    };
}

/* ---- blur and noise ---- */

static double power_between(const curve *psd, double k0, double k1, double floor, double undo) {
    double sum = 0.0, weight = 0.0;
    for (size_t i = 1; i < psd->n; i++) {
        double k = psd->points[i].x;
        if (k < k0 || k >= k1) continue;
        sum += k * (psd->points[i].y - floor) * exp(undo * k * k);
        weight += k;
    }
    return weight > 0.0 ? sum / weight : MISSING;
}

static double creased_fall(double x0, double x1) { return x0 < 1.6 ? 2.5 : 0.65 + 5.0 * log(sqrt(x0 * x1)); }

/* Blur to be undone for the band k0 .. k1, whose mean power beyond the noise is `level`, to obey the law. The band is taken as a
 * whole: undone at every frequency of its own, the noise left at its far end would outgrow it. */
static double undone(const curve *psd, double d, double floor, double k0, double k1, double level) {
    double want = creased_fall(k0 * d, k1 * d), low = 0.0, high = 0.6 * d;
    for (int i = 0; i < 50; i++) {
        double b = i ? 0.5 * (low + high) : 0.0, undo = 4.0 * PI * PI * b * b;
        double top = power_between(psd, 0.8 / d, 1.4 / d, floor, undo);
        double tail = level * exp(undo * k0 * k1);
        int enough = log(top / tail) < want;
        if (!i && enough) return 0.0;
        if (enough)
            high = b;
        else
            low = b;
    }
    return 0.5 * (low + high);
}

static double blur_of(const curve *psd, double d, double floor, size_t n_px) {
    static const double edge[] = { 1.4, 1.8, 2.2, 2.8, 3.5, 4.5, 5.6, 7.0, 9.0, 11.0, 14.0 };
    const double least_z = 3.0, most_fall = 10.5, end = 0.45;
    double first = power_between(psd, 0.8 / d, 1.4 / d, floor, 0.0);
    double modes =
        PI * (1.4 * 1.4 - 0.8 * 0.8) / (d * d) * (double)n_px / 4.0; /* half plane; the window costs half */
    if (!(first > least_z * floor / sqrt(modes)) || !(first > 0.0)) return MISSING;
    double blur = MISSING;
    for (size_t i = 0; i + 1 < sizeof edge / sizeof *edge && edge[i + 1] / d <= end; i++) {
        double k0 = edge[i] / d, k1 = edge[i + 1] / d, p = power_between(psd, k0, k1, floor, 0.0);
        double se = floor / sqrt(PI * (k1 * k1 - k0 * k0) * (double)n_px / 4.0);
        int visible = p > least_z * se && p > 0.3 * floor;
        if (!visible && i) break;
        /* Nothing beyond the ring stands out of the noise: at least as blurred as the noise allows. */
        if (!visible) return undone(psd, d, floor, k0, k1, fmax(p, 0.0) + least_z * se);
        if (log(first / p) > most_fall) break;
        blur = undone(psd, d, floor, k0, k1, p); /* the highest band decides: there blur weighs most, order least */
    }
    return blur;
}

/* Creases keep the spectrum of a texture above its noise far beyond the ring; where it ends early although the ring
 * stands high, the picture has lost its detail. */
static double finest_detail(const curve *psd, double d, double from, double floor) {
    const double step = 1.05, band = 1.04, end = 0.45;
    double x = from;
    for (; x / d < end; x *= step) {
        double p = power_between(psd, x / d / band, x / d * band, 0.0, 0.0);
        if (isfinite(p) && !(p > 2.0 * floor)) break;
    }
    return x;
}

/* ---- streaks ---- */

static int by_value(const void *a, const void *b) {
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

static double median(double *v, size_t n) {
    if (!n) return 0.0;
    qsort(v, n, sizeof *v, by_value);
    return n % 2 ? v[n / 2] : 0.5 * (v[n / 2 - 1] + v[n / 2]);
}

static double radial_power(const curve *psd, double k) {
    size_t low = 0, high = psd->n - 1;
    while (high - low > 1) {
        size_t mid = (low + high) / 2;
        if (psd->points[mid].x <= k)
            low = mid;
        else
            high = mid;
    }
    return psd->points[k - psd->points[low].x < psd->points[high].x - k ? low : high].y;
}

enum { STREAK_COLUMNS = 3, REFERENCE_FROM = 8, REFERENCE_TO = 14 };

/* Power of row ky in the streak columns beyond the reference columns, both signs of kx. */
static double excess(const float *p, const curve *psd, size_t nx, size_t ny, size_t j) {
    const float *row = p + j * (nx / 2 + 1);
    double ky = (double)j / (double)ny, here = 0.0, expected = 0.0, reference = 0.0, radial = 0.0;
    for (size_t i = 0; i <= STREAK_COLUMNS; i++) {
        double w = i ? 2.0 : 1.0;
        here += w * (double)row[i];
        expected += w * radial_power(psd, hypot(ky, (double)i / (double)nx));
    }
    for (size_t i = REFERENCE_FROM; i <= REFERENCE_TO; i++) {
        reference += (double)row[i];
        radial += radial_power(psd, hypot(ky, (double)i / (double)nx));
    }
    return here - (radial > 0.0 ? expected * reference / radial : 0.0);
}

/* Mean of v without its outliers: clipped at 6 medians of |v|, which costs an exponential variate 2 %. */
static double clipped_mean(double *v, size_t n, double *scratch) {
    for (size_t i = 0; i < n; i++) scratch[i] = fabs(v[i]);
    double cap = 6.0 * median(scratch, n), sum = 0.0;
    for (size_t i = 0; i < n; i++) sum += fmax(-cap, fmin(cap, v[i]));
    return n ? sum / (double)n : 0.0;
}

/* Sum of the excess over j0 <= j < j1, as count times mean in bands; first and last band on their own, too.
 * */
static double band_sum(const float *p, const curve *psd, size_t nx, size_t ny, size_t j0, size_t j1,
                       size_t bands, double *v, double *first, double *last) {
    double sum = 0.0;
    *first = *last = 0.0;
    for (size_t b = 0; b < bands && j1 > j0; b++) {
        size_t a = j0 + b * (j1 - j0) / bands, z = j0 + (b + 1) * (j1 - j0) / bands, n = 0;
        for (size_t j = a; j < z; j++) v[n++] = excess(p, psd, nx, ny, j);
        double m = clipped_mean(v, n, v + ny / 2 + 1);
        if (b == 0) *first = m;
        *last = m;
        sum += m * (double)n;
    }
    return sum;
}

static status streak_variance(const float *p, const curve *psd, size_t nx, size_t ny, double d, double *out,
                              error *e) {
    size_t nyquist = ny / 2, gap0 = nyquist, gap1 = nyquist;
    *out = 0.0;
    if (nx < 4 * REFERENCE_TO) return ST_OK;
    double *v = mem_array(2 * (nyquist + 1), sizeof *v), last_low, first_high, unused;
    if (!v) return NO_MEMORY(e, "the look for streaks");
    if (d > 0.0) {
        gap0 = (size_t)fmin(0.45 * (double)ny / d, (double)nyquist);
        gap1 = (size_t)fmin(2.0 * (double)ny / d, (double)nyquist);
    }
    size_t first = gap0 > 3 ? 3 : gap0; /* below lies uneven brightness */
    /* Few rows lie below the gap, and the texture's own scatter there is large: only what is beyond its
     * error counts. */
    double below = band_sum(p, psd, nx, ny, first, gap0, 1 + (gap0 - first) / 64, v, &unused, &last_low);
    double sum = below * (1.0 - 1.0 / sqrt((double)(gap0 - first + 1)));
    sum += band_sum(p, psd, nx, ny, gap1, nyquist, 8, v, &first_high, &unused);
    if (gap1 > gap0) {
        int low_known = gap0 > first + 3, high_known = nyquist > gap1 + 8;
        double level = low_known && high_known ? fmin(last_low, first_high)
                       : low_known             ? last_low
                                               : first_high;
        sum += fmax(0.0, level) * (double)(gap1 - gap0);
    }
    *out = fmax(0.0, 2.0 * sum / ((double)nx * (double)ny));
    free(v);
    return ST_OK;
}

/* ---- line jitter ---- */

/* Line `at` of f, along x (step 1) or y, smoothed with a box of 2 half + 1. */
static void take_line(const float *f, size_t start, size_t step, size_t n, size_t half, double *out) {
    double sum = 0.0;
    size_t width = 2 * half + 1;
    for (size_t i = 0; i < n; i++) {
        sum += (double)f[start + i * step];
        if (i >= width) sum -= (double)f[start + (i - width) * step];
        if (i + 1 >= width) out[i + 1 - width] = sum;
    }
}

static double line_shift(const double *a, const double *b, size_t n) {
    double num = 0.0, norm = 0.0;
    for (size_t i = 1; i + 1 < n; i++) {
        double g = 0.25 * (a[i + 1] - a[i - 1] + b[i + 1] - b[i - 1]);
        num -= (b[i] - a[i]) * g;
        norm += g * g;
    }
    return norm > 0.0 ? num / norm : 0.0;
}

/* Mean square of the second difference of the shifts, over groups of four lines spread over the field. */
static double shift_power(const float *f, size_t lines, size_t along, size_t line_step, size_t step,
                          size_t half, double *buffer) {
    enum { GROUPS = 160 };
    size_t n = along - 2 * half, groups = lines / 4 < GROUPS ? lines / 4 : GROUPS;
    double sum = 0.0, *l[4] = { buffer, buffer + along, buffer + 2 * along, buffer + 3 * along };
    for (size_t g = 0; g < groups; g++) {
        size_t first = g * (lines - 4) / groups;
        for (size_t i = 0; i < 4; i++) take_line(f, (first + i) * line_step, step, along, half, l[i]);
        double s = line_shift(l[1], l[2], n) - 0.5 * (line_shift(l[0], l[1], n) + line_shift(l[2], l[3], n));
        sum += s * s;
    }
    return groups ? sum / (double)groups : 0.0;
}

static status line_jitter(const float *f, size_t nx, size_t ny, double d, double *out, error *e) {
    size_t half = d > 0.0 ? (size_t)(d / 12.0) : 0, longer = nx > ny ? nx : ny, shorter = nx < ny ? nx : ny;
    *out = MISSING;
    if (!(d > 0.0) || shorter < 4 * half + 16) return ST_OK;
    double *buffer = mem_array(4 * longer, sizeof *buffer);
    if (!buffer) return NO_MEMORY(e, "the look for line jitter");
    double rows = shift_power(f, ny, nx, nx, 1, half, buffer),
           columns = shift_power(f, nx, ny, 1, nx, half, buffer);
    /* The scatter of a shift falls with the length of the line. Independent line offsets of variance v: the
     * second difference has 5 v, a shift between neighbours 2 v. */
    *out = sqrt(fmax(0.0, rows - columns * (double)ny / (double)nx) * 2.0 / 5.0);
    free(buffer);
    return ST_OK;
}

sharpness sharpness_unknown(void) {
    const double m = MISSING;
    return (sharpness){ m, m, m, m, m, m, m, m, m, { m, m, m, m } };
}

status fitness_look(const float *f, const plane *p, double d_px, sharpness *out, curve *psd, error *e) {
    size_t nx = p->nx, ny = p->ny;
    sharpness s = sharpness_unknown();
    curve radial = { 0 };
    double sum = 0.0, streaks = 0.0;
    float *power = mem_array(ny * (nx / 2 + 1), sizeof *power);
    status st = power ? psd2d(f, nx, ny, power, e) : NO_MEMORY(e, "the power spectrum");
    if (st == ST_OK) st = psd2d_radial(power, nx, ny, &radial, e);
    if (st == ST_OK) st = streak_variance(power, &radial, nx, ny, d_px, &streaks, e);
    if (st == ST_OK) st = line_jitter(f, nx, ny, d_px, &s.line_jitter_px, e);
    if (st == ST_OK) {
        for (size_t i = 0; i < nx * ny; i++) sum += (double)f[i] * (double)f[i];
        double floor = fmax(0.0, power_between(&radial, 0.46, 0.51, 0.0, 0.0));
        s.noise_sd = fmin(sqrt(floor), noise_sd(f, nx, ny));
        s.texture_sd = sqrt(fmax(0.0, sum / (double)(nx * ny) - s.noise_sd * s.noise_sd));
        if (s.texture_sd > 0.0) s.streaks = streaks / (s.texture_sd * s.texture_sd);
        if (d_px > 0.0) {
            s.blur_sd_px = blur_of(&radial, d_px, floor, nx * ny);
            s.detail = finest_detail(&radial, d_px, 1.2, floor);
            s.fine = smear_look(power, nx, ny, floor, d_px, s.detail / d_px);
            s.ring_over_noise = log(power_between(&radial, 0.8 / d_px, 1.4 / d_px, floor, 0.0) / fmax(floor, 1e-30));
        }
        s.finest_per_px = finest_detail(&radial, 1.0, 0.02, floor);
        s.second_px = spacing_second(&radial, d_px, nx, ny);
        *out = s;
        if (psd) {
            *psd = radial;
            radial.points = NULL;
        }
    }
    free(radial.points);
    free(power);
    return st;
}

/* ---- the verdict ---- */

static void limit(texture *t, double value, double warn, double max, flags remark, flags reason) {
    if (value > max)
        t->reasons |= reason;
    else if (value > warn)
        t->flags |= remark;
}

/* Smaller angle between two axes, deg. */
static double axes_apart(double a, double b) { return fabs(fmod(fabs(a - b) + 90.0, 180.0) - 90.0); }

/* Line jitter; then a smear of fine detail that neither it nor the stretch of the spacing explains: astigmatism. */
static void judge_smear(const sharpness *s, const measure_options *o, double d, texture *t) {
    const double least_z = 4.5, least_px = 0.3; /* sharp renders: up to 2.5, stretched ones 4.0 */
    smear m = smear_beyond(&s->fine, t->stretch.value, t->stretch.u_sampling, t->stretch_angle_deg.value);
    t->smear_px = m.smear_px;
    t->smear_angle_deg = m.angle_deg;
    t->smear_z = m.z;
    if (s->line_jitter_px > least_px) limit(t, s->line_jitter_px / d, o->warn_jitter, o->max_jitter, FLAG(DRIFT), FLAG(DRIFT));
    int shaken = ((t->flags | t->reasons) & FLAG(DRIFT)) != 0;
    if (!shaken && m.z > least_z && m.smear_px / d > o->warn_astigmatism) t->flags |= FLAG(ASTIGMATIC);
}

/* What a smear makes of the spacing's own figure: renders smeared by 0.12 spacings came out stretched by 1.01 to 1.17. */
static int smear_explains(const texture *t, double d) {
    const double per_smear = 1.5, same_axis_deg = 25.0;
    return (t->flags & FLAG(ASTIGMATIC)) && t->stretch.value - 1.0 < per_smear * t->smear_px / d &&
           axes_apart(t->smear_angle_deg, t->stretch_angle_deg.value) < same_axis_deg;
}

static void judge_stretch(const measure_options *o, double d, texture *t) {
    double stretch = t->stretch.value, u = isfinite(t->stretch.u_sampling) ? t->stretch.u_sampling : 0.0;
    double angle = t->stretch_angle_deg.value;
    int along = fmin(axes_apart(angle, 0.0), axes_apart(angle, 90.0)) < o->scan_axis_deg;
    if (stretch - 2.0 * u > o->max_stretch) t->reasons |= along ? FLAG(DRIFT) : FLAG(TILTED);
    if (stretch > o->warn_stretch && stretch - 1.0 > 3.0 * u && !smear_explains(t, d)) {
        t->flags |= FLAG(STRETCHED);
        if (along) t->flags |= FLAG(DRIFT);
    }
}

/* Blur merges features, and the spacing it is compared with grows with it: a ratio well below the limit
 * together with sizes spread too widely, or a relief that has lost its sign, is as bad as one above. Once most features
 * have merged, what is left looks like a coarser, smooth texture without blur; it gives itself away by lacking detail
 * that its noise would let through, by sizes wider than its order allows, and by a ring inside the spacing of what is left.
 * The three together: ln gsd - 0.5 ln(acf / hex) - 0.2 ln(detail / that of a sharp texture) exceeded 0.31 on 3 of 720 sharp renders
 * (6 patterns, 15 to 40 px per spacing, blur to 0.12 spacings) and on 91 % of those merged by 0.3 to 0.45 spacings that the blur
 * figure alone had missed. Two populations have wide sizes, too, but keep their detail (share 0.8 and more). */
static void judge_blur(const sharpness *s, double d, const measure_options *o, texture *t) {
    const double merged_gsd = 1.35, merged_score = 0.31, least_ring = 2.5, end = 0.45, most_ratio = 0.2, most_detail = 0.80;
    double expected = fmin(6.0, exp(0.16 + 0.17 * s->ring_over_noise));
    double blur = s->blur_sd_px / d;
    if (t->flags & FLAG(ASTIGMATIC)) blur = hypot(blur, sqrt(0.5) * t->smear_px / d); /* along the smear */
    int seen_to_end = s->detail / d >= end;
    double ratio = log(t->spacing_acf.value / t->spacing_hex.value);
    ratio = isfinite(ratio) ? fmin(most_ratio, fmax(-most_ratio, ratio)) : 0.0;
    double share = s->detail / expected, score = log(t->size_gsd.value) - 0.5 * ratio - 0.2 * log(share);
    int merged = score > merged_score || (t->flags & FLAG(RELIEF_UNSURE));
    if (merged && share < most_detail && !seen_to_end && s->ring_over_noise > least_ring) t->reasons |= FLAG(BLURRED);
    limit(t, blur, o->warn_blur, o->max_blur, FLAG(UNSHARP), FLAG(BLURRED));
    if (blur > o->warn_blur && (t->size_gsd.value > merged_gsd || (t->flags & FLAG(RELIEF_UNSURE))))
        t->reasons |= FLAG(BLURRED);
}

void fitness_judge(const sharpness *s, const plane *p, const measure_options *o, texture *t) {
    const double noise_at_px = 24.0; /* spacing at which the limits of noise hold */
    double d = t->spacing_hex.value;
    double n = fmax((double)t->n_found, (double)t->n_features); /* of the whole field, guard included */
    t->sharpness = (measured){ s->blur_sd_px, MISSING, isfinite(d) ? 0.03 * d : MISSING, t->n_features };
    t->noise_rel = (measured){ s->noise_sd / s->texture_sd, MISSING, 0.0, p->nx * p->ny };
    if (!(s->texture_sd > 0.0)) t->noise_rel.value = MISSING;
    t->second_spacing_px = s->second_px;
    t->clipped_share = p->clipped_low + p->clipped_high;
    limit(t, t->clipped_share, o->warn_clipped, o->max_clipped, FLAG(CLIPPED), FLAG(CLIPPED));
    if (t->ring_z < o->min_ring_z && !(t->reasons & FLAG(FEATURELESS))) t->reasons |= FLAG(NO_RING);
    /* No ring in a picture of good contrast that holds nothing finer than ten pixels: blur has taken it. */
    const double coarse_per_px = 0.1, low_noise = 1.0;
    if ((t->reasons & FLAG(NO_RING)) && s->finest_per_px > 0.0 && s->finest_per_px < coarse_per_px && t->noise_rel.value < low_noise)
        t->reasons |= FLAG(BLURRED);
    if (t->reasons & (FLAG(FEATURELESS) | FLAG(NO_RING)))
        return; /* further figures would describe the noise */
    limit(t, -n, -o->warn_features, -o->min_features, FLAG(SMALL_COUNT), FLAG(FEW_FEATURES));
    if (!isfinite(d)) return;
    limit(t, -d, -o->warn_px_per_spacing, -o->min_px_per_spacing, FLAG(LOW_RESOLUTION), FLAG(FEW_PIXELS));
    if (!isfinite(t->spacing_acf.value)) {
        if (t->clark_evans.value >= o->min_order)
            t->flags |= FLAG(NO_RING);
        else
            t->reasons |= FLAG(NO_RING);
    }
    judge_smear(s, o, d, t);
    judge_blur(s, d, o, t);
    limit(t, t->noise_rel.value * noise_at_px / d, o->warn_noise, o->max_noise, FLAG(NOISY), FLAG(NOISY));
    limit(t, s->streaks, o->warn_streaks, o->max_streaks, FLAG(STREAKS), FLAG(STREAKS));
    if (fabs(log(t->second_spacing_px / d)) >= log(o->warn_second)) t->flags |= FLAG(TWO_SPACINGS);
    judge_stretch(o, d, t);
}

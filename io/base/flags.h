/* Every flag and every reason of the program, with its meaning: one list that code, report and documentation
 * share. A flag is a remark on a row; a reason is why a micrograph does not enter its sample. Both print as
 * words separated by blanks, in the order of this list. */
#ifndef SWARD_BASE_FLAGS_H
#define SWARD_BASE_FLAGS_H
#include <stddef.h>
#include <stdint.h>

/* clang-format off */
#define FLAG_LIST(X)                                                                                                     \
    X(NO_PIXEL_SIZE,   no_pixel_size,   "no source states the pixel size; figures in px only")                          \
    X(FEW_PIXELS,      few_pixels,      "too few pixels per spacing")                                                    \
    X(FEW_FEATURES,    few_features,    "too few features in the field")                                                 \
    X(NO_RING,         no_ring,         "no spacing stands out of noise or random placement")                            \
    X(BLURRED,         blurred,         "the picture is too unsharp for its spacing")                                    \
    X(CLIPPED,         clipped,         "too many pixels at the darkest or brightest level of the file")                 \
    X(NOISY,           noisy,           "the noise is too strong for the texture's contrast")                            \
    X(STREAKS,         streaks,         "charging streaks along the scan lines")                                         \
    X(DRIFT,           drift,           "drift or vibration: scan lines shifted, or spacing that depends on a scan axis")    \
    X(TILTED,          tilted,          "the texture is stretched as by a tilted view")                                  \
    X(PX_WINDOW,       outside_px_window, "the pixel size lies outside the protocol's measure_between_px_nm: kept out, not measured") \
    X(FEATURELESS,     featureless,     "the picture has no contrast")                                                   \
    X(LOW_RESOLUTION,  low_resolution,  "few pixels per spacing: 8 to 12")                                               \
    X(SMALL_COUNT,     small_count,     "few features: statistics are wide")                                             \
    X(UNSHARP,         unsharp,         "mild blur")                                                                     \
    X(LOW_ORDER,       low_order,       "weakly ordered texture (Clark-Evans below 1.5): spacing_acf is biased")         \
    X(TWO_SPACINGS,    two_spacings,    "two populations: more than one ring")                                           \
    X(CONTRADICTION,   spacing_contradiction, "spacing_acf and spacing_hex differ beyond their known ratio")             \
    X(RELIEF_UNSURE,   relief_unsure,   "hillock or pore cannot be told from the picture; say it in the protocol")       \
    X(WIDE_SIZES,      wide_sizes,      "sizes spread so much that one spacing says little")                             \
    X(STRETCHED,       stretched,       "spacing depends on direction")                                                  \
    X(ASTIGMATIC,      astigmatic,      "astigmatism: fine detail is smeared in one direction, beyond any stretch of the spacing") \
    X(LAYER,           layer,           "a layer of bodies in contact: spacing_acf is the distance of neighbours; density and spacing_hex count the bare ground, too") \
    X(PX_DISAGREE,     px_sources_disagree, "two sources of the pixel size differ by more than 2 %")                    \
    X(PX_UNEQUAL,      px_unequal,      "pixels are not square: rows were resampled")                                        \
    X(PX_ODD,          px_implausible,  "the pixel size lies outside 0.01 nm to 100 um")                                 \
    X(COLOUR,          colour,          "colour file: measured by luminance")                                            \
    X(MANY_PAGES,      many_pages,      "more than one page: the largest was measured")                                  \
    X(DUPLICATE,       duplicate,       "the same bytes as another file: enters its sample once")                        \
    X(TIME_FROM_FILE,  time_from_file,  "etched_at is the file's own time")                                              \
    X(HEIGHT_ASSUMED,  height_assumed,  "height from the protocol or the default aspect, not measured")                  \
    X(ONE_MICROGRAPH,  one_micrograph,  "the sample rests on a single micrograph")                                       \
    X(BEYOND_MODEL,    beyond_model,    "texture too coarse for the graded-index model and not steep enough for facets: no reflectance is given") \
    X(DIFFRACTS,       diffracts,       "part of the light is diffracted into air: the model says nothing there")             \
    X(OUTSIDE_CALIBRATION, outside_calibration, "the sample lies outside what the link was calibrated on")               \
    X(LOSSY,           lossy,           "a lossy file: brightness statistics are altered")                              \
    X(TILT_CORRECTED,  tilt_corrected,  "a tilted view: y was stretched by 1/cos(tilt) before measuring")               \
    X(TILT_KNOWN,      tilt_known,      "a tilted view by the file's own word, not corrected")                          \
    X(MARKS,           marks_masked,    "a scale bar, letters or other marks drawn over the specimen were masked out of every measurement") \
    X(NAME_UNMATCHED,  name_unmatched,  "the name does not match the protocol's name_pattern: sample from its folder or its own name") \
    X(FILLED,          pixels_filled,   "pixels without a value (NaN) were filled from their neighbours")
/* clang-format on */

enum {
#define X(id, word, meaning) FLAG_BIT_##id,
    FLAG_LIST(X)
#undef X
        FLAG_COUNT
};
typedef uint64_t flags;
#define FLAG(id) ((flags)1 << FLAG_BIT_##id)

const char *flag_word(int bit);    /* "few_pixels"; bit in 0..FLAG_COUNT-1 */
const char *flag_meaning(int bit); /* the sentence of the list */
/* The words of all bits, blank-separated, into out (truncated to size); returned. 1024 bytes hold them all. */
const char *flags_text(flags f, char *out, size_t size);

#endif

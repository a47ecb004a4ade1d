/* What the model of a run says around its samples: the process window they lie in, and how the reflectance of some of them
 * grows with the angle of incidence. For results.json and the page. */
#ifndef SWARD_APP_SCENARIOS_H
#define SWARD_APP_SCENARIOS_H
#include "app/materials.h"
#include "app/protocol.h"
#include "base/text.h"
#include "report/rows.h"

/* The map of `sward window` around the samples of a run that have spacing and height, for the protocol's target of the
 * weighted reflectance (2 % without one).
 *   out  one JSON object as `sward window --json` prints it, or {"missing": sentence} where there is no map to make
 *   err  as window_fill */
status scenarios_window(const sample_row *rows, size_t n, int pores, const protocol *p, const setup *s, textbuf *out,
                        error *e);

/* The narrowest, the middle and the widest of those samples under 0 to 80 degrees, with flat silicon and flat silicon under 75 nm
 * of nitride beside them.
 *   out  {"samples": [{"sample", "sweep": as `sward predict --angles --json` prints it}]}, or {"missing": sentence}
 *   err  as predict() */
status scenarios_angles(const sample_row *rows, size_t n, int pores, const protocol *p, const setup *s, textbuf *out,
                        error *e);

#endif

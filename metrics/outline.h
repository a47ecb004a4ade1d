/* Bodies seen by their outlines: spheres with bright rims, flat plates, holes with bright walls. */
#ifndef SWARD_METRICS_OUTLINE_H
#define SWARD_METRICS_OUTLINE_H
#include "base/status.h"
#include "metrics/detect.h"

typedef struct {
    double radius_px;     /* of the circle on which the outlines lie; NAN: no outlines */
    int sign;             /* +1 brighter inside (hillocks), -1 darker (pores), 0 none */
    double concentration; /* how far the outlines agree on centres; 1 to 2 where they do not */
    double opposite;      /* the same for the other sign at radii about this one */
    double breadth;       /* the same at radii a third away / here: 1 where the radii are all different */
    double density;       /* places they agree on, 1/px2, on the part of the field looked at */
} outline;

/* A quick look at a sample of the field, at every radius.
 *   in   f flattened; sign +1, -1, or 0: whichever the outlines speak for
 *   err  ST_NO_MEMORY. out untouched on failure */
status outline_look(const float *f, size_t nx, size_t ny, int sign, outline *out, error *e);

/* One marker and one centre for each body of about this radius and of this sign, on the whole field.
 *   in   o radius_px and sign are used
 *   out  as detect() leaves it, but nothing of the scale is iterated: scale_px is that of the density found
 *   err  ST_NO_RESULT fewer than 5 bodies; ST_NO_MEMORY. out untouched on failure */
status outline_detect(const float *f, size_t nx, size_t ny, const outline *o, detection *out, error *e);

/* The bodies against features found by brightness.
 *   alike  share of the bodies that hold exactly one of the others, and that near the middle
 *   faint  share of the others that lie in no body and respond less than half as strongly as those in one
 *   apart  share of the others that lie in no body, not at the frame, and respond as strongly
 *   err    ST_NO_MEMORY */
typedef struct {
    double alike, faint, apart;
} outline_match;
status outline_compare(const detection *bodies, const detection *other, size_t nx, size_t ny,
                       outline_match *out, error *e);

#endif

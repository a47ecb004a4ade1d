#include "link/surface.h"

const char *height_source_name(height_source s) {
    static const char *const names[] = { "sheet", "calibrated", "protocol", "aspect", "default" };
    return names[s];
}

int height_is_assumed(height_source s) { return s >= HEIGHT_PROTOCOL; }

#include "report/rows.h"

#include <stdlib.h>

void image_row_free(image_row *r) {
    char *owned[] = { r->file, r->sample, r->status, r->reason, r->flags, r->px_source, r->relief };
    for (size_t i = 0; i < sizeof owned / sizeof owned[0]; i++) free(owned[i]);
    *r = (image_row){ 0 };
}

/* The strip is not looked for yet: nothing is cropped. */
#include "io/strip_priv.h"
size_t strip_find(const float *px, size_t nx, size_t ny) { (void)px, (void)nx, (void)ny; return 0; }

#include "io/libraries.h"

#include <cjson/cJSON.h>
#include <expat.h>
#include <png.h>
#include <stdio.h> /* jpeglib.h wants FILE */
#include <string.h>
#include <tiffio.h>

#include <jpeglib.h>

#define TEXT_OF(x) #x
#define TEXT(x) TEXT_OF(x)
#ifdef LIBJPEG_TURBO_VERSION
static const char jpeg_version[] = "turbo " TEXT(LIBJPEG_TURBO_VERSION);
#else
static const char jpeg_version[] = TEXT(JPEG_LIB_VERSION);
#endif

void io_libraries(library out[IO_LIBRARIES]) {
    const library all[IO_LIBRARIES] = { { "libpng", png_get_libpng_ver(NULL) },
                                        { "libtiff", TIFFGetVersion() },
                                        { "libjpeg", jpeg_version },
                                        { "expat", XML_ExpatVersion() },
                                        { "cJSON", cJSON_Version() } };
    memcpy(out, all, sizeof all);
}

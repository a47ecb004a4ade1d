/* Every ceiling of the program in one place. A file from a microscope is untrusted: nothing grows past these. */
#ifndef SWARD_BASE_LIMITS_H
#define SWARD_BASE_LIMITS_H

#define LIMIT_ALLOCATION_BYTES ((size_t)4 << 30) /* one block of memory */
#define LIMIT_FILE_BYTES ((size_t)1 << 30)       /* a micrograph file */
#define LIMIT_TEXT_FILE_BYTES ((size_t)64 << 20) /* sheet, protocol, spectrum, material */
#define LIMIT_SIDECAR_BYTES ((size_t)1 << 20)
#define LIMIT_PIXELS ((size_t)1 << 28)     /* of one micrograph, 268 million */
#define LIMIT_PACKED_PIXELS ((size_t)1 << 22) /* beyond, a picture must fill its file: */
#define LIMIT_PIXELS_PER_BYTE ((size_t)200)
#define LIMIT_BYTES_PER_PIXEL 32.0         /* what measuring takes at its peak, found by measuring it */
#define LIMIT_SIDE ((size_t)65535)         /* rows or columns of a micrograph */
#define LIMIT_MIN_SIDE ((size_t)32)        /* smaller pictures carry no texture statistics */
#define LIMIT_FEATURES ((size_t)4 << 20)   /* markers of one micrograph */
#define LIMIT_FOLDER_FILES ((size_t)1 << 20)
#define LIMIT_FOLDER_DEPTH 16
#define LIMIT_CSV_COLUMNS ((size_t)256)
#define LIMIT_CSV_ROWS ((size_t)2 << 20)
#define LIMIT_JSON_DEPTH 64
#define LIMIT_SLABS ((size_t)1 << 15) /* of one profile */
#define LIMIT_COATINGS 8
#define LIMIT_OUTPUT_BYTES ((size_t)1 << 30) /* one text output held in memory */

#endif

/* Which libraries read and write the files: part of the account of a run. */
#ifndef SWARD_IO_LIBRARIES_H
#define SWARD_IO_LIBRARIES_H

typedef struct {
    const char *name, *version; /* the library's own words, perhaps of several lines */
} library;
enum { IO_LIBRARIES = 5 };
void io_libraries(library out[IO_LIBRARIES]);

#endif

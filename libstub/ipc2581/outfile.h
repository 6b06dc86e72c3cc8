/* A file that appears whole or not at all. */
#ifndef LSTUB_IPC2581_OUTFILE_H
#define LSTUB_IPC2581_OUTFILE_H

#include "libstub.h"

typedef struct lstub__outfile lstub__outfile;

/*
** Starts a file beside `path`, compressed when the name ends in .gz. Writing cannot fail on the spot: the first
** failure is kept, the rest ignored, and lstub__out_close tells.
*/
int32_t lstub__out_open(const char *path, const lstub_allocator *allocator, lstub__outfile **out, lstub_error *err);
void    lstub__out_bytes(lstub__outfile *out, const void *bytes, size_t count);
void    lstub__out_text(lstub__outfile *out, const char *text);
/*
** Flushes to the disk and moves the file to its place; then `out` is gone. With status < 0, of what the caller ran
** into, or on a failure the unfinished file is removed and what stood at the path still stands. Returns status, or
** LSTUB_E_WRITE with path and reason.
*/
int32_t lstub__out_close(lstub__outfile *out, int32_t status, lstub_error *err);

#endif

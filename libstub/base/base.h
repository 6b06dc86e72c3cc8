/* What every layer needs: messages, memory, structs of other sizes. */
#ifndef LSTUB_BASE_H
#define LSTUB_BASE_H

#include "libstub.h"

#include <stdarg.h>

#define LSTUB_C0   299792458.0              /* m/s                                                     */
#define LSTUB_PI   3.14159265358979323846
#define LSTUB_MU0  (4.0e-7 * LSTUB_PI)      /* H/m; differs from the 2019 value by 5.5e-10             */
#define LSTUB_EPS0 (1.0 / (LSTUB_MU0 * LSTUB_C0 * LSTUB_C0))
#define LSTUB_ETA0 (LSTUB_MU0 * LSTUB_C0)

#if defined(__GNUC__)
#define LSTUB_PRINTF(fmt, args) __attribute__((format(printf, fmt, args)))
#else
#define LSTUB_PRINTF(fmt, args)
#endif

/* snprintf with a full stop for a decimal point whatever the host program's locale. bytes >= 1. */
void lstub__vformat(char *text, size_t bytes, const char *format, va_list args) LSTUB_PRINTF(3, 0);
void lstub__format(char *text, size_t bytes, const char *format, ...) LSTUB_PRINTF(3, 4);

/* Fills err (null is fine) and returns status, so that `return lstub__fail(...)` is the usual line. */
int32_t lstub__fail(lstub_error *err, int32_t status, const char *field, int64_t index,
                    const char *format, ...) LSTUB_PRINTF(5, 6);

/* Puts "item: " before a message that a callee has left in err, and its index in place. */
void lstub__fail_where(lstub_error *err, int64_t index, const char *format, ...) LSTUB_PRINTF(3, 4);

/* LSTUB_E_NULL and its message where a pointer is null. */
int32_t lstub__need(const void *pointer, const char *field, lstub_error *err);

/* Limits of a value, both included unless `above` (then low itself is out). */
typedef struct lstub__range {
    double      low, high;
    int         above;
    const char *unit;          /* "m", "Hz", "" */
} lstub__range;

int32_t lstub__check(double value, const lstub__range *range, const char *field, lstub_error *err);

/*
** Copies a caller's struct of any size into ours of `size` bytes; what the caller does not have is zero. A longer
** one must be zero beyond ours. `first` is the size of the struct in the first release.
*/
int32_t lstub__take(void *ours, size_t size, const void *theirs, size_t first, const char *name, lstub_error *err);
/* Writes ours into the caller's struct of any size: as much as fits, its own size kept. */
int32_t lstub__give(const void *ours, size_t size, void *theirs, size_t first, const char *name, lstub_error *err);
/* Whether lstub__give would do: to check all outputs before writing the first. */
int32_t lstub__fits(const void *theirs, size_t first, const char *name, lstub_error *err);
/* Whether an array's stride can hold such structs. */
int32_t lstub__stride(size_t stride, size_t first, const char *name, lstub_error *err);
/* The same where a stride of 0 says that one item serves for all. */
int32_t lstub__stride_or_one(size_t stride, size_t first, const char *name, lstub_error *err);

int32_t lstub__allocator(const lstub_allocator *given, lstub_allocator *out, lstub_error *err);
/* Zeroed memory, or null with err filled. count * bytes is checked for overflow. */
void *lstub__new(const lstub_allocator *allocator, size_t count, size_t bytes, lstub_error *err);
/* Room for one item more in an array of `count`: the array, moved where it was full, new room zeroed; null with err filled and
** the old one untouched where there is no memory. Start with null and *room 0. */
void *lstub__grow(const lstub_allocator *allocator, void *array, size_t count, size_t *room, size_t bytes, lstub_error *err);
void  lstub__free(const lstub_allocator *allocator, void *memory);

/* The status of a batch from its items': all fine, a warning, one common failure, or LSTUB_E_MIXED; err keeps
** the first item that failed, or else the first with a warning. Start with {0}. */
typedef struct lstub__batch {
    int32_t result;
    int32_t failed;
} lstub__batch;

void lstub__batch_add(lstub__batch *batch, int32_t status, int64_t index, const lstub_error *item, lstub_error *err);

#endif

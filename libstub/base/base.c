#include "base/base.h"

#include <locale.h>
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define STRUCT_MAX 65536u   /* a `size` beyond this is garbage, not a newer struct */

const char *lstub_version(void) { return LSTUB_VERSION; }
int32_t lstub_abi(void) { return LSTUB_ABI; }
int32_t lstub_model_revision(void) { return 1; }

const char *lstub_status_name(int32_t status)
{
    switch (status) {
    case LSTUB_OK: return "LSTUB_OK";
    case LSTUB_W_RANGE: return "LSTUB_W_RANGE";
    case LSTUB_W_CAPACITY: return "LSTUB_W_CAPACITY";
    case LSTUB_E_ARGUMENT: return "LSTUB_E_ARGUMENT";
    case LSTUB_E_NULL: return "LSTUB_E_NULL";
    case LSTUB_E_SIZE: return "LSTUB_E_SIZE";
    case LSTUB_E_NEWER: return "LSTUB_E_NEWER";
    case LSTUB_E_MEMORY: return "LSTUB_E_MEMORY";
    case LSTUB_E_GEOMETRY: return "LSTUB_E_GEOMETRY";
    case LSTUB_E_NONE: return "LSTUB_E_NONE";
    case LSTUB_E_UNSUPPORTED: return "LSTUB_E_UNSUPPORTED";
    case LSTUB_E_MIXED: return "LSTUB_E_MIXED";
    case LSTUB_E_READ: return "LSTUB_E_READ";
    case LSTUB_E_WRITE: return "LSTUB_E_WRITE";
    case LSTUB_E_FORMAT: return "LSTUB_E_FORMAT";
    default: return "unknown status";
    }
}

void lstub_init(void *data, size_t size)
{
    if (data == NULL || size < sizeof size)
        return;
    memset(data, 0, size);
    memcpy(data, &size, sizeof size);
}

static int error_usable(const lstub_error *err)
{
    return err != NULL && err->size >= sizeof *err && err->size <= STRUCT_MAX;
}

/* vsnprintf writes the decimal point of the host program's locale: put back a full stop between digits. */
static void plain_points(char *text)
{
    const char *point = localeconv()->decimal_point;
    size_t bytes = strlen(point);
    if (bytes == 0 || strcmp(point, ".") == 0)
        return;
    for (char *at = text; (at = strstr(at, point)) != NULL; at++) {
        int between = at > text && at[-1] >= '0' && at[-1] <= '9' && at[bytes] >= '0' && at[bytes] <= '9';
        if (between) {
            *at = '.';
            memmove(at + 1, at + bytes, strlen(at + bytes) + 1);
        }
    }
}

void lstub__vformat(char *text, size_t bytes, const char *format, va_list args)
{
    vsnprintf(text, bytes, format, args);
    plain_points(text);
}

void lstub__format(char *text, size_t bytes, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    lstub__vformat(text, bytes, format, args);
    va_end(args);
}

int32_t lstub__fail(lstub_error *err, int32_t status, const char *field, int64_t index, const char *format, ...)
{
    va_list args;
    if (!error_usable(err))
        return status;
    err->status = status;
    err->index = index;
    snprintf(err->field, sizeof err->field, "%s", field);
    va_start(args, format);
    lstub__vformat(err->message, sizeof err->message, format, args);
    va_end(args);
    return status;
}

void lstub__fail_where(lstub_error *err, int64_t index, const char *format, ...)
{
    char where[sizeof err->message], all[2 * sizeof err->message + 2];
    va_list args;
    if (!error_usable(err))
        return;
    va_start(args, format);
    lstub__vformat(where, sizeof where, format, args);
    va_end(args);
    snprintf(all, sizeof all, "%s: %s", where, err->message);
    all[sizeof err->message - 1] = '\0';
    memcpy(err->message, all, sizeof err->message);
    err->index = index;
}

int32_t lstub__need(const void *pointer, const char *field, lstub_error *err)
{
    return pointer != NULL ? LSTUB_OK : lstub__fail(err, LSTUB_E_NULL, field, -1, "%s = null: must not be null", field);
}

int32_t lstub__check(double value, const lstub__range *range, const char *field, lstub_error *err)
{
    const char *space = range->unit[0] ? " " : "";
    if (isfinite(value) && value <= range->high && (range->above ? value > range->low : value >= range->low))
        return LSTUB_OK;
    return lstub__fail(err, LSTUB_E_ARGUMENT, field, -1, "%s = %.9g%s%s: must be %s %g and <= %g%s%s", field, value,
                       space, range->unit, range->above ? ">" : ">=", range->low, range->high, space, range->unit);
}

static int32_t size_of(const void *theirs, size_t first, const char *name, size_t *size, lstub_error *err)
{
    if (theirs == NULL)
        return lstub__fail(err, LSTUB_E_NULL, name, -1, "%s = null: must point to a struct", name);
    memcpy(size, theirs, sizeof *size);
    if (*size < first || *size > STRUCT_MAX)
        return lstub__fail(err, LSTUB_E_SIZE, name, -1, "%s: size = %lu bytes: must be >= %lu; use LSTUB_INIT", name,
                           (unsigned long)*size, (unsigned long)first);
    return LSTUB_OK;
}

int32_t lstub__take(void *ours, size_t size, const void *theirs, size_t first, const char *name, lstub_error *err)
{
    size_t their_size = 0, i;
    int32_t status = size_of(theirs, first, name, &their_size, err);
    if (status < 0)
        return status;
    for (i = size; i < their_size; i++)
        if (((const unsigned char *)theirs)[i] != 0)
            return lstub__fail(err, LSTUB_E_NEWER, name, -1,
                               "%s: a member at byte %lu is set that this version (%s) does not know", name,
                               (unsigned long)i, LSTUB_VERSION);
    lstub_init(ours, size);
    memcpy((char *)ours + sizeof size, (const char *)theirs + sizeof size,
           (their_size < size ? their_size : size) - sizeof size);
    return LSTUB_OK;
}

int32_t lstub__give(const void *ours, size_t size, void *theirs, size_t first, const char *name, lstub_error *err)
{
    size_t their_size = 0;
    int32_t status = size_of(theirs, first, name, &their_size, err);
    if (status < 0)
        return status;
    if (their_size > size)
        memset((char *)theirs + size, 0, their_size - size);
    memcpy((char *)theirs + sizeof size, (const char *)ours + sizeof size,
           (their_size < size ? their_size : size) - sizeof size);
    return LSTUB_OK;
}

int32_t lstub__fits(const void *theirs, size_t first, const char *name, lstub_error *err)
{
    size_t unused;
    return size_of(theirs, first, name, &unused, err);
}

int32_t lstub__stride(size_t stride, size_t first, const char *name, lstub_error *err)
{
    if (stride < first || stride > STRUCT_MAX || stride % sizeof(void *) != 0)
        return lstub__fail(err, LSTUB_E_SIZE, name, -1,
                           "%s: stride = %lu bytes: must be >= %lu and a multiple of %lu", name, (unsigned long)stride,
                           (unsigned long)first, (unsigned long)sizeof(void *));
    return LSTUB_OK;
}

int32_t lstub__stride_or_one(size_t stride, size_t first, const char *name, lstub_error *err)
{
    return stride == 0 ? LSTUB_OK : lstub__stride(stride, first, name, err);
}

static void *heap_allocate(void *user, size_t bytes)
{
    (void)user;
    return malloc(bytes);
}

static void heap_release(void *user, void *memory)
{
    (void)user;
    free(memory);
}

int32_t lstub__allocator(const lstub_allocator *given, lstub_allocator *out, lstub_error *err)
{
    if (given == NULL) {
        LSTUB_INIT(*out);
        out->allocate = heap_allocate;
        out->release = heap_release;
        return LSTUB_OK;
    }
    int32_t status = lstub__take(out, sizeof *out, given, sizeof *out, "allocator", err);
    if (status == LSTUB_OK && (out->allocate == NULL || out->release == NULL))
        return lstub__fail(err, LSTUB_E_NULL, "allocator", -1, "allocator: allocate and release must not be null");
    return status;
}

void *lstub__new(const lstub_allocator *allocator, size_t count, size_t bytes, lstub_error *err)
{
    void *memory = NULL;
    size_t total = count * bytes;
    if (bytes == 0 || count <= SIZE_MAX / bytes)
        memory = allocator->allocate(allocator->user, total ? total : 1);
    if (memory == NULL)
        lstub__fail(err, LSTUB_E_MEMORY, "allocator", -1, "out of memory: %lu items of %lu bytes",
                    (unsigned long)count, (unsigned long)bytes);
    else
        memset(memory, 0, total ? total : 1);
    return memory;
}

void *lstub__grow(const lstub_allocator *allocator, void *array, size_t count, size_t *room, size_t bytes, lstub_error *err)
{
    if (count < *room)
        return array;
    size_t more = *room ? 2 * *room : 16;
    void *moved = lstub__new(allocator, more, bytes, err);
    if (moved == NULL)
        return NULL;
    if (count > 0)
        memcpy(moved, array, count * bytes);
    lstub__free(allocator, array);
    *room = more;
    return moved;
}

void lstub__free(const lstub_allocator *allocator, void *memory)
{
    if (memory != NULL)
        allocator->release(allocator->user, memory);
}

void lstub__batch_add(lstub__batch *batch, int32_t status, int64_t index, const lstub_error *item, lstub_error *err)
{
    if (status == LSTUB_OK)
        return;
    int first = status < 0 ? !batch->failed : batch->result == LSTUB_OK;
    if (first) {
        batch->result = status;
        if (error_usable(err)) {
            err->status = item->status;
            memcpy(err->field, item->field, sizeof err->field);
            memcpy(err->message, item->message, sizeof err->message);
            lstub__fail_where(err, index, "item %ld", (long)index);
        }
    } else if (status < 0 && batch->result != status) {
        batch->result = LSTUB_E_MIXED;
    }
    batch->failed |= status < 0;
}

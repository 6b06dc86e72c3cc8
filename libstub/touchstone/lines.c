#include "touchstone/lines.h"

#include <stdio.h>
#include <string.h>

static int32_t refill(lstub__lines *in, lstub_error *err)
{
    size_t room = 2 * LSTUB__LINE_MOST - (in->end - in->begin), came;
    memmove(in->buffer, in->buffer + in->begin, in->end - in->begin);
    in->end -= in->begin;
    in->begin = 0;
    came = in->source.read(in->source.user, in->buffer + in->end, room);
    if (came > room)
        return lstub__fail(err, LSTUB_E_READ, "source", in->number, "cannot read on after line %ld", (long)in->number);
    in->end += came;
    in->came += (double)came;
    in->ended = came == 0;
    return LSTUB_OK;
}

/* What kind of file is not text is worth saying. */
static int32_t binary(const lstub__lines *in, const char *at, lstub_error *err)
{
    const unsigned char *byte = (const unsigned char *)in->text;
    if (in->number == 1 && byte[0] == 0x1F && in->end - in->begin > 1 && byte[1] == 0x8B)
        return lstub__lines_fail(in, in->text, err, "a gzip file: unpack it first");
    return lstub__lines_fail(in, at, err, "byte 0x%02X: not a text file", (unsigned)(unsigned char)*at);
}

/* The first control character other than a tab, from i to `end`. Eight at once: only bytes below 0x20 turn negative when
** 0x20 is taken from them, and were not before; borrowing can only follow one of those. */
static size_t find_control(const char *buffer, size_t i, size_t end)
{
    const uint64_t ones = UINT64_C(0x0101010101010101);
    for (;;) {
        uint64_t x;
        while (i + 8 <= end && (memcpy(&x, buffer + i, 8), ((x - 0x20 * ones) & ~x & 0x80 * ones) == 0))
            i += 8;
        size_t stop = i + 8 <= end ? i + 8 : end;
        while (i < stop && ((unsigned char)buffer[i] >= ' ' || buffer[i] == '\t'))
            i++;
        if (i < stop || i == end)
            return i;
    }
}

int32_t lstub__lines_next(lstub__lines *in, lstub_error *err)
{
    size_t i = in->begin;
    int32_t status;
    for (;;) {
        const char *buffer = in->buffer;
        if (in->after_return && i == in->begin && i < in->end) {
            in->after_return = 0;
            if (buffer[i] == '\n')
                i = ++in->begin;
        }
        i = find_control(buffer, i, in->end);
        size_t length = i - in->begin;
        if (length > LSTUB__LINE_MOST || (i < in->end && length == LSTUB__LINE_MOST)) {
            in->number++;
            return lstub__lines_fail(in, NULL, err, "more than %u bytes in a line", LSTUB__LINE_MOST - 1);
        }
        if (i < in->end || in->ended)
            break;
        if ((status = refill(in, err)) < 0)
            return status;
        i = in->begin + length;
    }
    if (i == in->end && i == in->begin)
        return 0;
    in->text = in->buffer + in->begin;
    in->number++;
    if (i < in->end && in->buffer[i] != '\n' && in->buffer[i] != '\r')
        return binary(in, in->buffer + i, err);
    in->after_return = i < in->end && in->buffer[i] == '\r';
    in->buffer[i] = '\n';
    if (in->number == 1 && strncmp(in->text, "\xEF\xBB\xBF", 3) == 0)      /* byte order mark */
        in->text += 3;
    in->begin = i < in->end ? i + 1 : i;
    return 1;
}

static int32_t fail(int64_t number, long column, lstub_error *err, const char *format, va_list args)
{
    char what[sizeof err->message];
    lstub__vformat(what, sizeof what, format, args);
    if (column > 0)
        return lstub__fail(err, LSTUB_E_FORMAT, "text", number, "line %ld, column %ld: %s", (long)number, column, what);
    return lstub__fail(err, LSTUB_E_FORMAT, "text", number, "line %ld: %s", (long)number, what);
}

int32_t lstub__lines_fail(const lstub__lines *in, const char *at, lstub_error *err, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    fail(in->number, at == NULL ? 0 : (long)(at - in->text) + 1, err, format, args);
    va_end(args);
    return LSTUB_E_FORMAT;
}

int32_t lstub__lines_fail_at(int64_t number, lstub_error *err, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    fail(number, 0, err, format, args);
    va_end(args);
    return LSTUB_E_FORMAT;
}

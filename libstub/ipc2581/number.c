#include "ipc2581/number.h"

#include "base/base.h"
#include "ipc2581/text.h"

#include <math.h>
#include <string.h>

#define PATH_SHOWN 120

/* A zero loses its sign. */
static void unsign_zero(char *text)
{
    if (text[0] == '-' && strspn(text + 1, "0.") == strlen(text + 1))
        memmove(text, text + 1, strlen(text));
}

const char *lstub__significant(char text[LSTUB__NUMBER_MAX], double value, int digits)
{
    text[0] = '\0';
    if (isfinite(value)) {
        lstub__format(text, LSTUB__NUMBER_MAX, "%.*g", digits, value);
        unsign_zero(text);
    }
    return text;
}

const char *lstub__fixed(char text[LSTUB__NUMBER_MAX], double value, int decimals)
{
    if (!(fabs(value) < 1e15))
        return lstub__significant(text, value, 6);
    lstub__format(text, LSTUB__NUMBER_MAX, "%.*f", decimals, value);
    unsign_zero(text);
    return text;
}

const char *lstub__length_text(char text[LSTUB__NUMBER_MAX], double length, double least, double unit)
{
    double back = 0.0;
    int decimals;
    for (decimals = 0; decimals <= 15; decimals++) {
        lstub__fixed(text, length / unit, decimals);
        if (lstub__parse_double(text, &back) && fabs(back * unit - length) <= 1e-12 && back * unit >= least)
            break;
    }
    return text;
}

const char *lstub__path_tail(const char *path)
{
    size_t length = strlen(path);
    if (length <= PATH_SHOWN)
        return path;
    path += length - PATH_SHOWN;
    while (((unsigned char)*path & 0xC0) == 0x80)   /* not from the middle of a character */
        path++;
    return path;
}

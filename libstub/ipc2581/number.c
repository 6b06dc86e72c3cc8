#include "ipc2581/number.h"

#include "ipc2581/text.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#define PATH_SHOWN 120

/* A locale's decimal point, whatever its bytes, becomes a point; a zero loses its sign. */
static void plain(char *text)
{
    char *to = text;
    const char *from = text;
    while (*from != '\0') {
        if (strchr("0123456789+-e", *from) != NULL) {
            *to++ = *from++;
            continue;
        }
        *to++ = '.';
        while (*from != '\0' && strchr("0123456789+-e", *from) == NULL)
            from++;
    }
    *to = '\0';
    if (text[0] == '-' && strspn(text + 1, "0.") == strlen(text + 1))
        memmove(text, text + 1, strlen(text));
}

const char *lstub__significant(char text[LSTUB__NUMBER_MAX], double value, int digits)
{
    text[0] = '\0';
    if (isfinite(value)) {
        snprintf(text, LSTUB__NUMBER_MAX, "%.*g", digits, value);
        plain(text);
    }
    return text;
}

const char *lstub__fixed(char text[LSTUB__NUMBER_MAX], double value, int decimals)
{
    if (!(fabs(value) < 1e15))
        return lstub__significant(text, value, 6);
    snprintf(text, LSTUB__NUMBER_MAX, "%.*f", decimals, value);
    plain(text);
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

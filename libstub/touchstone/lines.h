/* Text as a stream of lines, and what is wrong in them. */
#ifndef LSTUB_TOUCHSTONE_LINES_H
#define LSTUB_TOUCHSTONE_LINES_H

#include "base/base.h"
#include "touchstone/decimal.h"

#define LSTUB__LINE_MOST 65536u    /* bytes */
/* Room for two of them, the '\n' after the last, and what may be read behind that. */
#define LSTUB__BUFFER (2 * LSTUB__LINE_MOST + 1 + LSTUB__DECIMAL_AHEAD)

typedef struct lstub__lines {
    lstub_source source;
    char   *buffer;                /* LSTUB__BUFFER bytes, the caller's */
    size_t  begin, end;            /* of what has been read and is not used yet */
    double  came;                  /* bytes, in all */
    int     ended;                 /* the source has nothing more */
    int     after_return;          /* the line before ended with CR: an LF now belongs to it */
    int64_t number;                /* of the line, from 1 */
    char   *text;                  /* the line; '\n' stands after it whatever ended it, and no other control characters
                                      than tabs are in it */
} lstub__lines;

/* The next line: 1; there is none: 0; or a status. */
int32_t lstub__lines_next(lstub__lines *lines, lstub_error *err);

/* Bytes of the source up to the end of the line. */
static inline double lstub__lines_taken(const lstub__lines *lines)
{
    return lines->came - (double)(lines->end - lines->begin);
}

/* LSTUB_E_FORMAT, "line 12, column 7: ..."; at: where in the line, null: the line as a whole. */
int32_t lstub__lines_fail(const lstub__lines *lines, const char *at, lstub_error *err, const char *format, ...)
    LSTUB_PRINTF(4, 5);
/* The same of an earlier line. */
int32_t lstub__lines_fail_at(int64_t number, lstub_error *err, const char *format, ...) LSTUB_PRINTF(3, 4);

/* Blanks and tabs skipped. */
static inline const char *lstub__blanks(const char *p)
{
    while (*p == ' ' || *p == '\t')
        p++;
    return p;
}

/* Whether nothing but a comment is left. */
static inline int lstub__at_end(const char *p) { return *p == '\n' || *p == '!'; }

/* Bytes of a word, up to a blank, a comment or the end. */
static inline int lstub__word(const char *p)
{
    int n = 0;
    while (p[n] != ' ' && p[n] != '\t' && !lstub__at_end(p + n))
        n++;
    return n;
}

#endif

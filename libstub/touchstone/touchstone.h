/* A Touchstone file in memory, and one being read. */
#ifndef LSTUB_TOUCHSTONE_TOUCHSTONE_H
#define LSTUB_TOUCHSTONE_TOUCHSTONE_H

#include "base/base.h"
#include "touchstone/layout.h"
#include "touchstone/lines.h"

struct lstub_touchstone {
    lstub_allocator alloc;
    lstub_touchstone_data data;    /* points into what follows */
    double  reference[LSTUB_PORTS_MAX];
    lstub_touchstone_row rows[LSTUB_PORTS_MAX];
    double *freq, *values;
    char   *text;                  /* the comments, each with its zero byte */
    const char **comments;
};

/* Numbers of a point at most, its frequency included. */
#define LSTUB__RECORD_MOST (1 + 2 * LSTUB__ENTRIES_MOST)

typedef enum lstub__part {
    LSTUB__HEAD,                   /* up to the first data of version 1, or to [Network Data] */
    LSTUB__INFORMATION,            /* between [Begin Information] and [End Information] */
    LSTUB__NETWORK,
    LSTUB__NOISE,
    LSTUB__END
} lstub__part;

typedef struct lstub__option {     /* the option line */
    int64_t line;                  /* 0: none yet */
    int32_t unit, parameter, format;
    double  reference;
} lstub__option;

typedef struct lstub__reader {
    lstub__lines  in;
    lstub_touchstone *file;
    lstub_error  *err;
    int32_t       ports_asked;     /* 0: not by the caller */
    lstub__part   part;
    lstub__option option;
    unsigned      seen;            /* keywords, a bit each */
    int           references_due, rows_due;     /* of a list that goes on in the next line */
    int64_t       points_said, noise_said;      /* [Number of ...] */
    lstub__layout layout;
    double        record[LSTUB__RECORD_MOST];   /* a point as it comes; the first is its frequency in Hz */
    int           fill, length;    /* length 0: the number of ports is not known yet */
    int64_t       record_line;     /* where it begins */
    double        bytes_ahead;     /* of the whole file, where known: the room that its points will need */
    double        line[LSTUB__RECORD_MOST];     /* the numbers of a line */
    double        bytes_said;      /* of the whole source, 0: not known */
    double        bytes_before;    /* read before the first point */
    size_t        room;            /* points */
    size_t        text_room, text_used;
} lstub__reader;

/* A line of the head that begins with '#', and one with '['. */
int32_t lstub__read_option_line(lstub__reader *reader, const char *p);
int32_t lstub__read_keyword(lstub__reader *reader, const char *p);
/* A line that goes on with the list of a keyword. */
int32_t lstub__read_list(lstub__reader *reader, const char *p);
/* Version 2: whether the head that [Network Data] ends is whole. */
int32_t lstub__head_done(lstub__reader *reader);

/* Once ports, option line and, in version 2, the head are known. */
void    lstub__points_start(lstub__reader *reader);
/* A line of numbers, of points or noise. */
int32_t lstub__read_numbers(lstub__reader *reader, const char *p);
/* Where the points end: none is unfinished, and there are as many as were said. */
int32_t lstub__points_done(lstub__reader *reader);

#endif

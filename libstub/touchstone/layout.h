/* Which number of a file stands where in a matrix, and how: what reading and writing have in common. */
#ifndef LSTUB_TOUCHSTONE_LAYOUT_H
#define LSTUB_TOUCHSTONE_LAYOUT_H

#include "base/base.h"

#define LSTUB__ENTRIES_MOST (LSTUB_PORTS_MAX * LSTUB_PORTS_MAX)

typedef struct lstub__entry {
    int    row, column;
    double scale;              /* what is in memory over what is in the file: version 1 normalises to the reference */
} lstub__entry;

typedef struct lstub__layout {
    int          ports, count;     /* entries, in the order of the file */
    lstub__entry entry[LSTUB__ENTRIES_MOST];
} lstub__layout;

/* Takes ports, version, parameter, matrix and order of data, and the reference of version 1. */
void lstub__layout_make(lstub__layout *layout, const lstub_touchstone_data *data, double reference);

/* The words of an option line, by LSTUB_UNIT_..., LSTUB_FORMAT_..., LSTUB_NETWORK_...; null where there is none. */
extern const char *const lstub__unit_words[5], *const lstub__format_words[4], *const lstub__parameter_words[8];
/* Power of ten of a unit of frequency in Hz. */
int lstub__unit_power(int32_t unit);

/* What is wrong with the rows of mixed-mode data, or null: each port stands in one single-ended row, or in one differential
** and one common row with the same partner and the same reference. */
const char *lstub__rows_fault(const lstub_touchstone_row *rows, int32_t ports, const double *reference);

/* Complex from the two numbers of a file, and back. What is 0 has no decibels: they are -inf then. */
void lstub__pair_read(int32_t format, double a, double b, double z[2]);
void lstub__pair_write(int32_t format, const double z[2], double *a, double *b);

#endif

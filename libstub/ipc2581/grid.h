/* Points in the plane, found by their place: for what lies near a feature, and for what a line to the right crosses. */
#ifndef LSTUB_IPC2581_GRID_H
#define LSTUB_IPC2581_GRID_H

#include "base/base.h"

typedef struct lstub__grid {
    const lstub_allocator *alloc;
    const double *x, *y;           /* the caller's, count each */
    int32_t count;
    double  x0, y0, cell;
    int32_t columns, rows;
    int32_t *start;                /* items of cell i: item[start[i]] up to item[start[i + 1]] */
    int32_t *item;
    int32_t *by_y;                 /* all points, lowest first */
} lstub__grid;

/* cell: roughly the distance that is asked for. */
int32_t lstub__grid_create(lstub__grid *grid, const double *x, const double *y, int32_t count, double cell,
                           const lstub_allocator *allocator, lstub_error *err);
void    lstub__grid_destroy(lstub__grid *grid);

/* Rows that hold y from low to high: *first up to *last, none when *first > *last. */
void lstub__grid_rows(const lstub__grid *grid, double low, double high, int32_t *first, int32_t *last);
double lstub__grid_row_low(const lstub__grid *grid, int32_t row);   /* lower border; row + 1: the upper one */
/* The points of a row with x from low to high, and some more: item[*from] up to item[*to - 1]. */
void lstub__grid_row(const lstub__grid *grid, int32_t row, double low, double high, int32_t *from, int32_t *to);
/* First place in by_y with a point at y or above. */
int32_t lstub__grid_above(const lstub__grid *grid, double y);

#endif

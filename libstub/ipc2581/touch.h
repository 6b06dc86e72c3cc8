/* Feature by feature: which holes it touches, how near it comes, whether it surrounds them. */
#ifndef LSTUB_IPC2581_TOUCH_H
#define LSTUB_IPC2581_TOUCH_H

#include "ipc2581/reader.h"

typedef struct touch_hole touch_hole;

typedef struct touch {
    reader *r;
    const lstub__xml *xml;         /* for lines in notices */
    int32_t copper;                /* number of the copper layer at hand */
    int32_t net;                   /* of the feature: 0 none, -1 one that no hole has */
    int     removes;               /* it takes copper away */
    double  reach;                 /* from the axis to the middle of a line */
    touch_hole *hole;              /* what the open feature means to each hole */
    int32_t *ring, ring_count;     /* holes that the open line or ring has come near or passed */
    int32_t *contour, contour_count;
    int     rays;                  /* an outline: whether it surrounds a hole is watched */
    int     area;                  /* a ring, not a line */
    double  bx, by, px, py;        /* first and last point */
    uint32_t slots;                /* openings so far */
} touch;

int32_t lstub__touch_create(touch *t, reader *r);
void    lstub__touch_destroy(touch *t);

/* A line: begin, steps, end with its width. */
void lstub__touch_begin(touch *t, double x, double y);
void lstub__touch_segment(touch *t, double x, double y);
void lstub__touch_arc(touch *t, double x, double y, double cx, double cy, int clockwise);
void lstub__touch_line_end(touch *t, double width);

/* A contour: its outline and cutouts, each begin_ring, steps, ring_end; then the whole. hollow: only drawn, not filled. */
void lstub__touch_begin_ring(touch *t, double x, double y, int cutout);
void lstub__touch_ring_end(touch *t, int cutout);
void lstub__touch_contour_end(touch *t, int hollow);

/* A pad or another shape at a place. pin: a component's; side: that the component is on, 0 unknown. */
void lstub__touch_pad(touch *t, const lstub__shape *shape, const lstub__place *place, int pin, int side);

#endif

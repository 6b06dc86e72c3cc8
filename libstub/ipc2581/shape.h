/* What of a primitive (circle, rectangle, thermal, user shape ...) matters at a hole: extent, area, room around its origin. */
#ifndef LSTUB_IPC2581_SHAPE_H
#define LSTUB_IPC2581_SHAPE_H

#include "ipc2581/geometry.h"
#include "ipc2581/xml.h"

typedef struct lstub__shape {      /* in its own coordinates */
    double  x0, y0, x1, y1;        /* extent, m */
    double  area;                  /* m2 */
    double  inner;                 /* radius about the origin that is filled, m; 0: the origin is not */
    int32_t round;                 /* 1: a disc about the middle of its extent */
    int32_t raw;                   /* 1: still in the units of the file, which were not known yet */
} lstub__shape;

/* Takes elements one by one: a primitive, or several for a user shape. */
typedef struct lstub__shape_builder {
    lstub__shape sum, part;        /* sum: of the parts before the open one */
    double unit;
    int    open;                   /* element whose part is being built, or 0 */
    int    in_cutout, odd, filled; /* of the ring: parity about the origin; of the contour: origin filled */
    double nearest;                /* of the origin to the ring's edges */
    double bx, by, px, py;         /* first and last point of the ring or line */
    double ring_area, width;
    int    has_part, has_ring;
    lstub__place place;            /* Xform within the primitive */
} lstub__shape_builder;

void lstub__shape_begin(lstub__shape_builder *builder, double unit);
/* Whether the element belongs to a primitive; failures are in xml. */
int  lstub__shape_start(lstub__shape_builder *builder, lstub__xml *xml, int element, const char **attributes);
void lstub__shape_end(lstub__shape_builder *builder, int element);
/* 1 when there was something. */
int  lstub__shape_take(lstub__shape_builder *builder, lstub__shape *shape);

/* Fills in offset, turn, mirror and scale of an Xform element; 0 after a failure. */
int  lstub__place_read(lstub__place *place, lstub__xml *xml, const char **attributes, double unit);

/* Diameter of the disc of the same area. */
double lstub__shape_diameter(const lstub__shape *shape);

#endif

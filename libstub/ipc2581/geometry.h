/* Plane geometry of features: distances to edges, placing of shapes. */
#ifndef LSTUB_IPC2581_GEOMETRY_H
#define LSTUB_IPC2581_GEOMETRY_H

#define LSTUB__CHORD_MAX 32   /* chords that stand for a full circle where only inside or outside matters */

double lstub__segment_distance(double px, double py, double ax, double ay, double bx, double by);

typedef struct lstub__arc {
    double cx, cy, r;
    double from, sweep;        /* rad, counter-clockwise positive */
    double ax, ay, bx, by;     /* its ends */
} lstub__arc;

/* From a to b about c; equal ends make a full circle. */
void   lstub__arc_make(lstub__arc *arc, double ax, double ay, double bx, double by, double cx, double cy, int clockwise);
double lstub__arc_distance(const lstub__arc *arc, double px, double py);
int    lstub__arc_chords(const lstub__arc *arc);                          /* how many */
void   lstub__arc_point(const lstub__arc *arc, int chord, int chords, double *x, double *y);   /* 0 .. chords */

/* Where a shape goes: scaled, mirrored (x to -x), turned, moved, in this order; offset moves before all of that. */
typedef struct lstub__place {
    double x, y;               /* of the shape's origin */
    double c, s;               /* cosine and sine of the turn */
    double scale;
    double dx, dy;             /* offset in the shape's own coordinates */
    int    mirror;
} lstub__place;

void lstub__place_init(lstub__place *place);
void lstub__place_turn(lstub__place *place, double degrees);
void lstub__place_out(const lstub__place *place, double x, double y, double *ox, double *oy);
void lstub__place_in(const lstub__place *place, double x, double y, double *ox, double *oy);   /* the inverse */

#endif

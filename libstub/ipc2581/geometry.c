#include "ipc2581/geometry.h"

#include "base/base.h"

#include <math.h>

double lstub__segment_distance(double px, double py, double ax, double ay, double bx, double by)
{
    double ux = bx - ax, uy = by - ay, length = ux * ux + uy * uy;
    double t = length > 0.0 ? ((px - ax) * ux + (py - ay) * uy) / length : 0.0;
    t = t < 0.0 ? 0.0 : t > 1.0 ? 1.0 : t;
    double dx = px - (ax + t * ux), dy = py - (ay + t * uy);
    return sqrt(dx * dx + dy * dy);
}

static double gap(double ax, double ay, double bx, double by)
{
    return sqrt((ax - bx) * (ax - bx) + (ay - by) * (ay - by));
}

void lstub__arc_make(lstub__arc *arc, double ax, double ay, double bx, double by, double cx, double cy, int clockwise)
{
    double ra = gap(ax, ay, cx, cy), rb = gap(bx, by, cx, cy);
    arc->ax = ax, arc->ay = ay, arc->bx = bx, arc->by = by;
    arc->cx = cx, arc->cy = cy;
    arc->r = 0.5 * (ra + rb);
    arc->from = atan2(ay - cy, ax - cx);
    arc->sweep = atan2(by - cy, bx - cx) - arc->from;
    if (gap(ax, ay, bx, by) <= 1e-9 * arc->r) {
        arc->sweep = clockwise ? -2.0 * LSTUB_PI : 2.0 * LSTUB_PI;
        return;
    }
    if (clockwise && arc->sweep > 0.0)
        arc->sweep -= 2.0 * LSTUB_PI;
    if (!clockwise && arc->sweep < 0.0)
        arc->sweep += 2.0 * LSTUB_PI;
}

double lstub__arc_distance(const lstub__arc *arc, double px, double py)
{
    double turn = atan2(py - arc->cy, px - arc->cx) - arc->from;
    double a = gap(px, py, arc->ax, arc->ay), b = gap(px, py, arc->bx, arc->by);
    if (arc->sweep < 0.0)
        turn = -turn;
    while (turn < 0.0)
        turn += 2.0 * LSTUB_PI;
    if (turn <= fabs(arc->sweep))
        return fabs(gap(px, py, arc->cx, arc->cy) - arc->r);
    return a < b ? a : b;
}

int lstub__arc_chords(const lstub__arc *arc)
{
    return 1 + (int)(fabs(arc->sweep) / (2.0 * LSTUB_PI) * (LSTUB__CHORD_MAX - 1));
}

void lstub__arc_point(const lstub__arc *arc, int chord, int chords, double *x, double *y)
{
    double turn = arc->from + arc->sweep * chord / chords;
    *x = chord == 0 ? arc->ax : chord == chords ? arc->bx : arc->cx + arc->r * cos(turn);
    *y = chord == 0 ? arc->ay : chord == chords ? arc->by : arc->cy + arc->r * sin(turn);
}

/* ---- placing ----------------------------------------------------------------------------------- */

void lstub__place_init(lstub__place *place)
{
    place->x = place->y = place->s = place->dx = place->dy = 0.0;
    place->c = place->scale = 1.0;
    place->mirror = 0;
}

void lstub__place_turn(lstub__place *place, double degrees)
{
    double quarter = fmod(degrees, 360.0) / 90.0;
    if (quarter < 0.0)
        quarter += 4.0;
    if (quarter == floor(quarter)) {   /* exact where boards mostly are */
        static const double c[] = {1.0, 0.0, -1.0, 0.0, 1.0}, s[] = {0.0, 1.0, 0.0, -1.0, 0.0};
        place->c = c[(int)quarter];
        place->s = s[(int)quarter];
        return;
    }
    place->c = cos(quarter * (0.5 * LSTUB_PI));
    place->s = sin(quarter * (0.5 * LSTUB_PI));
}

void lstub__place_out(const lstub__place *place, double x, double y, double *ox, double *oy)
{
    double u = (x + place->dx) * place->scale, v = (y + place->dy) * place->scale;
    if (place->mirror)
        u = -u;
    *ox = place->x + place->c * u - place->s * v;
    *oy = place->y + place->s * u + place->c * v;
}

void lstub__place_in(const lstub__place *place, double x, double y, double *ox, double *oy)
{
    double u = place->c * (x - place->x) + place->s * (y - place->y);
    double v = -place->s * (x - place->x) + place->c * (y - place->y);
    if (place->mirror)
        u = -u;
    *ox = u / place->scale - place->dx;
    *oy = v / place->scale - place->dy;
}

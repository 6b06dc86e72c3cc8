#include "ipc2581/touch.h"

#include <math.h>

/*
** Whether copper surrounds a hole that it does not cover: the hole is in a cutout, or, for outlines that run around
** their openings (slits, bays), the outline is met in at least six of eight directions within REACH.
*/
#define RAYS 8
#define SURROUNDED 6

struct touch_hole {
    double ring;               /* to the edges of the open ring or line */
    double outer;              /* to the outline */
    double cut;                /* to the edges of the widest cutout that it is in; -1: in none */
    uint32_t slot;
    unsigned char odd, rays, in_ring, in_contour, inside, around;
};

int32_t lstub__touch_create(touch *t, reader *r)
{
    size_t n = r->sites.count;
    *t = (touch){0};
    t->r = r;
    t->reach = REACH + fmin(0.5 * r->widest, 5e-3);
    t->hole = lstub__new(r->alloc, n, sizeof *t->hole, r->err);
    t->ring = t->hole == NULL ? NULL : lstub__new(r->alloc, n, sizeof *t->ring, r->err);
    t->contour = t->ring == NULL ? NULL : lstub__new(r->alloc, n, sizeof *t->contour, r->err);
    if (t->contour == NULL) {
        lstub__touch_destroy(t);
        return LSTUB_E_MEMORY;
    }
    for (size_t i = 0; i < n; i++) {
        t->hole[i].ring = t->hole[i].outer = INFINITY;
        t->hole[i].cut = -1.0;
    }
    return LSTUB_OK;
}

void lstub__touch_destroy(touch *t)
{
    if (t->r == NULL)
        return;
    lstub__free(t->r->alloc, t->hole);
    lstub__free(t->r->alloc, t->ring);
    lstub__free(t->r->alloc, t->contour);
    *t = (touch){0};
}

static int crosses_layer(const touch *t, int32_t hole)
{
    const reader_site *s = SITE(t->r, hole);
    return s->first <= t->copper && t->copper <= s->last;
}

static reader_cell *cell_of(const touch *t, int32_t hole)
{
    const reader_site *s = SITE(t->r, hole);
    return &t->r->cells[s->cell + (size_t)(t->copper - s->first)];
}

static touch_hole *list_ring(touch *t, int32_t hole)
{
    touch_hole *h = &t->hole[hole];
    if (!h->in_ring) {
        h->in_ring = 1;
        t->ring[t->ring_count++] = hole;
    }
    return h;
}

/* ---- edges ------------------------------------------------------------------------------------- */

/* Which of the eight rays from the hole the segment crosses. */
static unsigned char rays_crossed(double hx, double hy, double ax, double ay, double bx, double by)
{
    static const double c[RAYS] = {1, 0.70710678118654752, 0, -0.70710678118654752, -1, -0.70710678118654752, 0, 0.70710678118654752};
    unsigned rays = 0;
    for (int i = 0; i < RAYS; i++) {
        double u = c[i], v = c[(i + 6) % RAYS];
        double a = u * (ay - hy) - v * (ax - hx), b = u * (by - hy) - v * (bx - hx);
        if ((a > 0.0) == (b > 0.0))
            continue;
        double k = a / (a - b), along = u * (ax + k * (bx - ax) - hx) + v * (ay + k * (by - ay) - hy);
        if (along > 0.0 && along <= REACH)
            rays |= 1u << i;
    }
    return (unsigned char)rays;
}

static void near_hole(touch *t, int32_t hole, double d)
{
    touch_hole *h = list_ring(t, hole);
    h->ring = fmin(h->ring, d);
}

/* The holes near a straight piece, row by row of the grid: a long slanted one passes few cells of each. */
static void near_segment(touch *t, double ax, double ay, double bx, double by)
{
    const lstub__grid *g = &t->r->grid;
    int32_t row, last, at, to;
    lstub__grid_rows(g, fmin(ay, by) - t->reach, fmax(ay, by) + t->reach, &row, &last);
    for (; row <= last; row++) {
        double low = 0.0, high = 1.0, dy = by - ay;
        double bottom = lstub__grid_row_low(g, row) - t->reach, top = lstub__grid_row_low(g, row + 1) + t->reach;
        if (fabs(dy) > 1e-12 && row > 0 && row < g->rows - 1) {   /* rounding may have put points beyond the outer rows */
            double k0 = (bottom - ay) / dy, k1 = (top - ay) / dy;
            low = fmax(low, fmin(k0, k1));
            high = fmin(high, fmax(k0, k1));
        }
        double xa = ax + low * (bx - ax), xb = ax + high * (bx - ax);
        lstub__grid_row(g, row, fmin(xa, xb) - t->reach, fmax(xa, xb) + t->reach, &at, &to);
        for (; at < to; at++) {
            int32_t hole = g->item[at];
            double hx = t->r->x[hole], hy = t->r->y[hole], d = lstub__segment_distance(hx, hy, ax, ay, bx, by);
            if (d > t->reach || !crosses_layer(t, hole))
                continue;
            near_hole(t, hole, d);
            if (t->rays && d <= REACH)
                t->hole[hole].rays |= rays_crossed(hx, hy, ax, ay, bx, by);
        }
    }
}

static unsigned char arc_rays(const lstub__arc *arc, double hx, double hy)
{
    unsigned rays = 0;
    int chords = lstub__arc_chords(arc);
    double ax = arc->ax, ay = arc->ay, bx, by;
    for (int i = 1; i <= chords; i++, ax = bx, ay = by) {
        lstub__arc_point(arc, i, chords, &bx, &by);
        rays |= rays_crossed(hx, hy, ax, ay, bx, by);
    }
    return (unsigned char)rays;
}

/* The same for an arc, whose extent is that of its chords and the little that it bulges out of them. */
static void near_arc(touch *t, const lstub__arc *arc, double x0, double y0, double x1, double y1)
{
    const lstub__grid *g = &t->r->grid;
    double far = t->reach + 0.005 * arc->r;
    int32_t row, last, at, to;
    lstub__grid_rows(g, y0 - far, y1 + far, &row, &last);
    for (; row <= last; row++) {
        lstub__grid_row(g, row, x0 - far, x1 + far, &at, &to);
        for (; at < to; at++) {
            int32_t hole = g->item[at];
            double hx = t->r->x[hole], hy = t->r->y[hole], d = lstub__arc_distance(arc, hx, hy);
            if (d > t->reach || !crosses_layer(t, hole))
                continue;
            near_hole(t, hole, d);
            if (t->rays && d <= REACH)
                t->hole[hole].rays |= arc_rays(arc, hx, hy);
        }
    }
}

/* Parity: a line from the hole to the right meets the edge. */
static void pass(touch *t, double ax, double ay, double bx, double by)
{
    const lstub__grid *g = &t->r->grid;
    double low = fmin(ay, by), high = fmax(ay, by);
    if (low == high)
        return;
    for (int32_t i = lstub__grid_above(g, low); i < g->count && t->r->y[g->by_y[i]] < high; i++) {
        int32_t hole = g->by_y[i];
        if (crosses_layer(t, hole) && ax + (t->r->y[hole] - ay) * (bx - ax) / (by - ay) > t->r->x[hole])
            list_ring(t, hole)->odd ^= 1;
    }
}

void lstub__touch_begin(touch *t, double x, double y)
{
    t->area = t->rays = 0;
    t->bx = t->px = x;
    t->by = t->py = y;
}

void lstub__touch_begin_ring(touch *t, double x, double y, int cutout)
{
    lstub__touch_begin(t, x, y);
    t->area = 1;
    t->rays = !cutout;
}

void lstub__touch_segment(touch *t, double x, double y)
{
    near_segment(t, t->px, t->py, x, y);
    if (t->area)
        pass(t, t->px, t->py, x, y);
    t->px = x;
    t->py = y;
}

void lstub__touch_arc(touch *t, double x, double y, double cx, double cy, int clockwise)
{
    lstub__arc arc;
    double ax = t->px, ay = t->py, bx, by, x0 = ax, y0 = ay, x1 = ax, y1 = ay;
    lstub__arc_make(&arc, ax, ay, x, y, cx, cy, clockwise);
    int chords = lstub__arc_chords(&arc);
    for (int i = 1; i <= chords; i++, ax = bx, ay = by) {
        lstub__arc_point(&arc, i, chords, &bx, &by);
        x0 = fmin(x0, bx);
        x1 = fmax(x1, bx);
        y0 = fmin(y0, by);
        y1 = fmax(y1, by);
        if (t->area)
            pass(t, ax, ay, bx, by);
    }
    near_arc(t, &arc, x0, y0, x1, y1);
    t->px = x;
    t->py = y;
}

/* ---- what a feature means ---------------------------------------------------------------------- */

static int same_net(const touch *t, int32_t hole)
{
    return t->net > 0 && SITE(t->r, hole)->net == t->net;
}

/* Copper at a distance from the axis. */
static void copper_at(const touch *t, int32_t hole, double distance)
{
    reader_cell *c = cell_of(t, hole);
    if (same_net(t, hole))
        c->own = fmin(c->own, distance);
    else
        c->clear = fmin(c->clear, distance);
}

static void clearance_at(const touch *t, int32_t hole, double radius)
{
    reader_cell *c = cell_of(t, hole);
    c->flags |= CELL_DRAWN;
    if (radius > c->cut)
        c->cut = radius;
    if (radius > 0.5 * SITE(t->r, hole)->drill)
        COPPER(t->r, t->copper)->has_clear = 1;
}

void lstub__touch_line_end(touch *t, double width)
{
    for (int32_t i = 0; i < t->ring_count; i++) {
        int32_t hole = t->ring[i];
        touch_hole *h = &t->hole[hole];
        double d = h->ring - 0.5 * width;
        if (!t->removes)
            copper_at(t, hole, d > 0.0 ? d : 0.0);
        else if (d < 0.0)
            clearance_at(t, hole, -d);
        h->ring = INFINITY;
        h->in_ring = h->odd = h->rays = 0;
    }
    t->ring_count = 0;
}

static int bits(unsigned char rays)
{
    int n = 0;
    for (; rays != 0; rays = (unsigned char)(rays & (rays - 1u)))
        n++;
    return n;
}

void lstub__touch_ring_end(touch *t, int cutout)
{
    if (t->px != t->bx || t->py != t->by)
        lstub__touch_segment(t, t->bx, t->by);
    t->slots++;
    for (int32_t i = 0; i < t->ring_count; i++) {
        int32_t hole = t->ring[i];
        touch_hole *h = &t->hole[hole];
        if (cutout && h->odd && h->ring > h->cut) {
            h->cut = h->ring;
            h->slot = t->slots;
        } else if (!cutout) {
            h->inside = h->odd;
            h->outer = h->ring;
            h->around = bits(h->rays) >= SURROUNDED;
            h->slot = h->inside ? 0 : t->slots;
        }
        h->ring = INFINITY;
        h->in_ring = h->odd = h->rays = 0;
        if (!h->in_contour) {
            h->in_contour = 1;
            t->contour[t->contour_count++] = hole;
        }
    }
    t->ring_count = 0;
}

/* The hole stands in an opening of this contour, or beside it. */
static void beside(touch *t, int32_t hole, double radius, int surrounded, uint32_t slot)
{
    reader_cell *c = cell_of(t, hole);
    if (radius > REACH)
        return;
    copper_at(t, hole, radius);
    if (!surrounded || ((c->flags & CELL_VOID) && c->room <= radius))
        return;
    c->flags |= CELL_VOID;
    c->room = radius;
    c->slot = slot;
}

static void covered(touch *t, int32_t hole, const touch_hole *h)
{
    reader_cell *c = cell_of(t, hole);
    if (t->removes) {
        clearance_at(t, hole, h->around && h->outer <= REACH ? h->outer : INFINITY);   /* infinite: no plane near */
    } else if (same_net(t, hole)) {
        c->flags |= CELL_COVER;
        c->own = 0.0;
    } else {
        c->flags |= CELL_SHORT;
        c->clear = 0.0;
    }
}

void lstub__touch_contour_end(touch *t, int hollow)
{
    if (!t->removes && !hollow)
        COPPER(t->r, t->copper)->has_area = 1;
    for (int32_t i = 0; i < t->contour_count; i++) {
        int32_t hole = t->contour[i];
        touch_hole *h = &t->hole[hole];
        if (hollow)
            ;
        else if (h->inside && h->cut < 0.0)
            covered(t, hole, h);
        else if (!t->removes && h->inside)
            beside(t, hole, h->cut, 1, h->slot);
        else if (!t->removes)
            beside(t, hole, h->outer, h->around, h->slot);
        *h = (touch_hole){INFINITY, INFINITY, -1.0, 0, 0, 0, 0, 0, 0, 0};
    }
    t->contour_count = 0;
}

/* ---- pads -------------------------------------------------------------------------------------- */

static void own_pad(touch *t, int32_t hole, const lstub__shape *shape, double scale, int pin, int side)
{
    reader_cell *c = cell_of(t, hole);
    reader_site *s = SITE(t->r, hole);
    double diameter = scale * lstub__shape_diameter(shape);
    if (!shape->round)
        lstub__note(&t->r->notices, LSTUB_NOTICE_NOTE, NOTE_PAD_SHAPE, 0, lstub__xml_line(t->xml),
                    "a pad that is not round is taken as a disc of the same area");
    if (t->net != s->net && t->net != 0 && s->net != 0)
        lstub__note(&t->r->notices, LSTUB_NOTICE_WARNING, NOTE_PAD_NET, 0, lstub__xml_line(t->xml),
                    "hole '%.40s' of net '%.40s' has a pad of another net on it: used as its pad", s->name, t->r->nets.text[s->net]);
    if (pin) {
        c->flags |= CELL_PIN;
        c->pin_pad = fmax(c->pin_pad, diameter);
        if (side != 0)
            s->side = (unsigned char)side;
    } else {
        c->pad = fmax(c->pad, diameter);
    }
}

static void pad_at(touch *t, int32_t hole, const lstub__shape *shape, const lstub__place *place, int pin, int side)
{
    double hx = t->r->x[hole], hy = t->r->y[hole], x, y, d;
    double mx = 0.5 * (shape->x0 + shape->x1), my = 0.5 * (shape->y0 + shape->y1);
    lstub__place_in(place, hx, hy, &x, &y);
    if (t->removes) {
        d = hypot(x, y);
        if (hypot(x - mx, y - my) * place->scale <= SAME_PLACE || d < shape->inner)
            clearance_at(t, hole, (shape->inner - d) * place->scale);
        return;
    }
    if (hypot(x - mx, y - my) * place->scale <= SAME_PLACE) {
        own_pad(t, hole, shape, place->scale, pin, side);
        return;
    }
    if (shape->round)
        d = fmax(0.0, hypot(x - mx, y - my) - 0.5 * (shape->x1 - shape->x0));
    else
        d = hypot(fmax(0.0, fmax(shape->x0 - x, x - shape->x1)), fmax(0.0, fmax(shape->y0 - y, y - shape->y1)));
    d *= place->scale;
    /* Pads of its own net count where the hole is in them, or where a pin is: those of neighbouring vias do not. */
    if (d <= REACH && (!same_net(t, hole) || d == 0.0 || pin))
        copper_at(t, hole, d);
}

void lstub__touch_pad(touch *t, const lstub__shape *shape, const lstub__place *place, int pin, int side)
{
    const lstub__grid *g = &t->r->grid;
    double x, y, far = REACH + place->scale * 0.5 * hypot(shape->x1 - shape->x0, shape->y1 - shape->y0);
    int32_t row, last, at, to;
    lstub__place_out(place, 0.5 * (shape->x0 + shape->x1), 0.5 * (shape->y0 + shape->y1), &x, &y);
    lstub__grid_rows(g, y - far, y + far, &row, &last);
    for (; row <= last; row++) {
        lstub__grid_row(g, row, x - far, x + far, &at, &to);
        for (; at < to; at++)
            if (crosses_layer(t, g->item[at]))
                pad_at(t, g->item[at], shape, place, pin, side);
    }
}

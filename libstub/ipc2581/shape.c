#include "ipc2581/shape.h"

#include <math.h>
#include <string.h>

static const lstub__shape EMPTY = {INFINITY, INFINITY, -INFINITY, -INFINITY, 0.0, 0.0, 0, 0};

void lstub__shape_begin(lstub__shape_builder *b, double unit)
{
    memset(b, 0, sizeof *b);
    b->sum = b->part = EMPTY;
    b->unit = unit;
    lstub__place_init(&b->place);
}

static void include(lstub__shape *s, double x, double y)
{
    s->x0 = x < s->x0 ? x : s->x0;
    s->y0 = y < s->y0 ? y : s->y0;
    s->x1 = x > s->x1 ? x : s->x1;
    s->y1 = y > s->y1 ? y : s->y1;
}

static void box(lstub__shape_builder *b, double w, double h, double fill)
{
    include(&b->part, -0.5 * w, -0.5 * h);
    include(&b->part, 0.5 * w, 0.5 * h);
    b->part.area = w * h * fill;
    b->part.inner = 0.5 * (w < h ? w : h);
    b->has_part = 1;
}

/* ---- primitives with dimensions ---------------------------------------------------------------- */

static int two(lstub__shape_builder *b, lstub__xml *xml, const char **a, const char *w, const char *h, double fill)
{
    double width = 0.0, height = 0.0;
    if (!lstub__xml_length(xml, a, w, b->unit, &width) || !lstub__xml_length(xml, a, h, b->unit, &height))
        return 0;
    if (width < 0.0 || height < 0.0) {
        lstub__xml_fail(xml, LSTUB_E_FORMAT, w, "%s = %g, %s = %g: must be >= 0", w, width / b->unit, h, height / b->unit);
        return 0;
    }
    box(b, width, height, fill);
    return 1;
}

/* Ring-shaped ones leave the origin open, whatever fills the rest. */
static void open_middle(lstub__shape_builder *b, lstub__xml *xml, const char **a)
{
    double inner = 0.0;
    if (!two(b, xml, a, "outerDiameter", "outerDiameter", 0.25 * LSTUB_PI)
        || !lstub__xml_optional_length(xml, a, "innerDiameter", b->unit, &inner))
        return;
    b->part.area -= 0.25 * LSTUB_PI * inner * inner;
    b->part.inner = 0.0;
    b->part.round = 1;
}

static void corners(lstub__shape_builder *b, lstub__xml *xml, const char **a)
{
    double x0 = 0.0, y0 = 0.0, x1 = 0.0, y1 = 0.0;
    if (!lstub__xml_length(xml, a, "lowerLeftX", b->unit, &x0) || !lstub__xml_length(xml, a, "lowerLeftY", b->unit, &y0)
        || !lstub__xml_length(xml, a, "upperRightX", b->unit, &x1) || !lstub__xml_length(xml, a, "upperRightY", b->unit, &y1))
        return;
    include(&b->part, x0, y0);
    include(&b->part, x1, y1);
    b->part.area = fabs((x1 - x0) * (y1 - y0));
    b->part.inner = fmax(0.0, fmin(fmin(-b->part.x0, b->part.x1), fmin(-b->part.y0, b->part.y1)));
    b->has_part = 1;
}

static int plain(lstub__shape_builder *b, lstub__xml *xml, int element, const char **a)
{
    double narrow;
    switch (element) {
    case EL_CIRCLE:
        if (two(b, xml, a, "diameter", "diameter", 0.25 * LSTUB_PI))
            b->part.round = 1;
        return 1;
    case EL_RECT_CENTER: case EL_RECT_ROUND: case EL_RECT_CHAM:
        two(b, xml, a, "width", "height", 1.0);
        return 1;
    case EL_RECT_CORNER:
        corners(b, xml, a);
        return 1;
    case EL_OVAL:
        if (two(b, xml, a, "width", "height", 1.0)) {
            narrow = 2.0 * b->part.inner;
            b->part.area -= (1.0 - 0.25 * LSTUB_PI) * narrow * narrow;
        }
        return 1;
    case EL_ELLIPSE:
        two(b, xml, a, "width", "height", 0.25 * LSTUB_PI);
        return 1;
    case EL_DIAMOND:
        if (two(b, xml, a, "width", "height", 0.5) && b->part.area > 0.0)
            b->part.inner = b->part.area / hypot(b->part.x1 - b->part.x0, b->part.y1 - b->part.y0);
        return 1;
    case EL_HEXAGON: case EL_OCTAGON:      /* length: from corner to corner */
        if (two(b, xml, a, "length", "length", element == EL_HEXAGON ? 0.6495190528 : 0.7071067812))
            b->part.inner *= element == EL_HEXAGON ? 0.8660254038 : 0.9238795325;
        return 1;
    case EL_TRIANGLE:
        if (two(b, xml, a, "base", "height", 0.5))
            b->part.inner *= 0.5;
        return 1;
    case EL_BUTTERFLY:
        if (two(b, xml, a, lstub__xml_get(a, "side") ? "side" : "diameter", lstub__xml_get(a, "side") ? "side" : "diameter", 0.5))
            b->part.inner = 0.0;
        return 1;
    case EL_MOIRE:
        if (two(b, xml, a, "diameter", "diameter", 0.25 * LSTUB_PI))
            b->part.inner = 0.0;
        return 1;
    case EL_DONUT: case EL_THERMAL:
        open_middle(b, xml, a);
        return 1;
    default:
        return 0;
    }
}

/* ---- contours and lines ------------------------------------------------------------------------ */

static void chord(lstub__shape_builder *b, double x, double y)
{
    if ((b->py > 0.0) != (y > 0.0) && b->px + (0.0 - b->py) * (x - b->px) / (y - b->py) > 0.0)
        b->odd = !b->odd;
    b->ring_area += 0.5 * (b->px * y - x * b->py);
    b->px = x;
    b->py = y;
    include(&b->part, x, y);
}

static void edge(lstub__shape_builder *b, double x, double y)
{
    b->nearest = fmin(b->nearest, lstub__segment_distance(0.0, 0.0, b->px, b->py, x, y));
    chord(b, x, y);
}

static void curve(lstub__shape_builder *b, double x, double y, double cx, double cy, int clockwise)
{
    lstub__arc arc;
    lstub__arc_make(&arc, b->px, b->py, x, y, cx, cy, clockwise);
    int chords = lstub__arc_chords(&arc);
    b->nearest = fmin(b->nearest, lstub__arc_distance(&arc, 0.0, 0.0));
    for (int i = 1; i <= chords; i++) {
        double ax, ay;
        lstub__arc_point(&arc, i, chords, &ax, &ay);
        chord(b, ax, ay);
    }
    double step = arc.sweep / chords;      /* what lies between chord and arc */
    b->ring_area += 0.5 * arc.r * arc.r * chords * (step - sin(step));
}

static void ring_start(lstub__shape_builder *b, double x, double y)
{
    b->bx = b->px = x;
    b->by = b->py = y;
    b->odd = 0;
    b->nearest = INFINITY;
    b->ring_area = 0.0;
    b->has_ring = 1;
    include(&b->part, x, y);
}

static void ring_stop(lstub__shape_builder *b)
{
    if (!b->has_ring)
        return;
    edge(b, b->bx, b->by);
    b->has_ring = 0;
    b->has_part = 1;
    if (b->in_cutout) {
        b->part.area -= fabs(b->ring_area);
        b->filled = b->filled && !b->odd;
    } else {
        b->part.area += fabs(b->ring_area);
        b->filled = b->odd;
        b->part.inner = INFINITY;
    }
    if (b->nearest < b->part.inner)
        b->part.inner = b->nearest;
}

static int drawn(lstub__shape_builder *b, lstub__xml *xml, int element, const char **a)
{
    double x = 0.0, y = 0.0, cx = 0.0, cy = 0.0;
    switch (element) {
    case EL_POLY_BEGIN:
        if (lstub__xml_length(xml, a, "x", b->unit, &x) && lstub__xml_length(xml, a, "y", b->unit, &y))
            ring_start(b, x, y);
        return 1;
    case EL_POLY_SEGMENT:
        if (b->has_ring && lstub__xml_length(xml, a, "x", b->unit, &x) && lstub__xml_length(xml, a, "y", b->unit, &y))
            edge(b, x, y);
        return 1;
    case EL_POLY_CURVE:
        if (b->has_ring && lstub__xml_length(xml, a, "x", b->unit, &x) && lstub__xml_length(xml, a, "y", b->unit, &y)
            && lstub__xml_length(xml, a, "centerX", b->unit, &cx) && lstub__xml_length(xml, a, "centerY", b->unit, &cy))
            curve(b, x, y, cx, cy, !lstub__xml_is(a, "clockwise", "false"));
        return 1;
    case EL_LINE: case EL_ARC:             /* within a user shape: its extent alone */
        if (lstub__xml_length(xml, a, "startX", b->unit, &x) && lstub__xml_length(xml, a, "startY", b->unit, &y)
            && lstub__xml_length(xml, a, "endX", b->unit, &cx) && lstub__xml_length(xml, a, "endY", b->unit, &cy)) {
            include(&b->part, x, y);
            include(&b->part, cx, cy);
            b->has_part = 1;
        }
        return 1;
    case EL_LINE_DESC:
        lstub__xml_optional_length(xml, a, "lineWidth", b->unit, &b->width);
        return 1;
    case EL_CUTOUT:
        b->in_cutout = 1;
        return 1;
    case EL_CONTOUR: case EL_POLYGON: case EL_POLYLINE: case EL_OUTLINE: case EL_USER_SPECIAL:
    case EL_LINE_REF: case EL_FILL_REF: case EL_FILL_DESC:
        return 1;
    default:
        return 0;
    }
}

int lstub__shape_start(lstub__shape_builder *b, lstub__xml *xml, int element, const char **a)
{
    if (element == EL_XFORM)
        return b->open != 0 && (lstub__place_read(&b->place, xml, a, b->unit), 1);
    if (!plain(b, xml, element, a) && !drawn(b, xml, element, a))
        return 0;
    if (b->open == 0 && element != EL_USER_SPECIAL)
        b->open = element;
    return 1;
}

/* The open part, placed by its Xform, joins the sum. */
static void join(lstub__shape_builder *b)
{
    lstub__shape *p = &b->part, *s = &b->sum;
    if (b->has_part && p->round) {         /* a turn would only inflate its extent */
        double x, y, r = 0.5 * (p->x1 - p->x0) * b->place.scale;
        lstub__place_out(&b->place, 0.0, 0.0, &x, &y);
        s->round = s->x0 > s->x1;
        include(s, x - r, y - r);
        include(s, x + r, y + r);
    } else if (b->has_part) {
        double xs[2] = {p->x0 - 0.5 * b->width, p->x1 + 0.5 * b->width};
        double ys[2] = {p->y0 - 0.5 * b->width, p->y1 + 0.5 * b->width};
        for (int i = 0; i < 4; i++) {
            double x, y;
            lstub__place_out(&b->place, xs[i & 1], ys[i >> 1], &x, &y);
            include(s, x, y);
        }
        s->round = 0;
    }
    if (b->has_part) {
        s->area += p->area * b->place.scale * b->place.scale;
        s->inner = fmax(s->inner, (p->inner - hypot(b->place.dx, b->place.dy)) * b->place.scale);
    }
    b->part = EMPTY;
    b->has_part = b->has_ring = b->filled = b->open = 0;
    b->width = 0.0;
    lstub__place_init(&b->place);
}

void lstub__shape_end(lstub__shape_builder *b, int element)
{
    if (element == EL_CUTOUT || element == EL_POLYGON) {
        ring_stop(b);
        b->in_cutout = 0;
    }
    if (element == EL_POLYLINE && b->has_ring) {   /* a line fills nothing */
        b->has_ring = 0;
        b->has_part = 1;
        b->part.inner = 0.0;
    }
    if (element != b->open)
        return;
    if ((element == EL_CONTOUR || element == EL_POLYGON) && !b->filled)
        b->part.inner = 0.0;
    if (element == EL_OUTLINE)
        b->part.inner = 0.0;
    join(b);
}

int lstub__shape_take(lstub__shape_builder *b, lstub__shape *shape)
{
    if (!(b->sum.x0 <= b->sum.x1))
        return 0;
    *shape = b->sum;
    return 1;
}

int lstub__place_read(lstub__place *place, lstub__xml *xml, const char **a, double unit)
{
    double turn = 0.0;
    if (!lstub__xml_optional_length(xml, a, "xOffset", unit, &place->dx)
        || !lstub__xml_optional_length(xml, a, "yOffset", unit, &place->dy)
        || !lstub__xml_optional(xml, a, "rotation", &turn) || !lstub__xml_optional(xml, a, "scale", &place->scale))
        return 0;
    if (!(place->scale >= 1e-6 && place->scale <= 1e6)) {
        lstub__xml_fail(xml, LSTUB_E_FORMAT, "scale", "<Xform> scale = %g: must be >= 1e-6 and <= 1e6", place->scale);
        return 0;
    }
    place->mirror = lstub__xml_is(a, "mirror", "true");
    lstub__place_turn(place, turn);
    return 1;
}

double lstub__shape_diameter(const lstub__shape *shape)
{
    return shape->round ? shape->x1 - shape->x0 : 2.0 * sqrt(fmax(shape->area, 0.0) / LSTUB_PI);
}

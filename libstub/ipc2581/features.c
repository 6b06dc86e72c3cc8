/* Pass 2: the features of the copper layers, one by one, to touch.c. */
#include "ipc2581/touch.h"

#include <math.h>
#include <string.h>

enum { DRAW_NOTHING, DRAW_LINE, DRAW_RING, DRAW_CUTOUT };

typedef struct features {
    reader *r;
    touch   touch;
    int     in_step, in_layer;
    int     set_removes;
    int     thing;                 /* EL_PAD or EL_FEATURES while inside one, else 0 */
    lstub__place place;            /* of the pad or feature */
    const lstub__shape *shape;     /* referred to */
    lstub__shape_builder builder;  /* written out in place */
    int     building;              /* the element it began with, or 0 */
    int32_t padstack;
    int     pin, side;
    int     drawing;
    double  width;                 /* of the line; NaN: not given */
    int     fill;
} features;

/* ---- sets and pads ----------------------------------------------------------------------------- */

static void begin_layer(features *f, lstub__xml *xml, const char **a)
{
    int32_t number = lstub__names_find(&f->r->layers_named, lstub__xml_text(a, "layerRef"));
    f->touch.copper = number >= 0 ? LAYER(f->r, number)->copper : -1;
    f->in_layer = f->in_step && f->touch.copper >= 0;
    if (!f->in_layer)
        lstub__xml_skip(xml);
}

static void begin_set(features *f, const char **a)
{
    f->touch.net = lstub__names_find(&f->r->nets, lstub__xml_text(a, "net"));
    f->set_removes = COPPER(f->r, f->touch.copper)->negative != lstub__xml_is(a, "polarity", "NEGATIVE");
}

static void begin_thing(features *f, int element, const char **a)
{
    f->thing = element;
    lstub__place_init(&f->place);
    f->shape = NULL;
    f->pin = f->side = f->building = 0;
    f->drawing = DRAW_NOTHING;
    f->touch.removes = f->set_removes;
    f->padstack = element == EL_PAD ? lstub__names_find(&f->r->padstacks_named, lstub__xml_text(a, "padstackDefRef")) : -1;
}

static void pin_ref(features *f, const char **a)
{
    int32_t component = lstub__names_find(&f->r->components, lstub__xml_text(a, "componentRef"));
    f->pin = 1;
    if (component >= 0)
        f->side = *LSTUB__ITEM(f->r->component_sides, int32_t, component);
    else if (f->place.mirror)      /* drawn for the other side: all there is to go by */
        f->side = LSTUB_SIDE_BOTTOM;
}

static void end_pad(features *f)
{
    lstub__shape built;
    const lstub__shape *shape = f->shape;
    if (shape == NULL && lstub__shape_take(&f->builder, &built))
        shape = &built;
    if (shape == NULL && f->padstack >= 0)
        shape = lstub__defined_pad(f->r, f->padstack, f->r->copper_layer[f->touch.copper], f->touch.removes ? PAD_ANTIPAD : PAD_REGULAR);
    if (shape != NULL)
        lstub__touch_pad(&f->touch, shape, &f->place, f->pin, f->side);
}

const lstub__shape *lstub__defined_pad(reader *r, int32_t padstack, int32_t layer, int32_t use)
{
    int32_t at = LSTUB__ITEM(r->padstacks, reader_padstack, padstack)->pads;
    for (; at >= 0; at = LSTUB__ITEM(r->padstack_pads, reader_padstack_pad, at)->next) {
        const reader_padstack_pad *pad = LSTUB__ITEM(r->padstack_pads, reader_padstack_pad, at);
        if (pad->layer == layer && pad->use == use)
            return &pad->shape;
    }
    return NULL;
}

/* ---- lines and contours ------------------------------------------------------------------------ */

static int point(features *f, lstub__xml *xml, const char **a, const char *nx, const char *ny, double *x, double *y)
{
    double u = 0.0, v = 0.0;
    if (!lstub__xml_length(xml, a, nx, f->r->unit, &u) || !lstub__xml_length(xml, a, ny, f->r->unit, &v))
        return 0;
    lstub__place_out(&f->place, u, v, x, y);
    return 1;
}

static void begin_points(features *f, lstub__xml *xml, const char **a)
{
    double x, y;
    int above = lstub__xml_above(xml, 1), outline = lstub__xml_above(xml, 2) == EL_OUTLINE;
    if (!point(f, xml, a, "x", "y", &x, &y))
        return;
    f->drawing = above == EL_CUTOUT ? DRAW_CUTOUT : above == EL_POLYGON && !outline ? DRAW_RING : DRAW_LINE;
    if (f->drawing == DRAW_LINE) {
        f->width = NAN;
        lstub__touch_begin(&f->touch, x, y);
    } else {
        lstub__touch_begin_ring(&f->touch, x, y, f->drawing == DRAW_CUTOUT);
    }
}

static int clockwise(const features *f, const char **a)
{
    int turn = !lstub__xml_is(a, "clockwise", "false");
    return turn != f->place.mirror;
}

static void curve(features *f, lstub__xml *xml, const char **a)
{
    double x, y, cx, cy;
    if (point(f, xml, a, "x", "y", &x, &y) && point(f, xml, a, "centerX", "centerY", &cx, &cy))
        lstub__touch_arc(&f->touch, x, y, cx, cy, clockwise(f, a));
}

static void line_or_arc(features *f, lstub__xml *xml, int element, const char **a)
{
    double ax, ay, bx, by, cx, cy;
    if (!point(f, xml, a, "startX", "startY", &ax, &ay) || !point(f, xml, a, "endX", "endY", &bx, &by))
        return;
    f->drawing = DRAW_LINE;
    f->width = NAN;
    lstub__touch_begin(&f->touch, ax, ay);
    if (element == EL_LINE)
        lstub__touch_segment(&f->touch, bx, by);
    else if (point(f, xml, a, "centerX", "centerY", &cx, &cy))
        lstub__touch_arc(&f->touch, bx, by, cx, cy, clockwise(f, a));
}

static void line_ref(features *f, lstub__xml *xml, const char **a)
{
    int32_t number = lstub__names_find(&f->r->lines, lstub__xml_text(a, "id"));
    if (number >= 0)
        f->width = LSTUB__ITEM(f->r->line_widths, reader_width, number)->width;
    else
        lstub__note(&f->r->notices, LSTUB_NOTICE_WARNING, NOTE_DANGLING, 4, lstub__xml_line(xml),
                    "line description '%.60s' is not in the dictionary: its lines are taken to have no width", lstub__xml_text(a, "id"));
}

static void fill_ref(features *f, const char **a)
{
    int32_t number = lstub__names_find(&f->r->fills, lstub__xml_text(a, "id"));
    if (number >= 0)
        f->fill = *LSTUB__ITEM(f->r->fill_kinds, int, number);
}

static void end_line(features *f, lstub__xml *xml)
{
    if (f->drawing != DRAW_LINE)
        return;
    if (!(f->width >= 0.0)) {
        lstub__note(&f->r->notices, LSTUB_NOTICE_WARNING, NOTE_WIDTH, 0, lstub__xml_line(xml), "a line without a width: taken to have none");
        f->width = 0.0;
    }
    lstub__touch_line_end(&f->touch, f->width);
    f->drawing = DRAW_NOTHING;
}

static void end_contour(features *f)
{
    int removes = f->touch.removes;
    if (f->fill == FILL_VOID)
        f->touch.removes = !removes;
    lstub__touch_contour_end(&f->touch, f->fill == FILL_HOLLOW);
    f->touch.removes = removes;
}

/* ---- elements ---------------------------------------------------------------------------------- */

static void in_features(features *f, lstub__xml *xml, int element, const char **a)
{
    double x, y;
    if (f->building != 0) {
        lstub__shape_start(&f->builder, xml, element, a);
        return;
    }
    switch (element) {
    case EL_POLY_BEGIN:
        begin_points(f, xml, a);
        break;
    case EL_POLY_SEGMENT:
        if (f->drawing != DRAW_NOTHING && point(f, xml, a, "x", "y", &x, &y))
            lstub__touch_segment(&f->touch, x, y);
        break;
    case EL_POLY_CURVE:
        if (f->drawing != DRAW_NOTHING)
            curve(f, xml, a);
        break;
    case EL_LINE: case EL_ARC:
        line_or_arc(f, xml, element, a);
        break;
    case EL_LINE_REF:
        line_ref(f, xml, a);
        break;
    case EL_LINE_DESC:
        lstub__xml_optional_length(xml, a, "lineWidth", f->r->unit, &f->width);
        break;
    case EL_CONTOUR:
        f->fill = FILL_SOLID;
        break;
    case EL_FILL_REF:
        fill_ref(f, a);
        break;
    case EL_FILL_DESC:
        f->fill = lstub__fill_of(lstub__xml_text(a, "fillProperty"));
        break;
    case EL_XFORM:
        if (lstub__xml_above(xml, 1) != EL_FEATURES)
            lstub__note(&f->r->notices, LSTUB_NOTICE_WARNING, NOTE_SHAPE, 1, lstub__xml_line(xml),
                        "an Xform within a drawn shape: not applied");
        break;
    case EL_POLYGON:
        if (lstub__xml_above(xml, 1) != EL_CONTOUR)
            f->fill = FILL_SOLID;
        break;
    case EL_CUTOUT: case EL_POLYLINE: case EL_OUTLINE: case EL_USER_SPECIAL:
        break;
    default:
        lstub__shape_begin(&f->builder, f->r->unit);
        if (lstub__shape_start(&f->builder, xml, element, a))
            f->building = element;
        break;
    }
}

static void in_thing(features *f, lstub__xml *xml, int element, const char **a)
{
    int direct = lstub__xml_above(xml, 1) == f->thing;
    if (direct && element == EL_LOCATION) {
        if (lstub__xml_length(xml, a, "x", f->r->unit, &f->place.x))
            lstub__xml_length(xml, a, "y", f->r->unit, &f->place.y);
    } else if (direct && element == EL_XFORM) {
        lstub__place_read(&f->place, xml, a, f->r->unit);
    } else if (element == EL_STANDARD_REF || element == EL_USER_REF) {
        f->shape = lstub__find_shape(f->r, xml, element, a);
        if (f->shape == NULL)
            f->padstack = -1;      /* not another shape in its place */
        if (f->thing == EL_FEATURES && f->shape != NULL)
            lstub__touch_pad(&f->touch, f->shape, &f->place, 0, 0);
    } else if (element == EL_PIN_REF) {
        pin_ref(f, a);
    } else if (f->thing == EL_PAD) {
        lstub__shape_start(&f->builder, xml, element, a);
    } else {
        in_features(f, xml, element, a);
    }
}

static void on_start(lstub__xml *xml, int element, const char **a)
{
    features *f = xml->user;
    if (f->thing != 0) {
        in_thing(f, xml, element, a);
        return;
    }
    switch (element) {
    case EL_IPC_2581: case EL_ECAD: case EL_CAD_DATA:
        break;
    case EL_STEP:
        f->in_step = lstub__names_find(&f->r->steps, lstub__xml_text(a, "name")) == f->r->step;
        if (!f->in_step)
            lstub__xml_skip(xml);
        break;
    case EL_LAYER_FEATURE:
        begin_layer(f, xml, a);
        break;
    case EL_SET:
        if (f->in_layer)
            begin_set(f, a);
        break;
    case EL_PAD: case EL_FEATURES:
        if (!f->in_layer)
            break;
        begin_thing(f, element, a);
        lstub__shape_begin(&f->builder, f->r->unit);
        break;
    default:
        lstub__xml_skip(xml);
        break;
    }
}

static void on_end(lstub__xml *xml, int element)
{
    features *f = xml->user;
    lstub__shape shape;
    if (f->thing == EL_PAD && element != EL_PAD)
        lstub__shape_end(&f->builder, element);
    if (f->building != 0 && element == f->building) {
        lstub__shape_end(&f->builder, element);
        if (lstub__shape_take(&f->builder, &shape))
            lstub__touch_pad(&f->touch, &shape, &f->place, 0, 0);
        f->building = 0;
    }
    switch (element) {
    case EL_POLYLINE: case EL_LINE: case EL_ARC: case EL_OUTLINE:
        if (f->thing == EL_FEATURES)
            end_line(f, xml);
        break;
    case EL_POLYGON: case EL_CUTOUT:
        if (f->thing == EL_FEATURES && (f->drawing == DRAW_RING || f->drawing == DRAW_CUTOUT)) {
            lstub__touch_ring_end(&f->touch, f->drawing == DRAW_CUTOUT);
            f->drawing = DRAW_NOTHING;
            if (lstub__xml_above(xml, 1) != EL_CONTOUR)      /* a polygon of its own */
                end_contour(f);
        }
        break;
    case EL_CONTOUR:
        if (f->thing == EL_FEATURES)
            end_contour(f);
        break;
    case EL_PAD:
        if (f->thing == EL_PAD)
            end_pad(f);
        f->thing = 0;
        break;
    case EL_FEATURES:
        f->thing = 0;
        break;
    case EL_LAYER_FEATURE:
        f->in_layer = 0;
        break;
    case EL_STEP:
        f->in_step = 0;
        break;
    default:
        break;
    }
}

int32_t lstub__reader_features(reader *r, const char *path)
{
    lstub__xml xml = {0};
    features f = {0};
    int32_t status = lstub__touch_create(&f.touch, r);
    if (status < 0)
        return status;
    f.r = r;
    f.touch.xml = &xml;
    xml.start = on_start;
    xml.end = on_end;
    xml.user = &f;
    xml.err = r->err;
    xml.progress = r->options->progress;
    xml.progress_user = r->options->progress_user;
    xml.progress_from = 0.5;
    xml.progress_to = 1.0;
    status = lstub__xml_read(&xml, path);
    if (status == LSTUB_OK && (xml.crc != r->board->source_crc || xml.bytes != r->board->source_bytes))
        status = lstub__fail(r->err, LSTUB_E_READ, "path", -1, "the file has changed while it was read");
    lstub__touch_destroy(&f.touch);
    return status;
}

#include "via/via.h"

#include <string.h>

#include <math.h>

static const lstub__range DIAMETER = {0.0, 0.01, 1, "m"};
static const lstub__range SIZE_OR_NONE = {0.0, 0.1, 0, "m"};
static const lstub__range DISTANCE = {0.0, 1.0, 1, "m"};

/* ---- what lies on a layer ---------------------------------------------------------------------- */

static const lstub_on_layer *entry(const lstub_on_layer *list, size_t count, int32_t layer)
{
    for (size_t i = 0; i < count; i++)
        if (list[i].layer == layer)
            return &list[i];
    return NULL;
}

int lstub__via_connects(const lstub__via *via, int32_t layer)
{
    for (size_t i = 0; i < via->in.connect_count; i++)
        if (via->in.connects[i] == layer)
            return 1;
    return 0;
}

double lstub__via_pad(const lstub__via *via, int32_t layer)
{
    const lstub_on_layer *own = entry(via->in.pads, via->in.pad_count, layer);
    if (own != NULL)
        return own->value;
    if (layer == via->in.start_layer)
        return via->in.pad_start;
    if (layer == via->in.end_layer)
        return via->in.pad_end;
    if (via->in.nonfunctional_pads == LSTUB_PADS_KEPT || lstub__via_connects(via, layer))
        return via->in.pad_inner;
    return 0.0;
}

double lstub__via_antipad(const lstub__via *via, int32_t layer)
{
    int32_t kind = via->stackup->layer[layer].kind;
    if (kind == LSTUB_LAYER_SIGNAL)
        return 0.0;
    const lstub_on_layer *own = entry(via->in.antipads, via->in.antipad_count, layer);
    if (own != NULL)
        return own->value;
    return lstub__via_connects(via, layer) ? 0.0 : via->in.antipad;
}

double lstub__via_clear(const lstub__via *via, int32_t layer)
{
    const lstub_on_layer *own = entry(via->in.clear, via->in.clear_count, layer);
    double antipad = lstub__via_antipad(via, layer);
    double clear = own != NULL ? own->value : -1.0;
    if (antipad > 0.0 && (clear < 0.0 || antipad < clear))
        clear = antipad;
    return clear;
}

/* ---- checks ------------------------------------------------------------------------------------ */

static int32_t check_list(const lstub__via *via, const lstub_on_layer *list, size_t count, const char *field, lstub_error *err)
{
    if (count > 0 && list == NULL)
        return lstub__fail(err, LSTUB_E_NULL, field, -1, "%s = null: must point to %lu entries", field, (unsigned long)count);
    for (size_t i = 0; i < count; i++) {
        int32_t status = lstub__layer_index(via->stackup, list[i].layer, 1, field, err);
        if (status == LSTUB_OK && list[i].reserved != 0)
            status = lstub__fail(err, LSTUB_E_SIZE, "reserved", -1, "reserved = %ld: must be 0", (long)list[i].reserved);
        if (status == LSTUB_OK)
            status = lstub__check(list[i].value, &SIZE_OR_NONE, field, err);
        if (status == LSTUB_OK && entry(list, i, list[i].layer) != NULL)
            status = lstub__fail(err, LSTUB_E_ARGUMENT, field, -1, "%s: listed twice",
                                 lstub__layer_label(via->stackup, list[i].layer).text);
        if (status < 0) {
            lstub__fail_where(err, (int64_t)i, "%s[%lu]", field, (unsigned long)i);
            return status;
        }
    }
    return LSTUB_OK;
}

int32_t lstub__via_counts(const lstub_via *in, lstub_error *err)
{
    const struct { size_t count, most; const char *field; } list[] = {
        {in->pad_count, LSTUB_LAYERS_MAX, "pad_count"},         {in->antipad_count, LSTUB_LAYERS_MAX, "antipad_count"},
        {in->clear_count, LSTUB_LAYERS_MAX, "clear_count"},     {in->connect_count, LSTUB_LAYERS_MAX, "connect_count"},
        {in->backdrill_count, 2, "backdrill_count"}, {in->partner_backdrill_count, 2, "partner_backdrill_count"},      {in->return_count < 0 ? 0 : (size_t)in->return_count, 1000, "return_count"}};
    for (size_t i = 0; i < sizeof list / sizeof list[0]; i++)
        if (list[i].count > list[i].most)
            return lstub__fail(err, LSTUB_E_ARGUMENT, list[i].field, -1, "%s = %lu: must be <= %lu", list[i].field,
                               (unsigned long)list[i].count, (unsigned long)list[i].most);
    return LSTUB_OK;
}

static int32_t take_span(lstub__via *via, lstub_error *err)
{
    lstub_via *in = &via->in;
    int32_t status;
    if (in->start_layer == 0 && in->end_layer == 0) {
        in->start_layer = via->stackup->first_copper;
        in->end_layer = via->stackup->last_copper;
    }
    if ((status = lstub__layer_index(via->stackup, in->start_layer, 1, "start_layer", err)) < 0
        || (status = lstub__layer_index(via->stackup, in->end_layer, 1, "end_layer", err)) < 0)
        return status;
    if (in->start_layer >= in->end_layer)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "end_layer", -1, "end_layer: %s: must be below start_layer, %s",
                           lstub__layer_label(via->stackup, in->end_layer).text, lstub__layer_label(via->stackup, in->start_layer).text);
    return LSTUB_OK;
}

static int32_t take_connects(lstub__via *via, lstub_error *err)
{
    const lstub_via *in = &via->in;
    if (in->connect_count < 1 || in->connects == NULL)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "connects", -1, "connects: %lu layers: must name one or more",
                           in->connects == NULL ? 0ul : (unsigned long)in->connect_count);
    via->first = LSTUB_LAYERS_MAX;
    via->last = -1;
    for (size_t i = 0; i < in->connect_count; i++) {
        int32_t layer = in->connects[i], status = lstub__layer_index(via->stackup, layer, 1, "connects", err);
        if (status < 0) {
            lstub__fail_where(err, (int64_t)i, "connects[%lu]", (unsigned long)i);
            return status;
        }
        if (layer < in->start_layer || layer > in->end_layer)
            return lstub__fail(err, LSTUB_E_GEOMETRY, "connects", (int64_t)i,
                               "connects[%lu]: %s: outside the span, %s to %s", (unsigned long)i,
                               lstub__layer_label(via->stackup, layer).text, lstub__layer_label(via->stackup, in->start_layer).text,
                               lstub__layer_label(via->stackup, in->end_layer).text);
        for (size_t j = 0; j < i; j++)
            if (in->connects[j] == layer)
                return lstub__fail(err, LSTUB_E_ARGUMENT, "connects", (int64_t)i, "connects[%lu]: %s: listed twice",
                                   (unsigned long)i, lstub__layer_label(via->stackup, layer).text);
        if (layer < via->first)
            via->first = layer;
        if (layer > via->last)
            via->last = layer;
    }
    return LSTUB_OK;
}

static int32_t check_pad_default(double pad, double drill, const char *field, lstub_error *err)
{
    int32_t status = lstub__check(pad, &SIZE_OR_NONE, field, err);
    if (status == LSTUB_OK && pad > 0.0 && pad < drill)
        status = lstub__fail(err, LSTUB_E_GEOMETRY, field, -1, "%s = %.9g m: must be 0 or >= drill = %.9g m", field, pad, drill);
    return status;
}

/* Whether a return via's axis lies in the opening of a plane that it should join. */
static int in_opening(const lstub_via *in, double antipad, double x, double y)
{
    double r = 0.5 * antipad;
    if (hypot(x, y) < r || (in->pair_kind != LSTUB_PAIR_NONE && hypot(x - in->pair_pitch, y) < r))
        return 1;
    return in->pair_kind == LSTUB_PAIR_SHARED && x > 0.0 && x < in->pair_pitch && fabs(y) < r;
}

static int32_t check_openings(const lstub__via *via, int32_t layer, double antipad, lstub_error *err)
{
    const lstub_via *in = &via->in;
    const char *name = via->stackup->layer[layer].name;
    if (in->return_kind != LSTUB_RETURN_VIAS)
        return LSTUB_OK;
    if (in->return_xy == NULL)
        return in->return_distance >= 0.5 * antipad ? LSTUB_OK
               : lstub__fail(err, LSTUB_E_GEOMETRY, "return_distance", layer, "layer %ld '%s': return_distance = %.9g m: the return vias lie inside "
                             "the antipad of %.9g m", (long)layer, name, in->return_distance, antipad);
    for (int32_t i = 0; i < in->return_count; i++) {
        double x = in->return_xy[2 * i], y = in->return_xy[2 * i + 1];
        if (in->return_spans != NULL && (layer < in->return_spans[2 * i] || layer > in->return_spans[2 * i + 1]))
            continue;
        if (in_opening(in, antipad, x, y))
            return lstub__fail(err, LSTUB_E_GEOMETRY, "return_xy", i, "layer %ld '%s': return_xy[%ld] = %.9g, %.9g m: inside the antipad of %.9g m",
                               (long)layer, name, (long)i, x, y, antipad);
    }
    return LSTUB_OK;
}

static int32_t check_layer(const lstub__via *via, int32_t layer, lstub_error *err)
{
    double pad = lstub__via_pad(via, layer), antipad = lstub__via_antipad(via, layer), drill = via->in.drill;
    const char *name = via->stackup->layer[layer].name;
    if (pad > 0.0 && pad < drill)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "pads", layer, "layer %ld '%s': pad = %.9g m: must be 0 or >= drill = %.9g m",
                           (long)layer, name, pad, drill);
    if (via->stackup->layer[layer].kind == LSTUB_LAYER_PLANE && antipad == 0.0 && !lstub__via_connects(via, layer)
        && entry(via->in.antipads, via->in.antipad_count, layer) == NULL)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "antipad", layer, "layer %ld '%s': antipad = 0 m: a plane that does not "
                           "connect needs one (an entry of 0 in antipads says that there is no plane)", (long)layer, name);
    if (antipad > 0.0 && antipad <= drill)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "antipad", layer, "layer %ld '%s': antipad = %.9g m: must be > drill = %.9g m",
                           (long)layer, name, antipad, drill);
    if (antipad > 0.0 && antipad <= pad)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "antipad", layer, "layer %ld '%s': antipad = %.9g m: must be > pad = %.9g m",
                           (long)layer, name, antipad, pad);
    if (via->in.return_kind == LSTUB_RETURN_WALL && (2.0 * via->in.return_distance < antipad || 2.0 * via->in.return_distance <= pad))
        return lstub__fail(err, LSTUB_E_GEOMETRY, "return_distance", layer, "layer %ld '%s': return_distance = %.9g m: the wall "
                           "lies inside the %s of %.9g m", (long)layer, name, via->in.return_distance, antipad > pad ? "antipad" : "pad",
                           fmax(antipad, pad));
    if (via->in.pair_kind != LSTUB_PAIR_NONE && pad >= via->in.pair_pitch)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "pair_pitch", layer, "layer %ld '%s': pair_pitch = %.9g m: the pads of %.9g m "
                           "touch", (long)layer, name, via->in.pair_pitch, pad);
    if (via->in.pair_kind == LSTUB_PAIR_SEPARATE && antipad >= via->in.pair_pitch)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "pair_pitch", layer, "layer %ld '%s': pair_pitch = %.9g m: antipads of %.9g m "
                           "overlap; LSTUB_PAIR_SHARED is for that", (long)layer, name, via->in.pair_pitch, antipad);
    for (int i = 0; i < 4 && via->in.edges[0] > 0.0; i++) {
        double reach = 0.5 * fmax(antipad, pad) + (i == 1 && via->in.pair_kind != LSTUB_PAIR_NONE ? via->in.pair_pitch : 0.0);
        if (reach >= via->in.edges[i])
            return lstub__fail(err, LSTUB_E_GEOMETRY, "edges", i, "layer %ld '%s': edges[%d] = %.9g m: must be > %.9g m, where the antipad or pad ends",
                               (long)layer, name, i, via->in.edges[i], reach);
    }
    return antipad > 0.0 ? check_openings(via, layer, antipad, err) : LSTUB_OK;
}

/* Return vias at given places touch neither the barrel nor each other. */
static int32_t check_places(const lstub_via *in, lstub_error *err)
{
    for (int32_t i = 0; i < in->return_count; i++) {
        double x = in->return_xy[2 * i], y = in->return_xy[2 * i + 1];
        if (!(fabs(x) <= 1.0 && fabs(y) <= 1.0))
            return lstub__fail(err, LSTUB_E_ARGUMENT, "return_xy", i, "return_xy[%ld] = %.9g, %.9g m: must be >= -1 and <= 1 m", (long)i, x, y);
        if (hypot(x, y) <= 0.5 * (in->drill + in->return_drill))
            return lstub__fail(err, LSTUB_E_GEOMETRY, "return_xy", i, "return_xy[%ld] = %.9g, %.9g m: touches the barrel of %.9g m",
                               (long)i, x, y, in->drill);
        for (int32_t j = 0; j < i; j++)
            if (hypot(x - in->return_xy[2 * j], y - in->return_xy[2 * j + 1]) <= in->return_drill)
                return lstub__fail(err, LSTUB_E_GEOMETRY, "return_xy", i, "return_xy[%ld] = %.9g, %.9g m: touches return via %ld",
                                   (long)i, x, y, (long)j);
    }
    return LSTUB_OK;
}

/* Their mean distance, as the closed forms count it: the geometric mean. */
static double mean_distance(const lstub_via *in)
{
    double sum = 0.0;
    for (int32_t i = 0; i < in->return_count; i++)
        sum += log(hypot(in->return_xy[2 * i], in->return_xy[2 * i + 1]));
    return exp(sum / in->return_count);
}

static int32_t take_returns(lstub__via *via, lstub_error *err)
{
    lstub_via *in = &via->in;
    int32_t status;
    double unused;
    if (in->return_kind < LSTUB_RETURN_NONE || in->return_kind > LSTUB_RETURN_WALL)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "return_kind", -1, "return_kind = %ld: must be one of LSTUB_RETURN_...",
                           (long)in->return_kind);
    if (in->return_drill == 0.0)
        in->return_drill = in->drill;
    if (in->return_xy != NULL && in->return_kind != LSTUB_RETURN_VIAS)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "return_xy", -1, "return_xy: must be null without LSTUB_RETURN_VIAS");
    if (in->return_xy != NULL) {
        lstub__range drill = {0.0, 0.01, 1, "m"};
        if ((status = lstub__check(in->return_drill, &drill, "return_drill", err)) < 0)
            return status;
        if (in->return_count < 1 || in->return_count > 1000)
            return lstub__fail(err, LSTUB_E_ARGUMENT, "return_count", -1, "return_count = %ld: must be >= 1 and <= 1000", (long)in->return_count);
        if ((status = check_places(in, err)) < 0)
            return status;
        in->return_distance = mean_distance(in);
        return LSTUB_OK;
    }
    if (in->return_kind != LSTUB_RETURN_NONE && (status = lstub__check(in->return_distance, &DISTANCE, "return_distance", err)) < 0)
        return status;
    if (in->return_kind == LSTUB_RETURN_WALL && in->return_distance <= 0.5 * in->drill)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "return_distance", -1, "return_distance = %.9g m: the wall lies inside the "
                           "barrel of %.9g m", in->return_distance, in->drill);
    if (in->return_kind != LSTUB_RETURN_VIAS)
        return LSTUB_OK;
    status = lstub_return_inductance(in->drill, in->return_count, in->return_distance, in->return_drill, &unused, err);
    if (status < 0)
        lstub__fail_where(err, -1, "returns");
    return status;
}

static int32_t take_surroundings(lstub_via *in, lstub_error *err)
{
    static const lstub__range DK = {1.0, 1000.0, 0, ""};
    int32_t status;
    if (in->outside_dk == 0.0)
        in->outside_dk = 1.0;
    if (in->hole_dk == 0.0)
        in->hole_dk = 1.0;
    if ((status = lstub__check(in->outside_dk, &DK, "outside_dk", err)) < 0 || (status = lstub__check(in->hole_dk, &DK, "hole_dk", err)) < 0)
        return status;
    return lstub__check(in->lid_distance, &SIZE_OR_NONE, "lid_distance", err);
}

static int32_t check_pair(const lstub_via *in, lstub_error *err)
{
    if (in->pair_kind < LSTUB_PAIR_NONE || in->pair_kind > LSTUB_PAIR_SHARED)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "pair_kind", -1, "pair_kind = %ld: must be one of LSTUB_PAIR_...", (long)in->pair_kind);
    if (in->pair_kind == LSTUB_PAIR_NONE)
        return LSTUB_OK;
    int32_t status = lstub__check(in->pair_pitch, &DISTANCE, "pair_pitch", err);
    if (status == LSTUB_OK && in->pair_pitch <= in->drill)
        status = lstub__fail(err, LSTUB_E_GEOMETRY, "pair_pitch", -1, "pair_pitch = %.9g m: must be > drill = %.9g m",
                             in->pair_pitch, in->drill);
    return status;
}

static int32_t check_pin(const lstub_via *in, lstub_error *err)
{
    if (in->pin_side != 0 && in->pin_side != LSTUB_SIDE_TOP && in->pin_side != LSTUB_SIDE_BOTTOM)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "pin_side", -1, "pin_side = %ld: must be 0, LSTUB_SIDE_TOP or LSTUB_SIDE_BOTTOM",
                           (long)in->pin_side);
    return in->pin_side == 0 ? LSTUB_OK : lstub__check(in->pin_length, &SIZE_OR_NONE, "pin_length", err);
}

/* One back-drill: the barrel then ends at its tip, which must lie beyond the layers that connect. */
static int32_t cut(const lstub__via *via, lstub__ends *ends, const lstub_backdrill *drill, lstub_error *err)
{
    static const lstub__range DEPTH = {0.0, 0.1, 1, "m"};
    const lstub_stackup *s = via->stackup;
    int at_top = drill->side == LSTUB_SIDE_TOP;
    int32_t status, outer = at_top ? s->first_copper : s->last_copper;
    lstub__range bit = {via->in.drill, 0.01, 0, "m"};
    if (!at_top && drill->side != LSTUB_SIDE_BOTTOM)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "side", -1, "side = %ld: must be LSTUB_SIDE_TOP or LSTUB_SIDE_BOTTOM", (long)drill->side);
    if (drill->reserved != 0)
        return lstub__fail(err, LSTUB_E_SIZE, "reserved", -1, "reserved = %ld: must be 0", (long)drill->reserved);
    if ((status = lstub__check(drill->depth, &DEPTH, "depth", err)) < 0 || (status = lstub__check(drill->diameter, &bit, "diameter", err)) < 0)
        return status;
    if (at_top ? ends->top_drilled : ends->bottom_drilled)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "side", -1, "side = %ld: drilled twice", (long)drill->side);
    if ((at_top ? via->in.start_layer : via->in.end_layer) != outer)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "side", -1, "side = %ld: the barrel does not reach that surface", (long)drill->side);
    double tip = at_top ? s->layer[outer].top + drill->depth : s->layer[outer].bottom - drill->depth;
    double stop = at_top ? s->layer[via->first].top : s->layer[via->last].bottom;
    if (at_top ? tip > stop + LSTUB__SLACK : tip < stop - LSTUB__SLACK)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "depth", -1, "depth = %.9g m: cuts layer %ld '%s', %.9g m deep from that side",
                           drill->depth, (long)(at_top ? via->first : via->last), s->layer[at_top ? via->first : via->last].name,
                           fabs(stop - (at_top ? s->layer[outer].top : s->layer[outer].bottom)));
    if (at_top) {
        ends->top = tip;
        ends->top_drilled = 1;
    } else {
        ends->bottom = tip;
        ends->bottom_drilled = 1;
    }
    return LSTUB_OK;
}

static int32_t cut_all(const lstub__via *via, lstub__ends *ends, const lstub_backdrill *drills, size_t count, const char *field,
                       lstub_error *err)
{
    ends->top = via->stackup->layer[via->in.start_layer].top;
    ends->bottom = via->stackup->layer[via->in.end_layer].bottom;
    ends->top_drilled = ends->bottom_drilled = 0;
    if (count > 0 && drills == NULL)
        return lstub__fail(err, LSTUB_E_NULL, field, -1, "%s = null: must point to %lu entries", field, (unsigned long)count);
    for (size_t i = 0; i < count; i++) {
        int32_t status = cut(via, ends, &drills[i], err);
        if (status < 0) {
            lstub__fail_where(err, (int64_t)i, "%s[%lu]", field, (unsigned long)i);
            return status;
        }
    }
    return LSTUB_OK;
}

static int32_t take_backdrills(lstub__via *via, lstub_error *err)
{
    const lstub_via *in = &via->in;
    int32_t status = cut_all(via, &via->ends, in->backdrills, in->backdrill_count, "backdrills", err);
    via->partner = via->ends;
    via->unequal = 0;
    if (status < 0)
        return status;
    if (in->partner_own != 0 && in->partner_own != 1)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "partner_own", -1, "partner_own = %ld: must be 0 or 1", (long)in->partner_own);
    if (in->partner_own == 0 && in->partner_backdrill_count > 0)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "partner_backdrill_count", -1, "partner_backdrill_count = %lu: must be 0 without partner_own",
                           (unsigned long)in->partner_backdrill_count);
    if (in->partner_own == 0)
        return LSTUB_OK;
    if (in->pair_kind == LSTUB_PAIR_NONE)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "partner_own", -1, "partner_own = 1: must be 0 without a pair");
    status = cut_all(via, &via->partner, in->partner_backdrills, in->partner_backdrill_count, "partner_backdrills", err);
    via->unequal = memcmp(&via->ends, &via->partner, sizeof via->ends) != 0;
    return status;
}

/* Which layers each return via joins. */
static int32_t check_spans(const lstub__via *via, lstub_error *err)
{
    const lstub_via *in = &via->in;
    if (in->return_spans == NULL)
        return LSTUB_OK;
    if (in->return_xy == NULL)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "return_spans", -1, "return_spans: must be null without return_xy");
    for (int32_t i = 0; i < 2 * in->return_count; i++) {
        int32_t layer = in->return_spans[i];
        if (layer < 0 || layer >= via->stackup->count || !lstub__is_copper(via->stackup->layer[layer].kind))
            return lstub__fail(err, LSTUB_E_ARGUMENT, "return_spans", i / 2, "return_spans[%ld] = %ld: must be the index of a copper layer, 0 to %ld",
                               (long)i, (long)layer, (long)via->stackup->count - 1);
        if (i % 2 == 1 && layer <= in->return_spans[i - 1])
            return lstub__fail(err, LSTUB_E_GEOMETRY, "return_spans", i / 2, "return_spans[%ld] = %ld: must be below the first layer, %ld",
                               (long)i, (long)layer, (long)in->return_spans[i - 1]);
    }
    return LSTUB_OK;
}

/* Whether a return via, or the mirror image that a pair adds, lies beyond an edge. */
static int beyond(const lstub_via *in, double x, double y)
{
    double r = 0.5 * in->return_drill, least = x, most = x;
    if (in->pair_kind != LSTUB_PAIR_NONE) {
        least = fmin(x, in->pair_pitch - x);
        most = fmax(x, in->pair_pitch - x);
    }
    return least - r <= -in->edges[0] || most + r >= in->edges[1] || y - r <= -in->edges[2] || y + r >= in->edges[3];
}

static int32_t check_edges(const lstub_via *in, lstub_error *err)
{
    int given = 0;
    if (in->edge_kind != LSTUB_EDGE_OPEN && in->edge_kind != LSTUB_EDGE_SHORTED)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "edge_kind", -1, "edge_kind = %ld: must be one of LSTUB_EDGE_...", (long)in->edge_kind);
    for (int i = 0; i < 4; i++)
        given += in->edges[i] != 0.0;
    for (int i = 0; i < 4 && given > 0; i++) {
        lstub__range range = {0.5 * in->drill, 1.0, 1, "m"};
        int32_t status = lstub__check(in->edges[i], &range, "edges", err);
        if (status < 0) {
            lstub__fail_where(err, i, "edges[%d]", i);
            return status;
        }
    }
    if (given > 0 && in->return_kind == LSTUB_RETURN_WALL)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "edges", -1, "edges: must be 0 with a closed wall around the barrel");
    for (int32_t i = 0; given > 0 && in->return_xy != NULL && i < in->return_count; i++)
        if (beyond(in, in->return_xy[2 * i], in->return_xy[2 * i + 1]))
            return lstub__fail(err, LSTUB_E_GEOMETRY, "return_xy", i, "return_xy[%ld] = %.9g, %.9g m: beyond the edges of the planes%s", (long)i,
                               in->return_xy[2 * i], in->return_xy[2 * i + 1], in->pair_kind != LSTUB_PAIR_NONE ? ", it or its mirror image" : "");
    for (int i = 0; given > 0 && in->return_kind == LSTUB_RETURN_VIAS && in->return_xy == NULL && i < 4; i++)
        if (in->return_distance + 0.5 * in->return_drill + (i == 1 && in->pair_kind != LSTUB_PAIR_NONE ? in->pair_pitch : 0.0) >= in->edges[i])
            return lstub__fail(err, LSTUB_E_GEOMETRY, "return_distance", i, "return_distance = %.9g m: the return vias lie beyond edges[%d] = %.9g m",
                               in->return_distance, i, in->edges[i]);
    if (given > 0 && in->pair_kind != LSTUB_PAIR_NONE && in->pair_pitch + 0.5 * in->drill >= in->edges[1])
        return lstub__fail(err, LSTUB_E_GEOMETRY, "edges", 1, "edges[1] = %.9g m: must be > pair_pitch = %.9g m and the partner's radius", in->edges[1],
                           in->pair_pitch);
    return LSTUB_OK;
}

int32_t lstub__via_take(lstub__via *via, const lstub_stackup *stackup, const lstub_via *theirs, lstub_error *err)
{
    lstub_via *in = &via->in;
    int32_t status;
    if (lstub__need(stackup, "stackup", err) < 0)
        return LSTUB_E_NULL;
    via->stackup = stackup;
    if ((status = lstub__take(in, sizeof *in, theirs, sizeof *in, "via", err)) < 0)
        return status;
    if (in->reserved != 0)
        return lstub__fail(err, LSTUB_E_SIZE, "reserved", -1, "reserved = %ld: must be 0", (long)in->reserved);
    if (in->nonfunctional_pads != LSTUB_PADS_REMOVED && in->nonfunctional_pads != LSTUB_PADS_KEPT)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "nonfunctional_pads", -1, "nonfunctional_pads = %ld: must be one of LSTUB_PADS_...",
                           (long)in->nonfunctional_pads);
    if ((status = lstub__via_counts(in, err)) < 0
        || (status = lstub__check(in->drill, &DIAMETER, "drill", err)) < 0
        || (status = check_pad_default(in->pad_start, in->drill, "pad_start", err)) < 0
        || (status = check_pad_default(in->pad_inner, in->drill, "pad_inner", err)) < 0
        || (status = check_pad_default(in->pad_end, in->drill, "pad_end", err)) < 0
        || (status = lstub__check(in->antipad, &SIZE_OR_NONE, "antipad", err)) < 0
        || (status = take_span(via, err)) < 0
        || (status = take_connects(via, err)) < 0
        || (status = check_list(via, in->pads, in->pad_count, "pads", err)) < 0
        || (status = check_list(via, in->antipads, in->antipad_count, "antipads", err)) < 0
        || (status = check_list(via, in->clear, in->clear_count, "clear", err)) < 0
        || (status = take_returns(via, err)) < 0
        || (status = check_spans(via, err)) < 0
        || (status = check_pair(in, err)) < 0
        || (status = check_edges(in, err)) < 0
        || (status = check_pin(in, err)) < 0
        || (status = take_surroundings(in, err)) < 0)
        return status;
    for (int32_t i = in->start_layer; i <= in->end_layer; i++)
        if (lstub__is_copper(stackup->layer[i].kind) && (status = check_layer(via, i, err)) < 0)
            return status;
    return take_backdrills(via, err);
}

/* ---- stubs ------------------------------------------------------------------------------------- */

int lstub__via_stub(const lstub__via *via, int32_t side, lstub_stub *stub)
{
    const lstub_stackup *s = via->stackup;
    int at_top = side == LSTUB_SIDE_TOP;
    lstub_interval interval;
    LSTUB_INIT(*stub);
    stub->side = side;
    stub->exit_layer = at_top ? via->first : via->last;
    stub->end_layer = at_top ? (via->ends.top_drilled ? -1 : via->in.start_layer) : (via->ends.bottom_drilled ? -1 : via->in.end_layer);
    stub->top = at_top ? via->ends.top : s->layer[stub->exit_layer].bottom;
    stub->bottom = at_top ? s->layer[stub->exit_layer].top : via->ends.bottom;
    stub->length = stub->bottom - stub->top;
    if (stub->exit_layer == stub->end_layer || stub->length <= LSTUB__SLACK)
        return 0;
    /* A drilled end is placed from the surface: whatever the layers up to there do moves it. */
    double outer = at_top ? s->layer[via->in.start_layer].top : s->layer[via->in.end_layer].bottom;
    LSTUB_INIT(interval);
    lstub_stackup_interval(s, at_top ? outer : stub->top, at_top ? stub->bottom : outer, &interval, NULL);
    stub->length_min = stub->length - interval.tol_minus;
    stub->length_max = stub->length + interval.tol_plus;
    stub->length_rss_min = stub->length - interval.tol_rss_minus;
    stub->length_rss_max = stub->length + interval.tol_rss_plus;
    return 1;
}

int32_t lstub_via_check(const lstub_stackup *stackup, const lstub_via *via, lstub_error *err)
{
    lstub__via ours;
    return lstub__via_take(&ours, stackup, via, err);
}

int32_t lstub_via_stubs(const lstub_stackup *stackup, const lstub_via *via, lstub_stub *stubs, size_t stride, int32_t *count,
                        lstub_error *err)
{
    lstub__via ours;
    lstub_stub found[2];
    int32_t n = 0, status = lstub__via_take(&ours, stackup, via, err);
    if (status < 0)
        return status;
    if (lstub__need(stubs, "stubs", err) < 0 || lstub__need(count, "count", err) < 0)
        return LSTUB_E_NULL;
    if ((status = lstub__stride(stride, sizeof *stubs, "stubs", err)) < 0)
        return status;
    n += lstub__via_stub(&ours, LSTUB_SIDE_TOP, &found[n]);
    n += lstub__via_stub(&ours, LSTUB_SIDE_BOTTOM, &found[n]);
    for (int32_t i = 0; i < n; i++)
        if ((status = lstub__fits((char *)stubs + (size_t)i * stride, sizeof found[i], "stubs", err)) < 0)
            return status;
    for (int32_t i = 0; i < n; i++)
        lstub__give(&found[i], sizeof found[i], (char *)stubs + (size_t)i * stride, sizeof found[i], "stubs", NULL);
    *count = n;
    return LSTUB_OK;
}
